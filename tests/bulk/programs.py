"""Programs called ``ecm`` in a directory of their own: real or not, known by their path.

``lives`` and ``running`` look at the processes of this machine (Linux, /proc).
"""

import json
import os
import shlex
import sys
import time
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from auditor.search import gmp_ecm
from auditor.search.gmp_ecm import GmpEcm

STAND_IN = Path(__file__).parents[1] / "search" / "ecm_stand_in.py"
INSTALLED = gmp_ecm.installed()
_WAIT = "import pathlib, sys, time; pathlib.Path(sys.argv[1]).touch(); time.sleep(600)"
"""Said by the one who waits: while a process turns into another, /proc shows no command line."""


def stand_in(directory: Path, numbers: Iterable[int] = (), **behaviour: Any) -> GmpEcm:
    """A program that runs the curves drawn for these numbers by our own code, or does as told."""
    words = {"works": list(map(hex, numbers)), "mark": str(directory), **behaviour}
    return _script(directory, shlex.join([sys.executable, str(STAND_IN), json.dumps(words)]))


def held_at(directory: Path, b1: int, number: int) -> GmpEcm:
    """A program that works for a number and notes its first bounds in ``ran``; it waits at ``b1``
    for as long as there is a file ``hold``, and ``reached`` says so."""
    engine = stand_in(directory, [number])
    if INSTALLED is not None:
        (directory / "ecm-itself").symlink_to(INSTALLED.path)
        work = f'exec {shlex.quote(str(directory / "ecm-itself"))} "$@"'
    else:
        work = Path(engine.path).read_text(encoding="utf-8").splitlines()[-1]
    hold, ran = (shlex.quote(str(directory / name)) for name in ("hold", "ran"))
    wait = shlex.join([sys.executable, "-c", _WAIT, str(directory / "reached")])
    return _script(
        directory,
        f'[ $# -gt 1 ] && echo "$4" >> {ran}',
        f'if [ -e {hold} ] && [ "$4" = {b1} ]; then exec {wait}; fi',
        work,
    )


def _script(directory: Path, *lines: str) -> GmpEcm:
    path = directory / "ecm"
    work = lines[-1] if lines[-1].startswith("exec") else f'exec {lines[-1]} "$@"'
    path.write_text("\n".join(["#!/bin/sh", *lines[:-1], work, ""]), encoding="utf-8")
    path.chmod(0o755)
    return GmpEcm(str(path), "9.9", gmp_ecm.LEASH)


def running(mark: str | Path) -> list[int]:
    """Processes with the mark in their command line, but this one."""
    found = []
    for entry in Path("/proc").iterdir():
        if entry.name.isdigit() and int(entry.name) != os.getpid():
            try:
                command = (entry / "cmdline").read_bytes()
            except OSError:
                continue
            if str(mark).encode() in command:
                found.append(int(entry.name))
    return sorted(found)


def still_running(mark: str | Path, seconds: float = 10) -> list[int]:
    """Those that still run after so long."""
    end = time.monotonic() + seconds
    while (left := running(mark)) and time.monotonic() < end:
        time.sleep(0.05)
    return left
