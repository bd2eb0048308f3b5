"""Facts about the unit group modulo n."""

from math import ceil, log2

from auditor.attested import furthest
from auditor.facts import exponent, parts
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.routes.base import floor_bits
from auditor.search import expected_curves
from auditor.search.work import Work

FIRST_BITS = 20
"""Trial division leaves no factor below 10^6."""


@fact("group.cyclic", "bool", "a primitive root exists")
def cyclic(given: Given) -> bool:
    # Gauss, Disquisitiones arithmeticae, articles 82-92: n is 2, 4, p^k or 2 p^k, p an odd prime.
    n = given.declaration.modulus
    if given.see(parts.nature) == "composite" and n % 4 != 2:
        return False
    return given.see(parts.units).cyclic


@fact("group.cycles", "exhibit", "the invariant factors of the unit group, largest first")
def cycles(given: Given) -> tuple[int, ...]:
    return given.see(parts.units).invariant_factors


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


def _search_record(given: Given) -> Work:
    """The work of the deepest search in the unfactored rest of the group exponent."""
    rest = given.see(parts.exponent_factors).rest
    record = furthest(given.claims, rest) if rest > 1 else None
    if rest == 1:
        given.undefined()
    if record is None:
        given.unsettled()
    given.cite(record[0])
    return record[1]


@fact(
    "group.searched_digits_at_least",
    "int",
    "decimal digits of the factors of phi(n) searched for: each size up to it was missed with "
    "probability 1/e at most",
)
def searched(given: Given) -> int:
    return expected_curves.searched_digits(given.see(_search_record))


def risk_window(given: Given) -> tuple[int, int]:
    """From the first size that division did not exclude to the largest factor that would bring an
    attack below the requirement: one bit more than required where a peer can use it (half as many
    trials), twice as many where its logarithms must be taken."""
    required = given.declaration.required_bits
    by_peer = not isinstance(given.peek(exponent.exposed_parties), Absent)
    in_order = given.peek(parts.generator_order)
    passive = isinstance(in_order, Absent) or in_order.rest > 1
    largest = 2 * required if passive else required + 1
    if largest < FIRST_BITS or not (passive or by_peer):
        given.undefined()
    return FIRST_BITS, largest


@fact(
    "group.missed_factor_window",
    "exhibit",
    "the sizes in bits, from and to, of a missed factor that would bring an attack below the "
    "requirement, as far as is known; none once no factor would",
)
def missed_factor_window(given: Given) -> tuple[int, int]:
    """Of the search so far, like the risk."""
    given.see(_search_record)
    window = given.see(risk_window)
    given.settle()
    return window


@fact(
    "group.missed_factor_risk",
    "exhibit",
    "chance, as the search stands, that a factor in that window was missed, if the modulus was not "
    "chosen adversarially",
)
def missed_factor_risk(given: Given) -> float:
    """No bound: a rest that stays composite under more curves, or becomes shorter by a factor, is
    the likelier to hold another one, so knowing more moves it either way."""
    rest = given.see(parts.exponent_factors).rest
    window = given.see(risk_window)
    risk = expected_curves.missed_factor_risk(
        given.see(_search_record), window, rest.bit_length()
    ).risk
    given.settle()
    return ceil(risk * 1000) / 1000
