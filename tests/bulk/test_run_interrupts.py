"""Searches interrupted while GMP-ECM works: what was found is kept, and no process is left over.

The program waits at the second level of curves, so the interruption comes after the first one has
found the easy factor and before the hard rest is given up.
"""

import json
import os
import random
import secrets
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import gmpy2
import pytest

from auditor.claims.factorization import Factorization
from auditor.claims.ledger import Ledger
from auditor.claims.searched import Searched
from tests.bulk.programs import held_at, running, still_running
from tests.bulk.reviews import random_prime, safe_prime
from tests.robustness.kills import RUN, outlive, workers

RNG = random.Random(3)
EASY, LEFT, RIGHT = safe_prime(RNG, 36), random_prime(RNG, 125), random_prime(RNG, 125)
P = next(n for k in range(2, 10**6, 2) if gmpy2.is_prime(n := k * EASY * LEFT * RIGHT + 1))
REST = LEFT * RIGHT
DEPTH = ("--effort", "thorough", "--factor-digits", "20", "--engine", "gmp-ecm")
FIRST, SECOND = 3_000, 11_000
"""First bounds of the two levels."""
DOCUMENT = f"""\
auditor: 1
parameter_sets:
  - name: x
    purpose: key-agreement
    modulus: {P}
    generator: 2
    exponent: {{bits: 160, use: static}}
    peer_check: [range]
"""


class Folder:
    """A folder with a declaration, a program called ecm, and commands started in it."""

    def __init__(self, path: Path) -> None:
        self.path = path
        (path / "x.yaml").write_text(DOCUMENT)
        held_at(path, SECOND, P - 1)
        self._started: list[subprocess.Popen[bytes]] = []

    def start(self, *words: str) -> "subprocess.Popen[bytes]":
        """A command in a process group of its own, as a shell starts it."""
        process = subprocess.Popen(
            [sys.executable, "-c", RUN, *words],
            cwd=self.path,
            env={
                **os.environ,
                "PYTHONPATH": str(Path(__file__).parents[2]),
                "PATH": f"{self.path}:{os.environ['PATH']}",
            },
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            start_new_session=True,
        )
        self._started.append(process)
        return process

    def started_and_held(self, *words: str) -> "subprocess.Popen[bytes]":
        """A command that has come to where the program waits."""
        (self.path / "hold").touch()
        process = self.start(*words)
        end = time.monotonic() + 120
        while not (self.path / "reached").exists():
            assert process.poll() is None, process.communicate()
            assert time.monotonic() < end
            time.sleep(0.02)
        (self.path / "hold").unlink()
        return process

    def review(self, *words: str) -> tuple[str, ...]:
        """The words of a review that writes r.json."""
        day = ("--as-of", "2026-12-01", "--fail-on", "never")
        return ("review", "x.yaml", *day, *DEPTH, "--json", "r.json", *words)

    def report(self, *words: str) -> bytes:
        """What a review that nobody disturbs writes."""
        process = self.start(*self.review(*words))
        _, errors = process.communicate()
        assert process.returncode == 0, errors
        return (self.path / "r.json").read_bytes()

    def bounds_run(self) -> list[int]:
        """The first bounds of the units that the program was started for; then forgets them."""
        log = self.path / "ran"
        bounds = [int(line) for line in log.read_text().split()]
        log.unlink()
        return bounds

    def end(self) -> None:
        """Nothing is left over, whatever went wrong."""
        for process in self._started:
            if process.poll() is None:
                os.killpg(process.pid, signal.SIGKILL)
            process.communicate()


@pytest.fixture
def folder(tmp_path: Path) -> Iterator[Folder]:
    """A folder of its own."""
    made = Folder(tmp_path)
    yield made
    made.end()


@pytest.mark.parametrize("jobs", ["1", "2"])
def test_an_interrupted_review_keeps_what_it_found(folder: Folder, jobs: str) -> None:
    """Factor and curves are in the ledger; the next run goes on from there to the same report."""
    words = folder.review("--jobs", jobs, "--ledger", "l")
    process = folder.started_and_held(*words)
    os.killpg(process.pid, signal.SIGINT)
    _, errors = process.communicate(timeout=60)

    assert process.returncode == 130
    assert b"what was found is kept in l" in errors
    assert not still_running(folder.path)
    ledger = Ledger(folder.path / "l", secrets.randbelow, pytest.fail)
    found = [claim for claim in ledger.recall([P - 1], 64) if isinstance(claim, Factorization)]
    searched = [claim for claim in ledger.recall([REST], 64) if isinstance(claim, Searched)]
    ledger.close()
    assert any(EASY in dict(claim.factors) for claim in found)
    curves = {run for claim in searched for run in claim.runs if run[0] == "elliptic curves"}
    assert any(dict(numbers)["b1"] == FIRST for _, numbers in curves)
    assert FIRST in folder.bounds_run()

    resumed = folder.report("--jobs", jobs, "--ledger", "l")
    assert set(folder.bounds_run()) == {SECOND}
    assert resumed == folder.report("--jobs", "1", "--no-ledger")


@pytest.mark.parametrize("jobs", ["1", "2"])
def test_an_interrupted_structure_shows_what_it_found(folder: Folder, jobs: str) -> None:
    """There is no ledger, so the partial answer is the result: the easy factor is in it."""
    words = ("structure", hex(P), "--of", "2", "--json", *DEPTH, "--jobs", jobs)
    process = folder.started_and_held(*words)
    os.killpg(process.pid, signal.SIGINT)
    output, errors = process.communicate(timeout=60)
    (record,) = json.loads(output)

    assert process.returncode == 130
    assert b"interrupted; shown is what was found" in errors
    assert record["complete"] is False
    assert [EASY, 1] in record["known_exponent_factors"]
    assert int(record["unfactored_exponent"], 16) == REST
    assert not still_running(folder.path)


def test_numbers_that_were_not_begun_are_not_shown(folder: Folder) -> None:
    """The first one is interrupted and shown."""
    words = ("structure", hex(P), "15", *DEPTH, "--jobs", "1")
    process = folder.started_and_held(*words)
    process.send_signal(signal.SIGINT)
    output, _ = process.communicate(timeout=60)

    assert process.returncode == 130
    assert str(EASY).encode() in output
    assert b"15 =" not in output


@pytest.mark.parametrize("jobs", ["1", "2"])
def test_a_killed_review_leaves_nobody_behind(folder: Folder, jobs: str) -> None:
    """Neither workers nor programs outlive a parent that could tell them nothing."""
    process = folder.started_and_held(*folder.review("--jobs", jobs, "--ledger", "l"))
    helpers = workers(process.pid)
    assert running(folder.path)
    assert bool(helpers) == (jobs == "2")
    process.kill()
    process.communicate(timeout=60)

    assert not still_running(folder.path)
    assert not outlive(helpers, 10)
