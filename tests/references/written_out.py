#!/usr/bin/env python3
"""Compares contractions that were written out with NumPy's contraction of arrays.

usage: written_out.py FILE [--break]

FILE holds one JSON object a line, as the example `written_out` of the crate indexwise-checker prints it. Exit status 1
if something differs, 2 if nothing could be compared. With --break each sum is made wrong in turn (a sign is turned, a
term is dropped or doubled), and the exit status is 0 only if every one is noticed.

Each kernel becomes an array of random integers, made to have its declared symmetry by summing over the permutations of
its slots. Checked for each contraction, with DRAWS independent sets of arrays, in exact integers and fractions:
  - the sum as written, read here from its LaTeX and evaluated term by term, equals the contraction by `einsum`, for
    every value of the free letters;
  - the terms that are said to vanish add up to zero;
  - no two terms of the sum are equal up to a number in all draws (all that coincide are collected), and none is zero.

Reference: NumPy's `einsum` on 64-bit integers (PyPI package `numpy`).
"""

import itertools
import json
import re
import sys
from fractions import Fraction

try:
    import numpy
except ImportError:
    print("NumPy is not installed.", file=sys.stderr)
    sys.exit(2)

DRAWS = 3
LARGEST = 1000
SHOWN = 10
LETTERS = "ijkl"
TOKEN = re.compile(r"\s*(\\frac\{(\d+)\}\{(\d+)\}|(\d+)|([A-Z])_(?:\{([^}]*)\}|(\w))|([-+()]))")


def tokens(text):
    """The text as a list of numbers, ('kernel', script) pairs and signs."""
    out, at = [], 0
    text = text.rstrip()
    while at < len(text):
        found = TOKEN.match(text, at)
        if not found:
            raise ValueError(f"cannot read {text[at:]!r}")
        at = found.end()
        if found[2]:
            out.append(Fraction(int(found[2]), int(found[3])))
        elif found[4]:
            out.append(Fraction(int(found[4])))
        elif found[5]:
            out.append((found[5], (found[6] or found[7]).replace(" ", "")))
        else:
            out.append(found[8])
    return out


def products(parts):
    """A sum, multiplied out, as (coefficient, kernels with scripts); consumes the parts up to a closing bracket."""
    out, own = [], [(Fraction(1), [])]
    begun = False
    while parts and parts[0] != ")":
        part = parts.pop(0)
        if part in ("+", "-"):
            if begun:
                out += own
            own, begun = [(Fraction(-1 if part == "-" else 1), [])], False
            continue
        begun = True
        if part == "(":
            inner = products(parts)
            parts.pop(0)
            own = [(one * two, left + right) for one, left in own for two, right in inner]
        elif isinstance(part, Fraction):
            own = [(one * part, left) for one, left in own]
        else:
            own = [(one, left + [part]) for one, left in own]
    return out + own


def outer_terms(text):
    """The terms of a sum with their signs, each as a text."""
    out, depth = [""], 0
    for sign in text:
        depth += (sign in "({") - (sign in ")}")
        if sign in "+-" and depth == 0 and out[-1].strip():
            out.append("")
        out[-1] += sign
    return out


def array(kernel, size, random):
    """Random integers with the declared symmetry."""
    slots, moved = kernel["slots"], kernel["in"]
    values = random.integers(-LARGEST, LARGEST, size=(size,) * slots)
    if not kernel["symmetry"]:
        return values
    total = numpy.zeros_like(values)
    for order in itertools.permutations(range(len(moved))):
        axes = list(range(slots))
        for place, to in enumerate(order):
            axes[moved[place]] = moved[to]
        inversions = sum(one > two for one, two in itertools.combinations(order, 2))
        odd = kernel["symmetry"] == "antisymmetric" and inversions % 2
        total = total + (-1 if odd else 1) * values.transpose(axes)
    return total


def places(free, values):
    """Every choice of values of the free letters, as positions."""
    return itertools.product(range(len(values)), repeat=len(free))


def contracted(term, summed, values, arrays):
    """The free letters of a term in the order of the alphabet, and for every choice of their values what einsum says."""
    free = "".join(letter for letter in LETTERS if letter in term_letters(term) and letter not in summed)
    total = dict.fromkeys(places(free, values), Fraction(0))
    for coefficient, kernels in products(tokens(term)):
        scripts = ",".join(script for _, script in kernels)
        value = numpy.einsum(f"{scripts}->{free}", *(arrays[name] for name, _ in kernels))
        for where in total:
            total[where] += coefficient * int(value[where])
    return free, total


