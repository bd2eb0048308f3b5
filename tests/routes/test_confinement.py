"""Confinement of a reused exponent: RFC 5114, runs with a toy group, an oracle, and laws."""

import math
from itertools import combinations, pairwise

import gmpy2
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.routes.base import Closed, Work, floor_bits
from auditor.routes.confinement import Check, confinement
from auditor.routes.factors import Factors
from auditor.routes.leaks import confinement_leak_bits, public_leak_bits
from auditor.routes.partial_exponent import Splits
from auditor.routes.searches import kangaroo_bits, subgroup_bits, trial_bits
from auditor.routes.smooth_part import smooth_part_then_short_exponent
from tests.routes.cases import cases, cofactor_primes, factors, group, pairs, subgroup, units

CONFINEMENT = cases("confinement")
WIDTHS = {"rfc5114-1024-160": 160, "rfc5114-2048-224": 224, "rfc5114-2048-256": 256}

PRIMES = [2, 3, 5, 7, 43, 157, 1009, 65537, 4294967311, 1099511627791, 2**61 - 1]
PRIME_LISTS = st.lists(st.sampled_from(PRIMES), max_size=4)
ORDERS = st.lists(st.sampled_from([*PRIMES, 2**89 - 1]), min_size=1, max_size=3)
EXPONENTS = st.integers(min_value=1, max_value=300)


def work_of(
    width: float, order: Factors, units_known: Factors, check: Check = "none", reused: bool = True
) -> float:
    """Bits of the route; infinite where it is closed."""
    work = confinement(width, order, units_known, check, reused)
    return work.bits if isinstance(work, Work) else math.inf


@pytest.mark.parametrize("name", CONFINEMENT["groups"])
def test_the_factor_lists_are_those_of_the_groups(name: str) -> None:
    """Every listed factor is prime and divides (p - 1) / q; the cofactor has the stated length."""
    standard = group(name)
    rest = units(name).rest

    assert all(gmpy2.is_prime(prime) for prime in cofactor_primes(name))
    assert rest.bit_length() == CONFINEMENT["cofactor_lengths"][name]
    assert gmpy2.is_prime(rest) == (rest.bit_length() != 1622)
    assert math.prod([*cofactor_primes(name), rest]) == (
        (standard.modulus - 1) // standard.subgroup_order
    )


@pytest.mark.parametrize(
    "row", CONFINEMENT["leaks"], ids=lambda row: f"{row['group']} {row['budget']}"
)
def test_leaks_and_totals_by_budget(row: dict[str, float]) -> None:
    """All factors up to the budget give the leak, the trials and the total that were computed."""
    name, budget = row["group"], row["budget"]
    probes = tuple(prime for prime in cofactor_primes(name) if prime <= 2**budget)
    split = Splits(row["width"], subgroup(name), probes).at(0, len(probes))
    # The published count is r / 2 trials a factor; the route leaves out the one that succeeds.
    trials = math.log2(2**split.trials_bits + len(probes) / 2)

    assert split.probed_bits == pytest.approx(row["leak"], abs=0.02)
    assert trials == pytest.approx(row["trials"], abs=0.02)
    assert split.left_bits == pytest.approx(row["left"], abs=0.02)
    assert split.search_bits == pytest.approx(row["search"], abs=0.02)
    assert split.bits == pytest.approx(row["total"], abs=0.02)
    leak = confinement_leak_bits(subgroup(name), units(name), "none", budget)
    assert leak - split.probed_bits == pytest.approx(0, abs=1e-9)


@pytest.mark.parametrize("name", WIDTHS)
def test_static_and_unchecked(name: str) -> None:
    """The best of all budgets: 73.7, 35.9 and 95.25 bits."""
    work = confinement(WIDTHS[name], subgroup(name), units(name), "none", reused=True)

    assert isinstance(work, Work)
    assert work.bits == pytest.approx(CONFINEMENT["unchecked"][name], abs=0.02)
    assert (work.attacker, work.bound) == ("peer", "at most")


def test_the_largest_budget_is_not_the_best() -> None:
    """For the 224-bit group the 41.7-bit factor costs more than it saves: 2^36.7 is the last."""
    work = confinement(
        224, subgroup("rfc5114-2048-224"), units("rfc5114-2048-224"), "none", reused=True
    )

    assert isinstance(work, Work)
    details = dict(work.details)
    assert details["largest prime probed"] == 112486462861
    assert details["queries"] == 12
    assert details["bits of the number modulo which probing tells it"] == 161.63
    assert "modulo a number of 161.63 bits in 12 queries" in work.explanation


