"""What a rulebook holds, once read and checked: inert, frozen, nothing left to go wrong."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from auditor.facts.base import Absent, Fact
from auditor.rulebooks.condition_syntax import Scalar
from auditor.rulebooks.conditions import Condition

Grade = Literal["major", "minor", "observation"]
Confidence = Literal["confirmed", "secondary", "memory"]
Outcome = Literal["conforming", "nonconforming", "undetermined", "not applicable"]

GRADES: tuple[Grade, ...] = ("major", "minor", "observation")
"""Worst first (audit vocabulary of ISO/IEC 17021-1)."""


@dataclass(frozen=True, slots=True)
class Place:
    """Where something stands: a path as given, and a 1-based line and column."""

    path: str
    line: int
    column: int

    def __str__(self) -> str:
        return f"{self.path}:{self.line}:{self.column}"


@dataclass(frozen=True, slots=True)
class Problem:
    """What is wrong with a rulebook, where, and what was expected."""

    place: Place
    message: str

    def __str__(self) -> str:
        return f"{self.place}: {self.message}"

    @property
    def order(self) -> tuple[str, int, int, str]:
        """Sorts problems as they stand in their files."""
        return self.place.path, self.place.line, self.place.column, self.message


class RulebookError(ValueError):
    """Rulebooks that cannot be used; ``problems`` holds every reason found, in text order."""

    def __init__(self, problems: tuple[Problem, ...]) -> None:
        super().__init__("\n".join(str(problem) for problem in problems))
        self.problems = problems


@dataclass(frozen=True, slots=True)
class Document:
    """A published document that criteria cite; ``status`` says if it is a draft or superseded."""

    key: str
    title: str
    date: str
    status: str = ""


@dataclass(frozen=True, slots=True)
class Criterion:
    """The clause a rule comes from, the requirement word there, and how the clause is known."""

    document: Document
    clause: str
    word: str
    confidence: Confidence


@dataclass(frozen=True, slots=True)
class Example:
    """Facts of an invented set, and the outcome the rule must have for it."""

    outcome: Outcome
    facts: Mapping[str, Fact]
    absent: Mapping[str, Absent]
    place: Place


@dataclass(frozen=True, slots=True)
class Rule:
    """One requirement over facts, with the criterion it comes from and its executed examples."""

    id: str
    title: str
    defect: str
    grade: Grade
    requires: Condition
    statement: str
    why: str
    criterion: Criterion
    remedy: str
    place: Place
    applies: Condition | None = None
    shows: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    cwe: tuple[int, ...] = ()
    references: tuple[str, ...] = ()
    examples: tuple[Example, ...] = ()

    @property
    def values(self) -> Mapping[str, Scalar]:
        """The thresholds in force, by name."""
        return self.requires.values

    @property
    def names(self) -> tuple[str, ...]:
        """The facts its conditions name, in the order of naming."""
        gate = self.applies.names if self.applies else ()
        return tuple(dict.fromkeys((*gate, *self.requires.names)))

    @property
    def computed_remedy(self) -> str | None:
        """The name of a computed remedy, where the remedy is one word rather than sentences."""
        return None if " " in self.remedy.strip() else self.remedy


@dataclass(frozen=True, slots=True)
class Rulebook:
    """A file of rules, with the SHA-256 of its bytes; ``extends`` is the book it builds on."""

    name: str
    title: str
    path: str
    sha256: str
    rules: tuple[Rule, ...]
    gate: Condition | None = None
    values: Mapping[str, Scalar] = field(default_factory=dict)
    documents: Mapping[str, Document] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    extends: "Rulebook | None" = None

    def rule(self, rule_id: str) -> Rule:
        """The rule of that id; KeyError where there is none."""
        return {rule.id: rule for rule in self.rules}[rule_id]
