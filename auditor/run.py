"""The loop between facts and search: pose what is open, answer it, look again, until nothing that
is worth asking is open.

A question is worth asking when its answer could change a fact in use: one that a rule in force
waits for or shows, or a work factor. Cheap questions are asked about every fact, since a reader
expects to see them. The order of asking is fixed, each question is asked once, and cheap ones are
exhausted before a deep one is asked, so the same declarations lead to the same claims.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass

from auditor.answers import Answers
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import establish_all
from auditor.facts.base import Absent, Fact
from auditor.questions import CHEAP, Question
from auditor.run_values import RunValues

InUse = Callable[[Mapping[str, Fact], Mapping[str, Absent]], Iterable[str]]
"""Names of the facts in use, given what is established so far."""
Progress = Callable[[Question], None]


@dataclass(frozen=True, slots=True)
class Established:
    """What is known about one declaration: facts, absences, and the claims consulted for them."""

    declaration: Declaration
    facts: Mapping[str, Fact]
    absent: Mapping[str, Absent]
    consulted: frozenset[str]


def establish(declaration: Declaration, claims: Claims, run: RunValues) -> Established:
    """All facts about one declaration, from the claims as they stand; no search."""
    facts, absent, consulted = establish_all(declaration, claims, run)
    return Established(declaration, facts, absent, consulted)


def open_questions(known: Established, names: Iterable[str]) -> list[Question]:
    """What would settle the absent and tighten the loose among the named facts, in fixed order."""
    found: set[Question] = set()
    for name in names:
        holder = known.facts.get(name) or known.absent.get(name)
        if holder is not None:
            found |= set(holder.questions)
    return sorted(found)


def settle(
    declarations: Sequence[Declaration],
    answers: Answers,
    run: RunValues,
    in_use: InUse,
    progress: Progress,
) -> None:
    """Ask and answer until nothing worth asking is open; the claims grow in ``answers``."""
    asked: set[Question] = set()
    for declaration in declarations:
        while todo := _worth_asking(declaration, answers.claims, run, in_use, asked):
            for question in todo:
                asked.add(question)
                progress(question)
                answers.answer(question)


def _worth_asking(
    declaration: Declaration, claims: Claims, run: RunValues, in_use: InUse, asked: set[Question]
) -> list[Question]:
    known = establish(declaration, claims, run)
    everything = open_questions(known, [*known.facts, *known.absent])
    if cheap := [q for q in everything if q.asks in CHEAP and q not in asked]:
        return cheap
    if run.effort == "quick":
        return []
    deep = open_questions(known, in_use(known.facts, known.absent))
    return [q for q in deep if q not in asked and q.asks not in CHEAP]
