"""What sets have in common is worked out once and changes nothing: not a fact, not an outcome."""

from dataclasses import replace
from functools import cache
from itertools import product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.prime import Prime
from auditor.declaration import Declaration, Place
from auditor.facts import establish, established, vocabulary
from auditor.facts.given import Given, Shared, narrow
from auditor.rulebooks.judging import Brief, Judging, judge
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.run_values import RunValues
from tests.facts.knowledge import RUN, declare, settled, some
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
    """Sets over one modulus that take keys from each other, under all claims and under some, each
    alone and all together."""
    n = drawn[0].modulus
    sets = [replace(item, modulus=n) for item in drawn]
    for item in list(sets):
        other = data.draw(st.sampled_from(sets))
        keys = data.draw(st.sets(st.sampled_from(KEYS)))
        sets.append(replace(item, **{key: getattr(other, key) for key in keys}))
    everything = Claims(claim for item in sets for claim in settled(item))
    less = some(everything, data.draw(st.randoms(use_true_random=False)))
    shared = Shared(RUN)
    given_with = {claims: Given(sets[0], claims, RUN, shared) for claims in (less, everything)}

    for item, claims in product(sets, given_with):
        alone = establish(item, claims, RUN)
        together = establish(item, claims, RUN, shared)
        given_with[claims] = given_with[claims].changed(item)

        assert together == alone
        assert established(item, given_with[claims]) == alone
        assert list(together.facts) == list(alone.facts)
        judgement = judging().judge(together.facts, together.absent)
        known = {**together.facts, **together.absent}
        assert judgement == judge(judging().books, alone.facts, alone.absent, vocabulary())
        assert judging().brief(known.__getitem__) == Brief(
            judgement.position,
            frozenset(found.rule for found in judgement.findings if found.grade == "major"),
        )


def test_what_was_open_is_worked_out_again_when_claims_come() -> None:
    """A part that was unsettled sees the claim that settles it."""
    claims = Claims()
    shared = Shared(RUN)
    declaration = declare(23, 5)

    before = establish(declaration, claims, RUN, shared)
    claims.add([Prime(23, "below-2^64")])
    after = establish(declaration, claims, RUN, shared)

    assert before.absent["modulus.nature"].reason == "unsettled"
    assert after.facts["modulus.nature"].value == "prime"


def test_an_outcome_is_worked_out_once_for_all_that_agree_in_what_it_read() -> None:
    """Other keys and other claims change nothing, nor does a key that a narrow part reads while it
    says the same."""
    worked_out: list[int] = []

    @narrow
    def parity(known: Given) -> bool:
        return known.declaration.generator % 2 == 0

    def size(known: Given) -> int:
        worked_out.append(known.declaration.modulus)
        return known.declaration.modulus + known.see(parity)

    shared = Shared(RUN)

    def sees(declaration: Declaration, *claims: Claim) -> int:
        return Given(declaration, Claims(claims), RUN, shared).see(size)

    assert sees(declare(23, 4)) == sees(declare(23, 8, purpose="signature")) == 24
    assert sees(declare(23, 4), Prime(23, "below-2^64")) == 24
    assert worked_out == [23]
    assert (sees(declare(23, 5)), sees(declare(29, 5)), sees(declare(23, 4))) == (23, 29, 24)
    assert worked_out == [23, 23, 29]


def test_a_changed_declaration_keeps_what_read_nothing_that_differs() -> None:
    """The parts of an outcome count; whatever is read besides keys is taken to differ."""

    def generator(known: Given) -> int:
        return known.declaration.generator

    def both(known: Given) -> tuple[int, str]:
        return known.see(generator), known.declaration.name

    def identity(known: Given) -> str:
        return known.declaration.identity

    first = Given(declare(23, 5), Claims(), RUN)
    seen = {part: first.outcome(part) for part in (generator, both, identity)}

    same = first.changed(replace(declare(23, 5), purpose="signature"))
    assert [same.outcome(part) is seen[part] for part in seen] == [True, True, True]
    for name, place in (("other", declare(23, 5).place), ("set", Place("elsewhere", 1))):
        other = first.changed(replace(declare(23, 5), name=name, place=place))
        assert other.see(both) == (5, name)
        assert other.see(identity) == f"{place.path}#{name}"
    assert first.changed(declare(23, 7)).see(both) == (7, "set")


def test_a_part_reads_in_an_order_that_its_reading_decides() -> None:
    """What depends on anything else is refused before it could mislead."""
    keys = iter(("modulus", "generator"))

    def fickle(known: Given) -> int:
        return int(getattr(known.declaration, next(keys)))

    shared = Shared(RUN)
    Given(declare(23, 5), Claims(), RUN, shared).see(fickle)

    with pytest.raises(AssertionError, match="its reading decides"):
        Given(declare(29, 5), Claims(), RUN, shared).see(fickle)


def test_what_was_seen_is_not_taken_elsewhere() -> None:
    """Other run values are refused."""
    with pytest.raises(ValueError, match="other run values"):
        Given(declare(23, 5), Claims(), RUN, Shared(RunValues("2026-12-01", "quick")))
