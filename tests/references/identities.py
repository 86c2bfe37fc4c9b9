"""Shows by NumPy alone that the identities hold and that their corrupted twins do not.

    python3 tests/references/identities.py [tests/identities]

Every label of `identities/*.tex` has an entry here: the identity written out anew, by hand, in arrays. Fields are
polynomials with random integer coefficients about a random point, metrics are invertible there, and whatever follows
from them (inverse, determinant, Christoffel symbols, covariant derivatives, curvature) is computed by the textbook
formulas, exactly, in truncated power series of integers and fractions. An entry gives three arrays: the side that the
slip leaves alone, the other side as published, and that side with the slip. The first two have to agree, the first and
the third have to differ. What SymPy says of the inverse and the derivatives of a metric is compared at the end, so that
the series themselves do not rest on their own word. Documents and entries are paired by labels: a label without an
entry, or an entry without a label, is an error.
"""

import itertools
import random
import re
import sys
from fractions import Fraction
from pathlib import Path

import numpy as np
import sympy

DRAW = random.Random(20)
# x, y, z and a fourth variable: a coordinate in four dimensions, else the parameter of variations.
VARIABLES = 4
DEGREE = 3
# Large enough that two sides which differ do not coincide at the point by chance.
LARGEST = 1000
HALF = Fraction(1, 2)
MONOMIALS = [m for m in itertools.product(range(DEGREE + 1), repeat=VARIABLES) if sum(m) <= DEGREE]
ORIGIN = (0,) * VARIABLES


class Series:
    """A polynomial about the point, without the terms beyond DEGREE."""

    def __init__(self, terms):
        self.terms = {m: c for m, c in terms.items() if c != 0}

    def __add__(self, other):
        if isinstance(other, np.ndarray):
            return NotImplemented
        terms = dict(self.terms)
        for m, c in series(other).terms.items():
            terms[m] = terms.get(m, 0) + c
        return Series(terms)

    def __mul__(self, other):
        if isinstance(other, np.ndarray):
            return NotImplemented
        terms = {}
        for m, c in self.terms.items():
            for n, e in series(other).terms.items():
                if sum(m) + sum(n) <= DEGREE:
                    key = tuple(a + b for a, b in zip(m, n))
                    terms[key] = terms.get(key, 0) + c * e
        return Series(terms)

    __radd__, __rmul__ = __add__, __mul__

    def __neg__(self):
        return Series({m: -c for m, c in self.terms.items()})

    def __sub__(self, other):
        return NotImplemented if isinstance(other, np.ndarray) else self + (-series(other))

    def __rsub__(self, other):
        return series(other) - self

    def derivative(self, k):
        lower = lambda m: m[:k] + (m[k] - 1,) + m[k + 1:]
        return Series({lower(m): c * m[k] for m, c in self.terms.items() if m[k]})

    def value(self):
        return self.terms.get(ORIGIN, 0)


def series(number):
    return number if isinstance(number, Series) else Series({ORIGIN: number})


def reciprocal(f):
    """1/f, by the geometric series."""
    small = series(1) - f * Fraction(1, f.value())
    return (series(1) + small + small * small + small * small * small) * Fraction(1, f.value())


def root(f):
    """The root of a series whose value is 1, by the binomial series."""
    assert f.value() == 1
    h = f - 1
    return series(1) + h * HALF - h * h * Fraction(1, 8) + h * h * h * Fraction(1, 16)


def field(*shape, variables=VARIABLES):
    """A random field with slots of these lengths, which depends on the first few variables."""
    own = [m for m in MONOMIALS if not any(m[variables:])]
    array = np.empty(shape, dtype=object)
    for place in np.ndindex(*shape):
        array[place] = Series({m: DRAW.randint(-LARGEST, LARGEST) for m in own})
    return array if shape else array[()]


def e(spec, *factors):
    """Sum over repeated letters."""
    result = np.einsum(spec, *[np.array(f, dtype=object) for f in factors], optimize=False)
    return result if isinstance(result, np.ndarray) and result.shape else np.array(result, dtype=object)[()]


def d(T, n=3):
    """Partial derivatives in a further slot, the last."""
    T = np.array(T, dtype=object)
    out = np.empty(T.shape + (n,), dtype=object)
    for place in np.ndindex(*out.shape):
        out[place] = series(T[place[:-1]]).derivative(place[-1])
    return out


def vary(T):
    """The derivative by the parameter, at 0."""
    T = np.array(T, dtype=object)
    out = np.empty(T.shape, dtype=object)
    for place in np.ndindex(*T.shape):
        terms = series(T[place]).derivative(3).terms
        out[place] = Series({m: c for m, c in terms.items() if m[3] == 0})
    return out if T.shape else out[()]


def values(T):
    T = np.array(T, dtype=object)
    return {place: series(T[place]).value() for place in np.ndindex(*T.shape)}


def parity(permutation):
    return (-1) ** sum(a > b for a, b in itertools.combinations(permutation, 2))


def bracket(T, signed):
    """Mean over the permutations of all slots, with their signs or without."""
    slots = list(itertools.permutations(range(T.ndim)))
    return sum(np.transpose(T, p) * (parity(p) if signed else 1) for p in slots) * Fraction(1, len(slots))


# The permutation symbol, the delta, and determinants of three rows and columns.
E = np.zeros((3, 3, 3), dtype=object)
for p in itertools.permutations(range(3)):
    E[p] = parity(p)
I = np.array([[int(i == j) for j in range(3)] for i in range(3)], dtype=object)


def det(M):
    return e('ijk,i,j,k->', E, M[0], M[1], M[2])


def adjugate(M):
    """The transposed matrix of cofactors."""
    return e('jab,icd,ac,bd->ij', E, E, M, M) * HALF


def inverse(M):
    return adjugate(M) * reciprocal(det(M))


