"""One function a fact, registered once; the vocabulary is what was registered."""

from collections.abc import Callable, Mapping
from typing import Any

from auditor.encoding import plain
from auditor.facts.base import Absent, Fact, FactKind, FactType
from auditor.facts.given import Given, Seen

FactFunction = Callable[[Given], Any]

_registered: dict[str, tuple[FactType, FactFunction]] = {}


def fact(
    name: str, kind: FactKind, meaning: str, values: tuple[str, ...] = ()
) -> Callable[[FactFunction], FactFunction]:
    """Register a function as the fact of that name."""

    def register(function: FactFunction) -> FactFunction:
        if name in _registered:
            raise ValueError(f"the fact {name} is registered twice")
        _registered[name] = FactType(name, kind, meaning, values), function
        return function

    return register


def registered() -> Mapping[str, FactType]:
    """Every word registered so far, by name."""
    return {name: word for name, (word, _) in sorted(_registered.items())}


def establish(name: str, given: Given) -> Fact | Absent:
    """The fact of that name for what is given."""
    word, function = _registered[name]
    seen = given.outcome(function)
    if isinstance(seen.value, Absent):
        return seen.value
    if seen.fact is None:
        seen.fact = _fact(word, seen, given)
    assert isinstance(seen.fact, Fact)
    return seen.fact


def _fact(word: FactType, seen: Seen, given: Given) -> Fact:
    trace = seen.trace
    if trace.loose and word.bound is None:
        raise AssertionError(f"{word.name} is final by name, yet something open could move it")
    return Fact(
        value=_value(word, seen.value),
        standing=given.standing(trace),
        tight=not trace.loose,
        claims=tuple(sorted(trace.claims)),
        rests_on=tuple(sorted(trace.rests_on)),
        questions=tuple(sorted(trace.questions)),
    )


def _value(word: FactType, value: Any) -> Any:
    """The value in the form that rules and reports see; ValueError for a kind it is not of."""
    fits = {
        "bool": isinstance(value, bool),
        "int": isinstance(value, int) and not isinstance(value, bool),
        "real": isinstance(value, float),
        "text": isinstance(value, str) and (not word.values or value in word.values),
        "exhibit": True,
    }
    if not fits[word.kind]:
        raise ValueError(f"{word.name} is a {word.kind}, not {value!r}")
    return plain(value) if word.kind == "exhibit" else value
