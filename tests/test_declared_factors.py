"""Declared factors that do not divide the order of the unit group are told."""

import secrets

import gmpy2
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.declaration import Declaration, Place
from auditor.review import Surroundings, investigate
from auditor.run_values import RunValues

Q = int(gmpy2.next_prime(2**80))
UNFACTORED = int(gmpy2.next_prime(2**300)) * int(gmpy2.next_prime(2**310))


def told(modulus: int, *factors: int) -> tuple[str, ...]:
    """The notices of a quick look at a set of that modulus."""
    declared = Declaration("a", Place("a.yaml", 1), modulus, 2, known_factors=factors)
    run = RunValues("2026-12-01", "quick")
    return investigate([declared], run, (), Surroundings(secrets.randbelow))[1]


@pytest.mark.parametrize(
    ("modulus", "factors", "wrong"),
    [
        (23, (2, 11, 22), ""),
        (23, (2, 3, 11, 5), "3, 5"),
        (23, (3, 5, 7, 9), "3, 5, 7 and 1 more"),
        (7 * 11, (2, 3, 5, 60), ""),
        (7 * 11, (7,), "7"),
        (11**3, (11, 10), ""),
        (11**3, (11**3,), "1331"),
        (UNFACTORED, (Q,), ""),
    ],
)
def test_what_does_not_divide_is_named(modulus: int, factors: tuple[int, ...], wrong: str) -> None:
    """Modulo primes, prime powers and products; not where the order is unknown."""
    expected = (f"a.yaml#a: known_factors names what does not divide the group order: {wrong}.",)
    assert told(modulus, *factors) == (expected if wrong else ())


@given(st.integers(3, 2000), st.lists(st.integers(2, 60), min_size=1, max_size=3, unique=True))
def test_the_order_is_the_number_of_units(modulus: int, factors: list[int]) -> None:
    """Counted one by one, it says which factors are right."""
    order = sum(gmpy2.gcd(a, modulus) == 1 for a in range(modulus))
    wrong = ", ".join(str(factor) for factor in factors if order % factor)
    assert [notice.rpartition(": ")[2] for notice in told(modulus, *factors)] == (
        [f"{wrong}."] if wrong else []
    )
