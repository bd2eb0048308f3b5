"""Are planted factors found? 500 composites of 2048 bits with a prime factor of 40 bits each.

    python -m tests.benchmarks.planted_factors [--numbers 500] [--bits 40] [--processes 2]

Each search runs at standard effort up to the moment it reports the factor.
"""

import argparse
import multiprocessing
import statistics
import time
from collections import Counter
from concurrent.futures import ProcessPoolExecutor

from auditor.search.factoring import Factor, search
from auditor.search.plan import plan_for
from tests.benchmarks.inputs import prime, with_factor


class Reported(Exception):
    """The factor was reported."""


def look_for(bits: int, number: int) -> tuple[str, float]:
    """The method that found the planted factor (or nothing), and processor seconds."""
    planted = prime(f"planted {bits} {number}", bits)
    n = with_factor(planted, number, 2048 - bits)
    methods = []

    def stop(factor: Factor) -> None:
        if factor.prime == planted:
            methods.append(factor.method)
            raise Reported

    start = time.process_time()
    try:
        search(n, plan_for("standard"), on_factor=stop)
    except Reported:
        return methods[0], time.process_time() - start
    return "missed", time.process_time() - start


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--numbers", type=int, default=500)
    parser.add_argument("--bits", type=int, default=40)
    parser.add_argument("--processes", type=int, default=2)
    options = parser.parse_args()
    context = multiprocessing.get_context("spawn")
    with ProcessPoolExecutor(options.processes, mp_context=context) as pool:
        numbers = range(options.numbers)
        results = list(pool.map(look_for, [options.bits] * len(numbers), numbers, chunksize=5))
    methods = Counter(method for method, _ in results)
    found = options.numbers - methods["missed"]
    print(f"found {found} of {options.numbers} factors of {options.bits} bits: {dict(methods)}")
    print(f"median {statistics.median(seconds for _, seconds in results):.2f} s of one core")


if __name__ == "__main__":
    main()
