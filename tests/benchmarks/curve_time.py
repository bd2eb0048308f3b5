"""Time of one elliptic curve, ours against GMP-ECM, on the same numbers and bounds in one run.

    python -m tests.benchmarks.curve_time [--composites 20] [--b1 3000 --b1 11000 --b1 50000]

Processor seconds of one core. GMP-ECM runs twice: with Suyama's curves as ours (-param 0), which
find factors as the model says, and with its own choice (-param 1), faster but less lucky.
"""

import argparse
import resource
import statistics
import subprocess
import time

from auditor.search.ecm import parameter, run_curve
from auditor.search.edwards import chains
from auditor.search.plan import LEVELS
from tests.benchmarks.inputs import composite


def ours(n: int, b1: int, b2: int, k: int) -> float:
    start = time.process_time()
    assert run_curve(n, b1, b2, k) == 1
    return time.process_time() - start


def theirs(n: int, b1: int, b2: int, k: int, param: int) -> float:
    command = ["ecm", "-param", str(param), "-sigma", str(k), str(b1), str(b2)]
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    subprocess.run(command, input=f"{n}\n", capture_output=True, text=True, check=True)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--composites", type=int, default=20)
    parser.add_argument("--b1", type=int, action="append")
    options = parser.parse_args()
    print("| B1 | B2 | ours, ms | GMP-ECM -param 0 | -param 1 | ratio | ratio |")
    print("| --: | --: | --: | --: | --: | --: | --: |")
    for b1, b2 in [(level.b1, level.b2) for level in LEVELS]:
        if b1 not in (options.b1 or (3_000, 11_000, 50_000)):
            continue
        chains(b1)  # once per process and level, as in a search
        rows = []
        for number in range(options.composites):
            n = composite(number)
            k = parameter(n, b1, 0) % 2**31
            rows.append((ours(n, b1, b2, k), theirs(n, b1, b2, k, 0), theirs(n, b1, b2, k, 1)))
        mine, suyama, default = (
            1000 * statistics.median(column) for column in zip(*rows, strict=True)
        )
        print(
            f"| {b1:,} | {b2:,} | {mine:.0f} | {suyama:.0f} | {default:.0f} "
            f"| {mine / suyama:.2f} | {mine / default:.2f} |",
            flush=True,
        )


if __name__ == "__main__":
    main()
