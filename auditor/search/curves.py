"""Elliptic curves in numbered units, run here or in other processes, consumed in order."""

from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import Future
from dataclasses import dataclass, replace
from typing import Any, Protocol

from auditor.search.ecm import parameter, run_curve


@dataclass(frozen=True, slots=True)
class Task:
    """The curves ``first`` to ``end`` - 1 drawn for ``number``, on its divisor ``modulus``."""

    number: int
    modulus: int
    b1: int
    b2: int
    first: int
    end: int


@dataclass(frozen=True, slots=True)
class Outcome:
    """All curves before ``next`` were run; the last one found ``divisor`` unless that is 1."""

    next: int
    divisor: int
    engine: str


class Engine(Protocol):
    """Runs elliptic curves. Engines are pickled: units of curves may run in other processes."""

    @property
    def name(self) -> str:
        """The program and its version, as reports name it."""

    def unit(self, b1: int) -> int:
        """Curves in one unit of work."""

    def run(self, task: Task) -> Outcome:
        """Runs the task's curves in order, up to the first that finds a divisor above 1."""


class EngineFailed(RuntimeError):
    """An engine that is a program of its own did not do its work."""


class Executor(Protocol):
    """Anything with the submit method of :class:`concurrent.futures.Executor`."""

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) somewhere."""


@dataclass(frozen=True, slots=True)
class BuiltIn:
    """The engine of :mod:`auditor.search.ecm`."""

    name: str = "built-in"

    def unit(self, b1: int) -> int:
        """A few tenths of a second at 2048 bits."""
        return max(1, 8_000 // b1)

    def run(self, task: Task) -> Outcome:
        """Runs the task's curves in order, up to the first that finds a divisor above 1."""
        for index in range(task.first, task.end):
            drawn = parameter(task.number, task.b1, index)
            divisor = run_curve(task.modulus, task.b1, task.b2, drawn)
            if divisor > 1:
                return Outcome(index + 1, divisor, self.name)
        return Outcome(task.end, 1, self.name)


BUILT_IN = BuiltIn()


def outcomes(
    task: Task, engine: Engine, executor: Executor | None = None, jobs: int = 1
) -> Iterator[Outcome]:
    """The outcomes of the task's units in order, ending with the first that found a divisor.

    Twice ``jobs`` units are under way in ``executor``; without one they are run here, one by one.
    A unit whose worker is lost is run here, and a unit whose engine fails by the built-in one.
    """
    units = _units(task, engine.unit(task.b1))
    if executor is None:
        yield from _up_to_first_find(_run(engine, unit) for unit in units)
        return
    under_way: deque[tuple[Task, Future[Outcome]]] = deque()
    try:
        yield from _up_to_first_find(_consumed(units, engine, executor, 2 * jobs, under_way))
    finally:
        for _, future in under_way:
            future.cancel()


def _units(task: Task, size: int) -> Iterator[Task]:
    for first in range(task.first, task.end, size):
        yield replace(task, first=first, end=min(first + size, task.end))


def _up_to_first_find(results: Iterator[Outcome]) -> Iterator[Outcome]:
    for outcome in results:
        yield outcome
        if outcome.divisor > 1:
            return


def _consumed(
    units: Iterator[Task],
    engine: Engine,
    executor: Executor,
    ahead: int,
    under_way: "deque[tuple[Task, Future[Outcome]]]",
) -> Iterator[Outcome]:
    for unit in units:
        under_way.append((unit, _submitted(executor, engine, unit)))
        if len(under_way) == ahead:
            yield _outcome(engine, *under_way.popleft())
    while under_way:
        yield _outcome(engine, *under_way.popleft())


def _submitted(executor: Executor, engine: Engine, unit: Task) -> "Future[Outcome]":
    """The future of a unit; a failed one where the pool is broken."""
    try:
        return executor.submit(engine.run, unit)
    except Exception as broken:
        failed: Future[Outcome] = Future()
        failed.set_exception(broken)
        return failed


def _outcome(engine: Engine, unit: Task, future: "Future[Outcome]") -> Outcome:
    try:
        return future.result()
    except Exception:
        return _run(engine, unit)


def _run(engine: Engine, unit: Task) -> Outcome:
    """Runs a unit in this process; by the built-in engine where the engine fails."""
    try:
        return engine.run(unit)
    except EngineFailed:
        return BUILT_IN.run(unit)
