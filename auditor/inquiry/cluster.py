"""The workers of a dask.distributed scheduler, in place of the cores of this machine.

The package has to be installed where the workers run, in the same version. The scheduler hands
what a lost worker was at to another one; when the scheduler itself is lost, what was in flight is
lost with it and everything that had come back is in the ledger.
"""

import logging
from collections.abc import Callable
from concurrent.futures import Future
from types import TracebackType
from typing import Any

CONNECT_SECONDS = 10


class NoCluster(Exception):
    """No scheduler answers at the address, or the optional package is not installed."""


class Cluster:
    """A scheduler with the submit method of an executor; ``jobs`` tasks run at a time.

    Raises NoCluster.
    """

    started = True
    """Workers wait already."""

    def __init__(self, address: str) -> None:
        try:
            import distributed
        except ImportError as error:
            raise NoCluster("--cluster needs the optional extra 'cluster' (dask)") from error
        # What it logs about a lost connection is said here in one sentence.
        logging.getLogger("distributed").setLevel(logging.CRITICAL + 1)
        try:
            client: Any = distributed.Client
            self._client = client(address, timeout=CONNECT_SECONDS, set_as_default=False)
        except (OSError, ValueError, TypeError) as error:
            raise NoCluster(f"no scheduler answers at {address}") from error
        self._executor = self._client.get_executor(pure=False)
        self.jobs = max(1, sum(self._client.nthreads().values()))

    @property
    def lost(self) -> bool:
        """Whether the scheduler is gone."""
        return bool(self._client.status != "running")

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) on a worker."""
        future: Future[Any] = self._executor.submit(fn, *args)
        return future

    def __enter__(self) -> "Cluster":
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        traceback: TracebackType | None,
    ) -> None:
        self._executor.shutdown(wait=False)
        self._client.close(timeout=1)
