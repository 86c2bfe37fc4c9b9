#!/usr/bin/env python3
"""Compares normal forms of monomials with arrays of integers, contracted by NumPy.

usage: normal_forms.py FILE [--break]

FILE holds one JSON object a line, a group of monomials, as the example `monomials` of the crate indexwise-algebra
prints it. Exit status 1 if something differs, 2 if nothing could be compared. With --break one statement of each group
is made wrong in turn (a sign is turned, or a form is dropped), and the exit status is 0 only if every one is noticed.

Each kernel becomes an array of random integers, made to have its symmetries by summing over the group, which is spanned
here anew. Checked for each group, with DRAWS independent arrays:
  - a monomial is its sign times its form;
  - a monomial has no form exactly when its array is zero;
  - two monomials have the same form exactly when their arrays agree up to the sign, and the sign is the product of
    theirs;
  - a bracket is the sum that stands for it, and is zero exactly when that sum is empty.

That "exactly" holds needs arrays that are long enough: there are as many values as labels in a monomial, so that all
labels can have different values at once. Then a monomial, as a polynomial in the independent components of its
kernels, holds a product of components from which it can be read off up to symmetries and renaming, and unlike
monomials hold different products. Random integers that are all below LARGEST tell different polynomials of degree 3
apart with an error of at most 3 / LARGEST for each draw (Schwartz 1980, Zippel 1979).

Levels and families: an axis has a part for each level of each family, since labels move together with their levels and
an upper and a lower component are different numbers where no metric is. Anticommuting kernels: each is a sum of
generators of a Grassmann algebra times ordinary arrays, as many as there are such factors; of a product, the
coefficient of the product of all generators is taken.

Reference: NumPy's `einsum` on 64-bit integers (PyPI package `numpy`).
"""

import itertools
import json
import math
import sys

try:
    import numpy
except ImportError:
    print("NumPy is not installed.", file=sys.stderr)
    sys.exit(2)

DRAWS = 3
LARGEST = 1000
SHOWN = 20


def span(slots, generators):
    """All elements of the group as (images, sign)."""
    seen = {(tuple(range(slots)), 1)}
    pending = list(seen)
    while pending:
        images, sign = pending.pop()
        for other, factor in generators:
            product = (tuple(images[image] for image in other), sign * factor)
            if product not in seen:
                seen.add(product)
                pending.append(product)
    return sorted(seen)


def parity(order):
    return (-1) ** sum(order[i] > order[j] for i in range(len(order)) for j in range(i + 1, len(order)))


def label(slot):
    kind, number, family, _ = slot
    return (kind, number, family)


class Group:
    """The arrays of one line, and the values of monomials in them."""

    def __init__(self, line):
        self.kernels = line["kernels"]
        monomials = [monomial["factors"] for monomial in line["monomials"]]
        slots = [[slot for _, held in factors for slot in held] for factors in monomials]
        self.parts = sorted({(family, level) for held in slots for _, _, family, level in held})
        self.dimension = max(2, *(len({label(slot) for slot in held}) for held in slots))
        self.copies = sum(self.kernels[kernel]["odd"] for kernel, _ in monomials[0])
        self.elements = [span(kernel["slots"], kernel["generators"]) for kernel in self.kernels]

    def draw(self, random):
        """Arrays for all kernels, a copy for each generator of the Grassmann algebra."""
        self.arrays = []
        for kernel, elements in zip(self.kernels, self.elements):
            shape = (self.dimension * len(self.parts),) * kernel["slots"]
            copies = []
            for _ in range(self.copies if kernel["odd"] else 1):
                raw = random.integers(-LARGEST, LARGEST, shape, endpoint=True)
                # The array with axes moved by s holds at indices i what raw holds at i rearranged by s.
                copies.append(sum(sign * raw.transpose(numpy.argsort(images)) for images, sign in elements))
            self.arrays.append(copies)

    def block(self, kernel, copy, held):
        """The part of a kernel's array that its slots name, with components taken, and the labels of its axes."""
        places, labels = [], []
        for slot in held:
            start = self.parts.index((slot[2], slot[3])) * self.dimension
            if slot[0] == "c":
                places.append(start + slot[1])
            else:
                places.append(slice(start, start + self.dimension))
                labels.append(label(slot))
        return self.arrays[kernel][copy][tuple(places)], labels

    def value(self, factors):
        """The array of a monomial, its axes in the order of the free labels."""
        names = {}
        for _, held in factors:
            for slot in held:
                if slot[0] != "c":
                    names.setdefault(label(slot), len(names))
        free = [names[name] for name in sorted(names) if name[0] == "f"]
        odd = [place for place, (kernel, _) in enumerate(factors) if self.kernels[kernel]["odd"]]
        total = 0
        for order in itertools.permutations(range(len(odd))):
            operands = []
            for place, (kernel, held) in enumerate(factors):
                copy = order[odd.index(place)] if place in odd else 0
                array, labels = self.block(kernel, copy, held)
                operands += [array, [names[name] for name in labels]]
            total = total + parity(order) * numpy.einsum(*operands, free)
        return total

    def bracket(self, bracket):
        """The sum over all permutations of the labels in the places, not divided by their number."""
        factors, places = bracket["factors"], bracket["places"]
        total = 0
        for order in itertools.permutations(range(len(places))):
            moved = [[kernel, list(held)] for kernel, held in factors]
            for (factor, slot), source in zip(places, order):
                other, place = places[source]
                moved[factor][1][slot] = factors[other][1][place]
            sign = parity(order) if bracket["antisymmetric"] else 1
            total = total + sign * self.value(moved)
        return total


