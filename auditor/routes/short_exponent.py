"""Route: kangaroos on a short private exponent."""

from auditor.routes.base import Model, Unit, Work
from auditor.routes.searches import kangaroo_bits

ROUTE = "short_exponent"
MODEL = Model("Pollard kangaroo", "model")
SOURCE = (
    "Pollard, J. Cryptology 13, 2000; van Oorschot and Wiener, EUROCRYPT 1996, on short exponents"
)


def short_exponent(width: float) -> Work:
    """The logarithm of an exponent uniform in [0, 2^width), in any group.

    Attacker: passive. Formula: 2 sqrt(2^width). Unit: group multiplications. Precondition: none;
    for an exponent as wide as ord(g) the square-root route costs less. Source: Pollard 2000.
    """
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=kangaroo_bits(width),
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=MODEL,
        source=SOURCE,
        explanation=(
            f"A private exponent of {width:g} bits is searched in about the square root of its "
            "range, whatever the group."
        ),
        details=(("exponent width", width),),
    )
