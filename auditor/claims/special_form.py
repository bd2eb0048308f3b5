"""Claims about special forms: a polynomial pair that shows one, and the record of looking."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from auditor.claims.base import Claim, Draw, require
from auditor.claims.reading import natural, only
from auditor.claims.standing import Standing
from auditor.encoding import integer


@dataclass(frozen=True)
class SpecialForm(Claim):
    """g1^d f(g0/g1) = cofactor * n, with f irreducible and the pair smaller than any that an
    ordinary modulus of this length has. ``coefficients`` are those of f, that of x^0 first."""

    kind = "special-form"

    n: int
    coefficients: tuple[int, ...]
    g1: int
    g0: int
    cofactor: int

    def statement(self) -> dict[str, Any]:
        return {"n": self.n}

    def certificate(self) -> dict[str, Any]:
        return {
            "coefficients": self.coefficients,
            "g1": self.g1,
            "g0": self.g0,
            "cofactor": self.cofactor,
        }

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "SpecialForm":
        only(statement, "n")
        only(certificate, "coefficients", "g1", "g0", "cofactor")
        if uses or not isinstance(certificate["coefficients"], list):
            raise ValueError("expected a list of coefficients, and no claim used")
        return cls(
            natural(statement["n"]),
            tuple(integer(value) for value in certificate["coefficients"]),
            natural(certificate["g1"]),
            natural(certificate["g0"]),
            natural(certificate["cofactor"]),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        # sympy is loaded only where a special form has to be checked.
        from auditor.claims.special_form_check import check

        require(len(self.coefficients) >= 2, "no polynomial")
        check(self.n, self.coefficients, self.g1, self.g0, self.cofactor)


@dataclass(frozen=True)
class FormSearched(Claim):
    """A special form of ``n`` was looked for in these tiers and none was found: attested."""

    kind = "form-searched"

    n: int
    tiers: tuple[int, ...]

    @property
    def standing(self) -> Standing:
        return Standing.ATTESTED

    def statement(self) -> dict[str, Any]:
        return {"n": self.n, "tiers": self.tiers}

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "FormSearched":
        only(statement, "n", "tiers")
        only(certificate)
        if uses or not isinstance(statement["tiers"], list):
            raise ValueError("expected a list of tiers, and no claim used")
        return cls(natural(statement["n"]), tuple(natural(tier) for tier in statement["tiers"]))

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n > 1, "a form is looked for in a number above 1")
        require(
            bool(self.tiers) and self.tiers == tuple(sorted(set(self.tiers))),
            "the tiers are not in ascending order",
        )
