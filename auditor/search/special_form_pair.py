"""A polynomial pair for the special number field sieve, and how a raw one is put in order."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from math import log2

from flint import fmpz_poly

from auditor.search.special_form_work import (
    DEGREES,
    general_sieve_bits,
    n_star,
    sigma,
    special_sieve_bits,
)

CHANCE_BITS = -40
"""A tier reports what its number of tests turns up for an ordinary modulus with probability at
most 2^-40."""


@dataclass(frozen=True, slots=True)
class RawPair:
    """f by coefficients, that of x^0 first, and a root g0/g1 of it modulo p, as a tier found them:
    f may be reducible, and any of its factors may be the one with the root."""

    coefficients: tuple[int, ...]
    g1: int
    g0: int


@dataclass(frozen=True)
class SpecialForm:
    """g1^d f(g0/g1) = cofactor * modulus, with f irreducible over the integers.

    ``coefficients`` are those of f, that of x^0 first; g0, g1 and the cofactor are positive, g0 and
    g1 coprime. ``tier`` says which search found it. Sizes are base-2 logarithms.
    """

    modulus: int
    tier: int
    coefficients: tuple[int, ...]
    g1: int
    g0: int
    cofactor: int

    @property
    def degree(self) -> int:
        """Of f."""
        return len(self.coefficients) - 1

    @property
    def coefficient_bits(self) -> float:
        """F, of the largest coefficient of f."""
        return log2(max(map(abs, self.coefficients)))

    @property
    def root_bits(self) -> float:
        """G, of the larger of g0 and g1."""
        return log2(max(self.g0, self.g1))

    @cached_property
    def sigma(self) -> float:
        """How special: 1 for a pure special form, 0 for no advantage."""
        return sigma(log2(self.modulus), self.degree, self.coefficient_bits, self.root_bits)

    @property
    def n_star(self) -> float:
        """The length of the pure special form that is as hard."""
        return n_star(log2(self.modulus), self.degree, self.coefficient_bits, self.root_bits)

    @property
    def sieve_bits(self) -> float:
        """Work of the special number field sieve with this pair, in symmetric-cipher equivalents;
        heuristic."""
        return special_sieve_bits(
            log2(self.modulus), self.degree, self.coefficient_bits, self.root_bits
        )

    @property
    def helps_the_sieve(self) -> bool:
        """The special sieve with this pair is cheaper than the general one."""
        return self.sieve_bits < general_sieve_bits(log2(self.modulus))

    def rank(self) -> tuple[float | int | tuple[int, ...], ...]:
        """Sorts the most special first, to two decimals of sigma; of those the one whose root says
        most (lowest tier), then lowest degree and fewest terms, at last by value: never by the
        order of arrival."""
        return (
            -round(self.sigma, 2),
            self.tier,
            self.degree,
            sum(1 for c in self.coefficients if c),
            -self.sigma,
            self.cofactor,
            max(map(abs, self.coefficients)),
            self.coefficients,
            self.g0,
            self.g1,
        )


def special_form(p: int, tier: int, raw: RawPair) -> SpecialForm | None:
    """The raw pair made irreducible and normal; None where no factor of f of a useful degree has
    the root.

    For a prime p exactly one factor has it; for a composite one the value may be spread over
    several.
    """
    for factor, _ in fmpz_poly(list(raw.coefficients)).factor()[1]:
        coefficients = [int(c) for c in factor.coeffs()]
        value = homogeneous_value(coefficients, raw.g1, raw.g0)
        if len(coefficients) - 1 in DEGREES and value and value % p == 0:
            return _normal(p, tier, coefficients, raw.g1, raw.g0)
    return None


def homogeneous_value(coefficients: Sequence[int], g1: int, g0: int) -> int:
    """g1^d f(g0/g1), an integer."""
    value, power = 0, 1
    for coefficient in reversed(coefficients):
        value = value * g0 + coefficient * power
        power *= g1
    return value


def expansion(value: int, m: int, degree: int) -> list[int]:
    """``value`` in base m with digits of either sign, at most m/2 except the last: that of m^0
    first, degree + 1 of them."""
    digits = []
    for _ in range(degree):
        value, digit = divmod(value, m)
        if 2 * digit > m:
            value, digit = value + 1, digit - m
        digits.append(digit)
    return [*digits, value]


def _normal(p: int, tier: int, coefficients: list[int], g1: int, g0: int) -> SpecialForm:
    """By x -> -x and f -> -f, everything that may be positive is."""
    if (g0 < 0) != (g1 < 0):
        coefficients = [-c if i % 2 else c for i, c in enumerate(coefficients)]
    g1, g0 = abs(g1), abs(g0)
    value = homogeneous_value(coefficients, g1, g0)
    sign = 1 if value > 0 else -1
    return SpecialForm(p, tier, tuple(sign * c for c in coefficients), g1, g0, abs(value) // p)
