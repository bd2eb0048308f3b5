"""The certificate of a special form: a polynomial pair, checked without knowing how it was found.

What makes a pair worth a claim is that an ordinary modulus has none so small. How small is measured
by writing the pair down in a fixed prefix code: at most 2^L pairs have a code of L bits, a value
of one of them is divisible by n with probability about 1/n, so a modulus drawn at random has a pair
of L bits with probability at most 2^(L-n+1) for n bits. The argument treats the values as random
residues, and holds for every search, whatever it tried and however often.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from math import gcd, log2

from sympy import ZZ, Poly, Symbol

from auditor.claims.base import require

LEAST_DEGREE, LARGEST_DEGREE = 4, 8
"""Near the optimum of the sieve; what is known of its work is not about smaller degrees."""
CHANCE_BITS = -40
"""A pair counts when an ordinary modulus has one of its size with probability at most 2^-40."""
SMALL_BASES = (2, 3, 5, 6, 7, 10)


@dataclass(frozen=True, slots=True)
class PairSizes:
    """What the work of the special number field sieve depends on, recomputed from a certificate.

    ``coefficient_bits`` and ``root_bits`` are base-2 logarithms of the largest coefficient of f and
    of the larger of g0 and g1. ``chance_bits`` bounds that of the probability that a modulus of
    this length, drawn at random, has such a pair.
    """

    degree: int
    coefficient_bits: float
    root_bits: float
    chance_bits: int


def check(n: int, f: Sequence[int], g1: int, g0: int, k: int | None = None) -> PairSizes:
    """The sizes of the pair (f, g1·x - g0), if it shows a special form of ``n``.

    ``f`` lists the coefficients, that of x^0 first. Shown is that f is irreducible over the
    integers, of degree 4 to 8 and without content; g0 and g1 are positive and coprime; the value
    g1^d f(g0/g1) is a non-zero multiple of n (k·n, where k is given); and the pair is smaller than
    any that an ordinary modulus of this length has. Raises :class:`auditor.claims.base.Refuted`.
    """
    degree = len(f) - 1
    require(n > 1, "the modulus is below 2")
    require(LEAST_DEGREE <= degree <= LARGEST_DEGREE, "the degree is not 4 to 8")
    require(f[-1] != 0, "the leading coefficient is 0")
    require(gcd(*f) == 1, "the coefficients have a common factor")
    require(g0 > 0 and g1 > 0 and gcd(g0, g1) == 1, "g0 and g1 are not positive and coprime")
    chance = description_bits(f, g1, g0) - (n.bit_length() - 1)
    require(chance <= CHANCE_BITS, "an ordinary modulus has a pair of that size as well")
    value = _homogeneous_value(f, g1, g0)
    require(value != 0 and value % n == 0, "the value is not a multiple of the modulus")
    require(k is None or value == k * n, "the value is another multiple of the modulus")
    # sympy rather than the library that the search factors polynomials with: a second opinion.
    polynomial = Poly(list(f)[::-1], Symbol("x"), domain=ZZ)
    require(bool(polynomial.is_irreducible), "the polynomial is reducible")
    return PairSizes(degree, log2(max(map(abs, f))), log2(max(g0, g1)), chance)


def description_bits(f: Sequence[int], g1: int, g0: int) -> int:
    """The length of the pair in the prefix code: degree, polynomial, root."""
    return _count_bits(len(f) - 1) + _polynomial_bits(f) + _root_bits(g1, g0)


def _polynomial_bits(f: Sequence[int]) -> int:
    """One bit says whether the two leading coefficients stand apart: in the expansion of a number
    in a base close to one of its roots they are small, and the others need not be."""
    *rest, next_to_leading, leading = f
    apart = _integer_bits(leading) + _integer_bits(next_to_leading) + _block_bits(rest)
    return 1 + min(_block_bits(f), apart)


def _root_bits(g1: int, g0: int) -> int:
    """Two bits for the kind of root: a power of a small base, an integer, a quotient."""
    if g1 != 1:
        return 2 + _block_bits((g1, g0))
    as_powers = [
        3 + _count_bits(exponent) for base in SMALL_BASES if (exponent := _exponent(g0, base))
    ]
    return 2 + min([_integer_bits(g0), *as_powers])


def _exponent(value: int, base: int) -> int:
    """j where ``value`` = base^j; 0 for anything else."""
    exponent = round(log2(value) / log2(base))
    return exponent if value == base**exponent else 0


def _count_bits(count: int) -> int:
    """Of a positive integer in Elias' gamma code."""
    return 2 * count.bit_length() - 1


def _integer_bits(value: int) -> int:
    """Of any integer: its length, then sign and digits after the first."""
    return _count_bits(abs(value).bit_length() + 1) + abs(value).bit_length()


def _block_bits(values: Sequence[int]) -> int:
    """Of integers of one length: that length, then sign and digits of each."""
    length = max(abs(value).bit_length() for value in values)
    return _count_bits(length + 1) + len(values) * (length + 1)


def _homogeneous_value(f: Sequence[int], g1: int, g0: int) -> int:
    degree = len(f) - 1
    return sum(c * g0**i * g1 ** (degree - i) for i, c in enumerate(f))
