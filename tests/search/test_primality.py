"""The quick look at a number and the material for proofs, against published and other values."""

from math import prod
from pathlib import Path
from typing import Any

import gmpy2
import pytest
import sympy
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.primality import (
    candidate,
    least_witness,
    n_minus_1_proof,
    perfect_power,
    suffices,
)

DATA = yaml.safe_load(
    (Path(__file__).parents[1] / "data" / "primality.yaml").read_text(encoding="utf-8")
)["cases"]


def cases(*kinds: str) -> list[Any]:
    """The cases of those kinds, named."""
    return [pytest.param(case, id=case["id"]) for case in DATA if case["kind"] in kinds]


@given(st.integers(-10, 10**4) | st.integers(10**4, 2**200))
def test_candidates_agree_with_another_library(n: int) -> None:
    """Against sympy's isprime; composites come with evidence that holds."""
    found = candidate(n)

    assert found.prime == sympy.isprime(n)
    if n > 1 and not found.prime:
        assert found.factor or found.power or found.witness
    if found.factor:
        assert found.factor == min(sympy.primerange(2, 2000), key=lambda p: (n % p > 0, p))
    if found.power:
        base, exponent = found.power
        assert base**exponent == n


@pytest.mark.parametrize("case", cases("miller_rabin", "adversarial_composite"))
def test_published_composites_are_seen_through(case: dict[str, Any]) -> None:
    """Strong pseudoprimes to the first bases: the least witness is the first prime that is not
    among them."""
    n = int(case["input"]["n"], 0)
    passed = case["expect"]["passes_first_prime_bases"]

    assert not candidate(n).prime
    witness = least_witness(n)
    assert witness is not None
    assert witness == case["expect"].get("first_failing_prime_base", witness)
    assert sympy.primepi(witness) == passed + 1
    assert not gmpy2.is_strong_prp(n, witness)


@pytest.mark.parametrize("case", cases("strong_lucas_selfridge"))
def test_lucas_pseudoprimes_are_composite(case: dict[str, Any]) -> None:
    """The other half of the test must see through them."""
    assert not candidate(case["input"]["n"]).prime


@pytest.mark.parametrize("case", cases("elliptic_chain"))
def test_numbers_of_elliptic_proofs_are_prime(case: dict[str, Any]) -> None:
    """Every number down a chain of elliptic-curve proofs; the small ones are proved here too."""
    numbers = [int(number) for number in case["input"]["numbers"]]

    assert all(candidate(number).prime for number in numbers)
    for number in numbers:
        if number < 2**120:
            assert n_minus_1_proof(number, map(int, sympy.factorint(number - 1))) is not None


@pytest.mark.parametrize("case", cases("elliptic_forgery"))
def test_forged_elliptic_proofs_prove_nothing(case: dict[str, Any]) -> None:
    """What they are forged for is composite, has a small factor, and has no proof from n - 1."""
    n, factors = int(case["input"]["n"]), case["expect"]["factors"]
    found = candidate(n)

    assert prod(factors) == n
    assert not found.prime
    assert found.factor == min(factors)
    assert n_minus_1_proof(n, sympy.factorint(n - 1)) is None


def test_safe_looking_parameters_with_a_composite_q() -> None:
    """p = 2q + 1 is prime and q passes the first twelve bases, yet is composite."""
    [case] = [case for case in DATA if case["kind"] == "dh_parameters"]
    p, q = int(case["input"]["p"], 16), int(case["input"]["q"], 16)

    assert candidate(p).prime
    assert not candidate(q).prime
    assert candidate(q).witness == 41


@given(st.integers(2, 2**40), st.integers(2, 12))
def test_perfect_powers_have_their_largest_exponent(base: int, exponent: int) -> None:
    """Against sympy's perfect_power with its base reduced as far as it goes."""
    power = perfect_power(base**exponent)

    assert power is not None
    assert power[0] ** power[1] == base**exponent
    assert power[1] % exponent == 0
    assert perfect_power(power[0]) is None


@pytest.mark.parametrize("case", cases("n_minus_1_proof"))
def test_proofs_from_factors_of_n_minus_1(case: dict[str, Any]) -> None:
    """The published proofs are found, with their witnesses; a part too small is refused."""
    n = int(sympy.sympify(str(case["input"]["n"]).replace("^", "**")))
    primes = [int(part.split("^")[0]) for part in case["input"]["F"].split("*")]

    proof = n_minus_1_proof(n, primes)

    if not case["expect"]["valid"]:
        assert proof is None
        return
    assert proof is not None
    expected = {int(r): a for r, a in case["expect"]["witnesses"].items()}
    assert dict(proof.witnesses).items() <= expected.items()


@given(st.integers(2, 2**90))
def test_proofs_prove(start: int) -> None:
    """From all primes of n - 1 a proof is always found; its part F exceeds the cube root, its
    witnesses have orders divisible by their primes."""
    n = int(sympy.nextprime(start))
    proof = n_minus_1_proof(n, sympy.factorint(n - 1))

    assert proof is not None
    part = prod(prime**exponent for prime, exponent in proof.factored)
    assert (n - 1) % part == 0
    assert 2 * (part + 1) ** 3 > n
    for prime, base in proof.witnesses:
        assert pow(base, n - 1, n) == 1
        assert gmpy2.gcd(pow(base, (n - 1) // prime, n) - 1, n) == 1


@given(st.integers(1, 2**40), st.integers(1, 200), st.integers(1, 200))
def test_a_part_that_divides_every_factor_less_one_proves_nothing(
    half: int, a: int, b: int
) -> None:
    """n = (aF + 1)(bF + 1) may well pass for every prime of F, so F must not suffice."""
    part = sympy.factorint(2 * half)
    n = (a * 2 * half + 1) * (b * 2 * half + 1)
    exact = [(p, int(gmpy2.remove(n - 1, p)[1])) for p in part]

    if prod(p**e for p, e in exact) == 2 * half:
        assert not suffices(n, exact)


def test_no_small_composite_is_proved() -> None:
    """All odd composites below 10,000, from all primes of n - 1."""
    for n in range(9, 10_000, 2):
        if not sympy.isprime(n):
            assert n_minus_1_proof(n, sympy.primefactors(n - 1)) is None


@given(st.integers(2, 2**30), st.integers(2, 2**30))
def test_nothing_proves_a_composite(a: int, b: int) -> None:
    """Carmichael numbers included: an odd composite has no proof from its n - 1."""
    for n in ((2 * a + 1) * (2 * b + 1), 561, 1729, 2465, 2821, 6601):
        assert n_minus_1_proof(n, sympy.factorint(n - 1)) is None
