"""The cost of the elementary searches that routes are composed of.

Three kinds: a logarithm in a subgroup of prime order (square-root methods), a logarithm in an
interval (kangaroo), and trying one candidate after the other. In composed routes the first and
the last are counted with one step less than usual: a group of one element costs nothing to
search. With that step the composed figures have a property that they would lack in tiny groups,
and on which the reports rely: *knowing one more factor never raises a figure*. The reason is
(sqrt(a) - 1) + (sqrt(b) - 1) <= sqrt(ab) - 1.

Sources: Pollard 1978 and 2000 (rho, kangaroo); van Oorschot and Wiener, J. Cryptology 12, 1999.
"""

import math

from auditor.routes.base import log2_difference

RHO_CONSTANT_BITS = 0.5 * math.log2(math.pi / 2)
"""Expected steps of rho with an ideal random map are sqrt(pi/2) sqrt(q). The negation map that
saves another sqrt(2) on curves needs a free inversion and is no use modulo a prime."""


def rho_bits(order: int) -> float:
    """Pollard rho in a group of prime ``order``: log2 of sqrt(pi q / 2) group multiplications."""
    return 0.5 * math.log2(order) + RHO_CONSTANT_BITS


def kangaroo_bits(width: float) -> float:
    """Pollard kangaroo on 2^width exponents: log2 of 2 sqrt(2^width) group multiplications."""
    return 1 + width / 2


def subgroup_bits(order: int) -> float:
    """One logarithm among ``order`` elements: log2 of sqrt(pi/2) (sqrt(order) - 1).

    Of two elements one is excluded by half a trial on average, which is less.
    """
    if order == 2:
        return -1.0
    return RHO_CONSTANT_BITS + log2_difference(0.5 * math.log2(order), 0.0)


def trial_bits(candidates: int) -> float:
    """Trying candidates in turn: log2 of the mean number that fails, (candidates - 1) / 2."""
    return math.log2(candidates - 1) - 1
