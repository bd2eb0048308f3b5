"""Logarithms in the whole group of a small prime field, by python-flint's compiled code.

Below about 60 bits a multiplication is cheaper than the interpreter. ``discrete_log`` takes no
factorization and cannot be stopped or watched, so it is used where nobody counts the work and where
it is quick, and its answer is checked: it also answers when there is no logarithm, and it ends the
process when the element is 0 or the modulus is not prime.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import isqrt, prod

import flint
from gmpy2 import powmod

from auditor.search.log_result import Logarithm

LARGEST_FIELD = 2**60
"""Below 2^64 ``is_prime`` is known to be never wrong (FLINT manual, ulong_extras, n_is_prime)."""

LARGEST_PRIME = 2**20
"""Above it our own steps are quicker."""

Factors = Sequence[tuple[int, int]]


def in_small_field(n: int, g: int, h: int, factors: Factors) -> Logarithm | None:
    """The logarithm of h to the base g modulo n, both reduced; None where it is not for this module
    to say: other groups, larger ones, or no logarithm.

    ``factors`` are those of n - 1. The operations are those of Pohlig and Hellman's method for g
    and for h to a common base: an estimate, since none were counted.
    """
    if not (2 < n < LARGEST_FIELD and g and h):
        return None
    base = prepared(int(n), int(g), tuple(factors))
    if base is None:
        return None
    value = int(base.element.discrete_log(int(h))) % base.order
    if powmod(g, value, n) != h:
        return None
    return Logarithm(value, base.order, base.operations)


@dataclass(frozen=True, slots=True)
class Base:
    """An element of a field, which keeps the tables of its first logarithm; its order; and the
    operations that a logarithm to it takes or so."""

    element: flint.fmpz_mod
    order: int
    operations: int


@lru_cache(maxsize=4)
def prepared(n: int, g: int, factors: tuple[tuple[int, int], ...]) -> Base | None:
    """g as a base modulo n, kept for the next logarithm; None where n is not prime, ``factors`` are
    not those of n - 1, or one of them is too large."""
    if prod(q**e for q, e in factors) != n - 1 or not flint.fmpz(n).is_prime():
        return None
    if max(q for q, _ in factors) > LARGEST_PRIME:
        return None
    element = flint.fmpz_mod_ctx(n)(g)
    work = sum(e * (2 * n.bit_length() + 2 * isqrt(q)) for q, e in factors)
    return Base(element, _order(element, factors, n - 1), 2 * work)


def _order(element: flint.fmpz_mod, factors: Factors, order: int) -> int:
    """The order of the element, from a multiple of it and its factors."""
    for q, e in factors:
        for _ in range(e):
            if not (element ** (order // q)).is_one():
                break
            order //= q
    return order
