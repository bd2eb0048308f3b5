"""A number as far as it has been factored: what every route on a group order starts from."""

import math
from dataclasses import dataclass

from auditor.routes.base import Bound


@dataclass(frozen=True, slots=True)
class Factors:
    """Known prime powers of a number, primes ascending, and a bound on the rest.

    ``rest`` is 1 when the factorization is complete. Otherwise it is an integer that the
    unfactored part divides or does not exceed; where only its length is known, 2^length.
    Splitting a prime off ``rest`` (and dividing it out) is the only way in which knowledge grows.
    Nothing here tests primality.
    """

    known: tuple[tuple[int, int], ...]
    rest: int = 1

    def __post_init__(self) -> None:
        primes = [prime for prime, _ in self.known]
        if primes != sorted(set(primes)) or any(prime < 2 for prime in primes):
            raise ValueError("primes must be ascending, distinct and at least 2")
        if any(exponent < 1 for _, exponent in self.known):
            raise ValueError("exponents must be at least 1")
        if self.rest < 1:
            raise ValueError("the rest must be at least 1")

    @property
    def complete(self) -> bool:
        """Whether every prime factor is known."""
        return self.rest == 1

    @property
    def bound(self) -> Bound:
        """``exact`` for a complete list, ``at most`` for an incomplete one."""
        return "exact" if self.complete else "at most"

    @property
    def bits(self) -> float:
        """log2 of the number, or of the bound on it."""
        known = math.prod(prime**exponent for prime, exponent in self.known)
        return math.log2(known * self.rest)

    @property
    def primes(self) -> tuple[int, ...]:
        """The known primes, ascending, each as often as it divides."""
        return tuple(prime for prime, exponent in self.known for _ in range(exponent))

    def multiplicity(self, prime: int) -> int:
        """How often ``prime`` is known to divide."""
        return dict(self.known).get(prime, 0)

    def restricted(self, divisor: int) -> "Factors":
        """What this says about ``divisor``, a divisor of the number."""
        known = []
        for prime, limit in self.known:
            exponent = 0
            while exponent < limit and divisor % prime == 0:
                divisor //= prime
                exponent += 1
            if exponent:
                known.append((prime, exponent))
        return Factors(tuple(known), divisor)
