"""Blocks, measures and array files by NumPy alone.

Plainly run it records tests/data/block.json and tests/data/npy/*.npy anew; with --check it
recomputes and compares, and has the program write arrays that NumPy reads and judges.
"""

import itertools
import json
import pathlib
import subprocess
import sys
import tempfile

import numpy as np

ROOT = pathlib.Path(__file__).resolve().parent.parent.parent
DATA = ROOT / "tests" / "data"
PLACE = DATA / "block.json"
NPY = DATA / "npy"


# --- blocks, written down from their formulas ------------------------------------------------

def six_level():
    e = [[0, 0, 0, 1, 0, 2], [2, 1, 2, 1, 2, 2], [2, 2, 1, 2, 0, 2],
         [1, 2, 0, 0, 2, 2], [2, 2, 0, 1, 1, 0], [1, 2, 2, 1, 0, 1]]
    w, z = np.exp(2j * np.pi / 3), np.exp(2j * np.pi / 6)
    t = np.zeros((6,) * 4, complex)
    for p, k, l in itertools.product(range(6), repeat=3):
        t[(k + p) % 6, (l + p) % 6, k, l] = sum(w ** e[p][q] * z ** (q * (k - l)) for q in range(6)) / 6
    return t


def linear_squares(d):
    t = np.zeros((d,) * 4, complex)
    for i, j in itertools.product(range(d), repeat=2):
        t[i, j, (i + j) % d, (i + 2 * j) % d] = 1
    return t


