"""Stabilizer codes of small networks by galois and plain integers.

Plainly run it records tests/data/code.json and the networks tests/data/code-*.json anew; with
--check it recomputes and compares. Networks are put together here by hand, their groups are
contracted by galois null spaces, recovery is judged by entropies from ranks, and distances by
trying every set of legs.
"""

import itertools
import json
import pathlib
import sys

import galois
import numpy as np

DATA = pathlib.Path(__file__).resolve().parent.parent / "data"
PLACE = DATA / "code.json"

FIVE_QUBIT = {"family": "stabilizer", "stabilizers": "XZZXI,IXZZX,XIXZZ,ZXIXZ",
              "logical": "XXXXX,ZZZZZ"}
FIVE_QUTRIT = {"family": "stabilizer",
               "stabilizers": "X Z Z2 X2 I,I X Z Z2 X2,X2 I X Z Z2,Z2 X2 I X Z",
               "logical": "X X X X X,Z2 Z2 Z2 Z2 Z2"}


def edge_ring():
    """A pentagon and its five neighbours: twenty boundary legs."""
    tensors = [[f"c{i}" for i in range(5)] + ["k0"]]
    for i in range(5):
        tensors.append([f"c{i}"] + [f"o{4 * i + j}" for j in range(4)] + [f"k{i + 1}"])
    return tensors, [f"o{i}" for i in range(20)], [f"k{i}" for i in range(6)], 2, FIVE_QUBIT


def vertex_ring():
    """A pentagon, its five neighbours and the five tiles that touch its corners: E_i lies on
    side i, V_i at the corner between sides i and i + 1; boundary legs counter-clockwise."""
    tensors = [[f"c{i}" for i in range(5)] + ["k0"]]
    boundary = []
    for i in range(5):
        before, after = f"v{(i - 1) % 5}e{i}", f"e{i}v{i}"
        tensors.append([f"c{i}", before, f"oe{i}0", f"oe{i}1", after, f"k{i + 1}"])
        boundary += [f"oe{i}0", f"oe{i}1"]
        tensors.append([f"v{i}e{(i + 1) % 5}", f"e{i}v{i}"] + [f"ov{i}{j}" for j in range(3)] + [f"k{i + 6}"])
        boundary += [f"ov{i}{j}" for j in range(3)]
    return tensors, boundary, [f"k{i}" for i in range(11)], 2, FIVE_QUBIT


def qutrit_loop():
    """Three five-qutrit codes in a ring."""
    tensors = [[f"b{(i - 1) % 3}"] + [f"o{3 * i + j}" for j in range(3)] + [f"b{i}", f"k{i}"] for i in range(3)]
    return tensors, [f"o{i}" for i in range(9)], [f"k{i}" for i in range(3)], 3, FIVE_QUTRIT


NETWORKS = {"edge": edge_ring, "vertex": vertex_ring, "qutrit": qutrit_loop}


def symplectic(word, p):
    """x and z of one operator a site; letters with an optional power."""
    sites = word.split() if " " in word else list(word)
    x, z = [], []
    for s in sites:
        power = int(s[1:]) if len(s) > 1 else 1
        x.append(power % p if s[0] == "X" else 0)
        z.append(power % p if s[0] == "Z" else 0)
    return x, z


def block_rows(block, p):
    """The state of an encoder and its bulk leg: checks, then X with X and Z with the inverse
    of Z on the bulk leg."""
    rows = [(x + [0], z + [0]) for x, z in (symplectic(w, p) for w in block["stabilizers"].split(","))]
    shift, clock = (symplectic(w, p) for w in block["logical"].split(","))
    rows.append((shift[0] + [1], shift[1] + [0]))
    rows.append((clock[0] + [0], clock[1] + [p - 1]))
    return rows


def contract(tensors, boundary, bulk, p, block):
    """Stabilizers on boundary and bulk legs, as rows (x|z): combinations of all generators
    with x_a = x_b and z_a = -z_b on every bond, found as a null space."""
    field = galois.GF(p)
    legs = [l for t in tensors for l in t]
    n = len(legs)
    rows, at = [], 0
    for t in tensors:
        for x, z in block_rows(block, p):
            row = [0] * (2 * n)
            row[at:at + len(t)] = x
            row[n + at:n + at + len(t)] = z
            rows.append(row)
        at += len(t)
    rows = field(np.array(rows))
    conditions = []
    for l in sorted(set(legs) - set(boundary) - set(bulk)):
        a, b = [i for i, m in enumerate(legs) if m == l]
        conditions.append(rows[:, a] - rows[:, b])
        conditions.append(rows[:, n + a] + rows[:, n + b])
    keep = [legs.index(l) for l in boundary + bulk]
    combine = field(np.array(conditions)).null_space()
    state = (combine @ rows)[:, keep + [n + k for k in keep]]
    state = state.row_space()
    assert len(state) == len(keep)
    return state


