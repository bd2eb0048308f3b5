"""Each method of the factor search keeps its promise, against definitions and other libraries."""

from math import gcd, lcm, prod

import gmpy2
import pytest
import sympy
from gmpy2 import mpz
from hypothesis import given
from hypothesis import strategies as st

from auditor.search import lucas
from auditor.search.divisor import Divisor, inverses
from auditor.search.parts import Parts, coprime_base
from auditor.search.primes import exponents, primes_of_lcm, primes_up_to
from auditor.search.rho import fermat, rho
from auditor.search.trial import small_factors

odd_primes = st.integers(3, 2**20).map(sympy.nextprime)


@given(st.integers(-3, 5000))
def test_primes_are_all_primes(bound: int) -> None:
    """Against sympy's sieve."""
    assert list(primes_up_to(bound)) == list(sympy.primerange(bound + 1))


@given(st.integers(1, 3000), st.integers(20, 3000))
def test_exponents_multiply_to_the_least_common_multiple(b1: int, bits: int) -> None:
    """By the definition of lcm(1, ..., b1)."""
    whole = lcm(*range(1, b1 + 1))

    assert prod(primes_of_lcm(b1)) == whole
    assert prod(exponents(b1, bits)) == whole


@given(st.integers(1, 2**200))
def test_small_factors_are_all_of_them(m: int) -> None:
    """Every prime below the bound that divides, and no other number."""
    assert small_factors(m, 5000) == [p for p in sympy.primerange(5001) if m % p == 0]


@given(st.lists(st.integers(1, 10**6), min_size=1), odd_primes, odd_primes)
def test_inverses_or_a_divisor(numbers: list[int], p: int, q: int) -> None:
    """Either every product with its inverse is 1, or a common divisor is told."""
    n = mpz(p * q)
    common = gcd(prod(numbers), p * q)
    if common > 1:
        with pytest.raises(Divisor) as caught:
            inverses([mpz(number) for number in numbers], n)
        assert caught.value.divisor == common
    else:
        inverted = inverses([mpz(number) for number in numbers], n)
        assert all(a * b % n == 1 for a, b in zip(numbers, inverted, strict=True))


@given(st.integers(1, 10**12), st.integers(1, 10**12))
def test_coprime_base(a: int, b: int) -> None:
    """Coprime numbers whose powers multiply to the product, and that build both."""
    base = coprime_base(a, b)

    assert prod(number**exponent for number, exponent in base.items()) == a * b
    numbers = list(base)
    assert all(gcd(x, y) == 1 for i, x in enumerate(numbers) for y in numbers[:i])
    for number in (a, b):
        for part in numbers:
            number = int(gmpy2.remove(number, part)[0])
        assert number == 1


@given(st.lists(odd_primes, min_size=1, max_size=6), st.lists(st.integers(2, 2**40), max_size=5))
def test_parts_keep_the_number(primes: list[int], divisors: list[int]) -> None:
    """Whatever is used as a divisor, the parts multiply to the number; primes complete them."""
    m = prod(primes)
    parts = Parts(m)
    parts.divide(divisors)
    everything = (*parts.primes(), *parts.composites())

    assert prod(part**exponent for part, exponent in everything) == m
    assert not any(sympy.isprime(part) for part, _ in parts.composites())
    parts.divide(primes)
    assert dict(parts.primes()) == sympy.factorint(m)
    assert parts.open == 1


@given(odd_primes, odd_primes)
def test_rho_finds_a_factor_of_twenty_bits(p: int, q: int) -> None:
    """Within 2^13 steps both factors or, when they collide at once, their product."""
    assert prod(rho(p * q, 1 << 13)) == p * q


def test_rho_tells_factors_apart_that_one_batch_swallows() -> None:
    """Factors so small that all appear among the first 128 differences; only equal cycles fail."""
    pairs = [(p, q) for p in sympy.primerange(50, 150) for q in sympy.primerange(150, 250)]
    proper = [sorted(rho(p * q, 1 << 10)) == [p, q] for p, q in pairs]

    assert proper.count(True) > 0.8 * len(pairs)


