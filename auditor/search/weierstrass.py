"""Elliptic curves Y^2 = X^3 + a2 X^2 + a4 X + a6 modulo n in affine points, many at a time.

With one shared inversion, an addition takes six products: less than in any inversion-free form.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from gmpy2 import mpz

from auditor.search.divisor import inverses

Point = tuple[mpz, mpz]


@dataclass(frozen=True, slots=True)
class Weierstrass:
    """The curve; a6 is not needed, it follows from a point."""

    n: mpz
    a2: mpz
    a4: mpz

    def add_each(self, points: Sequence[Point], addend: Point) -> list[Point]:
        """Each point plus ``addend``, twice the point where they are equal.

        Raises Divisor where a sum is the identity modulo a factor of n, or where a point equals
        ``addend`` modulo a factor but not modulo n.
        """
        n, a2 = self.n, self.a2
        x2, y2 = addend
        slopes = [
            (y2 - y1, x2 - x1) if x1 != x2 or y1 != y2 else self._tangent(addend)
            for x1, y1 in points
        ]
        shift = a2 + x2
        sums = []
        for (x1, _), (rise, _), over_run in zip(
            points, slopes, inverses([run for _, run in slopes], n), strict=True
        ):
            slope = rise * over_run % n
            x3 = (slope * slope - shift - x1) % n
            sums.append((x3, (slope * (x2 - x3) - y2) % n))
        return sums

    def _tangent(self, point: Point) -> tuple[mpz, mpz]:
        x, y = point
        return (3 * x + 2 * self.a2) * x + self.a4, 2 * y

    def add_and_subtract_each(self, points: Sequence[Point], addend: Point) -> list[Point]:
        """Each point plus ``addend``, then each less it: both have slopes over the same run.

        Raises Divisor where a point and ``addend`` have the same x modulo a factor of n.
        """
        n = self.n
        x2, y2 = addend
        over_runs = inverses([x2 - x1 for x1, _ in points], n)
        sums = []
        for y in (y2, -y2):
            for (x1, y1), over_run in zip(points, over_runs, strict=True):
                slope = (y - y1) * over_run % n
                x3 = (slope * slope - self.a2 - x1 - x2) % n
                sums.append((x3, (slope * (x2 - x3) - y) % n))
        return sums

    def identity_coordinate(self) -> None:
        """None: the identity is the point at infinity."""

    def coordinate(self, point: Point) -> mpz:
        """X, which a point shares with its negative."""
        return point[0]