def entropy(state, sites):
    n = state.shape[1] // 2
    columns = list(sites) + [n + s for s in sites]
    return (int(np.linalg.matrix_rank(state[:, columns])) if columns else 0) - len(sites)


def recoverable(state, n, k, region):
    s = entropy(state, region)
    return [b for b in range(k) if s + 1 - entropy(state, region + [n + b]) == 2]


def columns_of(state, n, p):
    """For each site and kind: which rows an X (a Z) there meets, as tuples."""
    width = state.shape[1] // 2
    m = np.array(state)
    return [[tuple(m[:, width + s]), tuple((-m[:, s]) % p)] for s in range(n)]


def distances(state, n, k):
    """Qubits only: least sets whose loss hurts all bulk legs together, or leg 0 while nobody
    has the others: I(rest : legs) is less than twice the number of legs. Ranks over integers."""
    width = state.shape[1] // 2
    m = np.array(state)
    bits = lambda c: sum(int(v) << i for i, v in enumerate(m[:, c]))
    column = [(bits(s), bits(width + s)) for s in range(width)]

    def rank(sites):
        basis = {}
        for s in sites:
            for v in column[s]:
                while v:
                    top = v.bit_length()
                    if top not in basis:
                        basis[top] = v
                        break
                    v ^= basis[top]
        return len(basis)

    s = lambda sites: rank(sites) - len(sites)
    out = []
    for bulk in (list(range(n, n + k)), [n]):
        alone = s(bulk)
        rest = lambda e: [i for i in range(n) if i not in e]
        for w in itertools.count(1):
            sets = [list(e) for e in itertools.combinations(range(n), w)
                    if s(rest(e)) + alone - s(rest(e) + bulk) < 2 * len(bulk)]
            if sets:
                out.append({"distance": w, "supports": sets})
                break
    return {"code": out[0], "leg": out[1]}


def polynomial(words, logicals):
    """Number of erasure sets of each size with independent logical operators inside: g = 0, 1,
    2, ..., for a qubit code given by words."""
    checks = [symplectic(w, 2) for w in words]
    logical = [symplectic(w, 2) for w in logicals]
    n = len(checks[0][0])
    field = galois.GF(2)
    table = []
    for w in range(n + 1):
        count = [0] * (len(logical) + 1)
        for e in itertools.combinations(range(n), w):
            # Operators on e, one column each: which checks and logicals they meet.
            columns = [[r[1][s] for r in checks + logical] for s in e] + [[r[0][s] for r in checks + logical] for s in e]
            if columns:
                a = field(np.array(columns))
                silent = a.shape[0] - int(np.linalg.matrix_rank(a[:, :len(checks)]))
                trivial = a.shape[0] - int(np.linalg.matrix_rank(a))
                count[silent - trivial] += 1
            else:
                count[0] += 1
        table.append(count)
    return table


def record():
    out = {"networks": {}}
    files = {}
    for name, make in NETWORKS.items():
        tensors, boundary, bulk, p, block = make()
        files[f"code-{name}.json"] = {
            "lierne": 1, "name": f"hand-made, {name}", "dimension": p, "boundary": boundary, "bulk": bulk,
            "tensor": [{"legs": t, "block": block} for t in tensors]}
        state = contract(tensors, boundary, bulk, p, block)
        n, k = len(boundary), len(bulk)
        rng = np.random.default_rng(8)
        regions = []
        for _ in range(60):
            sites = [int(s) for s in np.flatnonzero(rng.random(n) < rng.uniform(0.35, 0.75))]
            rest = [s for s in range(n) if s not in sites]
            regions.append({"sites": sites, "recoverable": recoverable(state, n, k, sites),
                            "from_complement": recoverable(state, n, k, rest)})
        entry = {"boundary": n, "bulk": k, "regions": regions}
        if p == 2:
            entry["distances"] = distances(state, n, k)
        out["networks"][name] = entry
    out["polynomials"] = {
        "5-1-3": polynomial(FIVE_QUBIT["stabilizers"].split(","), FIVE_QUBIT["logical"].split(",")),
        "7-1-3": polynomial(["IIIXXXX", "IXXIIXX", "XIXIXIX", "IIIZZZZ", "IZZIIZZ", "ZIZIZIZ"],
                            ["XXXXXXX", "ZZZZZZZ"]),
        "4-2-2": polynomial(["XXXX", "ZZZZ"], ["XXII", "XIXI", "ZIZI", "ZZII"])}
    files[PLACE.name] = out
    return files


def main():
    files = record()
    for name, value in files.items():
        text = json.dumps(value, separators=(",", ":")) + "\n"
        if "--check" in sys.argv:
            if (DATA / name).read_text() != text:
                sys.exit(f"tests/data/{name} differs from what was computed now")
        else:
            DATA.mkdir(exist_ok=True)
            (DATA / name).write_text(text)


if __name__ == "__main__":
    main()
