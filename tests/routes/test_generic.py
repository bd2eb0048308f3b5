"""Square-root methods, Pohlig-Hellman and kangaroos: published values, an oracle, and laws."""

import math
from itertools import combinations, pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.routes.base import Closed, Work
from auditor.routes.factors import Factors
from auditor.routes.partial_exponent import Splits
from auditor.routes.pohlig_hellman import pohlig_hellman, pohlig_hellman_bits
from auditor.routes.searches import kangaroo_bits, rho_bits, subgroup_bits
from auditor.routes.shared_precomputation import shared_interval_table, shared_table
from auditor.routes.short_exponent import short_exponent
from auditor.routes.sieve_models import nist_bits
from auditor.routes.smooth_part import smooth_part_then_short_exponent
from auditor.routes.square_root import square_root
from tests.routes.cases import cases, factors, pairs, subgroup

GENERIC = cases("generic")
PASSIVE_ORDER = Factors(pairs(GENERIC["passive"]["order"]))

PRIMES = [2, 3, 5, 7, 11, 13, 43, 157, 1009, 65537, 4294967311, 1099511627791, 2**61 - 1, 2**89 - 1]
PRIME_LISTS = st.lists(st.sampled_from(PRIMES), min_size=1, max_size=7)
WIDTHS = st.integers(min_value=1, max_value=300)


def smooth_bits(width: float, order: Factors) -> float:
    """Work of the route, which must be open."""
    work = smooth_part_then_short_exponent(width, order)
    assert isinstance(work, Work)
    return work.bits


def test_kangaroos() -> None:
    """Two square roots of the range."""
    for width, bits in (GENERIC["kangaroo"] | GENERIC["ffdhe"]).items():
        assert short_exponent(width).bits == bits


def test_rho() -> None:
    """sqrt(pi/2) square roots of the order."""
    for length, bits in GENERIC["rho"].items():
        assert rho_bits(2**length) == pytest.approx(bits, abs=0.0001)


@pytest.mark.parametrize("name", GENERIC["rfc5114_rho"])
def test_rho_on_the_groups_of_rfc_5114(name: str) -> None:
    """The prime orders that the groups print give the figures computed from them."""
    work = square_root(subgroup(name))

    assert isinstance(work, Work)
    assert work.bound == "exact"
    assert work.bits == pytest.approx(GENERIC["rfc5114_rho"][name], abs=0.005)


def test_rho_takes_the_largest_prime() -> None:
    """An unknown rest counts as if it were prime, and the figure is then a bound."""
    complete = square_root(factors([2, 1009, 65537]))
    partial = square_root(factors([2, 1009], rest=2**64 + 13))
    small_rest = square_root(factors([2, 2**89 - 1], rest=1001))

    assert complete == square_root(factors([2, 2, 65537]))
    assert isinstance(partial, Work)
    assert (partial.bits, partial.bound) == (rho_bits(2**64 + 13), "at most")
    assert isinstance(small_rest, Work)
    assert (small_rest.bits, small_rest.bound) == (rho_bits(2**89 - 1), "at most")


def test_an_order_of_one_leaves_nothing_to_search() -> None:
    """The identity costs nothing; routes that would split its order are closed."""
    assert square_root(Factors(())).bits == 0
    assert isinstance(pohlig_hellman(Factors(())), Closed)
    assert isinstance(smooth_part_then_short_exponent(10, Factors(())), Closed)


def test_a_composite_q_is_worth_its_factors() -> None:
    """A q of three primes gives 44.93 bits instead of 128."""
    case = GENERIC["composite_order"]
    q = math.prod(case["q_factors"])
    assert case["p"] == 2 * q + 1

    work = pohlig_hellman(factors(case["q_factors"]))

    assert isinstance(work, Work)
    assert work.bits == pytest.approx(case["pohlig_hellman"], abs=0.02)
    assert nist_bits(case["p"].bit_length()) == pytest.approx(case["number_field_sieve"], abs=0.05)
    assert rho_bits(q) == pytest.approx(case["instead_of"], abs=0.5)


@pytest.mark.parametrize("row", GENERIC["passive"]["widths"], ids=lambda row: str(row["width"]))
def test_smooth_part_then_kangaroo(row: dict[str, float]) -> None:
    """The best division of the work, the bits learnt and the number of primes used."""
    split = Splits(row["width"], PASSIVE_ORDER).cheapest()

    assert split.bits == pytest.approx(row["bits"], abs=0.02)
    assert split.known_bits == pytest.approx(row["known"], abs=0.02)
    assert split.logarithms == row["used"]
    assert smooth_bits(row["width"], PASSIVE_ORDER) == split.bits
    assert kangaroo_bits(row["width"]) == row["without"]


