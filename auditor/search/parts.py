"""A number in coprime parts, split as divisors become known."""

from collections.abc import Iterable
from dataclasses import dataclass
from math import gcd, prod

from auditor.search.primality import is_likely_prime, perfect_power

Powers = dict[int, int]


class Parts:
    """m = product of part^exponent, the parts coprime to each other and no perfect powers.

    An interruption leaves it as it was before a division or as it is after: both are products of m.
    """

    def __init__(self, m: int) -> None:
        self._kinds = _sorted_out({m: 1})

    @property
    def open(self) -> int:
        """The product of the composite parts, each once; 1 when there are none."""
        return prod(self._kinds.composite)

    def primes(self) -> tuple[tuple[int, int], ...]:
        """The likely primes and their exponents, in increasing order."""
        return tuple(sorted(self._kinds.prime.items()))

    def composites(self) -> tuple[tuple[int, int], ...]:
        """The composite parts and their exponents, in increasing order."""
        return tuple(sorted(self._kinds.composite.items()))

    def divide(self, divisors: Iterable[int]) -> Powers:
        """Splits the composite parts by each divisor; the likely primes that this brought."""
        before = self._kinds
        pieces = before.composite
        for divisor in divisors:
            pieces = _split(pieces, divisor)
        kept = {part: e for part, e in before.composite.items() if part in pieces}
        new = _sorted_out({piece: e for piece, e in pieces.items() if piece not in kept})
        self._kinds = _Kinds(before.prime | new.prime, kept | new.composite)
        return new.prime


@dataclass(frozen=True, slots=True)
class _Kinds:
    """The parts by kind: likely primes, and certainly composite."""

    prime: Powers
    composite: Powers


def _sorted_out(pieces: Powers) -> _Kinds:
    kinds = _Kinds({}, {})
    for piece, exponent in pieces.items():
        base, power = (piece > 1 and perfect_power(piece)) or (piece, 1)
        if base > 1:
            kind = kinds.prime if is_likely_prime(base) else kinds.composite
            kind[base] = exponent * power
    return kinds


def _split(pieces: Powers, divisor: int) -> Powers:
    """The pieces, those that share a proper divisor with ``divisor`` split by it."""
    split: Powers = {}
    for piece, exponent in pieces.items():
        common = gcd(piece, divisor)
        if 1 < common < piece:
            finer = coprime_base(common, piece // common)
            split.update({part: power * exponent for part, power in finer.items()})
        else:
            split[piece] = exponent
    return split


def coprime_base(a: int, b: int) -> Powers:
    """Numbers coprime to each other whose powers give a b, with their exponents in a b.

    Source: E. Bach, J. Driscoll, J. Shallit, "Factor refinement", J. Algorithms 15, 1993.
    """
    base: list[tuple[int, int]] = []
    waiting = [(a, 1), (b, 1)]
    while waiting:
        number, exponent = waiting.pop()
        for i, (other, power) in enumerate(base):
            common = gcd(number, other)
            if common > 1:
                del base[i]
                waiting += [
                    (number // common, exponent),
                    (common, exponent + power),
                    (other // common, power),
                ]
                break
        else:
            if number > 1:
                base.append((number, exponent))
    return dict(base)
