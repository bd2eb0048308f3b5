"""The worker processes of this machine: whatever is killed, every task ends."""

import contextlib
import os
import signal
import time
from concurrent.futures import wait

from auditor.inquiry.pool import LocalPool
from tests.robustness.kills import workers


def test_workers_killed_before_their_first_task_leave_nobody_waiting() -> None:
    """What was handed in fails or is done, and what comes next is done by other workers."""
    with LocalPool(2) as pool:
        futures = [pool.submit(abs, -1)]
        while not (found := workers(os.getpid())):
            time.sleep(0.001)
        for worker in found:
            with contextlib.suppress(ProcessLookupError):
                os.kill(worker, signal.SIGKILL)
        for number in range(40):
            with contextlib.suppress(RuntimeError):
                futures.append(pool.submit(abs, -number))
        assert wait(futures, timeout=60).not_done == set()

        assert pool.submit(abs, -7).result(timeout=60) == 7


def test_an_interrupt_while_workers_start_is_for_this_process_alone() -> None:
    """They do not hear of it, and do their work."""
    with LocalPool(2) as pool:
        future = pool.submit(abs, -1)
        found = workers(os.getpid())
        for worker in found:
            os.kill(worker, signal.SIGINT)
        assert len(found) == 2
        assert future.result(timeout=60) == 1
        assert workers(os.getpid()) == found
        assert signal.SIGINT not in signal.pthread_sigmask(signal.SIG_BLOCK, ())


def test_tasks_that_a_broken_pool_has_forgotten_fail() -> None:
    """As when all workers expire: its queue is never emptied, and nobody has to wait for it."""
    with LocalPool(1) as pool:
        assert pool.submit(abs, -1).result(timeout=60) == 1
        waiting = [pool.submit(time.sleep, 600) for _ in range(3)]
        context = pool._pool._context
        context.status = type(context.status).ERROR
        done, left = wait(waiting, timeout=30)

        assert (len(done), left) == (3, set())
        assert {str(future.exception()) for future in done} == {"the pool of workers is broken"}
        assert pool.submit(abs, -7).result(timeout=60) == 7
