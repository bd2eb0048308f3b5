"""From the text of a rulebook to checked rules, with every problem placed.

The JSON Schema in ``reports/rulebook.schema.json`` judges the shape; what is left here are the
checks no schema can make: conditions, names of facts, documents and thresholds, examples. A rule
whose shape is wrong is not looked at further; all others are, so one run shows every problem.
"""

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any, cast

from auditor.encoding import shorten
from auditor.facts.base import Absent, Fact, FactType
from auditor.rulebooks.condition_syntax import Scalar
from auditor.rulebooks.condition_types import suggestion
from auditor.rulebooks.conditions import Compiler, Condition, ConditionError
from auditor.rulebooks.example_values import stated
from auditor.rulebooks.rulebook import (
    Criterion,
    Document,
    Example,
    Grade,
    Outcome,
    Place,
    Problem,
    Rule,
    Rulebook,
)
from auditor.schema_check import schema_problems, shipped_schema
from auditor.strict_yaml import KeyPath, Loaded, Mark, YamlError, read

ALWAYS_PRESENT = frozenset(
    {
        "modulus.length",
        "modulus.occurrences",
        "modulus.standard_group",
        "modulus.standard_match",
        "public_values.count",
        "run.year",
        "strength.required_bits",
        "subgroup.declared",
    }
)
"""Facts that no set lacks: a rule over these alone needs no undetermined example."""

OUTCOME_KEYS: Mapping[str, Outcome] = {
    "conforming": "conforming",
    "nonconforming": "nonconforming",
    "undetermined": "undetermined",
    "not_applicable": "not applicable",
}
PLACEHOLDER = re.compile(r"\{([a-z_0-9.]+)\}")


def parse_book(text: str, path: str) -> tuple[Loaded | None, list[Problem]]:
    """The shape of a book and what is wrong with it; None where nothing of it can be used."""
    try:
        loaded = read(text)
    except YamlError as error:
        return None, [Problem(Place(path, p.line, p.column), p.message) for p in error.problems]
    found = [*loaded.problems, *schema_problems(loaded, shipped_schema("rulebook.schema.json"))]
    problems = [Problem(Place(path, p.line, p.column), p.message) for p in found]
    usable = isinstance(loaded.value, dict) and isinstance(loaded.value.get("name"), str)
    return loaded if usable else None, problems


