"""What was done to find factors: methods, bounds and counts, never seconds."""

from collections.abc import Iterable
from dataclasses import dataclass, replace

LARGEST = 2**63
"""Bounds and counts are below it."""

Run = tuple[str, tuple[tuple[str, int], ...]]
"""A method by name, and its numbers by name in alphabetical order."""


@dataclass(frozen=True, slots=True, order=True)
class Curves:
    """``count`` elliptic curves with the stage bounds ``b1`` and ``b2``."""

    b1: int
    b2: int
    count: int


@dataclass(frozen=True, slots=True)
class Work:
    """The extent of a search; zero where a method was not used.

    All primes up to ``trial_bound`` were divided out. ``p_minus_1`` and ``p_plus_1`` are stage
    bounds, the latter from ``p_plus_1_starts`` starting values. ``complete_digits``: no composite
    of at most so many digits is left. ``engines`` are the programs that ran the curves, sorted.
    """

    trial_bound: int = 0
    rho_iterations: int = 0
    fermat_steps: int = 0
    p_minus_1: tuple[int, int] = (0, 0)
    p_plus_1: tuple[int, int] = (0, 0)
    p_plus_1_starts: int = 0
    curves: tuple[Curves, ...] = ()
    complete_digits: int = 0
    engines: tuple[str, ...] = ()

    def count(self, b1: int, b2: int) -> int:
        """Curves run with these bounds."""
        return sum(done.count for done in self.curves if (done.b1, done.b2) == (b1, b2))

    def with_curves(self, b1: int, b2: int, count: int, engine: str) -> "Work":
        """The same with ``count`` curves in all at these bounds."""
        others = [done for done in self.curves if (done.b1, done.b2) != (b1, b2)]
        return replace(
            self,
            curves=tuple(sorted([*others, Curves(b1, b2, count)])),
            engines=tuple(sorted({*self.engines, engine})),
        )

    def runs(self) -> tuple[Run, ...]:
        """As a list of methods with their numbers, the form that records keep."""
        runs: list[Run] = []
        if self.trial_bound:
            runs.append(("trial division", (("bound", self.trial_bound),)))
        if self.complete_digits:
            runs.append(("complete factorization", (("digits", self.complete_digits),)))
        if self.fermat_steps:
            runs.append(("Fermat", (("steps", self.fermat_steps),)))
        if self.rho_iterations:
            runs.append(("rho", (("iterations", self.rho_iterations),)))
        if self.p_minus_1[0]:
            runs.append(("p-1", (("b1", self.p_minus_1[0]), ("b2", self.p_minus_1[1]))))
        if self.p_plus_1[0]:
            b1, b2 = self.p_plus_1
            runs.append(("p+1", (("b1", b1), ("b2", b2), ("starts", self.p_plus_1_starts))))
        runs.extend(
            ("elliptic curves", (("b1", done.b1), ("b2", done.b2), ("curves", done.count)))
            for done in self.curves
        )
        return tuple(runs)

    @classmethod
    def from_runs(cls, runs: Iterable[Run], engines: tuple[str, ...] = ()) -> "Work":
        """The inverse of :meth:`runs`; ValueError for a method or number it does not write."""
        work = cls(engines=engines)
        for method, pairs in runs:
            numbers = dict(pairs)
            _require_sane(method, numbers)
            try:
                work = work._with_run(method, numbers)
            except KeyError as missing:
                raise ValueError(f"a run of {method!r} without {missing}") from None
        return work

    def _with_run(self, method: str, numbers: dict[str, int]) -> "Work":
        match method:
            case "trial division":
                return replace(self, trial_bound=numbers["bound"])
            case "complete factorization":
                return replace(self, complete_digits=numbers["digits"])
            case "Fermat":
                return replace(self, fermat_steps=numbers["steps"])
            case "rho":
                return replace(self, rho_iterations=numbers["iterations"])
            case "p-1":
                return replace(self, p_minus_1=(numbers["b1"], numbers["b2"]))
            case "p+1":
                bounds = (numbers["b1"], numbers["b2"])
                return replace(self, p_plus_1=bounds, p_plus_1_starts=numbers["starts"])
            case "elliptic curves":
                done = Curves(numbers["b1"], numbers["b2"], numbers["curves"])
                return replace(self, curves=tuple(sorted([*self.curves, done])))
        raise ValueError(f"no such method: {method!r}")


def _require_sane(method: str, numbers: dict[str, int]) -> None:
    """Refuse what no search writes and what the success model could not bear."""
    if any(number >= LARGEST for number in numbers.values()):
        raise ValueError(f"a run of {method!r} beyond any search")
    if "b1" in numbers and not 2 <= numbers["b1"] <= numbers.get("b2", 0):
        raise ValueError(f"a run of {method!r} between no bounds")
