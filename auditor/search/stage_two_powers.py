"""The second stage of p-1, in powers of one element, where values at a geometric progression are
one product of polynomials.

After stage one ``a`` is 1 modulo a prime factor of n except for one prime l in (b1, b2]. Write
l = e + j with e a multiple of d (an odd multiple of d/2 where 4 does not divide d) and j from a
symmetric set J of residues; then a^e is a root of h(X) = product of X - a^j modulo the factor.

J is a sum of sets u d/q, one for each prime power q of d, u over the units modulo q, so h follows
from few products: adding {c, -c} to J turns h into h(X/x) h(X x) with x = a^c, up to a unit. Since
J is symmetric the coefficients of h read the same from both ends, and those of the second factor
are the first's reversed. With s^2 = a^d the values at a^(i d) are

    sum over t of c_t a^(i d t) = s^(-i^2) sum over t of (c_t s^(-t^2)) s^((i+t)^2),

one product for all i (Bluestein 1970; Montgomery and Kruppa, "Improved stage 2 to P+-1 factoring
algorithms", 2008, sections 5 and 7).
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import prod

import flint
import gmpy2
from gmpy2 import mpz

from auditor.search.polynomials import (
    coefficients,
    from_roots,
    multiplied,
    polynomial,
    polynomials_modulo,
)
from auditor.search.stage_two import WHEELS, units

LARGEST_DEGREE = 12_000
"""Of h: about 11 KiB of memory for each root at 2048 bits."""
LEAST_BLOCK = 4096
"""Points evaluated at a time, or twice the degree if that is more: it bounds the memory."""


@dataclass(frozen=True, slots=True)
class Powers:
    """How (b1, b2] is covered: e = (2 i + ``odd``) d/2 for i from ``first`` to ``last``.

    ``powers`` are the prime powers of d that J is made of. A single 2 is none of them: it has one
    unit, so it moves the points instead (``odd`` is 1 then, and 0 otherwise).
    """

    d: int
    powers: tuple[tuple[int, int], ...]
    odd: int
    first: int
    last: int

    @property
    def degree(self) -> int:
        """The size of J, an even number."""
        return prod(q - q // p for p, q in self.powers)

    @property
    def points(self) -> int:
        """How many e there are."""
        return self.last - self.first + 1


@lru_cache(maxsize=16)
def cover(b1: int, b2: int) -> Powers:
    """The cheapest way that memory allows; measured at 2048 bits, a root costs as much as 2.5
    points."""
    plans = [_covering(powers, b1, b2) for powers in WHEELS]
    small = [plan for plan in plans if plan.degree <= LARGEST_DEGREE]
    return min(small, key=lambda plan: 5 * plan.degree + 2 * plan.points)


def _covering(powers: tuple[tuple[int, int], ...], b1: int, b2: int) -> Powers:
    """Since J is symmetric, e and -e are as good: the points start at 0 at the lowest."""
    d = prod(q for _, q in powers)
    odd = int((2, 2) in powers)
    kept = tuple(power for power in powers if power != (2, 2))
    offset = sum(max(units(p, q)) * d // q for p, q in kept)
    first = (2 * (b1 - offset) // d - odd) // 2
    last = -((odd - 2 * (b2 + offset) // d - 1) // 2)
    return Powers(d, kept, odd, max(0, first), last)


def common_divisor(a: mpz, b1: int, b2: int, n: mpz) -> mpz:
    """gcd(n, product over the pairs): shared with every prime factor modulo which ``a``, a unit
    modulo ``n``, has a prime order in (b1, b2]."""
    plan = cover(b1, b2)
    product = mpz(1)
    for value in _values(_with_roots(a, plan, n), gmpy2.powmod(a, plan.d // 2, n), plan, n):
        product = product * value % n
    return gmpy2.gcd(product, n)


def _with_roots(a: mpz, plan: Powers, n: mpz) -> list[mpz]:
    """The coefficients of h up to a unit."""
    polynomials = polynomials_modulo(n)
    (p, q), *others = sorted(plan.powers, key=lambda power: -power[1])
    base = gmpy2.powmod(a, plan.d // q, n)
    roots = [gmpy2.powmod(base, sign * u, n) for u in units(p, q) for sign in (1, -1)]
    h = from_roots(roots, polynomials)
    for p, q in others:
        base = gmpy2.powmod(a, plan.d // q, n)
        factors = []
        for u in units(p, q):
            scaled = _scaled(coefficients(h), gmpy2.powmod(base, u, n), n)
            by_x = polynomial(scaled, polynomials)
            low = by_x.mul_low(polynomial(scaled[::-1], polynomials), len(scaled))
            factors.append(polynomial(_mirrored(low, len(scaled)), polynomials))
        h = multiplied(factors)
    return coefficients(h)


def _mirrored(low: flint.fmpz_mod_poly, count: int) -> list[int]:
    """The ``count`` lowest coefficients forwards and back, the last one in the middle."""
    numbers = [int(low[i]) for i in range(count)]
    return [*numbers, *reversed(numbers[:-1])]


def _scaled(numbers: Sequence[mpz], ratio: mpz, n: mpz) -> list[mpz]:
    """The numbers times 1, ratio, ratio^2, ..."""
    power, scaled = mpz(1), []
    for number in numbers:
        scaled.append(number * power % n)
        power = power * ratio % n
    return scaled


def _values(h: Sequence[mpz], s: mpz, plan: Powers, n: mpz) -> Iterator[mpz]:
    """h at the points s^(2 i + odd), each up to a unit, a block of them at a time."""
    polynomials = polynomials_modulo(n)
    half, block = plan.degree // 2, max(2 * plan.degree, LEAST_BLOCK)
    inverse_squares = _quadratic(gmpy2.invert(s, n), 0, 0, half + 1, n)
    scaled = [c * inverse_squares[abs(t - half)] % n for t, c in enumerate(h)]
    ours = polynomial(scaled, polynomials)
    for first in range(plan.first, plan.last + 1, block):
        count = min(block, plan.last + 1 - first)
        squares = _symmetric(s, plan.odd, first - half, plan.degree + count, n)
        products = ours.mul_low(polynomial(squares, polynomials), plan.degree + count)
        yield from (mpz(int(products[plan.degree + i])) for i in range(count))


def _symmetric(s: mpz, linear: int, start: int, count: int, n: mpz) -> list[mpz]:
    """s^(k^2 + linear k), up to a common unit, for ``count`` numbers k from ``start`` that may be
    negative; with ``linear`` 0 or 1 it is the same for k and -k - linear."""
    if start >= 0:
        return _quadratic(s, linear, start, count, n)
    end = start + count
    powers = _quadratic(s, linear, 0, max(end, -start - linear + 1), n)
    return [powers[k if k >= 0 else -k - linear] for k in range(start, end)]


def _quadratic(s: mpz, linear: int, start: int, count: int, n: mpz) -> list[mpz]:
    """s^(k^2 + linear k), divided by the first of them, for ``count`` numbers k from ``start``."""
    ratio, growth = gmpy2.powmod(s, 2 * start + 1 + linear, n), s * s % n
    powers = [mpz(1)]
    while len(powers) < count:
        powers.append(powers[-1] * ratio % n)
        ratio = ratio * growth % n
    return powers
