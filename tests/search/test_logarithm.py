"""Logarithms by the group's structure agree with PARI and sympy, and with published values."""

from math import gcd
from pathlib import Path
from typing import Any

import mpmath
import pytest
import sympy
import yaml
from cypari import pari
from gmpy2 import mpz, next_prime
from hypothesis import assume, given
from hypothesis import strategies as st
from sympy.ntheory.residue_ntheory import discrete_log, n_order

from auditor.search import logarithm
from auditor.search.logarithm import (
    NotFound,
    OutOfBudget,
    Tally,
    pohlig_hellman,
    prime_order_logarithm,
    short_exponent,
)
from tests.search.groups import prime_group

DATA = Path(__file__).parents[1] / "data" / "logarithms.yaml"
CASES = yaml.safe_load(DATA.read_text(encoding="utf-8"))


def pairs(factors: list[list[int]]) -> list[tuple[int, int]]:
    """Factors from the data file."""
    return [(q, e) for q, e in factors]


@given(st.integers(3, 2**34), st.integers(2), st.integers(0))
def test_pohlig_hellman_agrees_with_pari(start: int, g: int, x: int) -> None:
    """The logarithm modulo the order of any element, as PARI's znlog has it."""
    p = int(next_prime(start))
    g %= p
    assume(g > 0)
    h, factors = pow(g, x, p), list(sympy.factorint(p - 1).items())
    counted = pohlig_hellman(p, g, h, factors, tally=Tally())
    found = pohlig_hellman(p, g, h, factors)

    assert found.modulus == counted.modulus == int(pari(f"znorder(Mod({g},{p}))"))
    assert found.value == counted.value == int(pari(f"znlog(Mod({h},{p}),Mod({g},{p}))"))


@given(st.integers(3, 10**6), st.integers(2), st.integers(0))
def test_pohlig_hellman_modulo_any_number(n: int, g: int, x: int) -> None:
    """The modulus need not be prime, and the multiple of the order not the least (sympy)."""
    g %= n
    assume(gcd(g, n) == 1 and g > 1)
    multiple = sympy.factorint(6 * sympy.reduced_totient(n))
    found = pohlig_hellman(n, g, pow(g, x, n), list(multiple.items()))

    assert found.modulus == n_order(g, n)
    assert found.value == discrete_log(n, pow(g, x, n), g)


@given(st.integers(3, 5000), st.integers(2), st.integers(1))
def test_an_element_outside_the_group_is_not_found(n: int, g: int, h: int) -> None:
    """NotFound is raised exactly for elements that are no power of the base."""
    g, h = g % n, h % n
    assume(gcd(g * h, n) == 1 and g > 1)
    factors = list(sympy.factorint(sympy.reduced_totient(n)).items())
    if h in {pow(g, x, n) for x in range(n)}:
        assert pow(g, pohlig_hellman(n, g, h, factors).value, n) == h
    else:
        for tally in (None, Tally()):
            with pytest.raises(NotFound):
                pohlig_hellman(n, g, h, factors, tally=tally)


def test_some_factors_give_part_of_the_exponent() -> None:
    """With the rest of the order named but not factored, x is known modulo the factors used."""
    case = CASES["short_exponent"]
    p, g, x = case["p"], case["g"], case["x"]
    *small, (large, _) = pairs(case["predecessor"])
    found = pohlig_hellman(p, g, pow(g, x, p), small, rest=large)

    assert found.modulus == case["z"]
    assert found.value == case["x_modulo_z"]
    assert pohlig_hellman(p, g, pow(g, x, p), [], rest=p - 1).modulus == 1


def test_a_wrong_order_is_refused() -> None:
    """When g^T is not 1 there is nothing to solve."""
    with pytest.raises(ValueError, match="order of the base"):
        pohlig_hellman(10007, 5, 25, [(5003, 1)])
    with pytest.raises(ValueError, match="order of the base"):
        pohlig_hellman(10007, 5, 25, [(2, 1)], rest=5)


def test_large_prime_factors_go_to_rho(monkeypatch: pytest.MonkeyPatch) -> None:
    """Above the limit for tables the digits come from rho, and are the same."""
    n, g, q = prime_group(26, 11, smallest=36)
    x = 54321 * q // 99999
    by_steps = prime_order_logarithm(n, g, pow(g, x, n), q)
    monkeypatch.setattr(logarithm, "LARGEST_BY_STEPS", 2**10)
    by_rho = pohlig_hellman(n, g, pow(g, x, n), [(q, 1)])

    assert by_steps.value == by_rho.value == x
    assert by_steps.operations != by_rho.operations


def test_short_exponent_as_listed() -> None:
    """The small primes leave the listed interval, and the kangaroo ends near the listed jumps."""
    case = CASES["short_exponent"]
    p, g, x, width = case["p"], case["g"], case["x"], case["width"]
    *small, (large, _) = pairs(case["predecessor"])
    found = short_exponent(p, g, pow(g, x, p), small, width, rest=large)

    assert (found.value, found.modulus) == (x, 0)
    assert 2**width // case["z"] + 1 == case["remaining_interval"]
    assert found.operations < 4 * case["expected_jumps"]


@pytest.mark.parametrize(("exponent", "operations"), [(0, 0), (1, 0), (2, 1), (1024, 10), (15, 6)])
def test_an_exponentiation_is_counted_as_the_binary_method_makes_it(
    exponent: int, operations: int
) -> None:
    """A squaring for each bit after the first, a multiplication for each further one bit."""
    tally = Tally()

    assert tally.power(3, exponent, mpz(10007)) == pow(3, exponent, 10007)
    assert tally.power(3, -exponent, mpz(10007)) == pow(3, -exponent, 10007)
    assert tally.operations == 2 * operations


def test_the_count_goes_on_through_all_steps() -> None:
    """One tally counts a whole route, and its budget ends whichever step passes it."""
    n, g, q = prime_group(32, 1)
    h = pow(g, 987654321, n)
    whole = pohlig_hellman(n, g, h, [(q, 1)]).operations

    tally = Tally(whole)
    assert pohlig_hellman(n, g, h, [(q, 1)], tally=tally).operations == tally.operations == whole
    with pytest.raises(OutOfBudget) as stopped:
        pohlig_hellman(n, g, h, [(q, 1)], tally=Tally(whole - 1))
    assert stopped.value.operations == whole


def record(case: dict[str, Any]) -> tuple[int, int, int, int]:
    """p, g, h and the logarithm, from decimals or from the expansions of pi and e."""
    if case["bits"] == 768:
        with mpmath.workprec(900):
            p = int(mpmath.floor(mpmath.ldexp(mpmath.pi, 766))) + 62762
            h = int(mpmath.floor(mpmath.ldexp(mpmath.e, 766)))
        return p, case["g"], h, int(case["logarithm"])
    return int(case["p"]), case["g"], int(case["h"]), int(case["logarithm"])


@pytest.mark.parametrize("case", CASES["records"], ids=lambda case: str(case["bits"]))
def test_published_records(case: dict[str, Any]) -> None:
    """g^log = h, and the parity that Pohlig-Hellman reads off h is that of the published log."""
    p, g, h, published = record(case)
    order = (p - 1) // 2
    found = pohlig_hellman(p, g, h, [(2, 1)], rest=order)

    assert p.bit_length() == case["bits"]
    assert pow(g, published, p) == h
    assert found.value == published % found.modulus
    assert sympy.isprime(order)
