#!/usr/bin/env python3
"""Recomputes curvature, determinants, inverses and adjugates with SymPy and compares them with ours.

usage: geometry.py FILE [--break]

FILE holds what the example `geometry_cases` of the crate indexwise-algebra prints: metrics as formulas of the
coordinates x0, x1, .. with a point, matrices of integers, and our numbers, as fractions or as residues beside their
modulus. Each number is computed here from textbook formulas with plain differentiation and SymPy's matrix routines,
without any module for tensors, and compared exactly.

Metrics are treated in two independent ways. If its formulas are short ("general" is false), the inverse is a matrix
of functions and the curvature tensor is

    R^i_jkl = d_k G^i_jl - d_l G^i_jk + G^i_km G^m_jl - G^i_lm G^m_jk.

Always, the inverse is taken at the point and the curvature tensor is found with its first index lowered from second
derivatives of the metric (Landau and Lifshitz, "The Classical Theory of Fields", section 92; from memory):

    R_ijkl = (d_j d_k g_il + d_i d_l g_jk - d_i d_k g_jl - d_j d_l g_ik) / 2 + g_mn (G^m_jk G^n_il - G^m_jl G^n_ik).

Exit status 1 if a number differs, 2 if nothing could be compared. With --break one number of every list is spoilt
before the comparison: exit status 0 if each of them is noticed, 1 if not.

Reference: SymPy (PyPI package `sympy`).
"""

import itertools
import json
import sys

import sympy


def main():
    arguments = [argument for argument in sys.argv[1:] if argument != "--break"]
    breaking = "--break" in sys.argv[1:]
    if len(arguments) != 1:
        sys.exit(__doc__)
    with open(arguments[0], encoding="utf-8") as file:
        cases = json.load(file)
    judge = Judge(breaking)
    expected = {}
    for case in cases["metrics"]:
        # The same metric is there with several kinds of numbers.
        if case["name"] not in expected:
            expected[case["name"]] = list(of_metric(case))
        for way, lists in expected[case["name"]]:
            judge.compare(f"{case['name']} ({way}, {field(case)})", case, lists)
    for case in cases["matrices"]:
        judge.compare(f"matrix {case['matrix']} ({field(case)})", case, of_matrix(case))
    judge.close(f"{len(cases['metrics'])} metrics, {len(cases['matrices'])} matrices")


def field(case):
    return "fractions" if case["modulus"] is None else f"modulo {case['modulus']}"


class Judge:
    """Compares lists of numbers, counts, and spoils what it is given if it is to show that it can tell."""

    def __init__(self, breaking):
        self.breaking = breaking
        self.lists = self.numbers = self.differing = 0

    def compare(self, title, case, expected):
        for name, wanted in expected.items():
            ours = case[name]
            if wanted is None or ours is None:
                # A matrix without inverse: there is no number to spoil, so spoil that.
                same = wanted is None and ours is None and not self.breaking
            else:
                same = self.equal(ours, wanted, case["modulus"])
                self.numbers += len(wanted)
            self.lists += 1
            self.differing += not same
            if not same and not self.breaking:
                print(f"{title}: {name} differs\n  ours   {ours}\n  SymPy  {wanted}")

    def equal(self, ours, wanted, modulus):
        wanted = [residue(number, modulus) for number in wanted]
        ours = [sympy.Rational(number) for number in ours]
        if self.breaking:
            spoilt = self.lists % len(ours)
            ours[spoilt] += 1
        return ours == wanted

    def close(self, what):
        print(f"{what}: {self.lists} lists with {self.numbers} numbers compared, {self.differing} differ")
        if self.lists == 0 or self.numbers == 0:
            sys.exit(2)
        if self.breaking:
            sys.exit(0 if self.differing == self.lists else 1)
        sys.exit(1 if self.differing else 0)


def residue(number, modulus):
    """A fraction modulo a prime, or itself."""
    number = sympy.Rational(number)
    if modulus is None:
        return number
    prime = int(modulus)
    return sympy.Integer(int(number.p) * pow(int(number.q), -1, prime) % prime)


