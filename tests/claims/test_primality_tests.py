"""The primality tests agree with independent oracles, and no known liar deceives them."""

import secrets
from pathlib import Path
from typing import Any

import gmpy2
import pytest
import sympy
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.composite import least_witness
from auditor.claims.primality_tests import (
    TWELVE_PRIMES,
    is_prime_below_2_64,
    is_probable_prime,
    passes_strong_test,
)

DATA = Path(__file__).parents[1] / "data" / "primality.yaml"
CASES = yaml.safe_load(DATA.read_text(encoding="utf-8"))["cases"]


def cases(kind: str) -> list[Any]:
    """The cases of that kind, with their ids."""
    return [pytest.param(case, id=case["id"]) for case in CASES if case["kind"] == kind]


def number(value: Any) -> int:
    """An integer written in decimal or hex."""
    return int(str(value), 0)


@pytest.mark.parametrize("case", cases("miller_rabin"))
def test_least_strong_pseudoprimes_pass_just_their_bases(case: dict[str, Any]) -> None:
    """The published least pseudoprime passes its t bases and not the next, and is composite."""
    n, passed = number(case["input"]["n"]), case["expect"]["passes_first_prime_bases"]
    bases = [sympy.prime(index + 1) for index in range(passed + 1)]

    assert [passes_strong_test(n, base) for base in bases] == [True] * passed + [False]
    assert not is_probable_prime(n, 1, secrets.randbelow)
    if n < 2**64:
        assert not is_prime_below_2_64(n)


@pytest.mark.parametrize("case", cases("strong_lucas_selfridge"))
def test_strong_lucas_pseudoprimes_are_composite_for_us(case: dict[str, Any]) -> None:
    """They pass the Lucas half of Baillie-PSW, by GMP's word, and not the whole."""
    n = number(case["input"]["n"])

    assert gmpy2.is_strong_selfridge_prp(n)
    assert not is_probable_prime(n, 1, secrets.randbelow)
    assert not is_prime_below_2_64(n)


@pytest.mark.parametrize("case", cases("adversarial_composite"))
def test_composites_made_for_fixed_bases_do_not_pass(case: dict[str, Any]) -> None:
    """Arnault's construction passes all small prime bases, and a fixed-base test with them."""
    n, expect = number(case["input"]["n"]), case["expect"]
    bases = [sympy.prime(index + 1) for index in range(expect["passes_first_prime_bases"])]

    assert all(passes_strong_test(n, base) for base in bases)
    assert least_witness(n) == expect["first_failing_prime_base"]
    assert not is_probable_prime(n, 16, secrets.randbelow)


def test_rounds_alone_reject_a_composite_that_baillie_psw_never_saw() -> None:
    """Random bases catch Arnault's 256-bit composite about three times in four, as predicted."""
    n = number(next(case for case in CASES if case["id"] == "arnault-256")["input"]["n"])
    passed = sum(passes_strong_test(n, 2 + secrets.randbelow(n - 3)) for _ in range(400))

    # Binomial(400, 1/4): ten standard deviations are 87.
    assert 13 < passed < 187


def test_a_safe_prime_whose_half_is_composite() -> None:
    """p is a true prime while q = (p-1)/2 is built to look like one: q is composite for us."""
    case = next(case for case in CASES if case["kind"] == "dh_parameters")
    p, q = number(case["input"]["p"]), number(case["input"]["q"])

    assert p == 2 * q + 1
    assert is_probable_prime(p, 64, secrets.randbelow)
    assert all(passes_strong_test(q, base) for base in TWELVE_PRIMES)
    assert not is_probable_prime(q, 64, secrets.randbelow)


@given(st.integers(min_value=0, max_value=2**64 - 1))
def test_below_2_64_agrees_with_sympy(n: int) -> None:
    """sympy's isprime is deterministic below 2^64."""
    assert is_prime_below_2_64(n) == sympy.isprime(n)


def test_small_numbers_one_by_one() -> None:
    """Both tests agree with a sieve up to 5,000."""
    primes = set(sympy.primerange(5000))

    assert {n for n in range(5000) if is_prime_below_2_64(n)} == primes
    assert {n for n in range(5000) if is_probable_prime(n, 2, secrets.randbelow)} == primes


def test_the_deterministic_test_refuses_larger_numbers() -> None:
    """2^64 is outside its domain."""
    with pytest.raises(ValueError, match="2\\^64"):
        is_prime_below_2_64(2**64)


@given(st.integers(min_value=2**70, max_value=2**200))
def test_probable_primes_agree_with_sympy(n: int) -> None:
    """Both run Baillie-PSW; ours adds rounds."""
    assert is_probable_prime(n, 2, secrets.randbelow) == sympy.isprime(n)
