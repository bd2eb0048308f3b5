"""Modulo which number small factors give an exponent away, whatever becomes of the rest.

The number is given as log2. An exponent of no more bits is known in full.
"""

import math
from collections.abc import Callable

from auditor.routes.confinement import Check
from auditor.routes.factors import Factors
from auditor.routes.searches import rho_bits

CHEAP_BITS = 40.0
"""Work up to which a factor counts as given away: minutes on one machine."""


def public_leak_bits(order: Factors, budget_bits: float = CHEAP_BITS) -> float:
    """log2 of the number modulo which a public value reveals an exponent, at least.

    The exponent is known modulo every prime power of ord(g) whose logarithms cost at most
    2^budget_bits group multiplications a digit. Source: Pohlig and Hellman 1978; van Oorschot and
    Wiener, EUROCRYPT 1996.
    """
    return _bits(order, lambda prime: rho_bits(prime) <= budget_bits)


def confinement_leak_bits(
    order: Factors, group: Factors, check: Check, budget_bits: float = CHEAP_BITS
) -> float:
    """log2 of the number modulo which a peer learns a reused exponent, at least.

    It sends values of small order. Every prime factor r <= 2^budget_bits of the orders of accepted
    values counts, at r trials or fewer. Accepted are all units with no check or a range check
    (which stops neither -g^a nor its products), and elements of <g> with a membership test or a
    cofactor exponent. Source: Lim and Lee, CRYPTO 1997.
    """
    accepted = group if check in ("none", "range") else order
    return _bits(accepted, lambda prime: math.log2(prime) <= budget_bits)


def _bits(factors: Factors, cheap: Callable[[int], bool]) -> float:
    return math.fsum(math.log2(prime) for prime in factors.primes if cheap(prime))