def same(arrays, others, sign=1):
    return all(numpy.array_equal(array, sign * other) for array, other in zip(arrays, others))


def examine(line, random, counts):
    """Complaints about one group."""
    group = Group(line)
    monomials, brackets = line["monomials"], line["brackets"]
    values = [[] for _ in monomials]
    forms = [[] for _ in monomials]
    sides = [[] for _ in brackets]
    for _ in range(DRAWS):
        group.draw(random)
        for place, monomial in enumerate(monomials):
            values[place].append(group.value(monomial["factors"]))
            if monomial["form"]:
                forms[place].append(group.value(monomial["form"]["factors"]))
        for place, bracket in enumerate(brackets):
            orders = math.factorial(len(bracket["places"]))
            total = 0 * group.value(bracket["factors"])
            for above, below, factors in bracket["sum"]:
                share, rest = divmod(orders * above, below)
                if rest:
                    yield f"a coefficient {above}/{below} in a bracket of {len(bracket['places'])}: {bracket}"
                total = total + share * group.value(factors)
            sides[place].append((group.bracket(bracket), total))
    zero = [not any(array.any() for array in arrays) for arrays in values]
    for monomial, arrays, form, vanishes in zip(monomials, values, forms, zero):
        counts["monomials"] += 1
        counts["zeros"] += vanishes
        if vanishes != (monomial["form"] is None):
            yield f"zero {vanishes}: {monomial}"
        elif not vanishes and not same(arrays, form, monomial["form"]["sign"]):
            yield f"not its form: {monomial}"
    for one, other in itertools.combinations(range(len(monomials)), 2):
        left, right = monomials[one]["form"], monomials[other]["form"]
        if left is None or right is None:
            continue
        counts["pairs"] += 1
        expected = left["sign"] * right["sign"] if left["factors"] == right["factors"] else 0
        found = sum(sign for sign in (1, -1) if same(values[one], values[other], sign))
        counts["equal pairs"] += found != 0
        if expected != found:
            yield f"sign {expected} by form, {found} by arrays: {monomials[one]} {monomials[other]}"
    for bracket, pairs in zip(brackets, sides):
        counts["brackets"] += 1
        if not all(numpy.array_equal(left, right) for left, right in pairs):
            yield f"not its sum: {bracket}"
        if (not bracket["sum"]) != (not any(left.any() for left, _ in pairs)):
            yield f"zero or not: {bracket}"


def broken(line, turn):
    """The line with one statement made wrong; nothing if it has no statement of that kind."""
    line = json.loads(json.dumps(line))
    if turn % 3 == 2:
        for bracket in line["brackets"]:
            for term in bracket["sum"]:
                term[0] = -term[0]
                return line
        return None
    for monomial in line["monomials"]:
        if monomial["form"]:
            if turn % 3 == 0:
                monomial["form"]["sign"] *= -1
            else:
                monomial["form"] = None
            return line
    return None


def main():
    names = [name for name in sys.argv[1:] if name != "--break"]
    if len(names) != 1:
        print(__doc__.split("\n\n")[1], file=sys.stderr)
        return 2
    with open(names[0], encoding="utf-8") as file:
        lines = [json.loads(line) for line in file]
    random = numpy.random.default_rng(1)
    counts = dict.fromkeys(["monomials", "zeros", "pairs", "equal pairs", "brackets"], 0)
    if "--break" in sys.argv:
        wrong = [made for turn, line in enumerate(lines) if (made := broken(line, turn))]
        unnoticed = sum(not list(examine(line, random, counts)) for line in wrong)
        print(f"{len(wrong)} groups made wrong, {unnoticed} of them not noticed")
        return 2 if not wrong else int(unnoticed > 0)
    complaints = [complaint for line in lines for complaint in examine(line, random, counts)]
    for complaint in complaints[:SHOWN]:
        print(complaint)
    print(", ".join(f"{count} {name}" for name, count in counts.items()) + f": {len(complaints)} complaints")
    return 2 if not counts["pairs"] else int(bool(complaints))


if __name__ == "__main__":
    sys.exit(main())
