"""Is the modulus of a form that the special number field sieve can use?

Three tiers, each with its own bound on false reports: roots that are powers of small bases (1), any
root of a form with visible digits (2), tiny polynomials with a hidden root (3). The bound is what
makes the detector usable on the published groups: their 64-bit runs of ones, from formulas with pi
and e, look special to a count of digits and are not. Nothing found means none among those looked
for: a form with coefficients of eleven bits and a hidden root is beyond any known search.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from auditor.search import special_form_any_root as any_root
from auditor.search import special_form_hidden as hidden
from auditor.search import special_form_known_root as known_root
from auditor.search.special_form_pair import RawPair, SpecialForm, special_form

LEAST_LENGTH = 128
"""Below this length, in bits, no form is looked for: any logarithm is practical there."""


@dataclass(frozen=True, slots=True)
class LookedFor:
    """What one tier looks for, in words, and in how many places."""

    tier: int
    what: str
    tests: int


def looked_for(p: int, tiers: Sequence[int] = (1, 2)) -> tuple[LookedFor, ...]:
    """What :func:`search` looks for with these arguments, whether it finds something or not."""
    if p.bit_length() < LEAST_LENGTH:
        return ()
    bases = ", ".join(map(str, known_root.BASES))
    what = {
        1: (f"degree 2 to 8 with a root b^j, b one of {bases}", known_root.tests(p)),
        2: (
            f"degree 2 to 8 with any root, leading coefficient and cofactor up to "
            f"{any_root.LARGEST}",
            any_root.tests(),
        ),
        3: ("degree 4 to 6 with coefficients -1, 0 and 1 and a hidden root", hidden.tests()),
    }
    return tuple(LookedFor(tier, *what[tier]) for tier in sorted(set(tiers)))


def search(p: int, tiers: Sequence[int] = (1, 2)) -> SpecialForm | None:
    """The most special form of the prime p among those that these tiers look for.

    Forms of degree 4 or more come first, as they help the sieve; equally special ones are ordered
    by value. Raises ValueError for an even p or one below 3.
    """
    if p < 3 or p % 2 == 0:
        raise ValueError("a special form is looked for in an odd number above 2")
    if p.bit_length() < LEAST_LENGTH:
        return None
    forms = [
        form
        for tier in sorted(set(tiers))
        for raw in _pairs(p, tier)
        if (form := special_form(p, tier, raw)) is not None
    ]
    return min(forms, key=SpecialForm.rank, default=None)


def _pairs(p: int, tier: int) -> Iterator[RawPair]:
    match tier:
        case 1:
            return known_root.pairs(p)
        case 2:
            return any_root.pairs(p)
        case 3:
            return hidden.pairs(p)
    raise ValueError(f"there is no tier {tier}")
