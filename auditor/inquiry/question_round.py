"""A round of questions, answered side by side: each from what was known before, all merged in the
order of the questions.

Numbers come largest first, so that no long one is left for the end. Whether a number is prime is
settled before what builds on it, and a number that is the half of another one asked about waits
for that one, whose proof may settle it: the rounds of a test are run once for each prime.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field

from auditor.claims.base import Claim
from auditor.inquiry.answers import Answers, worth_keeping
from auditor.inquiry.dispatch import Crew, work_through
from auditor.inquiry.work_units import (
    Step,
    context,
    expected_seconds,
    step_elsewhere,
    step_here,
    taken_over,
    unit_of,
)
from auditor.questions import Asks, Question

STARTING_PAYS = 2.0
"""Expected seconds of work from which it pays to start worker processes."""
SENDING_PAYS = 0.005
"""Expected seconds from which it pays to send a question to one that runs."""


@dataclass(frozen=True, slots=True)
class Status:
    """Where a round stands: the question that was just begun or done, how many of how many are
    done, and which share of the expected work that is."""

    question: Question
    answered: int
    questions: int
    share: float


Progress = Callable[[Status], None]


def answer_round(
    questions: Iterable[Question], answers: Answers, progress: Progress
) -> list[tuple[Question, str]]:
    """Answer questions; the claims made are added to ``answers``.

    Returns the questions whose proposed answer was refused, with the reason.
    """
    asked = sorted(_with_hints_together(questions))
    primality = [question for question in asked if question.asks is Asks.PRIMALITY]
    halves = {question.integers[0] // 2 for question in primality}
    first = [question for question in primality if question.integers[0] not in halves]
    second = [question for question in primality if question.integers[0] in halves]
    tally = _Tally(progress, {q: expected_seconds(q, answers.run) for q in asked})
    refused = []
    for stage in (first, second, [question for question in asked if question not in primality]):
        open_ = [question for question in stage if not _is_settled(question, answers)]
        for question in set(stage) - set(open_):
            tally.tell(question, finished=True)
        refused += _answer_stage(open_, answers, tally)
    return refused


def _with_hints_together(questions: Iterable[Question]) -> list[Question]:
    """The questions, those for small factors of one number put together with all their hints."""
    hints: dict[int, set[int]] = {}
    others = []
    for question in questions:
        if question.asks is Asks.SMALL_FACTORS:
            hints.setdefault(question.integers[0], set()).update(question.integers[1:])
        else:
            others.append(question)
    merged = [Question(Asks.SMALL_FACTORS, (m, *sorted(more))) for m, more in hints.items()]
    return [*others, *merged]


def _is_settled(question: Question, answers: Answers) -> bool:
    """Whether an earlier stage settled the primality that a question asks for."""
    if question.asks is not Asks.PRIMALITY:
        return False
    return answers.claims.prime(question.integers[0]) is not None


@dataclass(slots=True)
class _Tally:
    """Counts what is done, and tells."""

    progress: Progress
    expected: dict[Question, float]
    answered: int = 0
    spent: float = 0.0

    def tell(self, question: Question, finished: bool) -> None:
        if finished:
            self.answered += 1
            self.spent += self.expected[question]
        total = sum(self.expected.values())
        share = self.spent / total if total else 1.0
        self.progress(Status(question, self.answered, len(self.expected), min(share, 1.0)))


@dataclass(slots=True)
class _Task:
    """A question on its way, with what its steps made so far."""

    question: Question
    known: list[Claim]
    made: list[Claim] = field(default_factory=list)
    refused: str | None = None


def _answer_stage(
    questions: Sequence[Question], answers: Answers, tally: _Tally
) -> list[tuple[Question, str]]:
    """Answer questions from the claims as they stand now, then add what was made, in order."""
    tasks = [_Task(question, context(question, answers.claims)) for question in questions]
    tasks.sort(key=lambda task: -max(number.bit_length() for number in task.question.integers))
    sent = _worth_sending(tasks, answers, tally)
    if sent:
        _work_elsewhere(sent, answers, tally)
    for task in tasks:
        if task not in sent:
            _work_here(task, answers, tally)
    tasks.sort(key=lambda task: task.question)
    for task in tasks:
        answers.claims.add(task.made)
    return [(task.question, task.refused) for task in tasks if task.refused is not None]


def _worth_sending(tasks: Sequence[_Task], answers: Answers, tally: _Tally) -> list[_Task]:
    """The tasks for the executor; a deep search that would leave cores idle is not sent as a
    whole, since its curves will be."""
    cores = answers.cores
    if cores.executor is None:
        return []
    worth = [task for task in tasks if tally.expected[task.question] >= SENDING_PAYS]
    started = getattr(cores.executor, "started", True)
    total = sum(tally.expected[task.question] for task in worth)
    if total < (SENDING_PAYS if started else STARTING_PAYS) or len(worth) < 2:
        return []
    if len(worth) < cores.jobs:
        deep = (Asks.FACTORIZATION, Asks.MODULUS_FACTORS)
        return [task for task in worth if task.question.asks not in deep]
    return worth


def _work_here(task: _Task, answers: Answers, tally: _Tally) -> None:
    tally.tell(task.question, finished=False)
    while not _take(task, _step_here(task, answers), tally):
        pass


def _step_here(task: _Task, answers: Answers) -> Step:
    known = [*task.known, *task.made]
    return step_here(task.question, known, answers.run, answers.draw, answers.keep, answers.cores)


def _work_elsewhere(tasks: Sequence[_Task], answers: Answers, tally: _Tally) -> None:
    cores = answers.cores
    assert cores.executor is not None
    by_place = list(tasks)

    def arguments(place: int) -> tuple[object, ...]:
        task = by_place[place]
        known = [*task.known, *task.made]
        return (unit_of(task.question, known, answers.run, cores.engine),)

    def here(place: int) -> Step:
        return _step_here(by_place[place], answers)

    def done(place: int, result: object) -> int | None:
        task = by_place[place]
        if not isinstance(result, Step):
            known = type(answers.claims)([*task.known, *task.made])
            here = getattr(cores.executor, "here", False)
            # What a worker sends is read strictly there, whatever it is.
            result = taken_over(result, known, answers.draw, here)  # type: ignore[arg-type]
            answers.keep(claim for claim in result.claims if worth_keeping(claim))
        return None if _take(task, result, tally) else place

    crew = Crew(cores.executor, cores.jobs, step_elsewhere, arguments, here)
    work_through(range(len(by_place)), crew, done)


def _take(task: _Task, step: Step, tally: _Tally) -> bool:
    """Add a step to its task; whether that was the last one."""
    task.made += step.claims
    task.refused = step.refused
    finished = step.finished or step.refused is not None
    tally.tell(task.question, finished)
    return finished
