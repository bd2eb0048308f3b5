"""Facts about declared public values: counted, listed, and never with their exponents."""

import json
from functools import cache

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.encoding import canonical_json
from auditor.facts import Established
from auditor.intake.standard_groups import find
from auditor.run_values import RunValues
from tests.facts.knowledge import declare, reviewed, settled

QUICK = RunValues("2026-12-01", "quick")
COUNTS = ("out_of_range", "outside_subgroup", "small_order", "related", "plainly_visible")
P, Q, G = 1000667, 500333, 4  # a safe prime; 4 has order q (sympy 1.14)
MODP = find("modp2048")


def facts_of(*values: int, modulus: int = P, generator: int = G, order: int | None = Q):
    """A review of a small group with these public values."""
    return reviewed(declare(modulus, generator, subgroup_order=order, public_values=values), QUICK)


def counts(facts: Established) -> dict[str, int]:
    """The counts that are not 0."""
    found = {name: facts.facts[f"public_values.{name}"].value for name in COUNTS}
    return {name: count for name, count in found.items() if count}


def power(k: int) -> int:
    """g^k, with exponents far beyond what is stepped through."""
    return pow(G, k, P)


A, B = power(200001), power(300007)


@pytest.mark.parametrize(
    ("values", "expected"),
    [
        ((A, B), {}),
        ((0, A), {"out_of_range": 1, "small_order": 1}),
        ((1, P - 1), {"out_of_range": 2, "small_order": 2}),
        ((P, P + 2), {"out_of_range": 2, "small_order": 1}),
        ((P - A, B), {"outside_subgroup": 1}),
        ((A, P - A), {"outside_subgroup": 1, "related": 2}),
        ((A, A, B), {"related": 2}),
        ((G, A), {"plainly_visible": 1}),
        ((power(65536), B), {"plainly_visible": 1}),
        ((power(Q - 65536), B), {"plainly_visible": 1}),
        ((power(65537), power(Q - 65537)), {}),
        ((P - power(3), B), {"plainly_visible": 1, "outside_subgroup": 1}),
    ],
)
def test_each_fault_is_counted(values: tuple[int, ...], expected: dict[str, int]) -> None:
    """Range, membership, small order, shared exponents, visible exponents of either sign."""
    facts = facts_of(*values)

    assert counts(facts) == expected
    assert facts.facts["public_values.count"].value == len(values)


def test_offending_values_are_listed() -> None:
    """Each count has the list of its values, ascending and once each."""
    facts = facts_of(A, P - A, A, 1, power(7)).facts

    assert facts["public_values.values_out_of_range"].value == [1]
    assert facts["public_values.values_outside_subgroup"].value == [P - A]
    assert facts["public_values.values_of_small_order"].value == [1]
    assert facts["public_values.values_related"].value == sorted((A, P - A))
    assert facts["public_values.values_plainly_visible"].value == [power(7)]


@cache
def all_visible() -> frozenset[int]:
    """Every value with a visible exponent."""
    return frozenset(s * power(k) % P for k in range(-65536, 65537) if k for s in (1, -1))


@settings(max_examples=25)
@given(st.lists(st.integers(0, P + 3), min_size=1, max_size=5))
def test_counts_follow_from_their_definitions(values: list[int]) -> None:
    """Against a table of all logarithms."""
    found = counts(facts_of(*values))
    inner = [y for y in values if 2 <= y <= P - 2]
    visible = all_visible()

    assert found.get("out_of_range", 0) == len(values) - len(inner)
    assert found.get("outside_subgroup", 0) == sum(pow(y, Q, P) != 1 for y in inner)
    assert found.get("plainly_visible", 0) == sum(y in visible for y in inner)
    twins = [y for y in values if values.count(y) > 1 or (y in inner and P - y in inner)]
    assert found.get("related", 0) == len(twins)


def test_no_exponent_enters_a_claim() -> None:
    """Claims about a visible value hold no exponent; one of five digits is found nowhere."""
    declaration = declare(P, G, subgroup_order=Q, public_values=(power(54321), A))
    text = canonical_json([claim.record() for claim in settled(declaration, QUICK)])

    assert "visible-exponents" in text
    assert 54321 not in _integers(json.loads(text))


def _integers(record: object) -> set[object]:
    if isinstance(record, dict):
        return set().union(*map(_integers, record.values()))
    if isinstance(record, list):
        return set().union(set(), *map(_integers, record))
    return {record}


def test_without_public_values_nothing_is_said() -> None:
    """The facts are undeclared, and the count is 0."""
    facts = facts_of()

    assert facts.facts["public_values.count"].value == 0
    for name in COUNTS:
        assert facts.absent[f"public_values.{name}"].reason == "undeclared"


def test_without_an_order_that_of_the_generator_serves() -> None:
    """Membership and relations are decided by ord(g) where no q is declared."""
    assert counts(facts_of(A, P - A, order=None)) == {"outside_subgroup": 1, "related": 2}


@pytest.mark.parametrize("order", [0, 7])
def test_an_order_that_divides_nothing_leaves_relations_undefined(order: int) -> None:
    """There is no cofactor; range and visible exponents are still judged."""
    facts = facts_of(1, A, order=order)

    assert facts.absent["public_values.related"].reason == "undefined"
    assert facts.facts["public_values.out_of_range"].value == 1
    assert facts.facts["public_values.plainly_visible"].value == 0


def test_a_trivial_generator_shows_no_exponents() -> None:
    """Where g is 1 or -1 nothing can be told by stepping."""
    for generator in (1, P - 1):
        facts = facts_of(A, generator=generator)
        assert facts.absent["public_values.plainly_visible"].reason == "undefined"


def test_a_composite_modulus_is_stepped_through_as_well() -> None:
    """A value that shares a factor with the modulus is no unit, and of small order."""
    facts = facts_of(3, 10, 8, modulus=15 * 1009, generator=2, order=4)

    assert facts.facts["public_values.plainly_visible"].value == 1
    assert facts.facts["public_values.values_plainly_visible"].value == [8]


def test_a_standard_group() -> None:
    """With generator 2 a value like 2^92 shows its exponent, others of the group do not."""
    assert MODP is not None
    secret = pow(2, 3**141, MODP.modulus)
    facts = facts_of(2**92, secret, modulus=MODP.modulus, generator=2, order=None)

    assert counts(facts) == {"plainly_visible": 1}
    assert facts.facts["public_values.values_plainly_visible"].value == [hex(2**92)]