class Space:
    """A metric and what follows from it; slots of derivatives come last."""

    def __init__(self, g):
        self.g = g
        self.det = det(g)
        self.gi = adjugate(g) * reciprocal(self.det)
        self.dg = d(g)
        lower = (self.dg + np.transpose(self.dg, (0, 2, 1)) - np.transpose(self.dg, (2, 0, 1))) * HALF
        self.lower = lower
        self.gam = e('il,ljk->ijk', self.gi, lower)
        dgam, gg = d(self.gam), e('ace,ebd->abcd', self.gam, self.gam)
        self.dgam, self.gg = dgam, gg
        self.riem = np.transpose(dgam, (0, 1, 3, 2)) - dgam + gg - np.transpose(gg, (0, 1, 3, 2))
        self.low = e('ae,ebcd->abcd', g, self.riem)
        self.ricci = e('cacb->ab', self.riem)
        self.scalar = e('ab,ab->', self.gi, self.ricci)

    def nabla(self, T, levels):
        """The covariant derivative, its slot last; `u` and `d` are the levels of the slots."""
        out = d(T)
        slots = 'abcdefgh'[:len(levels)]
        for place, level in enumerate(levels):
            inner = slots[:place] + 'x' + slots[place + 1:]
            if level == 'u':
                out = out + e(f'{slots[place]}yx,{inner}->{slots}y', self.gam, T)
            else:
                out = out - e(f'xy{slots[place]},{inner}->{slots}y', self.gam, T)
        return out


def metric(variables):
    """A random metric whose determinant is 1 at the point, and whose root is thus a rational series."""
    lower = np.array([[1, 0, 0], [2, 1, 0], [-1, 3, 1]], dtype=object)
    random_part = field(3, 3, variables=variables)
    for place in np.ndindex(3, 3):
        random_part[place] = random_part[place] - random_part[place].value()
    return e('ki,kj->ij', lower, lower) + random_part + random_part.T


ENTRIES = {}


def both(label, same, right, wrong):
    assert label not in ENTRIES, label
    ENTRIES[label] = (same, right, wrong)


def minus(label, same, a, b):
    """same = a - b, corrupted to a + b."""
    both(label, same, a - b, a + b)


def plus(label, same, a, b):
    """same = a + b, corrupted to a - b."""
    both(label, same, a + b, a - b)


def zero(label, right, wrong):
    both(label, np.array(right, dtype=object) * 0, right, wrong)


def vector_identities():
    A, B, C, D, u, v = (field(3) for _ in range(6))
    f, q = field(), field()
    du, dv, df, dq = d(u), d(v), d(f), d(q)
    minus('epsilon-delta', e('ijk,imn->jkmn', E, E), e('jm,kn->jkmn', I, I), e('jn,km->jkmn', I, I))
    both('epsilon-two-summed', e('ijk,ijn->kn', E, E), 2 * I, 3 * I)
    both('epsilon-three-summed', e('ijk,ijk->', E, E), 6, 3)
    t = lambda s: e(s + '->ijklmn', I, I, I)
    rest = t('il,jm,kn') + t('im,jn,kl') + t('in,jl,km') - t('il,jn,km') - t('im,jl,kn')
    minus('epsilon-product', e('ijk,lmn->ijklmn', E, E), rest, t('in,jm,kl'))
    triple = lambda a, b, c: e('ijk,i,j,k->', E, a, b, c)
    both('triple-cyclic', triple(A, B, C), triple(B, C, A), triple(C, B, A))
    dot = lambda a, b: e('i,i->', a, b)
    cross = lambda a, b: e('ijk,j,k->i', E, a, b)
    minus('triple-vector', cross(A, cross(B, C)), B * dot(A, C), C * dot(A, B))
    both('triple-vector-left', cross(cross(A, B), C), B * dot(A, C) - A * dot(B, C), A * dot(B, C) - B * dot(B, C))
    AB, CD = cross(A, B), cross(C, D)
    both('lagrange', dot(AB, CD), dot(A, C) * dot(B, D) - dot(A, D) * dot(B, C),
         dot(A, B) * dot(C, D) - dot(A, D) * dot(B, C))
    both('lagrange-square', dot(AB, AB), dot(A, A) * dot(B, B) - dot(A, B) * dot(A, B),
         dot(A, A) * dot(B, B) - 2 * dot(A, B) * dot(A, B))
    zero('cross-square-zero', AB + cross(B, A), AB - cross(B, A))
    zero('cross-orthogonal', dot(A, AB), dot(C, AB))
    minus('quadruple', cross(AB, CD), C * triple(A, B, D), D * triple(A, B, C))
    ends = A * triple(D, B, C) + C * triple(A, B, D)
    both('four-vectors', D * triple(A, B, C), ends + B * triple(A, D, C), ends + B * triple(D, A, C))
    pair = cross(B, cross(A, C)) * 0 + e('ijk,klm,j,l,m->i', E, E, A, B, C) + e('ijk,klm,j,l,m->i', E, E, B, C, A)
    last = e('ijk,klm,j,l,m->i', E, E, C, A, B)
    zero('jacobi-cross', pair + last, pair - last)
    t = lambda s: e(s + '->mijkl', I, E)
    three = t('mi,jkl') - t('mj,ikl') + t('mk,ijl')
    zero('schouten-epsilon', three - t('ml,ijk'), three + t('ml,ijk'))
    zero('curl-grad', e('ijk,kj->i', E, d(df)), e('ijk,kj->i', E, du))
    zero('div-curl', e('ijk,kji->', E, d(du)), e('ii->', d(cross(u, v))))
    curl = lambda w: e('ijk,kj->i', E, d(w))
    minus('curl-curl', curl(curl(u)), e('jji->i', d(du)), e('ijj->i', d(du)))
    plus('div-scaled', e('ii->', d(f * u)), dot(df, u), f * e('ii->', du))
    both('grad-product', d(f * q), f * dq + q * df, f * dq + 2 * q * df)
    both('curl-scaled', curl(f * u), cross(df, u) + f * curl(u), cross(u, df) + f * curl(u))
    minus('div-cross', e('ii->', d(cross(u, v))), dot(v, curl(u)), dot(u, curl(v)))
    rest = u * e('jj->', dv) - v * e('jj->', du) - e('j,ij->i', u, dv)
    both('curl-cross', curl(cross(u, v)), rest + e('j,ij->i', v, du), rest + e('j,ji->i', v, du))
    rest = e('j,ij->i', u, dv) + e('j,ij->i', v, du) + cross(u, curl(v))
    plus('grad-dot', d(dot(u, v)), rest, cross(v, curl(u)))
    lap = lambda w: e('ii->', d(d(w)))
    rest = f * lap(q) + q * lap(f)
    both('laplace-product', lap(f * q), rest + 2 * dot(df, dq), rest + dot(df, dq))
    minus('green', e('ii->', d(f * dq - q * df)), f * lap(q), q * lap(f))
    both('lamb', e('j,ij->i', u, du), HALF * d(dot(u, u)) - cross(u, curl(u)), d(dot(u, u)) - cross(u, curl(u)))
    both('vorticity-square', dot(curl(u), curl(u)), e('kj,kj->', du, du) - e('kj,jk->', du, du), 0)
    zero('div-grads', e('ii->', d(cross(df, dq))), e('ii->', d(cross(df, v))))
    both('helmholtz-square', d(f * f * f), 3 * f * f * df, 2 * f * f * df)
    minus('axial-vector', e('ijk,k->ij', E, curl(u)), du.T, du)
    first = e('j,ij->i', v, du)
    both('dyad-divergence', e('ijj->i', d(e('i,j->ij', u, v))), first + u * e('jj->', dv), first + e('j,ji->i', u, dv))


