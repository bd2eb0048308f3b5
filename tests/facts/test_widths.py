"""Parties that do not say how wide their exponents are: what was decided without them stands."""

from dataclasses import replace
from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.collection import Claims
from auditor.declaration import Declaration, Party
from auditor.facts import Established, vocabulary
from auditor.facts.base import Absent
from auditor.intake.standard_groups import find
from auditor.rulebooks.judging import judge
from auditor.rulebooks.loading import load_all
from auditor.rulebooks.rulebook import Rulebook
from tests.facts.knowledge import declare, known, settled
from tests.facts.test_monotony import LARGER_PRIMES, PRIMES, declarations
from tests.facts.test_worked_numbers import QUICK, facts

SILENT_KEY = "parties.b.exponent.bits"


@cache
def books() -> tuple[Rulebook, ...]:
    """The books that speak of widths, bar the protocols."""
    return load_all(["group-structure", "strength", "sp800-56a", "tls"], vocabulary())


def outcomes(found: Established) -> dict[str, str]:
    """Of every rule of the books."""
    return dict(judge(books(), found.facts, found.absent, vocabulary()).outcomes)


@cache
def agreement_claims() -> Claims:
    """What a quick review of ffdhe3072 establishes."""
    return settled(agreement(275, 275), QUICK)


def agreement(a: int | None, b: int | None) -> Declaration:
    """Two parties that agree on keys in ffdhe3072 with exponents of these widths."""
    group = find("ffdhe3072")
    assert group is not None
    parties = (Party("a", a, "single", ("range",)), Party("b", b, "single", ("range",)))
    return declare(
        group.modulus,
        group.generator,
        subgroup_order=group.subgroup_order,
        purpose="key-agreement",
        protocol="tls1.3",
        parties=parties,
    )


def reviewed(a: int | None, b: int | None) -> Established:
    """The facts about that agreement."""
    return known(agreement(a, b), agreement_claims(), QUICK)


def test_a_wide_exponent_says_nothing_of_the_party_that_is_silent() -> None:
    """The other may draw 32 bits: nothing is sufficient, and its key is named."""
    found = reviewed(275, None)
    said = outcomes(found)
    silence = Absent("undeclared", keys=(SILENT_KEY,))

    for name in ("sufficient", "standard_bits", "work_bits"):
        assert found.absent[f"strength.{name}"] == silence
    assert found.absent["usage.exponent_widths_declared"] == silence
    assert not found.facts["strength.work_bits_at_most"].tight
    assert not found.facts["strength.short_exponent_bits_at_most"].tight
    assert {work.route: work.bound for work in found.routes}["short_exponent"] == "at most"
    for rule in ("exponent-too-short", "sp800-56a-exponent-too-short", "tls-ffdhe-exponent-margin"):
        assert said[rule] == "undetermined"
    assert said["exponent-longer-than-order"] == "undetermined"


def test_a_narrow_exponent_condemns_whatever_the_other_party_does() -> None:
    """The route against the one that spoke is open."""
    found = reviewed(32, None)
    said = outcomes(found)

    assert found.facts["strength.sufficient"].value is False
    assert found.facts["strength.sufficient"].rests_on == ("parties.a.exponent.bits",)
    assert found.facts["strength.work_bits_at_most"].value == 17.0
    for rule in ("exponent-too-short", "sp800-56a-exponent-too-short", "strength-insufficient"):
        assert said[rule] == "nonconforming"


@pytest.mark.parametrize("other", [None, 275, 4000])
def test_the_widest_exponent_decides_whether_one_is_too_long(other: int | None) -> None:
    """One party beyond the order is enough; the narrow one does not hide it."""
    assert outcomes(reviewed(other, 4000))["exponent-longer-than-order"] == "nonconforming"
    assert outcomes(reviewed(4000, other))["exponent-longer-than-order"] == "nonconforming"


def test_both_widths_within_the_order_conform() -> None:
    """Every party has spoken: the facts are final, and rest on every word."""
    found = reviewed(275, 300)

    assert outcomes(found)["exponent-longer-than-order"] == "conforming"
    assert found.facts["strength.sufficient"].value is True
    narrowest = found.facts["usage.narrowest_exponent_at_most"]
    widest = found.facts["usage.widest_exponent_at_least"]
    assert (narrowest.value, narrowest.tight) == (275, True)
    assert (widest.value, widest.tight) == (300, True)
    assert narrowest.rests_on == ("parties.a.exponent.bits", SILENT_KEY)


@pytest.mark.parametrize(
    ("a", "b", "expected"),
    [
        (256, 256, "conforming"),
        (256, 300, "nonconforming"),
        (256, 255, "nonconforming"),
        (300, None, "nonconforming"),
        (256, None, "undetermined"),
    ],
)
def test_each_exponent_has_the_length_of_the_order(a: int, b: int | None, expected: str) -> None:
    """SP 800-56A asks it of every party in a FIPS 186-type set."""
    parties = (
        Party("a", a, "single", ("membership",)),
        Party("b", b, "single", ("membership",)),
    )
    found = facts(24, (), parties=parties)

    assert outcomes(found)["sp800-56a-exponent-not-of-order-length"] == expected


def test_small_factors_condemn_the_one_that_spoke() -> None:
    """The smooth part of ord(g) leaves little of a short exponent, and a silent party no more."""
    n = LARGER_PRIMES[-1]
    declaration = declare(n, 3, parties=(Party("a", 60), Party("b")))
    found = known(declaration, settled(declaration))
    bits = found.facts["strength.smooth_part_then_short_exponent_bits_at_most"]

    assert not bits.tight
    assert bits.value < found.facts["strength.short_exponent_bits_at_most"].value


@st.composite
def spoken(draw: st.DrawFn) -> tuple[Declaration, Declaration]:
    """A set of two parties of which one or both are silent, and the same when all have spoken."""
    declaration = draw(declarations((*PRIMES, *LARGER_PRIMES)))
    party = declaration.parties[0] if declaration.parties else Party("everybody")
    widths = [draw(st.integers(1, 170)) for _ in "ab"]
    silent = draw(st.sampled_from([(True, False), (False, True), (True, True)]))
    complete = tuple(
        replace(party, role=r, exponent_bits=w) for r, w in zip("ab", widths, strict=True)
    )
    before = tuple(
        replace(party, exponent_bits=None) if quiet else party
        for party, quiet in zip(complete, silent, strict=True)
    )
    return replace(declaration, parties=before), replace(declaration, parties=complete)


@settings(max_examples=80)
@given(spoken())
def test_a_word_that_comes_late_moves_only_what_waited_for_it(
    pair: tuple[Declaration, Declaration],
) -> None:
    """Final facts stay, bounds move their way, decided outcomes stand, whatever is then said."""
    silent, complete = pair
    claims = settled(complete)
    before, after = known(silent, claims), known(complete, claims)

    for name, fact in before.facts.items():
        word = vocabulary()[name]
        if name == "usage.exponent_width":
            continue
        now = after.facts[name]
        if word.bound is None or fact.tight:
            assert now.value == fact.value, name
        elif word.bound == "at_most":
            assert now.value <= fact.value, name
        elif word.bound == "at_least":
            assert now.value >= fact.value, name
    for name, absent in before.absent.items():
        if absent.reason == "undefined":
            assert after.absent[name].reason == "undefined", name
    late = outcomes(after)
    for rule, outcome in outcomes(before).items():
        stays = {outcome, "not applicable"} if outcome == "conforming" else {outcome}
        assert outcome == "undetermined" or late[rule] in stays, rule
