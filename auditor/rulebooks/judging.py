"""From rulebooks and the facts of sets to outcomes, findings and positions.

A rule holds where it does not apply or its requirement is true, in three-valued logic: one whose
requirement is true is conforming even while it is open whether it applies. A rule that needs an
absent fact is undetermined, never conforming.
"""

from collections.abc import Callable, Container, Iterable, Iterator, Mapping, Sequence
from copy import copy
from dataclasses import dataclass
from typing import Literal, TypeVar

from auditor.facts.base import Absent, Fact
from auditor.questions import Question
from auditor.rulebooks.conditions import Condition, Decision, Verdict, View, Vocabulary
from auditor.rulebooks.findings import Finding, facts_shown, finding_of, reasons
from auditor.rulebooks.rulebook import Grade, Outcome, Rule, Rulebook

Position = Literal["hold", "open", "conditions", "no objection"]
Value = TypeVar("Value")

Known = Callable[[str], Fact | Absent]
"""Tells what is known of a fact."""

_HOLDS = Decision(Verdict.TRUE)
_IDLE = (Verdict.FALSE, Verdict.UNDEFINED)
_REPORTED = ("nonconforming", "undetermined")
_SHUT: tuple[Outcome, tuple[str, ...]] = ("not applicable", ())


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

    ``decided_by`` is the one finding that decides the position; None for ``no objection``, and for
    ``open`` where no requirement applies.
    """

    outcomes: Mapping[str, Outcome]
    findings: tuple[Finding, ...]
    books_left_out: tuple[BookLeftOut, ...]
    position: Position
    decided_by: Finding | None


@dataclass(frozen=True, slots=True)
class Brief:
    """What the rulebooks say of one set in brief: its position, and the rules with a major finding,
    nonconforming or undetermined."""

    position: Position
    majors: frozenset[str]


class _Look:
    """The facts of one set, prepared for conditions only when a condition has to be decided."""

    def __init__(
        self, facts: Mapping[str, Fact], absent: Mapping[str, Absent], vocabulary: Vocabulary
    ) -> None:
        self._facts = facts
        self._absent = absent
        self._vocabulary = vocabulary
        self._view: View | None = None

    @property
    def view(self) -> View:
        """The facts as conditions read them."""
        if self._view is None:
            self._view = View(self._facts, self._absent, self._vocabulary)
        return self._view

    def held(self, names: Sequence[str]) -> tuple[Fact | Absent | None, ...]:
        """What is known of these facts."""
        return tuple([self._facts.get(name) or self._absent.get(name) for name in names])


class _Remembered:
    """Results by the very objects they were drawn from, which are kept, so that none is another."""

    def __init__(self) -> None:
        self._results: dict[tuple[object, ...], tuple[tuple[object, ...], object]] = {}

    def get(self, what: str, drawn_from: tuple[object, ...], make: Callable[[], Value]) -> Value:
        """The result for these objects, made where it is not known."""
        key = (what, *map(id, drawn_from))
        known = self._results.get(key)
        if known is None:
            known = self._results[key] = drawn_from, make()
        # Results of all kinds are kept together; under this name there is only what ``make`` makes.
        return known[1]  # type: ignore[return-value]


class Judging:
    """Rulebooks at work on many sets. An outcome depends on the facts that its rule names, a
    finding on those that it shows as well: each is worked out once for all sets that hold the very
    same ones."""

    def __init__(self, books: Sequence[Rulebook], vocabulary: Vocabulary) -> None:
        self.books = tuple(books)
        self._vocabulary = vocabulary
        self._remembered = _Remembered()
        rules = [(book, rule) for book in books for rule in book.rules]
        self._named = {rule.id: rule.names for _, rule in rules}
        self._shown = {rule.id: facts_of(rule) for _, rule in rules}
        self._rules = {rule.id: (book, rule) for book, rule in rules}
        self._all_named = facts_named(books)

    def afresh(self) -> "Judging":
        """The same books with nothing remembered, for sets that hold none of the same facts."""
        other = copy(self)
        other._remembered = _Remembered()
        return other

    def judge(self, facts: Mapping[str, Fact], absent: Mapping[str, Absent]) -> Judgement:
        """The judgement of one set; ValueError for facts outside the vocabulary."""
        look = _Look(facts, absent, self._vocabulary)
        outcomes: dict[str, Outcome] = {}
        findings: list[Finding] = []
        for book, rule, outcome, missing in self._outcomes(look):
            outcomes[rule.id] = outcome
            if outcome in _REPORTED:
                findings.append(self._finding(book, rule, missing, look))
        gates = [(book, self._gate(book, look)) for book in self.books]
        left_out = [
            _left_out(book, gate, look.view) for book, gate in gates if gate.verdict is Verdict.OPEN
        ]
        position, decided_by = _position(findings, [book.name for book in self.books])
        if _nothing_applies(outcomes.values()):
            position = "open"
        return Judgement(outcomes, tuple(findings), tuple(left_out), position, decided_by)

    def brief(self, given: Known) -> Brief:
        """The judgement of one set in brief, from the facts that conditions name alone."""
        look = self._look(self._all_named, given)
        outcomes = [(rule, outcome) for _, rule, outcome, _ in self._outcomes(look)]
        found = [(rule, outcome) for rule, outcome in outcomes if outcome in _REPORTED]
        level = _level({(rule.grade, outcome) for rule, outcome in found})
        position: Position = level[0] if level else "no objection"
        if _nothing_applies(outcome for _, outcome in outcomes):
            position = "open"
        return Brief(position, frozenset(rule.id for rule, _ in found if rule.grade == "major"))

    def outcome(self, rule_id: str, given: Known) -> Outcome:
        """What one rule says, looking at nothing but the facts that decide it. A rule of a book
        that is left out is not applicable."""
        book, rule = self._rules[rule_id]
        names = (*(book.gate.names if book.gate else ()), *self._named[rule_id])
        look = self._look(names, given)
        if self._gate(book, look).verdict is not Verdict.TRUE:
            return "not applicable"
        return self._outcome(rule, look)[0]

    def facts_in_use(
        self, facts: Mapping[str, Fact], absent: Mapping[str, Absent]
    ) -> tuple[str, ...]:
        """The absent or loose facts that could still change an outcome, sorted.

        Whatever is decided needs nothing: not the requirement of a rule that does not apply, not
        the rules of a book whose gate is shut, not the other side of an ``||`` that is true. So a
        search runs only where a condition waits for what it could find.
        """
        look = _Look(facts, absent, self._vocabulary)
        wanted: set[str] = set()
        for book in self.books:
            gate = self._gate(book, look)
            wanted.update(gate.missing)
            for rule in book.rules if gate.verdict is Verdict.TRUE else ():
                wanted.update(self._outcome(rule, look)[1])
        return tuple(sorted(name for name in wanted if not _is_undefined(name, absent)))

    def _gate(self, book: Rulebook, look: _Look) -> Decision:
        gate = book.gate
        if gate is None:
            return _HOLDS
        return self._remembered.get(
            f"gate of {book.name}", look.held(gate.names), lambda: gate.decide(look.view)
        )

    def _look(self, names: Iterable[str], given: Known) -> _Look:
        known = {name: given(name) for name in names}
        return _Look(
            {name: item for name, item in known.items() if isinstance(item, Fact)},
            {name: item for name, item in known.items() if isinstance(item, Absent)},
            self._vocabulary,
        )

    def _outcomes(self, look: _Look) -> Iterator[tuple[Rulebook, Rule, Outcome, tuple[str, ...]]]:
        """Every rule with its outcome and what it waits for, but those of the books left out."""
        for book in self.books:
            verdict = self._gate(book, look).verdict
            if verdict is not Verdict.OPEN:
                for rule in book.rules:
                    shut = verdict in _IDLE
                    yield (book, rule, *(_SHUT if shut else self._outcome(rule, look)))

    def _outcome(self, rule: Rule, look: _Look) -> tuple[Outcome, tuple[str, ...]]:
        return self._remembered.get(
            rule.id, look.held(self._named[rule.id]), lambda: evaluate(rule, look.view)
        )

    def _finding(
        self, book: Rulebook, rule: Rule, missing: tuple[str, ...], look: _Look
    ) -> Finding:
        return self._remembered.get(
            f"finding of {rule.id}",
            look.held(self._shown[rule.id]),
            lambda: finding_of(book, rule, missing, look.view),
        )


def judge(
    books: Sequence[Rulebook],
    facts: Mapping[str, Fact],
    absent: Mapping[str, Absent],
    vocabulary: Vocabulary,
) -> Judgement:
    """The judgement of a single set; ValueError for facts outside the vocabulary."""
    return Judging(books, vocabulary).judge(facts, absent)


def facts_in_use(
    books: Sequence[Rulebook],
    facts: Mapping[str, Fact],
    absent: Mapping[str, Absent],
    vocabulary: Vocabulary,
) -> tuple[str, ...]:
    """The absent or loose facts that could still change an outcome of a single set, sorted."""
    return Judging(books, vocabulary).facts_in_use(facts, absent)


def facts_of(rule: Rule) -> tuple[str, ...]:
    """Every fact that the outcome or the finding of a rule depends on."""
    return tuple(dict.fromkeys((*rule.names, *facts_shown(rule))))


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


def waiting(findings: Iterable[Finding]) -> tuple[Waiting, ...]:
    """The undetermined findings, grouped by what they wait for, in the order of first finding."""
    groups: dict[tuple[tuple[Question, ...], tuple[str, ...]], list[Finding]] = {}
    for finding in findings:
        if finding.outcome == "undetermined":
            groups.setdefault((finding.questions, finding.keys), []).append(finding)
    return tuple(
        Waiting(questions, keys, tuple(group)) for (questions, keys), group in groups.items()
    )


def _decide(condition: Condition | None, view: View) -> Decision:
    return condition.decide(view) if condition else _HOLDS


def _left_out(book: Rulebook, gate: Decision, view: View) -> BookLeftOut:
    missing = {name: view.absence(name) for name in gate.missing}
    return BookLeftOut(book.name, f"its gate is not decided. {reasons(missing, view)}", missing)


def _nothing_applies(outcomes: Iterable[Outcome]) -> bool:
    """Whether no requirement was looked at: a check that was not made is never a pass."""
    return all(outcome == "not applicable" for outcome in outcomes)


def _is_undefined(name: str, absent: Mapping[str, Absent]) -> bool:
    return name in absent and absent[name].reason == "undefined"


_LEVELS: tuple[tuple[Position, Grade, Outcome], ...] = (
    ("hold", "major", "nonconforming"),
    ("open", "major", "undetermined"),
    ("conditions", "minor", "nonconforming"),
    ("conditions", "minor", "undetermined"),
)


def _level(
    found: Container[tuple[Grade, Outcome]],
) -> tuple[Position, Grade, Outcome] | None:
    """The first position that holds for such findings, and which of them lead to it."""
    return next((level for level in _LEVELS if level[1:] in found), None)


def _position(findings: Sequence[Finding], books: Sequence[str]) -> tuple[Position, Finding | None]:
    """The position, and the finding that decides it.

    Among the findings that alike lead to the position the deciding one is of the first book; in
    it, of the nonconforming ones that show the work of an attack, the one with the least; then
    the first.
    """
    level = _level({(finding.grade, finding.outcome) for finding in findings})
    if level is None:
        return "no objection", None
    at_level = [f for f in findings if (f.grade, f.outcome) == level[1:]]
    return level[0], min(at_level, key=lambda f: (books.index(f.book), _shown_work(f)))


def _shown_work(finding: Finding) -> float:
    """The work that ranks a finding; none where the finding itself is still open."""
    if finding.outcome == "undetermined" or finding.work is None:
        return float("inf")
    return finding.work
