"""Units of curves: the same outcome whoever runs them, in whatever order they finish."""

import multiprocessing
import os
import signal
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor, ThreadPoolExecutor
from dataclasses import dataclass, replace
from typing import Any

import pytest

from auditor.search.curves import BuiltIn, EngineFailed, Outcome, Task, outcomes
from auditor.search.factoring import Factor, SearchInterrupted, search
from auditor.search.plan import EcmLevel, Plan
from auditor.search.work import Curves, Work

P, Q, R = 34359738421, 41234567977, 47777777797
"""Primes of 35 and 36 bits."""
REST = (2**127 - 1) * (2**107 - 1)
M = P * Q * R * REST
PLAN = Plan(
    trial_bound=100,
    complete_digits=20,
    levels=(EcmLevel(8, 50, 1_500, 12), EcmLevel(11, 400, 30_000, 40)),
)
TASK = Task(M, M, 50, 1_500, 0, 40)


@pytest.fixture(scope="module")
def two_processes() -> Iterator[Executor]:
    """A pool of two, started afresh as the program does."""
    with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as pool:
        yield pool


@dataclass(frozen=True)
class Planned:
    """An engine that finds what it was told to, curve by curve."""

    finds: dict[int, int]
    size: int = 3

    def unit(self, b1: int) -> int:
        """A fixed size."""
        return self.size

    def run(self, task: Task) -> Outcome:
        """The first planned find."""
        for index in range(task.first, task.end):
            if task.modulus % self.finds.get(index, 2) == 0:
                return Outcome(index + 1, self.finds[index], "planned")
        return Outcome(task.end, 1, "planned")


class Backwards:
    """An executor that runs nothing until a result is asked for, and then the last first."""

    def __init__(self) -> None:
        self.waiting: list[tuple[Future[Any], Callable[[], Any]]] = []
        self.most = 0

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Keeps the call; the future runs everything that waits when it is asked."""
        executor = self

        class Lazy(Future):  # type: ignore[type-arg]
            def result(self, timeout: float | None = None) -> Any:
                while executor.waiting:
                    future, call = executor.waiting.pop()
                    if not future.done():
                        future.set_result(call())
                return super().result(timeout)

        future: Future[Any] = Lazy()
        self.waiting.append((future, lambda: fn(*args)))
        self.most = max(self.most, len(self.waiting))
        return future


def test_units_are_consumed_in_order_up_to_the_first_find() -> None:
    """Later finds, finished earlier, do not count."""
    engine = Planned({7: P, 10: Q})
    executor = Backwards()

    here = list(outcomes(TASK, engine))
    there = list(outcomes(TASK, engine, executor, 2))

    assert here == there
    assert [outcome.next for outcome in here] == [3, 6, 8]
    assert [outcome.divisor for outcome in here] == [1, 1, P]
    assert executor.most == 4


def test_all_units_are_run_when_nothing_is_found() -> None:
    """The last unit is shorter."""
    assert [outcome.next for outcome in outcomes(replace(TASK, end=8), Planned({}))] == [3, 6, 8]


def test_one_process_and_two_give_the_same_result(two_processes: Executor) -> None:
    """Factors, rest, and the record of work; twice over."""
    alone = search(M, PLAN)

    assert alone == search(M, PLAN, executor=two_processes, jobs=2)
    assert alone == search(M, PLAN, executor=two_processes, jobs=1)
    assert {factor.prime for factor in alone.factors} == {P, Q, R}
    assert alone.rest == REST
    assert alone.work.curves == (Curves(50, 1_500, 12), Curves(400, 30_000, 40))


@dataclass(frozen=True)
class Deadly:
    """The built-in engine, which kills any process but the one it was made in."""

    parent: int

    def unit(self, b1: int) -> int:
        """Two curves."""
        return 2

    def run(self, task: Task) -> Outcome:
        """Kills its worker at once."""
        if os.getpid() != self.parent:
            os.kill(os.getpid(), signal.SIGKILL)
        return BuiltIn().run(task)


def test_a_killed_worker_costs_no_answer() -> None:
    """Every worker dies, the pool breaks, and the result is the same."""
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as pool:
        result = search(M, PLAN, executor=pool, engine=Deadly(os.getpid()))

    assert result == search(M, PLAN)


@dataclass(frozen=True)
class Broken:
    """An engine that always fails."""

    def unit(self, b1: int) -> int:
        """One curve."""
        return 1

    def run(self, task: Task) -> Outcome:
        """Fails."""
        raise EngineFailed("not installed properly")


def test_a_failing_engine_is_replaced_and_the_record_says_so() -> None:
    """The built-in engine runs the same curves, and is named."""
    result = search(M, PLAN, engine=Broken())

    assert result == search(M, PLAN)
    assert result.engine == "built-in"


@dataclass(frozen=True)
class Impatient:
    """The built-in engine, interrupted before a certain curve of the second level."""

    stop_at: int

    def unit(self, b1: int) -> int:
        """One curve."""
        return 1

    def run(self, task: Task) -> Outcome:
        """Raises KeyboardInterrupt at its curve."""
        if task.b1 == 400 and task.first == self.stop_at:
            raise KeyboardInterrupt
        return BuiltIn().run(task)


@pytest.mark.parametrize("stop_at", [0, 1, 5, 39])
def test_an_interrupted_search_keeps_what_it_had_and_goes_on_later(stop_at: int) -> None:
    """The interrupt carries factors and work; continued from there, the result is that of a search
    that was not interrupted."""
    told: list[Factor] = []
    with pytest.raises(SearchInterrupted) as caught:
        search(M, PLAN, engine=Impatient(stop_at), on_factor=told.append)
    partial = caught.value.result

    assert partial.work.count(400, 30_000) == stop_at
    assert {factor.prime for factor in partial.factors} == {factor.prime for factor in told}
    found = [factor.prime for factor in partial.factors]
    resumed = search(M, PLAN, known=found, done=partial.work)
    whole = search(M, PLAN)
    assert (resumed.pairs, resumed.composites) == (whole.pairs, whole.composites)
    assert resumed.work == whole.work


def test_work_done_before_is_not_done_again() -> None:
    """A deeper plan runs only the curves that are missing."""
    deeper = replace(PLAN, levels=(replace(PLAN.levels[0], curves=30), *PLAN.levels[1:]))
    first = search(REST, PLAN)
    seen: list[Work] = []
    second = search(REST, deeper, done=first.work, progress=seen.append)

    assert second.work.curves == (Curves(50, 1_500, 30), Curves(400, 30_000, 40))
    assert [work.count(50, 1_500) for work in seen if work.count(50, 1_500) > 12] == [30]
    assert search(REST, deeper, done=second.work).work == second.work


def test_a_search_tells_of_factors_as_they_come() -> None:
    """Known ones, small ones and deep ones, each once, with the method."""
    told: list[Factor] = []
    result = search(8 * P * M, PLAN, known=[Q], on_factor=told.append)

    assert sorted(told, key=lambda factor: factor.prime) == list(result.factors)
    methods = {factor.prime: factor.method for factor in result.factors}
    assert methods[2] == "trial division"
    assert methods[Q] == "known"
    assert methods[P] == methods[R] == "elliptic curves"
    assert dict(result.pairs)[P] == 2


def test_threads_do_as_well() -> None:
    """Any executor of the standard library will do."""
    with ThreadPoolExecutor(2) as pool:
        assert search(M, PLAN, executor=pool, jobs=2) == search(M, PLAN)
