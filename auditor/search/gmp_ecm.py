"""The program ``ecm`` (GMP-ECM) as the engine of elliptic curves, where it is installed.

One process runs many curves: the program is asked to resume each from a residue saved at B1 = 1,
which is the starting point itself. They are the curves of the built-in engine, told by Suyama's
parameter (``-param 0``), from the same points and to the same bounds; the program's second stage
reaches a little further. Its output is read back strictly, and a divisor counts only if it divides.

The program ends with the process that started it: it is killed when the search is interrupted, and
where util-linux provides ``setpriv`` the kernel kills it when that process is killed. Elsewhere an
orphan runs to the end of its unit: about a second up to B1 = 40,000, one curve above that.
"""

import re
import shutil
import subprocess
from dataclasses import dataclass

import gmpy2
from gmpy2 import mpz

from auditor.search.curves import EngineFailed, Outcome, Task
from auditor.search.divisor import Divisor, inverses
from auditor.search.ecm import parameter, suyama

PROGRAM = "ecm"
LEASH = ("setpriv", "--pdeathsig", "KILL")
"""Starts a program that the kernel kills when the one who started it dies (Linux)."""
MOST_KILLS = 3
"""So often a unit whose program was killed is run again before the engine is given up."""
_GREETING = re.compile(r"GMP-ECM (\d[\w.+-]*)")
_STARTED_OR_FOUND = re.compile(r"sigma=0:(\d+)|Factor found in step \d+: (\d+)")
_ERROR = 1


@dataclass(frozen=True, slots=True)
class GmpEcm:
    """The program at ``path``; ``version`` as it states it; ``leash`` is what it is started by."""

    path: str
    version: str
    leash: tuple[str, ...] = ()

    @property
    def name(self) -> str:
        """The program and its version."""
        return f"GMP-ECM {self.version}"

    def unit(self, b1: int) -> int:
        """About a second at 2048 bits, so that starting the program does not count."""
        return max(1, 40_000 // b1)

    def run(self, task: Task) -> Outcome:
        """Runs the task's curves in order, up to the first that finds a divisor above 1.

        The outcome names the version that ran, which may be another one on another machine. Raises
        EngineFailed when the program does not do that, says what cannot be, or is killed again and
        again.
        """
        for _ in range(MOST_KILLS):
            try:
                return self._run_once(task)
            except _Killed:
                continue
        return self._run_once(task)

    def _run_once(self, task: Task) -> Outcome:
        modulus = mpz(task.modulus)
        drawn = (parameter(task.number, task.b1, index) for index in range(task.first, task.end))
        try:
            curves = [_Start.of(modulus, k) for k in drawn]
        except Divisor:
            raise EngineFailed("a curve that the program cannot take over") from None
        output = self._output(task, "".join(curve.line for curve in curves))
        greeting = _GREETING.match(output)
        if greeting is None:
            raise EngineFailed(f"{self.path} is not GMP-ECM")
        started, divisor = _read(output, [curve.sigma for curve in curves])
        if divisor is None and started < len(curves):
            raise EngineFailed(f"{self.name} ran {started} of {len(curves)} curves")
        if divisor is not None and (divisor < 2 or modulus % divisor):
            raise EngineFailed(f"{self.name} printed a divisor that does not divide")
        return Outcome(task.first + started, divisor or 1, f"GMP-ECM {greeting.group(1)}")

    def _output(self, task: Task, lines: str) -> str:
        command = [*self.leash, self.path, "-one", "-resume", "-", str(task.b1), str(task.b2)]
        try:
            with subprocess.Popen(
                command,
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=subprocess.PIPE,
                text=True,
            ) as process:
                try:
                    output, errors = process.communicate(lines)
                finally:
                    process.kill()
        except OSError as error:
            raise EngineFailed(f"{self.name} does not start: {error.strerror}") from None
        if process.returncode < 0:
            raise _Killed(f"{self.name} was killed by signal {-process.returncode}")
        if process.returncode & _ERROR:
            raise EngineFailed(f"{self.name} ended with {process.returncode}: {errors.strip()}")
        return output


class _Killed(EngineFailed):
    """Somebody killed the program, which says nothing about what it does next time."""


def installed() -> GmpEcm | None:
    """The engine, if a program called ``ecm`` is on the path and is GMP-ECM."""
    path = shutil.which(PROGRAM)
    if path is None:
        return None
    for leash in (LEASH, ()):
        greeting = _GREETING.match(_printed([*leash, path, "2"]))
        if greeting is not None:
            return GmpEcm(path, greeting.group(1), leash)
    return None


def _printed(command: list[str]) -> str:
    """What a command prints; nothing where it does not run."""
    try:
        result = subprocess.run(
            command, input="", capture_output=True, text=True, timeout=10, check=False
        )
    except (OSError, subprocess.SubprocessError, UnicodeDecodeError):
        return ""
    return result.stdout


@dataclass(frozen=True, slots=True)
class _Start:
    """A curve and the point to start from, as the line of a save file that says so."""

    sigma: mpz
    line: str

    @classmethod
    def of(cls, n: mpz, k: int) -> "_Start":
        """The curve of parameter ``k`` with the point that the built-in engine starts from:
        u^3/v^3, where u = sigma^2 - 5 and v = 4 sigma (README of GMP-ECM, sections 6 and 7)."""
        sigma, _ = suyama(n, k)
        [inverse] = inverses([4 * sigma % n], n)
        x = gmpy2.powmod((sigma * sigma - 5) * inverse, 3, n)
        saved = f"SIGMA={sigma.digits()}; B1=1; N={n.digits()}; X=0x{x.digits(16)};"
        return cls(sigma, f"METHOD=ECM; PARAM=0; {saved}\n")


def _read(output: str, sigmas: list[mpz]) -> tuple[int, int | None]:
    """How many curves were started, and the divisor that the last one found."""
    started = 0
    for match in _STARTED_OR_FOUND.finditer(output):
        sigma, divisor = match.groups()
        if divisor is not None:
            return started, int(mpz(divisor))
        if started == len(sigmas) or mpz(sigma) != sigmas[started]:
            raise EngineFailed("the program ran another curve than it was told to")
        started += 1
    return started, None
