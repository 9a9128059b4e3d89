"""Random contractions by numpy.einsum, recorded in tests/data/contraction.json.

Run plainly it rewrites the record; with --check it recomputes and compares (exit 1 on a
difference). Entries are small integers, so every value is exact. The cases hold hyperedges,
diagonals and traces, batch labels, labels summed on one tensor, scalars, size-1 legs and
mixed dimensions, real and complex.
"""

import json
import pathlib
import sys

import numpy as np

RECORD = pathlib.Path(__file__).parent.parent / "data" / "contraction.json"
LETTERS = "abcdefghijklmnopqrstuvwxyz"


def case(rng, number):
    tensors = int(rng.integers(1, 8))
    labels = int(rng.integers(1, 12))
    legs = [[] for _ in range(tensors)]
    sizes = [int(rng.integers(1, 5)) for _ in range(labels)]
    output = []
    for label in range(labels):
        holders = int(rng.choice([1, 2, 2, 2, 2, 3, 4]))
        for t in rng.integers(0, tensors, holders):
            if len(legs[t]) < 5:
                legs[t].append(label)
        if any(label in leg for leg in legs) and rng.random() < 0.3:
            output.append(label)
    rng.shuffle(output)
    output = [int(x) for x in output][:4]
    values = []
    for leg in legs:
        shape = [sizes[l] for l in leg]
        re = rng.integers(-3, 4, shape)
        if number % 2 and rng.random() < 0.7:
            values.append(re + 1j * rng.integers(-3, 4, shape))
        else:
            values.append(re.astype(float))
    spec = ",".join("".join(LETTERS[l] for l in leg) for leg in legs)
    spec += "->" + "".join(LETTERS[l] for l in output)
    result = np.einsum(spec, *values, optimize="greedy" if tensors > 2 else False)
    return {
        "einsum": spec,
        "sizes": sizes,
        "tensors": [flat(v) for v in values],
        "result": flat(result),
    }


def flat(array):
    array = np.asarray(array)
    if np.iscomplexobj(array):
        return [[int(x.real), int(x.imag)] for x in array.ravel()]
    return [int(x) for x in array.ravel()]


def main():
    rng = np.random.default_rng(20260)
    record = {"source": "numpy.einsum", "cases": [case(rng, n) for n in range(80)]}
    if "--check" in sys.argv:
        if json.loads(RECORD.read_text()) != record:
            sys.exit(f"{RECORD.name} differs from what numpy.einsum gives now")
        return
    RECORD.write_text(json.dumps(record, separators=(",", ":")) + "\n")


main()
