"""Route: Pohlig-Hellman on the small primes of ord(g), then kangaroos on the rest of x."""

from auditor.routes.base import Closed, Model, Unit, Work, floor_bits, positive
from auditor.routes.factors import Factors
from auditor.routes.partial_exponent import Split, Splits

ROUTE = "smooth_part_then_short_exponent"
MODEL = Model("Pohlig-Hellman and Pollard kangaroo, best division", "model")
SOURCE = "van Oorschot and Wiener, On Diffie-Hellman key agreement with short exponents, 1996"


def smooth_part_then_short_exponent(width: float, order: Factors) -> Work | Closed:
    """The logarithm of an exponent uniform in [0, 2^width) to a base of the given ``order``.

    Attacker: passive; one public value suffices. Formula: the least, over prefixes of the primes
    of ord(g) in ascending order, of sum sqrt(pi/2) (sqrt(r) - 1) + 2 sqrt(2^width / z), z the
    product of the prefix; the last term is absent when the prefix is everything. Unit: group
    multiplications. Precondition: ord(g) > 1. With an unfactored rest the figure is an upper
    bound. Source: van Oorschot and Wiener 1996.
    """
    if order.bits == 0:
        return Closed(ROUTE, "passive", "the generator has order 1")
    split = Splits(width, order).cheapest()
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=split.bits,
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=MODEL,
        source=SOURCE,
        explanation=_explain(split),
        bound=order.bound,
        details=(
            ("exponent width", width),
            ("known bits", floor_bits(split.known_bits)),
            ("prime factors used", split.logarithms),
            ("search of what is left", floor_bits(positive(split.search_bits))),
        ),
    )


def _explain(split: Split) -> str:
    if not split.logarithms:
        return "No small factor of the generator's order helps; kangaroos search the exponent."
    if not split.left_bits:
        return "Logarithms in subgroups of the generator give the whole exponent."
    return (
        f"Small factors of the generator's order give away {floor_bits(split.known_bits):.2f} bits "
        "of the exponent; kangaroos search what is left."
    )
