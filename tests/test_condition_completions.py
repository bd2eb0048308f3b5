"""What a condition says of a set now holds however the rest of the set comes out.

A completion gives every absent fact a value and moves every bound as far as it may still go; the
oracle is three-valued logic written out in Python.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import product
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.facts.base import Absent, Fact
from auditor.rulebooks.condition_syntax import parse
from auditor.rulebooks.conditions import Condition, Decision, Verdict, View
from tests.test_conditions import WORDS, accepted, conditions, fact, kleene

Value = Any
POSSIBLE: Mapping[str, tuple[Value, ...]] = {
    "bool": (False, True),
    "int": (0, 2, 3),
    "real": (0.5, 1.5, 2.5),
    "text": ("x", "y"),
}
ABSENT = (Absent("undefined"), Absent("undeclared"), Absent("unsettled"))


@dataclass(frozen=True)
class Known:
    """What is known of one fact: its value, if it is tight, or why it is absent; and what it may
    come out as."""

    fact: Fact | None
    absent: Absent | None
    outcomes: tuple[Value, ...]

    @property
    def undefined(self) -> bool:
        """Whether it will never have a value."""
        return self.absent is not None and self.absent.reason == "undefined"


def known_of(name: str) -> st.SearchStrategy[Known]:
    """Something known of a fact."""
    possible = POSSIBLE[WORDS[name].kind]

    def present(value: Value, tight: bool) -> Known:
        return Known(fact(value, tight), None, (value,) if tight else _reachable(name, value))

    return st.one_of(
        st.builds(present, st.sampled_from(possible), st.booleans()),
        st.sampled_from(ABSENT).map(lambda absent: Known(None, absent, possible)),
    )


def _reachable(name: str, value: Value) -> tuple[Value, ...]:
    """Where a loose fact may still go. What was not seen counts as not there for good."""
    match WORDS[name].bound:
        case "at_most":
            return tuple(each for each in POSSIBLE[WORDS[name].kind] if each <= value)
        case "at_least":
            return tuple(each for each in POSSIBLE[WORDS[name].kind] if each >= value)
    return (value,)


def sets() -> st.SearchStrategy[dict[str, Known]]:
    """A set of which each fact is settled, loose or absent."""
    return st.fixed_dictionaries({name: known_of(name) for name in WORDS})


def view_of(known: Mapping[str, Known]) -> View:
    """The set as a condition sees it."""
    facts = {name: item.fact for name, item in known.items() if item.fact is not None}
    absent = {name: item.absent for name, item in known.items() if item.absent is not None}
    return View(facts, absent, WORDS)


def completions(condition: Condition, known: Mapping[str, Known]) -> Iterator[dict[str, Value]]:
    """The facts that the condition names, in every way they may come out."""
    for values in product(*(known[name].outcomes for name in condition.names)):
        yield dict(zip(condition.names, values, strict=True))


@given(conditions(), sets())
def test_what_is_decided_holds_in_every_completion(source: str, known: dict[str, Known]) -> None:
    """True and false are never taken back."""
    condition = accepted(source)
    if condition is None:
        return
    verdict = condition.decide(view_of(known)).verdict
    tree = parse(source)
    if verdict in (Verdict.TRUE, Verdict.FALSE):
        for completion in completions(condition, known):
            assert kleene(tree, completion) is (verdict is Verdict.TRUE)


BOUNDED = ("a.r_at_most >= 1.5", "!(a.r_at_most < double(a.n0))", "a.s_at_least < 3")
JUNCTIONS = ("&&", "||")


@settings(max_examples=300)
@given(
    st.tuples(st.sampled_from(BOUNDED), st.sampled_from(JUNCTIONS), conditions()),
    st.sampled_from(JUNCTIONS),
    sets(),
)
def test_what_is_undefined_stays_so_whatever_is_settled(
    parts: tuple[str, ...], junction: str, known: dict[str, Known]
) -> None:
    """Neither another declaration nor more search decides it, while the undefined is undefined."""
    condition = accepted(f"({' '.join(parts)}) {junction} a.b0")
    if condition is None:
        return
    known = {**known, "a.b0": Known(None, Absent("undefined"), ())}
    decision = condition.decide(view_of(known))
    if decision.verdict is not Verdict.UNDEFINED:
        return
    assert decision.missing
    assert all(known[name].undefined for name in decision.missing)
    undefined = {name: known[name] for name in condition.names if known[name].undefined}
    settled = [name for name in condition.names if name not in undefined]
    for values in product(*(known[name].outcomes for name in settled)):
        pairs = zip(settled, values, strict=True)
        facts = {name: Known(fact(value), None, ()) for name, value in pairs}
        assert condition.decide(view_of(undefined | facts)) == decision


BOUND, UNDEFINED = "a.r_at_most", Absent("undefined")


@pytest.mark.parametrize(
    ("source", "bound", "expected"),
    [
        ("a.r_at_most >= 1.5 && a.b0", 2.5, Decision(Verdict.OPEN, (BOUND, "a.b0"))),
        ("a.b0 && !(a.r_at_most < 1.5)", 2.5, Decision(Verdict.OPEN, ("a.b0", BOUND))),
        ("a.r_at_most >= 1.5 && a.b0", 0.5, Decision(Verdict.FALSE)),
        ("a.r_at_most >= 1.5 || a.b0", 0.5, Decision(Verdict.UNDEFINED, ("a.b0",))),
        ("a.r_at_most >= double(a.n0) || a.b0", 2.5, Decision(Verdict.UNDEFINED, ("a.n0", "a.b0"))),
    ],
)
def test_a_loose_bound_beside_what_is_undefined(
    source: str, bound: float, expected: Decision
) -> None:
    """A bound that may yet decide keeps the condition open; one that cannot does not."""
    condition = accepted(source)
    view = View({BOUND: fact(bound, tight=False)}, {"a.b0": UNDEFINED, "a.n0": UNDEFINED}, WORDS)

    assert condition is not None
    assert condition.decide(view) == expected
