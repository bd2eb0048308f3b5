"""Factor lists refuse what they cannot mean, and restrict to divisors."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.routes.base import floor_bits, log2_difference, log2_sum
from auditor.routes.factors import Factors


@pytest.mark.parametrize(
    ("known", "rest"),
    [
        (((3, 1), (2, 1)), 1),
        (((2, 1), (2, 1)), 1),
        (((1, 1),), 1),
        (((2, 0),), 1),
        (((2, 1),), 0),
    ],
    ids=["descending", "repeated", "unit", "no exponent", "no rest"],
)
def test_malformed_lists_are_refused(known: tuple[tuple[int, int], ...], rest: int) -> None:
    """Order, distinctness and positivity are checked when the list is made."""
    with pytest.raises(ValueError, match="must be"):
        Factors(known, rest)


def test_a_list_with_a_rest_is_incomplete() -> None:
    """A rest makes every figure an upper bound; its size counts."""
    partial = Factors(((2, 3), (5, 1)), 2**100)

    assert (partial.complete, partial.bound) == (False, "at most")
    assert partial.bits == pytest.approx(100 + math.log2(40))
    assert partial.primes == (2, 2, 2, 5)
    assert (partial.multiplicity(2), partial.multiplicity(7)) == (3, 0)
    assert Factors(((2, 3),)).bound == "exact"


@given(st.integers(0, 4), st.integers(0, 2), st.integers(0, 1))
def test_restriction_to_a_divisor(twos: int, fives: int, rest: int) -> None:
    """What is known of a number is known of its divisors; the rest is what remains."""
    divisor = 2**twos * 5**fives * 1001**rest
    restricted = Factors(((2, 4), (5, 2)), 1001).restricted(divisor)

    assert math.prod(restricted.primes) * restricted.rest == divisor
    assert (restricted.multiplicity(2), restricted.multiplicity(5)) == (twos, fives)
    assert restricted.rest == 1001**rest


@given(st.lists(st.floats(-30, 30), max_size=6))
def test_sums_of_powers(terms: list[float]) -> None:
    """Sums in the domain of logarithms are sums."""
    total = sum(2**term for term in terms)

    assert 2 ** log2_sum(*terms) == pytest.approx(total, rel=1e-9)


def test_sums_and_differences_beyond_floats() -> None:
    """Work beyond 2^1024 neither overflows nor becomes negative."""
    assert log2_sum(5000.0, 5000.0) == 5001.0
    assert log2_difference(5001.0, 5000.0) == 5000.0
    assert log2_difference(3.0, 3.0) == -math.inf


@pytest.mark.parametrize(
    ("bits", "rounded"),
    [(79.999905, 79.99), (80.0, 80.0), (95.2468, 95.24), (0.29, 0.29), (113.0 - 1e-12, 113.0)],
)
def test_figures_are_rounded_down(bits: float, rounded: float) -> None:
    """Down to 0.01, forgiving floating-point noise and no more."""
    assert floor_bits(bits) == rounded
