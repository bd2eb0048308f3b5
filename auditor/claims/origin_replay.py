"""The constructions of p and q from seeds, done again step by step.

Sources: FIPS 186-4, A.1.1.3 (validation of probable primes), A.1.2.2 with C.6 (Shawe-Taylor), and
FIPS 186-2 with change notice 1, Appendix 2.2; worked after public accounts of these steps and
held against the NIST example files.

Work is bounded by the limits that the standards set on counters: at most 4 L candidates, and a
declared counter beyond its limit is refused before anything is computed.
"""

from collections.abc import Callable
from enum import StrEnum
from functools import cache

import gmpy2

from auditor.claims.origin_recipe import (
    FIPS186_2,
    HASH_LENGTHS,
    PROBABLE,
    Recipe,
    Seed,
)
from auditor.claims.primality_tests import is_prime_below_2_64, passes_strong_test

Verdict = Callable[[int], bool]
"""Whether a number is prime."""


class Outcome(StrEnum):
    """Where a replay ends: all agrees, or the first step that does not."""

    REGENERATED = "regenerated"
    LENGTHS = "lengths not of this method"
    COUNTER = "counter beyond its limit"
    SEED_LENGTH = "seed too short"
    HASH_LENGTH = "hash shorter than q"
    NOT_DIVIDING = "q does not divide p - 1"
    OTHER_Q = "seed gives another q"
    Q_COMPOSITE = "q not prime"
    P_COMPOSITE = "p not prime"
    OTHER_P = "counter gives another p"
    EARLIER_PRIME = "an earlier counter gives a prime"
    EXHAUSTED = "no prime within the limit"
    SEED_CARRY = "seed counts past its length"


LENGTHS = ((1024, 160), (2048, 224), (2048, 256), (3072, 256))
"""FIPS 186-4, 4.2."""
OLD_LENGTHS = tuple((512 + 64 * j, 160) for j in range(9))
"""FIPS 186-2, Appendix 2.2."""

SMALL_FACTORS_BELOW = 20000
"""Dividing by the primes below saves nine in ten of the exponentiations of candidates."""


class _Ends(Exception):
    def __init__(self, outcome: Outcome) -> None:
        super().__init__(outcome)
        self.outcome = outcome


def replay(p: int, q: int, recipe: Recipe, is_prime: Verdict, may_be_prime: Verdict) -> Outcome:
    """Where the replay of ``recipe`` for ``p`` and ``q`` ends.

    ``is_prime`` decides about p and q themselves and is asked only where the outcome depends on
    it. ``may_be_prime`` is asked about the candidates that survive a first strong test, which are
    prime or next to never met; a False of it must be certain.
    """
    steps = {PROBABLE: _probable, FIPS186_2: _fips186_2}.get(recipe.method, _provable)
    try:
        return steps(p, q, recipe, is_prime, may_be_prime)
    except _Ends as end:
        return end.outcome


def _require(holds: bool, otherwise: Outcome) -> None:
    if not holds:
        raise _Ends(otherwise)


def _probable(p: int, q: int, recipe: Recipe, is_prime: Verdict, may_be_prime: Verdict) -> Outcome:
    """FIPS 186-4, A.1.1.3; that the hash is no shorter than q is required of A.1.1.2."""
    (seed,), (counter,), name = map(Seed, recipe.seeds), recipe.counters, recipe.hash
    length, width = p.bit_length(), q.bit_length()
    _require((length, width) in LENGTHS, Outcome.LENGTHS)
    _require(counter <= 4 * length - 1, Outcome.COUNTER)
    _require(seed.bits >= width, Outcome.SEED_LENGTH)
    _require(HASH_LENGTHS[name] >= width, Outcome.HASH_LENGTH)
    _require((p - 1) % q == 0, Outcome.NOT_DIVIDING)
    top = 1 << (width - 1)
    u = seed.hashed(name, 0) % top
    _require(q == top + u + 1 - u % 2, Outcome.OTHER_Q)
    _require(is_prime(q), Outcome.Q_COMPOSITE)
    _require(is_prime(p), Outcome.P_COMPOSITE)
    return _first_prime(p, q, seed, name, counter, 1, may_be_prime)


def _fips186_2(p: int, q: int, recipe: Recipe, is_prime: Verdict, may_be_prime: Verdict) -> Outcome:
    """FIPS 186-2, Appendix 2.2."""
    (seed,), (counter,) = map(Seed, recipe.seeds), recipe.counters
    _require((p.bit_length(), q.bit_length()) in OLD_LENGTHS, Outcome.LENGTHS)
    _require(counter < 4096, Outcome.COUNTER)
    _require(seed.bits >= 160, Outcome.SEED_LENGTH)
    _require((p - 1) % q == 0, Outcome.NOT_DIVIDING)
    u = seed.hashed("sha1", 0) ^ seed.hashed("sha1", 1)
    _require(q == u | 1 << 159 | 1, Outcome.OTHER_Q)
    _require(is_prime(q), Outcome.Q_COMPOSITE)
    _require(is_prime(p), Outcome.P_COMPOSITE)
    return _first_prime(p, q, seed, "sha1", counter, 2, may_be_prime)


