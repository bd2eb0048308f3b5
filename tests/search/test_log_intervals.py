"""An exponent in an interval: found where it is, excluded where it is not, at the work stated."""

from math import gcd
from random import Random
from statistics import mean
from typing import Any
from unittest.mock import patch

import pytest
from gmpy2 import next_prime
from hypothesis import assume, given
from hypothesis import strategies as st

from auditor.intake.standard_groups import find
from auditor.search import log_steps
from auditor.search.log_fingerprints import prepare
from auditor.search.log_seed import drawn
from auditor.search.log_steps import FewSteps, ManySteps, baby_steps
from auditor.search.logarithm import (
    NotFound,
    OutOfBudget,
    Tally,
    kangaroo,
    logarithm_in_interval,
    prime_order_logarithm,
)
from tests.search.groups import of_order, prime_group


def many_or_few(many: bool) -> Any:
    """Forces fingerprints, or leaves them to wide intervals."""
    return patch.object(log_steps, "WIDEST_BY_ELEMENTS", 0 if many else 2**22)


@given(st.integers(2, 2**300), st.lists(st.integers(0, 2**300), min_size=1, max_size=9), st.data())
def test_fingerprints_are_leading_bits(n: int, elements: list[int], data: st.DataObject) -> None:
    """They are floor(2^64 (u v mod n) / n), shifted or not, up to one unit of rounding."""
    elements = [v % n for v in elements]
    u = data.draw(st.integers(0, n - 1))
    for shifted in (False, True):
        prints = prepare(elements, n, shifted).fingerprints(u)
        for v, fingerprint in zip(elements, prints, strict=True):
            exact = (2**65 * (u * v % n) // n + shifted) // 2
            assert (fingerprint - exact + 1) % 2**64 in (0, 1, 2)


def test_an_element_on_the_edge_is_found_by_the_second_rounding() -> None:
    """The element nearest above a multiple of n/2^64 is rounded down as a product, and found."""
    n = int(next_prime(2**100))
    edge = pow(2**64, -1, n)
    width = 2**20
    with many_or_few(True):
        steps = baby_steps(n, edge, width)
    assert isinstance(steps, ManySteps)
    x = 1 + steps.strides.width * steps.count
    tally = Tally()

    assert steps.search(pow(edge, x, n), width, tally).value == x
    assert tally.operations > width // steps.count + steps.count


@given(st.booleans(), st.integers(2, 10**5), st.integers(0), st.integers(0), st.integers(1, 4000))
def test_an_interval_is_searched_to_the_end(many: bool, n: int, g: int, h: int, width: int) -> None:
    """An exponent is found exactly when trying all of them finds one; any modulus, any element."""
    g, h = g % n, h % n
    assume(gcd(g, n) == 1)
    powers = {pow(g, x, n) for x in range(width)}
    with many_or_few(many):
        if h in powers:
            found = logarithm_in_interval(n, g, h, width)
            assert 0 <= found.value < width
            assert pow(g, found.value, n) == h
        else:
            with pytest.raises(NotFound):
                logarithm_in_interval(n, g, h, width)


@pytest.mark.parametrize("many", [False, True])
@pytest.mark.parametrize("most_steps", [1, 7, 100, 2**22])
@pytest.mark.parametrize("x", [0, 1, 127, 128, 12345, 39999])
def test_a_bounded_table_finds_the_same(many: bool, most_steps: int, x: int) -> None:
    """However few baby steps are kept, the exponent is found, at the price of more giant steps."""
    n, g, _ = prime_group(40, 1)
    with many_or_few(many):
        found = logarithm_in_interval(n, g, pow(g, x, n), 40000, most_steps=most_steps)

    assert found.value == x


@pytest.mark.parametrize("many", [False, True])
def test_the_end_of_an_interval(many: bool) -> None:
    """The last exponent is found and the next is not, within the work stated (twice, if sure)."""
    n, g, _ = prime_group(40, 1)
    for width in (1, 2, 3, 999, 1000, 1001):
        with many_or_few(many):
            assert logarithm_in_interval(n, g, pow(g, width - 1, n), width).value == width - 1
            with pytest.raises(NotFound) as stopped:
                logarithm_in_interval(n, g, pow(g, width, n), width)
        assert stopped.value.operations < (1 + many) * (2.2 * width**0.5 + 100)


@pytest.mark.parametrize("many", [False, True])
def test_one_table_serves_many_logarithms(many: bool) -> None:
    """Finding by a table leaves it as it was."""
    n, g, q = prime_group(20, 2)
    with many_or_few(many):
        steps = baby_steps(n, g, q)
    assert isinstance(steps, ManySteps if many else FewSteps)
    for x in (0, 1, q // 2, q - 1):
        assert steps.search(pow(g, x, n), q, Tally()).value == x


def test_work_in_an_interval() -> None:
    """About sqrt(2 width) operations on average, as the docstring says."""
    n, g, q = prime_group(30, 3)
    draw = Random(3)
    steps = baby_steps(n, g, q)
    runs = [steps.search(pow(g, draw.randrange(q), n), q, Tally()).operations for _ in range(60)]

    assert 0.8 < (steps.count + mean(runs)) / (2 * q) ** 0.5 < 1.3
    assert max(runs) < 1.1 * (2 * q) ** 0.5 + 2000


def test_a_base_that_is_no_unit_is_refused() -> None:
    """The base must be invertible for the giant steps."""
    with pytest.raises(ValueError, match="unit"):
        logarithm_in_interval(10**6, 10, 7, 10**4)


@pytest.mark.parametrize("factor", [605921, 742327609, 112486462861])
def test_small_subgroups_of_a_2048_bit_field(factor: int) -> None:
    """Drawn exponents in subgroups of RFC 5114 group 23 of 20, 30 and 37 bits come back."""
    group = find("rfc5114-2048-224")
    assert group is not None
    n = group.modulus
    g = of_order(factor, n)
    x = drawn(factor, "small subgroup", factor)

    assert prime_order_logarithm(n, g, pow(g, x, n), factor).value == x


@given(st.integers(0, 2**40), st.integers(1, 2**18), st.integers(0), st.integers(0, 5))
def test_kangaroos_find_what_is_in_their_interval(
    low: int, width: int, offset: int, seed: int
) -> None:
    """An exponent of any interval, wherever it begins, is found in it."""
    n, g, q = prime_group(44, 9)
    x = low + offset % width
    found = kangaroo(n, g, pow(g, x, n), low, width, seed=seed, order=q)

    assert (found.value, found.modulus) == (x, 0)


def test_kangaroos_need_no_order() -> None:
    """Where the interval is short beside the group, its order need not be known."""
    n, g, _ = prime_group(44, 9)
    assert kangaroo(n, g, pow(g, 10**6, n), 10**6 - 900, 10**4).value == 10**6


def test_kangaroos_in_an_interval_as_wide_as_the_group() -> None:
    """When the walks go round the group, exponents are reduced by its order."""
    n, g, q = prime_group(20, 10)
    for x in (0, 1, q // 3, q - 1):
        assert kangaroo(n, g, pow(g, x, n), 0, q, order=q).value == x


def test_work_of_kangaroos() -> None:
    """On average 2 sqrt(width) jumps."""
    n, g, q = prime_group(44, 9)
    width, draw = 2**24, Random(9)
    runs = [
        kangaroo(n, g, pow(g, draw.randrange(width), n), 0, width, order=q, seed=s).operations
        for s in range(40)
    ]

    assert 1.6 < mean(runs) / width**0.5 < 2.6


def test_kangaroos_cannot_exclude() -> None:
    """An exponent outside the interval ends in an exhausted budget, not in a statement."""
    n, g, q = prime_group(44, 9)
    with pytest.raises(OutOfBudget) as stopped:
        kangaroo(n, g, pow(g, 2**30, n), 0, 2**14, order=q, tally=Tally(20_000))
    assert "allowed number" in str(stopped.value)
    with pytest.raises(NotFound):
        kangaroo(n, g, pow(g, 2**30, n), 0, 100, order=q)
