"""Forms that the digits of a number show, named as one would write them.

A name is not an attack: whether the sieve gains by a form is decided by its polynomial pair.
"""

from math import log2

import gmpy2

SPARSENESS = 16
"""A number is sparse when its signed binary weight is at most a sixteenth of its length. A random
one has a weight of about a third, more than thirty standard deviations away at 1024 bits; the
groups made from pi and e are within a few of it, which is why no finer test is used."""

_BASES = (2, 3, 5, 6, 7, 10)
_LEAST_LENGTH = 128
_SMALL_BITS = 48
"""Of the offset or multiplier beside a power: far too small for chance at 128 bits and more."""


def signed_binary_weight(n: int) -> int:
    """The number of non-zero digits of non-negative n in the non-adjacent form, the fewest that
    digits -1, 0 and 1 allow (Reitwiesner 1960, from memory)."""
    return (n ^ 3 * n).bit_count()


def is_sparse(n: int) -> bool:
    """A sum of few signed powers of two: weight at most a sixteenth of the length."""
    return signed_binary_weight(n) <= n.bit_length() / SPARSENESS


def visible_form(n: int) -> str | None:
    """n as b^e ± c, k·b^e ± 1 or (b^e - 1)/(b - 1) with small b, c and k, or as a sparse sum of
    powers of two; None when its digits show none of these, or below 128 bits."""
    if n.bit_length() < _LEAST_LENGTH:
        return None
    for base in _BASES:
        if name := _near_power(n, base) or _near_multiple(n, base) or _repunit(n, base):
            return name
    return _sum_of_powers(n) if is_sparse(n) else None


def _near_power(n: int, base: int) -> str | None:
    nearest = round(log2(n) / log2(base))
    offset = n - base**nearest
    if abs(offset) >> _SMALL_BITS:
        return None
    return f"{base}^{nearest}" + (f" {'+' if offset > 0 else '-'} {abs(offset)}" if offset else "")


def _near_multiple(n: int, base: int) -> str | None:
    for sign in (1, -1):
        multiplier, exponent = gmpy2.remove(gmpy2.mpz(n - sign), base)
        if exponent and not multiplier >> _SMALL_BITS:
            return f"{multiplier}*{base}^{exponent} {'+' if sign > 0 else '-'} 1"
    return None


def _repunit(n: int, base: int) -> str | None:
    power = n * (base - 1) + 1
    exponent = round(log2(power) / log2(base))
    return f"({base}^{exponent} - 1)/{base - 1}" if power == base**exponent else None


def _sum_of_powers(n: int) -> str:
    """The non-adjacent form, largest power first: digit i is bit i+1 of 3n less bit i+1 of n."""
    terms = [
        (f"2^{i}" if i else "1", "+" if 3 * n >> (i + 1) & 1 else "-")
        for i in reversed(range(n.bit_length() + 1))
        if (n ^ 3 * n) >> (i + 1) & 1
    ]
    return terms[0][0] + "".join(f" {sign} {power}" for power, sign in terms[1:])
