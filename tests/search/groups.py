"""Groups of prime order for the tests of logarithms."""

import sympy
from gmpy2 import next_prime

from auditor.search.log_seed import drawn


def prime_group(bits: int, seed: int, smallest: int = 2) -> tuple[int, int, int]:
    """n, g, q: a prime n = k q + 1, and g of prime order q of that many bits."""
    q = int(next_prime(2 ** (bits - 1) + drawn(2 ** (bits - 1), "group", bits, seed)))
    k = next(k for k in range(smallest + smallest % 2, 10**6, 2) if sympy.isprime(k * q + 1))
    n = k * q + 1
    return n, next(g for g in (pow(a, k, n) for a in range(2, n)) if g != 1), q


def of_order(q: int, n: int) -> int:
    """The first element of prime order q modulo the prime n."""
    return next(g for g in (pow(a, (n - 1) // q, n) for a in range(2, n)) if g != 1)
