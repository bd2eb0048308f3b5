"""Curves, their arithmetic and both stages, against definitions and PARI's group orders."""

from collections.abc import Sequence
from dataclasses import dataclass
from math import gcd, lcm, prod

import pytest
import sympy
from cypari import pari
from gmpy2 import mpz
from hypothesis import given
from hypothesis import strategies as st

from auditor.search import edwards, stage_two
from auditor.search.ecm import EdwardsCurve, curve, parameter, run_curve
from auditor.search.lucas import NormOne
from auditor.search.weierstrass import Weierstrass

primes = st.integers(2**20, 2**90).map(lambda start: int(sympy.nextprime(start)))
large_primes = st.integers(2**60, 2**90).map(lambda start: int(sympy.nextprime(start)))
parameters = st.integers(6, 2**32)


def added(drawn: EdwardsCurve, a: tuple[mpz, mpz], b: tuple[mpz, mpz]) -> tuple[mpz, mpz]:
    """The addition law as defined, by two inversions."""
    n = int(drawn.n)
    (x1, y1), (x2, y2) = a, b
    mixed = int(drawn.d * x1 * x2 * y1 * y2)
    x3 = (x1 * y2 + y1 * x2) * pow(1 + mixed, -1, n) % n
    y3 = (y1 * y2 + x1 * x2) * pow(1 - mixed, -1, n) % n
    return x3, y3


def multiple(drawn: EdwardsCurve, scalar: int) -> tuple[mpz, mpz]:
    """Double and add."""
    result = (mpz(0), mpz(1))
    for bit in bin(scalar)[2:]:
        result = added(drawn, result, result)
        if bit == "1":
            result = added(drawn, result, (drawn.x, drawn.y))
    return result


@given(primes, parameters)
def test_a_drawn_point_lies_on_its_curve(p: int, k: int) -> None:
    """-x^2 + y^2 = 1 + d x^2 y^2 modulo n."""
    drawn = curve(mpz(p), k)
    xx, yy = drawn.x**2, drawn.y**2

    assert (-xx + yy - 1 - drawn.d * xx * yy) % p == 0


@given(large_primes, parameters, st.integers(2, 400))
def test_a_chain_multiplies_by_the_least_common_multiple(p: int, k: int, b1: int) -> None:
    """Against doubling and adding by the law as defined."""
    drawn = curve(mpz(p), k)
    expected = multiple(drawn, lcm(*range(1, b1 + 1)))
    x, y, z = edwards.multiply((drawn.x, drawn.y), b1, mpz(p))

    assert (x - expected[0] * z) % p == 0
    assert (y - expected[1] * z) % p == 0


@given(st.integers(1, 2**600))
def test_a_chain_spells_its_scalar(scalar: int) -> None:
    """Starting value, doublings and additions of odd multiples give the scalar back."""
    steps = edwards.chain(mpz(scalar))
    value = 2 * steps.first + 1
    for doublings, digit in zip(steps.doublings, steps.digits, strict=True):
        value = (value << doublings) + 2 * digit + 1
        assert abs(2 * digit + 1) < 1 << (steps.width - 1)

    assert value << steps.last == scalar


def test_long_scalars_take_several_chains(monkeypatch: pytest.MonkeyPatch) -> None:
    """The multiple is the same however the scalar is cut."""
    n = mpz((2**89 - 1) * (2**107 - 1))
    drawn = curve(n, 77)
    x, _, z = edwards.multiply((drawn.x, drawn.y), 1000, n)
    monkeypatch.setattr(edwards, "CHUNK_BITS", 100)
    edwards.chains.cache_clear()
    assert len(edwards.chains(1000)) > 10
    other_x, _, other_z = edwards.multiply((drawn.x, drawn.y), 1000, n)
    edwards.chains.cache_clear()

    assert (x * other_z - other_x * z) % n == 0


@given(large_primes, st.integers(1, 2**40), st.integers(1, 2**40))
def test_affine_points_are_a_group(p: int, a: int, b: int) -> None:
    """(a + b) P = a P + b P, with PARI as the judge of a P. (The prime is too large for a sum to be
    the identity.)"""
    family = Weierstrass(mpz(p), mpz(284), mpz(24960))
    point = (mpz(-120 % p), mpz(240 % p))
    oracle = pari.ellinit([0, 284, 0, 24960, 691200], p)
    multiple_a = stage_two.times(family, point, a)
    [both] = family.add_each([multiple_a], stage_two.times(family, point, b))

    assert both == stage_two.times(family, point, a + b)
    if a != b:
        larger, smaller = (stage_two.times(family, point, c) for c in (max(a, b), min(a, b)))
        difference = stage_two.times(family, point, abs(a - b))
        assert family.add_and_subtract_each([larger], smaller) == [both, difference]
    assert [int(c) for c in multiple_a] == [
        int(c.lift()) for c in pari.ellmul(oracle, [-120, 240], a)
    ]


