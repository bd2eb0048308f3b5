"""The second stage of the p+1 and elliptic-curve methods, over either of their groups.

After stage one a point Q is the identity modulo a prime factor of n except for one prime l in
(b1, b2]. Write l = i d + j with j coprime to d. Then i d Q and -j Q are equal modulo the factor, so
their coordinates agree (the coordinate of a point and of its negative are the same), and the
product of all differences of coordinates shares the factor with n.

The residues j modulo d up to sign are sums over the prime powers q of d of a d/q with a a unit
modulo q (Chinese remainders), so the multiples j Q come from few additions, in batches. The product
over all pairs is a polynomial with the roots coordinate(j Q), reduced by products over blocks of
coordinate(i d Q) (Montgomery and Silverman 1990; Zimmermann and Dodson, "20 years of ECM", 2006,
section 5), by FLINT's fast arithmetic.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import log2, prod
from typing import Protocol, TypeVar

import gmpy2
from gmpy2 import mpz

from auditor.search.polynomials import from_roots, polynomials_modulo

P = TypeVar("P")


class Group(Protocol[P]):
    """An abelian group modulo n, whose factors of n show where group laws or coordinates fail."""

    @property
    def n(self) -> mpz:
        """The modulus."""

    def add_each(self, points: Sequence[P], addend: P) -> list[P]:
        """Each point plus ``addend``; may raise Divisor."""

    def add_and_subtract_each(self, points: Sequence[P], addend: P) -> list[P]:
        """The sums with ``addend``, then the differences; may raise Divisor."""

    def coordinate(self, point: P) -> mpz:
        """A residue modulo n that is the same for a point and its negative only."""

    def identity_coordinate(self) -> mpz | None:
        """The coordinate of the identity; None where it has none and sums to it raise Divisor."""


@dataclass(frozen=True, slots=True)
class Wheel:
    """How [b1, b2] is covered: d and its prime powers, and the multiples first..last of d."""

    d: int
    powers: tuple[tuple[int, int], ...]
    first: int
    last: int

    @property
    def residues(self) -> int:
        """Units modulo d up to sign."""
        return prod(q - q // p for p, q in self.powers) // 2

    @property
    def multiples(self) -> int:
        """Multiples of d that are used."""
        return self.last - self.first + 1


WHEELS = (
    ((2, 4), (3, 3), (5, 5)),
    ((2, 2), (3, 3), (5, 5), (7, 7)),
    ((2, 4), (3, 3), (5, 5), (7, 7)),
    ((2, 2), (3, 9), (5, 5), (7, 7)),
    ((2, 4), (3, 9), (5, 5), (7, 7)),
    ((2, 2), (3, 3), (5, 5), (7, 7), (11, 11)),
    ((2, 4), (3, 3), (5, 5), (7, 7), (11, 11)),
    ((2, 2), (3, 9), (5, 5), (7, 7), (11, 11)),
    ((2, 8), (3, 3), (5, 5), (7, 7), (11, 11)),
    ((2, 4), (3, 9), (5, 5), (7, 7), (11, 11)),
    ((2, 2), (3, 3), (5, 5), (7, 7), (11, 11), (13, 13)),
    ((2, 4), (3, 3), (5, 5), (7, 7), (11, 11), (13, 13)),
    ((2, 2), (3, 9), (5, 5), (7, 7), (11, 11), (13, 13)),
    ((2, 4), (3, 9), (5, 5), (7, 7), (11, 11), (13, 13)),
    ((2, 4), (3, 9), (5, 25), (7, 7), (11, 11), (13, 13)),
    ((2, 2), (3, 3), (5, 5), (7, 7), (11, 11), (13, 13), (17, 17)),
    ((2, 4), (3, 3), (5, 5), (7, 7), (11, 11), (13, 13), (17, 17)),
)


def _largest_offset(powers: Sequence[tuple[int, int]]) -> float:
    """The largest sum of a d/q over the prime powers, as a multiple of d."""
    return sum(max(units(p, q)) / q for p, q in powers)


def units(p: int, q: int) -> list[int]:
    """Units modulo q = p^e, positive halves of pairs of opposites."""
    return [a for a in range(1, max(2, (q + 1) // 2)) if a % p]


@lru_cache(maxsize=16)
def wheel(b1: int, b2: int) -> Wheel:
    """The cheapest wheel that covers the primes in [b1, b2]."""
    return min((_covering(powers, b1, b2) for powers in WHEELS), key=_cost)


def _covering(powers: tuple[tuple[int, int], ...], b1: int, b2: int) -> Wheel:
    d, margin = prod(q for _, q in powers), _largest_offset(powers)
    return Wheel(d, powers, max(1, int(b1 / d - margin)), int(b2 / d + margin) + 1)


def _cost(wheel: Wheel) -> float:
    """Relative cost, in units of a product tree over n roots taken as n log2 n; measured at 2048
    bits: evaluation 4, reducing a polynomial of degree n 6 n, a product reduced 9 n, points."""
    residues, multiples = wheel.residues, wheel.multiples
    cost = _size(residues) + 5 * residues + 3 * multiples
    if multiples <= residues:
        return cost + 6 * residues + 4 * _size(multiples)
    blocks = multiples / residues
    return cost + (blocks + 4) * _size(residues) + 9 * blocks * residues


def _size(count: int) -> float:
    return count * log2(count + 1)


def common_divisor(group: Group[P], point: P, b1: int, b2: int) -> mpz:
    """gcd(n, product over the pairs): shared with every prime factor modulo which ``point`` has a
    prime order in (b1, b2]. May raise Divisor where a point is the identity modulo a factor."""
    plan = wheel(b1, b2)
    *bases, giant, first = multiples(
        group, point, [*(plan.d // q for _, q in plan.powers), plan.d, plan.first * plan.d]
    )
    roots = [group.coordinate(p) for p in _small_steps(group, bases, plan)]
    steps = progression(group, first, giant, plan.multiples)
    values = [group.coordinate(p) for p in steps]
    identity = group.identity_coordinate()
    if identity is not None:  # the multiple 0 of d, for primes that are residues themselves
        values.append(identity)
    return gmpy2.gcd(_product(values, roots, group.n), group.n)


def times(group: Group[P], point: P, scalar: int) -> P:
    """A positive multiple of a point."""
    [multiple] = multiples(group, point, [scalar])
    return multiple


def multiples(group: Group[P], point: P, scalars: Sequence[int]) -> list[P]:
    """Positive multiples of a point, by doubling it once for all of them."""
    sums: dict[int, P] = {}
    bits = max(scalars).bit_length()
    for bit in range(bits):
        adding = [i for i, scalar in enumerate(scalars) if scalar >> bit & 1]
        started = [i for i in adding if i in sums]
        added = group.add_each([sums[i] for i in started], point) if started else []
        sums.update(dict.fromkeys(adding, point) | dict(zip(started, added, strict=True)))
        if bit + 1 < bits:
            [point] = group.add_each([point], point)
    return [sums[i] for i in range(len(scalars))]


def progression(group: Group[P], first: P, step: P, count: int) -> list[P]:
    """``count`` points from ``first`` by ``step``, doubling the list each time."""
    points = [first]
    while len(points) < count:
        points += group.add_each(points[: count - len(points)], step)
        [step] = group.add_each([step], step)
    return points


def _small_steps(group: Group[P], bases: Sequence[P], plan: Wheel) -> list[P]:
    """j times the point for each unit j modulo d, up to sign, from the multiples d/q.

    The units of the largest prime power are taken from one half only; that fixes the sign. They
    come first and the others in order, so that few points are added to more than once.
    """
    points: list[P] = []
    *others, largest = zip(plan.powers, bases, strict=True)
    for (p, q), base in (largest, *others):
        by_one = progression(group, base, base, units(p, q)[-1])
        part = [by_one[a - 1] for a in units(p, q)]
        combine = group.add_and_subtract_each if q > 2 else group.add_each
        points = [s for m in part for s in combine(points, m)] if points else part
    return points


def _product(values: Sequence[mpz], roots: Sequence[mpz], n: mpz) -> mpz:
    """The product of all value - root, up to sign."""
    polynomials = polynomials_modulo(n)
    with_roots = from_roots(roots, polynomials)
    block = len(roots)
    if len(values) <= block:
        results = with_roots.multipoint_evaluate([int(value) for value in values])
    else:
        reduced = polynomials.one()
        for start in range(0, len(values), block):
            factor = from_roots(values[start : start + block], polynomials)
            reduced = reduced * factor % with_roots
        results = reduced.multipoint_evaluate([int(root) for root in roots])
    product = mpz(1)
    for result in results:
        product = product * mpz(int(result)) % n
    return product
