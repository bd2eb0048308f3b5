"""Baby-step giant-step: an exponent in an interval, or the certainty that there is none.

Source: Shanks, "Class number, a theory of factorization, and genera" (1971); Menezes, van
Oorschot, Vanstone, Handbook of Applied Cryptography (1996), algorithm 3.56 (both from memory).
"""

from array import array
from collections.abc import Iterator
from dataclasses import dataclass
from math import isqrt

from gmpy2 import invert, mpz

from auditor.search.log_fingerprints import Row, prepare
from auditor.search.log_result import Logarithm, Tally

SCANNED = 128
"""Up to so many exponents are tried one by one: a table would cost more to make."""

WIDEST_ROW = 512
"""Elements prepared together: more gain nothing (181 ns an element at 512, 2048 bits)."""

MOST_STEPS = 2**22
"""Baby steps kept, unless said otherwise: about 300 MB, at 75 bytes each."""


@dataclass(frozen=True, slots=True)
class Steps:
    """The fingerprints of g^0 .. g^(count - 1) modulo n, and what the giant steps need.

    Usable for any number of logarithms to the same base; never changed after it is made.
    """

    n: mpz
    g: mpz
    count: int
    shifted: bool
    sequence: "array[int]"
    seen: frozenset[int]
    strides: Row
    leap: mpz


def logarithm_in_interval(
    n: int,
    g: int,
    h: int,
    width: int,
    *,
    most_steps: int = MOST_STEPS,
    tally: Tally | None = None,
) -> Logarithm:
    """The x with h = g^x and 0 <= x < width, for units g and h modulo n.

    Work on average sqrt(2 width) operations and at most 1.5 times that; memory 75 bytes for each
    of sqrt(width/2) steps. With the steps limited to ``most_steps`` = m the work is up to
    m + width/m. NotFound is certain: every exponent in the interval has been excluded.
    """
    tally = tally or Tally()
    if width <= SCANNED:
        return _scan(mpz(n), mpz(g), mpz(h), width, tally)
    steps = baby_steps(n, g, width, most_steps=most_steps, tally=tally)
    return giant_steps(steps, h, width, tally=tally)


def baby_steps(
    n: int,
    g: int,
    width: int,
    *,
    most_steps: int = MOST_STEPS,
    shifted: bool = False,
    tally: Tally | None = None,
) -> Steps:
    """The table for logarithms to the base g in intervals of about ``width`` exponents.

    ValueError when g is not a unit modulo n.
    """
    n, g, tally = mpz(n), mpz(g) % n, tally or Tally()
    count = max(1, min(isqrt(width // 2), most_steps))
    across = max(1, min(isqrt(count), WIDEST_ROW))
    count -= count % across
    row, leap = _powers(n, g, across, shifted, tally)
    sequence = array("Q")
    for u in _geometric(mpz(1), leap, count // across, n, tally):
        tally.spend(across)
        sequence.extend(row.fingerprints(u))
    backwards = tally.power(_inverse(g, n), count, n)
    strides, leap = _powers(n, backwards, across, shifted, tally)
    return Steps(n, g, count, shifted, sequence, frozenset(sequence), strides, leap)


def giant_steps(steps: Steps, h: int, width: int, *, tally: Tally | None = None) -> Logarithm:
    """The x with h = g^x and 0 <= x < width, by the table ``steps`` for g.

    When nothing is found the search is made again with the fingerprints rounded at other places,
    so that NotFound never rests on a rounding.
    """
    tally = tally or Tally()
    found = _search(steps, mpz(h) % steps.n, width, tally)
    if found is None:
        again = baby_steps(
            steps.n, steps.g, 2 * steps.count**2, shifted=not steps.shifted, tally=tally
        )
        found = _search(again, mpz(h) % steps.n, width, tally)
    if found is None:
        raise tally.nothing("no exponent in the interval gives the element")
    return Logarithm(found, 0, tally.operations)


def _search(steps: Steps, h: mpz, width: int, tally: Tally) -> int | None:
    across = steps.strides.width
    blocks = -(-width // (steps.count * across))
    for block, u in enumerate(_geometric(h, steps.leap, blocks, steps.n, tally)):
        tally.spend(across)
        prints = steps.strides.fingerprints(u)
        if not steps.seen.isdisjoint(prints):
            for x in _matches(steps, prints, block * across):
                if x < width and tally.power(steps.g, x, steps.n) == h:
                    return x
    return None


def _matches(steps: Steps, prints: tuple[int, ...], first: int) -> Iterator[int]:
    """Exponents that the equal fingerprints point to, ascending."""
    for giant, fingerprint in enumerate(prints, first):
        if fingerprint in steps.seen:
            for baby, other in enumerate(steps.sequence):
                if other == fingerprint:
                    yield giant * steps.count + baby


def _scan(n: mpz, g: mpz, h: mpz, width: int, tally: Tally) -> Logarithm:
    h %= n
    for x, power in enumerate(_geometric(mpz(1) % n, g, width, n, tally)):
        if power == h:
            return Logarithm(x, 0, tally.operations)
    raise tally.nothing("no exponent in the interval gives the element")


def _powers(n: mpz, g: mpz, count: int, shifted: bool, tally: Tally) -> tuple[Row, mpz]:
    """A row of g^0 .. g^(count - 1), and g^count."""
    *elements, leap = _geometric(mpz(1) % n, g, count + 1, n, tally)
    return prepare(elements, n, shifted), leap


def _geometric(first: mpz, ratio: mpz, count: int, n: mpz, tally: Tally) -> Iterator[mpz]:
    """``count`` elements, each ``ratio`` times the one before."""
    element = first
    for index in range(count):
        if index:
            tally.spend(1)
            element = element * ratio % n
        yield element


def _inverse(g: mpz, n: mpz) -> mpz:
    try:
        return invert(g, n)
    except ZeroDivisionError as error:
        raise ValueError("the base is not a unit of the modulus") from error
