"""Baby-step giant-step: an exponent in an interval, or the certainty that there is none.

Few steps are kept as group elements in a dictionary, many as fingerprints, which cost a seventh
of a multiplication at 2048 bits.

Source: Shanks, "Class number, a theory of factorization, and genera" (1971); Menezes, van
Oorschot, Vanstone, Handbook of Applied Cryptography (1996), algorithm 3.56 (both from memory).
"""

from array import array
from collections.abc import Iterator
from dataclasses import dataclass
from math import isqrt

from gmpy2 import invert, mpz

from auditor.search.log_fingerprints import Row, prepare
from auditor.search.log_result import Logarithm, NotFound, Tally

WIDEST_BY_ELEMENTS = 2**22
"""Wider intervals repay the preparation of fingerprints, at 64 bits as at 2048."""

WIDEST_ROW = 512
"""Elements prepared together: more gain nothing (181 ns an element at 512, 2048 bits)."""

MOST_STEPS = 2**22
"""Baby steps kept, unless said otherwise: about 400 MB, at 100 bytes each."""


@dataclass(frozen=True, slots=True)
class FewSteps:
    """g^0 .. g^(count - 1) modulo n themselves, each with its exponent, and g^-count."""

    n: mpz
    count: int
    exponents: dict[mpz, int]
    back: mpz

    def search(self, h: int, width: int, tally: Tally) -> Logarithm:
        """The least x with h = g^x and 0 <= x < width; NotFound when there is none."""
        element, n, back, exponents = mpz(h) % self.n, self.n, self.back, self.exponents
        for giant in range(-(-width // self.count)):
            if element in exponents:
                x = giant * self.count + exponents[element]
                tally.spend(giant)
                if x < width:
                    return Logarithm(x, 0, tally.operations)
                raise _nothing(tally)
            element = element * back % n
        tally.spend(-(-width // self.count))
        raise _nothing(tally)


@dataclass(frozen=True, slots=True)
class ManySteps:
    """The fingerprints of g^0 .. g^(count - 1) modulo n, and what the giant steps need."""

    n: mpz
    g: mpz
    count: int
    shifted: bool
    sequence: "array[int]"
    seen: frozenset[int]
    strides: Row
    leap: mpz

    def search(self, h: int, width: int, tally: Tally) -> Logarithm:
        """An x with h = g^x and 0 <= x < width; NotFound when there is none.

        When nothing is found the search is made again with the fingerprints rounded at other
        places, so that NotFound never rests on a rounding.
        """
        element = mpz(h) % self.n
        found = self._search_once(element, width, tally)
        if found is None:
            again = _many_steps(self.n, self.g, self.count, not self.shifted, tally)
            found = again._search_once(element, width, tally)
        if found is None:
            raise _nothing(tally)
        return Logarithm(found, 0, tally.operations)

    def _search_once(self, h: mpz, width: int, tally: Tally) -> int | None:
        across = self.strides.width
        blocks = -(-width // (self.count * across))
        for block, u in enumerate(_geometric(h, self.leap, blocks, self.n, tally)):
            tally.spend(across)
            prints = self.strides.fingerprints(u)
            if not self.seen.isdisjoint(prints):
                for x in self._matches(prints, block * across):
                    if x < width and tally.power(self.g, x, self.n) == h:
                        return x
        return None

    def _matches(self, prints: tuple[int, ...], first: int) -> Iterator[int]:
        """Exponents that the equal fingerprints point to, ascending."""
        for giant, fingerprint in enumerate(prints, first):
            if fingerprint in self.seen:
                for baby, other in enumerate(self.sequence):
                    if other == fingerprint:
                        yield giant * self.count + baby


Steps = FewSteps | ManySteps
"""A table for logarithms to one base, usable any number of times and never changed."""


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

    Work on average sqrt(2 width) operations and at most 1.5 times that. With the steps limited to
    ``most_steps`` = m the work is up to m + width/m; memory is 100 bytes a step. NotFound is
    certain: every exponent in the interval has been excluded. ValueError when g is no unit.
    """
    tally = tally or Tally()
    steps = baby_steps(n, g, width, most_steps=most_steps, tally=tally)
    return steps.search(h, width, tally)


def baby_steps(
    n: int, g: int, width: int, *, most_steps: int = MOST_STEPS, tally: Tally | None = None
) -> Steps:
    """The table for logarithms to the base g in intervals of about ``width`` exponents.

    sqrt(width/2) steps, which makes the average work least. ValueError when g is no unit.
    """
    modulus, tally = mpz(n), tally or Tally()
    count = max(1, min(isqrt(width // 2), most_steps))
    if width <= WIDEST_BY_ELEMENTS:
        return _few_steps(modulus, mpz(g) % modulus, count, tally)
    return _many_steps(modulus, mpz(g) % modulus, count, False, tally)


def _few_steps(n: mpz, g: mpz, count: int, tally: Tally) -> FewSteps:
    tally.spend(count)
    exponents: dict[mpz, int] = {}
    element = mpz(1) % n
    for x in range(count):
        exponents.setdefault(element, x)
        element = element * g % n
    return FewSteps(n, count, exponents, _inverse(element, n))


def _many_steps(n: mpz, g: mpz, count: int, shifted: bool, tally: Tally) -> ManySteps:
    across = min(isqrt(count), WIDEST_ROW)
    count -= count % across
    row, leap = _powers(n, g, across, shifted, tally)
    sequence = array("Q")
    for u in _geometric(mpz(1), leap, count // across, n, tally):
        tally.spend(across)
        sequence.extend(row.fingerprints(u))
    back = tally.power(_inverse(g, n), count, n)
    strides, leap = _powers(n, back, across, shifted, tally)
    return ManySteps(n, g, count, shifted, sequence, frozenset(sequence), strides, leap)


def _powers(n: mpz, g: mpz, count: int, shifted: bool, tally: Tally) -> tuple[Row, mpz]:
    """A row of g^0 .. g^(count - 1), and g^count."""
    *elements, leap = _geometric(mpz(1), g, count + 1, n, tally)
    return prepare(elements, n, shifted), leap


def _geometric(first: mpz, ratio: mpz, count: int, n: mpz, tally: Tally) -> Iterator[mpz]:
    """``count`` elements, each ``ratio`` times the one before."""
    element = first % n
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


def _nothing(tally: Tally) -> NotFound:
    return tally.nothing("no exponent in the interval gives the element")
