#!/usr/bin/env python3
"""Recomputes both sides of every step that fails, from the numbers of its counterexample alone, with SymPy.

usage: counterexamples.py FILE [--break]

FILE holds what `indexwise check --report json` prints about documents whose steps fail. Of each counterexample only
the dimension, the Taylor coefficients of the fields (`fields`, `variables`) and the component are taken; the formula is
read off the document by the small reader below, which knows what those documents use and no more, and both sides are
computed with plain differentiation and by the textbook definitions written out here:

    G^i_jk = g^im (d_j g_mk + d_k g_mj - d_m g_jk) / 2,
    R^i_jkl = d_k G^i_jl - d_l G^i_jk + G^i_km G^m_jl - G^i_lm G^m_jk,  R_jl = R^i_jil,

covariant derivatives slot by slot, determinants by SymPy, variations as derivatives along a parameter. Nothing is
shared with the program. Exit status 1 if a number differs, 2 if fewer than 20 steps could be compared. With --break the
left number of every step is spoilt before the comparison: exit status 0 if each of them is noticed, 1 if not.

Reference: SymPy (PyPI package `sympy`).
"""

import itertools
import json
import re
import sys

import numpy as np
import sympy

LEAST = 20
TOKEN = re.compile(r"\\[A-Za-z]+|\\,|\d|\S")


def main():
    arguments = [argument for argument in sys.argv[1:] if argument != "--break"]
    breaking = "--break" in sys.argv[1:]
    if len(arguments) != 1:
        sys.exit(__doc__)
    with open(arguments[0], encoding="utf-8") as file:
        report = json.load(file)
    compared, wrong = 0, []
    for document in report["files"]:
        with open(document["path"], encoding="utf-8") as file:
            text = file.read()
        for step in document.get("steps", []):
            found = step["verdict"].get("counterexample")
            if step["verdict"]["verdict"] != "fails" or found is None:
                continue
            place = f"{document['path']}:{step['start']['line']}"
            left, right = sides(text, step)
            told = [sympy.Rational(found["left"]), sympy.Rational(found["right"])]
            if breaking:
                told[0] += 1
            own = [World(found).number(side) for side in (left, right)]
            compared += 1
            if own != told:
                wrong.append(f"{place}: {told} is told, {own} is computed")
    if compared < LEAST:
        print(f"only {compared} steps were compared")
        sys.exit(2)
    if breaking:
        print(f"{len(wrong)} of {compared} spoilt counterexamples are noticed")
        sys.exit(len(wrong) != compared)
    print("\n".join(wrong + [f"{compared} counterexamples, {len(wrong)} differ"]))
    sys.exit(bool(wrong))


def sides(text, step):
    """The sides that a relation sign joins, as texts."""
    data = text.encode()
    start, end = step["start"]["offset"], step["end"]["offset"]
    before = data[:start].decode().rsplit("$$", 1)[1]
    after = data[end:].decode().split("$$", 1)[0]
    clean = lambda side: "\n".join(line for line in side.split("\n") if not line.startswith("%")).strip(" .,\n")
    return clean(before.split("=")[-1]), clean(after.split("=")[0])


class Value:
    """An array of expressions, each slot with its letter and level."""

    def __init__(self, array, slots):
        self.array, self.slots = np.array(array, dtype=object), list(slots)

    def letters(self):
        return [letter for letter, _ in self.slots]


