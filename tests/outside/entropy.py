"""Entropies by NumPy (full state, reduced density matrix, eigvalsh) and galois (ranks).

Plainly run it records tests/data/entropy.json anew; with --check it recomputes and compares.
"""

import json
import pathlib
import random
import sys

import galois
import numpy as np

ROOT = pathlib.Path(__file__).resolve().parent.parent.parent
PLACE = ROOT / "tests" / "data" / "entropy.json"


def six_level():
    e = [[0, 0, 0, 1, 0, 2], [2, 1, 2, 1, 2, 2], [2, 2, 1, 2, 0, 2],
         [1, 2, 0, 0, 2, 2], [2, 2, 0, 1, 1, 0], [1, 2, 2, 1, 0, 1]]
    w, z = np.exp(2j * np.pi / 3), np.exp(2j * np.pi / 6)
    t = np.zeros((6,) * 4, complex)
    for p in range(6):
        for k in range(6):
            for l in range(6):
                t[(k + p) % 6, (l + p) % 6, k, l] = sum(
                    w ** e[p][q] * z ** (q * (k - l)) for q in range(6)) / 6
    return t


def squares(d):
    t = np.zeros((d,) * 4)
    for i in range(d):
        for j in range(d):
            t[i, j, (i + j) % d, (i + 2 * j) % d] = 1
    return t


def block(name, dim, legs):
    if name == "four-leg":
        return six_level() if dim == 6 else squares(dim)
    if name == "copy":
        t = np.zeros((dim,) * legs)
        t[(np.arange(dim),) * legs] = 1
        return t
    if name == "w":
        t = np.zeros((2,) * legs)
        for k in range(legs):
            t[tuple(1 if m == k else 0 for m in range(legs))] = 1
        return t
    raise ValueError(name)


def dense(case):
    """Entropy in nats from the whole state vector."""
    operands = []
    for t in case["tensors"]:
        operands += [block(t["block"], case["dim"], len(t["legs"])), t["legs"]]
    psi = np.einsum(*operands, case["boundary"], optimize="greedy")
    inside = [k for k, f in enumerate(case["region"]) if f]
    outside = [k for k, f in enumerate(case["region"]) if not f]
    if len(inside) > len(outside):
        inside, outside = outside, inside
    m = psi.transpose(inside + outside).reshape(case["dim"] ** len(inside), -1)
    rho = m @ m.conj().T
    p = np.linalg.eigvalsh(rho / np.trace(rho).real)
    p = p[p > 1e-14]
    return float(-(p * np.log(p)).sum())


def ranks(case):
    """Entropy in digits from the stabilizer group over GF(p), p an odd prime, four-leg only."""
    p = case["dim"]
    field = galois.GF(p)
    tensors = [t["legs"] for t in case["tensors"]]
    slots = [(t, l) for t, legs in enumerate(tensors) for l in range(4)]
    n = len(slots)
    x = [[1, 0, 1, 1], [0, 1, 1, 2]]
    z = [[1, 1, p - 1, 0], [1, 2, 0, p - 1]]
    rows = []
    for t in range(len(tensors)):
        for kind, generators in enumerate((x, z)):
            for g in generators:
                row = [0] * (2 * n)
                for l, v in enumerate(g):
                    row[kind * n + 4 * t + l] = v % p
                rows.append(row)
    group = field(rows)
    place = {}
    for k, (t, l) in enumerate(slots):
        place.setdefault(tensors[t][l], []).append(k)
    constraints = []
    for ends in place.values():
        if len(ends) == 2:
            a, b = ends
            constraints.append(group[:, a] - group[:, b])
            constraints.append(group[:, n + a] + group[:, n + b])
    if constraints:
        survivors = field(np.array(constraints)).null_space() @ group
    else:
        survivors = group
    inside = [place[l][0] for l, f in zip(case["boundary"], case["region"]) if f]
    if not inside:
        return 0
    columns = inside + [n + k for k in inside]
    return int(np.linalg.matrix_rank(survivors[:, columns])) - len(inside)


