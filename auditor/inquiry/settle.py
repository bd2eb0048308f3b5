"""The loop between facts and search: pose what is open, answer it, look again, until nothing that
is worth asking is open.

A question is worth asking when its answer could change a fact in use: one that a rule in force
waits for or shows, or a work factor. Cheap questions are asked about every fact, since a reader
expects to see them. Questions of all sets are put together in rounds, each question once; what is
asked, and from which claims it is answered, depends on no order of arrival, so the same
declarations lead to the same claims on any number of processes.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence

from auditor.claims.base import Claim
from auditor.claims.factorization import Factorization
from auditor.claims.ledger import subjects
from auditor.declaration import Declaration
from auditor.facts import Established, establish
from auditor.facts.base import Absent, Fact
from auditor.facts.given import Shared
from auditor.inquiry.answers import Answers
from auditor.inquiry.question_round import Progress, answer_round
from auditor.questions import CHEAP, Question
from auditor.run_values import RunValues

InUse = Callable[[Mapping[str, Fact], Mapping[str, Absent]], Iterable[str]]
"""Names of the facts in use, given what is established so far."""
Recall = Callable[[Iterable[int]], Iterable[Claim]]
"""Claims kept from earlier runs about these integers."""


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

    Sets that differ in nothing but their names are looked at once, and one set of each group with
    the same numbers goes first: the others then find nearly everything answered.
    Returns a notice for each question whose proposed answer did not pass its check.
    """
    distinct = list(dict.fromkeys(item.nameless for item in declarations))
    first_of: dict[tuple[object, ...], Declaration] = {}
    for item in distinct:
        first_of.setdefault(item.numbers, item)
    firsts = list(first_of.values())
    inquiry = _Inquiry(answers, run, in_use, progress, recall)
    inquiry.pursue(firsts)
    if len(firsts) < len(distinct):
        inquiry.pursue(distinct)
    return inquiry.refused


class _Inquiry:
    """What was asked so far, and what is open about each set by its place in the list pursued."""

    def __init__(
        self,
        answers: Answers,
        run: RunValues,
        in_use: InUse,
        progress: Progress,
        recall: Recall,
    ) -> None:
        self.refused: list[str] = []
        self._answers = answers
        self._run = run
        self._in_use = in_use
        self._progress = progress
        self._recall = recall
        self._asked: set[Question] = set()
        self._shared = Shared(run)

    def pursue(self, declarations: Sequence[Declaration]) -> None:
        """Rounds of questions about these sets, the cheap ones exhausted before a deep one is
        asked. A set is looked at again when a claim about one of its integers came, or an answer
        to one of its questions."""
        self._remember(n for item in declarations for n in _first_integers(item))
        watching: dict[int, set[int]] = {}
        open_: dict[int, tuple[Question, ...]] = {}
        dirty = set(range(len(declarations)))
        while True:
            # What was open in the last round is of no use in this one, and would fill the memory.
            self._shared = Shared(self._run)
            for place in sorted(dirty):
                open_[place] = self._open(declarations[place])
                for n in _watched(declarations[place], open_[place]):
                    watching.setdefault(n, set()).add(place)
            todo = self._next(open_)
            if not todo:
                return
            new = self._remember(n for question in todo for n in question.integers)
            if not new:
                new = self._ask(todo)
            dirty = {
                place for claim in new for n in subjects(claim) for place in watching.get(n, ())
            }
            dirty |= {place for place, questions in open_.items() if todo & set(questions)}

    def _next(self, open_: Mapping[int, tuple[Question, ...]]) -> set[Question]:
        """The questions of the next round."""
        todo = {question for questions in open_.values() for question in questions} - self._asked
        return {question for question in todo if question.asks in CHEAP} or todo

    def _open(self, declaration: Declaration) -> tuple[Question, ...]:
        """What is worth asking about a set: whatever is cheap and, with effort, what is in use."""
        known = establish(declaration, self._answers.claims, self._run, self._shared)
        everything = open_questions(known, [*known.facts, *known.absent])
        cheap = [question for question in everything if question.asks in CHEAP]
        if self._run.effort == "quick" or len(cheap) == len(everything):
            return tuple(cheap)
        deep = open_questions(known, self._in_use(known.facts, known.absent))
        return (*cheap, *(question for question in deep if question.asks not in CHEAP))

    def _remember(self, numbers: Iterable[int]) -> list[Claim]:
        """What earlier runs knew about these, and about the rests that they left unfactored, and is
        news; then it is time to look again."""
        claims, new, wanted = self._answers.claims, list[Claim](), set(numbers)
        while wanted:
            found = [claim for claim in self._recall(wanted) if claim.id not in claims]
            claims.add(found)
            new += found
            factored = (claim for claim in found if isinstance(claim, Factorization))
            wanted = {claim.rest for claim in factored if claim.rest > 1}
        return new

    def _ask(self, questions: set[Question]) -> list[Claim]:
        """The claims that one round brings."""
        self._asked |= questions
        before = len(self._answers.claims)
        refused = answer_round(questions, self._answers, self._progress)
        self.refused += [
            f"{question.about} An answer was found and refused: {reason}."
            for question, reason in refused
        ]
        return list(self._answers.claims)[before:]


def _first_integers(declaration: Declaration) -> set[int]:
    """The integers that the first questions about a set are about."""
    n, q = declaration.modulus, declaration.subgroup_order
    return {number for number in (n, n - 1, q) if number is not None and number > 1}


def _watched(declaration: Declaration, questions: Iterable[Question]) -> set[int]:
    """The integers that a claim must be about to move a fact of the set: its modulus, and the
    first two of every open question, which name what is asked about."""
    return {declaration.modulus, *(n for question in questions for n in question.integers[:2])}
