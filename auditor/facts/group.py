"""Facts about the unit group modulo n."""

from math import log2

from auditor.facts import parts
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.routes.base import floor_bits


@fact("group.cyclic", "bool", "a primitive root exists")
def cyclic(given: Given) -> bool:
    # Gauss, Disquisitiones arithmeticae, articles 82-92: n is 2, 4, p^k or 2 p^k, p an odd prime.
    n = given.declaration.modulus
    kind = given.see(parts.nature)
    if kind == "composite":
        odd, twos = n, 0
        while odd % 2 == 0:
            odd, twos = odd // 2, twos + 1
        if twos != 1:
            given.settle()
            return False
        factors = given.see(parts.modulus_factors)
        return len(factors) == 2
    given.settle()
    return kind != "power of two" or n == 4


@fact("group.order_bits", "real", "log2 of phi(n)")
def order_bits(given: Given) -> float:
    return floor_bits(log2(given.see(parts.group_order)))


@fact("group.exponent_bits", "real", "log2 of lambda(n)")
def exponent_bits(given: Given) -> float:
    return floor_bits(log2(given.see(parts.group_exponent)))


@fact("group.factored", "bool", "present, and true, when the factorization of phi(n) is complete")
def factored(given: Given) -> bool:
    if given.see(parts.exponent_factors).rest > 1:
        given.unsettled(*given.trace(parts.exponent_factors).questions)
    return True


@fact(
    "group.unfactored_length_at_most",
    "int",
    "bit length of the composite part of phi(n) still unfactored; 0 when complete",
)
def unfactored_length(given: Given) -> int:
    rest = given.see(parts.order_factors).rest
    return 0 if rest == 1 else rest.bit_length()
