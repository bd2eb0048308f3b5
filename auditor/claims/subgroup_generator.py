"""The claim about an element of a given prime order: what a set with an unfit generator needs."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import gmpy2

from auditor.claims.base import Claim, Draw, require, require_primes
from auditor.claims.reading import natural, only

MOST_BASES = 64
"""A base fails with probability 1/q, so more are met only where n or q is tiny."""


@dataclass(frozen=True)
class SubgroupGenerator(Claim):
    """``g`` has the prime order ``q`` modulo the prime ``n``: it is h^((n-1)/q) for the least base
    h from 2 up that does not give 1.

    g^q = h^(n-1) = 1 (Fermat), and g is not 1, so its order is q. FIPS 186-4, A.2.1 makes
    generators so with any h; the least one leaves nobody a choice.
    """

    kind = "subgroup-generator"

    n: int
    q: int
    base: int
    g: int
    uses: tuple[str, ...]

    def statement(self) -> dict[str, Any]:
        return {"n": self.n, "q": self.q, "base": self.base, "g": self.g}

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "SubgroupGenerator":
        only(statement, "n", "q", "base", "g")
        only(certificate)
        n, q, base, g = (natural(statement[key]) for key in ("n", "q", "base", "g"))
        return cls(n, q, base, g, uses)

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require_primes({self.n, self.q}, used)
        require(len(used) == len({self.n, self.q}), "a claim is used that says nothing")
        require((self.n - 1) % self.q == 0, "q does not divide n - 1")
        require(2 <= self.base < MOST_BASES, "the base is out of range")
        found = least_generator(self.n, self.q)
        require(found == (self.base, self.g), "the construction says otherwise")


def least_generator(n: int, q: int) -> tuple[int, int] | None:
    """The least base and the power of it that has order q modulo n; None where the first bases
    lead to nothing. ``n`` and ``q`` are primes, q divides n - 1."""
    for base in range(2, MOST_BASES):
        g = int(gmpy2.powmod(base, (n - 1) // q, n))
        if g > 1:
            return base, g
    return None


def subgroup_generator(n: int, q: int, uses: tuple[str, ...]) -> SubgroupGenerator | None:
    """The claim, whose check is the computation that makes it; None where no base is found."""
    found = least_generator(n, q)
    return None if found is None else SubgroupGenerator(n, q, *found, uses)
