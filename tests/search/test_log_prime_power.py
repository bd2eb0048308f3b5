"""Logarithms modulo prime powers agree with PARI, with trying, and with published values."""

from pathlib import Path

import pytest
import sympy
import yaml
from cypari import pari
from hypothesis import assume, given
from hypothesis import strategies as st

from auditor.search.log_prime_power import (
    padic_logarithm,
    prime_power_logarithm,
    two_power_logarithm,
)
from auditor.search.log_seed import drawn
from auditor.search.logarithm import (
    NotFound,
)

DATA = Path(__file__).parents[1] / "data" / "logarithms.yaml"
CASES = yaml.safe_load(DATA.read_text(encoding="utf-8"))


def pairs(factors: list[list[int]]) -> list[tuple[int, int]]:
    """Factors from the data file."""
    return [(q, e) for q, e in factors]


@pytest.mark.parametrize("case", CASES["prime_powers"], ids=lambda case: f"{case['p']}^{case['k']}")
def test_listed_padic_logarithms(case: dict[str, int]) -> None:
    """The listed exponents come back modulo p^(k-1)."""
    p, k, g = case["p"], case["k"], case["g"]
    found = padic_logarithm(p, k, g, pow(g, case["x"], p**k))

    assert (found.value, found.modulus) == (case["logarithm"], p ** (k - 1))


@given(
    st.sampled_from([3, 5, 7, 29, 101, 40487]), st.integers(1, 12), st.integers(2), st.integers(0)
)
def test_prime_powers_agree_with_pari(p: int, k: int, g: int, x: int) -> None:
    """Logarithm and order modulo p^k of any unit, as PARI has them."""
    assume(g % p)
    n = p**k
    g %= n
    h = pow(g, x, n)
    found = prime_power_logarithm(p, k, g, h, list(sympy.factorint(p - 1).items()))

    assert found.modulus == int(pari(f"znorder(Mod({g},{n}))"))
    assert found.value == int(pari(f"znlog(Mod({h},{n}),Mod({g},{n}))"))


def test_a_prime_power_of_2000_bits_takes_no_time() -> None:
    """Modulo 3^1300 a logarithm takes a few thousand operations."""
    x = drawn(3**1299, "high power")
    found = padic_logarithm(3, 1300, 2, pow(2, x, 3**1300))

    assert found.value == x % 3**1299
    assert found.operations < 12_000


def test_no_power_of_the_base_modulo_a_prime_power() -> None:
    """An element of larger p-part than the base is not found: 10 generates what 1 + 49 cannot."""
    with pytest.raises(NotFound):
        padic_logarithm(7, 4, 1 + 49, 1 + 7)
    with pytest.raises(ValueError, match="divisible"):
        padic_logarithm(7, 4, 14, 8)
    with pytest.raises(ValueError, match="multiply"):
        prime_power_logarithm(7, 4, 3, 8, [(2, 1)])


def test_listed_logarithm_modulo_2_to_the_64() -> None:
    """5^x modulo 2^64 gives x back."""
    case = CASES["two_power"]
    found = two_power_logarithm(case["k"], case["g"], case["h"])

    assert (found.value, found.modulus) == (case["logarithm"], 2**62)


@pytest.mark.parametrize("k", range(1, 9))
def test_every_pair_modulo_a_power_of_two(k: int) -> None:
    """For all odd g and h: the logarithm modulo the order of g, or NotFound (by trying)."""
    n = 2**k
    for g in range(1, n, 2):
        powers = [pow(g, x, n) for x in range(n)]
        order = powers.index(1, 1) if n > 2 else 1
        for h in range(1, n, 2):
            if h in powers:
                found = two_power_logarithm(k, g, h)
                assert (found.value, found.modulus) == (powers.index(h), order)
            else:
                with pytest.raises(NotFound):
                    two_power_logarithm(k, g, h)
