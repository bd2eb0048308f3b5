"""The search for prime factors: one plan, methods in a fixed order, the same answer every time.

Integers in, candidates out: every prime is a likely prime only and everything is checked again by
whoever uses it. Work is counted, curves are numbered, and units of curves are consumed in the order
of their numbers however many processes run them, so equal arguments give equal results.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field, replace
from functools import partial
from typing import Any

import flint

from auditor.search import lucas
from auditor.search.curves import BUILT_IN, Engine, Executor, Task, outcomes
from auditor.search.parts import Parts
from auditor.search.plan import Plan
from auditor.search.primality import is_likely_prime
from auditor.search.rho import fermat, rho
from auditor.search.trial import small_factors
from auditor.search.work import Work

__all__ = [
    "Factor",
    "SearchInterrupted",
    "SearchResult",
    "search",
    "split",
]


@dataclass(frozen=True, slots=True)
class Factor:
    """A likely prime factor with its exponent, and the method that found it."""

    prime: int
    exponent: int
    method: str


@dataclass(frozen=True, slots=True)
class SearchResult:
    """What a search found in ``m``: m = product of prime^exponent times ``rest``.

    ``factors`` are likely primes in increasing order. ``composites`` are the parts, coprime to
    each other, that are certainly composite and were not factored, with exponents. ``work`` is
    what was done; how likely it missed a factor is a statement about numbers that nobody chose
    against it (see :mod:`auditor.search.expected_curves`).
    """

    m: int
    factors: tuple[Factor, ...]
    composites: tuple[tuple[int, int], ...]
    work: Work

    @property
    def rest(self) -> int:
        """The product of the composite parts with their exponents; 1 when m is factored."""
        rest = 1
        for part, exponent in self.composites:
            rest *= part**exponent
        return rest

    @property
    def pairs(self) -> tuple[tuple[int, int], ...]:
        """(prime, exponent) in increasing order."""
        return tuple((factor.prime, factor.exponent) for factor in self.factors)

    @property
    def engine(self) -> str:
        """The programs that ran the elliptic curves."""
        return " and ".join(self.work.engines)


class SearchInterrupted(KeyboardInterrupt):
    """The search was interrupted; ``result`` is what it had by then."""

    def __init__(self, result: SearchResult) -> None:
        super().__init__("the search was interrupted")
        self.result = result


def search(
    m: int,
    plan: Plan,
    known: Iterable[int] = (),
    executor: Executor | None = None,
    *,
    jobs: int = 1,
    engine: Engine = BUILT_IN,
    done: Work | None = None,
    on_factor: Callable[[Factor], None] | None = None,
    progress: Callable[[Work], None] | None = None,
) -> SearchResult:
    """Searches ``m`` > 0 for prime factors as far as ``plan`` says.

    ``known``: divisors found or declared before; they are used where they divide. ``executor``
    runs units of curves (here when None), ``jobs`` of them at a time. ``engine`` runs the curves.
    ``done`` is the work of an earlier search in the same ``m``, whose factors are in ``known``: it
    is not done again. ``on_factor`` is told of each prime factor as it is found, ``progress`` of
    the work done so far. A worker process that dies costs time, not an answer. Raises ValueError
    for m < 1, and SearchInterrupted, which is a KeyboardInterrupt.
    """
    if m < 1:
        raise ValueError("only positive integers are factored")
    run = _Search(m, plan.for_length(m.bit_length()), done or Work(), on_factor, progress)
    try:
        run.divide(known, "known")
        run.easy_methods()
        run.curves(engine, executor, jobs)
    except KeyboardInterrupt:
        raise SearchInterrupted(run.result()) from None
    return run.result()


def split(n: int, plan: Plan, **options: Any) -> SearchResult:
    """:func:`search` for a composite modulus: each factor names the method that found it.

    The plan goes further with p-1 and tries Fermat's method, since whoever made the modulus may
    have chosen its factors to be found that way.
    """
    return search(n, plan.for_modulus(), **options)


@dataclass
class _Search:
    """The state of one search."""

    m: int
    plan: Plan
    work: Work
    on_factor: Callable[[Factor], None] | None
    progress: Callable[[Work], None] | None
    parts: Parts = field(init=False)
    methods: dict[int, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.parts = Parts(self.m)

    def result(self) -> SearchResult:
        factors = tuple(
            Factor(prime, exponent, self.methods.get(prime, "itself"))
            for prime, exponent in self.parts.primes()
        )
        return SearchResult(self.m, factors, self.parts.composites(), self.work)

    def divide(self, divisors: Iterable[int], method: str) -> None:
        """Splits the composite parts by the divisors."""
        primes = self.parts.divide(divisors)
        for prime, exponent in primes.items():
            self.methods[prime] = method
            if self.on_factor:
                self.on_factor(Factor(prime, exponent, method))

    def did(self, **counts: Any) -> None:
        self.work = replace(self.work, **counts)
        if self.progress:
            self.progress(self.work)

    def easy_methods(self) -> None:
        """Everything that runs once, each where it goes further than what was done before."""
        plan, work = self.plan, self.work
        self.divide(small_factors(self.parts.open, plan.trial_bound), "trial division")
        self.did(trial_bound=max(plan.trial_bound, work.trial_bound))
        self.complete()
        if plan.fermat_steps > work.fermat_steps:
            self.attempt(partial(fermat, steps=plan.fermat_steps), "Fermat")
            self.did(fermat_steps=plan.fermat_steps)
        if plan.rho_iterations > work.rho_iterations:
            self.attempt(partial(rho, iterations=plan.rho_iterations), "rho")
            self.did(rho_iterations=plan.rho_iterations)
        if plan.p_minus_1 > work.p_minus_1:
            b1, b2 = plan.p_minus_1
            self.attempt(partial(lucas.p_minus_1, b1=b1, b2=b2), "p-1")
            self.did(p_minus_1=plan.p_minus_1)
        b1, b2 = plan.p_plus_1
        for start in self._starts_left():
            self.attempt(partial(lucas.p_plus_1, b1=b1, b2=b2, start=start), "p+1")
            self.did(p_plus_1=plan.p_plus_1, p_plus_1_starts=start + 1)

    def _starts_left(self) -> range:
        """The starting values of p+1 that were not used before with these bounds or larger ones."""
        plan, work = self.plan, self.work
        if plan.p_plus_1 < work.p_plus_1:
            return range(0)
        first = work.p_plus_1_starts if plan.p_plus_1 == work.p_plus_1 else 0
        return range(first, plan.p_plus_1_starts)

    def attempt(self, method: Callable[[int], Sequence[int]], name: str) -> None:
        """Uses a method, which finds all within its reach in one pass: once on the whole, then on
        the pieces that it found, which may hold several primes each."""
        waiting = [self.parts.open]
        while waiting:
            number = waiting.pop()
            pieces = [d for d in method(number) if 1 < d < number] if number > 1 else []
            self.divide(pieces, name)
            waiting += [piece for piece in pieces if not is_likely_prime(piece)]
        self.complete()

    def found(self, divisor: int, method: str) -> bool:
        """Takes up a divisor of the open part; whether it was a proper one."""
        if not 1 < divisor < self.parts.open:
            return False
        self.divide([divisor], method)
        self.complete()
        return True

    def complete(self) -> None:
        """Factors small composite parts completely, by FLINT (trial, elliptic curves, sieve)."""
        limit = 10**self.plan.complete_digits
        for part, _ in self.parts.composites():
            if part < limit:
                self.divide((int(p) for p, _ in flint.fmpz(part).factor()), "quadratic sieve")
        if self.plan.complete_digits > self.work.complete_digits:
            self.did(complete_digits=self.plan.complete_digits)

    def curves(self, engine: Engine, executor: Executor | None, jobs: int) -> None:
        """Runs each level's curves that were not run before."""
        for level in self.plan.levels:
            count = self.work.count(level.b1, level.b2)
            while self.parts.open > 1 and count < level.curves:
                task = Task(self.m, self.parts.open, level.b1, level.b2, count, level.curves)
                for outcome in outcomes(task, engine, executor, jobs):
                    # Taken up first: a curve whose find was lost must not count as run.
                    found = self.found(outcome.divisor, "elliptic curves")
                    count = outcome.next
                    self.work = self.work.with_curves(level.b1, level.b2, count, outcome.engine)
                    if found:
                        break
                    self.did()