def tensor_algebra():
    A, B, T, T3 = field(3, 3), field(3, 3), field(3, 3), field(3, 3, 3)
    S, W = field(3, 3), field(3, 3)
    S, W = S + S.T, W - W.T
    u, v = field(3), field(3)
    sym, alt = (lambda M: (M + M.T) * HALF), (lambda M: (M - M.T) * HALF)
    dot = lambda M, N: e('ij,ij->', M, N)
    # Here the slip is on the left.
    both('split', T, sym(T) + alt(T), sym(T) - alt(T))
    both('bracket-two', T - T.T, 2 * alt(T), alt(T))
    both('round-two', 2 * sym(T), T + T.T, T + T)
    t = lambda s: e(s + '->ijk', T3)
    rest = t('ijk') + t('jki') + t('kij') - t('jik') - t('ikj')
    minus('bracket-three', 6 * bracket(T3, True), rest, t('kji'))
    whole = t('ijk') + t('jki') + t('kij') + t('jik') + t('ikj') + t('kji')
    both('round-three', whole, 6 * bracket(T3, False), 3 * bracket(T3, False))
    both('bracket-outer', 2 * ((t('ijk') - t('kji')) * HALF), t('ijk') - t('kji'), t('ijk') - t('ikj'))
    zero('symmetric-antisymmetric', dot(S, W), dot(S, T))
    plus('parts-contract', dot(A, B), dot(sym(A), sym(B)), dot(alt(A), alt(B)))
    both('symmetric-sees-symmetric', dot(S, T), dot(S, sym(T)), dot(S, alt(T)))
    c = lambda *three: e('ij,jk,ki->', *three)
    both('trace-cyclic', c(A, B, T), c(B, T, A), c(T, B, A))
    both('trace-transpose', e('ij,ji->', A, B), e('ji,ij->', A, B), e('ij,ij->', A, B))
    zero('commutator-trace', e('ij,ji->', A, B) - e('ij,ji->', B, A), e('ij,ij->', A, B) - e('ij,ji->', B, A))
    chain = e('i,ij,jk,k->', u, A, B, v)
    both('transpose-product', chain, e('i,ji,kj,k->', v, B, A, u), e('i,ij,kj,k->', v, B, A, u))
    q = lambda M: e('i,j,ij->', u, u, M)
    both('quadratic-form', q(A), q(sym(A)), q(alt(A)))
    com = lambda M, N: e('ij,jk->ik', M, N) - e('ij,jk->ik', N, M)
    right = com(A, com(B, T)) + com(B, com(T, A)) + com(T, com(A, B))
    zero('jacobi-commutator', right, right - 2 * e('ij,jk,kl->il', B, A, T))
    both('square-sum', dot(A + B, A + B), dot(A, A) + 2 * dot(A, B) + dot(B, B), dot(A, A) + dot(A, B) + dot(B, B))
    both('dyad-trace', e('i,j,ij->', u, v, A), e('ij,j,i->', A, v, u), e('ij,i,j->', A, v, u))
    both('delta-substitutes', e('ij,jk->ik', I, A), A, A.T)
    trace = e('ii->', T)
    both('bracket-bracket', 2 * dot(alt(T), T), dot(T, T) - dot(T, T.T), dot(T, T) - trace * trace)
    du, dA = d(u), d(A)
    ends = e('ik,ij,j->k', du, A, u) + e('i,ij,jk->k', u, A, du)
    both('gradient-of-form', d(e('i,ij,j->', u, A, u)), ends + e('i,ijk,j->k', u, dA, u),
         ends + e('i,kji,j->k', u, dA, u))


def determinants():
    A, B, u, v, w = field(3, 3), field(3, 3), field(3), field(3), field(3)
    D, tr = det(A), e('ii->', A)
    AA = e('ij,jk->ik', A, A)
    t2, t3 = e('ii->', AA), e('ij,ji->', AA, A)
    written = e('ijk,lmn,il,jm,kn->', E, E, A, A, A)
    both('det-epsilon', D, Fraction(1, 6) * written, Fraction(1, 3) * written)
    both('det-rows', e('ijk,il,jm,kn->lmn', E, A, A, A), E * D, e('mln->lmn', E) * D)
    both('det-invariants', 6 * D, tr * tr * tr - 3 * tr * t2 + 2 * t3, tr * tr * tr - 3 * tr * t2 + 3 * t3)
    second = lambda square: HALF * (tr * tr - square)
    cayley = lambda square: tr * AA - second(square) * A + D * I
    both('cayley-hamilton', e('ij,jk->ik', AA, A), cayley(t2), cayley(e('mn,mn->', A, A)))
    minus('second-invariant', e('ijk,lmk,il,jm->', E, E, A, A), tr * tr, t2)
    cofactor = e('ijk,lmn,jm,kn,ip->lp', E, E, A, A, A)
    both('cofactor', D * I, HALF * cofactor, cofactor)
    both('cofactor-vectors', e('ijk,jm,m,kn,n,il->l', E, A, u, A, v, A), D * e('lmn,m,n->l', E, u, v),
         D * e('lmn,m,n->l', E, v, u))
    triple = lambda a, b, c: e('ijk,i,j,k->', E, a, b, c)
    act = lambda x: e('ij,j->i', A, x)
    two = triple(act(u), v, w) + triple(u, act(v), w)
    both('trace-triple', tr * triple(u, v, w), two + triple(u, v, act(w)), two + triple(u, act(w), v))
    both('det-product', det(e('ij,jk->ik', A, B)), D * det(B), D * D)
    right = e('ijk,lmn,il,jm,knp->p', E, E, A, A, d(A))
    both('det-derivative', d(D), HALF * right, Fraction(1, 6) * right)
    du = d(u)
    zero('piola', e('lil->i', d(e('ijk,lmn,jm,kn->li', E, E, du, du))),
         e('lil->i', d(e('ijk,lmn,jm,nk->li', E, E, du, du))))