@dataclass(slots=True)
class BookReader:
    """Reads the parts of one book whose shape is sound; what is wrong goes to ``problems``."""

    loaded: Loaded
    path: str
    compiler: Compiler
    base: Rulebook | None
    problems: list[Problem]
    values: dict[str, Scalar] = field(default_factory=dict)
    documents: dict[str, Document] = field(default_factory=dict)

    def book(self, sha256: str) -> Rulebook:
        """The book; of use only where ``problems`` is still empty afterwards."""
        record = self.loaded.value
        self.values = self.thresholds()
        self.documents = self.cited()
        gate = self.base.gate if self.base else None
        if isinstance(record.get("applies"), str):
            gate = self.condition(("applies",), self.values)
        inherited = self.inherited()
        if not inherited and not record.get("rules"):
            self.problem((), "no rules: expected a list of rules, or extends")
        rules = (*inherited, *self.own_rules({rule.id for rule in inherited}))
        if not self.problems:
            self.check_values_used(rules)
        return Rulebook(
            name=record["name"],
            title=str(record.get("title", "")),
            path=self.path,
            sha256=sha256,
            rules=rules,
            gate=gate,
            values=self.values,
            documents=self.documents,
            notes=(*(self.base.notes if self.base else ()), *_texts(record.get("notes"))),
            extends=self.base,
        )

    def problem(self, path: KeyPath, message: str, key: bool = False) -> None:
        """Note what is wrong with the value at ``path``, or with its key."""
        marks = self.loaded.key_marks if key else self.loaded.marks
        mark = marks.get(path) or self.loaded.marks.get(path) or Mark(1, 1)
        self.problems.append(Problem(Place(self.path, mark.line, mark.column), message))

    def sound(self, path: KeyPath) -> bool:
        """Whether nothing was found wrong from ``path`` on to the next sibling."""
        start = self.loaded.marks[path]
        siblings = [*path[:-1], cast(int, path[-1]) + 1]
        end = self.loaded.marks.get(tuple(siblings), Mark(2**31, 1))
        return not any(start <= Mark(p.place.line, p.place.column) < end for p in self.problems)

    def flagged(self, path: KeyPath) -> bool:
        """Whether something is already known to be wrong with the value at ``path``."""
        mark = self.loaded.marks[path]
        return any(
            (p.place.line, p.place.column) == (mark.line, mark.column) for p in self.problems
        )

    def thresholds(self) -> dict[str, Scalar]:
        """The values of this book over those it inherits; an inherited one keeps its kind."""
        inherited = dict(self.base.values) if self.base else {}
        own = self.loaded.value.get("values")
        values = dict(inherited)
        for name, value in (own if isinstance(own, dict) else {}).items():
            if not isinstance(value, bool | int | float | str):
                continue
            if name in inherited and _kind(inherited[name]) != _kind(value):
                self.problem(
                    ("values", name),
                    f"found {shorten(value)}; expected {_kind(inherited[name])},"
                    f" as in the extended book ({shorten(inherited[name])})",
                )
            else:
                values[name] = float(value) if isinstance(inherited.get(name), float) else value
        return values

    def cited(self) -> dict[str, Document]:
        """The documents of this book and of the one it extends."""
        documents = dict(self.base.documents) if self.base else {}
        own = self.loaded.value.get("documents")
        for key, record in (own if isinstance(own, dict) else {}).items():
            if isinstance(record, dict):
                title, date = str(record.get("title", "")), str(record.get("date", ""))
                documents[key] = Document(key, title, date, str(record.get("status", "")))
        return documents

    def inherited(self) -> tuple[Rule, ...]:
        """The rules of the extended book, under the thresholds and grades of this one."""
        grades = self.loaded.value.get("grades")
        grades = grades if isinstance(grades, dict) else {}
        rules = {rule.id: rule for rule in self.base.rules} if self.base else {}
        for rule_id in grades.keys() - rules.keys():
            hint = suggestion(rule_id, rules)
            where = f"in {self.base.name}" if self.base else "to regrade: this book extends none"
            self.problem(("grades", rule_id), f"no rule {rule_id!r} {where}{hint}", True)
        return tuple(self.adapted(rule, grades.get(rule.id, rule.grade)) for rule in rules.values())

    def adapted(self, rule: Rule, grade: Grade) -> Rule:
        """An inherited rule with its conditions under the thresholds of this book."""
        try:
            return replace(
                rule,
                grade=grade,
                requires=self.compiler.compile(rule.requires.source, self.values),
                applies=rule.applies and self.compiler.compile(rule.applies.source, self.values),
            )
        except ConditionError as error:
            self.problem(("values",), f"rule {rule.id} does not hold these values: {error}", True)
            return rule

    def check_values_used(self, rules: Iterable[Rule]) -> None:
        """A threshold that overrides none and that no rule uses is a misspelling."""
        inherited = self.base.values if self.base else {}
        used = {name for rule in rules for name in _value_names(rule)}
        for name in self.values.keys() - inherited.keys() - used:
            hint = suggestion(name, inherited)
            self.problem(("values", name), f"value {name!r} is used by no rule{hint}", True)

    def own_rules(self, taken: set[str]) -> tuple[Rule, ...]:
        """The rules of sound shape, in their order."""
        rules: list[Rule] = []
        records = self.loaded.value.get("rules")
        for index, record in enumerate(records if isinstance(records, list) else ()):
            path = ("rules", index)
            rule_id = record.get("id") if isinstance(record, dict) else None
            if isinstance(rule_id, str) and rule_id in taken:
                self.problem((*path, "id"), f"a second rule {rule_id!r}; ids are unique")
            if isinstance(rule_id, str):
                taken.add(rule_id)
            if self.sound(path) and (rule := self.rule(path, record)):
                rules.append(rule)
        return tuple(rules)

    def rule(self, path: KeyPath, record: Mapping[str, Any]) -> Rule | None:
        """One rule; None, and problems noted, where it cannot be used."""
        requires = self.condition((*path, "requires"), self.values)
        applies = self.condition((*path, "applies"), self.values) if "applies" in record else None
        criterion = self.criterion((*path, "criterion"), record["criterion"])
        self.check_placeholders((*path, "statement"), record["statement"])
        for index, name in enumerate(record.get("shows", ())):
            self.fact_type((*path, "shows", index), name)
        examples = self.examples((*path, "examples"), record["examples"])
        if requires is None or criterion is None or ("applies" in record and applies is None):
            return None
        mark = self.loaded.marks[path]
        rule = Rule(
            id=record["id"],
            title=record["title"],
            defect=record["defect"],
            grade=record["grade"],
            requires=requires,
            statement=_folded(record["statement"]),
            why=_folded(record["why"]),
            criterion=criterion,
            remedy=_folded(record["remedy"]),
            place=Place(self.path, mark.line, mark.column),
            applies=applies,
            shows=tuple(record.get("shows", ())),
            cautions=_texts(record.get("cautions")),
            cwe=tuple(record.get("cwe", ())),
            references=_texts(record.get("references")),
            examples=examples,
        )
        self.check_rule(path, rule)
        return rule

    def check_rule(self, path: KeyPath, rule: Rule) -> None:
        """A requirement names facts, and has an undetermined example unless none can be absent."""
        if not rule.requires.names:
            self.problem((*path, "requires"), "names no fact, so it decides nothing")
        kinds = {example.outcome for example in rule.examples}
        if "undetermined" not in kinds and not ALWAYS_PRESENT.issuperset(rule.names):
            absent = sorted(set(rule.names) - ALWAYS_PRESENT)
            self.problem(
                (*path, "examples"),
                f"no undetermined example; expected one without {absent[0]}, for instance",
            )

    def condition(self, path: KeyPath, values: Mapping[str, Scalar]) -> Condition | None:
        """The condition at ``path``; None, and its problems noted, where it is refused."""
        source: Any = self.loaded.value
        for step in path:
            source = source[step]
        try:
            return self.compiler.compile(source, values)
        except ConditionError as error:
            for message in error.problems:
                self.problem(path, message)
            return None

    def criterion(self, path: KeyPath, record: Mapping[str, Any]) -> Criterion | None:
        """The criterion with its document."""
        document = self.documents.get(record["document"])
        if document is None:
            hint = suggestion(record["document"], self.documents) or "; expected one of documents"
            self.problem((*path, "document"), f"no such document in this book{hint}")
            return None
        return Criterion(document, record["clause"], record["word"], record["confidence"])

    def check_placeholders(self, path: KeyPath, statement: str) -> None:
        """Every ``{name}`` of a statement is a fact or a value, and no other brace stands in it."""
        for name in PLACEHOLDER.findall(statement):
            if name.startswith("values."):
                if name[7:] not in self.values:
                    hint = suggestion(name[7:], self.values)
                    self.problem(path, f"{{{name}}}: no such value in this book{hint}")
            else:
                self.fact_type(path, name)
        if re.search(r"[{}]", PLACEHOLDER.sub("", statement)):
            self.problem(path, "a brace that belongs to no {fact.name} or {values.name}")

    def fact_type(self, path: KeyPath, name: str, key: bool = False) -> FactType | None:
        """The word of the vocabulary; None, and a problem noted, where there is none."""
        word = self.compiler.vocabulary.get(name)
        if word is None:
            hint = suggestion(name, self.compiler.vocabulary)
            self.problem(path, f"no such fact: {shorten(name)!r}{hint}", key)
        return word

    def examples(self, path: KeyPath, record: Mapping[str, Any]) -> tuple[Example, ...]:
        """All examples, each under the outcome it is listed for."""
        found: list[Example] = []
        for key, outcome in OUTCOME_KEYS.items():
            for index, example in enumerate(record.get(key, ())):
                found.append(self.example((*path, key, index), outcome, example))
        return tuple(found)

    def example(self, path: KeyPath, outcome: Outcome, record: Mapping[str, Any]) -> Example:
        """One example: plain values, ``{absent: reason}``, and ``{loose: bound}``."""
        facts: dict[str, Fact] = {}
        absent: dict[str, Absent] = {}
        for name, value in record.items():
            word = self.fact_type((*path, name), name, key=True)
            if word is None:
                continue
            meant = stated(word, value)
            if isinstance(meant, str):
                self.problem((*path, name), f"{name}: {meant}")
            elif isinstance(meant, Absent):
                absent[name] = meant
            else:
                facts[name] = meant
        mark = self.loaded.marks[path]
        return Example(outcome, facts, absent, Place(self.path, mark.line, mark.column))


def _value_names(rule: Rule) -> Iterable[str]:
    """The thresholds that a rule uses, in its conditions or in its statement."""
    shown = PLACEHOLDER.findall(rule.statement)
    trees = [condition.tree for condition in (rule.requires, rule.applies) if condition]
    named = [name for tree in trees for name in tree.names()]
    return {name[7:] for name in (*shown, *named) if name.startswith("values.")}


def _kind(value: Scalar) -> str:
    """The kind of a threshold; an integer may replace a real, not the other way round."""
    if isinstance(value, bool):
        return "true or false"
    return "a word" if isinstance(value, str) else "a number"


def _folded(text: str) -> str:
    """Text on one line: blocks in the file are folded for reading only."""
    return " ".join(text.split())


def _texts(items: Any) -> tuple[str, ...]:
    if not isinstance(items, Iterable) or isinstance(items, str):
        return ()
    return tuple(_folded(item) for item in items if isinstance(item, str))
