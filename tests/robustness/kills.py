"""Reviews killed at random moments: the parent, a worker of its own or of a dask scheduler, or the
program GMP-ECM with SIGKILL; everything with SIGINT.

A review that was ended goes on from the ledger that it left. Every review that comes to its end
must write the report of an undisturbed one, byte for byte, and no worker may outlive its parent.
Run as ``python -m tests.robustness.kills [KILLS [SEED [VICTIM…]]]``, so many kills of each victim;
nothing but its own processes is killed.
"""

import os
import random
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path

import gmpy2

from auditor.search import gmp_ecm

RUN = "import sys; from auditor.cli import run; sys.exit(run())"
SERVE = """
import time
from distributed import LocalCluster
if __name__ == "__main__":
    cluster = LocalCluster(n_workers=2, threads_per_worker=1, processes=True,
                           host="tcp://127.0.0.1", dashboard_address=None,
                           worker_dashboard_address=None)
    print(cluster.scheduler_address, flush=True)
    while True:
        time.sleep(60)
"""
PARENT, WORKER, EVERYBODY, DASK_WORKER, PROGRAM = VICTIMS = (
    "parent",
    "worker",
    "everybody",
    "dask worker",
    "GMP-ECM",
)
SETS = 10
BITS = 220
"""Long enough for curves at standard effort, short enough to run often."""
PATIENCE, HANGS = 180, 999
ENDED = (130, -signal.SIGKILL, -signal.SIGINT)
"""The last one where the interpreter itself still starts or already ends."""
ROOT = str(Path(__file__).parents[2])


@dataclass(slots=True)
class Tally:
    """What happened: kills by victim, finished reviews, and what went wrong."""

    kills: dict[str, int] = field(default_factory=lambda: dict.fromkeys(VICTIMS, 0))
    finished: int = 0
    wrong: list[str] = field(default_factory=list)


@dataclass(frozen=True, slots=True)
class Scene:
    """How a review is run and who is killed: ``server`` is the process that holds dask's workers,
    ``seconds`` what an undisturbed review takes, ``wanted`` its report."""

    victim: str
    options: tuple[str, ...]
    seconds: float
    wanted: bytes
    server: int | None = None


def declarations(seed: int, sets: int = SETS, bits: int = BITS) -> str:
    """A document of sets over random primes whose predecessors take curves to search."""
    rng = random.Random(seed)
    lines = ["auditor: 1", "parameter_sets:"]
    for place in range(sets):
        prime = int(gmpy2.next_prime(rng.getrandbits(bits) | 1 << (bits - 1)))
        lines += [
            f"  - name: set {place}",
            "    purpose: key-agreement",
            f"    modulus: {hex(prime)}",
            f"    generator: {rng.randrange(2, 100)}",
            "    exponent: {bits: 160, use: static}",
            "    peer_check: [range]",
        ]
    return "\n".join(lines) + "\n"


def start(folder: Path, report: str, *options: str) -> "subprocess.Popen[bytes]":
    """A review of the document in ``folder``, in a process group of its own."""
    words = ["review", "sets.yaml", "--as-of", "2026-12-01", "--fail-on", "never"]
    return subprocess.Popen(
        [sys.executable, "-c", RUN, *words, "--json", report, *options],
        cwd=folder,
        env={**os.environ, "PYTHONPATH": ROOT},
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        start_new_session=True,
    )


def workers(parent: int) -> list[int]:
    """The worker processes of a review that runs."""
    found = []
    for entry in Path("/proc").iterdir():
        if entry.name.isdigit() and _parent_of(entry) == parent and _is_worker(entry):
            found.append(int(entry.name))
    return sorted(found)


def programs(ancestor: int) -> list[int]:
    """The processes of GMP-ECM that a review or its workers have started."""
    found = []
    for parent in [ancestor, *workers(ancestor)]:
        for entry in Path("/proc").iterdir():
            if entry.name.isdigit() and _parent_of(entry) == parent and _is_program(entry):
                found.append(int(entry.name))
    return sorted(found)


def _parent_of(entry: Path) -> int | None:
    try:
        return int((entry / "stat").read_text().rsplit(")", 1)[1].split()[1])
    except (OSError, IndexError):
        return None


def _command_of(entry: Path) -> bytes:
    try:
        return (entry / "cmdline").read_bytes()
    except OSError:
        return b""


def _is_worker(entry: Path) -> bool:
    return b"spawn_main" in _command_of(entry)


def _is_program(entry: Path) -> bool:
    return _command_of(entry).split(b"\0")[0].endswith(b"/ecm")


def outlive(pids: list[int], seconds: float) -> list[int]:
    """Those of the processes that still run after so long."""
    end = time.monotonic() + seconds
    while time.monotonic() < end and any(_is_worker(Path(f"/proc/{pid}")) for pid in pids):
        time.sleep(0.1)
    return [pid for pid in pids if _is_worker(Path(f"/proc/{pid}"))]


