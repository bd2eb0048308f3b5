"""The unit groups modulo given numbers, their factors found and claimed on the way."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import gcd

from auditor.claims.base import Factors
from auditor.claims.standing import Standing, weakest
from auditor.element_orders import product_of
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.structure import (
    FactoredModulus,
    PartialOrder,
    PartlyFactoredGroup,
    UnitGroup,
    UnsplitGroup,
    isomorphism_classes,
    known_structure,
)

Group = UnitGroup | PartlyFactoredGroup | UnsplitGroup


@dataclass(frozen=True, slots=True)
class Structure:
    """What was found about the units modulo one number.

    ``group`` tells by its type how complete it is; ``standing`` is that of the weakest prime used.
    """

    modulus: int
    group: Group
    standing: Standing


@dataclass(frozen=True, slots=True)
class ElementOrder:
    """The order of ``element`` modulo a number: a number, a known part times an unknown divisor,
    or None where the element is no unit."""

    element: int
    order: int | PartialOrder | None


def structure(modulus: int, answers: Answers) -> Structure:
    """The units modulo ``modulus`` >= 1, as far as the effort of ``answers`` finds the factors.

    Raises ValueError for a number below 1.
    """
    if modulus < 1:
        raise ValueError("the units modulo a number below 1 are not defined")
    factors, rest = _factors(modulus, answers, Asks.MODULUS_FACTORS)
    predecessors = {}
    for prime, _ in factors:
        known, _ = _factors(prime - 1, answers, Asks.FACTORIZATION)
        predecessors[prime] = dict(known)
    group = known_structure(dict(factors), predecessors, rest)
    used = [n for n in (modulus, *(prime - 1 for prime, _ in factors)) if n > 1]
    claims = [claim for n in used if (claim := answers.claims.factorization(n))]
    standing = weakest(answers.claims.standing(claim.id) for claim in claims)
    return Structure(modulus, group, standing)


def _factors(number: int, answers: Answers, deeper: Asks) -> tuple[Factors, int]:
    if number == 1:
        return (), 1
    answers.answer(Question(Asks.SMALL_FACTORS, (number,)))
    claim = answers.claims.factorization(number)
    assert claim is not None
    if claim.rest > 1 and answers.deep:
        answers.answer(Question(deeper, (number, claim.rest)))
        claim = answers.claims.factorization(number)
        assert claim is not None
    return claim.factors, claim.rest


def order_of(element: int, found: Structure) -> ElementOrder:
    """The order of an element, as far as it is known."""
    n, group = found.modulus, found.group
    if gcd(element, n) != 1:
        return ElementOrder(element, None)
    if isinstance(group, UnitGroup):
        return ElementOrder(element, group.order_of(element))
    if isinstance(group, PartlyFactoredGroup):
        return ElementOrder(element, group.partial_order_of(element))
    return ElementOrder(element, PartialOrder(group.divisor_of_order_of(element), 0))


def isomorphic(found: Sequence[Structure]) -> tuple[tuple[int, ...], ...] | None:
    """The moduli in classes of isomorphic groups; None where a modulus is not factored."""
    groups = [item.group for item in found if isinstance(item.group, FactoredModulus)]
    if len(groups) < len(found):
        return None
    return tuple(
        tuple(product_of(group.modulus_factors) for group in members)
        for members in isomorphism_classes(groups)
    )
