"""Route: probing a reused exponent with values of small order."""

from typing import Literal

from auditor.routes.base import Closed, Detail, Model, Unit, Work, floor_bits, positive
from auditor.routes.factors import Factors
from auditor.routes.partial_exponent import Split, Splits

ROUTE = "confinement"
MODEL = Model("subgroup confinement, Pohlig-Hellman and Pollard kangaroo, best division", "model")
SOURCE = "Lim and Lee, CRYPTO 1997; van Oorschot and Wiener, EUROCRYPT 1996"

Check = Literal["none", "range", "membership", "cofactor"]
"""What is done to a received value y, in the words of a declaration. ``range`` is 1 < y < p - 1;
``membership`` is y^ord(g) = 1 and y != 1; ``cofactor`` raises y to the cofactor and refuses 1."""


def confinement(
    width: float, order: Factors, group: Factors, check: Check, reused: bool
) -> Work | Closed:
    """An exponent uniform in [0, 2^width), ``reused`` by a party that makes ``check``.

    ``order`` is ord(g); ``group`` the exponent of the group of units, p - 1 for a prime p.

    Attacker: peer. Formula: the least, over prefixes A of the usable primes of the group that
    ord(g) lacks and prefixes B of the primes of ord(g), of sum_A (r - 1) / 2 + sum_B sqrt(pi/2)
    (sqrt(r) - 1) + 2 sqrt(2^width / z), z the product of A and B; the last term is absent when B
    is everything, and a prime power of the group counts once, whoever learns it. A probe of
    order r costs (r - 1) / 2 wrong guesses on average, when a message under the derived key is
    all that is seen. Unit: key trials and group multiplications, counted alike; on-line
    queries are one for each prime used. With unfactored rests the figure is an upper bound.

    Usable is every prime of ``group`` when nothing or the range is checked: a range check
    refuses the elements of order 1 and 2 themselves, but y = -g^a passes and its product with
    any other probe does, so the parity still leaks. With a membership test or a cofactor
    exponent nothing outside <g> is usable. (A membership test by a number other than ord(g)
    admits the elements of that order: pass its factorization as ``group`` and no check.)

    Precondition: the exponent is used more than once; a single use confines one session's key
    and reveals nothing that outlives it. Source: Lim and Lee 1997, with the combination of van
    Oorschot and Wiener 1996.
    """
    if not reused:
        return Closed(ROUTE, "peer", "every exponent is used once")
    if check in ("membership", "cofactor"):
        return Closed(ROUTE, "peer", f"the {check} check keeps received values inside <g>")
    probes = tuple(
        prime
        for prime, exponent in group.known
        for _ in range(exponent - order.multiplicity(prime))
    )
    split = Splits(width, order, probes).cheapest()
    return Work(
        route=ROUTE,
        attacker="peer",
        bits=split.bits,
        unit=Unit.KEY_TRIALS,
        model=MODEL,
        source=SOURCE,
        explanation=_explain(split),
        bound="exact" if order.complete and group.complete else "at most",
        details=_details(width, order, tuple(sorted(probes)), split),
    )


def _explain(split: Split) -> str:
    if not split.probes:
        return "Values of small order sent to a reused exponent would not make an attack cheaper."
    queries = "one query" if split.probes == 1 else f"{split.probes} queries"
    return (
        "Values of small order sent to a reused exponent tell it modulo a number of "
        f"{floor_bits(split.probed_bits):.2f} bits in {queries}; the rest is searched off line."
    )


def _details(
    width: float, order: Factors, probes: tuple[int, ...], split: Split
) -> tuple[Detail, ...]:
    details: tuple[Detail, ...] = (
        ("exponent width", width),
        ("queries", split.probes),
        ("bits of the number modulo which probing tells it", floor_bits(split.probed_bits)),
        ("off-line trials", floor_bits(positive(split.trials_bits))),
        ("search of what is left", floor_bits(positive(split.search_bits))),
    )
    if split.probes:
        details += (("largest prime probed", probes[split.probes - 1]),)
    if width > order.bits + 1:
        reduced = Splits(order.bits, order, probes).cheapest()
        details += (("if exponents are reduced modulo ord(g)", floor_bits(reduced.bits)),)
    return details
