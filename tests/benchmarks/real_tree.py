"""A tree of real things in one review, against nothing but the primality rounds in it.

``python -m tests.benchmarks.real_tree`` downloads Debian's package openssh-server with ``apt-get``,
takes its file of primes, puts beside it the files of cryptography-vectors and a dozen invented
configuration files, and counts by other readers what there is (:mod:`tests.standards.real_tree`).
All of it is reviewed at quick effort, every tenth of the primes at standard effort, each cold and
with a warm ledger. The competitor is the same rounds of the same primality tests, and the same
searches for special forms where the review made any, spread over as many processes.

``--groups N --longest BITS`` takes a part of the primes, evenly spread, ``--every N`` another part
of these at standard effort, ``--primes-only`` leaves the other files out; ``--moduli FILE`` reads
another file of primes; ``--jobs N`` uses fewer cores; ``--sets 1000 10000`` goes on with the memory
of so many small sets. A full run takes about half an hour on two cores.
"""

import argparse
import os
import resource
import secrets
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterable
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from multiprocessing import get_context
from pathlib import Path
from typing import Any

from auditor.claims.primality_tests import is_probable_prime
from auditor.inquiry.answers import Cores
from auditor.inquiry.pool import LocalPool
from auditor.report import html, markdown, sarif
from auditor.report.shared_findings import Lines, shared_findings
from auditor.report.view import view
from auditor.review import Surroundings, review
from auditor.run_values import Effort, RunValues
from auditor.search import special_form
from tests.benchmarks.bulk import peak_mib
from tests.standards import real_tree

COLD, WARM = 1.25, 0.10
"""The aims: cold by the bare cost, warm by the cold time."""

Record = dict[str, Any]


@dataclass(frozen=True, slots=True)
class Spent:
    """Seconds of the clock, and of processors: of this process and of those that it ended."""

    clock: float
    processors: float

    def __add__(self, other: "Spent") -> "Spent":
        return Spent(self.clock + other.clock, self.processors + other.processors)

    def __str__(self) -> str:
        return f"{self.clock:.1f} ({self.processors:.1f})"

    def by(self, other: "Spent") -> str:
        """As multiples of another."""
        return f"{self.clock / other.clock:.3f} ({self.processors / other.processors:.3f})"


def _now() -> Spent:
    children = resource.getrusage(resource.RUSAGE_CHILDREN)
    return Spent(time.perf_counter(), time.process_time() + children.ru_utime + children.ru_stime)


def _since(begun: Spent) -> Spent:
    now = _now()
    return Spent(now.clock - begun.clock, now.processors - begun.processors)