def test_one_more_factor_of_the_256_bit_group() -> None:
    """With factors up to 142031 the work is 111.03 bits, with the next 95.24."""
    name = "rfc5114-2048-256"
    less = work_of(256, subgroup(name), units(name, largest=142031))
    more = work_of(256, subgroup(name), units(name, largest=3181327537))

    assert floor_bits(less) == 111.03
    assert floor_bits(more) == 95.24
    assert more == pytest.approx(95.25, abs=0.005)


def test_a_complete_factorization_makes_the_figure_exact() -> None:
    """The prime cofactor of the 256-bit group changes the bound, not the figure."""
    name = "rfc5114-2048-256"
    partial = units(name)
    complete = factors([*partial.primes, partial.rest])
    work = confinement(256, subgroup(name), complete, "none", reused=True)

    assert isinstance(work, Work)
    assert (work.bits, work.bound) == (work_of(256, subgroup(name), partial), "exact")


@pytest.mark.parametrize("check", ["membership", "cofactor"])
def test_checks_that_keep_values_inside_close_the_route(check: Check) -> None:
    """A membership test or a cofactor exponent leaves nothing to a peer and leaks nothing."""
    name = "rfc5114-2048-256"
    closed = confinement(256, subgroup(name), units(name), check, reused=True)

    assert isinstance(closed, Closed)
    assert check in closed.reason
    assert confinement_leak_bits(subgroup(name), units(name), check) == 0.0


def test_single_use_closes_the_route() -> None:
    """What a probe reveals of an exponent dies with its only session."""
    name = "rfc5114-2048-224"
    closed = confinement(224, subgroup(name), units(name), "none", reused=False)

    assert isinstance(closed, Closed)
    assert "once" in closed.reason


def test_a_range_check_on_a_safe_prime_leaks_the_parity() -> None:
    """One bit and no more: half a bit less work for kangaroos, the same for full exponents."""
    order, safe = subgroup("modp2048"), units("modp2048")

    assert confinement_leak_bits(order, safe, "range") == 1.0
    assert work_of(225, order, safe, "range") == pytest.approx(kangaroo_bits(224), abs=1e-9)
    assert work_of(2047, order, safe, "range") > 1023


def test_an_exponent_wider_than_the_order_is_shielded() -> None:
    """Probes say nothing about x modulo ord(g) while 2^w / z exceeds ord(g); reduced ones leak."""
    name = "rfc5114-2048-256"
    work = confinement(2048, subgroup(name), units(name), "none", reused=True)

    assert isinstance(work, Work)
    assert work.bits == pytest.approx(127.9, abs=0.01)
    assert "would not" in work.explanation
    reduced = dict(work.details)["if exponents are reduced modulo ord(g)"]
    assert reduced == floor_bits(work_of(subgroup(name).bits, subgroup(name), units(name)))


