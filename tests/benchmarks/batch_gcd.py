"""The scaled remainder tree against the textbook tree modulo squares, on the same moduli.

    python tests/benchmarks/batch_gcd.py [COUNT [BITS]]

Times are of one run each, in turn, in this process; with an executor, of two spawned processes that
are up already. Peaks are resident sizes of a fresh process that does nothing else.
"""

import multiprocessing
import sys
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path
from time import perf_counter, process_time
from typing import Any

import gmpy2
from gmpy2 import mpz

from auditor.search.batch_gcd import batch_gcd, threads


def textbook(moduli: list[int]) -> list[int]:
    """Product tree, remainder tree modulo squares, as the papers print it, in gmpy2."""
    tree = [[mpz(n) for n in moduli]]
    while len(tree[-1]) > 1:
        row = tree[-1]
        odd = row[-1:] if len(row) % 2 else []
        tree.append([a * b for a, b in zip(row[::2], row[1::2], strict=False)] + odd)
    remainders = tree.pop()
    while tree:
        row = tree.pop()
        remainders = [remainders[i // 2] % (n * n) for i, n in enumerate(row)]
    return [int(gmpy2.gcd(r // n, n)) for r, n in zip(remainders, map(mpz, moduli), strict=True)]


def draw(count: int, bits: int) -> list[int]:
    """Odd numbers of that length; most share a small prime with some other."""
    state = gmpy2.random_state(1)
    top = mpz(1) << (bits - 1)
    return [int(gmpy2.mpz_urandomb(state, bits) | top | 1) for _ in range(count)]


def timed(function: Callable[..., list[int]], *arguments: Any) -> tuple[float, float, list[int]]:
    """Seconds on the wall and of this process's processor time, and what it returned."""
    wall, processor = perf_counter(), process_time()
    result = function(*arguments)
    return perf_counter() - wall, process_time() - processor, result


def peak(function: Callable[[list[int]], list[int]], moduli: list[int]) -> int:
    """MiB resident at most, of the process that runs this (by Linux: VmHWM)."""
    function(moduli)
    status = Path("/proc/self/status").read_text(encoding="ascii")
    return int(status.partition("VmHWM:")[2].split()[0]) // 1024


def fresh_peak(function: Callable[[list[int]], list[int]], moduli: list[int]) -> int:
    """:func:`peak` in a process of its own."""
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as pool:
        return pool.submit(peak, function, moduli).result()


def compare(count: int, bits: int) -> None:
    """Print a row each for the textbook and for ours."""
    moduli = draw(count, bits)
    book, book_busy, expected = timed(textbook, moduli)
    ours, ours_busy, single = timed(batch_gcd, moduli)
    with ProcessPoolExecutor(2, mp_context=multiprocessing.get_context("spawn")) as pool:
        pool.submit(batch_gcd, moduli[:2]).result()
        pooled, _, double = timed(batch_gcd, moduli, pool)
    with threads(2) as pool:
        threaded, _, triple = timed(batch_gcd, moduli, pool)
    if not single == double == triple == expected:
        raise SystemExit("the results differ")
    peaks = [fresh_peak(function, moduli) for function in (textbook, batch_gcd)]
    print(f"{count} moduli of {bits} bits, equal results\n")
    print("| how | seconds | times faster | processor seconds | times less | peak MiB |")
    print("| --- | --- | --- | --- | --- | --- |")
    print(f"| textbook | {book:.2f} | 1.00 | {book_busy:.2f} | 1.00 | {peaks[0]} |")
    print(f"| ours | {ours:.2f} | {book / ours:.2f}", end=" | ")
    print(f"{ours_busy:.2f} | {book_busy / ours_busy:.2f} | {peaks[1]} |")
    print(f"| ours, two threads | {threaded:.2f} | {book / threaded:.2f} | | | |")
    print(f"| ours, two processes | {pooled:.2f} | {book / pooled:.2f} | | | |")


if __name__ == "__main__":
    arguments = [int(text) for text in sys.argv[1:]]
    compare(*(arguments + [4000, 2048][len(arguments) :]))
