"""The p-1 and p+1 methods: powers in the units, and in the elements of norm 1 over them.

p-1: J. M. Pollard, Proc. Camb. Phil. Soc. 76, 1974. p+1: H. C. Williams, Math. Comp. 39, 1982.
A prime factor r of n is found when r - 1 (p-1, and half the starts of p+1) or r + 1 (the other half
of the starts) divides lcm(1, ..., b1) times at most one prime up to b2.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import gmpy2
from gmpy2 import mpz

from auditor.search import stage_two
from auditor.search.divisor import Divisor
from auditor.search.primes import in_batches, primes_of_lcm, product

BATCH = 500
START = 3
P_PLUS_1_STARTS = ((2, 7), (6, 5), (5, 1))
"""2/7 and 6/5 give group orders divisible by 6 and 4 (README of GMP-ECM)."""


def p_minus_1(n: int, b1: int, b2: int) -> int:
    """A divisor of odd ``n`` above 1, or 1. The divisor may be ``n`` itself."""
    modulus = mpz(n)
    power, common = _stage_one(mpz(START), mpz(1), b1, modulus, _power)
    if common > 1 or b2 <= b1:
        return int(common)
    trace = (power + gmpy2.invert(power, modulus)) % modulus
    return _stage_two(trace, b1, b2, modulus)


def p_plus_1(n: int, b1: int, b2: int, start: int) -> int:
    """A divisor of odd ``n`` above 1, or 1, from the starting trace number ``start``."""
    modulus = mpz(n)
    numerator, denominator = P_PLUS_1_STARTS[start]
    trace = numerator * gmpy2.invert(denominator, modulus) % modulus
    trace, common = _stage_one(trace, mpz(2), b1, modulus, _trace_of_power)
    if common > 1 or b2 <= b1:
        return int(common)
    return _stage_two(trace, b1, b2, modulus)


def _power(value: mpz, exponent: mpz, n: mpz) -> mpz:
    return gmpy2.powmod(value, exponent, n)


def _trace_of_power(trace: mpz, exponent: mpz, n: mpz) -> mpz:
    return gmpy2.lucasv_mod(trace, 1, exponent, n)


def _stage_one(
    value: mpz, identity: mpz, b1: int, n: mpz, raised: Callable[[mpz, mpz, mpz], mpz]
) -> tuple[mpz, mpz]:
    """The value raised to lcm(1, ..., b1), and a common divisor with n.

    The divisor is looked for after each batch of primes; a batch in which all factors of n appear
    is gone through again prime by prime.
    """
    for batch in in_batches(primes_of_lcm(b1), BATCH):
        before = value
        value = raised(before, product(batch), n)
        common = gmpy2.gcd(value - identity, n)
        if common == n:
            return _prime_by_prime(before, identity, batch, n, raised)
        if common > 1:
            return value, common
    return value, mpz(1)


def _prime_by_prime(
    value: mpz,
    identity: mpz,
    batch: Sequence[int],
    n: mpz,
    raised: Callable[[mpz, mpz, mpz], mpz],
) -> tuple[mpz, mpz]:
    for prime in batch:
        value = raised(value, mpz(prime), n)
        common = gmpy2.gcd(value - identity, n)
        if common > 1:
            return value, common
    return value, mpz(1)


@dataclass(frozen=True, slots=True)
class NormOne:
    """Elements a + b sqrt(D) of norm 1 modulo n; ``discriminant`` is D."""

    n: mpz
    discriminant: mpz

    def add_each(
        self, points: Sequence[tuple[mpz, mpz]], addend: tuple[mpz, mpz]
    ) -> list[tuple[mpz, mpz]]:
        """Each element times ``addend``: the group is written additively by the second stage."""
        n, (c, e) = self.n, addend
        scaled = self.discriminant * e % n
        return [((a * c + scaled * b) % n, (a * e + b * c) % n) for a, b in points]

    def negative(self, point: tuple[mpz, mpz]) -> tuple[mpz, mpz]:
        """The inverse, which is the conjugate."""
        return point[0], -point[1]

    def coordinate(self, point: tuple[mpz, mpz]) -> mpz:
        """Half the trace."""
        return point[0]


def _stage_two(trace: mpz, b1: int, b2: int, n: mpz) -> int:
    half = trace * gmpy2.invert(2, n) % n
    group = NormOne(n, (half * half - 1) % n)
    try:
        return int(stage_two.common_divisor(group, (half, mpz(1)), b1, b2))
    except Divisor as found:
        return int(found.divisor)
