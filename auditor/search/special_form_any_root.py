"""Tier 2: forms with any root, by expansion of small multiples.

Where k·p = f(m) with small coefficients, m is close to (k·p/a)^(1/d), a being the leading one, so
that the expansion of k·p in a base near there is f itself.
"""

from collections.abc import Iterator
from math import floor, gcd, log2

import gmpy2

from auditor.search.special_form_pair import CHANCE_BITS, RawPair, expansion
from auditor.search.special_form_work import DEGREES

LARGEST = 24
"""Of the cofactors k and of the leading coefficients a; only coprime ones are tried."""
NEIGHBOURS = range(-3, 4)

_RATIOS = [(k, a) for k in range(1, LARGEST + 1) for a in range(1, LARGEST + 1) if gcd(k, a) == 1]


def tests() -> int:
    """How many expansions are looked at, for any p."""
    return len(DEGREES) * len(_RATIOS) * len(NEIGHBOURS)


def pairs(p: int) -> Iterator[RawPair]:
    """The expansions whose digits are too small for an ordinary p.

    The two leading digits are small for every p and do not count. The d - 1 others are all smaller
    than m/2 by the factor 2^gain with probability about 2^(-gain (d-1)); times the number of
    expansions that has to stay below 2^-40.
    """
    number = log2(tests())
    for degree in DEGREES:
        gain = (number - CHANCE_BITS) / (degree - 1)
        for k, a in _RATIOS:
            near = int(gmpy2.iroot(gmpy2.mpz(k * p // a), degree)[0])
            limit = floor(log2(near) - 1 - gain) if near > 1 else 0
            if limit < 1:
                continue
            for neighbour in NEIGHBOURS:
                digits = _small_expansion(k * p, near + neighbour, degree, limit)
                if digits:
                    yield RawPair(digits, 1, near + neighbour)


def _small_expansion(value: int, m: int, degree: int, limit: int) -> tuple[int, ...] | None:
    """The expansion, if all but its two leading digits have at most ``limit`` bits."""
    last = value % m
    if min(last, m - last) >> limit:  # nearly always: the last digit alone is too large
        return None
    digits = expansion(value, m, degree)
    if any(abs(digit) >> limit for digit in digits[: degree - 1]):
        return None
    return tuple(digits)
