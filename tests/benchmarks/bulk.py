"""Many sets in one review: time and memory per set, and the price of primality.

``python -m tests.benchmarks.bulk sets 1000 10000`` reviews so many small sets over few moduli, each
count in a process of its own; ``distinct`` in place of ``sets`` gives each set a modulus of its
own. ``python -m tests.benchmarks.bulk documents 10000`` writes the page and the JSON report of so
many sets over 16 moduli, no two of them alike. ``python -m tests.benchmarks.bulk primes MODULI
[COUNT [BITS]]`` compares a review of safe primes from a file in OpenSSH's moduli(5) format, cold
and with a warm ledger, with nothing but the same primality rounds on the same number of processes.
"""

import os
import random
import resource
import secrets
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import replace
from multiprocessing import get_context
from pathlib import Path
from unittest.mock import patch

import gmpy2

from auditor.claims.primality_tests import is_probable_prime
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.facts import vocabulary
from auditor.inquiry.answers import Cores
from auditor.inquiry.pool import LocalPool
from auditor.outputs import write_text, written
from auditor.report import html
from auditor.report.record import Reading, build
from auditor.report.view import view
from auditor.review import Surroundings, census, investigate
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.run_values import RunValues

POOL, BITS = 16, 256
"""Distinct moduli of the small sets, and their length."""

WIDTHS = (160, 224, 225, 256)


def small_sets(
    count: int, widths: Sequence[int] = range(128, 256), pool: int = POOL
) -> list[Declaration]:
    """Sets over so many moduli; generators and widths differ, as in a tree of configurations."""
    rng = random.Random(1)
    primes = [int(gmpy2.next_prime(rng.getrandbits(BITS) | 1 << (BITS - 1))) for _ in range(pool)]
    return [
        Declaration(
            f"set {place}",
            Place("invented.yaml", place + 1),
            primes[place % pool],
            2 + place // pool % 4,
            purpose="key-agreement",
            parties=(Party(EVERYBODY, rng.choice(widths), "static", ("range",)),),
        )
        for place in range(count)
    ]


def unlike_sets(count: int) -> list[Declaration]:
    """Sets over so few moduli of which no two have modulus, generator and width in common."""
    each = 5 * POOL
    sets = [
        replace(
            item,
            generator=2 + place // POOL % 5,
            parties=(replace(item.parties[0], exponent_bits=BITS // 2 + place // each),),
        )
        for place, item in enumerate(small_sets(count))
    ]
    assert len({item.digest() for item in sets}) == count
    return sets


def time_documents(count: int) -> None:
    """Print what the page and the JSON report of so many unlike sets take, and the sizes."""
    books = load_all(DEFAULT_BOOKS, vocabulary())
    sets = unlike_sets(count)
    run = replace(RunValues("2026-12-01", "quick"), census=census(sets))
    claims, _ = investigate(sets, run, books, Surroundings(secrets.randbelow))
    record = build(Reading(tuple(sets)), claims, run, books, "conditions")
    before = peak_mib()
    with tempfile.TemporaryDirectory() as name:
        page, text = Path(name, "r.html"), Path(name, "r.json")
        begun = time.process_time()
        with written(str(text)) as put:
            shown = view(record, put)
        middle = time.process_time()
        write_text(str(page), html.render(shown))
        print(
            f"{count:,} sets, {len(shown.sheets):,} of them different: view and JSON of "
            f"{text.stat().st_size / 1e6:.0f} MB {middle - begun:.1f} s, page of "
            f"{page.stat().st_size / 1e6:.0f} MB {time.process_time() - middle:.1f} s; peak "
            f"{peak_mib():.0f} MiB, {before:.0f} MiB of it before"
        )


def peak_mib() -> float:
    """The largest resident size so far."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def time_sets(count: int, pool: int) -> None:
    """Print one row of the table."""
    books = load_all(DEFAULT_BOOKS, vocabulary())
    sets = small_sets(count, pool=pool)
    run = replace(RunValues("2026-12-01", "quick"), census=census(sets))
    before, begun = peak_mib(), time.process_time()
    claims, _ = investigate(sets, run, books, Surroundings(secrets.randbelow))
    settled, middle = time.process_time() - begun, peak_mib()
    record = build(Reading(tuple(sets)), claims, run, books, "conditions")
    built = time.process_time() - begun - settled
    assert len(record["parameter_sets"]) == count
    print(
        f"| {count:,} | {settled:.1f} s | {1000 * settled / count:.1f} ms | {built:.1f} s "
        f"| {1000 * built / count:.1f} ms | {1024 * (middle - before) / count:.1f} KiB "
        f"| {1024 * (peak_mib() - before) / count:.1f} KiB |"
    )


def moduli(path: Path, count: int, bits: int) -> list[int]:
    """The first so many moduli of that length in a moduli(5) file."""
    found = []
    for line in path.read_text().splitlines():
        words = line.split()
        if len(words) == 7 and not line.startswith("#") and int(words[4]) + 1 == bits:
            found.append(int(words[6], 16))
    return found[:count]


def rounds_of(q: int) -> bool:
    """The primality rounds that a safe prime 2q + 1 cannot do without."""
    return is_probable_prime(q, 64, secrets.randbelow)


def time_primes(path: Path, count: int, bits: int) -> None:
    """Print the rounds alone, a cold review and a warm one, each on all cores."""
    primes, jobs = moduli(path, count, bits), os.cpu_count() or 1
    sets = [Declaration(f"set {n}", Place("moduli", 1), p, 2) for n, p in enumerate(primes)]
    books = load_all(DEFAULT_BOOKS, vocabulary())
    run = replace(RunValues("2026-12-01", "standard"), census=census(sets))

    def reviewed(ledger: Path) -> float:
        # The search for special forms, a deep question, is left out: it is no primality round.
        with LocalPool(jobs) as pool, patch("auditor.review.in_use", lambda *known: []):
            begun = time.perf_counter()
            surroundings = Surroundings(secrets.randbelow, ledger=ledger, cores=Cores(pool, jobs))
            investigate(sets, run, books, surroundings)
            return time.perf_counter() - begun

    with ProcessPoolExecutor(jobs, mp_context=get_context("spawn")) as executor:
        begun = time.perf_counter()
        assert all(executor.map(rounds_of, [p // 2 for p in primes]))
        bare = time.perf_counter() - begun
    with tempfile.TemporaryDirectory() as folder:
        cold = reviewed(Path(folder) / "ledger")
        warm = reviewed(Path(folder) / "ledger")
    print(
        f"{len(primes)} safe primes of {bits} bits, {jobs} processes: rounds alone {bare:.2f} s, "
        f"cold {cold:.2f} s ({cold / bare:.2f}x), warm {warm:.2f} s ({warm / bare:.2f}x)"
    )


def main(words: list[str]) -> None:
    """Run what the words ask for."""
    if words[0] == "primes":
        numbers = [int(word) for word in words[2:]]
        count, bits = (*numbers, *(24, 2048)[len(numbers) :])
        time_primes(Path(words[1]), count, bits)
    elif words[0] == "documents":
        time_documents(int(words[1]))
    elif len(words) == 2:
        count = int(words[1])
        time_sets(count, POOL if words[0] == "sets" else count)
    else:
        print(
            "| sets | settle, core time | each | record | each | memory, settled | memory, record |"
        )
        print("| --- | --- | --- | --- | --- | --- | --- |", flush=True)
        for word in words[1:]:
            subprocess.run(
                [sys.executable, "-m", "tests.benchmarks.bulk", words[0], word], check=True
            )


if __name__ == "__main__":
    main(sys.argv[1:])