def _first_prime(
    p: int, q: int, seed: Seed, name: str, counter: int, offset: int, may_be_prime: Verdict
) -> Outcome:
    """Whether ``p`` is the candidate at ``counter`` and no candidate before it is a prime."""
    length = p.bit_length()

    def candidate(i: int) -> int:
        return _candidate(length, q, seed, name, offset + i * blocks)

    blocks = -(-length // HASH_LENGTHS[name])
    _require(candidate(counter) == p, Outcome.OTHER_P)
    for i in range(counter):
        earlier = candidate(i)
        long_enough = earlier.bit_length() == length
        if long_enough and _survives(earlier) and may_be_prime(earlier):
            return Outcome.EARLIER_PRIME
    return Outcome.REGENERATED


def _candidate(length: int, q: int, seed: Seed, name: str, offset: int) -> int:
    """The number of ``length`` bits, or slightly less, that is 1 modulo 2q: steps 11.1 to 11.5 of
    A.1.1.2, 7 to 9 of the older method."""
    outlen = HASH_LENGTHS[name]
    n, b = divmod(length - 1, outlen)
    w = seed.sum(name, offset, n) + (seed.hashed(name, offset + n) % (1 << b) << (n * outlen))
    x = w + (1 << (length - 1))
    return x - (x % (2 * q) - 1)


@cache
def _small_primes() -> int:
    return int(gmpy2.primorial(SMALL_FACTORS_BELOW))


def _has_small_factor(number: int) -> bool:
    return bool(gmpy2.gcd(number, _small_primes()) != 1)


def _survives(number: int) -> bool:
    """False is certain: a small factor was found, or base 2 witnesses."""
    return not _has_small_factor(number) and passes_strong_test(number, 2)


def _provable(p: int, q: int, recipe: Recipe, is_prime: Verdict, may_be_prime: Verdict) -> Outcome:
    """FIPS 186-4, A.1.2.2: the construction from the first seed, and all six results compared."""
    first, p_seed, q_seed = map(Seed, recipe.seeds)
    length, width = p.bit_length(), q.bit_length()
    _require((length, width) in LENGTHS, Outcome.LENGTHS)
    _require(first.bits >= width and first.value >= 1 << (width - 1), Outcome.SEED_LENGTH)
    _require(HASH_LENGTHS[recipe.hash] >= width, Outcome.HASH_LENGTH)
    _require((p - 1) % q == 0, Outcome.NOT_DIVIDING)
    _require(is_prime(q), Outcome.Q_COMPOSITE)
    _require(is_prime(p), Outcome.P_COMPOSITE)
    made = Construction(recipe.hash, first)
    made_q = made.prime(width)
    _require((q, q_seed, recipe.counters[1]) == (made_q, made.seed, made.counter), Outcome.OTHER_Q)
    made_p = made.prime_above(length, q)
    _require((p, p_seed, recipe.counters[0]) == (made_p, made.seed, made.counter), Outcome.OTHER_P)
    return Outcome.REGENERATED


class Construction:
    """The Shawe-Taylor construction as it goes on: ``seed`` has counted as far as hashes were
    taken, ``counter`` counts the candidates of the prime in the making."""

    def __init__(self, name: str, seed: Seed) -> None:
        self._name = name
        self._outlen = HASH_LENGTHS[name]
        self.seed = seed
        self.counter = 0

    def prime(self, length: int) -> int:
        """ST_Random_Prime of C.6, from the present seed; the counter starts again."""
        if length < 33:
            return self._small(length)
        below = self.prime(-(-length // 2) + 1)
        return self._grow(length, below, 1, self.counter + 4 * length)

    def prime_above(self, length: int, q: int) -> int:
        """A.1.2.1.2 from step 2: a prime that is 1 modulo ``q``. That its limit is one higher than
        in C.6 is cited from memory."""
        below = self.prime(-(-length // 2) + 1)
        return self._grow(length, below, q, self.counter + 4 * length + 1)

    def _small(self, length: int) -> int:
        self.counter = 0
        while self.counter <= 4 * length:
            c = self._hash(0) ^ self._hash(1)
            c = 1 << (length - 1) | c % (1 << (length - 1)) | 1
            self.counter += 1
            self._count(2)
            if is_prime_below_2_64(c):
                return c
        raise _Ends(Outcome.EXHAUSTED)

    def _grow(self, length: int, prime: int, q: int, limit: int) -> int:
        """A prime 2 t q prime + 1 of ``length`` bits: the first that meets Pocklington's condition
        for ``prime``, which exceeds its square root."""
        top, step = 1 << (length - 1), 2 * q * prime
        t = -(-(top + self._draw(length) % top) // step)
        while True:
            if t * step + 1 > 2 * top:
                t = -(-top // step)
            c = t * step + 1
            self.counter += 1
            a = 2 + self._draw(length) % (c - 3)
            if _shown_prime(c, a, 2 * t * q, prime):
                return c
            _require(self.counter < limit, Outcome.EXHAUSTED)
            t += 1

    def _draw(self, length: int) -> int:
        blocks = -(-length // self._outlen)
        value = self.seed.sum(self._name, 0, blocks)
        self._count(blocks)
        return value

    def _hash(self, k: int) -> int:
        return self.seed.hashed(self._name, k)

    def _count(self, k: int) -> None:
        """Count on. The standard does not say what happens past the seed's length."""
        _require(self.seed.value + k < 1 << self.seed.bits, Outcome.SEED_CARRY)
        self.seed = Seed(self.seed.plus(k))


def _shown_prime(c: int, base: int, cofactor: int, prime: int) -> bool:
    """Pocklington's condition. Every prime factor of a number that meets it is 1 modulo ``prime``,
    so one with a small factor cannot, and needs no exponentiation."""
    if _has_small_factor(c):
        return False
    z = gmpy2.powmod(base, cofactor, c)
    return bool(gmpy2.gcd(z - 1, c) == 1 and gmpy2.powmod(z, prime, c) == 1)