def geometry():
    s = Space(metric(3))
    g, gi, gam, dg, D, r = s.g, s.gi, s.gam, s.dg, s.det, root(s.det)
    over = reciprocal(r)
    V, U, w = field(3), field(3), field(3)
    T, F, S = field(3, 3), field(3, 3), field(3, 3)
    F, S = F - F.T, S + S.T
    f = field()
    dV, dU, dw, df = d(V), d(U), d(w), d(f)
    nV, nU, nw = s.nabla(V, 'u'), s.nabla(U, 'u'), s.nabla(w, 'd')
    two = dg + e('ikj->ijk', dg)
    minus('christoffel', 2 * e('il,ljk->ijk', g, gam), two, e('jki->ijk', dg))
    first = e('il,lkj->ijk', gi, dg)
    both('christoffel-symmetric', gam - first, e('ikj->ijk', gam) - first,
         e('ikj->ijk', gam) - e('il,jlk->ijk', gi, dg))
    trace = e('iik->k', gam)
    both('christoffel-trace', trace, HALF * e('ij,ijk->k', gi, dg), HALF * e('ij,jki->k', gi, dg))
    both('christoffel-log', trace, d(r) * over, d(D) * reciprocal(D))
    both('christoffel-det', d(D), 2 * D * trace, D * trace)
    right = over * e('ikk->i', d(r * gi))
    both('christoffel-contracted', e('jk,ijk->i', gi, gam), -right, right)
    zero('compatible-lower', s.nabla(g, 'dd'), dg)
    a = e('lj,lik->ijk', g, gam)
    both('compatible-written', dg, a + e('il,ljk->ijk', g, gam), a + e('kl,lij->ijk', g, gam))
    dgi = d(gi)
    right = e('ia,jb,abk->ijk', gi, gi, dg)
    both('metric-inverse-derivative', dgi, -right, right)
    a, b = e('ikl,lj->ijk', gam, gi), e('jkl,il->ijk', gam, gi)
    both('inverse-written', dgi, -a - b, -a + b)
    both('inverse-inverse', e('ij,jk,k->i', gi, g, V), V, U)
    # The definitions: the derivative follows from that of scalars and from the product rule along a second way.
    plus('nabla-vector', e('ij,jk->ik', gi, s.nabla(e('ij,j->i', g, V), 'd')), dV, e('ikl,l->ik', gam, V))
    minus('nabla-covector', e('ij,jk->ik', g, s.nabla(e('ij,j->i', gi, w), 'u')), dw, e('lki,l->ik', gam, w))
    rest = d(T) + e('ikl,lj->ijk', gam, T)
    both('nabla-tensor', s.nabla(T, 'uu'), rest + e('jkl,il->ijk', gam, T), rest + e('jkl,li->ijk', gam, T))
    low = e('ij,j->i', g, V)
    both('nabla-lower', e('ij,jk->ik', g, nV), s.nabla(low, 'd'), d(low))
    div = e('ii->', nV)
    both('divergence', div, over * e('ii->', d(r * V)), over * e('ii->', dV))
    # The slip puts T for F on the left; on the right F stays, so that the untouched side is the right one.
    both('divergence-antisymmetric', over * e('iji->j', d(r * F)), e('iji->j', s.nabla(F, 'uu')),
         e('iji->j', s.nabla(T, 'uu')))
    mixed = e('ij,jk->ik', S, g)
    a, b = over * e('iki->k', d(r * mixed)), e('ij,ijk->k', S, dg)
    both('divergence-symmetric', e('iki->k', s.nabla(mixed, 'ud')), a - HALF * b, a - b)
    hess = s.nabla(df, 'd')
    box = e('ij,ij->', gi, hess)
    both('laplacian', box, over * e('ii->', d(r * e('ij,j->i', gi, df))),
         over * r * e('ii->', d(e('ij,j->i', gi, df))))
    minus('hessian', hess, d(df), e('kij,k->ij', gam, df))
    both('torsion-free', hess, hess.T, d(df))
    both('exterior', dw.T - dw, nw.T - nw, nw.T + nw)
    nl = s.nabla(low, 'd')
    rest = e('k,ijk->ij', V, dg) + e('kj,ki->ij', g, dV)
    plus('lie-metric', nl + nl.T, rest, e('ik,kj->ij', g, dV))
    a, b = e('j,ij->i', U, nV), e('j,ij->i', V, nU)
    both('lie-bracket', e('j,ij->i', U, dV) - e('j,ij->i', V, dU), a - b, a + b)
    a = e('j,ij->i', V, nw)
    both('lie-covector', e('j,ij->i', V, dw) + e('j,ji->i', w, dV), a + e('j,ji->i', w, nV), a + e('j,ji->i', w, nU))
    a = e('ji,j->i', nV, w)
    both('leibniz', d(e('j,j->', V, w)), a + e('j,ji->i', V, nw), a + e('j,ji->i', V, dw))
    a = e('jk,ji,k->i', g, nV, U)
    both('scalar-product', d(e('jk,j,k->', g, V, U)), a + e('jk,j,ki->i', g, V, nU), a + e('jk,j,ki->i', g, V, dU))
    a = e('i,i->', V, df)
    both('div-scaled-covariant', e('ii->', s.nabla(f * V, 'u')), a + f * div, a + f * e('ii->', dV))
    right = r * e('ij,ijk->k', gi, dg)
    both('root-derivative', d(r), HALF * right, right)


