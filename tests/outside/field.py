"""Finite fields and their matrices by the Python library galois.

Plainly run it records tests/data/field.json anew; with --check it recomputes and compares.
Element numbers are galois' integer representation: the value of the polynomial at x = p.
"""

import json
import pathlib
import random
import sys

import galois
import numpy as np

PLACE = pathlib.Path(__file__).resolve().parent.parent / "data" / "field.json"


def one(q, rng):
    F = galois.GF(q)
    p, m = F.characteristic, F.degree
    # Degree descending, leading one first; the constant term is last.
    poly = [int(c) for c in F.irreducible_poly.coeffs] if m > 1 else [1, p - int(F.primitive_element)]
    samples = []
    for _ in range(24):
        a, b = rng.randrange(q), rng.randrange(1, q)
        samples.append([
            a, b,
            int(F(a) + F(b)), int(F(a) - F(b)), int(F(a) * F(b)), int(F(a) / F(b)),
            int(F(a) ** 5), int(F(a).field_trace()) if m > 1 else a,
        ])
    matrices = []
    for rows, cols, rank in [(4, 4, 4), (6, 9, 4), (9, 6, 6), (12, 20, 12), (15, 15, 7)]:
        left = F([[rng.randrange(q) for _ in range(rank)] for _ in range(rows)])
        right = F([[rng.randrange(q) for _ in range(cols)] for _ in range(rank)])
        a = left @ right
        x = F([rng.randrange(q) for _ in range(cols)])
        matrices.append({
            "matrix": [[int(v) for v in r] for r in a],
            "rank": int(np.linalg.matrix_rank(a)),
            "reduced": [[int(v) for v in r] for r in a.row_reduce()],
            "null_space_reduced": [[int(v) for v in r] for r in a.null_space().row_reduce()]
            if a.null_space().shape[0] else [],
            "x": [int(v) for v in x],
            "a_x": [int(v) for v in a @ x],
        })
    return {"order": q, "polynomial": poly, "samples": samples, "matrices": matrices}


def compute():
    rng = random.Random(20)
    orders = [2, 3, 4, 5, 7, 8, 9, 11, 16, 25, 27, 32, 49, 64, 81, 125, 128, 243, 251, 256, 257,
              343, 1024, 6561, 59049, 65521, 65536]
    return {
        "source": f"galois {galois.__version__}",
        "fields": [one(q, rng) for q in orders],
    }


def main():
    found = compute()
    if "--check" in sys.argv:
        recorded = json.loads(PLACE.read_text())
        if recorded["fields"] != found["fields"]:
            sys.exit("tests/data/field.json differs from what galois computes")
        print("field.json agrees with galois")
    else:
        PLACE.parent.mkdir(exist_ok=True)
        PLACE.write_text(json.dumps(found, separators=(",", ":")) + "\n")


main()
