"""Primes in order, and the exponents that the p-1, p+1 and elliptic-curve methods raise to."""

from collections.abc import Iterable, Iterator
from functools import lru_cache
from itertools import compress
from math import isqrt

from gmpy2 import mpz


@lru_cache(maxsize=4)
def primes_up_to(bound: int) -> tuple[int, ...]:
    """All primes not above ``bound``, in order (Eratosthenes on the odd numbers)."""
    if bound < 2:
        return ()
    odd = bytearray([1]) * ((bound + 1) // 2)  # odd[i] stands for 2i + 1
    odd[0] = 0
    for i in range(1, (isqrt(bound) + 1) // 2):
        if odd[i]:
            first, step = 2 * i * (i + 1), 2 * i + 1
            odd[first::step] = bytes(len(range(first, len(odd), step)))
    return (2, *compress(range(1, bound + 1, 2), odd))


def primes_of_lcm(b1: int) -> Iterator[int]:
    """The primes not above ``b1`` in order, each as often as it divides lcm(1, ..., b1)."""
    root = isqrt(b1)
    for prime in primes_up_to(b1):
        yield prime
        if prime <= root:
            power = prime * prime
            while power <= b1:
                yield prime
                power *= prime


def in_batches(numbers: Iterable[int], size: int) -> Iterator[list[int]]:
    """``numbers`` in lists of ``size``, the last one shorter."""
    batch: list[int] = []
    for number in numbers:
        batch.append(number)
        if len(batch) == size:
            yield batch
            batch = []
    if batch:
        yield batch


def exponents(b1: int, bits: int) -> Iterator[mpz]:
    """Factors of about ``bits`` bits whose product is lcm(1, ..., b1)."""
    size = max(1, bits // max(1, b1.bit_length() - 1))
    for batch in in_batches(primes_of_lcm(b1), size):
        yield product(batch)


def product(numbers: Iterable[int]) -> mpz:
    """The product as a GMP integer, by halves, which keeps factors of equal size together."""
    level = [mpz(number) for number in numbers] or [mpz(1)]
    while len(level) > 1:
        paired = [a * b for a, b in zip(level[::2], level[1::2], strict=False)]
        level = paired + level[len(paired) * 2 :]
    return level[0]
