"""The program ecm as an engine: what it prints is read strictly, and it never outlives its search.

A stand-in prints in its form, so that failures can be had at will; where the program itself is
installed it is asked as well.
"""

import json
import os
import shlex
import signal
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from auditor.search import gmp_ecm
from auditor.search.curves import BuiltIn, EngineFailed, Outcome, Task
from auditor.search.factoring import search
from auditor.search.gmp_ecm import GmpEcm
from tests.search.test_curves import PLAN, REST, M, P, Q, R

STAND_IN = Path(__file__).parent / "ecm_stand_in.py"
TASK = Task(M, M, 1_000, 50_000, 5, 9)


def stand_in(directory: Path, **behaviour: Any) -> GmpEcm:
    """A program called ecm in that directory, with that behaviour."""
    path = directory / "ecm"
    command = shlex.join([sys.executable, str(STAND_IN), json.dumps(behaviour)])
    path.write_text(f'#!/bin/sh\nexec {command} "$@"\n', encoding="utf-8")
    path.chmod(0o755)
    return GmpEcm(str(path), "9.9")


def test_curves_without_a_find(tmp_path: Path) -> None:
    """All of them were run."""
    assert stand_in(tmp_path).run(TASK) == Outcome(9, 1, "GMP-ECM 9.9")


def test_a_find_ends_the_unit(tmp_path: Path) -> None:
    """The curve that found it is the last one that counts."""
    engine = stand_in(tmp_path, find_at=2, factor=P)

    assert engine.run(TASK) == Outcome(8, P, "GMP-ECM 9.9")


@pytest.mark.parametrize(
    ("behaviour", "message"),
    [
        ({"stop_at": 3}, "3 of 4"),
        ({"die_at": 1}, "signal 9"),
        ({"die_at": 3, "by": signal.SIGUSR1}, "signal 10"),
        ({"greeting": "compresses disc images"}, "is not GMP-ECM"),
        ({"status": 1}, "ended with 1"),
        ({"find_at": 0, "factor": P + 2}, "does not divide"),
        ({"find_at": 0, "factor": 1}, "does not divide"),
        ({"sigma": 7}, "another curve"),
    ],
)
def test_what_cannot_be_is_refused(tmp_path: Path, behaviour: dict[str, int], message: str) -> None:
    """Curves left out, a killed program, an error, a wrong divisor, a wrong curve."""
    with pytest.raises(EngineFailed, match=message):
        stand_in(tmp_path, **behaviour).run(TASK)


def test_a_program_that_is_not_there(tmp_path: Path) -> None:
    """It cannot be started."""
    with pytest.raises(EngineFailed, match="start"):
        GmpEcm(str(tmp_path / "absent"), "9.9").run(TASK)


@pytest.mark.parametrize("n", [4 * P, 12 * P])
def test_numbers_that_the_program_cannot_take(tmp_path: Path, n: int) -> None:
    """A starting point that has no residue modulo n."""
    with pytest.raises(EngineFailed, match="cannot take"):
        stand_in(tmp_path).run(Task(n, n, 100, 1000, 0, 2))


def test_a_killed_program_is_run_again(tmp_path: Path) -> None:
    """Killed now and then it does the work all the same, and nobody else is named."""
    log = tmp_path / "log"
    engine = stand_in(tmp_path, dies_until=3, log=str(log), find_at=1, factor=P)

    assert engine.run(TASK) == Outcome(7, P, "GMP-ECM 9.9")
    assert log.read_text() == "xxx"


def test_the_version_that_ran_is_named(tmp_path: Path) -> None:
    """Another machine may have another one."""
    engine = replace(stand_in(tmp_path), version="9.8")

    assert engine.name == "GMP-ECM 9.8"
    assert engine.run(TASK).engine == "GMP-ECM 9.9"


def test_a_program_that_is_always_killed_costs_no_answer(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The built-in engine runs its units, and the record names the engines that did the work."""
    monkeypatch.setattr(gmp_ecm, "MOST_KILLS", 1)
    result = search(M, PLAN, engine=stand_in(tmp_path, die_at=0))

    assert result == search(M, PLAN)
    assert result.engine == "built-in"


def test_it_is_found_by_its_greeting(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A program of the same name that is something else is not taken for it."""
    monkeypatch.setenv("PATH", str(tmp_path))
    assert gmp_ecm.installed() is None
    engine = stand_in(tmp_path)
    monkeypatch.setenv("PATH", f"{tmp_path}:/usr/bin:/bin")
    assert gmp_ecm.installed() == replace(engine, leash=gmp_ecm.LEASH)
    other = tmp_path / "setpriv"
    other.write_text("#!/bin/sh\necho unknown option; exit 1\n", encoding="utf-8")
    other.chmod(0o755)
    assert gmp_ecm.installed() == engine
    (tmp_path / "ecm").write_text("#!/bin/sh\necho compresses disc images\n", encoding="utf-8")
    assert gmp_ecm.installed() is None


def lives(pid: int) -> bool:
    """Whether a process runs; one that has ended and waits for its parent does not."""
    try:
        return bool(Path(f"/proc/{pid}/cmdline").read_bytes())
    except OSError:
        return False


@pytest.mark.parametrize("by", [signal.SIGINT, signal.SIGKILL])
def test_the_program_ends_with_its_search(tmp_path: Path, by: signal.Signals) -> None:
    """The search is interrupted, or killed, while the program works: it is gone with it."""
    pid_file = tmp_path / "pid"
    engine = replace(stand_in(tmp_path, sleep_at=1, pid_file=str(pid_file)), leash=gmp_ecm.LEASH)
    source = (
        "from auditor.search.gmp_ecm import GmpEcm\n"
        "from auditor.search.curves import Task\n"
        f"{engine!r}.run({TASK!r})\n"
    )
    searching = subprocess.Popen([sys.executable, "-c", source], stderr=subprocess.PIPE)
    while not (pid_file.exists() and pid_file.read_text()):
        assert searching.poll() is None
        time.sleep(0.01)
    program = int(pid_file.read_text())
    os.kill(searching.pid, by)
    _, errors = searching.communicate()

    assert (b"KeyboardInterrupt" in errors) == (by == signal.SIGINT)
    for _ in range(100):
        if not lives(program):
            break
        time.sleep(0.05)
    assert not lives(program)


INSTALLED = gmp_ecm.installed()


@pytest.mark.parametrize("engine", [BuiltIn(), INSTALLED] if INSTALLED else [BuiltIn()], ids=str)
def test_engines_find_the_same_factors(engine: BuiltIn | GmpEcm) -> None:
    """With the built-in curves, and with the program's own where it is installed; twice over."""
    result = search(M, PLAN, engine=engine)

    assert result == search(M, PLAN, engine=engine)
    assert {factor.prime for factor in result.factors} == {P, Q, R}
    assert result.rest == REST
    assert result.engine == engine.name


@pytest.mark.parametrize("engine", [INSTALLED] if INSTALLED else [BuiltIn()], ids=str)
def test_curve_by_curve_the_program_finds_what_our_code_finds(engine: BuiltIn | GmpEcm) -> None:
    """The curves are the same; the program may find more, since it reaches further."""
    both = 0
    for modulus in (P * R, Q * R, P * REST):
        for index in range(40):
            task = Task(modulus, modulus, 300, 9_000, index, index + 1)
            ours, theirs = BuiltIn().run(task).divisor, engine.run(task).divisor
            assert ours == 1 or ours == theirs, index
            both += ours > 1
    assert both > 10