def curvature():
    s = Space(metric(3))
    g, gi, gam, R, L, Ric, Rs = s.g, s.gi, s.gam, s.riem, s.low, s.ricci, s.scalar
    V, w, T, F, S, f = field(3), field(3), field(3, 3), field(3, 3), field(3, 3), field()
    F, S = F - F.T, S + S.T
    # The curvature by commuted derivatives is the independent side of the definition.
    nnV = s.nabla(s.nabla(V, 'u'), 'ud')  # V^c with b, then a: slots c b a
    commuted = e('cba->abc', nnV) - e('cab->abc', nnV)
    dgam, gg = s.dgam, s.gg
    swap = lambda X: e('abdc->abcd', X)
    by_coordinates = coordinate_riemann(s)
    both('riemann-definition', by_coordinates, swap(dgam) - dgam + gg - swap(gg), swap(dgam) - dgam + gg + swap(gg))
    both('riemann-sign', by_coordinates + swap(gg) - gg, swap(dgam) - dgam, dgam - swap(dgam))
    both('ricci-identity-vector', commuted, e('cdab,d->abc', R, V), e('cadb,d->abc', R, V))
    nnw = s.nabla(s.nabla(w, 'd'), 'dd')
    right = e('dcab,d->abc', R, w)
    both('ricci-identity-covector', e('cba->abc', nnw) - e('cab->abc', nnw), -right, right)
    nnT = s.nabla(s.nabla(T, 'uu'), 'uud')
    a = e('ceab,ed->abcd', R, T)
    both('ricci-identity-tensor', e('cdba->abcd', nnT) - e('cdab->abcd', nnT), a + e('deab,ce->abcd', R, T),
         a + e('deab,ec->abcd', R, T))
    low = e('ab,b->a', g, V)
    extra = e('a,b,cd->abcd', low, low, Ric)
    turned = e('bacd->abcd', L)
    both('riemann-first-pair', L + extra, -turned + extra, turned + extra)
    extra = e('ab,cd->abcd', S, S)
    both('riemann-pairs', L - extra, e('cdab->abcd', L) - extra, e('cadb->abcd', L) - extra)
    a, b = L + e('acdb->abcd', L), e('adbc->abcd', L)
    zero('bianchi-first', a + b, a - b)
    n = s.nabla(L, 'dddd')
    a = e('abcde->abcde', n) + e('abdec->abcde', n)
    zero('bianchi-second', a + e('abecd->abcde', n), a + e('abced->abcde', n))
    nric = s.nabla(Ric, 'dd')
    minus('bianchi-once', e('abcda->bcd', s.nabla(R, 'uddd')), e('bdc->bcd', nric), nric)
    divergence = e('ac,abc->b', gi, nric)
    both('bianchi-twice', divergence, HALF * d(Rs), d(Rs))
    up = e('ac,bd,cd->ab', gi, gi, Ric)
    div = lambda X: e('aba->b', s.nabla(X, 'uu'))
    zero('einstein-divergence', div(up - HALF * gi * Rs), div(up))
    einstein = Ric - HALF * g * Rs
    both('einstein-definition', einstein + Ric, 2 * Ric - HALF * Rs * g, 2 * Ric - Rs * g)
    both('ricci-contraction', e('cacb->ab', R) + S, Ric + S, -Ric + S)
    traced = e('ccab->ab', e('cabd->cdab', dgam))
    a = traced + e('cce,eab->ab', gam, gam)
    both('ricci-gamma', Ric + e('cacb->ab', dgam), a - e('cbe,eac->ab', gam, gam), a - e('cce,eab->ab', gam, gam))
    extra = e('a,b->ab', w, low)
    # One of the two equal products is changed.
    both('ricci-symmetric', Ric - extra, Ric.T - extra, Ric.T - extra.T)
    both('ricci-scalar', e('bd,abad->', gi, R) + f, Rs + f, 2 * Rs + f)
    right = e('bd,d->b', Ric, V)
    both('divergences-commute', e('aba->b', nnV) - e('aab->b', nnV), right, -right)
    df = d(f)
    third = s.nabla(s.nabla(df, 'd'), 'dd')  # slots: first gradient, second, outermost
    plus('bochner-scalar', e('bc,acb->a', gi, third), e('bc,cba->a', gi, third), e('ab,bc,c->a', Ric, gi, df))
    twice = lambda X: e('abba->', s.nabla(s.nabla(e('ac,bd,cd->ab', gi, gi, X), 'uu'), 'uud'))
    zero('antisymmetric-twice', twice(F), twice(S))
    nw2 = nnw  # slots: w, inner derivative, outer derivative
    t = lambda x, y, z: e(f'{z}{y}{x}->abc', nw2)
    five = t('a', 'b', 'c') - t('a', 'c', 'b') + t('b', 'c', 'a') - t('b', 'a', 'c') + t('c', 'a', 'b')
    zero('exact-closed', five - t('c', 'b', 'a'), five + t('c', 'b', 'a'))
    nV = s.nabla(V, 'u')
    rest = e('ba,ab->', nV, nV) + e('b,aab->', V, nnV)
    plus('raychaudhuri', e('aa->', s.nabla(e('b,ab->a', V, nV), 'u')), rest, e('ab,a,b->', Ric, V, V))


def coordinate_riemann(s):
    """The Riemann tensor by second derivatives of the metric (Landau and Lifshitz, section 92, from memory)."""
    dd = d(s.dg)  # g_ab with two derivatives
    second = e('adbc->abcd', dd) + e('bcad->abcd', dd) - e('acbd->abcd', dd) - e('bdac->abcd', dd)
    products = e('ef,ebc,fad->abcd', s.g, s.gam, s.gam) - e('ef,ebd,fac->abcd', s.g, s.gam, s.gam)
    return e('ae,ebcd->abcd', s.gi, second * HALF + products)


