"""Findings: rules that are nonconforming or undetermined for a set, in words and with values."""

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any, Literal

from auditor.encoding import shorten
from auditor.facts.base import Absent, Fact, FactType
from auditor.questions import Question
from auditor.rulebooks.conditions import View
from auditor.rulebooks.reading import PLACEHOLDER
from auditor.rulebooks.rulebook import Criterion, Grade, Rule, Rulebook

_WORK_ENDINGS = ("_bits", "_bits_at_most")
_NO_WORK = ("strength.required_bits", "strength.standard_bits")


@dataclass(frozen=True, slots=True)
class Finding:
    """A rule that is nonconforming or undetermined for one set.

    ``values`` are the present facts it shows, ``missing`` the absent or loose ones it waits for.
    """

    book: str
    rule: str
    title: str
    defect: str
    grade: Grade
    outcome: Literal["nonconforming", "undetermined"]
    statement: str
    why: str
    values: Mapping[str, Fact]
    missing: Mapping[str, Absent]
    criterion: Criterion
    remedy: str
    cautions: tuple[str, ...]
    cwe: tuple[int, ...]
    references: tuple[str, ...]

    @property
    def questions(self) -> tuple[Question, ...]:
        """The open questions it waits for."""
        return tuple(sorted({q for absent in self.missing.values() for q in absent.questions}))

    @property
    def keys(self) -> tuple[str, ...]:
        """The declared keys it waits for."""
        return tuple(sorted({key for absent in self.missing.values() for key in absent.keys}))

    @property
    def work(self) -> float | None:
        """The least work of an attack among the values shown, in bits; None where none is."""
        bits = [
            float(fact.value)
            for name, fact in self.values.items()
            if name.startswith("strength.")
            and name.endswith(_WORK_ENDINGS)
            and name not in _NO_WORK
        ]
        return min(bits, default=None)


def show_value(word: FactType, value: Any) -> str:
    """A fact's value for a sentence: reals with two decimals, big integers by both ends."""
    if word.kind == "bool":
        return "yes" if value else "no"
    if word.kind == "real":
        return f"{value:.2f}"
    if isinstance(value, list | tuple):
        shown = ", ".join(_item(item) for item in value[:8])
        return f"{shown} and {len(value) - 8} more" if len(value) > 8 else shown or "none"
    return shorten(value)


def _item(value: Any) -> str:
    """An element of an exhibit; a pair is a prime power."""
    if isinstance(value, list | tuple) and len(value) == 2:
        base, exponent = value
        return shorten(base) if exponent == 1 else f"{shorten(base)}^{exponent}"
    return shorten(value)


def facts_shown(rule: Rule) -> tuple[str, ...]:
    """The facts whose values a finding of this rule shows."""
    names = (*rule.requires.names, *rule.shows, *PLACEHOLDER.findall(rule.statement))
    return tuple(dict.fromkeys(name for name in names if not name.startswith("values.")))


def finding_of(book: Rulebook, rule: Rule, missing: tuple[str, ...], view: View) -> Finding:
    """The finding of a rule that is not met or, where facts are missing, undetermined."""
    shown = facts_shown(rule)
    absent = {name: view.absence(name) for name in missing}
    return Finding(
        book=book.name,
        rule=rule.id,
        title=rule.title,
        defect=rule.defect,
        grade=rule.grade,
        outcome="undetermined" if missing else "nonconforming",
        statement=_undetermined(rule, absent, view) if missing else _statement(rule, view),
        why=rule.why,
        values={name: view.facts[name] for name in shown if name in view.facts},
        missing=absent,
        criterion=rule.criterion,
        remedy=rule.remedy,
        cautions=rule.cautions,
        cwe=rule.cwe,
        references=rule.references,
    )


def _statement(rule: Rule, view: View) -> str:
    """The statement with the values of this set."""

    def show(name: str) -> str:
        if name.startswith("values."):
            return shorten(rule.values[name[7:]])
        if name not in view.facts:
            return "not established"
        return show_value(view.vocabulary[name], view.facts[name].value)

    return PLACEHOLDER.sub(lambda found: show(found[1]), rule.statement)


def _undetermined(rule: Rule, missing: Mapping[str, Absent], view: View) -> str:
    """What is open, without a word of the statement: that would assert what is not established."""
    return f"Not decided yet: “{rule.title}”. {reasons(missing, view)}."


_WHY_MISSING: Mapping[str, str] = MappingProxyType(
    {
        "undeclared": "The declaration does not say",
        "unsettled": "Search has not settled",
        "undefined": "It makes no sense here to speak of",
    }
)


def reasons(missing: Mapping[str, Absent], view: View) -> str:
    """Why these facts are missing, a sentence for each reason, without the last full stop."""
    told: dict[str, list[str]] = {}
    for name, absent in missing.items():
        if name in view.facts:
            why = "Search may still move" if absent.questions else "Known only as a bound"
            words = [f"{name}, {_bound(name, view)}"]
        elif absent.reason == "undeclared" and absent.keys:
            why, words = _WHY_MISSING["undeclared"], sorted(absent.keys)
        else:
            why, words = _WHY_MISSING[absent.reason], [_named(name, view)]
        told.setdefault(why, []).extend(word for word in words if word not in told.get(why, ()))
    return ". ".join(f"{why}: {'; '.join(words)}" for why, words in told.items())


def _named(name: str, view: View) -> str:
    word = view.vocabulary.get(name)
    return f"{name} ({word.meaning})" if word else name


def _bound(name: str, view: View) -> str:
    word = view.vocabulary[name]
    side = "at most" if word.bound == "at_most" else "at least"
    return f"{side} {show_value(word, view.facts[name].value)}"
