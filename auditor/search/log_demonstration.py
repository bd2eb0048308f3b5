"""Routes carried out on an exponent that the program has drawn: what was promised, what it took.

The caller draws the exponent and hands it over; only the public value made from it is used to
recover it. Each run states beforehand the work that the published formula promises, in group
operations, and refuses to start when that exceeds the budget.
"""

from collections import Counter
from collections.abc import Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from itertools import accumulate
from math import isqrt, log2, prod
from operator import mul

from gmpy2 import powmod

from auditor.search.log_confinement import Check, Victim, confine
from auditor.search.log_result import Logarithm, OutOfBudget, Tally
from auditor.search.logarithm import Factors, finish_by_kangaroo, pohlig_hellman, short_exponent

BUDGET = 2**32
"""Group operations a demonstration may take unless said otherwise: an hour or two at 2048 bits."""


@dataclass(frozen=True, slots=True)
class Demonstration:
    """One exponent drawn, what was recovered of it, and the work in group operations.

    ``queries`` are questions to the victim, of which it ``refused`` some.
    """

    route: str
    drawn: int
    recovered: Logarithm
    promised: int
    queries: int = 0
    refused: int = 0

    @property
    def agrees(self) -> bool:
        """What was recovered is the drawn exponent, modulo what the route promises."""
        difference = self.drawn - self.recovered.value
        modulus = self.recovered.modulus
        return difference % modulus == 0 if modulus else difference == 0

    @property
    def excess(self) -> float | None:
        """Work done, as a multiple of the work promised; None when nothing was promised."""
        return self.recovered.operations / self.promised if self.promised else None


def run_pohlig_hellman(
    n: int,
    g: int,
    order_factors: Factors,
    x_drawn: int,
    *,
    seed: int = 0,
    executor: Executor | None = None,
    budget: int = BUDGET,
) -> Demonstration:
    """Recover x modulo ord(g) from g^x by Pohlig-Hellman; ``order_factors`` make up the order.

    Promised: sum of e (lg ord(g) + sqrt(pi q / 2)) over the prime powers q^e.
    """
    length = prod(q**e for q, e in order_factors).bit_length()
    promised = sum(e * (length + _square_root(q)) for q, e in order_factors)
    tally = _within(promised, budget)
    public = int(powmod(g, x_drawn, n))
    found = pohlig_hellman(n, g, public, order_factors, seed=seed, executor=executor, tally=tally)
    return Demonstration("pohlig-hellman", x_drawn, found, promised)


def run_short_exponent(
    n: int,
    g: int,
    order_factors: Factors,
    width: int,
    x_drawn: int,
    *,
    rest: int = 1,
    seed: int = 0,
    executor: Executor | None = None,
    budget: int = BUDGET,
) -> Demonstration:
    """Recover an x below 2^``width`` from g^x: the smallest primes of ord(g), then a kangaroo.

    ``rest`` is the part of ord(g), or of a multiple of it, whose factors are not given. Promised:
    the least over prefixes of the ascending primes of sum sqrt(pi q / 2) + 2 sqrt(2^width / z).
    """
    primes = [q for q, e in sorted(order_factors) for _ in range(e)]
    if not 0 <= x_drawn < 2**width <= rest * prod(primes):
        raise ValueError("the exponent must be below 2^width, and that within the group's order")
    used, promised = _best_prefix(primes, [_square_root(q) for q in primes], 2**width)
    tally = _within(promised, budget)
    public = int(powmod(g, x_drawn, n))
    chosen = sorted(Counter(primes[:used]).items())
    remaining = rest * prod(primes[used:])
    found = short_exponent(
        n, g, public, chosen, width, rest=remaining, seed=seed, executor=executor, tally=tally
    )
    return Demonstration("short exponent", x_drawn, found, promised)


def run_confinement(
    n: int,
    g: int,
    q: int,
    cofactor_factors: Factors,
    width: int,
    checks: frozenset[Check],
    x_drawn: int,
    *,
    seed: int = 0,
    budget: int = BUDGET,
) -> Demonstration:
    """Recover a reused x below 2^``width`` and q: confinement in small subgroups, then a kangaroo.

    g has prime order q modulo the prime n; ``cofactor_factors`` are prime powers of (n - 1)/q.
    Promised: the least over prefixes of the ascending r^e of sum r^e/2 + 2 sqrt(2^width / z);
    under a check of membership or by cofactor the prefix is empty, and no question is asked.
    """
    bound = min(2**width, q)
    if not 0 <= x_drawn < bound:
        raise ValueError("the exponent must be below 2^width and below the order of the base")
    usable = _usable(cofactor_factors, checks)
    sizes = [r**e for r, e in usable]
    used, promised = _best_prefix(sizes, [size // 2 for size in sizes], bound)
    tally = _within(promised, budget)
    victim = Victim(n, g, q, x_drawn, checks)
    shown = confine(n, g, victim.public, usable[:used], victim.answer, tally=tally)
    found = finish_by_kangaroo(
        n, g, victim.public, shown.logarithm, bound, order=q, seed=seed, tally=tally
    )
    return Demonstration("confinement", x_drawn, found, promised, shown.queries, shown.refused)


def run_confinement_leak(
    n: int,
    g: int,
    q: int,
    cofactor_factors: Factors,
    checks: frozenset[Check],
    x_drawn: int,
    *,
    budget: int = BUDGET,
) -> Demonstration:
    """What questions alone reveal of a reused x: its residue modulo the usable prime powers.

    As run_confinement, without the search for the rest. All ``cofactor_factors`` are probed, so
    that a victim with an effective check is seen to reveal nothing (modulus 1).
    Promised: sum of r^e/2 over those usable.
    """
    promised = sum(r**e for r, e in _usable(cofactor_factors, checks)) // 2
    tally = _within(promised, budget)
    victim = Victim(n, g, q, x_drawn, checks)
    shown = confine(n, g, victim.public, cofactor_factors, victim.answer, tally=tally)
    return Demonstration(
        "confinement leak", x_drawn, shown.logarithm, promised, shown.queries, shown.refused
    )


def _usable(factors: Factors, checks: frozenset[Check]) -> list[tuple[int, int]]:
    """The prime powers that the checks leave to an attacker, ascending by size."""
    if checks & {"membership", "cofactor"}:
        return []
    return sorted(factors, key=lambda factor: factor[0] ** factor[1])


def _square_root(q: int) -> int:
    """sqrt(pi q / 2) for any size of q, with 11/7 for pi/2."""
    return isqrt(11 * q // 7)


def _best_prefix(sizes: Sequence[int], costs: Sequence[int], bound: int) -> tuple[int, int]:
    """How many of the ascending sizes to use, and the least total work with a kangaroo after.

    A prefix is optimal: each further factor costs more than the one before.
    """
    spent = [0, *accumulate(costs)]
    known = [1, *accumulate(sizes, mul)]
    totals = [
        cost + (2 * isqrt(bound // z) if z < bound else 0)
        for cost, z in zip(spent, known, strict=True)
    ]
    used = min(range(len(totals)), key=lambda index: (totals[index], index))
    return used, totals[used]


def _within(promised: int, budget: int) -> Tally:
    """A tally with that budget; OutOfBudget when even the promise exceeds it."""
    if promised > budget:
        raise OutOfBudget(f"the route promises about 2^{log2(promised):.1f} operations", 0)
    return Tally(budget)