def term_letters(term):
    return {letter for part in tokens(term) if isinstance(part, tuple) for letter in part[1]}


def evaluated(text, free, values, arrays):
    """What a written sum is for every choice of values of its free letters."""
    total = dict.fromkeys(places(free, values), Fraction(0))
    for coefficient, kernels in products(tokens(text)):
        for where in total:
            value = coefficient
            for name, script in kernels:
                value *= int(arrays[name][tuple(where[free.index(s)] if s in free else values.index(s) for s in script)])
            total[where] += value
    return total


def proportional(one, two):
    """Whether two lists of numbers are the same up to a number that is not zero."""
    first = next((at for at, value in enumerate(one) if value != 0), None)
    if first is None or two[first] == 0:
        return False
    return all(a * two[first] == b * one[first] for a, b in zip(one, two))


def faults(case, seed):
    """What is wrong with a contraction, as words."""
    random = numpy.random.default_rng(seed)
    values = case["values"]
    terms = [] if case["sum"] == "0" else outer_terms(case["sum"])
    seen = [[] for _ in terms]
    for _ in range(DRAWS):
        arrays = {kernel["name"]: array(kernel, len(values), random) for kernel in case["kernels"]}
        free, want = contracted(case["term"], case["letters"], values, arrays)
        got = evaluated(case["sum"], free, values, arrays)
        if want != got:
            return ["the sum has another value"]
        gone = [evaluated(text, free, values, arrays) for text in case["vanished"]]
        if any(sum(one[where] for one in gone) for where in want):
            return ["what is said to vanish does not"]
        for place, text in enumerate(terms):
            seen[place] += evaluated(text, free, values, arrays).values()
    if len(terms) != case["terms"]:
        return [f"{len(terms)} terms are written, {case['terms']} are said"]
    if any(not any(value != 0 for value in own) for own in seen):
        return ["a term is zero"]
    pairs = itertools.combinations(range(len(terms)), 2)
    return [f"not collected: {terms[a]} and {terms[b]}" for a, b in pairs if proportional(seen[a], seen[b])]


def broken(case):
    """The case with its sum made wrong, in each way that there is."""
    terms = outer_terms(case["sum"])
    turned = [" - " + terms[0].replace("+", " ").strip()] if not terms[0].strip().startswith("-") else [
        terms[0].replace("-", "", 1)]
    yield {**case, "sum": " ".join(turned + terms[1:])}
    yield {**case, "sum": " ".join(terms[1:]) or "0", "terms": len(terms) - 1}
    first = terms[0] if terms[0].strip().startswith("-") else "+ " + terms[0]
    yield {**case, "sum": " ".join(terms + [first]), "terms": len(terms) + 1}


def main():
    arguments = [argument for argument in sys.argv[1:] if argument != "--break"]
    breaks = "--break" in sys.argv[1:]
    with open(arguments[0], encoding="utf-8") as lines:
        cases = [json.loads(line) for line in lines]
    told, compared, unnoticed = [], 0, 0
    for seed, case in enumerate(cases):
        if "refused" in case:
            told.append(f"{case['term']}: {case['refused']}")
            continue
        if breaks:
            if case["sum"] == "0":
                continue
            for wrong in broken(case):
                compared += 1
                unnoticed += not faults(wrong, seed)
            continue
        compared += 1
        told += [f"{case['term']}: {fault}\n    {case['sum']}" for fault in faults(case, seed)]
        if not case["collected"]:
            told.append(f"{case['term']}: was not collected")
    for line in told[:SHOWN]:
        print(line)
    if not compared:
        print("nothing was compared", file=sys.stderr)
        return 2
    if breaks:
        print(f"{compared} sums were made wrong, {unnoticed} of them unnoticed")
        return 1 if unnoticed else 0
    vanish = sum(len(case.get("vanished", [])) for case in cases)
    print(f"{compared} contractions compared, {len(told)} differ; {vanish} terms vanish")
    return 1 if told else 0


if __name__ == "__main__":
    sys.exit(main())
