"""A tree of real things in one review, against nothing but the primality rounds in it.

``python -m tests.benchmarks.real_tree`` downloads Debian's package openssh-server with ``apt-get``,
takes its file of primes, puts beside it the files of cryptography-vectors and a dozen invented
configuration files, and counts by other readers what there is (:mod:`tests.standards.real_tree`).
All of it is reviewed at quick effort, every tenth of the primes at standard effort, each cold and
with a warm ledger. The competitor is the same rounds of the same primality tests, and the same
searches for special forms where the review made any, spread over as many processes.

``--groups N --longest BITS`` takes a part of the primes, evenly spread; ``--moduli FILE`` another
file; ``--jobs N`` fewer cores. A full run takes about half an hour on two cores.
"""

import argparse
import os
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
class Timed:
    """A review and what it took, in seconds of the clock."""

    record: Record
    seconds: float


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


def reviewed(tree: Path, effort: Effort, ledger: Path, jobs: int) -> Timed:
    """A review of the tree on so many processes, from bytes to record."""
    begun = time.perf_counter()
    with LocalPool(jobs) as pool:
        surroundings = Surroundings(secrets.randbelow, ledger=ledger, cores=Cores(pool, jobs))
        record = review([str(tree)], RunValues("2026-12-01", effort), surroundings)
    return Timed(record, time.perf_counter() - begun)


def bare(record: Record, jobs: int) -> tuple[float, float]:
    """Seconds of the clock for the rounds that the review made, and for its searches for special
    forms, by nothing but them; the longest numbers first, so that all cores end together."""
    claims = record["claims"].values()
    rounds = record["run"]["rounds"]
    primes = _subjects(c for c in claims if c["certificate"].get("method") == "baillie-psw")
    forms = _subjects(c for c in claims if c["kind"] in ("form-searched", "special-form"))
    return (
        _spread(_is_prime, [(n, rounds) for n in primes], jobs),
        _spread(_has_form, [(n,) for n in forms], jobs),
    )


def _subjects(claims: Iterable[Record]) -> list[int]:
    return sorted({int(str(claim["statement"]["n"]), 0) for claim in claims}, reverse=True)


def _is_prime(n: int, rounds: int) -> bool:
    return is_probable_prime(n, rounds, secrets.randbelow)


def _has_form(n: int) -> bool:
    return special_form.search(n) is not None


def _spread(work: Callable[..., bool], arguments: list[tuple[int, ...]], jobs: int) -> float:
    begun = time.perf_counter()
    if arguments:
        with ProcessPoolExecutor(jobs, mp_context=get_context("spawn")) as executor:
            list(executor.map(work, *zip(*arguments, strict=True)))
    return time.perf_counter() - begun


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


def timings(tree: Path, effort: Effort, jobs: int) -> Record:
    """Print one row of the table; the record of the cold review."""
    with tempfile.TemporaryDirectory() as folder:
        ledger = Path(folder) / "ledger"
        cold = reviewed(tree, effort, ledger, jobs)
        warm = reviewed(tree, effort, ledger, jobs)
    rounds, forms = bare(cold.record, jobs)
    sets = len(cold.record["parameter_sets"])
    ratio, rest = cold.seconds / (rounds + forms), warm.seconds / cold.seconds
    print(
        f"| {effort} | {sets} | {rounds:.1f} | {forms:.1f} | {cold.seconds:.1f} | {ratio:.2f} "
        f"| {warm.seconds:.1f} | {rest:.3f} | {_verdict(ratio <= COLD and rest <= WARM)} |",
        flush=True,
    )
    pairs = zip(warm.record["parameter_sets"], cold.record["parameter_sets"], strict=True)
    if other := sum(one != another for one, another in pairs):
        print(f"{other} sets come out otherwise with a warm ledger")
    return cold.record


def _verdict(reached: bool) -> str:
    return "reached" if reached else "missed"


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
        expected = real_tree.build(folder / "all", chosen)
        (folder / "tenth").mkdir()
        (folder / "tenth/moduli").write_text("\n".join([*chosen[::10], ""]), "utf-8")
        print(
            "| effort | sets | rounds, s | forms, s | cold, s | by both | warm, s | by cold "
            f"| at most {COLD} and {WARM} |\n" + "| --- " * 9 + "|",
            flush=True,
        )
        record = timings(folder / "all", "quick", options.jobs)
        timings(folder / "tenth", "standard", options.jobs)
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
    parser.add_argument("--moduli", help="a file in the format of moduli(5)")
    parser.add_argument("--jobs", type=int, default=os.cpu_count() or 1)
    parser.add_argument("--sets", nargs="*", help="then the memory of so many small sets")
    return parser.parse_args()


if __name__ == "__main__":
    main()
