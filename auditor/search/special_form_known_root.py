"""Tier 1: forms whose root is a power of a small base, by lattice reduction.

For m = b^j the polynomials f of degree at most d with f(m) divisible by p form a lattice of
determinant p. Its reduced basis holds vectors of norm about p^(1/(d+1)) unless p is special; the
cofactor f(m)/p need not be guessed. This is the lattice of polynomial selection for the number
field sieve, applied to guessed roots.
"""

from collections.abc import Iterator
from math import floor, log2

from flint import fmpz_mat

from auditor.search.special_form_pair import CHANCE_BITS, RawPair, expansion
from auditor.search.special_form_work import DEGREES

BASES = (2, 3, 5, 6, 7, 10)
WIDTH = 16
"""How far above p^(1/d), in bits, roots are tried."""
FINE_UP_TO = 4096
"""Length of the moduli, in bits, up to which every power is tried."""


def exponents(p: int, degree: int, base: int) -> range:
    """The j for which base^j lies between p^(1/(d+1)) and 2^16 p^(1/d).

    Below that range the vector (m, -1, 0, ...) is short for every p. From 4096 bits only every
    second j is tried, from 8192 every third and so on: the coefficients then grow by a few bits,
    which at that length is nothing, and the number of lattices does not grow any more.
    """
    n = log2(p)
    least = floor(n / (degree + 1) / log2(base)) + 1
    most = floor((n / degree + WIDTH) / log2(base))
    return range(least, most + 1, 1 + floor(n / FINE_UP_TO))


def tests(p: int) -> int:
    """How many lattices are reduced for p."""
    return sum(len(exponents(p, degree, base)) for degree in DEGREES for base in BASES)


def pairs(p: int) -> Iterator[RawPair]:
    """The vectors that are too short for an ordinary p.

    In a random lattice of this determinant a vector is short by the factor 2^delta with probability
    about 2^((d+1)(1-delta)-1); times the number of lattices that has to stay below 2^-40.
    """
    number = log2(tests(p))
    for degree in DEGREES:
        delta = 1 + (number - 1 - CHANCE_BITS) / (degree + 1)
        limit = floor(log2(p) / (degree + 1) - delta)
        if limit < 1:
            continue
        for base in BASES:
            for exponent in exponents(p, degree, base):
                m = base**exponent
                for coefficients in _vectors_below(_lattice(p, m, degree), limit):
                    yield RawPair(coefficients, 1, m)


def _lattice(p: int, m: int, degree: int) -> fmpz_mat:
    """p in base m, and x^i (x - m): a basis of the lattice whose entries are no longer than m.

    (The textbook basis, p and x^i - m^i mod p, spans the same lattice with entries as long as p,
    and takes four times as long to reduce at 2048 bits.)
    """
    rows = [expansion(p, m, degree)]
    for i in range(degree):
        rows.append([0] * i + [-m, 1] + [0] * (degree - 1 - i))
    return fmpz_mat(rows)


def _vectors_below(lattice: fmpz_mat, limit: int) -> Iterator[tuple[int, ...]]:
    """The reduced basis vectors with entries of at most ``limit`` bits."""
    for row in lattice.lll().table():
        if all(entry.height_bits() <= limit for entry in row):
            yield tuple(int(entry) for entry in row)
