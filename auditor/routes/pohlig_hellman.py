"""Route: Pohlig-Hellman, one small logarithm for every prime factor of the generator's order."""

from auditor.routes.base import Closed, Model, Unit, Work, log2_sum, positive
from auditor.routes.factors import Factors
from auditor.routes.searches import subgroup_bits

ROUTE = "pohlig_hellman"
MODEL = Model("Pohlig-Hellman with square-root methods", "model")
SOURCE = "Pohlig and Hellman, IEEE Trans. Inform. Theory 24, 1978"


def pohlig_hellman_bits(order: Factors) -> float:
    """log2 of the sum over the primes r of the order, with multiplicity, of their searches.

    The exponentiations that lead into the subgroups are not counted: log2(order) group
    multiplications for each prime at most.
    """
    terms = [subgroup_bits(prime) for prime in order.primes]
    return positive(log2_sum(*terms, subgroup_bits(order.rest)))


def pohlig_hellman(order: Factors) -> Work | Closed:
    """Full logarithms to a base of the given ``order``.

    Attacker: passive. Formula: sum of e sqrt(pi/2) (sqrt(r) - 1) over the prime powers r^e of
    ord(g). Unit: group multiplications. Precondition: ord(g) > 1. An unfactored rest counts as
    if it were prime, which makes the figure an upper bound. Source: Pohlig and Hellman 1978.
    """
    if order.bits == 0:
        return Closed(ROUTE, "passive", "the generator has order 1")
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=pohlig_hellman_bits(order),
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=MODEL,
        source=SOURCE,
        explanation=(
            "One logarithm in each prime-order subgroup of the generator, put together by the "
            "Chinese remainder theorem."
        ),
        bound=order.bound,
        details=(
            ("known prime factors", len(order.primes)),
            ("unfactored length", 0 if order.complete else order.rest.bit_length()),
        ),
    )
