"""The executor beside NumPy, both in one go, run after run in turn; prints ratios.

    cargo build --release
    python3 benches/against_numpy.py [--binary target/release/lierne] [--rounds 5] [--only NAME]

For each network: the median wall time of the whole program (start, reading the files, search
for a plan, contraction), the median time of its contraction alone, and the median time of
NumPy, in this process, on the same arrays:
  einsum     numpy.einsum(..., optimize="greedy"), search included, where it can take the
             network (52 labels at most);
  tensordot  numpy.tensordot step by step along the plan that lierne found, elsewhere.
Values are compared before anything is timed. The variables that would fix OpenBLAS to one
processor type are taken away first, and the kernel that then runs is printed.
After that the executor beside itself: sparse and dense tensors, one and two threads.
"""

import argparse
import ctypes
import json
import math
import os
import pathlib
import statistics
import subprocess
import sys
import tempfile
import time

for variable in ("OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE"):
    os.environ.pop(variable, None)
import numpy as np  # noqa: E402  (after the environment is set)

RNG = np.random.default_rng(7)


def kernel():
    """The processor type whose kernels OpenBLAS runs."""
    with open("/proc/self/maps") as maps:
        paths = {line.split()[-1] for line in maps if "openblas" in line}
    for path in sorted(paths):
        library = ctypes.CDLL(path)
        for name in ("scipy_openblas_get_corename64_", "openblas_get_corename64_", "openblas_get_corename"):
            if hasattr(library, name):
                function = getattr(library, name)
                function.restype = ctypes.c_char_p
                return function().decode()
    return "unknown"


def graph_network(edges, vertices, dimension, open_legs=()):
    """One random complex tensor a vertex; open_legs are vertices that carry one more leg."""
    legs = [[] for _ in range(vertices)]
    for number, (a, b) in enumerate(edges):
        legs[a].append(f"e{number}")
        legs[b].append(f"e{number}")
    boundary = []
    for number, v in enumerate(open_legs):
        legs[v].append(f"o{number}")
        boundary.append(f"o{number}")
    return legs, boundary, {}, dimension


def torus(m, n):
    at = lambda i, j: (i % m) * n + j % n
    return [(at(i, j), at(i + a, j + b)) for i in range(m) for j in range(n) for a, b in ((0, 1), (1, 0))]


def grid(m, n):
    right = [(i * n + j, i * n + j + 1) for i in range(m) for j in range(n - 1)]
    down = [(i * n + j, i * n + j + n) for i in range(m - 1) for j in range(n)]
    return right + down


def ring(n):
    return [(i, (i + 1) % n) for i in range(n)]


def regular(n, degree):
    """A random regular graph by pairing stubs, seeded."""
    rng = np.random.default_rng(n)
    while True:
        stubs = rng.permutation(np.repeat(np.arange(n), degree))
        edges = {tuple(sorted(p)) for p in stubs.reshape(-1, 2).tolist()}
        if len(edges) == n * degree // 2 and all(a != b for a, b in edges):
            return sorted(edges)


SMALL = {
    "torus-4x4-d3": lambda: graph_network(torus(4, 4), 16, 3),
    "torus-5x5-d3": lambda: graph_network(torus(5, 5), 25, 3),
    "torus-4x4-d4": lambda: graph_network(torus(4, 4), 16, 4),
    "grid-9x9-d2": lambda: graph_network(grid(9, 9), 81, 2),
    "grid-7x7-d4": lambda: graph_network(grid(7, 7), 49, 4),
    "regular-40-d3": lambda: graph_network(regular(40, 3), 40, 3),
    "regular-30-d4": lambda: graph_network(regular(30, 3), 30, 4),
    "loop-5-d6": lambda: graph_network(ring(5), 5, 6, [0, 0, 1, 1, 2, 2, 3, 4]),
    "loop-6-d5": lambda: graph_network(ring(6), 6, 5, [0, 1, 2, 3, 4, 5, 0, 3]),
}
LARGE = {
    "chain-1500": lambda: graph_network([(0, 1), (1, 2), (2, 3)], 4, 1500, [0, 3]),
    "complete-4-d56": lambda: graph_network([(a, b) for a in range(4) for b in range(a + 1, 4)], 4, 56),
    "ring-4-d1296": lambda: graph_network(ring(4), 4, 1296),
}


