"""Facts about declared public values: range, membership, relations; never a logarithm."""

from collections import Counter
from collections.abc import Callable
from math import gcd

from auditor.claims.public_values import (
    LARGEST_EXPONENT,
    SharedExponents,
    VisibleExponents,
)
from auditor.facts import parts, subgroup
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question

LONGEST_STEPPED = 8192
"""Bits of a modulus up to which all exponents to 2^16 are stepped through; 2^12 beyond."""


def declared(given: Given) -> tuple[int, ...]:
    """The declared public values."""
    if not given.declaration.public_values:
        given.undeclared("public_values")
    return given.declaration.public_values


def in_range(given: Given, y: int) -> bool:
    """2 <= y <= n-2: SP 800-56A Rev. 3, 5.6.2.3.1 step 1 (secondary)."""
    return 2 <= y <= given.declaration.modulus - 2


def units(given: Given) -> tuple[int, ...]:
    """The different values in range that are units, ascending."""
    n = given.declaration.modulus
    return tuple(sorted({y for y in given.see(declared) if in_range(given, y) and gcd(y, n) == 1}))


def beyond_range(given: Given) -> frozenset[int]:
    """Values outside [2, n-2]."""
    return frozenset(y for y in given.see(declared) if not in_range(given, y))


def outsiders(given: Given) -> frozenset[int]:
    """Values y, in range, with y^q != 1."""
    q = given.see(_subgroup_order)
    values = {y for y in given.see(declared) if in_range(given, y)}
    return frozenset(values - _members(given, values, q))


def confined(given: Given) -> frozenset[int]:
    """Values that are no unit, or whose order divides the cofactor."""
    n, cofactor = given.declaration.modulus, given.see(_cofactor)
    values = set(given.see(declared))
    others = {y for y in values if gcd(y, n) != 1}
    return frozenset(others | _members(given, values - others, cofactor))


def _members(given: Given, values: set[int], exponent: int) -> set[int]:
    """Those with y^exponent = 1; what is open about any of them is asked at once."""
    n = given.declaration.modulus
    asked = [
        Question(Asks.MEMBERSHIP, (n, y % n, exponent))
        for y in sorted(values)
        if given.claims.membership(n, y % n, exponent) is None
    ]
    if asked:
        given.unsettled(*asked)
    return {y for y in sorted(values) if given.is_member(n, y % n, exponent)}


def related_values(given: Given) -> frozenset[int]:
    """Values that occur twice, and values equal to another up to an element whose order divides
    the cofactor: their exponents agree modulo q."""
    n, cofactor, values = given.declaration.modulus, given.see(_cofactor), given.see(units)
    repeated = {y for y, times in Counter(given.see(declared)).items() if times > 1}
    if len(values) < 2:
        return frozenset(repeated)
    claim = given.claims.about(SharedExponents, n, exponent=cofactor, values=values)
    if claim is None:
        given.unsettled(Question(Asks.SHARED_EXPONENTS, (n, cofactor, *values)))
    given.cite(claim)
    return frozenset(repeated.union(*claim.groups))


def visible_values(given: Given) -> frozenset[int]:
    """Values that are, up to sign, powers of g with small exponents of either sign."""
    n, g, values = given.declaration.modulus, given.see(parts.element), given.see(units)
    if g in (1, n - 1):
        given.undefined()
    if not values:
        return frozenset()
    limit = LARGEST_EXPONENT if n.bit_length() <= LONGEST_STEPPED else LARGEST_EXPONENT >> 4
    claim = given.claims.about(VisibleExponents, n, g=g, limit=limit, values=values)
    if claim is None:
        given.unsettled(Question(Asks.VISIBLE_EXPONENTS, (n, g, limit, *values)))
    given.cite(claim)
    return frozenset(claim.visible)


def _count(given: Given, offending: Callable[[Given], frozenset[int]]) -> int:
    found = given.see(offending)
    return sum(y in found for y in given.see(declared))


@fact("public_values.count", "int", "how many public values are declared")
def count(given: Given) -> int:
    return len(given.declaration.public_values)


@fact("public_values.out_of_range", "int", "public values outside [2, n-2]")
def out_of_range(given: Given) -> int:
    return _count(given, beyond_range)


@fact("public_values.outside_subgroup", "int", "public values y, in range, with y^q != 1")
def outside_subgroup(given: Given) -> int:
    return _count(given, outsiders)


@fact(
    "public_values.small_order",
    "int",
    "public values that are no unit, or whose order divides the cofactor or its known part",
)
def small_order(given: Given) -> int:
    return _count(given, confined)


@fact(
    "public_values.related",
    "int",
    "public values that share their exponent modulo q with another one: equal to it, or up to an "
    "element whose order divides the cofactor",
)
def related(given: Given) -> int:
    return _count(given, related_values)


@fact(
    "public_values.plainly_visible",
    "int",
    "public values whose exponent anybody sees: up to sign g^k with k of either sign and at most "
    "2^16 (2^12 for moduli beyond 8192 bits)",
)
def plainly_visible(given: Given) -> int:
    return _count(given, visible_values)


def _list(name: str, meaning: str, offending: Callable[[Given], frozenset[int]]) -> None:
    @fact(f"public_values.{name}", "exhibit", f"the public values {meaning}")
    def values(given: Given) -> list[int]:
        return sorted(given.see(offending))


_list("values_out_of_range", "outside [2, n-2]", beyond_range)
_list("values_outside_subgroup", "y, in range, with y^q != 1", outsiders)
_list("values_of_small_order", "counted by public_values.small_order", confined)
_list("values_related", "counted by public_values.related", related_values)
_list("values_plainly_visible", "counted by public_values.plainly_visible", visible_values)


def _subgroup_order(given: Given) -> int:
    """The declared q or, where none is declared, ord(g)."""
    if given.declaration.subgroup_order is None:
        return given.see(parts.generator_order_value)
    q = given.see(subgroup.declared_order)
    if q < 1:
        given.undefined()
    return q


def _cofactor(given: Given) -> int:
    """phi(n)/q; undefined where q does not divide it."""
    q, order = given.see(_subgroup_order), given.see(parts.group_order)
    if order % q:
        given.undefined()
    return order // q
