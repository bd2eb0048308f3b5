"""The primes that checks divide by."""

from collections.abc import Iterator
from itertools import compress
from math import isqrt


def odd_primes(bound: int) -> Iterator[int]:
    """The odd primes below ``bound``, ascending, by the sieve of Eratosthenes over odd numbers."""
    marks = bytearray(b"\x01") * (bound // 2)
    marks[:1] = b"\x00"[: len(marks)]
    for i in range(1, isqrt(bound) // 2 + 1):
        if i < len(marks) and marks[i]:
            first = 2 * i * (i + 1)
            marks[first :: 2 * i + 1] = bytes(len(range(first, bound // 2, 2 * i + 1)))
    return compress(range(1, bound, 2), marks)