def write(folder, name, made):
    legs, boundary, sizes, dimension = made
    arrays, tensors = [], []
    for number, leg in enumerate(legs):
        shape = [sizes.get(l, dimension) for l in leg]
        a = RNG.standard_normal(shape) + 1j * RNG.standard_normal(shape)
        a /= np.linalg.norm(a) ** 0.5
        np.save(folder / f"{name}-{number}.npy", a)
        arrays.append(a)
        tensors.append({"legs": leg, "array": f"{name}-{number}.npy"})
    net = {"lierne": 1, "name": name, "dimension": dimension, "legs": sizes, "boundary": boundary,
           "bulk": [], "summed": [], "tensor": tensors}
    path = folder / f"{name}.json"
    path.write_text(json.dumps(net))
    return path, legs, boundary, arrays


def einsum_way(legs, boundary, arrays):
    names = sorted({l for leg in legs for l in leg})
    if len(names) > 52:
        return None
    number = {l: i for i, l in enumerate(names)}
    operands = []
    for a, leg in zip(arrays, legs):
        operands += [a, [number[l] for l in leg]]
    operands.append([number[l] for l in boundary])
    return lambda: np.einsum(*operands, optimize="greedy")


def tensordot_way(legs, boundary, arrays, steps):
    def run():
        live = list(zip(arrays, legs))
        for a, b in steps:
            (x, p), (y, q) = live[a], live[b]
            live[a] = live[b] = None
            shared = [l for l in p if l in q]
            axes = ([p.index(l) for l in shared], [q.index(l) for l in shared])
            rest = [l for l in p if l not in shared] + [l for l in q if l not in shared]
            live.append((np.tensordot(x, y, axes), rest))
        x, p = live[-1]
        return np.transpose(x, [p.index(l) for l in boundary])
    return run


def lierne(binary, *arguments):
    start = time.perf_counter()
    done = subprocess.run([binary, *map(str, arguments), "--json", "--quiet"], capture_output=True, text=True)
    wall = time.perf_counter() - start
    if done.returncode:
        sys.exit(f"{' '.join(map(str, arguments))}: {done.stderr}")
    return json.loads(done.stdout), wall


def geometric(values):
    return math.exp(sum(map(math.log, values)) / len(values)) if values else float("nan")


def beside_numpy(options, folder):
    print(f"{'network':16} {'NumPy by':10} {'NumPy s':>9} {'lierne s':>9} {'of which run':>12} {'ratio':>7} {'run only':>8}")
    for family, networks, target in (("small bonds", SMALL, 5.0), ("products", LARGE, 1.2)):
        ratios, runs = [], []
        for name, make in networks.items():
            if options.only and options.only not in name:
                continue
            path, legs, boundary, arrays = write(folder, name, make())
            plan, out = folder / f"{name}.plan", folder / f"{name}.out.npy"
            found, _ = lierne(options.binary, "order", path, "--seconds", options.seconds, "--save", plan)
            assert found["slices"] == 1
            way, run = "einsum", einsum_way(legs, boundary, arrays)
            if run is None:
                way, run = "tensordot", tensordot_way(legs, boundary, arrays, found["steps"])
            want = run()
            lierne(options.binary, "contract", path, "--out", out, "--seconds", options.seconds)
            got = np.load(out)
            off = np.linalg.norm(got - want) / np.linalg.norm(want)
            assert off < 1e-10, f"{name}: off by {off}"
            ours, alone, theirs = [], [], []
            for _ in range(options.rounds):
                answer, wall = lierne(options.binary, "contract", path, "--seconds", options.seconds)
                ours.append(wall)
                alone.append(answer["seconds"])
                start = time.perf_counter()
                run()
                theirs.append(time.perf_counter() - start)
            ours, alone, theirs = map(statistics.median, (ours, alone, theirs))
            ratios.append(theirs / ours)
            runs.append(theirs / alone)
            print(f"{name:16} {way:10} {theirs:9.4f} {ours:9.4f} {alone:12.4f} {theirs / ours:7.2f} {theirs / alone:8.2f}")
        if ratios:
            print(f"{family}: geometric mean {geometric(ratios):.2f}, run only {geometric(runs):.2f}, "
                  f"slowest {min(ratios):.2f} (target mean {target})")