def elasticity():
    u, v, w, rho, f, T, sig = field(3), field(3), field(3), field(), field(), field(3, 3), field(3, 3)
    sig = sig + sig.T
    lam, mu = 5, 3
    du, dv, dw = d(u), d(v), d(w)
    Eij, W = (du + du.T) * HALF, (du.T - du) * HALF
    tr = e('kk->', Eij)
    S = lam * tr * I + 2 * mu * Eij
    div = e('kk->', du)
    dot = lambda M, N: e('ij,ij->', M, N)
    both('strain-trace', 2 * tr, 2 * div, div)
    both('gradient-split', Eij + W, du.T, du)
    both('work-conjugate', dot(sig, du.T), dot(sig, Eij), dot(sig, W))
    plus('virtual-power', e('jj->', d(e('ij,i->j', sig, v))), e('ijj,i->', d(sig), v), e('ij,ij->', sig, dv))
    both('hooke-trace', e('kk->', S) + f, (3 * lam + 2 * mu) * tr + f, (2 * lam + 2 * mu) * tr + f)
    both('hooke-energy', dot(S, Eij), lam * tr * tr + 2 * mu * dot(Eij, Eij), lam * tr * tr + mu * dot(Eij, Eij))
    graddiv, lap = e('jji->i', d(du)), e('ijj->i', d(du))
    force = e('ijj->i', d(S))
    both('navier', force, (lam + mu) * graddiv + mu * lap, (lam + 2 * mu) * graddiv + mu * lap)
    curl = lambda x: e('ijk,kj->i', E, d(x))
    minus('navier-curl', force, (lam + 2 * mu) * graddiv, mu * curl(curl(u)))
    dd = d(d(Eij))
    rest = e('ijkl->ijkl', dd) + e('klij->ijkl', dd) - e('jlik->ijkl', dd)
    zero('saint-venant', rest - e('ikjl->ijkl', dd), rest + e('ikjl->ijkl', dd))
    inc = lambda X: e('ikm,jln,mnkl->ij', E, E, d(d(X)))
    zero('incompatibility', inc(Eij), inc(sig))
    dE = d(Eij)
    minus('rotation-gradient', d(W), e('jki->ijk', dE), e('ikj->ijk', dE))
    a = v * e('jj->', d(rho * v))
    both('continuity', e('ijj->i', d(rho * e('i,j->ij', v, v))), a + rho * e('j,ij->i', v, dv),
         a + rho * e('j,ji->i', v, dv))
    a = e('ijk,j,kll->i', E, w, d(T))
    both('angular-momentum', e('ijk,jkll->i', E, d(e('j,kl->jkl', w, T))), e('ijk,jl,kl->i', E, dw, T) + a,
         e('ijk,jl,lk->i', E, dw, T) + a)
    p = e('kk->', sig)
    third = Fraction(1, 3)
    zero('deviator', e('ii->', sig - third * p * I), e('ii->', sig - HALF * p * I))
    dev = sig - third * p * I
    both('deviator-square', dot(dev, dev), dot(sig, sig) - third * p * p, dot(sig, sig) - 2 * third * p * p)
    right = e('kk->', d(d(div)))
    both('dilatation-wave', e('ijji->', d(d(S))), (lam + 2 * mu) * right, (lam + mu) * right)


def electrodynamics():
    n = np.array(np.diag([-1, 1, 1, 1]), dtype=object)
    D = lambda X: d(X, 4)
    A, J, k, chi, H, Q = field(4), field(4), field(4), field(), field(4, 4), field(4, 4)
    H = H - H.T
    up = lambda X: e('ac,bd,cd->ab', n, n, X)
    dA = D(A).T  # slots: derivative, potential
    F = dA - dA.T
    dF = D(F)
    two = e('bca->abc', dF) + e('cab->abc', dF)
    zero('homogeneous', two + dF, two - dF)
    zero('charge', e('abba->', D(D(up(H)))), e('abba->', D(D(up(Q)))))
    minus('field-square', e('ab,ab->', F, up(F)), 2 * e('ab,ab->', dA, up(dA)), 2 * e('ab,ba->', dA, up(dA)))
    ddA = D(D(A))
    minus('inhomogeneous', e('aba->b', D(up(F))), e('bc,ae,cae->b', n, n, ddA), e('bc,ae,aec->b', n, n, ddA))
    shifted = lambda sign: D(A + sign * D(chi)).T
    zero('gauge', shifted(1) - shifted(1).T - F, shifted(1) - shifted(-1).T - F)
    square = lambda X: e('ab,ab->', X, up(X))
    stress = lambda X, part: e('ac,bd,cd->ab', X, X, n) - part * n * square(X)
    quarter = Fraction(1, 4)
    zero('stress-trace', e('ab,ab->', n, stress(H, quarter)), e('ab,ab->', n, stress(H, HALF)))
    div = lambda X: e('ac,abc->b', n, D(X))
    # F_ac F_b^c
    both('force', e('ea,ace,bd,cd->b', n, dF, F, n), div(stress(F, quarter)), div(stress(F, HALF)))
    zero('no-work', e('ab,a,b->', H, k, k), e('ab,a,b->', H, k, J))
    both('metric-trace', e('ab,ab->', n, n), 4, 3)
    dchi, box = D(chi), e('ab,ab->', n, D(D(chi)))
    a = e('ab,a,b->', n, dchi, dchi)
    both('dalembert', e('ab,ab->', n, D(chi * dchi)), a + chi * box, a + 2 * chi * box)


def variations():
    moved = Space(metric(4))
    at = np.vectorize(lambda x: Series({m: c for m, c in x.terms.items() if m[3] == 0}), otypes=[object])
    s = Space(at(moved.g))
    g, gi, r = s.g, s.gi, root(s.det)
    h = vary(moved.g)
    A, f = field(3), field()
    now = lambda X: at(np.array(X, dtype=object))
    right = r * e('ab,ab->', gi, h)
    both('vary-root', vary(root(moved.det)), HALF * right, right)
    right = s.det * e('ab,ab->', gi, h)
    both('vary-determinant', vary(moved.det), right, -right)
    right = e('ac,bd,cd->ab', gi, gi, h)
    both('vary-inverse', vary(moved.gi), -right, right)
    nh = s.nabla(h, 'dd')
    G = vary(moved.gam)
    a, b = e('dcb->dbc', nh) + e('dbc->dbc', nh), e('bcd->dbc', nh)
    half = HALF * gi
    minus('palatini-connection', G, e('ad,dbc->abc', half, a), e('ad,dbc->abc', half, b))
    nG = s.nabla(G, 'udd')
    minus('palatini-riemann', vary(moved.riem), e('adbc->abcd', nG), e('acbd->abcd', nG))
    minus('palatini-ricci', vary(moved.ricci), e('cabc->ab', nG), e('cacb->ab', nG))
    fA, dfA = now(A), vary(A)
    both('vary-scalar', vary(e('a,b->ab', A, A)), e('a,b->ab', fA, dfA) + e('a,b->ab', dfA, fA),
         e('a,b->ab', fA, dfA) - e('a,b->ab', dfA, fA))
    both('vary-square', vary(f * f), 2 * now(f)[()] * vary(f), now(f)[()] * vary(f))
    df, dv = now(d(f)), d(vary(f))
    both('vary-gradient', vary(e('a,b->ab', d(f), d(f))), e('a,b->ab', dv, df) + e('a,b->ab', df, dv),
         e('a,b->ab', dv, df) + e('b,a->ab', df, dv))
    plus('vary-kinetic', vary(HALF * e('ab,a,b->', moved.gi, d(f), d(f))), e('ab,a,b->', gi, df, dv),
         HALF * e('a,b,ab->', df, df, vary(moved.gi)))
    nd = s.nabla(dfA, 'd').T
    minus('vary-field', vary(d(A).T - d(A)), nd, nd.T)


