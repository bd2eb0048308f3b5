"""Route: a square-root method in the largest prime-order subgroup of the generator."""

from auditor.routes.base import Model, Unit, Work
from auditor.routes.factors import Factors
from auditor.routes.searches import rho_bits

ROUTE = "square_root"
RHO = Model("Pollard rho with an ideal random walk", "model")
SOURCE = "Pollard, Math. Comp. 32, 1978; van Oorschot and Wiener, J. Cryptology 12, 1999"


def square_root(order: Factors) -> Work:
    """Logarithms to a base of the given ``order``, at its largest prime.

    Attacker: passive. Formula: sqrt(pi q / 2) for the largest prime q of ord(g). Unit: group
    multiplications. The identity has one power, which costs nothing to know. An unfactored rest
    counts as if it were prime, which makes the figure an upper bound. Source: Pollard 1978.
    """
    largest = max((*order.primes, order.rest))
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=rho_bits(largest) if largest > 1 else 0.0,
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=RHO,
        source=SOURCE,
        explanation=(
            "Random walks until two meet, in the subgroup whose order is the largest prime "
            "factor of the generator's order."
        ),
        bound=order.bound,
        details=(("largest prime length", largest.bit_length()),),
    )
