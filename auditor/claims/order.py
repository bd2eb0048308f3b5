"""Claims about one element: its order, complete or in part, and whether a power of it is 1."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import gcd
from typing import Any

import gmpy2

from auditor.claims.base import (
    Claim,
    Draw,
    Factors,
    product,
    require,
    require_normal,
    require_primes,
)
from auditor.claims.powers import euler_decides, prime_modulus_power
from auditor.claims.prime import Prime
from auditor.claims.reading import natural, only, pairs, truth


@dataclass(frozen=True)
class Order(Claim):
    """The order of ``element`` modulo ``modulus`` is the product of ``known`` times a divisor of
    ``rest`` that is above 1; it is the product itself exactly when the rest is 1.

    With A the product and C the rest, coprime: a^(AC) = 1 and a^(AC/r) != 1 for every prime r of
    A give r^e exactly dividing the order for each r^e of A, and a^A != 1 shows that the unknown
    divisor is not 1. No factorization of the group order is needed. Where AC is a multiple of
    (n-1)/2 and the claim that n is prime is used, powers are read off (see ``powers``).
    """

    kind = "order"

    modulus: int
    element: int
    known: Factors
    rest: int
    uses: tuple[str, ...]

    def statement(self) -> dict[str, Any]:
        return {
            "modulus": self.modulus,
            "element": self.element,
            "known": self.known,
            "rest": self.rest,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Order":
        only(statement, "modulus", "element", "known", "rest")
        only(certificate)
        return cls(
            natural(statement["modulus"]),
            natural(statement["element"]),
            pairs(statement["known"]),
            natural(statement["rest"]),
            uses,
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        n, a = self.modulus, self.element
        require(n > 1 and 0 < a < n, "the element is not reduced modulo a number above 1")
        require(self.rest >= 1, "the rest is not positive")
        require_normal(self.known, n)
        known = product(self.known)
        require(gcd(known, self.rest) == 1, "a known prime still divides the rest")
        primes = {prime for prime, _ in self.known}
        by_euler = self._modulus_is_prime(used)
        require_primes(primes | ({n} if by_euler else set()), used)
        require(len(used) == len(primes) + by_euler, "a claim is used that says nothing")
        power = prime_modulus_power if by_euler else gmpy2.powmod
        require(power(a, known * self.rest, n) == 1, "the order does not divide this")
        for prime in primes:
            require(power(a, known * self.rest // prime, n) != 1, "a prime factor is superfluous")
        if self.rest > 1:
            require(gmpy2.powmod(a, known, n) != 1, "the order is the known part alone")

    def _modulus_is_prime(self, used: Mapping[str, Claim]) -> bool:
        """Whether a claim says that the modulus is a prime, where that saves powers; the modulus
        is no factor of the order."""
        whole = product(self.known) * self.rest
        named = any(isinstance(claim, Prime) and claim.n == self.modulus for claim in used.values())
        return named and euler_decides(self.modulus, whole)


@dataclass(frozen=True)
class Membership(Claim):
    """Whether ``element`` ^ ``exponent`` = 1 modulo ``modulus``."""

    kind = "membership"

    modulus: int
    element: int
    exponent: int
    member: bool

    def statement(self) -> dict[str, Any]:
        return {
            "modulus": self.modulus,
            "element": self.element,
            "exponent": self.exponent,
            "member": self.member,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Membership":
        only(statement, "modulus", "element", "exponent", "member")
        only(certificate)
        if uses:
            raise ValueError("this claim uses no other claim")
        return cls(
            natural(statement["modulus"]),
            natural(statement["element"]),
            natural(statement["exponent"]),
            truth(statement["member"]),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        n = self.modulus
        require(n > 1 and 0 <= self.element < n, "the element is not reduced modulo the modulus")
        is_one = gmpy2.powmod(self.element, self.exponent, n) == 1
        require(is_one == self.member, "the power says otherwise")
