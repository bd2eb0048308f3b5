"""Facts about the generator and its order.

Order from partial knowledge: with the group exponent A*C, A factored and C not, ord(g) is a known
divisor of A times an unknown divisor of C. What that already decides is final; the rest waits.
"""

from math import gcd, log2

from auditor.claims.base import product
from auditor.claims.origin_generator import CanonicalGenerator
from auditor.claims.origin_recipe import HASHES, PROBABLE, PROVABLE, seed_integer
from auditor.facts import parts, provenance, subgroup
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question
from auditor.routes.base import floor_bits


@fact("generator.unit", "bool", "gcd(g, n) = 1")
def unit(given: Given) -> bool:
    return gcd(given.declaration.generator, given.declaration.modulus) == 1


@fact("generator.reduced", "bool", "0 < g < n as declared, before it is reduced modulo n")
def reduced(given: Given) -> bool:
    return 0 < given.declaration.generator < given.declaration.modulus


@fact("generator.trivial", "bool", "g is 0, 1 or n-1 modulo n")
def trivial(given: Given) -> bool:
    n = given.declaration.modulus
    if n < 1:
        given.undefined()
    return given.declaration.generator % n in {0, 1 % n, n - 1}


@fact("generator.order_length", "int", "bit length of ord(g)")
def order_length(given: Given) -> int:
    return given.see(parts.generator_order_value).bit_length()


@fact("generator.order_bits", "real", "log2 of ord(g)")
def order_bits(given: Given) -> float:
    return floor_bits(log2(given.see(parts.generator_order_value)))


@fact("generator.order_prime", "bool", "ord(g) is a prime")
def order_prime(given: Given) -> bool:
    order = given.see(parts.generator_order)
    known = sum(exponent for _, exponent in order.factors)
    if order.rest > 1 and known == 0:
        # Nothing known divides it: the unknown divisor of the rest could be a prime.
        given.unsettled(*given.trace(parts.generator_order).questions)
    given.settle()
    return order.rest == 1 and known == 1


@fact("generator.order_even", "bool", "ord(g) is even")
def order_even(given: Given) -> bool:
    order = given.see(parts.generator_order)
    if order.rest % 2 == 0:
        given.unsettled(*given.trace(parts.generator_order).questions)
    given.settle()
    return any(prime == 2 for prime, _ in order.factors)


@fact("generator.generates_group", "bool", "g generates the whole unit group")
def generates_group(given: Given) -> bool:
    order, group = given.see(parts.generator_order), given.see(parts.group_order)
    known = product(order.factors) * order.rest
    if known != group:
        given.settle()
        return False
    if order.rest > 1:
        given.unsettled(*given.trace(parts.generator_order).questions)
    return True


@fact("generator.largest_prime_length", "int", "bit length of the largest prime dividing ord(g)")
def largest_prime_length(given: Given) -> int:
    factors = given.see(parts.complete_generator_order)
    return max((prime.bit_length() for prime, _ in factors), default=0)


@fact("generator.index_bits", "real", "log2 of phi(n)/ord(g)")
def index_bits(given: Given) -> float:
    return floor_bits(log2(given.see(parts.group_order) // given.see(parts.generator_order_value)))


@fact("generator.order_is_declared", "bool", "ord(g) is the declared q")
def order_is_declared(given: Given) -> bool:
    q = given.declaration.subgroup_order
    if q is None:
        given.undeclared("subgroup_order")
    if q < 1:
        return False
    if q == 1 or not given.is_member(given.declaration.modulus, given.see(parts.element), q):
        return q == 1 and given.see(parts.element) == 1 % given.declaration.modulus
    return given.see(parts.generator_order_value) == q


@fact("generator.canonical", "bool", "g was regenerated from the declared seed and index")
def canonical(given: Given) -> bool:
    """FIPS 186-4, A.2.4; its inputs p and q are primes with q dividing p - 1. A method without an
    index makes no canonical generator, so the index counts as undeclared there."""
    n, g = given.declaration.modulus, given.declaration.generator
    if given.declaration.provenance is None:
        given.undeclared("provenance")
    if given.declaration.provenance.method not in (PROBABLE, PROVABLE):
        given.undeclared("provenance.generator_index")
    (index,) = provenance.declared(given, "generator_index")
    name, seed = given.see(provenance.hash_name), b"".join(given.see(provenance.seeds))
    q = given.see(subgroup.declared_order)
    if not (given.is_prime(n) and given.is_prime(q)) or (n - 1) % q or not 0 <= int(index) < 256:
        given.undefined()
    values = {"hash": name, "seed": seed, "index": int(index)}
    claim = given.claims.about(CanonicalGenerator, n, q=q, g=g, **values)
    if claim is None:
        spelled = HASHES.index(name), seed_integer(seed), int(index)
        given.unsettled(Question(Asks.CANONICAL_GENERATOR, (n, q, g, *spelled)))
    given.cite(claim)
    return claim.canonical
