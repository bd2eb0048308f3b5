"""The unit group agrees with PARI, with a census of its elements, and with its own laws."""

from collections import Counter
from fractions import Fraction
from itertools import pairwise, product
from math import gcd, lcm, prod
from pathlib import Path
from random import Random
from typing import Any

import gmpy2
import pytest
import sympy
import yaml
from cypari import pari
from hypothesis import given
from hypothesis import strategies as st

from auditor.element_orders import (
    NotAUnit,
    WrongFactorization,
    double_primitive_root,
    lift_primitive_root,
    order_by_stripping,
)
from auditor.structure import (
    PartialOrder,
    PartlyFactoredGroup,
    UnitGroup,
    UnsplitGroup,
    isomorphism_classes,
    known_structure,
    unit_group,
)

DATA = Path(__file__).parent / "data" / "unit_groups.yaml"
CASES = yaml.safe_load(DATA.read_text(encoding="utf-8"))


def group_modulo(n: int) -> UnitGroup:
    """The unit group modulo n, with factors from sympy."""
    factors = sympy.factorint(n)
    return unit_group(factors, {p: sympy.factorint(p - 1) for p in factors if p > 2})


def units(n: int) -> list[int]:
    """All units, found by trying."""
    return [a for a in range(n) if gcd(a, n) == 1]


def order_by_counting(a: int, n: int) -> int:
    """The order, found by multiplying until 1 appears."""
    power, count = a % n, 1
    while power != 1 % n:
        power, count = power * a % n, count + 1
    return count


@pytest.mark.parametrize("case", CASES["unit_groups"], ids=lambda case: str(case["n"]))
def test_listed_structure(case: dict[str, Any]) -> None:
    """Every listed property of a listed modulus comes out."""
    group = group_modulo(case["n"])

    assert group.modulus == case["n"]
    assert group.order == case["order"]
    assert group.exponent == case["exponent"]
    assert group.cyclic is case["cyclic"]
    assert list(group.invariant_factors) == case["invariant_factors"]
    assert [list(part) for part in group.elementary_divisors] == case["elementary_divisors"]
    assert group.elements_of_order(group.exponent) == case["of_maximal_order"]
    assert group.elements_of_order(2) == case["of_order_two"]


@pytest.mark.parametrize("case", CASES["orders"], ids=lambda case: f"{case['a']}-{case['n']}")
def test_listed_order(case: dict[str, Any]) -> None:
    """Every listed order comes out."""
    assert group_modulo(case["n"]).order_of(case["a"]) == case["order"]


def agrees_with_pari(n: int, draw: Random, elements: int) -> None:
    """Order, invariant factors, primitive root and some element orders, against PARI."""
    group, theirs = group_modulo(n), pari(n).znstar()

    assert group.order == int(theirs[0])
    assert [int(d) for d in theirs[1] if d > 1] == list(group.invariant_factors)
    assert group.exponent == int(pari.lcm(theirs[1]))
    for _ in range(elements):
        a = draw.randrange(n)
        if gcd(a, n) == 1:
            assert group.order_of(a) == int(pari(f"znorder(Mod({a},{n}))"))


def test_every_modulus_to_3000_agrees_with_pari() -> None:
    """Invariant factors and orders of elements of every small modulus (PARI znstar, znorder)."""
    draw = Random(3000)
    for n in range(1, 3001):
        agrees_with_pari(n, draw, 12)


def test_random_moduli_to_64_bits_agree_with_pari() -> None:
    """Invariant factors and orders of elements of 200 moduli up to 2^64."""
    draw = Random(64)
    for _ in range(200):
        agrees_with_pari(draw.randrange(1, 2 ** draw.randrange(12, 65)), draw, 12)


def test_a_primitive_root_is_the_least_one() -> None:
    """It exists exactly when PARI finds one, and no smaller element generates the group."""
    for n in range(1, 400):
        orders = {a: order_by_counting(a, n) for a in units(n)}
        roots = [a for a, order in orders.items() if order == len(orders)]
        group = group_modulo(n)

        assert group.least_primitive_root() == (roots[0] if roots else None)
        assert group.cyclic is bool(roots)
        assert [a for a in orders if group.is_primitive_root(a)] == roots
        assert len(roots) == (sympy.totient(sympy.totient(n)) if roots else 0)