def without(T):
    """Without the terms in the parameter."""
    return in_order(T, 0)


def in_order(T, order):
    """The coefficient of a power of the parameter."""
    T = np.array(T, dtype=object)
    out = np.empty(T.shape, dtype=object)
    for place in np.ndindex(*T.shape):
        terms = series(T[place]).terms
        out[place] = Series({m[:3] + (0,): c for m, c in terms.items() if m[3] == order})
    return out if T.shape else out[()]


def up_to(T, order):
    """All that is compared of a side with terms left out: its coefficients below an order."""
    return np.stack([np.array(in_order(T, k), dtype=object) for k in range(order)])


def logarithm(f):
    """The logarithm of a series whose value is 1."""
    assert f.value() == 1
    h = f - 1
    return h - h * h * HALF + h * h * h * Fraction(1, 3)


def matrices():
    mul = lambda first, *rest: first if not rest else e('ij,jk->ik', first, mul(*rest))
    tr = lambda M: e('ii->', M)
    comm = lambda M, N: mul(M, N) - mul(N, M)
    A, B, C = field(3, 3), field(3, 3), field(3, 3)
    Ai, Bi, D = inverse(A), inverse(B), det(A)
    over = reciprocal(D)
    both('transpose-of-product', mul(A, B).T, mul(B.T, A.T), mul(A.T, B.T))
    both('inverse-product', inverse(mul(A, B)), mul(Bi, Ai), mul(Ai, Bi))
    both('inverse-transpose', inverse(A.T), Ai.T, Ai)
    both('trace-of-cycle', tr(mul(A, B, C)), tr(mul(B, C, A)), tr(mul(B, A, C)))
    both('frobenius', tr(mul(A.T, B)), e('ij,ij->', A, B), e('ij,ji->', A, B))
    both('product-components', mul(A, B.T), e('ik,jk->ij', A, B), e('ik,kj->ij', A, B))
    both('inverse-components', I, e('ij,jk->ik', Ai, A), e('ij,kj->ik', Ai, A))
    both('determinant-product', det(mul(A, B)), D * det(B), D * D)
    both('determinant-inverse', det(Ai), over, -over)
    both('adjugate', mul(A, adjugate(A)), D * I, 2 * D * I)
    aA, aB = adjugate(A), adjugate(B)
    both('adjugate-product', adjugate(mul(A, B)), mul(aB, aA), mul(aA, aB))
    both('inverse-adjugate', Ai, aA * over, aA)
    t1, t2, t3 = tr(A), tr(mul(A, A)), tr(mul(A, A, A))
    both('determinant-traces', 6 * D, t1 * t1 * t1 - 3 * t1 * t2 + 2 * t3, t1 * t1 * t1 - 3 * t1 * t2 + t3)
    cayley = mul(A, A, A) - t1 * mul(A, A) + HALF * (t1 * t1 - t2) * A
    zero('cayley-hamilton-bare', cayley - D * I, cayley + D * I)
    pushed = inverse(I + mul(A, B))
    both('push-through', mul(pushed, A), mul(A, inverse(I + mul(B, A))), mul(A, pushed))
    both('sylvester', det(I + mul(A, B)), det(I + mul(B, A)), det(I - mul(B, A)))
    two = comm(A, comm(B, C)) + comm(B, comm(C, A))
    zero('commutators', two + comm(C, comm(A, B)), two + comm(C, comm(B, A)))
    both('trace-of-commutator', tr(mul(A, comm(B, C))), tr(mul(comm(A, B), C)), tr(mul(comm(B, A), C)))
    N, dA = without(A), vary(A)
    Ni, DN = inverse(N), det(N)
    both('jacobi', vary(D), DN * tr(mul(Ni, dA)), DN * tr(mul(N, dA)))
    right = tr(mul(Ni, dA))
    both('jacobi-logarithm', vary(D) * reciprocal(DN), right, HALF * right)
    both('jacobi-adjugate', vary(D), tr(mul(adjugate(N), dA)), tr(mul(adjugate(N).T, dA)))
    both('jacobi-components', d(D), D * e('ij,jik->k', Ai, d(A)), D * e('ij,ijk->k', Ai, d(A)))
    right = mul(Ni, dA, Ni)
    both('vary-inverse-matrix', vary(Ai), -right, right)
    a = e('ijl,jk->ikl', d(A), B)
    both('derivative-product', d(mul(A, B)), a + e('ij,jkl->ikl', A, d(B)), a + e('ijl,jk->ikl', d(B), A))
    both('vary-power', vary(t3), 3 * tr(mul(N, N, dA)), 3 * tr(mul(N, dA)))
    size = Series({(0, 0, 0, 1): 1})
    h = without(field(3, 3)) * size
    both('small-determinant', up_to(det(N + h) - DN, 2), up_to(DN * tr(mul(Ni, h)), 2), up_to(tr(mul(Ni, h)), 2))
    s1, s2 = tr(h), tr(mul(h, h))
    both('small-determinant-second', up_to(det(I + h), 3), up_to(1 + s1 + HALF * (s1 * s1 - s2), 3),
         up_to(1 + s1 + HALF * (s1 * s1 + s2), 3))
    first, second = Ni - mul(Ni, h, Ni), mul(Ni, h, Ni, h, Ni)
    both('neumann', up_to(inverse(N + h), 3), up_to(first + second, 3), up_to(first - second, 3))
    # The logarithm of a quotient: that of the determinant itself stands on both sides.
    first, second = tr(mul(Ni, h)), HALF * tr(mul(Ni, h, Ni, h))
    both('small-logarithm', up_to(logarithm(det(N + h) * reciprocal(DN)), 3), up_to(first - second, 3),
         up_to(first + second, 3))


