"""What a route returns: the work of an attack with its model, or the reason why it is closed.

Work is the base-2 logarithm of a count, and the unit is named. Different units are compared as
if one step of each cost the same: a group multiplication costs more than a symmetric trial, so
the comparison never makes an attack look dearer than it is.
"""

import math
from dataclasses import dataclass
from enum import StrEnum
from typing import Literal

Attacker = Literal["passive", "peer", "designer"]
"""Who attacks: sees public values; also sends values; chose the parameters."""

Certainty = Literal["exact", "model", "heuristic"]
"""A count that is proved; a published cost model; an interpolation or analogy of ours."""

Bound = Literal["exact", "at most"]
"""Whether something still unknown (an unfactored rest) could lower the figure."""

Detail = tuple[str, int | float | str]


class Unit(StrEnum):
    """What is counted, in words for readers."""

    GROUP_MULTIPLICATIONS = "group multiplications"
    KEY_TRIALS = "key trials and group multiplications"
    SYMMETRIC_TRIALS = "symmetric-key trials"


@dataclass(frozen=True, slots=True)
class Model:
    """The name of a cost model and how well founded it is."""

    name: str
    certainty: Certainty


@dataclass(frozen=True, slots=True)
class Work:
    """How much an attack costs, by which model, for whom.

    ``bits`` is the unrounded base-2 logarithm of a count of ``unit`` and never negative;
    :func:`floor_bits` rounds it. ``bound`` is ``at most`` when an unfactored rest is involved:
    knowing more can then only lower ``bits``. ``explanation`` is one sentence for a security
    engineer; ``details`` are the inputs and intermediate figures worth showing.
    """

    route: str
    attacker: Attacker
    bits: float
    unit: Unit
    model: Model
    source: str
    explanation: str
    bound: Bound = "exact"
    details: tuple[Detail, ...] = ()


@dataclass(frozen=True, slots=True)
class Closed:
    """A route that these parameters, used as they are, do not offer, and why."""

    route: str
    attacker: Attacker
    reason: str


def floor_bits(bits: float) -> float:
    """``bits`` rounded down to 0.01, the one place where figures are rounded.

    A millionth of a bit is forgiven, so that a value that is a whole number of hundredths but
    for floating-point noise stays where it is. Nothing else is: the formula behind the number
    field sieve gives 79.999905 for 1024 bits, which is 79.99 here though tables print 80.
    """
    return math.floor(bits * 100 + 1e-4) / 100


def positive(bits: float) -> float:
    """``bits``, or 0 for the logarithm of less than one step."""
    return max(0.0, bits)


def log2_sum(*terms: float) -> float:
    """log2 of the sum of 2^term; minus infinity for no terms."""
    largest = max(terms, default=-math.inf)
    if largest == -math.inf:
        return largest
    return largest + math.log2(math.fsum(2.0 ** (term - largest) for term in terms))


def log2_difference(larger: float, smaller: float) -> float:
    """log2 of 2^larger - 2^smaller; minus infinity where that is not positive."""
    if larger <= smaller:
        return -math.inf
    return larger + math.log2(1 - 2.0 ** (smaller - larger))