def graph_state(d, n, weight):
    """A prime d; weight of cyclic distance 1, 2, ...; normalised as an isometry."""
    t = np.zeros((d,) * n, complex)
    for v in itertools.product(range(d), repeat=n):
        f = sum(weight[min(j - i, n - j + i) - 1] * v[i] * v[j] for i in range(n) for j in range(i + 1, n))
        t[v] = np.exp(2j * np.pi * (f % d) / d)
    return t * np.sqrt(d ** (n // 2) / d ** n)


def encoder(generators, shift, clock):
    """Isometry of a qubit code: the logical zero is fixed by the clock, one is its shift."""
    pauli = {"I": np.eye(2), "X": np.array([[0, 1], [1, 0]]), "Z": np.diag([1, -1]),
             "Y": np.array([[0, -1j], [1j, 0]])}
    def op(s):
        m = np.eye(1)
        for c in s:
            m = np.kron(m, pauli[c])
        return m
    n = len(clock)
    p = np.eye(2 ** n, dtype=complex)
    for g in generators + [clock]:
        p = p @ (np.eye(2 ** n) + op(g)) / 2
    column = int(np.argmax(np.abs(np.diag(p))))
    zero = p[:, column] / np.linalg.norm(p[:, column])
    return np.stack([zero, op(shift) @ zero], axis=1).reshape((2,) * (n + 1))


def blocks():
    return [
        ("four-leg", 6, 4, six_level()),
        ("four-leg", 3, 4, linear_squares(3)),
        ("four-leg", 5, 4, linear_squares(5)),
        ("five-leg", 2, 5, graph_state(2, 5, [1, 0])),
        ("five-leg", 3, 5, graph_state(3, 5, [1, 0])),
        ("six-leg", 2, 6, graph_state(2, 6, [0, 1, 1])),
        ("seven-leg", 3, 7, graph_state(3, 7, [0, 1, 1])),
        ("code-5-1-3", 2, 6, encoder(["XZZXI", "IXZZX", "XIXZZ", "ZXIXZ"], "XXXXX", "ZZZZZ")),
        ("code-7-1-3", 2, 8, encoder(["XXXIXII", "XXIXIIX", "XIXIIXX", "ZZZIZII", "ZZIZIIZ", "ZIZIIZZ"],
                                     "XXXXXXX", "ZZZZZZZ")),
        ("code-6-1-3", 2, 7, encoder(["YIXZXY", "ZXIIXZ", "IZXXXX", "IIZIIZ", "ZZIZZI"], "ZIIXXI", "IZIIZZ")),
    ]


# --- measures --------------------------------------------------------------------------------

def weights(t, left):
    rest = [i for i in range(t.ndim) if i not in left]
    m = np.transpose(t, rest + list(left)).reshape(-1, int(np.prod([t.shape[i] for i in left])))
    s = np.linalg.svd(m, compute_uv=False) ** 2
    return s / s.sum(), m


def defect(t, left):
    p, m = weights(t, left)
    g = m.conj().T @ m
    g = g / (np.trace(g).real / len(g))
    return float(np.abs(np.linalg.eigvalsh(g - np.eye(len(g)))).max())


def entropy(t, left):
    p = weights(t, left)[0]
    p = p[p > 1e-15]
    return float(-(p * np.log(p)).sum())


def purity(t, left):
    if len(left) in (0, t.ndim):
        return 1.0
    return float((weights(t, left)[0] ** 2).sum())


def enumerator(t):
    """By the definition: A_j = sum of |<E>|^2 over products of generalised Pauli operators."""
    psi = t / np.linalg.norm(t)
    n = t.ndim
    out = np.zeros(n + 1)
    local = []
    for d in t.shape:
        w = np.exp(2j * np.pi / d)
        x = np.roll(np.eye(d), 1, axis=0)
        z = np.diag(w ** np.arange(d))
        local.append([np.linalg.matrix_power(x, a) @ np.linalg.matrix_power(z, b)
                      for a in range(d) for b in range(d)])
    for choice in itertools.product(*[range(len(l)) for l in local]):
        v = psi
        for leg, c in enumerate(choice):
            if c:
                v = np.moveaxis(np.tensordot(local[leg][c], v, axes=(1, leg)), 0, leg)
        out[sum(1 for c in choice if c)] += abs(np.vdot(psi, v)) ** 2
    return [float(v) for v in out]


def judged():
    rng = np.random.default_rng(5)
    gauss = lambda *s: rng.normal(size=s) + 1j * rng.normal(size=s)
    arrays = {
        "random 2x3x4": gauss(2, 3, 4),
        "random 2x2x2x2": gauss(2, 2, 2, 2),
        "random unitary 3": np.linalg.qr(gauss(9, 9))[0].reshape(3, 3, 3, 3),
        "rank two": (gauss(4, 2) @ gauss(2, 6)).reshape(2, 2, 2, 3),
        "noisy squares": linear_squares(3) + 1e-3 * gauss(3, 3, 3, 3),
        "sparse": np.where(rng.random((3, 3, 2, 2)) < 0.3, gauss(3, 3, 2, 2), 0),
    }
    out = []
    for name, t in arrays.items():
        splits = []
        for k in range(1, t.ndim):
            for left in itertools.combinations(range(t.ndim), k):
                splits.append({"left": list(left), "defect": defect(t, left), "entropy": entropy(t, left)})
        out.append({
            "name": name, "shape": list(t.shape),
            "re": [float(v) for v in t.real.ravel()], "im": [float(v) for v in t.imag.ravel()],
            "splits": splits, "enumerator": enumerator(t),
            "purity": [purity(t, (0, 2)), purity(t, (0, 3))] if t.ndim == 4 else None,
        })
    return out


# --- array files -----------------------------------------------------------------------------

def files():
    base = np.arange(24, dtype=float).reshape(2, 3, 4) - 7.5
    kinds = {
        "float32": base.astype("<f4"), "big_float64": base.astype(">f8"),
        "complex64": (base + 1j * base[::-1]).astype("<c8"),
        "big_complex128": (base - 2j * base).astype(">c16"),
        "fortran_complex128": np.asfortranarray(base + 3j * base * base),
        "int8": np.arange(24, dtype="i1").reshape(2, 3, 4) - 12,
        "big_int16": (np.arange(24).reshape(2, 3, 4) * 1000 - 500).astype(">i2"),
        "bool": (np.arange(24).reshape(2, 3, 4) % 3 == 0),
        "scalar": np.array(2.5),
        "object_free_text": np.array(["a", "b"]),
        "float16": base.astype("<f2"),
        "empty": np.zeros((2, 0, 3)),
        "nan": np.array([[1.0, np.nan], [0.0, 1.0]]),
        "zeros": np.zeros((2, 2)),
        "column_sliced": np.asfortranarray(base)[:, ::2],
    }
    return kinds


def values(a):
    if a.dtype.kind not in "fciub" or a.dtype == np.float16:
        return None
    c = a.astype(complex)
    return [[float(x.real), float(x.imag)] for x in c.ravel()] if not np.isnan(c).any() else None


def compute():
    made = []
    for family, d, legs, t in blocks():
        at = np.flatnonzero(np.abs(t) > 1e-12)
        flat = t.ravel()[at]
        made.append({"family": family, "dimension": d, "legs": legs,
                     "index": [int(i) for i in at],
                     "value": [[round(float(v.real), 14) + 0.0, round(float(v.imag), 14) + 0.0] for v in flat]})
    return {
        "source": "NumPy",
        "blocks": made,
        "judged": judged(),
        "files": {k: {"shape": list(a.shape), "values": values(a)} for k, a in files().items()},
    }


def near(a, b, place="root"):
    if isinstance(a, dict):
        if a.keys() != b.keys():
            sys.exit(f"{place}: keys differ")
        for k in a:
            near(a[k], b[k], f"{place}.{k}")
    elif isinstance(a, list):
        if len(a) != len(b):
            sys.exit(f"{place}: lengths differ")
        for i, (x, y) in enumerate(zip(a, b)):
            near(x, y, f"{place}[{i}]")
    elif isinstance(a, float):
        if abs(a - b) > 1e-9 * max(1.0, abs(a)):
            sys.exit(f"{place}: {a} against {b}")
    elif a != b:
        sys.exit(f"{place}: {a!r} against {b!r}")


def written_by_the_program():
    """NumPy reads what the program writes and judges it."""
    subprocess.run(["cargo", "build", "--release", "--quiet"], cwd=ROOT, check=True)
    program = ROOT / "target" / "release" / "lierne"
    cases = [["--legs", "4", "--dimension", str(d)] for d in range(3, 13)]
    cases += [["--legs", "5", "--dimension", "4"], ["--legs", "6", "--dimension", "3"],
              ["--legs", "7", "--dimension", "3"], ["--block", "code-5-1-3", "--dimension", "3"],
              ["--block", "mds", "--legs", "5", "--dimension", "5"]]
    with tempfile.TemporaryDirectory() as folder:
        for case in cases:
            out = pathlib.Path(folder) / "t.npy"
            subprocess.run([program, "block", "make", *case, "--out", out, "--quiet"], check=True,
                           stdout=subprocess.DEVNULL)
            t = np.load(out)
            if t.dtype != np.complex128 or not t.flags["C_CONTIGUOUS"]:
                sys.exit(f"{case}: {t.dtype}, not complex128 in row-major order")
            n, d = t.ndim, t.shape[0]
            for left in itertools.combinations(range(n), n // 2):
                if defect(t, left) > 1e-12:
                    sys.exit(f"{case}: legs {left} are not isometric")
            total = d if "code-5-1-3" in case else d ** (n // 2)
            if abs(np.linalg.norm(t) ** 2 / total - 1) > 1e-12:
                sys.exit(f"{case}: norm")
    print(f"NumPy confirms {len(cases)} written arrays")


def main():
    found = compute()
    if "--check" in sys.argv:
        near(json.loads(PLACE.read_text()), found)
        print("block.json agrees with NumPy")
        written_by_the_program()
    else:
        NPY.mkdir(parents=True, exist_ok=True)
        PLACE.write_text(json.dumps(found, separators=(",", ":")) + "\n")
        for name, a in files().items():
            np.save(NPY / f"{name}.npy", a)
        raw = (NPY / "float32.npy").read_bytes()
        (NPY / "truncated.npy").write_bytes(raw[:-5])
        (NPY / "no_array.npy").write_bytes(b"PK\x03\x04 this is something else")


main()
