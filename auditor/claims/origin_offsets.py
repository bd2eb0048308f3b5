"""Which is the first safe prime in an arithmetic progression?

Every earlier term is shown composite, or its half is, by a small factor or by a witness: so that
there is none earlier is proven."""

from collections.abc import Iterator
from itertools import compress

from auditor.claims.base import Draw
from auditor.claims.primality_tests import is_probable_prime, passes_strong_test
from auditor.claims.small_primes import odd_primes

ROUNDS = 64
SIEVED_BELOW = 2 * 10**6
MOST_WORK = 4 * 10**17
"""Largest product of the offset and the cube of the length in bits: some minutes on one core."""
MOST_OFFSETS = 2**24


def feasible(bits: int, offset: int) -> bool:
    """Whether looking at all smaller offsets is worth the work."""
    return offset <= MOST_OFFSETS and offset * bits**3 <= MOST_WORK


def is_safe_prime(number: int, draw: Draw) -> bool:
    """Whether ``number`` and its half are probable primes. False is certain."""
    half = (number - 1) // 2
    return (
        passes_strong_test(half, 2)
        and passes_strong_test(number, 2)
        and is_probable_prime(half, ROUNDS, draw)
        and is_probable_prime(number, ROUNDS, draw)
    )


def first_safe_prime(start: int, step: int, count: int, draw: Draw) -> int | None:
    """The least x with 0 < x < ``count`` for which start + x step is a safe prime, or None.

    All terms are to be 3 modulo 4 and above 2^64, so that no prime divided by is a term itself.
    The half is tested before the number: one test ends nearly all.
    """
    terms = (start + x * step for x in _unsieved(start, step, count))
    found = next((term for term in terms if is_safe_prime(term, draw)), None)
    return None if found is None else (found - start) // step


def _unsieved(start: int, step: int, count: int) -> Iterator[int]:
    """The x for which neither the term nor its half has a prime factor below the bound."""
    marks = bytearray(b"\x01") * count
    marks[0] = 0
    for prime in odd_primes(SIEVED_BELOW):
        if step % prime == 0:
            continue
        inverse, residue = pow(step, -1, prime), start % prime
        for root in (-residue * inverse % prime, (1 - residue) * inverse % prime):
            if root < count:
                marks[root::prime] = bytes(len(range(root, count, prime)))
    return compress(range(count), marks)
