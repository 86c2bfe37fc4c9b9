#!/usr/bin/env python3
"""Times our contractions against NumPy's einsum, in one run and in turns.

usage: contraction_speed.py PROGRAM [--repetitions N] [--dimensions 2,3,4,5,6] [--large] [--others]

PROGRAM is the built example `contraction_speed` of the crate indexwise-algebra (target/release/examples/..), which
contracts arrays of residues modulo a prime just below 2^61, exactly. The same numbers are given to NumPy as float64.
Of every product in every dimension

  contract  is our plan and evaluation, beside `einsum(.., optimize=True)`, which plans and evaluates, too;
  planned   is our evaluation of a plan made before, beside einsum with a path that `einsum_path` made before.

A repetition is a block of many calls of the one and a block of many calls of the other, one following the other; who
is first changes from one repetition to the next. Times are medians over the repetitions, ratios (ours to NumPy's; below
1 we are faster) are medians of the ratios within a repetition, so that a machine that changes its pace between two
repetitions does not bend them. All runs on one core: the libraries below NumPy are kept from starting threads.

--large measures dimensions 8, 12 and 16 instead, where a library of floating-point matrix products has to win.
--others also times NumPy with int64 (which wraps around) and with Python's integers (exact).

Before a product is timed all its components are compared with those that NumPy finds with Python's integers, modulo
the prime: exit status 1 if one differs. Only the largest products of --large are timed without that (`COMPARED`).
Whoever is faster, the exit status does not tell.

Reference: NumPy (PyPI package `numpy`).
"""

import argparse
import json
import math
import os
import random
import statistics
import subprocess
import time

for library in ("OPENBLAS", "OMP", "MKL", "BLIS"):
    os.environ[f"{library}_NUM_THREADS"] = "1"

import numpy  # noqa: E402 (reads the variables above when it is loaded)

DIMENSIONS = [2, 3, 4, 5, 6]
LARGE = [8, 12, 16]

# A block of calls takes at least so long, in nanoseconds.
BLOCK = 1_000_000

# Up to so many multiplications without a plan results are compared with those of Python's integers.
COMPARED = 3_000_000

# What our arrays may have at most (`tensor::NUMBERS_BUDGET`); products of larger ones are left out.
NUMBERS_BUDGET = 2**22

# Products as steps have them, up to eight letters in all.
PRODUCTS = {
    "pairs": [
        "ab,b->a",  # a metric lowers the index of a vector
        "ab,bc->ac",
        "abcd,ae->ebcd",  # a metric raises one slot of a curvature tensor
        "abc,bcd->ad",
        "abc,cde->abde",  # two connections
        "abcd,cdef->abef",  # two arrays of four slots over two pairs
    ],
    "three factors": [
        "ab,bc,cd->ad",
        "ac,bd,cd->ab",  # both slots raised
        "abc,bd,ce->ade",
        "abcd,ce,df->abef",
        "abcd,befg,cd->aefg",
    ],
    "four factors": [
        "ab,bc,cd,de->ae",
        "ab,bc,cd,da->",  # the trace of a chain
        "abc,ad,be,cf->def",  # all slots of a connection
        "abcd,ae,bf,ce->fd",
        "abcd,cdef,efgh,gh->ab",  # eight letters
    ],
    "traces": [
        "aa->",
        "abac->bc",  # from Riemann to Ricci
        "abab->",
        "abcdbe->acde",
        "abcabc->",
    ],
    "outer, full": [
        "ab,cd->abcd",
        "a,b,ab->",
        "ab,ab->",
        "abcd,abcd->",  # the square of a curvature tensor
        "ab,cd,abcd->",
        "ab,cd,ac,bd->",
        "abcd,abef,cdgh,efgh->",  # a cubic invariant and more: eight letters, no free one
    ],
}


def main():
    summary_first = __doc__.split("\n\n", 2)
    arguments = argparse.ArgumentParser(usage=summary_first[1].removeprefix("usage: "), epilog=summary_first[2],
                                        description=summary_first[0],
                                        formatter_class=argparse.RawDescriptionHelpFormatter)
    arguments.add_argument("program")
    arguments.add_argument("--repetitions", type=int, default=15)
    arguments.add_argument("--dimensions", type=lambda text: [int(part) for part in text.split(",")])
    arguments.add_argument("--large", action="store_true")
    arguments.add_argument("--others", action="store_true")
    arguments = arguments.parse_args()
    dimensions = arguments.dimensions or (LARGE if arguments.large else DIMENSIONS)
    rows = list(measured(Program(arguments.program), dimensions, arguments))
    summary(rows, dimensions)


class Program:
    """Our half, as a process that is asked line by line."""

    def __init__(self, path):
        self.process = subprocess.Popen([path], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True)

    def ask(self, order):
        self.process.stdin.write(json.dumps(order) + "\n")
        self.process.stdin.flush()
        return json.loads(self.process.stdout.readline())

    def timer(self, planned):
        return lambda calls: self.ask({"calls": calls, "planned": planned})["nanoseconds"]