def test_a_run_of_the_combination() -> None:
    """The figures of a logarithm that was really taken this way."""
    run = GENERIC["run"]
    order = Factors(pairs(run["order"]))
    split = Splits(run["width"], order).at(len(order.primes) - 1, 0)

    assert split.known_bits == pytest.approx(math.log2(run["known"]), abs=1e-9)
    assert 2**split.left_bits == pytest.approx(run["left"], abs=1)
    assert 2**split.search_bits == pytest.approx(run["steps"], abs=2)
    assert pohlig_hellman_bits(order) == pytest.approx(run["full_width_bits"], abs=0.05)


def test_a_table_for_a_fixed_generator() -> None:
    """A 160-bit subgroup costs 2^107 once and 2^54.2 each time."""
    row = GENERIC["shared_table"]
    figures = shared_table(row["order"])

    assert figures.once_bits == pytest.approx(row["once"], abs=0.05)
    assert figures.each_bits == pytest.approx(row["each"], abs=0.05)
    assert shared_interval_table(0).once_bits == math.log2(1.21)
    assert shared_interval_table(0).each_bits == math.log2(1.93)
    assert figures.amortised_bits(1) == pytest.approx(figures.once_bits, abs=1e-9)


def test_the_explanation_follows_the_split() -> None:
    """Nothing small, something small, everything small."""
    cases_of = ((20, [2**89 - 1]), (60, [1009, 2**89 - 1]), (50, [1009, 65537]))
    works = [smooth_part_then_short_exponent(width, factors(primes)) for width, primes in cases_of]
    explained = [work.explanation for work in works if isinstance(work, Work)]

    assert "No small factor" in explained[0]
    assert "give away 9.97 bits" in explained[1]
    assert "whole exponent" in explained[2]


@given(PRIME_LISTS, WIDTHS)
def test_no_set_of_primes_beats_the_best_prefix(primes: list[int], width: int) -> None:
    """Trying every set of primes of ord(g) finds nothing cheaper than the route does."""
    order = factors(primes)
    best = math.inf
    for size in range(len(primes) + 1):
        for chosen in combinations(sorted(primes), size):
            left = 2**width / math.prod(chosen)
            rest = 0.0 if size == len(primes) else 2 * math.sqrt(left)
            best = min(best, sum(2 ** subgroup_bits(r) for r in chosen) + rest)

    expected = max(0.0, math.log2(best)) if best > 0 else 0.0
    assert smooth_bits(width, order) == pytest.approx(expected, abs=1e-9)


@given(PRIME_LISTS, WIDTHS, st.data())
def test_knowing_more_factors_never_raises_a_figure(
    primes: list[int], width: int, data: st.DataObject
) -> None:
    """Prime after prime is split off the rest, and every figure of the order falls or stays."""
    revealed = data.draw(st.permutations(primes))
    figures = []
    for count in range(len(revealed) + 1):
        order = factors(revealed[:count], math.prod(revealed[count:]))
        root, full = square_root(order), pohlig_hellman(order)
        assert isinstance(root, Work)
        assert isinstance(full, Work)
        figures.append((root.bits, full.bits, smooth_bits(width, order)))
        assert {root.bound, full.bound} == {"exact" if count == len(primes) else "at most"}

    for less, more in pairwise(figures):
        assert all(b <= a + 1e-9 for a, b in zip(less, more, strict=True))


@given(PRIME_LISTS, PRIME_LISTS, WIDTHS)
def test_a_rest_that_is_only_a_bound_never_lowers_a_figure(
    primes: list[int], absent: list[int], width: int
) -> None:
    """With a rest too large by factors that ord(g) lacks the figures stay above the true ones."""
    truth = factors(primes)
    bounded = factors(primes, math.prod(absent))

    assert smooth_bits(width, truth) <= smooth_bits(width, bounded) + 1e-9
    assert pohlig_hellman_bits(truth) <= pohlig_hellman_bits(bounded)


@given(PRIME_LISTS, WIDTHS, WIDTHS)
def test_a_wider_exponent_never_lowers_the_figure(primes: list[int], one: int, other: int) -> None:
    """The combined route rises with the width, below the kangaroo and Pohlig-Hellman alone."""
    order = factors(primes)
    narrow, wide = sorted((one, other))

    assert smooth_bits(narrow, order) <= smooth_bits(wide, order) + 1e-9
    assert smooth_bits(wide, order) <= short_exponent(wide).bits
    assert smooth_bits(wide, order) <= pohlig_hellman_bits(order) + 1e-9
    assert short_exponent(narrow).bits <= short_exponent(wide).bits
