#!/usr/bin/env python3
"""Contraction paths of NumPy's einsum_path, priced as this project prices plans.

Writes ../data/order_paths.json: networks (sizes, labels of each tensor, open labels) with the
multiply-adds of NumPy's paths `greedy` and, for at most 7 tensors, `optimal`. With --check it
makes everything again and compares with the recorded file. A step costs the product of the
sizes of all labels on its two tensors, after labels that no other tensor holds are summed.
"""

import json
import pathlib
import sys

import numpy as np

RECORD = pathlib.Path(__file__).resolve().parent.parent / "data" / "order_paths.json"
HUGE = 2**62


def lattice(rows, columns, periodic):
    edges = []
    for r in range(rows):
        for c in range(columns):
            if c + 1 < columns or (periodic and columns > 2):
                edges.append((r * columns + c, r * columns + (c + 1) % columns))
            if r + 1 < rows or (periodic and rows > 2):
                edges.append((r * columns + c, (r + 1) % rows * columns + c))
    return rows * columns, edges


def regular(n, rng):
    while True:
        stubs = np.repeat(np.arange(n), 3)
        rng.shuffle(stubs)
        pairs = {tuple(sorted(map(int, p))) for p in stubs.reshape(-1, 2)}
        if len(pairs) == 3 * n // 2 and all(a != b for a, b in pairs):
            return n, sorted(pairs)


def bonds(n, edges, sizes):
    tensors = [[] for _ in range(n)]
    for label, (a, b) in enumerate(edges):
        tensors[a].append(label)
        tensors[b].append(label)
    return {"sizes": sizes, "tensors": tensors, "open": []}


def random_network(n, rng):
    """A tree with further labels on two or three tensors (or twice on one), some of them open."""
    sizes, tensors, opened = [], [[] for _ in range(n)], []

    def label(held, stays):
        for t in held:
            tensors[t].append(len(sizes))
        if stays:
            opened.append(len(sizes))
        sizes.append(int(rng.integers(1, 7)))

    for t in range(1, n):
        label([t, int(rng.integers(t))], False)
    for _ in range(int(rng.integers(1, n + 2))):
        held = 3 if rng.random() < 0.2 else 2
        label([int(t) for t in rng.integers(n, size=held)], rng.random() < 0.2)
    for t in range(n):
        if len(sizes) < 50 and rng.random() < 0.3:
            label([t], rng.random() < 0.8)
    return {"sizes": sizes, "tensors": tensors, "open": opened}


def networks():
    rng = np.random.default_rng(20261201)
    for n in [3, 4, 5, 6, 7] * 8 + list(range(8, 23)) * 2:
        yield f"random {n}", random_network(n, rng)
    for rows, columns, periodic in [(3, 3, 0), (4, 4, 0), (5, 5, 0), (3, 3, 1), (4, 4, 1), (5, 5, 1)]:
        n, edges = lattice(rows, columns, periodic)
        for size in (2, 3):
            yield f"lattice {rows}x{columns} {'periodic' if periodic else 'open'}", bonds(
                n, edges, [size] * len(edges)
            )
    for n in [10, 16, 20, 24, 28, 32, 34]:
        n, edges = regular(n, rng)
        yield f"cubic {n}", bonds(n, edges, [2] * len(edges))
        yield f"cubic {n} mixed", bonds(n, edges, [int(s) for s in rng.integers(2, 9, len(edges))])


def price(network, path):
    """Multiply-adds of a path of positions."""
    sizes, opened = network["sizes"], set(network["open"])
    live = [set(t) for t in network["tensors"]]

    def product(labels):
        p = 1
        for x in labels:
            p *= sizes[x]
        return p

    def kept(i, sets):
        others = set().union(*(s for j, s in enumerate(sets) if j != i)) if len(sets) > 1 else set()
        return sets[i] & (others | opened)

    live = [kept(i, live) for i in range(len(live))]
    total = 0
    for step in path:
        step = sorted(step, reverse=True)
        parts = [live.pop(i) for i in step]
        # A step of more than two operands is done from left to right.
        parts.reverse()
        while len(parts) > 1:
            a, b = parts.pop(0), parts.pop(0)
            total += product(a | b)
            parts.insert(0, kept(0, [a | b] + parts + live))
        live.append(parts[0])
    return total


def numpy_path(network, method):
    operands = []
    for t in network["tensors"]:
        operands += [np.broadcast_to(0.0, [network["sizes"][x] for x in t]), t]
    path, _ = np.einsum_path(*operands, network["open"], optimize=(method, HUGE))
    return path[1:]


def main():
    record = []
    for name, network in networks():
        if len(network["sizes"]) > 52:
            continue  # einsum has 52 names
        entry = {"name": name, **network}
        entry["greedy"] = price(network, numpy_path(network, "greedy"))
        if len(network["tensors"]) <= 7:
            entry["optimal"] = price(network, numpy_path(network, "optimal"))
        record.append(entry)
    text = "[\n" + ",\n".join(json.dumps(e) for e in record) + "\n]\n"
    if "--check" in sys.argv[1:]:
        # Paths may differ between NumPy versions; the networks and this price must not.
        old = json.loads(RECORD.read_text())
        new = json.loads(text)
        keys = ("name", "sizes", "tensors", "open")
        assert [[e[k] for k in keys] for e in old] == [[e[k] for k in keys] for e in new]
        changed = sum(a != b for a, b in zip(old, new))
        print(f"{len(new)} networks; NumPy {np.__version__} gives other prices on {changed}")
        worse = [e["name"] for e in new if e.get("optimal", e["greedy"]) > e["greedy"]]
        print(f"optimal dearer than greedy in this price: {len(worse)}")
    else:
        RECORD.write_text(text)
        print(f"{len(record)} networks recorded with NumPy {np.__version__}")


if __name__ == "__main__":
    main()
