"""The figures of the decision sheet."""

from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from auditor.report.strength_view import Figure, judged, strength
from auditor.report.words import ATTACKERS


def a_route(bits: float, attacker: str = "passive", **others: Any) -> dict[str, Any]:
    """A route with what the figures look at."""
    return {
        "bits": bits,
        "attacker": attacker,
        "bound": "exact",
        "counted": True,
        "table": None,
    } | (others)


def a_set(*routes: dict[str, Any], settled: bool = True, required: int = 112) -> dict[str, Any]:
    """A parameter set with these routes."""
    facts = {"strength.required_bits": {"value": required, "tight": True}}
    if settled:
        facts["strength.work_bits"] = {"value": 1.0, "tight": True}
        facts["strength.designer_bits_at_most"] = {"value": 1.0, "tight": True}
    return {"facts": facts, "routes": list(routes)}


ROUTES = st.lists(
    st.builds(
        a_route,
        st.floats(0, 500),
        st.sampled_from(ATTACKERS),
        counted=st.booleans(),
        bound=st.sampled_from(["exact", "at most"]),
    )
)


@given(ROUTES)
def test_who_can_do_more_never_needs_more_work(routes: list[dict[str, Any]]) -> None:
    """A designer is at most a peer, a peer at most a passive attacker."""
    figures = strength(a_set(*routes))
    bits = [
        float("inf") if figure.bits is None else figure.bits
        for figure in (figures.passive, figures.peer, figures.designer)
    ]

    assert bits == sorted(bits, reverse=True)


@given(ROUTES)
def test_what_is_not_counted_moves_nothing(routes: list[dict[str, Any]]) -> None:
    """A figure shown beside never enters the minimum."""
    counted = [route for route in routes if route["counted"]]

    assert strength(a_set(*routes)) == strength(a_set(*counted))


def test_a_table_has_the_last_word_on_a_shortfall() -> None:
    """110.12 by a model is no shortfall where the table for the same attack says 112."""
    sieve = a_route(110.12, table={"bits": 112, "source": "x"})

    assert judged(sieve) == 112
    assert not strength(a_set(sieve)).passive.short
    assert strength(a_set(sieve, a_route(110.12))).passive.short


def test_a_figure_is_a_bound_until_all_is_settled() -> None:
    """Unsettled facts and loose routes both leave the figure an upper bound."""
    route = a_route(110.12)

    assert strength(a_set(route)).passive.text == "110"
    assert strength(a_set(route, settled=False)).passive.text == "≤ 110"
    assert strength(a_set(route, a_route(200, bound="at most"))).passive.text == "≤ 110"


def test_summaries_round_down() -> None:
    """79.99 is not 80."""
    assert Figure(79.99).text == "79"
    assert Figure(79.99).precise == "79.99"
    assert Figure(None).text == "unknown"
