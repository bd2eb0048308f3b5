"""The claims that a number is composite, and that it is a perfect power."""

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import count
from typing import Any

import gmpy2

from auditor.claims.base import Claim, Draw, require
from auditor.claims.primality_tests import is_prime_below_2_64, passes_strong_test
from auditor.claims.reading import natural, only

LARGEST_WITNESS = 2**16
"""No certificate needs a larger base: under the extended Riemann hypothesis 2 (ln n)^2 always
suffices (Bach 1990, from memory), and the least witnesses met in practice are tiny."""


@dataclass(frozen=True)
class Composite(Claim):
    """``n`` is composite: by a proper ``factor``, or by the least prime base that witnesses it."""

    kind = "composite"

    n: int
    factor: int | None = None
    witness: int | None = None

    def statement(self) -> dict[str, Any]:
        return {"n": self.n}

    def certificate(self) -> dict[str, Any]:
        return {"factor": self.factor} if self.factor is not None else {"witness": self.witness}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Composite":
        only(statement, "n")
        if uses:
            raise ValueError("this claim uses no other claim")
        n = natural(statement["n"])
        if "factor" in certificate:
            only(certificate, "factor")
            return cls(n, factor=natural(certificate["factor"]))
        only(certificate, "witness")
        return cls(n, witness=natural(certificate["witness"]))

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        if self.factor is not None:
            require(1 < self.factor < self.n, "the factor is not a proper one")
            require(self.n % self.factor == 0, "the factor does not divide the number")
            return
        require(self.n > 3 and self.n % 2 == 1, "a witness is for odd numbers above 3")
        witness = self.witness or 0
        require(2 <= witness <= LARGEST_WITNESS, "the witness is out of range")
        require(not passes_strong_test(self.n, witness), "the base witnesses nothing")
        require(witness == least_witness(self.n), "not the least prime base that witnesses")


def least_witness(n: int) -> int | None:
    """The least prime base to which odd ``n`` > 3 fails the strong test; None below 2^16."""
    for base in count(2):
        if base > LARGEST_WITNESS:
            return None
        if base % n and is_prime_below_2_64(base) and not passes_strong_test(n, base):
            return base
    return None


@dataclass(frozen=True)
class PerfectPower(Claim):
    """``n`` = ``base`` ^ ``exponent``, where the base is not itself a perfect power."""

    kind = "perfect-power"

    n: int
    base: int
    exponent: int

    def statement(self) -> dict[str, Any]:
        return {"n": self.n, "base": self.base, "exponent": self.exponent}

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "PerfectPower":
        only(statement, "n", "base", "exponent")
        only(certificate)
        if uses:
            raise ValueError("this claim uses no other claim")
        return cls(*(natural(statement[key]) for key in ("n", "base", "exponent")))

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(2 <= self.exponent <= self.n.bit_length(), "the exponent is out of range")
        require(
            self.base >= 2 and (self.base.bit_length() - 1) * self.exponent < self.n.bit_length(),
            "the base is out of range",
        )
        require(self.base**self.exponent == self.n, "the power is another number")
        require(not gmpy2.is_power(self.base), "the base is itself a perfect power")
