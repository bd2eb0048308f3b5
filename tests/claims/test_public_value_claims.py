"""Claims about several public values, and about relations that forge signatures."""

import secrets
from dataclasses import replace
from math import gcd

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.base import Claim, Refuted
from auditor.claims.collection import read_claim
from auditor.claims.forgery import (
    LARGEST_DIVISOR,
    ForgeryRelations,
    Relation,
    forgery_relations,
    relations,
)
from auditor.claims.public_values import (
    LARGEST_EXPONENT,
    SharedExponents,
    VisibleExponents,
    shared_exponents,
    visible_exponents,
)

P, Q, G = 10007, 5003, 4  # 10007 = 2 * 5003 + 1; 4 has order 5003
LIMIT = 40


def refutation(claim: Claim) -> str:
    """The reason why the check fails; the test fails where it does not."""
    with pytest.raises(Refuted) as caught:
        claim.check({}, secrets.randbelow)
    return str(caught.value)


units = st.lists(st.integers(2, P - 2), min_size=1, max_size=12, unique=True).map(sorted)


@given(units, st.sampled_from([1, 2, Q, P - 1]))
def test_groups_of_equal_powers(values: list[int], exponent: int) -> None:
    """Two values stand in one group exactly when their powers are equal."""
    claim = shared_exponents(P, exponent, values)
    claim.check({}, secrets.randbelow)

    assert read_claim(claim.record()) == claim
    together = {frozenset((a, b)) for group in claim.groups for a in group for b in group if a != b}
    equal = {
        frozenset((a, b))
        for a in values
        for b in values
        if a != b and pow(a, exponent, P) == pow(b, exponent, P)
    }
    assert together == equal


@given(units)
def test_visible_exponents(values: list[int]) -> None:
    """Exactly the values that are a small power of g or its inverse, of either sign."""
    claim = visible_exponents(P, G, LIMIT, values)
    claim.check({}, secrets.randbelow)

    assert read_claim(claim.record()) == claim
    small = {s * pow(G, k, P) % P for k in range(-LIMIT, LIMIT + 1) if k for s in (1, -1)}
    assert claim.visible == tuple(sorted(small & set(values)))


def test_no_exponent_is_kept() -> None:
    """The record of a visible value holds the value and not its exponent."""
    claim = visible_exponents(P, G, LIMIT, [pow(G, 23, P)])

    assert claim.visible
    assert 23 not in claim.record()["statement"].values()


def test_false_statements_about_values_are_refuted() -> None:
    """A group or a visible value too many or too few, or values that are not in order or units."""
    y = pow(G, 1000, P)
    shared = SharedExponents(P, 2, (y, P - y) if y < P - y else (P - y, y), ())
    visible = VisibleExponents(P, G, LIMIT, (pow(G, 3, P), y), ())

    assert "otherwise" in refutation(shared)
    assert "otherwise" in refutation(replace(visible, values=tuple(sorted(visible.values))))
    assert "ascending" in refutation(replace(shared, values=(5, 3)))
    assert "unit" in refutation(replace(shared, n=15, values=(5,)))
    assert "unit" in refutation(replace(shared, values=(P + 1,)))
    assert "group" in refutation(replace(shared, n=1))
    assert "limit" in refutation(replace(visible, limit=LARGEST_EXPONENT + 1))
    assert "generator" in refutation(replace(visible, values=(3,), g=P))


def test_a_generator_of_small_order_is_stepped_around_once() -> None:
    """All that it generates is visible, and nothing else."""
    g = pow(5, (P - 1) // 2, P)  # P - 1, of order 2
    claim = visible_exponents(P, g, LARGEST_EXPONENT, [2, P - 2])

    assert claim.visible == ()
    claim.check({}, secrets.randbelow)


# Relations that forge signatures


@pytest.mark.parametrize(("p", "alpha"), [(1000037, 2), (1000117, 6), (10007, 25), (1000667, 4)])
def test_relations_hold_and_none_is_missing(p: int, alpha: int) -> None:
    """Each relation is true as it stands; the claim is exactly what a search by hand finds."""
    claim = forgery_relations(p, alpha)
    claim.check({}, secrets.randbelow)
    assert read_claim(claim.record()) == claim

    for found in claim.relations:
        sign = -1 if found.negative else 1
        if found.form == "root":
            assert pow(found.r, found.power, p) == sign * alpha % p
        else:
            assert found.r == sign * pow(alpha, found.power, p) % p
    divisors = [a for a in range(2, LARGEST_DIVISOR) if (p - 1) % a == 0]
    powers = {s * pow(alpha, k, p) % p for k in (1, -1) for s in (1, -1)}
    by_hand = {a for a in divisors if any(pow(a, k, p) in powers for k in range(1, 65))}
    assert {(p - 1) // found.r for found in claim.relations if found.form == "root"} == by_hand


def test_false_relations_are_refuted() -> None:
    """One left out, one altered, one added, and bases and moduli that have none."""
    claim = forgery_relations(1000037, 2)
    first, *others = claim.relations
    for wrong in (
        (),
        tuple(others),
        (replace(first, power=first.power + 1), *others),
        (replace(first, negative=not first.negative), *others),
        (*claim.relations, Relation("root", 3, 1, False)),
    ):
        assert "other relations" in refutation(replace(claim, relations=wrong))
    assert "trivial" in refutation(ForgeryRelations(1000037, 1, ()))
    assert "trivial" in refutation(ForgeryRelations(1000037, 1000036, ()))
    assert "odd prime" in refutation(ForgeryRelations(1000038, 2, ()))
    assert "unit" in refutation(ForgeryRelations(15, 3, ()))


@settings(max_examples=15)
@given(st.integers(2, P - 2))
def test_listed_powers_share_the_most(alpha: int) -> None:
    """No small power of the base shares more of p - 1 than a listed one."""
    listed = [gcd(found.r, P - 1) for found in relations(P, alpha) if found.form == "power"]
    for k in range(-64, 65):
        r = pow(alpha, k, P)
        for candidate in (r, P - r):
            if k and candidate not in (1, P - 1):
                assert any(share % gcd(candidate, P - 1) == 0 for share in listed)
