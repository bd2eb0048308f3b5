"""Whether a number looks prime, what shows that it is composite, and what could prove it prime.

Nothing here is believed: candidates and certificates are checked elsewhere, and random bases are
drawn there, once.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from math import isqrt, prod

import gmpy2
from gmpy2 import mpz

from auditor.search.primes import primes_up_to

TRIAL_BOUND = 2_000
LARGEST_WITNESS = 1 << 16

Factors = tuple[tuple[int, int], ...]


@dataclass(frozen=True, slots=True)
class Candidate:
    """What a quick look at ``n`` found.

    ``prime``: no evidence against it (trial division and the Baillie-PSW test). Otherwise ``n`` is
    not prime; for n > 1 at least one of the rest says why: ``factor``, the least prime factor if
    below the trial bound; ``power``, (base, exponent) with the largest exponent above 1;
    ``witness``, the least prime base whose strong test an odd n > 3 fails.
    """

    n: int
    prime: bool
    factor: int | None = None
    power: tuple[int, int] | None = None
    witness: int | None = None


def candidate(n: int) -> Candidate:
    """A quick look at any integer; nothing below 2 is prime."""
    if n < 2:
        return Candidate(n, prime=False)
    factor = next((p for p in primes_up_to(TRIAL_BOUND) if n % p == 0), None)
    if factor == n:
        return Candidate(n, prime=True)
    if factor is None and (n < TRIAL_BOUND**2 or is_likely_prime(n)):
        return Candidate(n, prime=True)
    return Candidate(
        n,
        prime=False,
        factor=factor,
        power=perfect_power(n),
        witness=least_witness(n) if n % 2 and factor is None else None,
    )


def is_likely_prime(n: int) -> bool:
    """The Baillie-PSW test: a strong test to base 2, then a strong Lucas test. No composite is
    known to pass; none below 2^64 does."""
    return n == 2 or (n > 2 and n % 2 == 1 and bool(gmpy2.is_strong_bpsw_prp(mpz(n))))


def least_witness(n: int) -> int | None:
    """The least prime base whose strong test odd ``n`` > 3 fails; None if none below 2^16 does."""
    for base in primes_up_to(LARGEST_WITNESS):
        if base % n and not gmpy2.is_strong_prp(mpz(n), base):
            return base
    return None


def perfect_power(n: int) -> tuple[int, int] | None:
    """(base, exponent) with the largest exponent above 1 for which n = base^exponent; n > 1."""
    base, exponent = n, 1
    while gmpy2.is_power(base):
        for prime in primes_up_to(base.bit_length()):
            root, exact = gmpy2.iroot(mpz(base), prime)
            if exact:
                base, exponent = int(root), exponent * prime
                break
    return (base, exponent) if exponent > 1 else None


@dataclass(frozen=True, slots=True)
class Proof:
    """What proves ``n`` prime once the primes of ``factored`` are: prime powers exactly dividing
    n - 1, and for each prime a base of order divisible by it."""

    n: int
    factored: Factors
    witnesses: tuple[tuple[int, int], ...]


def n_minus_1_proof(n: int, primes: Iterable[int]) -> Proof | None:
    """A proof for odd ``n`` > 2 from prime factors of n - 1; None if they do not suffice.

    Uses as few primes as suffice, largest first, with 2 always: by Pocklington (1914) when the
    factored part F has (F + 1)^2 > n, else by Brillhart, Lehmer and Selfridge (Math. Comp. 29,
    1975, theorem 7 with m = 1), which needs F above about the cube root of n. ``n`` must be a
    likely prime: for a composite one no base may exist and None is returned.
    """
    powers = sorted(_prime_powers(n - 1, primes), key=lambda power: power[0] ** power[1])
    chosen: list[tuple[int, int]] = []
    while not suffices(n, chosen):
        if not powers:
            return None
        chosen.append(powers.pop())
    witnesses = tuple((prime, _witness(n, prime)) for prime, _ in sorted(chosen))
    if any(base is None for _, base in witnesses):
        return None
    found = tuple((prime, base) for prime, base in witnesses if base is not None)
    return Proof(n, tuple(sorted(chosen)), found)


def suffices(n: int, factored: Sequence[tuple[int, int]]) -> bool:
    """Whether the prime powers, exactly dividing n - 1, are enough for a proof."""
    part = prod(prime**exponent for prime, exponent in factored)
    if (part + 1) ** 2 > n:
        return True
    rest = (n - 1) // part
    if part % 2 or rest % 2 == 0:
        return False
    s, r = divmod(rest, 2 * part)
    if n >= (part + 1) * (2 * part * part + (r - 1) * part + 1):
        return False
    discriminant = r * r - 8 * s
    return bool(s == 0 or discriminant < 0 or isqrt(discriminant) ** 2 != discriminant)


def _prime_powers(number: int, primes: Iterable[int]) -> list[tuple[int, int]]:
    powers = []
    for prime in sorted(set(primes)):
        _, exponent = gmpy2.remove(mpz(number), prime)
        if exponent:
            powers.append((prime, int(exponent)))
    return powers


def _witness(n: int, prime: int) -> int | None:
    """The least prime base a with a^(n-1) = 1 and gcd(a^((n-1)/prime) - 1, n) = 1, below 2^16;
    None as soon as n shows itself composite."""
    for base in primes_up_to(LARGEST_WITNESS):
        if base % n in (0, 1):
            continue
        power = gmpy2.powmod(base, (n - 1) // prime, n)
        if gmpy2.powmod(power, prime, n) != 1:
            return None
        if power != 1:
            return base if gmpy2.gcd(power - 1, n) == 1 else None
    return None
