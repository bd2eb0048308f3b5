"""From rulebooks and the facts of sets to outcomes, findings and positions.

A rule holds where it does not apply or its requirement is true, in three-valued logic: one whose
requirement is true is conforming even while it is open whether it applies. A rule that needs an
absent fact is undetermined, never conforming.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal, TypeVar

from auditor.facts.base import Absent, Fact
from auditor.questions import Question
from auditor.rulebooks.conditions import Condition, Decision, Verdict, View, Vocabulary
from auditor.rulebooks.findings import Finding, facts_shown, finding_of, reasons
from auditor.rulebooks.rulebook import Grade, Outcome, Rule, Rulebook

Position = Literal["hold", "open", "conditions", "no objection"]
Value = TypeVar("Value")

_HOLDS = Decision(Verdict.TRUE)
_IDLE = (Verdict.FALSE, Verdict.UNDEFINED)
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
class _Ruled:
    """What one rule says: its outcome, the facts it waits for, the finding if it is one."""

    outcome: Outcome
    missing: tuple[str, ...]
    finding: Finding | None


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
    """Rulebooks at work on many sets. What a rule says depends on the facts that it names or shows,
    and is worked out once for all sets that hold the very same ones."""

    def __init__(self, books: Sequence[Rulebook], vocabulary: Vocabulary) -> None:
        self.books = tuple(books)
        self._vocabulary = vocabulary
        self._remembered = _Remembered()
        self._named = {rule.id: facts_of(rule) for book in books for rule in book.rules}
        self._book_of = {rule.id: book for book in books for rule in book.rules}

    def judge(self, facts: Mapping[str, Fact], absent: Mapping[str, Absent]) -> Judgement:
        """The judgement of one set; ValueError for facts outside the vocabulary."""
        look = _Look(facts, absent, self._vocabulary)
        outcomes: dict[str, Outcome] = {}
        findings: list[Finding] = []
        left_out: list[BookLeftOut] = []
        for book in self.books:
            gate = self._gate(book, look)
            if gate.verdict is Verdict.OPEN:
                left_out.append(_left_out(book, gate, look.view))
                continue
            for rule in book.rules:
                if gate.verdict in _IDLE:
                    outcomes[rule.id] = "not applicable"
                    continue
                ruled = self._ruled(book, rule, look)
                outcomes[rule.id] = ruled.outcome
                if ruled.finding is not None:
                    findings.append(ruled.finding)
        position, decided_by = _position(findings, [book.name for book in self.books])
        if all(outcome == "not applicable" for outcome in outcomes.values()):
            # No requirement was looked at, and a check that was not made is never a pass.
            position = "open"
        return Judgement(outcomes, tuple(findings), tuple(left_out), position, decided_by)

    def outcome(self, rule: str, given: Callable[[str], Fact | Absent]) -> Outcome:
        """What one rule says, looking at nothing but the facts that decide it; ``given`` tells
        each. A rule of a book that is left out is not applicable."""
        book = self._book_of[rule]
        names = (*(book.gate.names if book.gate else ()), *self._named[rule])
        known = {name: given(name) for name in names}
        look = _Look(
            {name: item for name, item in known.items() if isinstance(item, Fact)},
            {name: item for name, item in known.items() if isinstance(item, Absent)},
            self._vocabulary,
        )
        if self._gate(book, look).verdict is not Verdict.TRUE:
            return "not applicable"
        (found,) = (item for item in book.rules if item.id == rule)
        return self._ruled(book, found, look).outcome

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
                wanted.update(self._ruled(book, rule, look).missing)
        return tuple(sorted(name for name in wanted if not _is_undefined(name, absent)))

    def _gate(self, book: Rulebook, look: _Look) -> Decision:
        gate = book.gate
        if gate is None:
            return _HOLDS
        return self._remembered.get(
            f"gate of {book.name}", look.held(gate.names), lambda: gate.decide(look.view)
        )

    def _ruled(self, book: Rulebook, rule: Rule, look: _Look) -> _Ruled:
        def make() -> _Ruled:
            outcome, missing = evaluate(rule, look.view)
            finding = None
            if outcome in ("nonconforming", "undetermined"):
                finding = finding_of(book, rule, missing, look.view)
            return _Ruled(outcome, missing, finding)

        return self._remembered.get(rule.id, look.held(self._named[rule.id]), make)


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


def _is_undefined(name: str, absent: Mapping[str, Absent]) -> bool:
    return name in absent and absent[name].reason == "undefined"


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
