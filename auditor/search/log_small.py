"""Logarithms in the whole group of a small prime field, by python-flint's compiled code.

Below about 60 bits a multiplication is cheaper than the interpreter. ``discrete_log`` takes no
factorization and cannot be stopped or watched, so it is used where nobody counts the work and where
it is quick, and its answer is checked: it also answers when there is no logarithm, and it ends the
process when the element is 0 or the modulus is not prime.
"""

from collections.abc import Sequence
from functools import lru_cache
from math import isqrt, prod

import flint
from gmpy2 import is_prime, powmod

from auditor.search.log_result import Logarithm

LARGEST_FIELD = 2**60
"""Below 2^64 ``is_prime`` is known to be never wrong."""

LARGEST_PRIME = 2**18
"""Above it our own steps are quicker."""


def in_small_field(n: int, g: int, h: int, factors: Sequence[tuple[int, int]]) -> Logarithm | None:
    """The logarithm of h to the base g modulo n, both reduced; None where it is not for this module
    to say: other groups, larger ones, or no logarithm.

    ``factors`` are those of n - 1. The operations are those of Pohlig and Hellman's method for g
    and for h to a common base: an estimate, since none were counted.
    """
    if not (2 < n < LARGEST_FIELD and g and h) or prod(q**e for q, e in factors) != n - 1:
        return None
    if max(q for q, _ in factors) > LARGEST_PRIME or not is_prime(n):
        return None
    field = _field(n)
    order = _order(g, n, factors)
    value = int(field(int(g)).discrete_log(field(int(h)))) % order
    if powmod(g, value, n) != h:
        return None
    work = sum(e * (2 * n.bit_length() + 2 * isqrt(q)) for q, e in factors)
    return Logarithm(value, order, 2 * work)


@lru_cache(maxsize=4)
def _field(n: int) -> flint.fmpz_mod_ctx:
    """The field, which keeps the tables of its first logarithm."""
    return flint.fmpz_mod_ctx(n)


def _order(g: int, n: int, factors: Sequence[tuple[int, int]]) -> int:
    """The order of g modulo the prime n, from the factors of n - 1."""
    order = n - 1
    for q, e in factors:
        for _ in range(e):
            if powmod(g, order // q, n) != 1:
                break
            order //= q
    return order
