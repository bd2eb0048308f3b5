"""Routes are combined by attacker, and the published tables are read by steps."""

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.routes.base import Attacker, Bound, Closed, Model, Unit, Work
from auditor.routes.combine import least
from auditor.routes.confinement import confinement
from auditor.routes.number_field_sieve import number_field_sieve
from auditor.routes.short_exponent import short_exponent
from auditor.routes.smooth_part import smooth_part_then_short_exponent
from auditor.routes.square_root import square_root
from auditor.routes.standard_tables import (
    StandardFigure,
    modulus_strength,
    standard_bits,
    standard_figure,
)
from tests.routes.cases import cases, group, subgroup, units

TABLES = cases("tables")


def work(route: str, attacker: Attacker, bits: float, bound: Bound = "exact") -> Work:
    """A work with what matters here."""
    model = Model("for the test", "exact")
    return Work(route, attacker, bits, Unit.KEY_TRIALS, model, "none", "none", bound)


@pytest.mark.parametrize("case", TABLES["combined"], ids=lambda case: case["case"])
def test_worked_combinations(case: dict[str, object]) -> None:
    """Each route and the least of them, for groups and usages worked out beforehand."""
    name, width = str(case["group"]), int(str(case["width"]))
    check = "membership" if case.get("checked") else "range"
    routes = [
        number_field_sieve(group(name).modulus.bit_length()),
        square_root(subgroup(name)),
        short_exponent(width),
        smooth_part_then_short_exponent(width, subgroup(name)),
        confinement(width, subgroup(name), units(name), check, reused=name != "modp2048"),
    ]
    figures = {route.route: route.bits for route in routes if isinstance(route, Work)}
    found = least(routes, "peer")

    assert found is not None
    assert found.work.bits == pytest.approx(case["least"], abs=0.05)
    assert figures["number_field_sieve"] == pytest.approx(case["sieve"], abs=0.05)
    assert figures["square_root"] == pytest.approx(case["generic"], abs=0.05)
    if "short" in case:
        assert figures["short_exponent"] == pytest.approx(case["short"], abs=0.05)
    if "low" in case:
        low = dict(routes[0].details)["low end"]  # type: ignore[union-attr]
        assert low == pytest.approx(case["low"], abs=0.05)
    assert ("confinement" in figures) == ("active" in case)
    if "active" in case:
        assert figures["confinement"] == pytest.approx(case["active"], abs=0.05)


def test_an_attacker_takes_the_routes_of_weaker_ones() -> None:
    """A peer also listens, and whoever chose the parameters is also a peer."""
    routes = [
        work("a", "passive", 110),
        work("b", "peer", 90),
        work("c", "designer", 70),
        Closed("d", "passive", "for the test"),
    ]
    found = {attacker: least(routes, attacker) for attacker in ("passive", "peer", "designer")}

    assert [one.work.bits for one in found.values() if one] == [110, 90, 70]
    assert least(routes[1:], "passive") is None
    assert least([], "designer") is None


def test_one_loose_route_makes_the_minimum_loose() -> None:
    """A dearer route that is only bounded from above may turn out cheaper than the minimum."""
    tight = least([work("a", "passive", 80), work("b", "passive", 90)], "passive")
    loose = least([work("a", "passive", 80), work("b", "passive", 90, "at most")], "passive")
    of_others = least([work("a", "passive", 80), work("b", "peer", 90, "at most")], "passive")

    assert tight is not None
    assert loose is not None
    assert of_others is not None
    assert (tight.tight, loose.tight, of_others.tight) == (True, False, True)


def test_the_order_of_routes_does_not_matter() -> None:
    """Equal figures are told apart by name."""
    routes = [work("c", "passive", 80), work("a", "peer", 80), work("b", "passive", 80)]

    found = {least(order, "peer") for order in itertools.permutations(routes)}

    assert [one.work.route for one in found if one] == ["a"]


def test_rows_of_sp_800_57() -> None:
    """Modulus, subgroup and exponent of a row all have the strength of the row."""
    for strength, length, small in TABLES["sp800_57"]:
        assert standard_bits(length, small, small) == strength
        assert standard_bits(length - 1, small, small) < strength
        assert standard_bits(length, small - 1, small) < strength
        assert standard_bits(length, small, small - 1) < strength


def test_rows_of_sp_800_56a() -> None:
    """The safe-prime groups have their maximum strength with exponents of twice that width."""
    for strength, length, width in TABLES["sp800_56a"]:
        assert standard_bits(length, length - 1, width) == strength


def test_lengths_between_rows_count_as_the_lower_row() -> None:
    """No interpolation, and 0 below the tables."""
    for length, strength in TABLES["steps"].items():
        assert modulus_strength(length) == strength


def test_components_that_are_not_known() -> None:
    """The least known component is there without the others, which are then said to be missing."""
    partial = standard_figure(2048, None, 160)

    assert partial == StandardFigure(112, None, 80)
    assert (partial.least_known, partial.complete) == (80, False)
    assert standard_figure(None, None, None).least_known is None
    complete = standard_figure(2048, 2047, 225)
    assert (complete.least_known, complete.complete) == (112, True)


@given(*[st.integers(1, 20_000)] * 4)
def test_larger_sizes_never_lower_the_table_figure(a: int, b: int, q: int, w: int) -> None:
    """The figure rises with each size and is the least of the components."""
    small, large = sorted((a, b))
    figure = standard_bits(large, q, w)

    assert standard_bits(small, q, w) <= figure
    assert standard_bits(large, q + 2, w) >= figure
    assert standard_bits(large, q, w + 2) >= figure
    assert figure == standard_figure(large, q, w).least_known
