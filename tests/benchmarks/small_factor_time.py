"""Time to a 15-digit factor of a composite of 2047 bits: ours, python-flint and sympy.

    python -m tests.benchmarks.small_factor_time [--numbers 40] [--sympy-numbers 10]

First processor seconds of one core, medians. Ours: the whole search at standard effort up to the
moment it reports the factor. python-flint: fmpz.factor_smooth(50). sympy: its elliptic-curve method
for one factor, with the bounds of our level. Then wall seconds, where ours runs its curves on two
worker processes, as a review does; the competitors have one thread.
"""

import argparse
import statistics
import time
from collections.abc import Callable

import flint
from sympy.ntheory.ecm import _ecm_one_factor

from auditor.inquiry.pool import LocalPool
from auditor.search.factoring import Factor, search
from auditor.search.plan import LEVELS, Plan, plan_for
from tests.benchmarks.inputs import prime_of_digits, with_factor


class Reported(Exception):
    """The factor was reported."""


Clock = Callable[[], float]
Columns = dict[str, list[float]]


def ours(n: int, factor: int, plan: Plan, clock: Clock, pool: LocalPool | None = None) -> float:
    """Seconds up to the report; infinite when the search ends without it."""

    def stop(found: Factor) -> None:
        if found.prime == factor:
            raise Reported

    start = clock()
    try:
        search(n, plan, on_factor=stop, executor=pool, jobs=pool.jobs if pool else 1)
    except Reported:
        return clock() - start
    return float("inf")


def until_idle(pool: LocalPool) -> None:
    """Units that a find has overtaken run on for a moment, and belong to no later figure."""
    for pause in [pool.submit(time.sleep, 0.1) for _ in range(pool.jobs)]:
        pause.result()


def by_flint(n: int, factor: int) -> tuple[float, float]:
    """Processor and wall seconds."""
    begun, start = time.perf_counter(), time.process_time()
    found = flint.fmpz(n).factor_smooth(50)
    seconds, wall = time.process_time() - start, time.perf_counter() - begun
    if factor in [int(prime) for prime, _ in found]:
        return seconds, wall
    return float("inf"), float("inf")


def by_sympy(n: int, factor: int, seed: int) -> float:
    start = time.process_time()
    found = _ecm_one_factor(n, LEVELS[0].b1, LEVELS[0].b2, 100, seed=seed)
    seconds = time.process_time() - start
    return seconds if found == factor else float("inf")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--numbers", type=int, default=40)
    parser.add_argument("--sympy-numbers", type=int, default=10, help="sympy takes the first few")
    options = parser.parse_args()
    plan = plan_for("standard")
    processor: Columns = {"ours": [], "fmpz.factor_smooth": [], "sympy, one factor": []}
    wall: Columns = {"ours, two processes": [], "ours, one process": [], "fmpz.factor_smooth": []}
    with LocalPool(2) as pool:
        warm = prime_of_digits("warm", 15)
        for executor in (None, pool):  # tables that are made once per process
            ours(with_factor(warm, options.numbers, 2047), warm, plan, time.perf_counter, executor)
        for number in range(options.numbers):
            factor = prime_of_digits(f"planted {number}", 15)
            n = with_factor(factor, number, 2047)
            until_idle(pool)
            begun = time.perf_counter()
            processor["ours"].append(ours(n, factor, plan, time.process_time))
            spent = time.perf_counter() - begun
            wall["ours, one process"].append(max(spent, processor["ours"][-1]))
            wall["ours, two processes"].append(ours(n, factor, plan, time.perf_counter, pool))
            until_idle(pool)
            seconds, elapsed = by_flint(n, factor)
            processor["fmpz.factor_smooth"].append(seconds)
            wall["fmpz.factor_smooth"].append(elapsed)
            if number < options.sympy_numbers:
                processor["sympy, one factor"].append(by_sympy(n, factor, number))
            print(number, *(f"{column[-1]:.2f}" for column in processor.values()), flush=True)
    print("processor seconds")
    print_table(processor)
    print("wall seconds")
    print_table(wall)


def print_table(columns: Columns) -> None:
    """Medians against those of the first column on the same numbers."""
    first = next(iter(columns.values()))
    print("| | numbers | missed | median, s | median of the first on the same, s | ratio |")
    print("| -- | --: | --: | --: | --: | --: |")
    for name, column in columns.items():
        if column:
            mine, median = statistics.median(first[: len(column)]), statistics.median(column)
            print(
                f"| {name} | {len(column)} | {column.count(float('inf'))} | {median:.2f} "
                f"| {mine:.2f} | {median / mine:.1f} |"
            )


if __name__ == "__main__":
    main()
