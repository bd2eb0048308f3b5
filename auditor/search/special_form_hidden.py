"""Tier 3: forms with tiny coefficients and a root g0/g1 that nothing shows.

Gordon's search ("Designing and detecting trapdoors for discrete log cryptosystems", CRYPTO 1992):
the polynomials are few enough to try, and a root that is a quotient of two numbers well below
sqrt(p) is found by reduction of a two-dimensional lattice. The cost grows with the coefficients:
with 11-bit ones, as in the 1024-bit prime of Fried, Gaudry, Heninger and Thome (EUROCRYPT 2017), it
is out of reach, and nothing else is known that would find such a form.
"""

from collections.abc import Iterator
from functools import cache
from itertools import product
from math import floor, log2

import gmpy2
from flint import fmpz_mod_ctx, fmpz_mod_poly_ctx, fmpz_poly

from auditor.search.special_form_pair import CHANCE_BITS, RawPair

HIDDEN_DEGREES = (4, 5, 6)
LARGEST_COEFFICIENT = 1


@cache
def polynomials() -> tuple[tuple[int, ...], ...]:
    """The irreducible ones of these degrees with coefficients from -1 to 1, one of each class under
    f(x) -> f(-x), reversal and sign, which change neither sizes nor, essentially, roots."""
    digits = range(-LARGEST_COEFFICIENT, LARGEST_COEFFICIENT + 1)
    return tuple(
        coefficients
        for degree in HIDDEN_DEGREES
        for coefficients in product(digits, repeat=degree + 1)
        if coefficients[0]
        and coefficients[-1]
        and coefficients == max(_relatives(coefficients))
        and _irreducible(coefficients)
    )


def tests() -> int:
    """How many roots there can be at most, for any p."""
    return sum(len(coefficients) - 1 for coefficients in polynomials())


def pairs(p: int) -> Iterator[RawPair]:
    """The roots that are quotients of numbers too small for an ordinary prime p.

    A random root is g0/g1 with both below 2^(n/2-t) with probability about 2^(1-2t); times the
    number of roots that has to stay below 2^-40.
    """
    excess = (log2(tests()) + 1 - CHANCE_BITS) / 2
    limit = floor(log2(p) / 2 - excess)
    if limit < 1:
        return
    ring = fmpz_mod_poly_ctx(fmpz_mod_ctx(p))
    for coefficients in polynomials():
        for root in sorted(int(root) for root, _ in ring(list(coefficients)).roots()):
            g0, g1 = _shortest_quotient(root, p)
            if not max(abs(g0), abs(g1)) >> limit:
                yield RawPair(coefficients, g1, g0)


def _relatives(coefficients: tuple[int, ...]) -> Iterator[tuple[int, ...]]:
    for form in (coefficients, coefficients[::-1]):
        mirrored = tuple(-c if i % 2 else c for i, c in enumerate(form))
        for relative in (form, mirrored):
            yield relative
            yield tuple(-c for c in relative)


def _irreducible(coefficients: tuple[int, ...]) -> bool:
    factors = fmpz_poly(list(coefficients)).factor()[1]
    return len(factors) == 1 and factors[0][1] == 1


def _shortest_quotient(root: int, p: int) -> tuple[int, int]:
    """A shortest (u, v) with u = root · v modulo p, by Lagrange's reduction."""
    short, long = (gmpy2.mpz(root), gmpy2.mpz(1)), (gmpy2.mpz(p), gmpy2.mpz(0))
    while True:
        norm = short[0] ** 2 + short[1] ** 2
        if norm > long[0] ** 2 + long[1] ** 2:
            short, long = long, short
            continue
        times = (2 * (short[0] * long[0] + short[1] * long[1]) + norm) // (2 * norm)
        if times == 0:
            return int(short[0]), int(short[1])
        long = (long[0] - times * short[0], long[1] - times * short[1])
