"""What a polynomial pair is worth to the number field sieve, as pure functions of sizes.

A pair is an irreducible f of degree d and a linear g = g1·x - g0 with a common root modulo p. Sizes
are base-2 logarithms: n of p, F of the largest coefficient of f, G of the larger of g0 and g1.

The end points are the published complexities L_p[1/3, (64/9)^(1/3)] (general) and
L_p[1/3, (32/9)^(1/3)] (special); the interpolation between them is ours, a heuristic, and a report
that shows the figure has to say so.
"""

from math import cbrt, log

DEGREES = range(4, 9)
"""Those near the optimum of the sieve. The formulas compare a pair with the best ordinary one of
its own degree; they would flatter one of degree 2 or 3, whose linear side is far too large."""

_GENERAL = 1.923
_SPECIAL = 1.5263


def sigma(n: float, degree: int, coefficient_bits: float, root_bits: float) -> float:
    """How special a pair is: 1 for a pure special form, 0 for no advantage over any p.

    ``degree * (F + G)`` is n for a pure special form and 2nd/(d+1) for the best pair of that degree
    that an ordinary p has; sigma places the pair linearly between the two. Raises ValueError for a
    degree outside ``DEGREES`` or a modulus below 1 bit.
    """
    if degree not in DEGREES or n < 1:
        raise ValueError("a pair has degree 4 to 8, and its modulus 1 bit or more")
    effective = degree * (coefficient_bits + root_bits)
    generic = 2 * n * degree / (degree + 1)
    return min(1.0, max(0.0, 1 - (effective - n) / (generic - n)))


def n_star(n: float, degree: int, coefficient_bits: float, root_bits: float) -> float:
    """The length, in bits, of the pure special form that is as hard: n (2 - sigma)."""
    return n * (2 - sigma(n, degree, coefficient_bits, root_bits))


def special_sieve_bits(n: float, degree: int, coefficient_bits: float, root_bits: float) -> float:
    """Work of the special number field sieve with that pair, in symmetric-cipher equivalents.

    Heuristic, and no lower bound: the 1024-bit computation of Fried, Gaudry, Heninger and Thome
    (EUROCRYPT 2017) cost some bits less than the 62.1 that it gives for a pure special form.
    """
    return _sieve_bits(_SPECIAL, n_star(n, degree, coefficient_bits, root_bits))


def general_sieve_bits(n: float) -> float:
    """Work of the general number field sieve in symmetric-cipher equivalents, by the formula of the
    FIPS 140 Implementation Guidance."""
    return _sieve_bits(_GENERAL, n)


def _sieve_bits(constant: float, n: float) -> float:
    natural = n * log(2)
    return (constant * cbrt(natural * log(natural) ** 2) - 4.69) / log(2)
