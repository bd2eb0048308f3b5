"""Polynomials modulo n over FLINT, as the second stages need them."""

from collections.abc import Sequence

import flint
from gmpy2 import mpz


def polynomials_modulo(n: mpz) -> flint.fmpz_mod_poly_ctx:
    """The ring of polynomials over the integers modulo ``n``."""
    return flint.fmpz_mod_poly_ctx(flint.fmpz_mod_ctx(int(n)))


def polynomial(
    numbers: Sequence[mpz] | Sequence[int], polynomials: flint.fmpz_mod_poly_ctx
) -> flint.fmpz_mod_poly:
    """The polynomial with these coefficients, from the constant term up."""
    return polynomials([int(number) for number in numbers])


def from_roots(roots: Sequence[mpz], polynomials: flint.fmpz_mod_poly_ctx) -> flint.fmpz_mod_poly:
    """The monic polynomial with these roots, by a product tree."""
    return multiplied([polynomials([int(-root), 1]) for root in roots])


def multiplied(factors: Sequence[flint.fmpz_mod_poly]) -> flint.fmpz_mod_poly:
    """The product of at least one polynomial, by halves."""
    level = list(factors)
    while len(level) > 1:
        paired = [a * b for a, b in zip(level[::2], level[1::2], strict=False)]
        level = paired + level[len(paired) * 2 :]
    return level[0]


def coefficients(polynomial: flint.fmpz_mod_poly) -> list[mpz]:
    """From the constant term up; the highest is not 0."""
    return [mpz(int(c)) for c in polynomial.coeffs()]
