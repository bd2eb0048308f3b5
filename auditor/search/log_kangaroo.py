"""Pollard's kangaroos: an exponent in an interval, with next to no memory.

A tame kangaroo starts at the middle of the interval, a wild one at the unknown exponent. Both
jump by distances that depend on where they stand, so that once the wild one lands in a place
where the tame one has been it follows the same path. Only distinguished points are remembered.

Source: Pollard, "Kangaroos, Monopoly and discrete logarithms", J. Cryptology 13 (2000); van
Oorschot, Wiener, "Parallel collision search with cryptanalytic applications" (1999), for
distinguished points (both from memory).
"""

from dataclasses import dataclass
from itertools import count
from math import isqrt

from gmpy2 import mpz, powmod

from auditor.search.log_result import Logarithm, Tally
from auditor.search.log_seed import drawn
from auditor.search.log_steps import logarithm_in_interval

TAME, WILD = 0, 1

JUMPS = 32

NARROWEST = 128
"""Narrower intervals are searched by steps: the jumps alone would cost more to prepare."""
PATIENCE = 16
"""A pair of kangaroos that has made so many times the expected jumps is replaced."""


@dataclass(frozen=True, slots=True)
class Field:
    """The jumps of one pair, (distance, g^distance), and how many bits mark a point."""

    n: mpz
    jumps: tuple[tuple[int, mpz], ...]
    distinguished: int


def kangaroo(
    n: int,
    g: int,
    h: int,
    low: int,
    width: int,
    *,
    order: int = 0,
    seed: int = 0,
    tally: Tally | None = None,
) -> Logarithm:
    """An x with h = g^x and low <= x < low + width, for units g and h modulo n.

    Expected work 2 sqrt(width) operations, at most 4 percent more for the distinguished points.
    Exponents are reduced by ``order``, the order of g or a multiple of it, where that is given. A
    walk cannot tell that there is no such x: then OutOfBudget is raised, and without a budget in
    ``tally`` the search would not end. Intervals of less than 128 exponents are
    searched by steps.
    """
    n, g, h, tally = mpz(n), mpz(g) % n, mpz(h) % n, tally or Tally()
    if width < NARROWEST:
        shifted = h * tally.power(g, -low, n) % n
        found = logarithm_in_interval(n, g, shifted, width, tally=tally)
        return Logarithm(low + found.value, 0, tally.operations)
    for pair in count():
        x = _one_pair(_field(n, g, width, seed, pair, tally), g, h, low, width, tally)
        if x is not None and order:
            x = low + (x - low) % order
        if x is not None and low <= x < low + width and tally.power(g, x, n) == h:
            return Logarithm(x, 0, tally.operations)
    raise AssertionError("pairs do not end")


def _field(n: mpz, g: mpz, width: int, seed: int, pair: int, tally: Tally) -> Field:
    """Jumps of mean exactly sqrt(width)/2: each drawn distance with the one that balances it."""
    mean = max(1, isqrt(width) // 2)
    short = [1 + drawn(mean, seed, "jump", pair, index) for index in range(JUMPS // 2)]
    distances = [distance for d in short for distance in (d, 2 * mean - d)]
    tally.spend(2 * JUMPS * mean.bit_length())
    jumps = tuple((d, powmod(g, d, n)) for d in distances)
    return Field(n, jumps, max(0, mean.bit_length() - 6))


def _one_pair(field: Field, g: mpz, h: mpz, low: int, width: int, tally: Tally) -> int | None:
    """x when the pair meets: they jump in turn until their paths share a distinguished point."""
    branch, mask = JUMPS - 1, (JUMPS << field.distinguished) - 1
    travelled = [low + width // 2, 0]
    places = [tally.power(g, travelled[TAME], field.n), h]
    seen: dict[mpz, tuple[int, int]] = {}
    for jump in range(2 * PATIENCE * (isqrt(width) + JUMPS)):
        kind = jump % 2
        place = places[kind]
        bits = int(place & mask)
        if bits < JUMPS:
            visitor, distance = seen.setdefault(place, (kind, travelled[kind]))
            if visitor != kind:
                return (distance - travelled[WILD]) if kind else (travelled[TAME] - distance)
        tally.spend(1)
        distance, step = field.jumps[bits & branch]
        places[kind] = place * step % field.n
        travelled[kind] += distance
    return None