def ring(n, dim):
    tensors = [{"block": "four-leg", "legs": [(k + 1) % n, n + 2 * k, n + 2 * k + 1, k]}
               for k in range(n)]
    boundary = list(range(n, 3 * n))
    return {"name": f"ring of {n}", "dim": dim, "tensors": tensors, "boundary": boundary,
            "region": [k % 2 == 0 for k in range(2 * n)]}


def random_squares(rng, tensors, bonds, dim, name):
    """Four-leg tensors with `bonds` random bonds between different tensors."""
    while True:
        slots = [(t, l) for t in range(tensors) for l in range(4)]
        rng.shuffle(slots)
        legs = [[None] * 4 for _ in range(tensors)]
        label, boundary, ok = 0, [], True
        for b in range(bonds):
            (t, l), (u, m) = slots[2 * b], slots[2 * b + 1]
            ok &= t != u
            legs[t][l] = legs[u][m] = label
            label += 1
        if not ok:
            continue
        for t, l in slots[2 * bonds:]:
            legs[t][l] = label
            boundary.append(label)
            label += 1
        return {"name": name, "dim": dim,
                "tensors": [{"block": "four-leg", "legs": l} for l in legs],
                "boundary": boundary, "region": [rng.random() < 0.5 for _ in boundary]}


def mixed():
    """A hyperedge, a copy tensor and W states."""
    return [
        {"name": "hyperedge of three squares", "dim": 3, "boundary": list(range(1, 10)),
         "tensors": [{"block": "four-leg", "legs": [0, 1, 2, 3]},
                     {"block": "four-leg", "legs": [4, 0, 5, 6]},
                     {"block": "four-leg", "legs": [7, 8, 0, 9]}],
         "region": [True, False, True, True, False, False, True, False, True]},
        {"name": "copy and two W states", "dim": 2, "boundary": [2, 3, 4, 5, 6],
         "tensors": [{"block": "w", "legs": [0, 2, 3]}, {"block": "w", "legs": [1, 4, 5]},
                     {"block": "copy", "legs": [0, 1, 6]}],
         "region": [True, False, True, False, False]},
        {"name": "chain of W states", "dim": 2, "boundary": [2, 3, 4, 5, 6, 7],
         "tensors": [{"block": "w", "legs": [2, 3, 0]}, {"block": "w", "legs": [0, 4, 5, 1]},
                     {"block": "w", "legs": [1, 6, 7]}],
         "region": [True, False, True, True, False, False]},
    ]


def cases():
    rng = random.Random(4)
    full = [ring(3, 3), ring(3, 5), ring(3, 6), ring(4, 3), ring(4, 5), ring(4, 6)] + mixed()
    for k in range(30):
        dim = [3, 3, 5, 6][k % 4]
        tensors, bonds = (3, rng.randrange(3, 6)) if dim >= 5 else (4, rng.randrange(4, 8))
        full.append(random_squares(rng, tensors, bonds, dim, f"random squares {k}"))
    for case in full:
        case["nats"] = dense(case)
    by_rank = []
    for k in range(60):
        dim = [3, 5, 7, 11][k % 4]
        tensors = rng.randrange(4, 24)
        case = random_squares(rng, tensors, rng.randrange(tensors, 2 * tensors), dim,
                              f"random squares by ranks {k}")
        case["digits"] = ranks(case)
        by_rank.append(case)
    return {"numpy": full, "galois": by_rank}


def agree(a, b):
    if isinstance(a, float):
        return abs(a - b) < 1e-9
    if isinstance(a, dict):
        return a.keys() == b.keys() and all(agree(a[k], b[k]) for k in a)
    if isinstance(a, list):
        return len(a) == len(b) and all(agree(x, y) for x, y in zip(a, b))
    return a == b


if __name__ == "__main__":
    found = cases()
    if "--check" in sys.argv:
        if not agree(json.loads(PLACE.read_text()), json.loads(json.dumps(found))):
            sys.exit("tests/data/entropy.json differs from what NumPy and galois compute")
        print(f"{len(found['numpy'])} states and {len(found['galois'])} groups agree")
    else:
        PLACE.write_text(json.dumps(found) + "\n")
