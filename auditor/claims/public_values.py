"""Claims about several public values at once: which share an exponent, which show theirs."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import gcd
from typing import Any

import gmpy2

from auditor.claims.base import Claim, Draw, require
from auditor.claims.reading import natural, only

LARGEST_EXPONENT = 2**16


@dataclass(frozen=True)
class SharedExponents(Claim):
    """The ``groups`` of ``values`` whose powers with ``exponent`` modulo ``n`` are equal, all
    others being different. Values ascend, and so do the groups.

    With the cofactor as exponent they are equal up to an element whose order divides it, so that
    the private exponents agree modulo the order q.
    """

    kind = "shared-exponents"

    n: int
    exponent: int
    values: tuple[int, ...]
    groups: tuple[tuple[int, ...], ...]

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "exponent": self.exponent,
            "values": self.values,
            "groups": self.groups,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "SharedExponents":
        only(statement, "n", "exponent", "values", "groups")
        only(certificate)
        if uses or not isinstance(statement["groups"], list):
            raise ValueError("expected a list of groups, and no claim used")
        return cls(
            natural(statement["n"]),
            natural(statement["exponent"]),
            _naturals(statement["values"]),
            tuple(map(_naturals, statement["groups"])),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        _require_units(self.n, self.values)
        groups = equal_powers(self.n, self.exponent, self.values)
        require(groups == self.groups, "the powers say otherwise")


def shared_exponents(n: int, exponent: int, values: Sequence[int]) -> SharedExponents:
    """The claim about units that ascend."""
    return SharedExponents(n, exponent, tuple(values), equal_powers(n, exponent, values))


def equal_powers(n: int, exponent: int, values: Sequence[int]) -> tuple[tuple[int, ...], ...]:
    """The values, in groups of at least two, whose powers are equal modulo ``n``."""
    groups: dict[int, list[int]] = {}
    for value in values:
        groups.setdefault(int(gmpy2.powmod(value, exponent, n)), []).append(value)
    return tuple(sorted(tuple(group) for group in groups.values() if len(group) > 1))


@dataclass(frozen=True)
class VisibleExponents(Claim):
    """Which of ``values`` are, up to sign, g^k modulo ``n`` with 0 < |k| <= ``limit``; all others
    are not. The exponents themselves are kept nowhere."""

    kind = "visible-exponents"

    n: int
    g: int
    limit: int
    values: tuple[int, ...]
    visible: tuple[int, ...]

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "g": self.g,
            "limit": self.limit,
            "values": self.values,
            "visible": self.visible,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "VisibleExponents":
        only(statement, "n", "g", "limit", "values", "visible")
        only(certificate)
        if uses:
            raise ValueError("this claim uses no other claim")
        return cls(
            natural(statement["n"]),
            natural(statement["g"]),
            natural(statement["limit"]),
            _naturals(statement["values"]),
            _naturals(statement["visible"]),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(0 < self.limit <= LARGEST_EXPONENT, "the limit is out of range")
        _require_units(self.n, (*self.values,))
        require(0 < self.g < self.n and gcd(self.g, self.n) == 1, "the generator is no unit")
        visible = small_powers(self.n, self.g, self.limit, self.values)
        require(visible == self.visible, "stepping through the powers says otherwise")


def visible_exponents(n: int, g: int, limit: int, values: Sequence[int]) -> VisibleExponents:
    """The claim about units that ascend."""
    return VisibleExponents(n, g, limit, tuple(values), small_powers(n, g, limit, values))


def small_powers(n: int, g: int, limit: int, values: Sequence[int]) -> tuple[int, ...]:
    """Those of ``values`` that are +-g^k modulo ``n`` with 0 < |k| <= ``limit``, by stepping."""
    sought: dict[int, set[int]] = {}
    for value in values:
        inverse = int(gmpy2.invert(value, n))
        for form in (value, n - value, inverse, n - inverse):
            sought.setdefault(form, set()).add(value)
    found: set[int] = set()
    modulus, base, power = gmpy2.mpz(n), gmpy2.mpz(g), gmpy2.mpz(1)
    for _ in range(limit if values else 0):
        power = power * base % modulus
        found |= sought.get(power, set())
        if power == 1:
            break
    return tuple(sorted(found))


def _naturals(value: Any) -> tuple[int, ...]:
    if not isinstance(value, list):
        raise ValueError("expected a list of integers")
    return tuple(map(natural, value))


def _require_units(n: int, values: tuple[int, ...]) -> None:
    require(n > 2, "no group")
    require(values == tuple(sorted(set(values))), "the values are not in ascending order")
    require(
        all(0 < value < n and gcd(value, n) == 1 for value in values), "a value is no reduced unit"
    )
