"""Small-subgroup confinement against a victim that the program itself has made.

A victim that raises whatever it receives to a reused exponent x, and shows by a message that it
knows the result, reveals x modulo every small order an element can have. The probe is u g with u
of order r: the answer is u^x y, with y = g^x public, so that r trials off line give x mod r. Being
multiplied by g, the probe is neither 1 nor n - 1, and a check of its range lets it pass.

Source: Lim, Lee, "A key recovery attack on discrete log-based schemes using a prime order
subgroup", CRYPTO 1997 (from memory); the masked probe is derived.
"""

from collections.abc import Callable
from dataclasses import dataclass
from hashlib import sha256
from itertools import count
from typing import Literal

from gmpy2 import mpz, powmod

from auditor.search.log_result import Logarithm, Tally
from auditor.search.logarithm import Factors, combined

Check = Literal["range", "membership", "cofactor"]
"""What is done to a received value: 2 <= y <= n - 2; y^q = 1 and y != 1; or the exponent is
multiplied by (n - 1)/q and the result 1 refused."""

Oracle = Callable[[int], bytes | None]
"""Answers a received value with the confirmation of the shared secret, or refuses it."""


@dataclass(frozen=True, slots=True)
class Victim:
    """One side of a key agreement modulo a prime n that uses its exponent again and again."""

    n: int
    g: int
    q: int
    exponent: int
    checks: frozenset[Check] = frozenset()

    @property
    def public(self) -> int:
        """g^x."""
        return int(powmod(self.g, self.exponent, self.n))

    def answer(self, received: int) -> bytes | None:
        """The confirmation of the secret for this received value; None when it is refused."""
        if "range" in self.checks and not 2 <= received <= self.n - 2:
            return None
        if "membership" in self.checks and (received == 1 or powmod(received, self.q, self.n) != 1):
            return None
        factor = (self.n - 1) // self.q if "cofactor" in self.checks else 1
        secret = powmod(received, self.exponent * factor, self.n)
        return None if factor > 1 and secret == 1 else confirmation(secret)


@dataclass(frozen=True, slots=True)
class Confinement:
    """What the victim revealed, how often it was asked, and how many of the probes it refused.

    ``logarithm.operations`` are trials off line: each forms one element and one confirmation.
    """

    logarithm: Logarithm
    queries: int
    refused: int


def confirmation(secret: int) -> bytes:
    """What both sides can compute from the shared secret and others cannot: its SHA-256."""
    size = int(secret).bit_length() // 8 + 1
    return sha256(int(secret).to_bytes(size, "big")).digest()


def confine(
    n: int,
    g: int,
    public: int,
    factors: Factors,
    oracle: Oracle,
    *,
    tally: Tally | None = None,
) -> Confinement:
    """x modulo the prime powers in ``factors``, as far as the oracle's answers reveal it.

    n is prime and each r^e in ``factors`` divides n - 1. One query and at most r^e trials for
    each. A probe that is refused, or an answer that no trial explains, reveals nothing and is
    left out of the result's modulus.
    """
    tally = tally or Tally()
    known, refused = Logarithm(0, 1, 0), 0
    for r, e in factors:
        u = element_of_order(n, r, e, tally)
        answer = oracle(int(u * g % n))
        refused += answer is None
        residue = _explain(n, u, public, r**e, answer, tally)
        if residue is not None:
            known = combined(known, Logarithm(residue, r**e, 0))
    found = Logarithm(known.value, known.modulus, tally.operations)
    return Confinement(found, len(factors), refused)


def element_of_order(n: int, r: int, e: int, tally: Tally) -> mpz:
    """An element of order r^e modulo the prime n, from the least base that gives one.

    ValueError when r^e does not divide n - 1.
    """
    if (n - 1) % r**e:
        raise ValueError("the order does not divide n - 1")
    candidates = (tally.power(a, (n - 1) // r**e, mpz(n)) for a in count(2))
    return next(u for u in candidates if tally.power(u, r ** (e - 1), mpz(n)) != 1)


def _explain(
    n: int, u: mpz, public: int, order: int, answer: bytes | None, tally: Tally
) -> int | None:
    """The j for which u^j y is the secret that was confirmed."""
    if answer is None:
        return None
    secret = mpz(public)
    for j in range(order):
        if confirmation(secret) == answer:
            return j
        tally.spend(1)
        secret = secret * u % n
    return None
