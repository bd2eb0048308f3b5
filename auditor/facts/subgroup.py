"""Facts about the declared subgroup order q, and about the subgroups a peer can reach."""

from math import log2

from auditor.claims.subgroup_generator import SubgroupGenerator
from auditor.facts import parts
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question
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


@fact(
    "subgroup.cofactor_agrees",
    "bool",
    "the declared cofactor j satisfies n = qj + 1 with the declared q; undefined where no j is "
    "declared",
)
def cofactor_agrees(given: Given) -> bool:
    """RFC 2631, 2.2.2, step 1."""
    n, j = given.declaration.modulus, given.declaration.cofactor
    if j is None:
        given.undefined()
    return given.see(declared_order) * j == n - 1


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


@fact(
    "subgroup.prime_generator_seen",
    "exhibit",
    "[q, g]: a prime order of at least twice the required strength and an element that has it, "
    "where the order of the generator is no such prime",
)
def prime_generator(given: Given) -> tuple[int, int]:
    """q is the declared order where that serves, otherwise the largest prime known to divide the
    group order; g is made from the least base."""
    n = given.declaration.modulus
    if given.see(parts.nature) != "prime" or given.see(serves):
        given.undefined()
    q = given.see(prime_order)
    claim = given.claims.about(SubgroupGenerator, n, q=q)
    if claim is None:
        given.unsettled(Question(Asks.SUBGROUP_GENERATOR, (n, q)))
    given.cite(claim)
    return q, claim.g


def serves(given: Given) -> bool:
    """Whether ord(g) is a prime of at least twice the required strength; no element serves that is
    no unit."""
    if isinstance(absent := given.peek(parts.element), Absent) and absent.reason == "undefined":
        return False
    order = given.see(parts.generator_order)
    known = sum(exponent for _, exponent in order.factors)
    if order.rest > 1 and known == 0:
        given.unsettled(*given.trace(parts.generator_order).questions)
    given.settle()
    return order.rest == 1 and known == 1 and is_long(given, order.factors[0][0])


def is_long(given: Given, q: int) -> bool:
    """Whether a logarithm in a group of the prime order q costs the required strength."""
    return q.bit_length() >= 2 * given.declaration.required_bits


def prime_order(given: Given) -> int:
    """The prime order to move to; absent where no prime that is known is long enough."""
    known = given.see(parts.order_factors)
    fit = [prime for prime, _ in known.factors if is_long(given, prime)]
    if not fit and known.rest > 1:
        given.unsettled(*given.trace(parts.order_factors).questions)
    if not fit:
        given.undefined()
    declared = given.declaration.subgroup_order
    return declared if declared in fit else max(fit)
