"""From rulebooks and the facts of one set to outcomes, findings and the position.

A rule holds where it does not apply or its requirement is true, in three-valued logic: one whose
requirement is true is conforming even while it is open whether it applies. A rule that needs an
absent fact is undetermined, never conforming.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from auditor.encoding import shorten
from auditor.facts.base import Absent, Fact, FactType
from auditor.questions import Question
from auditor.rulebooks.conditions import Condition, Decision, Verdict, View, Vocabulary
from auditor.rulebooks.reading import PLACEHOLDER
from auditor.rulebooks.rulebook import Criterion, Grade, Outcome, Rule, Rulebook

Position = Literal["hold", "open", "conditions", "no objection"]

_HOLDS = Decision(Verdict.TRUE)
_IDLE = (Verdict.FALSE, Verdict.UNDEFINED)
_SHUT: tuple[Outcome, tuple[str, ...]] = ("not applicable", ())
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


@dataclass(frozen=True, slots=True)
class BookLeftOut:
    """A book whose gate could not be decided for this set."""

    name: str
    why: str
    missing: Mapping[str, Absent]


@dataclass(frozen=True, slots=True)
class Waiting:
    """Undetermined findings that wait for the same questions and the same declared keys."""

    questions: tuple[Question, ...]
    keys: tuple[str, ...]
    findings: tuple[Finding, ...]


@dataclass(frozen=True, slots=True)
class Judgement:
    """What the rulebooks say of one set. Outcomes and findings are in the order of books and rules.

    ``decided_by`` is the one finding that decides the position; None for ``no objection``.
    """

    outcomes: Mapping[str, Outcome]
    findings: tuple[Finding, ...]
    books_left_out: tuple[BookLeftOut, ...]
    position: Position
    decided_by: Finding | None


def judge(
    books: Sequence[Rulebook],
    facts: Mapping[str, Fact],
    absent: Mapping[str, Absent],
    vocabulary: Vocabulary,
) -> Judgement:
    """The judgement of one set; ValueError for facts outside the vocabulary."""
    view = View(facts, absent, vocabulary)
    outcomes: dict[str, Outcome] = {}
    findings: list[Finding] = []
    left_out: list[BookLeftOut] = []
    for book in books:
        gate = _decide(book.gate, view)
        if gate.verdict is Verdict.OPEN:
            left_out.append(_left_out(book, gate, view))
            continue
        for rule in book.rules:
            outcome, missing = _SHUT if gate.verdict in _IDLE else evaluate(rule, view)
            outcomes[rule.id] = outcome
            if outcome in ("nonconforming", "undetermined"):
                findings.append(_finding(book, rule, missing, view))
    position, decided_by = _position(findings, [book.name for book in books])
    return Judgement(outcomes, tuple(findings), tuple(left_out), position, decided_by)


def evaluate(rule: Rule, view: View) -> tuple[Outcome, tuple[str, ...]]:
    """The outcome of one rule and, where it is undetermined, the facts it waits for."""
    applies = _decide(rule.applies, view)
    if applies.verdict in _IDLE:
        return _SHUT
    requires = rule.requires.decide(view)
    if requires.verdict is Verdict.TRUE:
        return "conforming", ()
    if requires.verdict is Verdict.UNDEFINED:
        return _SHUT
    missing = tuple(dict.fromkeys((*applies.missing, *requires.missing)))
    return ("undetermined", missing) if missing else ("nonconforming", ())


def facts_named(books: Iterable[Rulebook]) -> tuple[str, ...]:
    """Every fact that a gate or a condition of these books names, sorted."""
    names: set[str] = set()
    for book in books:
        names.update(book.gate.names if book.gate else ())
        names.update(name for rule in book.rules for name in rule.names)
    return tuple(sorted(names))


def facts_in_use(
    books: Iterable[Rulebook],
    facts: Mapping[str, Fact],
    absent: Mapping[str, Absent],
    vocabulary: Vocabulary,
) -> tuple[str, ...]:
    """The absent or loose facts that could still change an outcome, sorted.

    Whatever is decided needs nothing: not the requirement of a rule that does not apply, not the
    rules of a book whose gate is shut, not the other side of an ``||`` that is true. So a search
    runs only where a condition waits for what it could find.
    """
    view = View(facts, absent, vocabulary)
    wanted: set[str] = set()
    for book in books:
        gate = _decide(book.gate, view)
        wanted.update(gate.missing)
        for rule in book.rules if gate.verdict is Verdict.TRUE else ():
            wanted.update(evaluate(rule, view)[1])
    return tuple(sorted(name for name in wanted if view.absence(name).reason != "undefined"))


def waiting(findings: Iterable[Finding]) -> tuple[Waiting, ...]:
    """The undetermined findings, grouped by what they wait for, in the order of first finding."""
    groups: dict[tuple[tuple[Question, ...], tuple[str, ...]], list[Finding]] = {}
    for finding in findings:
        if finding.outcome == "undetermined":
            groups.setdefault((finding.questions, finding.keys), []).append(finding)
    return tuple(
        Waiting(questions, keys, tuple(group)) for (questions, keys), group in groups.items()
    )


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


def _decide(condition: Condition | None, view: View) -> Decision:
    return condition.decide(view) if condition else _HOLDS


def _left_out(book: Rulebook, gate: Decision, view: View) -> BookLeftOut:
    missing = {name: view.absence(name) for name in gate.missing}
    return BookLeftOut(book.name, f"its gate is open; missing: {_reasons(missing, view)}", missing)


def _finding(book: Rulebook, rule: Rule, missing: tuple[str, ...], view: View) -> Finding:
    shown = dict.fromkeys((*rule.requires.names, *rule.shows, *PLACEHOLDER.findall(rule.statement)))
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
    return f"It is open whether this holds: “{rule.title}”. Missing: {_reasons(missing, view)}."


def _reasons(missing: Mapping[str, Absent], view: View) -> str:
    return ", ".join(
        f"{name} ({_bound(name, view)}, and may still move)"
        if name in view.facts
        else f"{name} ({absent.reason})"
        for name, absent in missing.items()
    )


def _bound(name: str, view: View) -> str:
    word = view.vocabulary[name]
    side = "at most" if word.bound == "at_most" else "at least"
    return f"{side} {show_value(word, view.facts[name].value)}"


def _position(findings: Sequence[Finding], books: Sequence[str]) -> tuple[Position, Finding | None]:
    """The first position that holds, and the finding that decides it.

    Among the findings that alike lead to the position the deciding one is of the first book; in
    it, of the nonconforming ones that show the work of an attack, the one with the least; then
    the first.
    """
    levels: tuple[tuple[Position, Grade, str], ...] = (
        ("hold", "major", "nonconforming"),
        ("open", "major", "undetermined"),
        ("conditions", "minor", "nonconforming"),
        ("conditions", "minor", "undetermined"),
    )
    for position, grade, outcome in levels:
        at_level = [f for f in findings if (f.grade, f.outcome) == (grade, outcome)]
        if at_level:
            return position, min(at_level, key=lambda f: (books.index(f.book), _shown_work(f)))
    return "no objection", None


def _shown_work(finding: Finding) -> float:
    """The work that ranks a finding; none where the finding itself is still open."""
    if finding.outcome == "undetermined" or finding.work is None:
        return float("inf")
    return finding.work
