"""What a claim is: a statement about integers, and what lets another party check it.

A claim is inert and frozen. Its ``check`` neither searches nor trusts: it re-does the arithmetic
that the certificate names, given the claims it uses, and raises :class:`Refuted` where the
certificate does not show the statement. What the used claims say is checked on its own.
"""

from abc import ABC, abstractmethod
from collections.abc import Callable, Mapping
from functools import cached_property
from typing import Any, ClassVar

from auditor.claims.standing import Standing
from auditor.encoding import identifier, plain

Draw = Callable[[int], int]
"""``draw(k)``: an integer in [0, k) that whoever chose the numbers could not foresee."""

Factors = tuple[tuple[int, int], ...]
"""(prime, exponent) pairs, primes ascending, exponents at least 1."""


class Refuted(ValueError):
    """The certificate does not show the statement; the message says which step fails."""


class Claim(ABC):
    """A statement with its certificate. Subclasses are frozen dataclasses, one kind each."""

    kind: ClassVar[str]

    @abstractmethod
    def statement(self) -> dict[str, Any]:
        """What is said, as JSON-ready values."""

    @abstractmethod
    def certificate(self) -> dict[str, Any]:
        """What lets another party check it, as JSON-ready values."""

    @abstractmethod
    def check(self, used: Mapping[str, "Claim"], draw: Draw) -> None:
        """Re-do the arithmetic; ``used`` holds the claims named in :attr:`uses`.

        Raises :class:`Refuted`.
        """

    @classmethod
    @abstractmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Claim":
        """The claim that was written so; ValueError or KeyError for anything malformed."""

    uses: tuple[str, ...] = ()
    """Ids of the claims this one rests on, sorted."""

    @property
    def standing(self) -> Standing:
        """The standing of the check itself; a claim is no stronger than the claims it uses."""
        return Standing.PROVEN

    def record(self) -> dict[str, Any]:
        """The claim as it stands in reports and in the ledger."""
        return {
            "kind": self.kind,
            "statement": plain(self.statement()),
            "certificate": plain(self.certificate()),
            "uses": list(self.uses),
        }

    @cached_property
    def id(self) -> str:
        """The kind and 20 hex digits of SHA-256 over the claim's canonical JSON."""
        return identifier(self.kind, self.record())


def product(factors: Factors) -> int:
    """The number with these prime powers."""
    value = 1
    for prime, exponent in factors:
        value *= prime**exponent
    return value


def require(condition: bool, reason: str) -> None:
    """Raise :class:`Refuted` with that reason unless the condition holds."""
    if not condition:
        raise Refuted(reason)


def require_normal(factors: Factors, n: int) -> None:
    """Raise :class:`Refuted` unless primes ascend, exceed 1, have positive exponents, and their
    powers may divide a number as long as ``n``: a short record must not ask for a long product."""
    primes = [prime for prime, _ in factors]
    require(primes == sorted(set(primes)), "the factors are not in ascending order")
    require(
        all(prime > 1 and exponent > 0 for prime, exponent in factors),
        "a factor is below 2 or has no positive exponent",
    )
    least = sum((prime.bit_length() - 1) * exponent for prime, exponent in factors)
    require(least < max(n.bit_length(), 1), "the prime powers are too long")


def require_primes(primes: set[int], used: Mapping[str, Claim]) -> None:
    """Raise :class:`Refuted` unless the used ``prime`` claims are about exactly these numbers."""
    shown = [getattr(claim, "n", None) for claim in used.values() if claim.kind == "prime"]
    require(
        len(shown) == len(primes) and set(shown) == primes,
        "the prime claims used are not one for each prime factor",
    )
