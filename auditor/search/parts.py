"""A number in coprime parts, split as divisors become known."""

from collections.abc import Iterable
from math import gcd, prod

from auditor.search.primality import is_likely_prime, perfect_power

Powers = dict[int, int]


class Parts:
    """m = product of part^exponent, the parts coprime to each other and no perfect powers."""

    def __init__(self, m: int) -> None:
        self._prime: Powers = {}
        self._composite: Powers = {}
        self._take({m: 1})

    @property
    def open(self) -> int:
        """The product of the composite parts, each once; 1 when there are none."""
        return prod(self._composite)

    def primes(self) -> tuple[tuple[int, int], ...]:
        """The likely primes and their exponents, in increasing order."""
        return tuple(sorted(self._prime.items()))

    def composites(self) -> tuple[tuple[int, int], ...]:
        """The composite parts and their exponents, in increasing order."""
        return tuple(sorted(self._composite.items()))

    def divide(self, divisors: Iterable[int]) -> Powers:
        """Splits the composite parts by each divisor; the likely primes that this brought."""
        before = dict(self._prime)
        pieces = dict(self._composite)
        for divisor in divisors:
            pieces = _split(pieces, divisor)
        new = {piece: e for piece, e in pieces.items() if piece not in self._composite}
        self._composite = {part: e for part, e in self._composite.items() if part in pieces}
        self._take(new)
        return {p: e for p, e in self._prime.items() if p not in before}

    def _take(self, pieces: Powers) -> None:
        for piece, exponent in pieces.items():
            base, power = (piece > 1 and perfect_power(piece)) or (piece, 1)
            if base > 1:
                kind = self._prime if is_likely_prime(base) else self._composite
                kind[base] = exponent * power


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
