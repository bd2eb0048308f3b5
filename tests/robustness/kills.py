"""Reviews killed at random moments: the parent or a worker with SIGKILL, everything with SIGINT.

Each review goes on from the ledger that the killed one left. Every review that comes to its end
must write the report of an undisturbed one, byte for byte, and no worker may outlive its parent.
Run as ``python -m tests.robustness.kills [KILLS [SEED]]``; nothing but its own processes is killed.
"""

import os
import random
import signal
import subprocess
import sys
import tempfile
import time
from dataclasses import dataclass, field
from pathlib import Path

import gmpy2

RUN = "import sys; from auditor.cli import run; sys.exit(run())"
VICTIMS = ("parent", "worker", "everybody")
SETS = 10
BITS = 220
"""Long enough for curves at standard effort, short enough to run often."""


@dataclass(slots=True)
class Tally:
    """What happened: kills by victim, finished reviews, and what went wrong."""

    kills: dict[str, int] = field(default_factory=lambda: dict.fromkeys(VICTIMS, 0))
    finished: int = 0
    wrong: list[str] = field(default_factory=list)


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
        env={**os.environ, "PYTHONPATH": str(Path(__file__).parents[2])},
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


def _parent_of(entry: Path) -> int | None:
    try:
        return int((entry / "stat").read_text().rsplit(")", 1)[1].split()[1])
    except (OSError, IndexError):
        return None


def _is_worker(entry: Path) -> bool:
    try:
        return b"spawn_main" in (entry / "cmdline").read_bytes()
    except OSError:
        return False


def outlive(pids: list[int], seconds: float) -> list[int]:
    """Those of the processes that still run after so long."""
    end = time.monotonic() + seconds
    while time.monotonic() < end and any(_is_worker(Path(f"/proc/{pid}")) for pid in pids):
        time.sleep(0.1)
    return [pid for pid in pids if _is_worker(Path(f"/proc/{pid}"))]


def run_with_kills(folder: Path, kills: int, seed: int) -> Tally:
    """Kill reviews until there were so many kills, then let the last one finish."""
    (folder / "sets.yaml").write_text(declarations(seed))
    begun = time.monotonic()
    _finish(start(folder, "undisturbed.json", "--jobs", "1", "--no-ledger"))
    length = time.monotonic() - begun
    wanted = (folder / "undisturbed.json").read_bytes()
    rng, tally, report = random.Random(seed), Tally(), folder / "killed.json"
    ledger = 0
    while True:
        process = start(folder, "killed.json", "--jobs", "2", "--ledger", f"ledger-{ledger}")
        if sum(tally.kills.values()) < kills:
            _kill(process, rng.choice(VICTIMS), rng.uniform(0.2, 0.9) * length, tally)
        status, message = _finish(process)
        if status == 0:
            tally.finished += 1
            ledger += 1
            if report.read_bytes() != wanted:
                tally.wrong.append("the report differs")
            if sum(tally.kills.values()) >= kills:
                return tally
        elif status not in (130, -signal.SIGKILL):
            tally.wrong.append(f"it ended with {status}: {message}")
        elif status == 130 and "kept in ledger" not in message:
            tally.wrong.append(f"an interrupted review said: {message}")


def _kill(process: "subprocess.Popen[bytes]", victim: str, after: float, tally: Tally) -> None:
    try:
        process.wait(after)
        return
    except subprocess.TimeoutExpired:
        pass
    helpers = workers(process.pid)
    if victim == "worker" and not helpers:
        return
    tally.kills[victim] += 1
    match victim:
        case "parent":
            process.kill()
        case "worker":
            os.kill(helpers[0], signal.SIGKILL)
            return
        case _:
            os.killpg(process.pid, signal.SIGINT)
    process.wait(30)
    if left := outlive(helpers, 20):
        tally.wrong.append(f"{len(left)} workers outlive their parent")


def _finish(process: "subprocess.Popen[bytes]") -> tuple[int, str]:
    _, errors = process.communicate(timeout=300)
    return process.returncode, errors.decode().strip()


def main() -> int:
    """Say what happened; 1 if something went wrong."""
    numbers = [int(word) for word in sys.argv[1:]]
    kills, seed = (*numbers, *(20, 1)[len(numbers) :])[:2]
    with tempfile.TemporaryDirectory() as folder:
        tally = run_with_kills(Path(folder), kills, seed)
    print(f"kills: {tally.kills}; reviews that came to their end: {tally.finished}")
    for line in tally.wrong:
        print(line)
    return int(bool(tally.wrong))


if __name__ == "__main__":
    sys.exit(main())
