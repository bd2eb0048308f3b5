"""The cores of this machine, taken when the first unit of a deep search is handed in."""

import multiprocessing
import os
from collections.abc import Callable
from concurrent.futures import Future
from types import TracebackType
from typing import Any


class LocalPool:
    """``jobs`` worker processes with the submit method of an executor; none until one is needed.

    Workers die with this process; one that is lost costs only the unit it had (pebble).
    """

    def __init__(self, jobs: int | None = None) -> None:
        self.jobs = jobs or os.cpu_count() or 1
        self._pool: Any = None

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) in a worker."""
        if self._pool is None:
            # Loaded here: most reviews never search deep enough to need it.
            from pebble import ProcessPool

            context = multiprocessing.get_context("spawn")
            self._pool = ProcessPool(max_workers=self.jobs, context=context)
        future: Future[Any] = self._pool.schedule(fn, args=args)
        return future

    def __enter__(self) -> "LocalPool":
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        traceback: TracebackType | None,
    ) -> None:
        if self._pool is not None:
            self._pool.stop()
            self._pool.join()