def test_a_curve_finds_what_its_group_order_says() -> None:
    """Over 150 curves modulo primes of 30 bits: a factor is found whenever the order of the point
    is smooth up to one prime of the second stage. Every order is divisible by 12 (PARI)."""
    b1, b2 = 80, 4000
    cofactor = 2**61 - 1
    promised = 0
    for number in range(150):
        p = int(sympy.nextprime(2**29 + 10**6 * number))
        drawn = curve(mpz(p), number + 6)
        over = pow(int(-1 - drawn.d), -1, p)
        a, b = 2 * (int(drawn.d) - 1) * over % p, 4 * over % p
        oracle = pari.ellinit([0, a * b % p, 0, b * b % p, 0], p)
        u = (1 + int(drawn.y)) * pow(1 - int(drawn.y), -1, p) % p
        point = [b * u % p, b * b * u * pow(int(drawn.x), -1, p) % p]
        assert pari.ellisoncurve(oracle, point)
        assert int(pari.ellcard(oracle)) % 12 == 0
        order = sorted(q**e for q, e in sympy.factorint(int(pari.ellorder(oracle, point))).items())
        if order[-1] <= b2 and (len(order) < 2 or order[-2] <= b1):
            promised += 1
            assert run_curve(p * cofactor, b1, b2, number + 6) % p == 0
    assert promised >= 10


def test_parameters_differ_by_number_bound_and_index() -> None:
    """A fixed value pins the derivation, which resumed searches rely on."""
    drawn = {parameter(n, b1, i) for n in (101, 103) for b1 in (50, 60) for i in range(50)}

    assert len(drawn) == 200
    assert parameter(101, 50, 0) == parameter(101, 50, 0) == 2907298311


@dataclass(frozen=True)
class Integers:
    """The group of integers, whose coordinate is the absolute value."""

    n: mpz

    def add_each(self, points: Sequence[int], addend: int) -> list[int]:
        """Sums."""
        return [point + addend for point in points]

    def add_and_subtract_each(self, points: Sequence[int], addend: int) -> list[int]:
        """Sums and differences."""
        return self.add_each(points, addend) + self.add_each(points, -addend)

    def identity_coordinate(self) -> mpz:
        """Zero."""
        return mpz(0)

    def coordinate(self, point: int) -> mpz:
        """The absolute value."""
        return mpz(abs(point))


@pytest.mark.parametrize("powers", stage_two.WHEELS[:9], ids=str)
def test_a_wheel_meets_every_prime_of_its_range(powers: tuple[tuple[int, int], ...]) -> None:
    """Each prime in [b1, b2] is i d + j or i d - j for a used i, or 0, and a residue j."""
    d = prod(q for _, q in powers)
    b1, b2 = d // 2 + 13, 5 * d
    plan = stage_two._covering(powers, b1, b2)
    residues = stage_two._small_steps(Integers(mpz(0)), [d // q for _, q in powers], plan)

    assert len(residues) == plan.residues == sympy.totient(d) // 2
    met = {
        abs(i * d + sign * j)
        for i in (0, *range(plan.first, plan.last + 1))
        for j in residues
        for sign in (1, -1)
    }
    assert set(sympy.primerange(max(b1, 18), b2 + 1)) <= met


def test_wheels_are_what_they_say() -> None:
    """The prime powers of every wheel are powers of its primes, in increasing order of primes."""
    for powers in stage_two.WHEELS:
        assert [p for p, _ in powers] == list(sympy.primerange(powers[-1][0] + 1))
        assert all(sympy.factorint(q).keys() == {p} for p, q in powers)


@given(st.lists(st.integers(0, 2**64), min_size=1, max_size=40), st.integers(1, 60))
def test_the_product_over_all_pairs(roots: list[int], count: int) -> None:
    """Against the plain double product, with fewer and with more values than roots."""
    n = mpz((2**61 - 1) * (2**89 - 1))
    values = [mpz(7**i % n) for i in range(count)]
    found = stage_two._product(values, [mpz(root) for root in roots], n)
    plain = prod(value - root for value in values for root in roots)

    assert found in (plain % n, -plain % n)


@given(st.integers(2, 2**60), st.integers(1, 10**6), st.integers(1, 10**6))
def test_norm_one_elements_are_a_group(half: int, a: int, b: int) -> None:
    """Coordinates are half the traces: Chebyshev values, which compose."""
    n = mpz(2**89 - 1)
    group = NormOne(n, (mpz(half) ** 2 - 1) % n)
    element = (mpz(half), mpz(1))
    power_a = stage_two.times(group, element, a)
    [both] = group.add_each([power_a], stage_two.times(group, element, b))

    assert both == stage_two.times(group, element, a + b)
    assert group.add_and_subtract_each([power_a], power_a)[1] == (1, 0)


@pytest.mark.parametrize("bounds", [(100, 0), (100, 100), (100, 3000)])
def test_nothing_is_found_where_nothing_is(bounds: tuple[int, int]) -> None:
    """Two factors far above the bounds."""
    n = (2**127 - 1) * (2**107 - 1)

    assert run_curve(n, *bounds, 12345) == 1


def test_divisors_divide() -> None:
    """Whatever a curve returns divides the number, also when everything degenerates."""
    for n in (5 * 7, 11 * 13 * 17, 35 * 143, 2**61 - 1):
        for k in range(6, 60):
            divisor = run_curve(n, 20, 200, k)
            assert divisor == gcd(divisor, n)
