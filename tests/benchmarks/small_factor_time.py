"""Time to a 15-digit factor of a composite of 2047 bits: ours, python-flint and sympy.

    python -m tests.benchmarks.small_factor_time [--numbers 40] [--sympy-numbers 10]

Processor seconds of one core, medians. Ours: the whole search at standard effort up to the moment
it reports the factor. python-flint: fmpz.factor_smooth(50). sympy: its elliptic-curve method for
one factor, with the bounds of our level.
"""

import argparse
import statistics
import time

import flint
from sympy.ntheory.ecm import _ecm_one_factor

from auditor.search.factoring import Factor, search
from auditor.search.plan import LEVELS, Plan, plan_for
from tests.benchmarks.inputs import prime_of_digits, with_factor


class Reported(Exception):
    """The factor was reported."""


def ours(n: int, factor: int, plan: Plan) -> float:
    def stop(found: Factor) -> None:
        if found.prime == factor:
            raise Reported

    start = time.process_time()
    try:
        search(n, plan, on_factor=stop)
    except Reported:
        return time.process_time() - start
    return float("inf")


def by_flint(n: int, factor: int) -> float:
    start = time.process_time()
    found = flint.fmpz(n).factor_smooth(50)
    seconds = time.process_time() - start
    return seconds if factor in [int(prime) for prime, _ in found] else float("inf")


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
    search(with_factor(3, 0, 128), plan)  # tables that are made once per process
    times: dict[str, list[float]] = {"ours": [], "flint": [], "sympy": []}
    for number in range(options.numbers):
        factor = prime_of_digits(f"planted {number}", 15)
        n = with_factor(factor, number, 2047)
        times["ours"].append(ours(n, factor, plan))
        times["flint"].append(by_flint(n, factor))
        if number < options.sympy_numbers:
            times["sympy"].append(by_sympy(n, factor, number))
        print(number, *(f"{column[-1]:.2f}" for column in times.values()), flush=True)
    print("| | numbers | missed | median, s | median of ours on the same, s | ratio |")
    print("| -- | --: | --: | --: | --: | --: |")
    for name, column in times.items():
        mine = statistics.median(times["ours"][: len(column)])
        median = statistics.median(column)
        print(
            f"| {name} | {len(column)} | {column.count(float('inf'))} | {median:.2f} "
            f"| {mine:.2f} | {median / mine:.1f} |"
        )


if __name__ == "__main__":
    main()
