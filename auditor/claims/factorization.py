"""The claim that a number has these prime factors and this unfactored rest."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import gcd
from typing import Any

from auditor.claims.base import (
    Claim,
    Draw,
    Factors,
    product,
    require,
    require_normal,
    require_primes,
)
from auditor.claims.reading import natural, only, pairs


@dataclass(frozen=True)
class Factorization(Claim):
    """``n`` = product of ``factors`` times ``rest``; the rest is 1, or composite and coprime to
    the factors. Complete exactly when the rest is 1."""

    kind = "factorization"

    n: int
    factors: Factors
    rest: int
    uses: tuple[str, ...]

    def statement(self) -> dict[str, Any]:
        return {"n": self.n, "factors": self.factors, "rest": self.rest}

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Factorization":
        only(statement, "n", "factors", "rest")
        only(certificate)
        n, rest = natural(statement["n"]), natural(statement["rest"])
        return cls(n, pairs(statement["factors"]), rest, uses)

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n >= 1 and self.rest >= 1, "a factorization is of positive numbers")
        require_normal(self.factors, self.n)
        require(product(self.factors) * self.rest == self.n, "the product is another number")
        require(gcd(product(self.factors), self.rest) == 1, "a factor still divides the rest")
        require_primes({prime for prime, _ in self.factors}, used)
        composites = [claim for claim in used.values() if claim.kind == "composite"]
        about = [getattr(claim, "n", None) for claim in composites]
        require(about == ([] if self.rest == 1 else [self.rest]), "the rest is not shown composite")
        require(
            len(used) == len(self.factors) + len(composites), "a claim is used that says nothing"
        )
