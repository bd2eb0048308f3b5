"""The factor search: laws, other libraries, and numbers made to be awkward."""

from dataclasses import replace
from math import prod
from pathlib import Path

import flint
import gmpy2
import pytest
import sympy
import yaml
from cypari import pari
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.factoring import Factor, search, split
from auditor.search.plan import Plan, plan_for
from tests.benchmarks.inputs import composite, prime, with_factor

QUICK = plan_for("quick")
STANDARD = plan_for("standard")


@given(st.integers(1, 2**110))
def test_small_numbers_are_factored_as_other_libraries_do(m: int) -> None:
    """Against python-flint and PARI."""
    result = search(m, QUICK)
    primes, exponents = pari.factor(m)

    assert [(int(p), e) for p, e in flint.fmpz(m).factor()] == list(result.pairs)
    assert list(zip(map(int, primes), map(int, exponents), strict=True)) == list(result.pairs)
    assert result.rest == 1


@given(st.lists(st.integers(2, 2**60), min_size=1, max_size=7), st.integers(1, 3))
def test_the_parts_multiply_to_the_number(numbers: list[int], exponent: int) -> None:
    """Factors are likely prime, what is left is composite, and nothing is lost."""
    m = prod(numbers) ** exponent
    result = search(m, QUICK)

    assert prod(p**e for p, e in result.pairs) * result.rest == m
    assert all(gmpy2.is_prime(p) for p, _ in result.pairs)
    assert not any(gmpy2.is_prime(part) for part, _ in result.composites)
    assert list(result.pairs) == sorted(result.pairs)


@given(st.lists(st.integers(-5, 2**80), max_size=5), st.integers(1, 2**80))
def test_known_divisors_help_and_others_do_no_harm(known: list[int], m: int) -> None:
    """Whatever is said to be known, the factorization is that of the number."""
    assert search(m, QUICK, known).pairs == search(m, QUICK).pairs


@pytest.mark.parametrize("m", [0, -1])
def test_only_positive_integers_are_factored(m: int) -> None:
    """Zero and negative numbers are refused."""
    with pytest.raises(ValueError, match="positive"):
        search(m, QUICK)


def test_numbers_without_work() -> None:
    """One, a prime, and a prime power need no method."""
    p = 2**127 - 1

    assert search(1, QUICK).factors == ()
    assert search(p, QUICK).factors == (Factor(p, 1, "itself"),)
    assert search(p**5, QUICK).factors == (Factor(p, 5, "itself"),)


def test_a_power_of_a_composite_stays_together() -> None:
    """The base is what is unfactored; its exponent is kept."""
    base = composite(0, 512)
    result = search(base**3, Plan(1000, 20))

    assert result.composites == ((base, 3),)
    assert result.rest == base**3


def test_a_smooth_number_of_2048_bits() -> None:
    """A hundred primes of twenty bits, then the same with primes beyond trial division."""
    small = [prime(f"smooth {i}", 19) for i in range(107)]
    larger = [prime(f"smooth {i}", 24) for i in range(40)]
    for primes in (small, larger):
        m = prod(primes)
        assert dict(search(m, STANDARD).pairs) == {p: primes.count(p) for p in primes}


def test_a_trapdoor_modulus_is_split_by_the_method_its_maker_had_in_mind() -> None:
    """Both p-1 are 2^14-smooth: made with PARI and gmpy2 for this test, factors stated there."""
    n = 0x626CB3DC708C74F7F155E6EAB3AEA85D048F669168EFD8C9DB85276CD7CC57F1C4D
    factors = split(n, STANDARD).factors

    assert {factor.prime for factor in factors} == {
        489732750388717192545990860818819954345967,
        372343236131169543340156773737015624579,
    }
    assert {factor.method for factor in factors} == {"p-1"}


def test_a_trapdoor_at_full_size() -> None:
    """2048 bits, p-1 a product of primes below 2^16, q-1 not: found by p-1 at quick effort."""
    draw = iter(range(10**6))
    smooth = 2
    while smooth.bit_length() < 1000:
        smooth *= sympy.nextprime(int(prime(f"trapdoor {next(draw)}", 16)))
    p = next(k * smooth + 1 for k in range(1, 10**5) if gmpy2.is_prime(k * smooth + 1))
    q = prime("the other factor", 1024)

    found = {factor.prime: factor.method for factor in split(p * q, QUICK).factors}
    assert found == {p: "p-1", q: "p-1"}


