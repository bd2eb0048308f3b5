"""A dask.distributed scheduler in place of the local pool, and its loss."""

import os
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from auditor.inquiry.answers import Cores
from auditor.inquiry.cluster import Cluster, NoCluster
from auditor.inquiry.dispatch import ExecutorLost
from auditor.inquiry.question_round import Status
from tests.bulk.reviews import mixed_sets, reviewed

SERVE = """
import os, sys, time
from distributed import LocalCluster
if __name__ == "__main__":
    cluster = LocalCluster(n_workers=2, threads_per_worker=1, processes=False, host="tcp://127.0.0.1",
                           dashboard_address=None, worker_dashboard_address=None)
    print(cluster.scheduler_address, flush=True)
    while True:
        time.sleep(60)
"""


@pytest.fixture
def scheduler() -> Iterator["tuple[subprocess.Popen[str], str]"]:
    """A process that is scheduler and workers, and its address."""
    root = str(Path(__file__).parents[2])
    process = subprocess.Popen(
        [sys.executable, "-c", SERVE],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        text=True,
        env={**os.environ, "PYTHONPATH": root},
    )
    assert process.stdout is not None
    try:
        yield process, process.stdout.readline().strip()
    finally:
        process.kill()
        process.communicate()


def test_a_cluster_gives_the_report_of_one_process_and_its_loss_costs_what_was_in_flight(
    scheduler: "tuple[subprocess.Popen[str], str]", tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The same record; then the scheduler dies, and the next run goes on from the ledger."""
    monkeypatch.setattr("auditor.inquiry.question_round.SENDING_PAYS", 0.0)
    process, address = scheduler
    sets, seen = mixed_sets(21), list[Status]()
    wanted = reviewed(sets)[1]

    def kill_it(status: Status) -> None:
        seen.append(status)
        if len(seen) == 6:
            process.kill()

    with Cluster(address) as cluster:
        assert cluster.jobs == 2
        assert reviewed(sets, cores=Cores(cluster, 2))[1] == wanted
        with pytest.raises(ExecutorLost):
            reviewed(sets, cores=Cores(cluster, 2), ledger=tmp_path / "l", progress=kill_it)

    again = list[Status]()
    assert reviewed(sets, ledger=tmp_path / "l", progress=again.append)[1] == wanted
    assert {status.question for status in seen[:6]} - {status.question for status in again}


def test_nobody_at_the_address(monkeypatch: pytest.MonkeyPatch) -> None:
    """An error in one sentence, soon."""
    monkeypatch.setattr("auditor.inquiry.cluster.CONNECT_SECONDS", 1)
    with pytest.raises(NoCluster, match="no scheduler answers"):
        Cluster("tcp://127.0.0.1:9")
    with pytest.raises(NoCluster, match="no scheduler answers"):
        Cluster("nonsense://x")