@pytest.mark.parametrize("n", [*range(1, 181), 255, 256, 504, 561, 840, 1105, 1729])
def test_counts_agree_with_a_census(n: int) -> None:
    """Elements of each order, solutions of a^k = 1, and the share of maximal order, by counting."""
    group = group_modulo(n)
    census = Counter(order_by_counting(a, n) for a in units(n))

    assert {d: group.elements_of_order(d) for d in group.orders()} == {
        d: census[d] for d in group.orders()
    }
    assert sum(census[d] for d in group.orders()) == group.order == sum(census.values())
    for k in range(1, 25):
        assert group.solutions(k) == sum(pow(a, k, n) == 1 % n for a in units(n))
        if group.exponent % k:
            assert group.elements_of_order(k) == census[k] == 0
    assert group.share_of_maximal_order == Fraction(census[group.exponent], group.order)


@given(st.integers(1, 3000))
def test_component_generators(n: int) -> None:
    """Each has the order of its cycle, and is 1 modulo the other prime powers."""
    group = group_modulo(n)
    for cycle, (order, u) in zip(group.cycles, group.component_generators(), strict=True):
        assert order == cycle.order == order_by_counting(u, n)
        assert u % (n // cycle.modulus) == 1 % (n // cycle.modulus)


@given(st.integers(1, 1200))
def test_invariant_generators_span_the_group(n: int) -> None:
    """Their orders are the invariant factors, and their products are all units, each once."""
    group = group_modulo(n)
    generators = group.invariant_generators()

    assert tuple(order for order, _ in generators) == group.invariant_factors
    assert all(group.order_of(u) == order for order, u in generators)
    powers = [[pow(u, i, n) for i in range(order)] for order, u in generators]
    assert sorted(prod(choice) % n for choice in product(*powers)) == units(n)


@given(st.lists(st.integers(1, 10**6), min_size=1, max_size=4))
def test_laws_of_the_decomposition(parts: list[int]) -> None:
    """Invariant factors and elementary divisors multiply to the order, in a divisor chain."""
    group = group_modulo(prod(parts))
    chain = group.invariant_factors

    assert prod(chain) == group.order == prod(r**e for r, e in group.order_factors)
    assert prod(r**e for r, e in group.elementary_divisors) == group.order
    assert prod(r**e for r, e in group.exponent_factors) == group.exponent
    assert all(a % b == 0 for a, b in pairwise(chain))
    assert all(cycle.order > 1 for cycle in group.cycles)
    assert group.exponent == (chain[0] if chain else 1)
    assert group.solutions(group.exponent) == group.order


@pytest.mark.parametrize(("p", "g"), [(29, 14), (40487, 5), (3, 2), (5, 2), (71, 7), (10007, 5)])
@pytest.mark.parametrize("k", [1, 2, 3, 6])
def test_primitive_roots_lift(p: int, g: int, k: int) -> None:
    """From p to p^k and 2 p^k, the exceptional pairs 14 mod 29 and 5 mod 40487 included."""
    lifted = lift_primitive_root(g, p, k)
    doubled = double_primitive_root(lifted, p**k)

    assert 0 < lifted < p**k
    assert 0 < doubled < 2 * p**k
    assert group_modulo(p**k).is_primitive_root(lifted)
    assert group_modulo(2 * p**k).is_primitive_root(doubled)


def test_an_exceptional_root_does_not_lift_unchanged() -> None:
    """The primitive root 14 of 29 is none of 29^2, so that the correction is needed."""
    assert group_modulo(29).is_primitive_root(14)
    assert not group_modulo(29**2).is_primitive_root(14)


def large_group(digits: int) -> tuple[int, dict[int, int], dict[int, dict[int, int]]]:
    """n = 8 p^2 q of more than that many digits, with every factor known by construction."""
    draw = Random(digits)
    primes: list[tuple[int, dict[int, int]]] = []
    while len(primes) < 2:
        core = [int(gmpy2.next_prime(draw.getrandbits(digits))) for _ in range(2)]
        for k in range(2, 4000, 2):
            if gmpy2.is_prime(p := k * core[0] * core[1] + 1):
                primes.append((int(p), sympy.factorint(k) | dict.fromkeys(core, 1)))
                break
    factors = {2: 3, primes[0][0]: 2, primes[1][0]: 1}
    return prod(p**k for p, k in factors.items()), factors, dict(primes)


def test_numbers_of_more_than_300_digits() -> None:
    """Structure and orders of a modulus of over 300 digits whose factors are given."""
    n, factors, predecessors = large_group(310)
    group = unit_group(factors, predecessors)
    p, q = sorted(predecessors)

    assert n > 10**300
    assert group.order == 4 * prod((r - 1) * r ** (factors[r] - 1) for r in (p, q))
    assert group.exponent == lcm(2, *((r - 1) * r ** (factors[r] - 1) for r in (p, q)))
    assert prod(group.invariant_factors) == group.order
    for order, u in group.invariant_generators():
        assert group.order_of(u) == order
        assert pow(u, order, n) == 1
    assert 0 < group.share_of_maximal_order < 1


def test_equal_invariant_factors_are_isomorphic_groups() -> None:
    """Moduli fall into classes as their groups do: 8 and 12, 15 and 16, but not 5 and 8."""
    moduli = (5, 8, 10, 12, 15, 16, 20, 24, 30)
    classes = isomorphism_classes(group_modulo(n) for n in moduli)

    assert {tuple(group.modulus for group in one) for one in classes} == {
        (5, 10),
        (8, 12),
        (15, 16, 20, 30),
        (24,),
    }


@given(st.integers(3, 10**9), st.integers(0, 10**9), st.integers(0, 5))
def test_a_partial_answer_agrees_with_the_complete_one(n: int, a: int, dropped: int) -> None:
    """Without some primes of the order, its known part and unknown divisor are still right."""
    complete = group_modulo(n)
    predecessors = {
        p: {r: e for r, e in sympy.factorint(p - 1).items() if r % 6 != dropped}
        for p, _ in complete.modulus_factors
        if p > 2
    }
    partial = known_structure(dict(complete.modulus_factors), predecessors)
    if isinstance(partial, UnitGroup) or gcd(a, n) > 1:
        return
    assert isinstance(partial, PartlyFactoredGroup)
    assert partial.invariant_factors == complete.invariant_factors
    assert partial.cyclic is complete.cyclic
    order, seen = complete.order_of(a), partial.partial_order_of(a)

    assert order % seen.known == 0
    assert seen.unknown_divides % (order // seen.known) == 0
    assert gcd(seen.known, seen.unknown_divides) == 1
    assert (seen.exact is None) is (order != seen.known)


def test_a_partial_group_says_what_it_knows() -> None:
    """With 10006 = 2 * 5003 half factored, 5 has even order times an unknown divisor; -1 has 2."""
    group = known_structure({10007: 1}, {10007: {2: 1}})

    assert isinstance(group, PartlyFactoredGroup)
    assert group.known_exponent_factors == ((2, 1),)
    assert group.unfactored_exponent == 5003
    assert group.partial_order_of(5) == PartialOrder(2, 5003)
    assert group.partial_order_of(25) == PartialOrder(1, 5003)
    assert group.partial_order_of(10006).exact == 2
    assert group.elements_of_factored_order([(2, 1)]) == 1


def test_a_partial_group_cannot_pass_for_a_complete_one() -> None:
    """The names that give complete answers exist on the complete type alone."""
    complete_only = {name for name in vars(UnitGroup) if not name.startswith("_")}

    for name in complete_only - set(vars(PartlyFactoredGroup)):
        assert not hasattr(PartlyFactoredGroup, name)
        assert not hasattr(UnsplitGroup, name)
    assert not complete_only & set(vars(PartlyFactoredGroup))
    assert {"order_of", "order_factors", "least_primitive_root"} <= complete_only


def test_primes_of_one_component_complete_another() -> None:
    """A prime named for one p - 1 is divided out of the others, so nothing stays open."""
    group = known_structure({7: 1, 31: 1}, {31: {2: 1, 3: 1, 5: 1}})

    assert isinstance(group, UnitGroup)
    assert group.elementary_divisors == group_modulo(217).elementary_divisors


def test_an_unsplit_modulus() -> None:
    """With 10403 = 101 * 103 unfactored, the rest is described and bounds are true."""
    group = known_structure({3: 2, 7: 1}, {3: {2: 1}, 7: {2: 1, 3: 1}}, unfactored=10403)
    complete = group_modulo(group.modulus)

    assert isinstance(group, UnsplitGroup)
    assert complete.order % group.order_multiple_of == 0
    assert complete.order <= group.order_at_most
    assert group.known_not_cyclic
    assert complete.order_of(2) % group.divisor_of_order_of(2) == 0
    with pytest.raises(NotAUnit):
        group.divisor_of_order_of(101)


def test_nothing_is_said_of_an_unsplit_modulus_alone() -> None:
    """2 * 10403 might be twice a prime power for all that is known, so cyclic is left open."""
    group = known_structure({2: 1}, {}, unfactored=10403)

    assert isinstance(group, UnsplitGroup)
    assert not group.known_not_cyclic


def test_two_even_orders_exclude_a_primitive_root() -> None:
    """5 * 3 with 3 unfactored is known not to be cyclic, the least such case."""
    group = known_structure({5: 1}, {5: {2: 2}}, unfactored=3)

    assert isinstance(group, UnsplitGroup)
    assert group.known_not_cyclic


@pytest.mark.parametrize(
    ("factors", "predecessors", "rest"),
    [
        ({10007: 1}, {10007: {2: 1, 5003: 1, 3: 1}}, 1),
        ({10007: 1}, {10007: {2: 1, 5003: 1}, 7: {2: 1, 3: 1}}, 1),
        ({10007: 0}, {}, 1),
        ({1: 1}, {}, 1),
        ({3: 1}, {3: {2: 1, 1: 1}}, 1),
        ({3: 1}, {3: {2: 1}}, 0),
        ({3: 1}, {3: {2: 1}}, 15),
    ],
)
def test_wrong_factors_are_refused(
    factors: dict[int, int], predecessors: dict[int, dict[int, int]], rest: int
) -> None:
    """Foreign or contradictory factors give no group at all."""
    with pytest.raises(WrongFactorization):
        known_structure(factors, predecessors, rest)


@pytest.mark.parametrize("predecessors", [{}, {10007: {2: 1}}])
def test_missing_factors_give_no_complete_group(predecessors: dict[int, dict[int, int]]) -> None:
    """Where a prime of the order is missing, the complete type is refused."""
    with pytest.raises(WrongFactorization):
        unit_group({10007: 1}, predecessors)


def test_two_need_not_be_named() -> None:
    """The prime 2 divides every p - 1 and is divided out without being given."""
    assert unit_group({10007: 1}, {10007: {5003: 1}}).order_of(5) == 10006


def test_an_exponent_that_does_not_vanish_is_refused() -> None:
    """When a^T is not 1 no order is returned, whichever prime of T is short."""
    for factors in ([], [(2, 1)], [(5003, 1)], [(2, 1), (3, 1)], [(3, 2), (5003, 1)]):
        with pytest.raises(WrongFactorization):
            order_by_stripping(5, 10007, factors)
    assert order_by_stripping(5, 10007, [(2, 3), (3, 1), (5003, 1)]) == 10006


@pytest.mark.parametrize("a", [0, 3, 15, -6])
def test_a_non_unit_has_no_order(a: int) -> None:
    """An element with a divisor in common with the modulus is refused."""
    with pytest.raises(NotAUnit):
        group_modulo(15).order_of(a)


def test_no_power_below_one() -> None:
    """Solutions of a^0 = 1 are not counted by the formula, so the question is refused."""
    with pytest.raises(ValueError, match="positive"):
        group_modulo(15).solutions(0)
    assert group_modulo(15).elements_of_order(0) == 0
