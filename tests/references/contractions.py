#!/usr/bin/env python3
"""Recomputes contractions of integer arrays with NumPy's einsum and compares them with ours.

usage: contractions.py FILE [--break]

FILE holds what the example `contraction_cases` of the crate indexwise-algebra prints: subscripts, operands and our
results as fractions and as residues beside their modulus; and the components of delta, epsilon and the generalised
delta, which are built here from NumPy's determinant of unit matrices. All is compared exactly: the sums are bounded
first, so that 64 bits hold them.

Exit status 1 if a number differs, 2 if nothing could be compared. With --break one number of every list is spoilt
before the comparison: exit status 0 if each of them is noticed, 1 if not.

Reference: NumPy (PyPI package `numpy`).
"""

import itertools
import json
import math
import sys

import numpy


def main():
    arguments = [argument for argument in sys.argv[1:] if argument != "--break"]
    breaking = "--break" in sys.argv[1:]
    if len(arguments) != 1:
        sys.exit(__doc__)
    with open(arguments[0], encoding="utf-8") as file:
        cases = json.load(file)
    lists = differing = numbers = 0
    for title, ours, modulus, wanted in itertools.chain(contractions(cases), symbols(cases)):
        wanted = [number if modulus is None else number % int(modulus) for number in wanted]
        ours = [int(number) for number in ours]
        if breaking:
            ours[lists % len(ours)] += 1
        same = ours == wanted
        lists += 1
        numbers += len(wanted)
        differing += not same
        if not same and not breaking:
            print(f"{title}: differs\n  ours   {ours}\n  NumPy  {wanted}")
    print(f"{lists} lists with {numbers} numbers compared, {differing} differ")
    if lists == 0 or numbers == 0:
        sys.exit(2)
    if breaking:
        sys.exit(0 if differing == lists else 1)
    sys.exit(1 if differing else 0)


def contractions(cases):
    for case in cases["contractions"]:
        operands = [numpy.array(operand["entries"], dtype=numpy.int64).reshape(operand["shape"])
                    for operand in case["operands"]]
        bound(case["subscripts"], operands)
        result = numpy.einsum(case["subscripts"], *operands)
        wanted = [int(number) for number in numpy.asarray(result).ravel()]
        for ours in case["results"]:
            yield f"{case['subscripts']} modulo {ours['modulus']}", ours["values"], ours["modulus"], wanted


def bound(subscripts, operands):
    """Refuses sums that 64 bits might not hold: the largest term times the number of terms."""
    ranges = {}
    for labels, operand in zip(subscripts.split("->")[0].split(","), operands):
        ranges.update(zip(labels, operand.shape))
    largest = math.prod(max(1, int(abs(operand).max())) for operand in operands) * math.prod(ranges.values())
    if largest >= 2**62:
        sys.exit(f"{subscripts}: the sums may be too large for NumPy")


def symbols(cases):
    for case in cases["symbols"]:
        n, count = case["dimension"], case["count"]
        unit = numpy.eye(n)
        if case["kind"] == "epsilon":
            # The determinant of the unit matrix with its rows so arranged.
            wanted = [unit[list(index)] for index in itertools.product(range(n), repeat=n)]
        else:
            # The determinant of the deltas between upper and lower indices.
            wanted = [unit[numpy.ix_(index[:count], index[count:])]
                      for index in itertools.product(range(n), repeat=2 * count)]
        wanted = [round(numpy.linalg.det(matrix)) for matrix in wanted]
        yield f"{case['kind']} in dimension {n}, {count} pairs", case["values"], None, wanted


if __name__ == "__main__":
    main()
