"""Logarithms against PARI's znlog and python-flint's discrete_log, in turn on the same input.

    python tests/benchmarks/logarithms.py           the table, about half a minute
    python tests/benchmarks/logarithms.py --long    wide subgroups, by rho and by steps: minutes

Figures are processor seconds of this process, median over the exponents; a ratio above 1 says that
ours is quicker. The competitors are given what ours is given: the factored order to znlog, while
discrete_log takes none and factors p - 1 itself, in a fresh context each time. Ours keeps what it
prepared for a base in a small field; "first" is a logarithm for which nothing was kept. Exponents
are drawn from fixed labels.
"""

import argparse
import resource
import time
from collections.abc import Callable, Iterator
from concurrent.futures import ProcessPoolExecutor
from functools import partial
from math import prod
from statistics import median

import sympy
from cypari import pari
from flint import fmpz_mod_ctx
from gmpy2 import is_prime, mpz, next_prime, powmod

from auditor.intake.standard_groups import find
from auditor.search import log_small
from auditor.search.log_seed import drawn
from auditor.search.logarithm import Logarithm, pohlig_hellman, prime_order_logarithm, rho

Problem = tuple[int, int, list[tuple[int, int]]]
"""n, g, and the factored order of g."""


def timed(work: Callable[[], int]) -> tuple[float, int]:
    """Processor seconds, and the result."""
    begun = time.process_time()
    result = work()
    return time.process_time() - begun, result


def by_pari(n: int, g: int, h: int, factors: list[tuple[int, int]]) -> int:
    """znlog with the order given as PARI wants it: [order, factorization]."""
    rows = ";".join(f"{q},{e}" for q, e in factors)
    matrix = f"[{rows}]" if len(factors) > 1 else f"Mat([{rows}])"
    order = pari(f"[{prod(q**e for q, e in factors)},{matrix}]")
    return int(pari.znlog(pari(f"Mod({h},{n})"), pari(f"Mod({g},{n})"), order))


def first(n: int, g: int, h: int, factors: list[tuple[int, int]]) -> int:
    """Ours with nothing kept."""
    log_small.prepared.cache_clear()
    return pohlig_hellman(n, g, h, factors).value


def by_flint(n: int, g: int, h: int) -> int:
    """discrete_log in a fresh context, which keeps its own tables."""
    context = fmpz_mod_ctx(n)
    return int(context(g).discrete_log(context(h)))


def exponents(problem: Problem, count: int) -> Iterator[tuple[int, int]]:
    """Drawn exponents and their powers."""
    n, g, factors = problem
    for index in range(count):
        x = drawn(prod(q**e for q, e in factors), "benchmark", n, index)
        yield x, int(powmod(g, x, n))