def fetch(folder: Path) -> str:
    """The file of primes of the package openssh-server, fetched into ``folder``."""
    subprocess.run(
        ["apt-get", "download", "--quiet", "openssh-server"],
        cwd=folder,
        check=True,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    (package,) = folder.glob("openssh-server_*.deb")
    subprocess.run(["dpkg-deb", "--extract", package, folder / "package"], check=True)
    print(f"package {package.stem.replace('%3a', ':')}")
    return (folder / "package/etc/ssh/moduli").read_text("utf-8")


def reviewed(tree: Path, effort: Effort, ledger: Path, jobs: int) -> tuple[Record, Spent]:
    """A review of the tree on so many processes, from bytes to record."""
    begun = _now()
    with LocalPool(jobs) as pool:
        surroundings = Surroundings(secrets.randbelow, ledger=ledger, cores=Cores(pool, jobs))
        record = review([str(tree)], RunValues("2026-12-01", effort), surroundings)
    return record, _since(begun)


def bare(record: Record, jobs: int) -> tuple[Spent, Spent]:
    """What the rounds that the review made take, and its searches for special forms, by nothing
    but them; the longest numbers first, so that all cores end together."""
    claims = record["claims"].values()
    rounds = record["run"]["rounds"]
    primes = _subjects(c for c in claims if c["certificate"].get("method") == "baillie-psw")
    forms = _subjects(c for c in claims if c["kind"] in ("form-searched", "special-form"))
    return (
        _spread(_prime_test, [(n, rounds) for n in primes], jobs),
        _spread(_form_search, [(n,) for n in forms], jobs),
    )


def _subjects(claims: Iterable[Record]) -> list[int]:
    return sorted({int(str(claim["statement"]["n"]), 0) for claim in claims}, reverse=True)


def _prime_test(n: int, rounds: int) -> float:
    begun = time.process_time()
    is_probable_prime(n, rounds, secrets.randbelow)
    return time.process_time() - begun


def _form_search(n: int) -> float:
    begun = time.process_time()
    special_form.search(n)
    return time.process_time() - begun


def _spread(work: Callable[..., float], arguments: list[tuple[int, ...]], jobs: int) -> Spent:
    """What the work takes on so many processes, which have started before; ``work`` says what it
    took of a processor."""
    if not arguments:
        return Spent(0.0, 0.0)
    with ProcessPoolExecutor(jobs, mp_context=get_context("spawn")) as executor:
        list(executor.map(time.sleep, [1.0] * jobs))
        begun = time.perf_counter()
        processors = sum(executor.map(work, *zip(*arguments, strict=True)))
        return Spent(time.perf_counter() - begun, processors)


def count(record: Record, tree: Path, expected: "real_tree.Counter[real_tree.Place]") -> None:
    """Print whether everything was found, nothing invented and all reviewed."""
    found = real_tree.reviewed(record, tree)
    refused = real_tree.in_refused_files(found)
    missing, invented = expected + refused - found, found - expected - refused
    positions = sum(record["overview"]["positions"].values())
    print(
        f"{found.total()} sets found and {positions} reviewed; other readers find "
        f"{expected.total()}, and {refused.total()} are in files that the library refuses; "
        f"missing {missing.total()}, invented {invented.total()}"
    )
    for name, p, g in [*missing, *invented]:
        print(f"  {name}: {p.bit_length()} bits, generator {g:#x}"[:100])


def documents(record: Record) -> None:
    """Print in how many findings and places the generators of order 2q stand in the documents."""
    begun = time.perf_counter()
    report = view(record)
    sizes = {
        module.__name__.rsplit(".", 1)[-1]: len(module.render(report))
        for module in (html, markdown, sarif)
    }
    seconds = time.perf_counter() - begun
    for finding in shared_findings(report.sheets):
        at = [place for place in finding.places if place.path.endswith("primes/moduli")]
        if at and any(item.rule == "generator-order-even" for item in finding.criteria):
            print(f"order 2q: one {finding.first.words}, {_places(at)}")
    shown = ", ".join(f"{name} {size / 2**20:.1f} MiB" for name, size in sizes.items())
    print(f"documents in {seconds:.1f} s: {shown}")


def _places(places: list[Lines]) -> str:
    return "; ".join(
        f"{len(place.lines)} places, {place.path.rsplit('/', 1)[-1]}:"
        f"{place.text.rsplit(':', 1)[-1]}"
        for place in places
    )


HEAD = (
    "| effort | sets | rounds | special forms | review, cold | by both | review, warm | by cold "
    "| aims |\n" + "| --- " * 9 + "|"
)


def timings(tree: Path, effort: Effort, jobs: int) -> Record:
    """Print one row of the table; the record of the cold review."""
    with tempfile.TemporaryDirectory() as folder:
        ledger = Path(folder) / "ledger"
        record, cold = reviewed(tree, effort, ledger, jobs)
        again, warm = reviewed(tree, effort, ledger, jobs)
    rounds, forms = bare(record, jobs)
    both = rounds + forms
    reached = cold.clock <= COLD * both.clock and warm.clock <= WARM * cold.clock
    sets = len(record["parameter_sets"])
    print(
        f"| {effort} | {sets} | {rounds} | {forms} | {cold} | {cold.by(both)} | {warm} "
        f"| {warm.by(cold)} | {'reached' if reached else 'missed'} |",
        flush=True,
    )
    pairs = zip(again["parameter_sets"], record["parameter_sets"], strict=True)
    if other := sum(one != another for one, another in pairs):
        print(f"{other} sets come out otherwise with a warm ledger")
    return record


def main() -> None:
    """Run what the options ask for."""
    options = _options()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        text = Path(options.moduli).read_text("utf-8") if options.moduli else fetch(folder)
        records = real_tree.records_of(text)
        chosen = real_tree.spread(records, options.groups, options.longest)
        print(
            f"{len(records)} primes in the file, {len(chosen)} of them here; {options.jobs} cores"
        )
        build = real_tree.build_primes if options.primes_only else real_tree.build
        expected = build(folder / "all", chosen)
        real_tree.build_primes(folder / "part", chosen[:: options.every])
        print(f"seconds (of processors); aims: {COLD} by both, {WARM} by cold\n{HEAD}", flush=True)
        record = timings(folder / "all", "quick", options.jobs)
        timings(folder / "part", "standard", options.jobs)
        count(record, folder / "all", expected)
        documents(record)
        sets = len(record["parameter_sets"])
        print(f"peak of this process {peak_mib():.0f} MiB with {sets} sets")
    if options.sets:
        subprocess.run(
            [sys.executable, "-m", "tests.benchmarks.bulk", "sets", *options.sets], check=True
        )


def _options() -> argparse.Namespace:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--groups", type=int, help="so many of the primes; all")
    parser.add_argument("--longest", type=int, default=65_536, help="most bits of a prime")
    parser.add_argument("--every", type=int, default=10, help="so many are one at standard effort")
    parser.add_argument("--primes-only", action="store_true", help="no other files")
    parser.add_argument("--moduli", help="a file in the format of moduli(5)")
    parser.add_argument("--jobs", type=int, default=os.cpu_count() or 1)
    parser.add_argument("--sets", nargs="*", help="then the memory of so many small sets")
    return parser.parse_args()


if __name__ == "__main__":
    main()
