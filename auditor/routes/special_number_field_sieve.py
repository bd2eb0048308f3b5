"""Route: the special number field sieve, for a modulus that a small polynomial represents."""

from auditor.routes.base import Model, Unit, Work, floor_bits
from auditor.routes.sieve_models import nist_bits, special_bits

ROUTE = "special_number_field_sieve"
INTERPOLATION = Model("special number field sieve, interpolated by polynomial size", "heuristic")
DEGREES = range(4, 9)
"""Those near the optimum of the sieve at the lengths in use (from memory). Of one outside the
formula would see only that its pair is as small as a special one, not that its linear side (below)
or its algebraic side (above) is far too large, and so claim too little work."""
SOURCE = (
    "Semaev, Math. Comp. 71, 2002 (cited from memory); Fried, Gaudry, Heninger, Thomé, "
    "EUROCRYPT 2017; the interpolation between the two sieves is ours"
)


def special_number_field_sieve(
    modulus_bits: float, degree: int, coefficient_bits: float, root_bits: float
) -> Work:
    """Logarithms modulo a prime of special form.

    A multiple of p is f(g0/g1) g1^degree with f of ``degree``; ``coefficient_bits`` is log2 of
    the largest coefficient of f, ``root_bits`` log2 of max(|g0|, |g1|), ``modulus_bits`` log2 p.

    Attacker: passive. Formula: with n = log2 p, the pair has size d (F + G); a special one has
    n, an ordinary one 2 n d / (d + 1); sigma is the place between them, 1 at the special end;
    the cost is that of the special sieve at n (2 - sigma) bits, and never more than that of the
    general sieve. Of a degree outside ``DEGREES`` no advantage is claimed, and the figure is that
    of the general sieve, which needs no pair. Unit: symmetric-key trials. Precondition: p is prime
    and the pair was found.
    Source: the end points are the published asymptotics, the interpolation is ours.
    """
    sigma = advantage(modulus_bits, degree, coefficient_bits, root_bits)
    effective = modulus_bits * (2 - sigma)
    general = nist_bits(modulus_bits)
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=min(general, special_bits(effective)),
        unit=Unit.SYMMETRIC_TRIALS,
        model=INTERPOLATION,
        source=SOURCE,
        explanation=(
            f"A polynomial of degree {degree} with small coefficients represents the modulus, "
            "so index calculus runs as if the modulus were much shorter."
        ),
        details=(
            ("degree", degree),
            ("advantage, 0 to 1", round(sigma, 3)),
            ("effective length", round(effective, 1)),
            ("general sieve", floor_bits(general)),
        ),
    )


def advantage(modulus_bits: float, degree: int, coefficient_bits: float, root_bits: float) -> float:
    """Sigma: 1 for a pair as small as a special form allows, 0 for one no better than ordinary or
    of a degree that the formula does not cover.

    A skewed pair, with coefficients of different sizes, is measured by its largest, which makes it
    look worse than it is: the work is then overstated, and stays an upper bound.
    """
    if degree not in DEGREES:
        return 0.0
    size = degree * (coefficient_bits + root_bits)
    ordinary = 2 * modulus_bits * degree / (degree + 1)
    sigma = 1 - (size - modulus_bits) / (ordinary - modulus_bits)
    return min(1.0, max(0.0, sigma))
