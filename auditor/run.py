"""The loop between facts and search: pose what is open, answer it, look again, until nothing that
is worth asking is open.

A question is worth asking when its answer could change a fact in use: one that a rule in force
waits for or shows, or a work factor. Cheap questions are asked about every fact, since a reader
expects to see them. The order of asking is fixed, each question is asked once, and cheap ones are
exhausted before a deep one is asked, so the same declarations lead to the same claims.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence

from auditor.answers import Answers
from auditor.claims.base import Claim, Refuted
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import Established, establish
from auditor.facts.base import Absent, Fact
from auditor.questions import CHEAP, Question
from auditor.run_values import RunValues

InUse = Callable[[Mapping[str, Fact], Mapping[str, Absent]], Iterable[str]]
"""Names of the facts in use, given what is established so far."""
Progress = Callable[[Question], None]
Recall = Callable[[Question], Iterable[Claim]]
"""Claims kept from earlier runs about the integers of a question."""


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
    recall: Recall,
) -> list[str]:
    """Ask and answer until nothing worth asking is open; the claims grow in ``answers``.

    Returns a notice for each question whose proposed answer did not pass its check.
    """
    asked: set[Question] = set()
    refused: list[str] = []
    for declaration in declarations:
        while todo := _worth_asking(declaration, answers.claims, run, in_use, asked):
            asked.update(todo)
            if _recalled(todo, answers.claims, recall):
                asked.difference_update(todo)
                continue
            for question in todo:
                progress(question)
                try:
                    answers.answer(question)
                except Refuted as reason:
                    refused.append(f"{question.about} An answer was found and refused: {reason}.")
    return refused


def _recalled(questions: Iterable[Question], claims: Claims, recall: Recall) -> bool:
    """Whether earlier runs knew something new about these; then it is time to look again."""
    before = len(claims)
    for question in questions:
        claims.add(recall(question))
    return len(claims) > before


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