def subgroup_problem(q: int) -> Problem:
    """The subgroup of prime order q in the field of RFC 5114 group 23 (2048 bits)."""
    group = find("rfc5114-2048-224")
    assert group is not None
    n = group.modulus
    return n, int(powmod(2, (n - 1) // q, n)), [(q, 1)]


def whole_group_problem(bits: int, largest: int) -> Problem:
    """A prime of about that many bits whose p - 1 has a largest prime of ``largest`` bits."""
    q = int(next_prime(drawn(2 ** (largest - 1), "prime", bits, largest) + 2 ** (largest - 1)))
    for attempt in range(10**6):
        p = 2 * q
        for index in range(10**6):
            if p.bit_length() >= bits:
                break
            p *= (2, 3, 5, 7, 11, 13)[drawn(6, "factor", attempt, index)]
        if is_prime(p + 1):
            factors = {int(r): e for r, e in sympy.factorint(p // q).items()} | {q: 1}
            return p + 1, int(sympy.primitive_root(p + 1)), sorted(factors.items())
    raise AssertionError("no prime of that shape")


def row(name: str, problem: Problem, count: int, flint: bool) -> str:
    """One line of the table; every result is compared with the drawn exponent."""
    n, g, factors = problem
    methods: list[Callable[[int], int]] = [
        lambda h: first(n, g, h, factors),
        lambda h: pohlig_hellman(n, g, h, factors).value,
        lambda h: by_pari(n, g, h, factors),
    ]
    if flint:
        methods.append(lambda h: by_flint(n, g, h))
    times: list[list[float]] = [[] for _ in methods]
    for x, h in exponents(problem, count):
        for measured, method in zip(times, methods, strict=True):
            seconds, found = timed(partial(method, h))
            assert found == x, name
            measured.append(seconds)
    alone, ours, *others = (median(measured) for measured in times)
    cells = [name, f"{1e3 * alone:.3f}", f"{1e3 * ours:.3f}"]
    for theirs in others:
        cells += [f"{1e3 * theirs:.3f}", f"{theirs / alone:.1f}", f"{theirs / ours:.1f}"]
    return "| " + " | ".join([*cells, "-", "-", "-"][:9]) + " |"


def table() -> Iterator[str]:
    """Subgroups of a 2048-bit field, then whole groups of small fields."""
    yield (
        "| group | first, ms | ours, ms | znlog, ms | to first | to ours "
        "| discrete_log, ms | to first | to ours |"
    )
    yield "|---|---:|---:|---:|---:|---:|---:|---:|---:|"
    for q in (605921, 742327609, 5213881177, 112486462861):
        name = f"2048-bit field, subgroup of {q.bit_length()} bits"
        yield row(name, subgroup_problem(q), 9, flint=False)
    for bits, largest in ((32, 8), (40, 12), (48, 16), (56, 20), (64, 24), (64, 28), (128, 28)):
        name = f"{bits}-bit field, largest prime of {largest} bits"
        yield row(name, whole_group_problem(bits, largest), 9, flint=True)


def wide_subgroup() -> tuple[int, int, int]:
    """A 2048-bit prime n, g and q: the subgroup has a prime order q of 48 bits."""
    q = int(next_prime(2**47 + drawn(2**47, "wide")))
    k = mpz(drawn(2**1999, "cofactor") + 2**1999) * 2
    while not is_prime(k * q + 1):
        k += 2
    n = int(k * q + 1)
    return n, int(powmod(2, k, n)), q


def long_runs() -> Iterator[str]:
    """Subgroups of 42 and 48 bits by rho, with one process and two, and by steps (wall seconds)."""
    yield "| subgroup of a 2048-bit field | seconds | operations / sqrt(q) | peak memory, MiB |"
    yield "|---|---:|---:|---:|"
    n, g, ((q, _),) = subgroup_problem(3528910760717)
    wide_n, wide_g, wide_q = wide_subgroup()
    with ProcessPoolExecutor(2) as executor:
        yield long_row("42 bits, rho, one process", n, g, q, rho)
        two = partial(rho, executor=executor)
        yield long_row("42 bits, rho, two processes", n, g, q, two)
        yield long_row("48 bits, rho, two processes", wide_n, wide_g, wide_q, two)
    yield long_row("48 bits, giant steps", wide_n, wide_g, wide_q, prime_order_logarithm)


def long_row(name: str, n: int, g: int, q: int, method: Callable[..., Logarithm]) -> str:
    """One line for one run."""
    x = drawn(q, "long", q)
    begun = time.perf_counter()
    found = method(n, g, int(powmod(g, x, n)), q)
    seconds = time.perf_counter() - begun
    assert found.value == x, name
    memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024
    return f"| {name} | {seconds:.1f} | {found.operations / q**0.5:.2f} | {memory} |"


def run() -> None:
    """Print the table, line by line."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--long", action="store_true", help="wide subgroups instead")
    lines = long_runs() if parser.parse_args().long else table()
    for line in lines:
        print(line, flush=True)


if __name__ == "__main__":
    run()
