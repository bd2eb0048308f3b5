"""Facts about declared public values: range and membership, never a logarithm."""

from math import gcd

from auditor.facts import parts, subgroup
from auditor.facts.given import Given
from auditor.facts.registry import fact


def declared(given: Given) -> tuple[int, ...]:
    """The declared public values."""
    if not given.declaration.public_values:
        given.undeclared("public_values")
    return given.declaration.public_values


def in_range(given: Given, y: int) -> bool:
    """2 <= y <= n-2: SP 800-56A Rev. 3, 5.6.2.3.1 step 1 (secondary)."""
    return 2 <= y <= given.declaration.modulus - 2


@fact("public_values.count", "int", "how many public values are declared")
def count(given: Given) -> int:
    return len(given.declaration.public_values)


@fact("public_values.out_of_range", "int", "public values outside [2, n-2]")
def out_of_range(given: Given) -> int:
    return sum(not in_range(given, y) for y in given.see(declared))


@fact("public_values.outside_subgroup", "int", "public values y, in range, with y^q != 1")
def outside_subgroup(given: Given) -> int:
    n, q = given.declaration.modulus, given.see(_subgroup_order)
    values = [y for y in given.see(declared) if in_range(given, y)]
    return sum(not given.is_member(n, y, q) for y in values)


@fact(
    "public_values.small_order",
    "int",
    "public values that are no unit, or whose order divides the cofactor or its known part",
)
def small_order(given: Given) -> int:
    n, q = given.declaration.modulus, given.see(_subgroup_order)
    order = given.see(parts.group_order)
    if order % q:
        given.undefined()
    units = [y % n for y in given.see(declared) if gcd(y, n) == 1]
    confined = sum(given.is_member(n, y, order // q) for y in units)
    return len(given.see(declared)) - len(units) + confined


def _subgroup_order(given: Given) -> int:
    """The declared q or, where none is declared, ord(g)."""
    if given.declaration.subgroup_order is None:
        return given.see(parts.generator_order_value)
    q = given.see(subgroup.declared_order)
    if q < 1:
        given.undefined()
    return q
