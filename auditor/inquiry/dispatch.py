"""Work handed to an executor: lost work is handed in again, and nothing waits for an order.

Whoever uses the results has to put them in order; here they come as they arrive.
"""

from collections import deque
from collections.abc import Callable, Iterable
from concurrent.futures import FIRST_COMPLETED, CancelledError, Future, wait
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

from auditor.search.curves import Executor

Task = TypeVar("Task")

MOST_LOSSES = 3
"""After so many losses a task is done in this process: it may be the task that kills workers."""
AHEAD = 3
"""Tasks under way for each worker, so that none waits for the next."""
LOOK_EVERY = 2.0
"""Seconds between looks at whether the executor is still there."""


class ExecutorLost(RuntimeError):
    """Nobody is left to work, and the rest is too much for this process."""


@dataclass(frozen=True, slots=True)
class Crew(Generic[Task]):
    """Who works: ``function`` runs in ``executor``, ``here`` does the same in this process."""

    executor: Executor
    jobs: int
    function: Callable[..., Any]
    arguments: Callable[[Task], tuple[Any, ...]]
    here: Callable[[Task], Any]


def work_through(
    tasks: Iterable[Task], crew: Crew[Task], done: Callable[[Task, Any], Task | None]
) -> None:
    """Runs every task; ``done`` is told each result and may return a task that follows from it.

    A task whose worker dies is handed in again, at most :data:`MOST_LOSSES` times. Raises
    ExecutorLost when the executor says that it is gone.
    """
    waiting = deque((task, 0) for task in tasks)
    under_way: dict[Future[Any], tuple[Task, int]] = {}
    try:
        while waiting or under_way:
            while waiting and len(under_way) < AHEAD * crew.jobs:
                task, losses = waiting.popleft()
                under_way[_submitted(crew, task)] = task, losses
            arrived, _ = wait(under_way, timeout=LOOK_EVERY, return_when=FIRST_COMPLETED)
            if getattr(crew.executor, "lost", False):
                raise ExecutorLost("the scheduler of the cluster was lost")
            for future in arrived:
                task, losses = under_way.pop(future)
                try:
                    result = future.result()
                except (Exception, CancelledError):
                    if losses < MOST_LOSSES:
                        waiting.appendleft((task, losses + 1))
                        continue
                    result = crew.here(task)
                following = done(task, result)
                if following is not None:
                    waiting.appendleft((following, 0))
    finally:
        for future in under_way:
            future.cancel()


def _submitted(crew: Crew[Task], task: Task) -> Future[Any]:
    """The future of a task; a failed one where the executor takes no more."""
    try:
        return crew.executor.submit(crew.function, *crew.arguments(task))
    except Exception as broken:
        failed: Future[Any] = Future()
        failed.set_exception(broken)
        return failed
