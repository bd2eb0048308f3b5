"""Route: a special form that only whoever chose the modulus knows."""

from auditor.routes.base import Closed, Model, Unit, Work
from auditor.routes.sieve_models import special_bits

ROUTE = "hidden_form"
MODEL = Model("special number field sieve at full advantage", "heuristic")
SOURCE = (
    "Gordon, CRYPTO 1992; Fried, Gaudry, Heninger, Thomé, A kilobit hidden SNFS discrete "
    "logarithm computation, EUROCRYPT 2017"
)


def hidden_form(modulus_bits: float, origin_verified: bool) -> Work | Closed:
    """What logarithms may cost the designer of a prime modulus of ``modulus_bits`` bits.

    Attacker: designer. Formula: the special sieve with full advantage at that length. Unit:
    symmetric-key trials. Precondition: the modulus has no verified origin (a published formula
    or a seed that regenerates it); a hidden polynomial with coefficients of some ten bits
    cannot be found by inspection. Source: Gordon 1992; Fried et al. 2017.
    """
    if origin_verified:
        return Closed(ROUTE, "designer", "the modulus follows from a formula or a seed")
    return Work(
        route=ROUTE,
        attacker="designer",
        bits=special_bits(modulus_bits),
        unit=Unit.SYMMETRIC_TRIALS,
        model=MODEL,
        source=SOURCE,
        explanation=(
            "Nothing shows how the modulus was made, and whoever made it could have built in a "
            "special form that nobody else can find."
        ),
        details=(("modulus bits", round(modulus_bits, 2)),),
    )
