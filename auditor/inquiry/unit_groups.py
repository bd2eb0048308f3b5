"""The unit groups modulo given numbers, their factors found and claimed on the way."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import gcd

from auditor.claims.base import Factors
from auditor.claims.collection import Claims
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
    _find_factors([modulus], answers, Asks.MODULUS_FACTORS)
    primes, _ = _factors(modulus, answers.claims)
    _find_factors([prime - 1 for prime, _ in primes], answers, Asks.FACTORIZATION)
    return known_so_far(modulus, answers.claims)


def known_so_far(modulus: int, claims: Claims) -> Structure:
    """What claims say about the units modulo ``modulus``, for instance after an interruption.

    Raises KeyError where the factors of the modulus, or of a group order, were not yet looked for.
    """
    factors, rest = _factors(modulus, claims)
    predecessors = {prime: dict(_factors(prime - 1, claims)[0]) for prime, _ in factors}
    group = known_structure(dict(factors), predecessors, rest)
    used = [n for n in (modulus, *(prime - 1 for prime, _ in factors)) if n > 1]
    rests_on = [claim for n in used if (claim := claims.factorization(n))]
    standing = weakest(claims.standing(claim.id) for claim in rests_on)
    return Structure(modulus, group, standing)


def _find_factors(numbers: Sequence[int], answers: Answers, deeper: Asks) -> None:
    """The small ones of all numbers first: an interruption then leaves none unexamined."""
    wanted = [number for number in numbers if number > 1]
    for number in wanted:
        answers.answer(Question(Asks.SMALL_FACTORS, (number,)))
    for number in wanted if answers.deep else ():
        _, rest = _factors(number, answers.claims)
        if rest > 1:
            answers.answer(Question(deeper, (number, rest)))


def _factors(number: int, claims: Claims) -> tuple[Factors, int]:
    if number == 1:
        return (), 1
    claim = claims.factorization(number)
    if claim is None:
        raise KeyError(number)
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