def test_factors_that_p_minus_1_finds_together_are_told_apart() -> None:
    """Both appear in the same batch of primes, beside a cofactor that does not."""
    p, q = (
        next(n for k in range(2, 1000, 2) if sympy.isprime(n := k * smooth + 1))
        for smooth in (prod(sympy.primerange(5, 90)), prod(sympy.primerange(7, 100)))
    )
    cofactor = composite(3, 512)

    result = search(p * q * cofactor, Plan(1000, 20, p_minus_1=(1000, 0)))

    assert {factor.prime for factor in result.factors} == {p, q}
    assert result.composites == ((cofactor, 1),)


def test_a_known_composite_part_that_a_method_finds_whole_ends_the_method() -> None:
    """Rho sees both primes of a known divisor at once; nothing new is learnt, and it stops."""
    part, rest = 10007 * 10009, composite(4, 256)
    result = search(part * rest, Plan(100, 1, rho_iterations=5000), known=[part])

    assert {factor.prime for factor in result.factors} <= {10007, 10009}
    assert result.rest * prod(p for p, _ in result.pairs) == part * rest


def test_close_factors_are_found_by_fermat() -> None:
    """Two consecutive primes of 1024 bits."""
    p = prime("close", 1024)
    q = int(gmpy2.next_prime(p))

    assert split(p * q, QUICK).factors == (Factor(p, 1, "Fermat"), Factor(q, 1, "Fermat"))


class Reported(Exception):
    """The planted factor was reported."""


@pytest.mark.parametrize("number", range(3))
def test_planted_factors_of_forty_bits_are_found(number: int) -> None:
    """A sample of those in tests/benchmarks/planted_factors.py, in composites of 2048 bits."""
    planted = prime(f"forty bits {number}", 40)

    def stop(factor: Factor) -> None:
        assert factor.prime == planted
        raise Reported

    with pytest.raises(Reported):
        search(with_factor(planted, number, 2008), STANDARD, on_factor=stop)


def test_the_composites_of_the_timings_are_those_that_were_fixed() -> None:
    """The data file, some of it derived again: two primes each, not chosen by anybody."""
    data = Path(__file__).parents[1] / "data" / "composites.yaml"
    fixed = yaml.safe_load(data.read_text(encoding="utf-8"))["composites"]

    assert [int(text, 16).bit_length() for text in fixed] == [2048] * 20
    assert all(int(fixed[i], 16) == composite(i) for i in (0, 7, 19))


def test_the_search_in_a_hard_composite_ends_with_nothing() -> None:
    """Nothing found is what is said: no factor, all of it left, and the work that was done."""
    n = composite(1, 512)
    result = search(n, STANDARD)

    assert result.factors == ()
    assert result.composites == ((n, 1),)
    assert result.work.trial_bound == STANDARD.trial_bound
    assert result.work.p_minus_1 == STANDARD.p_minus_1
    assert [done.count for done in result.work.curves] == [
        level.curves for level in STANDARD.levels
    ]


def test_nothing_is_done_twice(monkeypatch: pytest.MonkeyPatch) -> None:
    """With the work of an equal search at hand, no method runs again."""
    n = composite(2, 256)
    plan = Plan(1000, 20, rho_iterations=100, p_minus_1=(50, 900), fermat_steps=5)
    plan = replace(plan, p_plus_1=(50, 900), p_plus_1_starts=2)
    first = search(n, plan)

    def again(*_: object, **__: object) -> None:
        raise AssertionError("done before")

    for name in ("lucas.p_minus_1", "lucas.p_plus_1", "rho", "fermat"):
        monkeypatch.setattr(f"auditor.search.factoring.{name}", again)
    assert search(n, plan, done=first.work) == first
    with pytest.raises(AssertionError):
        search(n, replace(plan, p_plus_1=(50, 901)), done=first.work)
    with pytest.raises(AssertionError):
        search(n, replace(plan, p_plus_1_starts=3), done=first.work)


def test_very_long_numbers_get_less_work_and_the_record_says_so() -> None:
    """A plan for 16,384 bits does about a third."""
    plan = STANDARD.for_length(16_384)

    assert STANDARD.for_length(8_192) == STANDARD
    assert 0.3 < plan.levels[0].curves / STANDARD.levels[0].curves < 0.35
    assert 0.3 < plan.p_minus_1[0] / STANDARD.p_minus_1[0] < 0.35
