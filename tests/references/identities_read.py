"""Reads the Cartesian documents of identities themselves and computes both sides of every formula with NumPy.

    python3 tests/references/identities_read.py [tests/identities]

`identities.py` has every identity written out by hand; a slip there that is not the slip of the document would go
unseen. Here the formulas of the documents without levels are read by a small reader of their own and summed over
repeated letters: those of `identities/` have to agree, those of `identities/corrupted/` have to differ. The reader
knows what these documents use and no more; what it cannot read is an error.
"""

import itertools
import math
import re
import sys
from fractions import Fraction
from pathlib import Path

import numpy as np

from identities import E, HALF, I, d, det, e, field, parity, values

TOKEN = re.compile(r'\\[A-Za-z]+|\d+|\S')
FORMULA = re.compile(r'\\begin\{equation\} (.*?) \\label\{(.*?)\} \\end')


class Reader:
    """A side of a formula; every part is an array with the letters of its slots in alphabetical order."""

    def __init__(self, text, kernels):
        self.tokens, self.kernels = TOKEN.findall(text), kernels

    def peek(self):
        return self.tokens[0] if self.tokens else None

    def next(self):
        return self.tokens.pop(0)

    def script(self):
        """What stands in braces, or the next token alone."""
        first = self.next()
        if first != '{':
            return [first]
        inside = list(itertools.takewhile(lambda token: token != '}', self.tokens))
        del self.tokens[:len(inside) + 1]
        return inside

    def side(self):
        total, letters, sign = None, [], 1
        while total is None or self.peek() in ('+', '-'):
            if self.peek() in ('+', '-'):
                sign = 1 if self.next() == '+' else -1
            array, own = self.term()
            assert total is None or own == letters, (own, letters)
            total, letters = array * sign if total is None else total + array * sign, own
        return total, letters

    def term(self):
        factors = []
        while self.peek() not in (None, '+', '-', ')'):
            factors.append(self.factor())
        return product(factors)

    def factor(self):
        token = self.next()
        if token.isdigit():
            return int(token), []
        if token == '\\frac':
            # `\frac16` is one sixth.
            over, under = self.next()
            return Fraction(int(over), int(under)), []
        if token == '(':
            array, letters = self.side()
            assert self.next() == ')'
            return self.power(array), letters
        if token == '\\partial':
            assert self.next() == '_'
            letter = self.next()
            array, letters = self.factor()
            return product([(d(array), letters + [letter])])
        if token == '\\det':
            name = self.tokens[1]
            del self.tokens[:self.tokens.index(')') + 1]
            return det(self.kernels[name, 2]), []
        if self.peek() != '_':
            return self.power(self.kernels[token, 0]), []
        self.next()
        script = self.script()
        slots = sum(letter.isalpha() for letter in script)
        return product([bracketed(self.kernels[token, slots], script)])

    def power(self, array):
        if self.peek() != '^':
            return array
        self.next()
        return math.prod([array] * int(self.next()))


def bracketed(array, script):
    """An array under `(ij)`, `[ijk]` or `[i|j|k]`, with its letters."""
    letters, inside, sign, passed = [], [], '', False
    for token in script:
        if token in '([':
            sign = token
        elif token == '|':
            passed = not passed
        elif token not in ')]':
            if sign and not passed:
                inside.append(len(letters))
            letters.append(token)
    if not sign:
        return array, letters
    total = 0
    for permutation in itertools.permutations(range(len(inside))):
        axes = list(range(array.ndim))
        for place, other in zip(inside, permutation):
            axes[place] = inside[other]
        total = total + np.transpose(array, axes) * (parity(permutation) if sign == '[' else 1)
    return total * Fraction(1, math.factorial(len(inside))), letters


def product(factors):
    """Factor by factor; a letter that stands twice is summed as soon as both have come."""
    every = [letter for _, letters in factors for letter in letters]
    assert all(every.count(letter) <= 2 for letter in every), every
    result, own = 1, []
    for number, (array, letters) in enumerate(factors):
        later = [letter for _, others in factors[number + 1:] for letter in others]
        here = own + letters
        kept = sorted(letter for letter in set(here) if here.count(letter) == 1 or letter in later)
        result = e(f'{"".join(own)},{"".join(letters)}->{"".join(kept)}', result, array)
        own = kept
    return result, own


def kernels(document):
    """Random values of what a document declares, by name and number of slots."""
    known = {('\\epsilon', 3): E, ('\\delta', 2): I}
    vectors, tensors, scalars = {
        'vector-identities': ('ABCDuv', '', ('\\phi', '\\psi')),
        'tensor-algebra': ('uv', 'ABTSW', ()),
        'determinants': ('uvw', 'AB', ()),
        'elasticity': ('ufvw', 'T', ('\\rho', '\\phi')),
    }[document]
    known |= {(name, 1): field(3) for name in vectors}
    known |= {(name, 2): field(3, 3) for name in tensors}
    known |= {(name, 0): field() for name in scalars}
    if document == 'tensor-algebra':
        symmetric, antisymmetric = known['S', 2], known['W', 2]
        known |= {('S', 2): symmetric + symmetric.T, ('W', 2): antisymmetric - antisymmetric.T}
        known['T', 3] = field(3, 3, 3)
    if document == 'elasticity':
        lame, shear, stress, gradient = 7, 11, field(3, 3), d(known['u', 1])
        strain = (gradient + gradient.T) * HALF
        known |= {('\\lambda', 0): lame, ('\\mu', 0): shear, ('\\sigma', 2): stress + stress.T, ('E', 2): strain}
        known |= {('W', 2): (gradient.T - gradient) * HALF}
        known |= {('S', 2): lame * e('kk->', strain) * I + 2 * shear * strain}
    return known


def agree(formula, known):
    left, right = (text.strip() for text in formula.split('='))
    array, letters = Reader(left, known).side()
    if right == '0':
        return not any(values(array).values())
    other, others = Reader(right, known).side()
    assert letters == others, (letters, others)
    return values(array) == values(other)


def main():
    folder = Path(sys.argv[1] if len(sys.argv) > 1 else Path(__file__).parent.parent / 'identities')
    wrong, counts = 0, [0, 0]
    for document in ('vector-identities', 'tensor-algebra', 'determinants', 'elasticity'):
        known = kernels(document)
        for corrupted in (False, True):
            path = folder / ('corrupted' if corrupted else '') / f'{document}.tex'
            for formula, label in FORMULA.findall(path.read_text()):
                counts[corrupted] += 1
                if agree(formula, known) == corrupted:
                    print(f'{path}: {label}: {"holds" if corrupted else "does not hold"}')
                    wrong += 1
    print(f'read: {counts[0]} identities, {counts[1]} corrupted; {wrong} wrong')
    sys.exit(1 if wrong or not all(counts) else 0)


if __name__ == '__main__':
    main()
