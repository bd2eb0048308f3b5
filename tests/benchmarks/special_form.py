"""The detector of special forms: how long it takes, what its parts gain, and that it is silent.

    python tests/benchmarks/special_form.py times
    python tests/benchmarks/special_form.py silence [PRIMES]

``times`` compares two parts with what they stand for, on the same input: our basis of the lattice
with the textbook one, both reduced by FLINT; the roots of tiny polynomials by FLINT and by PARI.
``silence`` searches every published group and 200 random primes, and fails if there is a report.
"""

import random
import sys
from collections.abc import Callable, Iterator
from time import process_time

import gmpy2
from cypari import pari
from flint import fmpz_mat, fmpz_mod_ctx, fmpz_mod_poly_ctx

from auditor.intake.standard_groups import standard_groups
from auditor.search import special_form_hidden as hidden
from auditor.search import special_form_known_root as known_root
from auditor.search.special_form import search
from auditor.search.special_form_work import DEGREES

Lattice = Callable[[int, int, int], fmpz_mat]


def random_primes(bits: int, count: int) -> Iterator[int]:
    """Primes of that length, the same in each run."""
    draw = random.Random(bits)
    for _ in range(count):
        yield int(gmpy2.next_prime(draw.getrandbits(bits) | 1 << (bits - 1)))


def seconds(function: Callable[..., object], *arguments: object) -> float:
    """Of processor time, for one call."""
    start = process_time()
    function(*arguments)
    return process_time() - start


def textbook_lattice(p: int, m: int, degree: int) -> fmpz_mat:
    """p, and x^i - m^i mod p: what selection of polynomials usually starts from."""
    rows = [[p] + [0] * degree]
    for i in range(1, degree + 1):
        rows.append([-pow(m, i, p)] + [int(i == j) for j in range(1, degree + 1)])
    return fmpz_mat(rows)


def reduce_all(p: int, lattice: Lattice) -> None:
    """All lattices of base 2, each reduced."""
    for degree in DEGREES:
        for exponent in known_root.exponents(p, degree, 2):
            lattice(p, 1 << exponent, degree).lll()


def roots_by_flint(p: int) -> list[list[int]]:
    """Of all tiny polynomials modulo p."""
    ring = fmpz_mod_poly_ctx(fmpz_mod_ctx(p))
    return [sorted(int(r) for r, _ in ring(list(f)).roots()) for f in hidden.polynomials()]


def roots_by_pari(p: int) -> list[list[int]]:
    """The same."""
    pari.allocatemem(2**27, silent=True)
    prime = pari(hex(p))
    return [
        sorted(int(r.lift()) for r in pari.polrootsmod(pari(list(f)).Polrev(), prime))
        for f in hidden.polynomials()
    ]


def times() -> None:
    """Print the processor seconds of each tier, and the ratios to the competitors."""
    print("| bits | tier 1 | tier 2 | tier 3 | lattices, textbook / ours | roots, PARI / FLINT |")
    print("| --- | --- | --- | --- | --- | --- |")
    for bits in (1024, 2048):
        (p,) = random_primes(bits, 1)
        tiers = [f"{seconds(search, p, (tier,)):.2f}" for tier in (1, 2, 3)]
        lattices = [seconds(reduce_all, p, textbook_lattice)]
        lattices += [seconds(reduce_all, p, known_root._lattice)]
        roots = [seconds(roots_by_pari, p), seconds(roots_by_flint, p)]
        print("|", " | ".join([str(bits), *tiers, ratio(*lattices), ratio(*roots)]), "|")


def ratio(theirs: float, ours: float) -> str:
    """How many times faster ours is, with both times."""
    return f"{theirs:.2f} / {ours:.2f} = {theirs / ours:.1f}"


def silence(count: int) -> None:
    """Tiers 1 and 2 on every published group and on random primes, tier 3 up to 2048 bits."""
    for group in standard_groups():
        tiers = (1, 2, 3) if group.modulus.bit_length() <= 2048 else (1, 2)
        report(group.name, group.modulus, tiers)
    for bits, share in ((512, 2), (1024, 1), (2048, 1)):
        for p in random_primes(bits, count * share // 4):
            report(f"random prime of {bits} bits", p, (1, 2, 3) if bits == 512 else (1, 2))
    print(f"no report on {len(standard_groups())} published groups and {count} random primes")


def report(name: str, p: int, tiers: tuple[int, ...]) -> None:
    """Stop if there is a form."""
    form = search(p, tiers)
    print(f"{name}, tiers {tiers}: {'none' if form is None else form}", flush=True)
    if form is not None:
        raise SystemExit("a report on a modulus that is not special")


if __name__ == "__main__":
    match sys.argv[1:]:
        case ["times"]:
            times()
        case ["silence"]:
            silence(200)
        case ["silence", primes]:
            silence(int(primes))
        case _:
            raise SystemExit(__doc__)
