"""The factor search: laws, independent oracles, determinism, interruption and loss of workers."""

from math import prod

import gmpy2
import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.factoring import search, split
from auditor.search.plan import plan_for

QUICK = plan_for("quick")
STANDARD = plan_for("standard")


@given(st.integers(1, 2**96))
def test_small_numbers_are_factored_as_another_library_does(m: int) -> None:
    """Against sympy's factorint."""
    result = search(m, QUICK)

    assert dict(result.pairs) == sympy.factorint(m) if m > 1 else result.pairs == ()
    assert result.rest == 1


@given(st.integers(1, 2**300))
def test_the_parts_multiply_to_the_number(m: int) -> None:
    """Factors are likely prime, what is left is composite, and nothing is lost."""
    result = search(m, QUICK)

    assert prod(prime**exponent for prime, exponent in result.pairs) * result.rest == m
    assert all(gmpy2.is_prime(prime) for prime, _ in result.pairs)
    assert not any(gmpy2.is_prime(part) for part, _ in result.composites)


def test_zero_is_refused() -> None:
    """Only positive integers have a factorization."""
    with pytest.raises(ValueError, match="positive"):
        search(0, QUICK)


def test_a_trapdoor_modulus_is_split_by_the_method_its_maker_had_in_mind() -> None:
    """Both p-1 are 2^14-smooth: the case pm1 of the project's reference values."""
    n = 0x626CB3DC708C74F7F155E6EAB3AEA85D048F669168EFD8C9DB85276CD7CC57F1C4D

    factors = split(n, STANDARD).factors

    assert {factor.prime for factor in factors} == {
        489732750388717192545990860818819954345967,
        372343236131169543340156773737015624579,
    }
    assert {factor.method for factor in factors} == {"p-1"}
