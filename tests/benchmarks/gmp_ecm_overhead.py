"""What driving GMP-ECM costs: our search with it as the engine, against the bare command.

    python -m tests.benchmarks.gmp_ecm_overhead [--curves 40]

Processor seconds, those of child processes included, in turn, on the same number of curves with
the same bounds, the least of three runs each.
The bare command draws its own curves (ecm -param 0 -c N), since it cannot be told several.
"""

import argparse
import os
import subprocess

from auditor.search import gmp_ecm
from auditor.search.factoring import search
from auditor.search.plan import LEVELS, EcmLevel, Plan
from tests.benchmarks.inputs import composite


def spent() -> float:
    """Processor seconds of this process and of its children that have ended."""
    return sum(os.times()[:4])


def ours(n: int, level: EcmLevel, engine: gmp_ecm.GmpEcm) -> float:
    start = spent()
    result = search(n, Plan(trial_bound=1000, complete_digits=20, levels=(level,)), engine=engine)
    seconds = spent() - start
    assert result.work.count(level.b1, level.b2) == level.curves
    assert result.engine == engine.name
    return seconds


def bare(n: int, level: EcmLevel, engine: gmp_ecm.GmpEcm) -> float:
    command = [engine.path, "-q", "-param", "0", "-c", str(level.curves)]
    start = spent()
    subprocess.run(
        [*command, str(level.b1), str(level.b2)],
        input=f"{n}\n", text=True, capture_output=True, check=True,
    )  # fmt: skip
    return spent() - start


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--curves", type=int, default=40)
    options = parser.parse_args()
    engine = gmp_ecm.installed()
    if engine is None:
        raise SystemExit("GMP-ECM is not installed (Debian package gmp-ecm)")
    print("| B1 | B2 | curves | ours, s | bare command, s | ratio |")
    print("| --: | --: | --: | --: | --: | --: |")
    for number, level in enumerate(LEVELS[:3]):
        level = EcmLevel(level.digits, level.b1, level.b2, max(4, options.curves >> number))
        n = composite(number)
        rounds = [(ours(n, level, engine), bare(n, level, engine)) for _ in range(3)]
        mine, theirs = (min(column) for column in zip(*rounds, strict=True))
        print(
            f"| {level.b1:,} | {level.b2:,} | {level.curves} | {mine:.2f} | {theirs:.2f} "
            f"| {mine / theirs:.2f} |",
            flush=True,
        )


if __name__ == "__main__":
    main()
