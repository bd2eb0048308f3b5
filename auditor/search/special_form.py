"""Is the modulus of a form that the special number field sieve can use?

Three tiers, each with its own bound on false reports: roots that are powers of small bases (1), any
root of a form with visible digits (2), tiny polynomials with a hidden root (3). The bound is what
makes the detector usable on the published groups: their 64-bit runs of ones, from formulas with pi
and e, look special to a count of digits and are not. Nothing found means none among those looked
for: a form with coefficients of eleven bits and a hidden root is beyond any known search.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from math import inf
from typing import NamedTuple

from auditor.search import special_form_any_root as any_root
from auditor.search import special_form_hidden as hidden
from auditor.search import special_form_known_root as known_root
from auditor.search.special_form_pair import RawPair, SpecialForm, special_form

LEAST_LENGTH = 384
"""Below this length, in bits, no form is looked for: any logarithm is practical there. From it on a
pair that helps the sieve is always too small to be an accident."""
LARGEST_HIDDEN = 8192
"""Above this length, in bits, no hidden root is looked for: it would take hours."""


class Tier(NamedTuple):
    """One search: what for, in how many places for p, the search, and the longest p for it."""

    what: str
    tests: Callable[[int], int]
    pairs: Callable[[int], Iterator[RawPair]]
    longest: float = inf


TIERS: Mapping[int, Tier] = {
    1: Tier(
        f"degree 4 to 8 with a root b^j, b one of {', '.join(map(str, known_root.BASES))}",
        known_root.tests,
        known_root.pairs,
    ),
    2: Tier(
        f"degree 4 to 8 with any root, leading coefficient and cofactor up to {any_root.LARGEST}",
        lambda p: any_root.tests(),
        any_root.pairs,
    ),
    3: Tier(
        "degree 4 to 6 with coefficients -1, 0 and 1 and a hidden root",
        lambda p: hidden.tests(),
        hidden.pairs,
        LARGEST_HIDDEN,
    ),
}


@dataclass(frozen=True, slots=True)
class LookedFor:
    """What one tier looks for, in words, and in how many places."""

    tier: int
    what: str
    tests: int


def looked_for(p: int, tiers: Sequence[int] = (1, 2)) -> tuple[LookedFor, ...]:
    """What :func:`search` looks for with these arguments, whether it finds something or not."""
    return tuple(
        LookedFor(tier, TIERS[tier].what, TIERS[tier].tests(p)) for tier in _applied(p, tiers)
    )


def search(p: int, tiers: Sequence[int] = (1, 2)) -> SpecialForm | None:
    """The most special form of the prime p that helps the sieve, among those that these tiers look
    for; equally special ones are ordered by value.

    Raises ValueError for an even p, one below 3, or a tier that does not exist.
    """
    if p < 3 or p % 2 == 0:
        raise ValueError("a special form is looked for in an odd number above 2")
    forms = [
        form
        for tier in _applied(p, tiers)
        for raw in TIERS[tier].pairs(p)
        if (form := special_form(p, tier, raw)) is not None and form.helps_the_sieve
    ]
    return min(forms, key=SpecialForm.rank, default=None)


def _applied(p: int, tiers: Sequence[int]) -> list[int]:
    """Those of the tiers that look at a number of this length, in order."""
    if not set(tiers) <= set(TIERS):
        raise ValueError(f"the tiers are {', '.join(map(str, TIERS))}")
    return [
        tier for tier in sorted(set(tiers)) if LEAST_LENGTH <= p.bit_length() <= TIERS[tier].longest
    ]