def test_rho_stops_in_time() -> None:
    """Nothing is found, and nothing claimed, within too few steps."""
    assert rho((2**89 - 1) * (2**107 - 1), 1000) == []


def test_rho_goes_on_after_a_find() -> None:
    """Small factors first, then the larger one; the largest is out of reach."""
    p, q, r = 1009, 10**8 + 7, 2**89 - 1

    assert rho(p * q * r, 1 << 16) == [p, q]


@given(st.integers(2**60, 2**61), st.integers(0, 2**31))
def test_fermat_finds_close_factors(start: int, gap: int) -> None:
    """Factors p <= q with (p - q)^2 < 8 sqrt(n) are found at the first step, or the second."""
    p = int(sympy.nextprime(start))
    q = int(sympy.nextprime(p + gap))

    steps = (q - p) ** 2 // (8 * p) + 2
    assert fermat(p * q, steps) == [p, q]


def test_fermat_gives_up() -> None:
    """Distant factors are not found; a prime is only 1 times itself."""
    assert fermat((2**61 - 1) * (2**31 - 1), 100) == []
    assert fermat(2**61 - 1, 100) == []
    assert fermat(7, 100) == [1, 7]


COFACTOR = 2**127 - 1
"""A prime r out of reach of every bound below: r-1 has a prime factor above 10^10, r+1 = 2^127."""


def neighbour(smooth: int, sign: int) -> int:
    """The least prime k smooth + sign."""
    return next(n for k in range(2, 1000, 2) if sympy.isprime(n := k * smooth + sign))


IN_STAGE_ONE = 2 * prod(sympy.primerange(200, 300))
IN_STAGE_TWO = IN_STAGE_ONE * 3989
IS_A_RESIDUE = IN_STAGE_ONE * 379
"""The last prime is above b1 = 300 but so near that it may be a residue j of the wheel itself."""
REACHES = [(IN_STAGE_ONE, 0), (IN_STAGE_TWO, 4000), (IS_A_RESIDUE, 4000)]


@pytest.mark.parametrize(("smooth", "b2"), REACHES)
def test_p_minus_1_keeps_its_promise(smooth: int, b2: int) -> None:
    """p-1 smooth, up to one prime in the second stage, is found; one prime too few, and not."""
    p = neighbour(smooth, 1)

    assert lucas.p_minus_1(p * COFACTOR, 300, b2) == [p]
    assert lucas.p_minus_1(p * COFACTOR, 290, 0) == []


@pytest.mark.parametrize(("smooth", "b2"), REACHES)
def test_p_plus_1_keeps_its_promise(smooth: int, b2: int) -> None:
    """p+1 smooth is found from the starts whose order divides p+1, and from no other."""
    p = neighbour(smooth, -1)
    found = []
    for start, (a, b) in enumerate(lucas.P_PLUS_1_STARTS):
        trace = a * pow(b, -1, p) % p
        divides = gmpy2.jacobi(trace * trace - 4, p) == -1
        found.append(lucas.p_plus_1(p * COFACTOR, 300, b2, start))
        assert found[-1] == ([p] if divides else [])
    assert [p] in found


def test_every_second_stage_prime_is_met() -> None:
    """p-1 = 2^k 3 l for each prime l of the range that allows a small k: all are found."""
    met = 0
    for last in sympy.primerange(61, 2000):
        p = next((n for k in range(1, 6) if sympy.isprime(n := 3 * 2**k * last + 1)), None)
        if p is not None:
            met += 1
            assert lucas.p_minus_1(p * COFACTOR, 60, 2000) == [p]
    assert met > 150


def test_all_factors_in_one_batch_are_told_apart() -> None:
    """Both p-1 are smooth and both appear in the same batch of primes."""
    p = neighbour(2 * prod(sympy.primerange(200, 290)), 1)
    q = neighbour(2 * prod(sympy.primerange(210, 300)), 1)

    assert sorted(lucas.p_minus_1(p * q, 400, 0)) == sorted([p, q])
