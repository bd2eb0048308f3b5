"""What sets have in common is worked out once and changes nothing: not a fact, not an outcome."""

from dataclasses import replace
from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.collection import Claims
from auditor.claims.prime import Prime
from auditor.declaration import Declaration
from auditor.facts import establish, vocabulary
from auditor.facts.given import Given, Shared
from auditor.rulebooks.judging import Judging, judge
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.run_values import RunValues
from tests.facts.knowledge import RUN, declare, settled
from tests.facts.test_monotony import declarations


@cache
def judging() -> Judging:
    """The default books, at work on every example below."""
    return Judging(load_all(DEFAULT_BOOKS, vocabulary()), vocabulary())


KEYS = (
    "generator",
    "purpose",
    "scheme",
    "protocol",
    "subgroup_order",
    "parties",
    "message_bits",
    "public_values",
    "required_strength",
    "protect_until",
)


@settings(max_examples=60)
@given(st.lists(declarations(), min_size=2, max_size=4), st.data())
def test_sharing_changes_nothing(drawn: list[Declaration], data: st.DataObject) -> None:
    """Sets over one modulus that take keys from each other, each alone and all together."""
    n = drawn[0].modulus
    sets = [replace(item, modulus=n) for item in drawn]
    for item in list(sets):
        other = data.draw(st.sampled_from(sets))
        keys = data.draw(st.sets(st.sampled_from(KEYS)))
        sets.append(replace(item, **{key: getattr(other, key) for key in keys}))
    claims = Claims(claim for item in sets for claim in settled(item))
    shared = Shared(claims, RUN)

    for item in sets:
        alone = establish(item, claims, RUN)
        together = establish(item, claims, RUN, shared)

        assert together == alone
        assert list(together.facts) == list(alone.facts)
        assert judging().judge(together.facts, together.absent) == judge(
            judging().books, alone.facts, alone.absent, vocabulary()
        )


def test_what_was_seen_is_forgotten_when_claims_come() -> None:
    """A part that was unsettled is worked out again."""
    claims = Claims()
    shared = Shared(claims, RUN)
    declaration = declare(23, 5)

    before = establish(declaration, claims, RUN, shared)
    claims.add([Prime(23, "below-2^64")])
    after = establish(declaration, claims, RUN, shared)

    assert before.absent["modulus.nature"].reason == "unsettled"
    assert after.facts["modulus.nature"].value == "prime"


def test_what_was_seen_is_not_taken_elsewhere() -> None:
    """Other claims or run values are refused."""
    shared = Shared(Claims(), RUN)

    with pytest.raises(ValueError, match="other claims"):
        Given(declare(23, 5), Claims(), RUN, shared)
    with pytest.raises(ValueError, match="other claims"):
        Given(declare(23, 5), shared.claims, RunValues("2026-12-01", "quick"), shared)