def perturbations():
    """A flat metric whose determinant is 1, and a perturbation in proportion to the fourth variable."""
    flat = np.array(np.diag([1, -1, -1]), dtype=object)
    H = without(field(3, 3))
    H = H + H.T
    h = H * Series({(0, 0, 0, 1): 1})
    s = Space(flat + h)
    raised = e('ac,bd,cd->ab', flat, flat, h)
    both('small-inverse-metric', up_to(s.gi, 2), up_to(flat - raised, 2), up_to(flat + raised, 2))
    square = e('ac,bd,ef,ce,df->ab', flat, flat, flat, h, h)
    both('small-inverse-second', up_to(s.gi, 3), up_to(flat - raised + square, 3), up_to(flat - raised - square, 3))
    trace = e('ab,ab->', flat, h)
    both('small-metric-determinant', up_to(s.det, 2), up_to(1 + trace, 2), up_to(1 - trace, 2))
    both('small-root', up_to(root(s.det), 2), up_to(1 + HALF * trace, 2), up_to(1 + trace, 2))
    dh = d(h)  # h_ab with one derivative
    two, one = e('bda->dab', dh) + e('adb->dab', dh), e('abd->dab', dh)
    up = lambda lower: up_to(HALF * e('cd,dab->cab', flat, lower), 2)
    both('small-connection', up_to(s.gam, 2), up(two - one), up(two + one))
    ddh = d(dh)
    three = e('adbc->abcd', ddh) + e('bcad->abcd', ddh) - e('bdac->abcd', ddh)
    last = e('acbd->abcd', ddh)
    both('small-riemann', up_to(s.low, 2), up_to(HALF * (three - last), 2), up_to(HALF * (three + last), 2))
    three = e('cd,bdac->ab', flat, ddh) + e('cd,adbc->ab', flat, ddh) - e('cd,abcd->ab', flat, ddh)
    last = e('cd,cdab->ab', flat, ddh)
    both('small-ricci', up_to(s.ricci, 2), up_to(HALF * (three - last), 2), up_to(HALF * (three + last), 2))
    a, b = e('ac,bd,cdab->', flat, flat, ddh), e('ab,cd,abcd->', flat, flat, ddh)
    both('small-scalar', up_to(s.scalar, 2), up_to(a - b, 2), up_to(a + b, 2))


def adjugates_agree_with_sympy():
    """At singular matrices too, by SymPy's plain cofactors."""
    for M in ([[1, 2, 3], [2, 4, 6], [0, 1, 5]], [[1, 2, 3], [2, 4, 6], [-1, -2, -3]], [[2, 1, 0], [0, 3, 4], [5, 0, 1]]):
        expected = sympy.Matrix(M).adjugate()
        found = adjugate(np.array(M, dtype=object))
        assert all(found[place] == int(expected[place]) for place in np.ndindex(3, 3)), M


def series_agree_with_sympy():
    """The inverse of a metric, its determinant's root and derivatives of both, by SymPy's plain matrices."""
    x = sympy.symbols('x y z')
    s = Space(metric(3))
    term = lambda m, c: c * sympy.prod([v ** k for v, k in zip(x, m)])
    g = sympy.Matrix(3, 3, lambda i, j: sum(term(m, c) for m, c in s.g[i, j].terms.items()))
    point = dict(zip(x, (0, 0, 0)))
    number = lambda value: sympy.Rational(Fraction(value).numerator, Fraction(value).denominator)
    inverse = g.subs(point).inv()
    slope = [-inverse * g.diff(v).subs(point) * inverse for v in x]
    lower = lambda l, j, k: (g[l, j].diff(x[k]) + g[l, k].diff(x[j]) - g[j, k].diff(x[l])) / 2
    for i, j in itertools.product(range(3), repeat=2):
        assert inverse[i, j] == number(s.gi[i, j].value())
        for k in range(3):
            assert slope[k][i, j] == number(s.gi[i, j].derivative(k).value())
            gamma = sum(inverse[i, l] * lower(l, j, k).subs(point) for l in range(3))
            assert gamma == number(s.gam[i, j, k].value())
    determinant = g.det(method='berkowitz')
    for k in range(3):
        assert sympy.sqrt(determinant).diff(x[k]).subs(point) == number(root(s.det).derivative(k).value())


def labels(folder):
    found = []
    for path in sorted(Path(folder).glob('*.tex')):
        found += re.findall(r'\\label\{([^}]*)\}', path.read_text())
    assert len(found) == len(set(found)), 'a label stands twice'
    return found


def main():
    folder = Path(sys.argv[1] if len(sys.argv) > 1 else Path(__file__).parent.parent / 'identities')
    for group in (vector_identities, tensor_algebra, determinants, geometry, curvature, elasticity, electrodynamics,
                  variations, matrices, perturbations):
        group()
    adjugates_agree_with_sympy()
    series_agree_with_sympy()
    wrong = 0
    for kind, own in (('identity', labels(folder)), ('corrupted identity', labels(folder / 'corrupted'))):
        for label in sorted(set(own) ^ set(ENTRIES)):
            print(f'{kind} {label}: not on both sides')
            wrong += 1
    for label, (same, right, slip) in ENTRIES.items():
        if values(same) != values(right):
            print(f'{label}: does not hold')
            wrong += 1
        if values(same) == values(slip):
            print(f'{label}: the slip makes no difference')
            wrong += 1
    print(f'{len(ENTRIES)} identities hold and {len(ENTRIES)} slips break them' if not wrong else f'{wrong} wrong')
    sys.exit(1 if wrong else 0)


if __name__ == '__main__':
    main()