def test_a_run_with_six_queries() -> None:
    """Six values of small order determine an exponent of the toy group modulo 450450."""
    toy = CONFINEMENT["toy"]
    p, x = toy["p"], toy["x"]
    small = pairs(toy["small"])
    assert p - 1 == toy["q"] * math.prod(r**e for r, e in small)
    assert pow(toy["g"], x, p) == toy["public"]

    residues = []
    for r, e in small:
        a = 2
        while pow(a, (p - 1) // r, p) == 1:
            a += 1
        y = pow(a, (p - 1) // r**e, p)
        shared = pow(y, x, p)
        residues.append((r**e, next(c for c in range(r**e) if pow(y, c, p) == shared)))

    recovered = toy["recovered"]
    assert math.prod(modulus for modulus, _ in residues) == toy["recovered_modulus"]
    assert all(recovered % modulus == residue for modulus, residue in residues)
    assert x % toy["recovered_modulus"] == recovered
    known = Factors((*small, (toy["q"], 1)))
    order = Factors(((toy["q"], 1),))
    assert confinement_leak_bits(order, known, "none", 20) == pytest.approx(toy["leak"], abs=0.01)


def test_the_parity_survives_a_range_check() -> None:
    """The value -g^a is in range, and the shared key it gives differs by the parity of x."""
    p, g, a, x = (CONFINEMENT["parity"][key] for key in ("p", "g", "a", "x"))
    for exponent in (x, x + 1):
        y = p - pow(g, a, p)
        assert 2 <= y <= p - 2
        public = pow(g, exponent, p)
        expected = pow(public, a, p) if exponent % 2 == 0 else p - pow(public, a, p)
        assert pow(y, exponent, p) == expected


def test_public_leaks() -> None:
    """An even order gives away one bit; factors count while their logarithms cost 2^40."""
    q = group("modp2048").subgroup_order

    assert public_leak_bits(Factors(((q, 1),))) == 0.0
    assert public_leak_bits(Factors(((2, 1), (q, 1)))) == 1.0
    assert public_leak_bits(Factors(((2, 3),), q)) == 3.0
    smooth = Factors(((2**31 - 1, 1), (2**61 - 1, 1), (2**89 - 1, 1)))
    assert public_leak_bits(smooth) == pytest.approx(92)
    assert public_leak_bits(smooth, 45) == pytest.approx(181)


@given(ORDERS, PRIME_LISTS, EXPONENTS)
def test_no_choice_of_factors_beats_the_route(
    order: list[int], extra: list[int], width: int
) -> None:
    """Trying every set of logarithms with every set of probes finds nothing cheaper."""
    group_factors, base = factors(order + extra), factors(order)
    best = math.inf
    for passive in subsets(order):
        for active in subsets(extra):
            spent = sum(2 ** subgroup_bits(r) for r in passive)
            spent += sum(2 ** trial_bits(r) for r in active)
            left = 2**width / (math.prod(passive) * math.prod(active))
            complete = len(passive) == len(order)
            best = min(best, spent + (0 if complete else 2 * math.sqrt(left)))

    expected = max(0.0, math.log2(best)) if best > 0 else 0.0
    assert work_of(width, base, group_factors) == pytest.approx(expected, abs=1e-9)


def subsets(primes: list[int]) -> list[tuple[int, ...]]:
    """All choices from a list."""
    return [c for size in range(len(primes) + 1) for c in combinations(sorted(primes), size)]


@given(ORDERS, PRIME_LISTS, EXPONENTS, st.data())
def test_knowing_more_factors_never_raises_the_figure(
    order: list[int], extra: list[int], width: int, data: st.DataObject
) -> None:
    """Factors of the group, of ord(g) or of both are revealed one by one."""
    marked = [(r, True) for r in order] + [(r, False) for r in extra]
    revealed = data.draw(st.permutations(marked))
    later = data.draw(st.integers(0, 2))
    figures = []
    for count in range(len(marked) + later + 1):
        known = revealed[:count]
        hidden = math.prod(r for r, _ in revealed[count:])
        # What the group's factors say about ord(g) may become known later than they do.
        placed = revealed[: max(0, count - later)]
        inside = [r for r, of_order in placed if of_order]
        outside = math.prod(r for r, of_order in revealed[max(0, count - later) :] if of_order)
        base = factors(inside, outside)
        figures.append(work_of(width, base, factors([r for r, _ in known], hidden)))

    assert all(more <= less + 1e-9 for less, more in pairwise(figures))


@given(ORDERS, PRIME_LISTS, EXPONENTS, EXPONENTS)
def test_a_wider_exponent_never_lowers_the_figure(
    order: list[int], extra: list[int], one: int, other: int
) -> None:
    """The figure rises with the width and never exceeds that of an eavesdropper."""
    base, all_units = factors(order), factors(order + extra)
    narrow, wide = sorted((one, other))
    passive = smooth_part_then_short_exponent(wide, base)

    assert isinstance(passive, Work)
    assert work_of(narrow, base, all_units) <= work_of(wide, base, all_units) + 1e-9
    assert work_of(wide, base, all_units) <= passive.bits + 1e-9


@given(ORDERS, PRIME_LISTS, EXPONENTS)
def test_a_stricter_check_never_lowers_the_figure(
    order: list[int], extra: list[int], width: int
) -> None:
    """No check, range, membership or cofactor; reuse, single use; and the leaks alike."""
    base, all_units = factors(order), factors(order + extra)
    checks: tuple[Check, ...] = ("none", "range", "membership", "cofactor")
    figures = [work_of(width, base, all_units, check) for check in checks]
    leaks = [confinement_leak_bits(base, all_units, check) for check in checks]

    assert figures == sorted(figures)
    assert leaks == sorted(leaks, reverse=True)
    assert work_of(width, base, all_units, "none", reused=False) == math.inf


def test_long_lists_of_equal_primes_are_quick() -> None:
    """A group order of 2^2000 and an ord(g) of 2^1000 are decided without trying all pairs."""
    work = confinement(2000, Factors(((2, 1000),)), Factors(((2, 2000),)), "none", reused=True)

    assert isinstance(work, Work)
    assert work.bits == pytest.approx(math.log2(1000 / 2), abs=1e-9)
