"""Multiplication of a point on a twisted Edwards curve -x^2 + y^2 = 1 + d x^2 y^2 modulo n.

Doubling: Bernstein, Birkner, Joye, Lange, Peters, "Twisted Edwards curves", 2008, section 6, with
a = -1 (4 squarings, 3 products). Addition of a point with Z = 1: Hisil, Wong, Carter, Dawson,
"Twisted Edwards curves revisited", 2008, section 3.2, in extended coordinates, which needs no d
(7 products here). Both need a product after each reduction modulo n, so sums are reduced once.

The addition fails for equal and opposite points. Modulo a prime factor of n that can happen only
when the point has a tiny order there; all coordinates then stay 0 modulo that factor and the
caller's greatest common divisor finds it.
"""

from array import array
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import gmpy2
from gmpy2 import mpz

from auditor.search.divisor import inverses
from auditor.search.primes import exponents

CHUNK_BITS = 1 << 16

Projective = tuple[mpz, mpz, mpz]
Affine = tuple[mpz, mpz]
Addend = tuple[mpz, mpz, mpz]
"""y + x, y - x and 2xy of an affine point."""


@dataclass(frozen=True, slots=True)
class Chain:
    """A scalar in signed sliding windows, highest first.

    Start from the odd multiple number ``first``; then, for each i, double ``doublings[i]`` times
    and add the odd multiple number ``digits[i]``. The odd multiple number k is (2k+1) P, also for
    negative k. At the end double ``last`` times.
    """

    width: int
    first: int
    doublings: Sequence[int]
    digits: Sequence[int]
    last: int


def chain(scalar: mpz) -> Chain:
    """The chain of a positive scalar, with the window width that costs least."""
    width = best_width(scalar.bit_length())
    size, half = 1 << width, 1 << (width - 1)
    gaps: list[int] = []
    digits: list[int] = []
    rest = scalar
    while rest:
        gap = gmpy2.bit_scan1(rest)
        rest >>= gap
        digit = int(rest & (size - 1))
        digit -= size if digit > half else 0
        rest -= digit
        gaps.append(gap)
        digits.append(digit >> 1)
    return Chain(
        width,
        digits[-1],
        array("L", reversed(gaps[1:])),
        array("h", reversed(digits[:-1])),
        gaps[0],
    )


def best_width(bits: int) -> int:
    """The window width with the fewest products: 14 for each entry of the table, 7 a digit."""
    return min(range(2, 15), key=lambda width: 14 * 2 ** (width - 2) + 7 * bits / (width + 1))


@lru_cache(maxsize=2)
def chains(b1: int) -> tuple[Chain, ...]:
    """Chains of scalars whose product is lcm(1, ..., b1): the same for every curve of a level."""
    return tuple(chain(scalar) for scalar in exponents(b1, CHUNK_BITS))


def odd_multiples(point: Affine, count: int, n: mpz) -> list[Addend]:
    """Addends of P, 3P, ..., (2 count - 1)P, then of -(2 count - 1)P, ..., -P.

    Raises Divisor where a coordinate has no inverse modulo ``n``.
    """
    x, y = point
    double_x, double_y, double_z, _ = _double(x, y, mpz(1), n)
    [inverse] = inverses([double_z], n)
    step = _addend(double_x * inverse % n, double_y * inverse % n, n)
    multiples = [(x, y, mpz(1))]
    t = x * y % n
    for _ in range(count - 1):
        x, y, z, t = _add(*multiples[-1], t, step, n)
        multiples.append((x, y, z))
    inverted = inverses([z for _, _, z in multiples], n)
    positive = [
        _addend(x * i % n, y * i % n, n) for (x, y, _), i in zip(multiples, inverted, strict=True)
    ]
    negative = [(minus, plus, -double_xy) for plus, minus, double_xy in reversed(positive)]
    return positive + negative


def _addend(x: mpz, y: mpz, n: mpz) -> Addend:
    return y + x, y - x, 2 * x * y % n


def _double(x: mpz, y: mpz, z: mpz, n: mpz) -> tuple[mpz, mpz, mpz, mpz]:
    """2(X : Y : Z) and its T = XY/Z."""
    xx, yy, sum_xy = x * x, y * y, x + y
    h = xx + yy
    e = (sum_xy * sum_xy - h) % n
    g = (yy - xx) % n
    f = (2 * z * z - g) % n
    h %= n
    return e * f % n, g * h % n, f * g % n, e * h % n


def _add(x: mpz, y: mpz, z: mpz, t: mpz, addend: Addend, n: mpz) -> tuple[mpz, mpz, mpz, mpz]:
    """(X : Y : Z : T) plus an affine point, and T of the sum."""
    plus, minus, double_xy = addend
    a, b = (y - x) * plus, (y + x) * minus
    c, d = z * double_xy % n, 2 * t
    e, f, g, h = d + c, (b - a) % n, (b + a) % n, d - c
    return e * f % n, g * h % n, f * g % n, e * h % n


def multiply(point: Affine, b1: int, n: mpz) -> Projective:
    """lcm(1, ..., b1) times an affine point, as (X : Y : Z).

    Raises Divisor where a coordinate has no inverse modulo ``n`` between two chains.
    """
    x, y = point
    z = mpz(1)
    for number, plan in enumerate(chains(b1)):
        if number:
            [inverse] = inverses([z], n)
            x, y = x * inverse % n, y * inverse % n
        x, y, z = _follow(plan, (x, y), n)
    return x, y, z


def _follow(plan: Chain, point: Affine, n: mpz) -> Projective:
    """The chain's scalar times an affine point. The loop is the program's hottest: the formulas
    of :func:`_double` and :func:`_add` are written out, without the T that nobody reads."""
    table = odd_multiples(point, 1 << (plan.width - 2), n)
    plus, minus, _ = table[plan.first]
    x, y, z = plus - minus, plus + minus, mpz(2)
    for doublings, digit in zip(plan.doublings, plan.digits, strict=True):
        for _ in range(doublings - 1):
            xx = x * x
            yy = y * y
            h = xx + yy
            e = x + y
            e = (e * e - h) % n
            g = (yy - xx) % n
            f = ((z * z << 1) - g) % n
            x = e * f % n
            y = h % n * g % n
            z = f * g % n
        xx = x * x
        yy = y * y
        h = xx + yy
        e = x + y
        e = (e * e - h) % n
        h %= n
        g = (yy - xx) % n
        f = ((z * z << 1) - g) % n
        x = e * f % n
        y = g * h % n
        z = f * g % n
        d = e * h % n << 1
        plus, minus, double_xy = table[digit]
        a = (y - x) * plus
        b = (y + x) * minus
        c = z * double_xy % n
        f = (b - a) % n
        g = (b + a) % n
        x = (d + c) * f % n
        y = (d - c) * g % n
        z = f * g % n
    for _ in range(plan.last):
        x, y, z, _t = _double(x, y, z, n)
    return x, y, z
