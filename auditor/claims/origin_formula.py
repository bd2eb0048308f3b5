"""Claims about primes made from the digits of pi or e, and about the offset in their formula.

With b bits the formula is 2^b - 2^(b-64) - 1 + 2^64 (floor(2^(b-130) c) + X): RFC 2409, 6.1 and
RFC 3526 with c = pi, RFC 7919, Appendix A with c = e. Its maker is free in X alone.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any, Literal

import gmpy2

from auditor.claims.base import Claim, Draw, require
from auditor.claims.origin_offsets import feasible, first_safe_prime, is_safe_prime
from auditor.claims.reading import natural, only
from auditor.claims.standing import Standing

Constant = Literal["pi", "e"]
CONSTANTS: tuple[Constant, ...] = ("pi", "e")
SHORTEST, LONGEST = 256, 2**16
LARGEST_OFFSET = 2**32
"""Offsets up to here leave a maker some ten thousand primes to choose from, far too few for a form
that helps a sieve; the published offsets are below 2^24."""


def has_shape(n: int) -> bool:
    """Whether the highest and the lowest 64 bits are all ones, as in every such number."""
    ones, bits = (1 << 64) - 1, n.bit_length()
    return SHORTEST <= bits <= LONGEST and n & ones == ones and n >> (bits - 64) == ones


@cache
def scaled(constant: Constant, bits: int) -> int:
    """floor(2^bits c): MPFR rounds down and up, with more digits until both agree."""
    guard = 64
    while True:
        low, high = (
            _floor(constant, bits, bits + guard, mode) for mode in (gmpy2.RoundDown, gmpy2.RoundUp)
        )
        if low == high:
            return low
        guard *= 2


def _floor(constant: Constant, bits: int, precision: int, mode: int) -> int:
    with gmpy2.context(gmpy2.get_context(), precision=precision, round=mode):
        value = gmpy2.const_pi() if constant == "pi" else gmpy2.exp(1)
        return int(gmpy2.floor(gmpy2.mul_2exp(value, bits)))


def formula(constant: Constant, bits: int, offset: int) -> int:
    """The number of the formula."""
    middle = scaled(constant, bits - 130) + offset
    return (1 << bits) - (1 << (bits - 64)) - 1 + (middle << 64)


def offset_of(n: int, constant: Constant) -> int | None:
    """The offset X with 0 < X <= 2^32 for which ``n`` is the number of the formula."""
    if not has_shape(n):
        return None
    offset, rest = divmod(n - formula(constant, n.bit_length(), 0), 1 << 64)
    return offset if rest == 0 and 0 < offset <= LARGEST_OFFSET else None


@dataclass(frozen=True)
class Formula(Claim):
    """``n`` is the number of the formula for ``constant`` and ``offset``; None says that it is so
    for no offset from 1 to 2^32."""

    kind = "formula"

    n: int
    constant: Constant
    offset: int | None

    def statement(self) -> dict[str, Any]:
        return {"n": self.n, "constant": self.constant, "offset": self.offset}

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Formula":
        only(statement, "n", "constant", "offset")
        only(certificate)
        if uses or statement["constant"] not in CONSTANTS:
            raise ValueError("expected pi or e, and no claim used")
        offset = statement["offset"]
        return cls(
            natural(statement["n"]),
            statement["constant"],
            None if offset is None else natural(offset),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(offset_of(self.n, self.constant) == self.offset, "the formula gives another number")


@dataclass(frozen=True)
class LeastOffset(Claim):
    """``n`` is the number of the formula for ``constant`` and ``offset``, and no smaller positive
    offset gives a safe prime; where ``smaller`` is one, it does."""

    kind = "least-offset"

    n: int
    constant: Constant
    offset: int
    smaller: int | None = None

    @property
    def standing(self) -> Standing:
        """That all smaller ones are composite is proven; a safe prime is a probable one."""
        return Standing.PROVEN if self.smaller is None else Standing.PROBABLE

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "constant": self.constant,
            "offset": self.offset,
            "smaller": self.smaller,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "LeastOffset":
        only(statement, "n", "constant", "offset", "smaller")
        only(certificate)
        if uses or statement["constant"] not in CONSTANTS:
            raise ValueError("expected pi or e, and no claim used")
        smaller = statement["smaller"]
        return cls(
            natural(statement["n"]),
            statement["constant"],
            natural(statement["offset"]),
            None if smaller is None else natural(smaller),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(offset_of(self.n, self.constant) == self.offset, "the formula gives another number")
        bits = self.n.bit_length()
        if self.smaller is None:
            require(feasible(bits, self.offset), "too many offsets to look at")
            found = smaller_offset(self.constant, bits, self.offset, draw)
            require(found is None, f"the offset {found} gives a safe prime")
        else:
            require(0 < self.smaller < self.offset, "not a smaller offset")
            number = formula(self.constant, bits, self.smaller)
            require(is_safe_prime(number, draw), "no safe prime")


def formula_of(n: int, constant: Constant) -> Formula:
    """The claim whether ``n`` is the number of the formula."""
    return Formula(n, constant, offset_of(n, constant))


def least_offset(n: int, constant: Constant, offset: int, draw: Draw) -> LeastOffset:
    """The claim whether a smaller offset gives a safe prime."""
    smaller = smaller_offset(constant, n.bit_length(), offset, draw)
    return LeastOffset(n, constant, offset, smaller)


def smaller_offset(constant: Constant, bits: int, offset: int, draw: Draw) -> int | None:
    """The least positive offset below ``offset`` that gives a safe prime; None, for certain, where
    there is none."""
    return first_safe_prime(formula(constant, bits, 0), 1 << 64, offset, draw)