def run_with_kills(folder: Path, kills: Mapping[str, int], seed: int, sets: int = SETS) -> Tally:
    """Kill so many times each victim that is named, and let the last review of each finish."""
    (folder / "sets.yaml").write_text(declarations(seed, sets))
    rng, tally = random.Random(seed), Tally()
    undisturbed: dict[tuple[str, ...], tuple[float, bytes]] = {}
    for victim, count in kills.items():
        engine = ("--engine", "gmp-ecm" if victim == PROGRAM else "built-in")
        with _crew(victim) as (server, crew):
            options = (*crew, *engine)
            if options not in undisturbed:
                undisturbed[options] = _undisturbed(folder, options)
            _kill_all(
                folder, Scene(victim, options, *undisturbed[options], server), rng, tally, count
            )
    built_in = {report for options, (_, report) in undisturbed.items() if "built-in" in options}
    if len(built_in) > 1:
        tally.wrong.append("workers of their own and of a scheduler lead to different reports")
    return tally


def _undisturbed(folder: Path, options: tuple[str, ...]) -> tuple[float, bytes]:
    """How long a review takes under these options, and what it writes."""
    begun = time.monotonic()
    status, message = _finish(start(folder, "undisturbed.json", "--no-ledger", *options))
    assert status == 0, message
    return time.monotonic() - begun, (folder / "undisturbed.json").read_bytes()


@contextmanager
def _crew(victim: str) -> Iterator[tuple[int | None, tuple[str, ...]]]:
    """Who works: workers of a review's own, or those of a dask scheduler and the process that holds
    it and replaces workers that die; and the options that say so."""
    if victim != DASK_WORKER:
        yield None, ("--jobs", "2")
        return
    process = subprocess.Popen(
        [sys.executable, "-c", SERVE],
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        text=True,
        env={**os.environ, "PYTHONPATH": ROOT},
        start_new_session=True,
    )
    assert process.stdout is not None
    try:
        yield process.pid, ("--cluster", process.stdout.readline().strip())
    finally:
        os.killpg(process.pid, signal.SIGKILL)
        process.communicate()


def _kill_all(folder: Path, scene: Scene, rng: random.Random, tally: Tally, count: int) -> None:
    report = folder / "killed.json"
    ledger = 0
    for _ in range(5 * count + 5):
        name = f"ledger-{scene.victim}-{ledger}"
        process = start(folder, report.name, "--ledger", name, *scene.options)
        if tally.kills[scene.victim] < count:
            _kill(process, scene, rng.uniform(0.2, 0.9) * scene.seconds, tally)
        status, message = _finish(process)
        if status == 0:
            tally.finished += 1
            ledger += 1
            if report.read_bytes() != scene.wanted:
                tally.wrong.append(f"{scene.victim}: the report differs")
            if tally.kills[scene.victim] >= count:
                return
        elif status not in ENDED:
            tally.wrong.append(f"{scene.victim}: it ended with {status}: {message}")
        elif status == 130 and not message.startswith("interrupted"):
            tally.wrong.append(f"an interrupted review said: {message}")
    tally.wrong.append(f"{scene.victim}: fewer than {count} kills in so many reviews")


def _kill(process: "subprocess.Popen[bytes]", scene: Scene, after: float, tally: Tally) -> None:
    try:
        process.wait(after)
        return
    except subprocess.TimeoutExpired:
        pass
    if scene.victim in (WORKER, DASK_WORKER, PROGRAM):
        if _kill_one(process, scene):
            tally.kills[scene.victim] += 1
        return
    helpers = workers(process.pid)
    tally.kills[scene.victim] += 1
    if scene.victim == PARENT:
        process.kill()
    else:
        os.killpg(process.pid, signal.SIGINT)
    process.wait(30)
    if left := outlive(helpers, 20):
        tally.wrong.append(f"{len(left)} workers outlive their parent")


def _kill_one(process: "subprocess.Popen[bytes]", scene: Scene) -> bool:
    """Kill one worker or program, once there is one; whether there was."""
    while process.poll() is None:
        match scene.victim:
            case "GMP-ECM":
                found = programs(process.pid)
            case "dask worker":
                assert scene.server is not None
                found = workers(scene.server)
            case _:
                found = workers(process.pid)
        try:
            if found:
                os.kill(found[0], signal.SIGKILL)
                return True
        except ProcessLookupError:
            continue
        time.sleep(0.005)
    return False


def _finish(process: "subprocess.Popen[bytes]") -> tuple[int, str]:
    """Exit status and message; a review that hangs is ended, with a status that none has."""
    try:
        _, errors = process.communicate(timeout=PATIENCE)
    except subprocess.TimeoutExpired:
        os.killpg(process.pid, signal.SIGKILL)
        process.communicate()
        return HANGS, f"it did not end within {PATIENCE} s"
    return process.returncode, errors.decode().strip()


def main() -> int:
    """Say what happened; 1 if something went wrong."""
    count, seed, *victims = (*sys.argv[1:], *("20", "1")[len(sys.argv) - 1 :])
    if not victims:
        victims = [name for name in VICTIMS if name != PROGRAM or gmp_ecm.installed()]
    with tempfile.TemporaryDirectory() as folder:
        kills = dict.fromkeys(victims, int(count))
        tally = run_with_kills(Path(folder), kills, int(seed))
    print(f"kills: {tally.kills}; reviews that came to their end: {tally.finished}")
    for line in tally.wrong:
        print(line)
    return int(bool(tally.wrong))


if __name__ == "__main__":
    sys.exit(main())
