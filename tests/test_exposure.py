"""The strength of the same numbers under other usages: laws over usages, and worked figures."""

from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import pytest

from auditor.advice.exposure import CHECKS, Exposure, Exposures
from auditor.claims.collection import Claims
from auditor.declaration import Declaration, Party, Place
from auditor.facts import establish
from auditor.facts.given import Given
from auditor.intake.tree import read_inputs
from tests.facts.knowledge import settled
from tests.facts.test_worked_numbers import GROUP_23, GROUP_24, QUICK, claims, group

ROOT = Path(__file__).parents[1]
USAGES = [(check, use) for check in CHECKS for use in ("single", "static")]


def exposure(declaration: Declaration, known: Claims) -> tuple[Exposure, ...]:
    """The rows of one declaration."""
    return Exposures(Given(declaration, known, QUICK)).of(declaration)


def least(rows: tuple[Exposure, ...], check: str, use: str, width: int) -> float:
    """The work for a passive attacker or a peer under one usage."""
    return min(
        row.bits
        for row in rows
        if (row.check, row.use, row.width) == (check, use, width) and row.attacker != "designer"
    )


@pytest.mark.parametrize(("number", "factors", "bits"), [(23, GROUP_23, 224), (24, GROUP_24, 256)])
@pytest.mark.parametrize(("check", "use"), USAGES)
def test_each_row_is_what_a_declaration_of_that_usage_leads_to(
    number: int, factors: tuple[int, ...], bits: int, check: str, use: str
) -> None:
    """Declared instead of assumed, the usage gives the same work, and its bound is the same."""
    known = claims(number, factors)
    rows = exposure(group(number, factors, bits=bits, use="single", checks=()), known)
    declared = group(number, factors, bits=bits, use=use, checks=CHECKS[check])
    facts = establish(declared, known, QUICK).facts

    assert least(rows, check, use, bits) == facts["strength.work_bits_at_most"].value
    bounds = {
        row.bound
        for row in rows
        if (row.check, row.use, row.width) == (check, use, bits) and row.attacker != "designer"
    }
    assert ("at most" in bounds) == (not facts["strength.work_bits_at_most"].tight)


def test_group_23_static_and_unchecked_falls_from_110_to_36_bits() -> None:
    """The worked figures of RFC 5114 group 23: confinement when unchecked, the sieve otherwise."""
    rows = exposure(group(23, GROUP_23, bits=224, use="static", checks=()), claims(23, GROUP_23))

    assert round(least(rows, "none", "static", 224)) == 36
    assert round(least(rows, "membership", "static", 224)) == 110
    assert round(least(rows, "none", "single", 224)) == 110
    assert {(r.check, r.use, r.width) for r in rows if r.declared} == {("none", "static", 224)}


def test_the_widths_are_the_declared_and_the_recommended_and_none_beyond_the_order() -> None:
    """Twice the requirement, twice the next table strength, the order; the declared as it is."""
    known = claims(24, GROUP_24)
    usual = exposure(group(24, GROUP_24, bits=300, use="single"), known)
    strict = exposure(
        replace(group(24, GROUP_24, bits=160, use="single"), required_strength=160), known
    )

    assert {row.width for row in usual} == {224, 256, 300}
    assert {row.width for row in strict} == {160, 256}


def test_a_wider_exponent_or_a_stronger_check_never_costs_strength() -> None:
    """Along the list of checks, and with the width, the work never falls."""
    rows = exposure(group(23, GROUP_23, bits=100, use="static", checks=()), claims(23, GROUP_23))
    widths = sorted({row.width for row in rows})

    for check, use in USAGES:
        figures = [least(rows, check, use, width) for width in widths]
        assert figures == sorted(figures)
    for width in widths:
        figures = [least(rows, check, "static", width) for check in CHECKS]
        assert figures == sorted(figures)
        assert least(rows, "none", "static", width) <= least(rows, "none", "single", width)


def test_an_attacker_is_listed_only_where_it_does_better_than_the_one_before() -> None:
    """Within a usage the work falls strictly from the passive attacker to the designer."""
    rows = exposure(group(23, GROUP_23, bits=224, use="static", checks=()), claims(23, GROUP_23))
    order = ("passive", "peer", "designer")

    for check, use in USAGES:
        listed = [r for r in rows if (r.check, r.use, r.width) == (check, use, 224)]
        assert listed == sorted(listed, key=lambda row: order.index(row.attacker))
        assert all(a.bits > b.bits for a, b in pairwise(listed))
        assert listed[0].attacker == "passive"


def test_every_party_that_says_its_usage_marks_its_row() -> None:
    """Two parties, two declared rows; the name of the repeated use is the declared one."""
    parties = (Party("server", 224, "reused", ("range",)), Party("client", 256, "single", ()))
    rows = exposure(group(24, GROUP_24, parties=parties), claims(24, GROUP_24))

    assert {(r.check, r.use, r.width) for r in rows if r.declared} == {
        ("range", "reused", 224),
        ("none", "single", 256),
    }
    assert {row.use for row in rows} == {"single", "reused"}


def test_without_claims_every_figure_is_an_upper_bound() -> None:
    """What is not known could lower every figure, and each row says so."""
    unknown = Declaration("set", Place("p", 1), modulus=2**127 - 1, generator=3)
    rows = exposure(unknown, Claims())

    assert {row.bound for row in rows} == {"at most"}
    assert {row.route for row in rows} == {"short_exponent"}


def test_signing_receives_no_values() -> None:
    """For signatures only the width is varied."""
    declared = replace(
        group(24, GROUP_24, bits=256, use="static", checks=("range",)), purpose="signature"
    )
    rows = exposure(declared, claims(24, GROUP_24))

    assert {(row.check, row.use) for row in rows} == {("none", "static")}
    assert any(row.declared for row in rows)


def test_sets_that_differ_in_name_and_place_only_are_worked_out_once() -> None:
    """Rows and claims of the second set are those of the first, from the same cases."""
    first = group(24, GROUP_24, bits=256, use="static", checks=())
    second = replace(first, name="other", place=Place("elsewhere", 7), protect_until=2040)
    worked = Exposures(Given(first, claims(24, GROUP_24), QUICK))
    rows = worked.of(first)

    again = worked.of(second)

    assert len(rows) == len(again) > 0
    assert all(one is other for one, other in zip(rows, again, strict=True))
    assert worked.consulted(second) == worked.consulted(first) != frozenset()


def test_a_peer_who_could_still_do_better_is_listed() -> None:
    """While a rest of the order is unfactored the figure of a static exponent is a bound, also
    where a peer does no better with what is known; with a membership check it is exact."""
    (declaration,) = (
        item
        for item in read_inputs([str(ROOT / "samples" / "situations.yaml")]).declarations
        if item.name == "dockside tunnel"
    )
    rows = [row for row in exposure(declaration, settled(declaration, QUICK)) if row.width == 256]
    bounds = {
        (row.check, row.attacker): (round(row.bits, 2), row.bound)
        for row in rows
        if row.use == "static"
    }

    assert bounds["range", "passive"] == (110.11, "exact")
    assert bounds["range", "peer"] == (110.11, "at most")
    assert ("membership", "peer") not in bounds
