"""How far a search for factors goes: bounds and counts, never a clock."""

from dataclasses import dataclass, replace
from typing import Literal

Effort = Literal["quick", "standard", "thorough"]


@dataclass(frozen=True, slots=True)
class EcmLevel:
    """Elliptic curves for prime factors of up to ``digits`` decimal digits.

    ``curves`` curves with stage bounds ``b1`` and ``b2``; as many as the expected number find
    a factor of that size with probability 63 %.
    """

    digits: int
    b1: int
    b2: int
    curves: int


LEVELS = (
    EcmLevel(15, 3_000, 300_000, 17),
    EcmLevel(20, 11_000, 1_900_000, 74),
    EcmLevel(25, 50_000, 13_000_000, 221),
    EcmLevel(30, 250_000, 130_000_000, 453),
    EcmLevel(35, 1_000_000, 1_000_000_000, 984),
    EcmLevel(40, 3_000_000, 5_700_000_000, 2_541),
    EcmLevel(45, 11_000_000, 35_000_000_000, 4_949),
    EcmLevel(50, 43_000_000, 240_000_000_000, 8_266),
)
"""Bounds and expected curves of the README of GMP-ECM, table 1, column "-power 1". The row for 15
digits, which the table has not, minimises the model's expected time (see expected_curves)."""


@dataclass(frozen=True, slots=True)
class Plan:
    """What a search does, in this order, until nothing composite is left.

    Division by the primes up to ``trial_bound``; a complete factorization of what has at most
    ``complete_digits`` decimal digits; ``fermat_steps`` steps of Fermat's method;
    ``rho_iterations`` of Pollard's rho; p-1 and p+1 (from ``p_plus_1_starts`` starting values)
    with their stage bounds; elliptic curves level by level.
    """

    trial_bound: int
    complete_digits: int
    rho_iterations: int = 0
    p_minus_1: tuple[int, int] = (0, 0)
    p_plus_1: tuple[int, int] = (0, 0)
    p_plus_1_starts: int = 0
    levels: tuple[EcmLevel, ...] = ()
    fermat_steps: int = 0

    @property
    def digits(self) -> int:
        """The size of factors that the last level looks for; 0 without levels."""
        return self.levels[-1].digits if self.levels else 0

    def for_length(self, bits: int) -> "Plan":
        """The same for a number of that length: beyond 8,192 bits every bound and count shrinks as
        the time of a product grows (about bits^1.6), so that no input takes hours. What was done
        is recorded, not what was planned."""
        if bits <= FULL_LENGTH:
            return self
        share = (FULL_LENGTH / bits) ** 1.6
        return replace(
            self,
            rho_iterations=int(share * self.rho_iterations),
            p_minus_1=(int(share * self.p_minus_1[0]), int(share * self.p_minus_1[1])),
            p_plus_1=(int(share * self.p_plus_1[0]), int(share * self.p_plus_1[1])),
            levels=tuple(
                replace(level, curves=max(1, int(share * level.curves))) for level in self.levels
            ),
        )

    def for_modulus(self) -> "Plan":
        """The same for a composite modulus, whose maker may have chosen its factors: close to
        each other, or with p-1 or p+1 smooth. p-1 goes ten times further; p+1 in its first stage
        as far as p-1 did, and in the second, which costs more than that of p-1, 50 times that."""
        b1, b2 = self.p_minus_1
        return replace(
            self,
            fermat_steps=10_000,
            p_minus_1=(10 * b1, 10 * b2),
            p_plus_1=(b1, min(b2, 50 * b1)),
            p_plus_1_starts=P_PLUS_1_STARTS,
        )


FULL_LENGTH = 8_192
P_PLUS_1_STARTS = 3
"""Each start finds half of the factors with smooth p+1."""

QUICK = Plan(
    trial_bound=1_000_000,
    complete_digits=45,
    rho_iterations=1 << 15,
    p_minus_1=(10_000, 300_000),
)
"""No deep search: well under a second at 2048 bits."""


def quick_plan_for(number: int) -> Plan:
    """:data:`QUICK`, with a few steps of Fermat's method where the number is odd: group orders are
    even, and whoever made a modulus may have taken neighbouring primes."""
    return replace(QUICK, fermat_steps=100) if number % 2 else QUICK


def plan_for(effort: Effort, factor_digits: int | None = None) -> Plan:
    """The plan of an effort; ``factor_digits`` sets the depth by hand, at any effort.

    Without it, ``standard`` looks for factors of 15 digits (twice the expected curves) and
    ``thorough`` for factors of 25. Raises ValueError for a depth below 0 or above 50 digits.
    """
    if factor_digits is None:
        if effort == "quick":
            return QUICK
        factor_digits = 15 if effort == "standard" else 25
    if not 0 <= factor_digits <= LEVELS[-1].digits:
        raise ValueError(f"factors of 0 to {LEVELS[-1].digits} digits can be looked for")
    levels = tuple(level for level in LEVELS if level.digits < factor_digits + 5)
    if factor_digits < 10 or not levels:
        return QUICK
    return _deep(levels, complete_digits=70 if effort == "thorough" else 60)


def _deep(levels: tuple[EcmLevel, ...], complete_digits: int) -> Plan:
    """The levels, the first one twice over, with p-1 and p+1 at 10 and 5 times the last first bound
    as the README of GMP-ECM advises.

    The second stage of p-1 is cheap: 65 times the last second bound makes the median time to a
    factor of 15 digits least, by the success of p-1 on drawn primes of 15 digits and the time of
    both methods at 2048 bits. At 15 digits p+1 would find less in its time than curves do; rho
    would at any level.
    """
    first, last = levels[0], levels[-1]
    return Plan(
        trial_bound=1_000_000 if last.digits < 25 else 10_000_000,
        complete_digits=complete_digits,
        p_minus_1=(10 * last.b1, 65 * last.b2),
        p_plus_1=(5 * last.b1, 5 * last.b2) if len(levels) > 1 else (0, 0),
        p_plus_1_starts=P_PLUS_1_STARTS if len(levels) > 1 else 0,
        levels=(replace(first, curves=2 * first.curves), *levels[1:]),
    )
