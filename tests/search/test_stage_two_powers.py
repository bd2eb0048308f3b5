"""The second stage of p-1: every prime of its range is met, and nothing beyond its reach."""

from itertools import count
from math import prod

import pytest
import sympy
from gmpy2 import mpz

from auditor.search import stage_two_powers
from auditor.search.stage_two import WHEELS, units

COFACTOR = 2**127 - 1


def element_of_order(order: int) -> tuple[int, mpz, mpz]:
    """A prime r, a number n = r (2^127 - 1), and an element modulo n of that prime order modulo r
    and of a large one modulo the other factor."""
    r = next(r for k in count(2, 2) if sympy.isprime(r := k * order + 1) and k % order)
    root = next(x for b in count(2) if (x := pow(b, (r - 1) // order, r)) != 1)
    n = r * COFACTOR
    a = root * COFACTOR * pow(COFACTOR, -1, r) + 3 * r * pow(r, -1, COFACTOR)
    return r, mpz(n), mpz(a % n)


def residues(powers: tuple[tuple[int, int], ...], d: int) -> list[int]:
    """The set J, from its definition."""
    sums = [0]
    for p, q in powers:
        sums = [s + sign * u * d // q for s in sums for u in units(p, q) for sign in (1, -1)]
    return sums


@pytest.mark.parametrize("powers", WHEELS)
def test_every_prime_of_the_range_is_met(powers: tuple[tuple[int, int], ...]) -> None:
    """Each prime in (b1, b2] is a point plus or minus a residue."""
    d = prod(q for _, q in powers)
    if d > 200_000:
        powers = powers[:5]
        d = prod(q for _, q in powers)
    for b1, b2 in ((d // 3, 2 * d), (7 * d + 1, 9 * d)):
        plan = stage_two_powers._covering(powers, b1, b2)
        steps = residues(plan.powers, d)
        points = [(2 * i + plan.odd) * d // 2 for i in range(plan.first, plan.last + 1)]

        assert len(steps) == plan.degree
        assert len(points) == plan.points
        met = {abs(e + j) for e in points for j in steps}
        assert set(sympy.primerange(max(b1 + 1, 18), b2 + 1)) <= met


@pytest.mark.parametrize("block", [7, 4096])
@pytest.mark.parametrize(("b1", "b2"), [(20, 400), (2_000, 2_600), (700, 9_000)])
def test_a_prime_order_in_the_range_is_found(
    b1: int, b2: int, block: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whatever the order, and in however many blocks the points are evaluated."""
    monkeypatch.setattr(stage_two_powers, "LEAST_BLOCK", block)
    orders = list(sympy.primerange(b1 + 1, b2 + 1))
    for order in orders[:: max(1, len(orders) // 25)]:
        r, n, a = element_of_order(order)
        assert stage_two_powers.common_divisor(a, b1, b2, n) == r


def test_an_order_beyond_the_reach_is_not_found() -> None:
    """No pair differs by a multiple of it."""
    plan = stage_two_powers.cover(100, 3_000)
    beyond = sympy.nextprime((plan.last + 3) * plan.d)
    _, n, a = element_of_order(beyond)

    assert stage_two_powers.common_divisor(a, 100, 3_000, n) == 1


def test_the_values_are_those_of_the_polynomial() -> None:
    """Against the product over all pairs, which has the same greatest common divisors."""
    n, a = mpz(1009 * 2003 * 3001), mpz(17)
    plan = stage_two_powers.cover(50, 900)
    steps = residues(plan.powers, plan.d)
    values = stage_two_powers._values(
        stage_two_powers._with_roots(a, plan, n), pow(a, plan.d // 2, n), plan, n
    )
    for i, value in zip(range(plan.first, plan.last + 1), values, strict=True):
        point = pow(a, (2 * i + plan.odd) * plan.d // 2, n)
        expected = prod(point - pow(a, j, n) for j in steps)
        for prime in (1009, 2003, 3001):
            assert (value % prime == 0) == (expected % prime == 0)