def measured(program, dimensions, arguments):
    print(f"NumPy {numpy.__version__}, {arguments.repetitions} repetitions; microseconds, medians\n")
    others = " |    int64   integers" if arguments.others else ""
    print(f"{'':30} |           contract           |           planned{' ' * 11}{others}")
    print(f"{'product':24} range" + " |      ours     NumPy   ratio" * 2)
    for kind, products in PRODUCTS.items():
        for subscripts in products:
            arrays = subscripts.replace("->", ",").split(",")
            for dimension in dimensions:
                if any(dimension ** len(labels) > NUMBERS_BUDGET for labels in arrays):
                    print(f"{subscripts:24} {dimension:5} | left out: larger than our arrays may be")
                    continue
                row = compared(program, subscripts, dimension, arguments)
                print(f"{subscripts:24} {dimension:5} | " + row.pop("text"), flush=True)
                yield {"kind": kind, "subscripts": subscripts, "dimension": dimension, **row}


def compared(program, subscripts, dimension, arguments):
    """Both sides of one product, checked and timed."""
    # The seed depends on the product alone, so that every run measures the same numbers.
    source = random.Random(f"{subscripts} {dimension}")
    shapes = [(dimension,) * len(labels) for labels in subscripts.split("->")[0].split(",")]
    arrays = [[source.randrange(1, 2**61 - 2373) for _ in range(math.prod(shape))] for shape in shapes]
    operands = [{"shape": shape, "entries": entries} for shape, entries in zip(shapes, arrays)]
    answer = program.ask({"subscripts": subscripts, "operands": operands})
    integers = [numpy.array(entries, dtype=object).reshape(shape) for shape, entries in zip(shapes, arrays)]
    letters = len(set(subscripts) - set(",->"))
    if dimension**letters <= COMPARED:
        check(subscripts, dimension, answer, numpy.einsum(subscripts, *integers, optimize=len(shapes) > 2))
    floats = [array.astype(numpy.float64) for array in integers]
    path = numpy.einsum_path(subscripts, *floats, optimize=True)[0]
    whole = in_turns(program.timer(False), numpy_timer(subscripts, floats, True), arguments.repetitions)
    planned = in_turns(program.timer(True), numpy_timer(subscripts, floats, path), arguments.repetitions)
    text = " | ".join(f"{ours:9.2f} {theirs:9.2f} {ratio:7.3f}" for ours, theirs, ratio in (whole, planned))
    if arguments.others:
        wrapping = [array.astype(numpy.int64) for array in integers]
        text += f" | {alone(numpy_timer(subscripts, wrapping, True)):8.2f}"
        text += f" {alone(numpy_timer(subscripts, integers, True)):10.2f}"
    return {"contract": whole[2], "planned": planned[2], "text": text}


def check(subscripts, dimension, answer, wanted):
    wanted = [int(number) % answer["modulus"] for number in numpy.asarray(wanted, dtype=object).ravel()]
    if answer["values"] != wanted:
        print(f"{subscripts} in dimension {dimension} differs from NumPy's")
        raise SystemExit(1)


def numpy_timer(subscripts, arrays, optimize):
    def timer(calls):
        start = time.perf_counter_ns()
        for _ in range(calls):
            numpy.einsum(subscripts, *arrays, optimize=optimize)
        return time.perf_counter_ns() - start

    return timer


def calls_of(timer):
    """How many calls make a block; the calls that find it out also warm up."""
    calls = 1
    while timer(calls) < BLOCK:
        calls *= 2
    return calls


def in_turns(ours, theirs, repetitions):
    """The medians of both in microseconds a call, and the median of their ratios."""
    pairs = []
    sides = [(ours, calls_of(ours)), (theirs, calls_of(theirs))]
    for repetition in range(repetitions):
        order = (0, 1) if repetition % 2 == 0 else (1, 0)
        took = {side: sides[side][0](sides[side][1]) / sides[side][1] / 1000 for side in order}
        pairs.append((took[0], took[1]))
    return (statistics.median(a for a, _ in pairs), statistics.median(b for _, b in pairs),
            statistics.median(a / b for a, b in pairs))


def alone(timer):
    calls = calls_of(timer)
    return statistics.median(timer(calls) / calls / 1000 for _ in range(3))


def summary(rows, dimensions):
    print("\ngeometric means of the ratios, contract (planned)")
    print(f"{'':16}" + "".join(f"{dimension:>16}" for dimension in dimensions) + f"{'all':>16}")
    for kind in [*PRODUCTS, "all"]:
        chosen = [row for row in rows if kind in ("all", row["kind"])]
        columns = [[row for row in chosen if row["dimension"] == dimension] for dimension in dimensions]
        cells = [f"{mean(column, 'contract'):.3f} ({mean(column, 'planned'):.3f})" for column in [*columns, chosen]]
        print(f"{kind:16}" + "".join(f"{cell:>16}" for cell in cells))
    for key in ("contract", "planned"):
        slower = [row for row in rows if row[key] > 1]
        worst = max(rows, key=lambda row: row[key])
        print(f"{key}: slower than NumPy in {len(slower)} of {len(rows)}; at most {worst[key]:.2f} times its time"
              f" ({worst['subscripts']}, dimension {worst['dimension']})")


def mean(rows, key):
    return math.exp(statistics.fmean(math.log(row[key]) for row in rows))


if __name__ == "__main__":
    main()