class World:
    """The fields of a counterexample, and what follows from the metric among them."""

    def __init__(self, found):
        self.n = found["dimension"]
        self.component = {entry["name"]: int(entry["value"]) - 1 for entry in found["component"]}
        self.x = sympy.symbols(f"x1:{self.n + 1}")
        self.parameters = {}
        symbols = []
        for name in found["variables"]:
            if name.startswith("x_"):
                symbols.append(self.x[int(name[2:]) - 1])
            else:
                symbols.append(self.parameters.setdefault(name, sympy.Symbol("t" + str(len(self.parameters)))))
        self.fields = {}
        for entry in found["fields"]:
            value = sum(
                sympy.Rational(term["coefficient"]) * sympy.prod(s**e for s, e in zip(symbols, term["exponents"]))
                for term in entry["terms"]
            )
            key = entry["name"], len(entry["component"])
            array, _ = self.fields.setdefault(key, (self.zeros(key[1]), entry["levels"]))
            array[tuple(member - 1 for member in entry["component"])] = value
        self.known = {}

    def zeros(self, slots):
        return np.full((self.n,) * slots, sympy.Integer(0), dtype=object)

    def each(self, slots):
        return itertools.product(range(self.n), repeat=slots)

    def number(self, side):
        """A side at the point, in the component that is told."""
        value = Reader(side, self).whole()
        letters = {"\\" + name: member for name, member in self.component.items()} | self.component
        place = tuple(letters[letter] for letter in value.letters())
        number = value.array[place] if place else value.array[()]
        number = sympy.sympify(number).subs({symbol: 0 for symbol in [*self.x, *self.parameters.values()]})
        return sympy.nsimplify(sympy.simplify(number))

    def once(name):
        """A property that is computed once."""
        def decorate(compute):
            def get(self):
                if name not in self.known:
                    self.known[name] = compute(self)
                return self.known[name]
            return property(get)
        return decorate

    @once("metric")
    def metric(self):
        return self.fields["g", 2][0]

    @once("inverse")
    def inverse(self):
        return np.array(sympy.Matrix(self.metric).inv().tolist(), dtype=object)

    @once("determinant")
    def determinant(self):
        return sympy.Matrix(self.metric).det()

    @once("connection")
    def connection(self):
        g, out = self.metric, self.zeros(3)
        for i, j, k in self.each(3):
            out[i, j, k] = sum(
                self.inverse[i, m]
                * (g[m, k].diff(self.x[j]) + g[m, j].diff(self.x[k]) - g[j, k].diff(self.x[m]))
                for m in range(self.n)
            ) / 2
        return out

    @once("riemann")
    def riemann(self):
        c, out = self.connection, self.zeros(4)
        for i, j, k, l in self.each(4):
            out[i, j, k, l] = c[i, j, l].diff(self.x[k]) - c[i, j, k].diff(self.x[l]) + sum(
                c[i, k, m] * c[m, j, l] - c[i, l, m] * c[m, j, k] for m in range(self.n)
            )
        return out

    @once("ricci")
    def ricci(self):
        return np.einsum("ijil->jl", self.riemann)

    @once("scalar")
    def scalar(self):
        return sum(self.inverse[i, j] * self.ricci[i, j] for i, j in self.each(2))

    def moved(self, array, own, levels):
        """An array with the slots that stand on another level moved by the metric."""
        for slot, (has, wants) in enumerate(zip(own, levels)):
            if has != wants and has and wants:
                by = self.inverse if wants == "up" else self.metric
                array = np.moveaxis(np.tensordot(by, array, axes=(1, slot)), 0, slot)
        return array

    def kernel(self, name, slots):
        """What a kernel stands for, on the levels in which it is written."""
        levels = [level for _, level in slots]
        count = len(slots)
        if name == "\\epsilon":
            signs = self.zeros(count)
            for places in itertools.permutations(range(self.n)):
                signs[places] = sympy.LeviCivita(*places)
            return Value(signs, slots)
        if name == "\\delta" and count == 2:
            return Value(np.array(sympy.eye(self.n).tolist(), dtype=object), slots)
        if name == "x" and count == 1:
            origin = self.fields.get(("x", 1), (self.zeros(1), None))[0]
            return Value([origin[i] + self.x[i] for i in range(self.n)], slots)
        if name == "g" and count == 0:
            return Value(self.determinant, [])
        if name == "g" and levels == ["up", "up"]:
            return Value(self.inverse, slots)
        if name == "\\Gamma":
            return Value(self.connection, slots)
        if name in "RG" and count in (0, 2, 4):
            if count == 4:
                return Value(self.moved(self.riemann, ["up", "down", "down", "down"], levels), slots)
            if count == 0:
                return Value(self.scalar, [])
            array = self.ricci if name == "R" else self.ricci - self.metric * self.scalar / 2
            return Value(self.moved(array, ["down", "down"], levels), slots)
        array, own = self.fields.get((name, count), (self.zeros(count), levels))
        return Value(self.moved(array, own, levels) if count else array, slots)

    def partial(self, slot, of):
        array = np.array([self.derived(of.array, symbol) for symbol in self.x], dtype=object)
        return self.product([Value(array, [slot] + of.slots)])

    def derived(self, array, symbol):
        return np.vectorize(lambda entry: sympy.sympify(entry).diff(symbol), otypes=[object])(array)

    def covariant(self, slot, of):
        array = np.array([self.derived(of.array, symbol) for symbol in self.x], dtype=object)
        for place, (_, level) in enumerate(of.slots):
            # With the slots of the connection and of what it corrects: k, the slot, the others.
            moved = np.moveaxis(of.array, place, 0)
            if level == "up":
                term = np.einsum("ikm,m...->ki...", self.connection, moved)
            else:
                term = -np.einsum("mki,m...->ki...", self.connection, moved)
            array = array + np.moveaxis(term, 1, place + 1)
        if slot[1] == "up":
            array = np.tensordot(self.inverse, array, axes=(1, 0))
        return self.product([Value(array, [slot] + of.slots)])

    def product(self, values):
        """Factors multiplied, letters that stand twice summed as soon as both have come."""
        result = Value(sympy.Integer(1), [])
        every = [letter for value in values for letter in value.letters()]
        for number, value in enumerate(values):
            here = result.slots + value.slots
            names = {letter: chr(97 + at) for at, letter in enumerate(dict.fromkeys(letter for letter, _ in here))}
            later = [letter for other in values[number + 1:] for letter in other.letters()]
            letters = [letter for letter, _ in here]
            kept = [slot for slot in here if letters.count(slot[0]) == 1 or slot[0] in later]
            assert all(every.count(letter) <= 2 for letter in every), every
            text = lambda slots: "".join(names[letter] for letter, _ in slots)
            array = np.einsum(f"{text(result.slots)},{text(value.slots)}->{text(kept)}", result.array, value.array)
            result = Value(array, kept)
        return result