def of_matrix(case):
    size = case["size"]
    matrix = sympy.Matrix(size, size, case["matrix"])
    determinant = matrix.det()
    x = sympy.Symbol("x")
    return {
        "determinant": [determinant],
        "adjugate": list(matrix.adjugate()),
        "characteristic": matrix.charpoly(x).all_coeffs()[::-1],
        "inverse": None if determinant == 0 else list(matrix.inv()),
    }


def of_metric(case):
    """Our lists as SymPy gives them, by each way, with its name."""
    size = len(case["point"])
    x = sympy.symbols(f"x:{size}")
    names = {str(symbol): symbol for symbol in x}
    entries = [sympy.sympify(entry, locals=names, rational=True) for entry in case["metric"]]
    metric = sympy.Matrix(size, size, entries)
    point = dict(zip(x, map(sympy.Rational, case["point"])))
    yield "at the point", at_the_point(metric, x, point)
    if not case["general"]:
        yield "by functions", by_functions(metric, x, point)


def by_functions(metric, x, point):
    n = range(len(x))
    metric = metric.applyfunc(sympy.cancel)
    inverse = metric.inv().applyfunc(sympy.cancel)
    gamma = [[[sympy.cancel(sum(inverse[i, m] * (metric[m, k].diff(x[j]) + metric[m, j].diff(x[k])
                                                 - metric[j, k].diff(x[m])) for m in n) / 2)
               for k in n] for j in n] for i in n]

    def component(i, j, k, l):
        return (gamma[i][j][l].diff(x[k]) - gamma[i][j][k].diff(x[l])
                + sum(gamma[i][k][m] * gamma[m][j][l] - gamma[i][l][m] * gamma[m][j][k] for m in n))

    riemann = {index: component(*index).subs(point) for index in itertools.product(n, repeat=4)}
    christoffel = [gamma[i][j][k].subs(point) for i, j, k in itertools.product(n, repeat=3)]
    return lists(metric.subs(point), christoffel, riemann)


def at_the_point(metric, x, point):
    n = range(len(x))
    value = metric.subs(point)
    inverse = value.inv()
    first = {(i, j, k): metric[i, j].diff(x[k]).subs(point) for i, j, k in itertools.product(n, repeat=3)}
    second = {(i, j, k, l): metric[i, j].diff(x[k], x[l]).subs(point)
              for i, j, k, l in itertools.product(n, repeat=4)}
    gamma = {(i, j, k): sum(inverse[i, m] * (first[m, k, j] + first[m, j, k] - first[j, k, m]) for m in n) / 2
             for i, j, k in itertools.product(n, repeat=3)}

    def lowered(i, j, k, l):
        linear = second[i, l, j, k] + second[j, k, i, l] - second[j, l, i, k] - second[i, k, j, l]
        squares = sum(value[m, q] * (gamma[m, j, k] * gamma[q, i, l] - gamma[m, j, l] * gamma[q, i, k])
                      for m, q in itertools.product(n, repeat=2))
        return linear / 2 + squares

    lower = {index: lowered(*index) for index in itertools.product(n, repeat=4)}
    riemann = {(i, j, k, l): sum(inverse[i, m] * lower[m, j, k, l] for m in n)
               for i, j, k, l in itertools.product(n, repeat=4)}
    return lists(value, [gamma[index] for index in itertools.product(n, repeat=3)], riemann)


def lists(value, christoffel, riemann):
    """What follows from the metric at the point, the Christoffel symbols and the curvature tensor R^i_jkl."""
    size = value.shape[0]
    n = range(size)
    inverse = value.inv()
    ricci = sympy.Matrix(size, size, lambda j, l: sum(riemann[i, j, i, l] for i in n))
    scalar = sum(inverse[j, l] * ricci[j, l] for j, l in itertools.product(n, repeat=2))
    return {
        "determinant": [value.det()],
        "inverse": list(inverse),
        "christoffel": christoffel,
        "riemann": [riemann[index] for index in itertools.product(n, repeat=4)],
        "ricci": list(ricci),
        "scalar": [scalar],
        "einstein": list(ricci - scalar * value / 2),
    }


if __name__ == "__main__":
    main()
