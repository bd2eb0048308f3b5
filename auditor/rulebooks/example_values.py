"""How an example of a rule states a fact: a value, an absence, or a bound that may still move."""

from typing import Any, cast

from auditor.claims.standing import Standing
from auditor.encoding import shorten
from auditor.facts.base import Absent, Fact, FactType, Reason

_REASONS = ("undefined", "undeclared", "unsettled")


def stated(word: FactType, value: Any) -> Fact | Absent | str:
    """What an example states of a fact, or what is wrong with it."""
    tight = True
    if isinstance(value, dict):
        if set(value) == {"absent"} and value["absent"] in _REASONS:
            return Absent(cast(Reason, value["absent"]))
        if set(value) != {"loose"}:
            return (
                "expected a value, {absent: undefined | undeclared | unsettled} or {loose: bound}"
            )
        if word.bound not in ("at_least", "at_most"):
            return "this fact is final; only a bound (at_least, at_most) can be loose"
        value, tight = value["loose"], False
    integer = isinstance(value, int) and not isinstance(value, bool)
    fits = {
        "bool": isinstance(value, bool),
        "int": integer,
        "real": integer or isinstance(value, float),
        "text": isinstance(value, str),
        "exhibit": True,
    }
    if not fits[word.kind]:
        return f"found {shorten(value)}; expected a value of kind {word.kind}"
    if word.values and value not in word.values:
        expected = ", ".join(repr(each) for each in word.values)
        return f"found {shorten(value)!r}; expected one of {shorten(expected, 300)}"
    return Fact(float(value) if word.kind == "real" else value, Standing.PROVEN, tight)
