"""Logarithms of big integers, rounded so that a printed figure never promises too much."""

from math import floor, log2


def log2_of(n: int) -> float:
    """The base-2 logarithm of a positive integer of any size."""
    shift = max(0, n.bit_length() - 1000)
    return log2(n >> shift) + shift


def bits(x: float) -> float:
    """``x`` rounded down to 0.01.

    A hair above an exact hundredth is that hundredth: 2^-30 makes up for floating point, which
    would otherwise print log2(2^160) + 1/2 one hundredth low.
    """
    return floor(x * 100 + 2**-30) / 100