class Reader:
    """A side of a formula, read and computed in one go."""

    def __init__(self, text, world):
        self.tokens = [token for token in TOKEN.findall(text) if token != "\\,"]
        self.world, self.in_bars = world, False

    def whole(self):
        value = self.side()
        assert not self.tokens, self.tokens
        return value

    def peek(self):
        return self.tokens[0] if self.tokens else None

    def next(self):
        return self.tokens.pop(0)

    def side(self):
        total, sign = None, 1
        while True:
            if self.peek() in ("+", "-"):
                sign = 1 if self.next() == "+" else -1
            term = self.term()
            if total is None:
                total = Value(term.array * sign, term.slots)
            else:
                order = [term.letters().index(letter) for letter in total.letters()]
                total = Value(total.array + np.transpose(term.array, order) * sign, total.slots)
            if self.peek() not in ("+", "-"):
                return total

    def term(self):
        factors = []
        while self.peek() not in (None, "+", "-", ")", "}") and not (self.peek() == "|" and self.in_bars):
            factors.append(self.factor())
        return self.world.product(factors)

    def braced(self):
        if self.peek() != "{":
            return Reader(self.next(), self.world).whole()
        self.next()
        value = self.side()
        assert self.next() == "}"
        return value

    def factor(self):
        token = self.next()
        if token.isdigit():
            while self.peek() and self.peek().isdigit():
                token += self.next()
            return Value(sympy.Integer(token), [])
        if token == "\\frac":
            over, under = self.braced(), self.braced()
            return Value(over.array / under.array[()], over.slots)
        if token == "\\sqrt":
            return Value(sympy.sqrt(self.braced().array[()]), [])
        if token == "|":
            self.in_bars = True
            value = self.side()
            self.in_bars = False
            assert self.next() == "|"
            inner = value.array[()]
            zero = {symbol: 0 for symbol in [*self.world.x, *self.world.parameters.values()]}
            return Value(inner if inner.subs(zero) > 0 else -inner, [])
        if token == "(":
            value = self.side()
            assert self.next() == ")"
            return self.powered(value)
        if token == "\\det":
            assert self.next() == "("
            value = self.side()
            assert self.next() == ")"
            return Value(sympy.Matrix(value.array.tolist()).det(), [])
        if token == "\\delta" and self.peek() not in ("_", "^"):
            of = self.factor()
            return Value(self.world.derived(of.array, self.world.parameters.get("\\delta", sympy.Symbol("none"))), of.slots)
        slots = self.scripts()
        if token in ("\\partial", "\\nabla"):
            (slot,) = slots
            of = self.factor()
            return self.world.partial(slot, of) if token == "\\partial" else self.world.covariant(slot, of)
        if not slots:
            return self.powered(self.world.kernel(token, []))
        return self.world.product([self.world.kernel(token, slots)])

    def powered(self, value):
        """A number above a bracket or a scalar: its power."""
        if self.peek() == "^" and self.tokens[1] in "23456789{":
            self.next()
            exponent = self.braced().array[()]
            return Value(value.array[()] ** exponent, [])
        return value

    def scripts(self):
        slots = []
        while self.peek() in ("_", "^") and not (self.peek() == "^" and self.tokens[1].isdigit()):
            level = "down" if self.next() == "_" else "up"
            if self.peek() == "{":
                self.next()
                inside = list(itertools.takewhile(lambda token: token != "}", self.tokens))
                del self.tokens[: len(inside) + 1]
            else:
                inside = [self.next()]
            if any(token in "-0123456789" for token in inside):
                self.tokens[:0] = ["^", "{", *inside, "}"]
                break
            slots += [(letter, level) for letter in inside]
            if self.peek() == "{" and self.tokens[1] == "}":
                del self.tokens[:2]
        return slots


if __name__ == "__main__":
    main()
