"""The p-1 and p+1 methods: powers in the units, and in the elements of norm 1 over them.

p-1: J. M. Pollard, Proc. Camb. Phil. Soc. 76, 1974. p+1: H. C. Williams, Math. Comp. 39, 1982.
A prime factor r of n is found when r - 1 (p-1, and half the starts of p+1) or r + 1 (the other half
of the starts) divides lcm(1, ..., b1) times at most one prime up to b2.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import gmpy2
from gmpy2 import mpz

from auditor.search import stage_two, stage_two_powers
from auditor.search.divisor import Divisor
from auditor.search.primes import in_batches, primes_of_lcm, product

BATCH = 500
START = 3
P_PLUS_1_STARTS = ((2, 7), (6, 5), (5, 1))
"""2/7 and 6/5 give group orders divisible by 6 and 4 (README of GMP-ECM)."""


def p_minus_1(n: int, b1: int, b2: int) -> list[int]:
    """Divisors of odd ``n`` above 1, coprime to each other; a divisor may be ``n`` itself.

    All factors within reach are found in one pass: what a divisor leaves of n is not tried again.
    """
    found, power, modulus = _stage_one(mpz(START), mpz(1), b1, mpz(n), _power)
    if modulus > 1 and b2 > b1:
        found.append(int(stage_two_powers.common_divisor(power, b1, b2, modulus)))
    return [divisor for divisor in found if divisor > 1]


def p_plus_1(n: int, b1: int, b2: int, start: int) -> list[int]:
    """Divisors of odd ``n`` above 1, from the starting trace number ``start``; as for p-1."""
    numerator, denominator = P_PLUS_1_STARTS[start]
    trace = numerator * gmpy2.invert(denominator, n) % n
    found, trace, modulus = _stage_one(trace, mpz(2), b1, mpz(n), _trace_of_power)
    if modulus > 1 and b2 > b1:
        found.append(_stage_two(trace, b1, b2, modulus))
    return [divisor for divisor in found if divisor > 1]


Raise = Callable[[mpz, mpz, mpz], mpz]


def _power(value: mpz, exponent: mpz, n: mpz) -> mpz:
    return gmpy2.powmod(value, exponent, n)


def _trace_of_power(trace: mpz, exponent: mpz, n: mpz) -> mpz:
    return gmpy2.lucasv_mod(trace, 1, exponent, n)


def _stage_one(
    value: mpz, identity: mpz, b1: int, n: mpz, raised: Raise
) -> tuple[list[int], mpz, mpz]:
    """Divisors of n that appear on the way to lcm(1, ..., b1), the value raised to that, and what
    the divisors leave of n.

    A divisor is looked for after each batch of primes; a batch in which all of n appears is gone
    through again prime by prime.
    """
    found: list[int] = []
    for batch in in_batches(primes_of_lcm(b1), BATCH):
        before = value
        value = raised(before, product(batch), n)
        common = gmpy2.gcd(value - identity, n)
        if common == n:
            divisors, value, n = _prime_by_prime(before, identity, batch, n, raised)
            found += divisors
        elif common > 1:
            found.append(int(common))
            n //= common
            value %= n
        if n == 1:
            break
    return found, value, n


def _prime_by_prime(
    value: mpz, identity: mpz, batch: Sequence[int], n: mpz, raised: Raise
) -> tuple[list[int], mpz, mpz]:
    found: list[int] = []
    for prime in batch:
        value = raised(value, mpz(prime), n)
        common = gmpy2.gcd(value - identity, n)
        if common > 1:
            found.append(int(common))
            n //= common
            value %= n
        if n == 1:
            break
    return found, value, n


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

    def add_and_subtract_each(
        self, points: Sequence[tuple[mpz, mpz]], addend: tuple[mpz, mpz]
    ) -> list[tuple[mpz, mpz]]:
        """Each element times ``addend``, then times its inverse, which is its conjugate."""
        c, e = addend
        return self.add_each(points, addend) + self.add_each(points, (c, -e))

    def identity_coordinate(self) -> mpz:
        """Half the trace of 1."""
        return mpz(1)

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
