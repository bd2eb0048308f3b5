"""The cores of this machine, taken when the first piece of work is handed in."""

import multiprocessing
import os
import sys
import threading
from collections.abc import Callable
from concurrent.futures import Future
from types import TracebackType
from typing import Any

from auditor.inquiry.work_units import MOST_DIGITS


class LocalPool:
    """``jobs`` worker processes with the submit method of an executor; none until one is needed.

    Workers end with this process, however it ends; one that is lost costs only what it was at
    (pebble).
    """

    lost = False
    """A machine that runs this has its cores."""

    def __init__(self, jobs: int | None = None) -> None:
        self.jobs = jobs or os.cpu_count() or 1
        self._pool: Any = None

    @property
    def started(self) -> bool:
        """Whether the workers run."""
        return self._pool is not None

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) in a worker."""
        if self._pool is None:
            # Loaded here: most reviews never have enough to do for it.
            from pebble import ProcessPool

            self._pool = ProcessPool(
                max_workers=self.jobs,
                context=multiprocessing.get_context("spawn"),
                initializer=_begin_worker,
            )
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
            self._pool = None


def _begin_worker() -> None:
    sys.set_int_max_str_digits(MOST_DIGITS)
    threading.Thread(target=_end_with_parent, daemon=True).start()


def _end_with_parent() -> None:
    """A killed parent tells nobody, and a step of a deep search takes minutes."""
    parent = multiprocessing.parent_process()
    assert parent is not None
    parent.join()
    os._exit(1)
