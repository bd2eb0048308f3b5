"""Answers that would change a position are named, with what they lead to."""

from collections.abc import Sequence
from functools import cache

from auditor.advice.ask import Asked, ask
from auditor.declaration import Declaration, Party
from auditor.facts import vocabulary
from auditor.rulebooks.loading import load_all
from auditor.rulebooks.rulebook import Rulebook
from tests.facts.test_worked_numbers import GROUP_23, GROUP_24, QUICK, claims, group, without


@cache
def books() -> Sequence[Rulebook]:
    """The two books that speak about every set."""
    return load_all(["group-structure", "strength"], vocabulary())


def asked(declaration: Declaration, number: int, factors: tuple[int, ...]) -> Asked:
    """What is worth asking about an RFC 5114 group."""
    return ask(declaration, claims(number, factors), QUICK, books())


def test_a_membership_check_lifts_group_23_from_36_to_110_bits() -> None:
    """The best single answer comes first, with both figures."""
    result = asked(group(23, GROUP_23, bits=224, use="static", checks=()), 23, GROUP_23)
    best = result.effects[0]

    assert best.words == ("if every party checks membership",)
    assert (best.before.position, best.after.position) == ("hold", "no objection")
    assert best.before.bits is not None
    assert best.after.bits is not None
    assert round(best.before.bits) == 36
    assert round(best.after.bits) == 110


def test_two_answers_where_one_is_not_enough() -> None:
    """Two parties, each with a static unchecked exponent: both have to change."""
    parties = (Party("server", 224, "static", ()), Party("client", 224, "static", ()))
    result = asked(group(23, GROUP_23, parties=parties), 23, GROUP_23)
    best = result.effects[0]

    assert best.words == (
        "if the server checks membership",
        "if the client checks membership",
    )
    assert best.after.position == "no objection"
    assert all(
        len(effect.answers) == 2 for effect in result.effects if effect.after.position != "hold"
    )


def test_undeclared_usage_is_asked_for_both_ways() -> None:
    """With nothing said about the peer check, there are answers that help and that hurt."""
    result = asked(group(24, GROUP_24, bits=256, use="static"), 24, GROUP_24)
    after = {effect.words: effect.after.position for effect in result.effects}

    assert result.outlook.position == "open"
    assert after[("if every party checks membership",)] == "no objection"
    assert after[("if every party checks nothing",)] == "hold"


def test_nothing_to_ask_where_nothing_would_change() -> None:
    """A sound set."""
    result = asked(group(23, (), bits=224, use="single", checks=("range", "membership")), 23, ())

    assert not [e for e in result.effects if e.after.position != result.outlook.position]


def test_more_search_has_its_cost_and_its_effect() -> None:
    """An open factorization: the next level of curves, and how far the risk falls."""
    declaration = group(23, (), bits=224, use="static", checks=())
    result = ask(declaration, claims(23, ()), QUICK, books())
    (search,) = result.searches

    assert search.seconds > 0
    assert search.window == (20, 113)
    assert 0 < search.risk_after < search.risk_before <= 1


def test_assumed_answers_change_no_claims() -> None:
    """The claims after asking are those before: nothing was searched for."""
    declaration = group(24, GROUP_24, bits=256, use="static", checks=())
    known = without(GROUP_24, declaration.modulus - 1)
    before = {claim.id for claim in known}
    ask(declaration, known, QUICK, books())

    assert {claim.id for claim in known} == before
