"""The cores of this machine, taken when the first piece of work is handed in."""

import multiprocessing
import os
import signal
import sys
import threading
import time
from collections.abc import Callable, Iterator
from concurrent.futures import Future, InvalidStateError
from contextlib import contextmanager, suppress
from multiprocessing import resource_tracker
from types import TracebackType
from typing import Any

from auditor.inquiry.work_units import MOST_DIGITS

LOOK_EVERY = 0.5
"""Seconds between looks at whether the pool still works."""


class LocalPool:
    """``jobs`` worker processes with the submit method of an executor; none until one is needed.

    Workers end with this process, however it ends; one that is lost costs only what it was at
    (pebble). A worker that is killed before its first task breaks the pool, which then forgets what
    waits in its queue: what was handed in has failed, and the next task starts another pool.
    """

    lost = False
    """A machine that runs this has its cores."""

    here = True
    """The workers are this program on this machine."""

    def __init__(self, jobs: int | None = None) -> None:
        self.jobs = jobs or os.cpu_count() or 1
        self._pool: Any = None
        self._handed_in: set[Future[Any]] = set()

    @property
    def started(self) -> bool:
        """Whether the workers run."""
        return self._pool is not None

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) in a worker."""
        if self._pool is not None and not self._pool.active:
            self._end()
        if self._pool is None:
            self._begin()
        future: Future[Any] = self._pool.schedule(fn, args=args)
        self._handed_in.add(future)
        future.add_done_callback(self._handed_in.discard)
        if not self._pool.active:
            # The watch may have looked before this one was there.
            _give_up({future})
        return future

    def _begin(self) -> None:
        # Loaded here: most reviews never have enough to do for it.
        from pebble import ProcessPool

        # It would let the signal through while it starts.
        resource_tracker.ensure_running()
        with _interrupts_held():
            self._pool = ProcessPool(
                max_workers=self.jobs,
                context=multiprocessing.get_context("spawn"),
                initializer=_begin_worker,
            )
            # Asking is what starts the workers.
            if not self._pool.active:
                raise RuntimeError("the pool of workers does not start")
        self._handed_in = set()
        watch = threading.Thread(
            target=_give_up_when_broken, args=(self._pool, self._handed_in), daemon=True
        )
        watch.start()

    def _end(self) -> None:
        self._pool.stop()
        self._pool.join()
        self._pool = None

    def __enter__(self) -> "LocalPool":
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        traceback: TracebackType | None,
    ) -> None:
        if self._pool is not None:
            self._end()


@contextmanager
def _interrupts_held() -> Iterator[None]:
    """What starts in here never hears of Ctrl-C, not even while its interpreter starts; this
    process hears of it afterwards."""
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _give_up_when_broken(pool: Any, futures: "set[Future[Any]]") -> None:
    """Nobody waits for an answer that cannot come any more."""
    while pool.active:
        time.sleep(LOOK_EVERY)
    _give_up(set(futures))


def _give_up(futures: "set[Future[Any]]") -> None:
    for future in futures:
        with suppress(InvalidStateError):
            future.set_exception(RuntimeError("the pool of workers is broken"))


def _begin_worker() -> None:
    sys.set_int_max_str_digits(MOST_DIGITS)
    threading.Thread(target=_end_with_parent, daemon=True).start()


def _end_with_parent() -> None:
    """A killed parent tells nobody, and a step of a deep search takes minutes."""
    parent = multiprocessing.parent_process()
    assert parent is not None
    parent.join()
    os._exit(1)
