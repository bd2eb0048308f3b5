"""Facts about the declared subgroup order q, and about the subgroups a peer can reach."""

from math import log2

from auditor.facts import parts
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.routes.base import floor_bits


def declared_order(given: Given) -> int:
    """The declared q."""
    q = given.declaration.subgroup_order
    if q is None:
        given.undeclared("subgroup_order")
    return q


@fact("subgroup.declared", "bool", "a subgroup order q is declared")
def declared(given: Given) -> bool:
    return given.declaration.subgroup_order is not None


@fact("subgroup.order_length", "int", "bit length of the declared q")
def order_length(given: Given) -> int:
    return given.see(declared_order).bit_length()


@fact("subgroup.order_prime", "bool", "the declared q is prime")
def order_prime(given: Given) -> bool:
    return given.is_prime(given.see(declared_order))


@fact("subgroup.divides_group", "bool", "the declared q divides phi(n)")
def divides_group(given: Given) -> bool:
    q = given.see(declared_order)
    return q > 0 and given.see(parts.group_order) % q == 0


@fact("subgroup.cofactor_bits", "real", "log2 of phi(n)/q")
def cofactor_bits(given: Given) -> float:
    q, order = given.see(declared_order), given.see(parts.group_order)
    if q < 1 or order % q:
        given.undefined()
    return floor_bits(log2(order // q))


@fact("subgroup.small_factors_seen", "exhibit", "prime powers that an active peer can use")
def small_factors(given: Given) -> list[list[int]]:
    known = given.see(parts.order_factors)
    return [[prime, exponent] for prime, exponent in known.factors if prime.bit_length() <= 80]