def doubled(binary, folder, rings):
    """<psi|psi> of a {4,5} patch of four-leg blocks of dimension 3 as a network file."""
    path = folder / "patch.json"
    lierne(binary, "grow", "tiling", "--polygon", 4, "--around", 5, "--rings", rings,
           "--block", "four-leg", "--dimension", 3, "--out", path)
    net = json.loads(path.read_text())
    tensors = []
    for copy in ("", "*"):
        for t in net["tensor"]:
            legs = [l if l in net["boundary"] else l + copy for l in t["legs"]]
            tensors.append({"legs": legs, "block": t["block"]})
    both = {"lierne": 1, "name": "norm", "dimension": 3, "boundary": [], "bulk": [], "summed": [], "tensor": tensors}
    path = folder / "norm.json"
    path.write_text(json.dumps(both))
    return path


def beside_itself(options, folder):
    norm = doubled(options.binary, folder, 2)
    plan = folder / "norm.plan"
    lierne(options.binary, "order", norm, "--seconds", 2, "--save", plan)
    times = {}
    for kind in ([], ["--dense"]):
        runs = [lierne(options.binary, "contract", norm, "--plan", plan, *kind)[0] for _ in range(3)]
        times[bool(kind)] = statistics.median(r["seconds"] for r in runs)
        print(f"norm of the two-ring {{4,5}} patch, D = 3, {'dense' if kind else 'sparse'}: "
              f"{times[bool(kind)]:.4f} s, value {runs[0]['value']}, 10^{runs[0]['log10_magnitude']}, "
              f"{runs[0]['multiply_adds_done']:.3e} of {runs[0]['multiply_adds']:.3e} multiply-adds")
    print(f"dense / sparse: {times[True] / times[False]:.1f} (target 20)")
    for name in ("ring-4-d1296", "grid-7x7-d4"):
        path, *_ = write(folder, name, {**SMALL, **LARGE}[name]())
        plan = folder / f"{name}.plan"
        lierne(options.binary, "order", path, "--seconds", options.seconds, "--save", plan)
        took = {1: [], 2: []}
        for _ in range(options.rounds):
            for threads in took:
                answer, _ = lierne(options.binary, "contract", path, "--plan", plan, "--threads", threads)
                took[threads].append(answer["seconds"])
        one, two = (statistics.median(took[t]) for t in (1, 2))
        print(f"{name}: one thread {one:.4f} s, two {two:.4f} s, ratio {one / two:.2f} (target 1.7)")


def main():
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--binary", default="target/release/lierne")
    parser.add_argument("--rounds", type=int, default=5)
    parser.add_argument("--seconds", type=float, default=0.05, help="time for each search of a plan")
    parser.add_argument("--only", help="networks whose name holds this")
    parser.add_argument("--part", choices=["numpy", "itself"], help="one part alone")
    options = parser.parse_args()
    print(f"NumPy {np.__version__}, OpenBLAS kernel {kernel()}, {os.cpu_count()} processors")
    with tempfile.TemporaryDirectory() as folder:
        if options.part != "itself":
            beside_numpy(options, pathlib.Path(folder))
        if options.part != "numpy":
            beside_itself(options, pathlib.Path(folder))


main()
