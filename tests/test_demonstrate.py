"""A demonstration recovers what it drew itself, repeats by its seed, touches nothing declared."""

from dataclasses import replace
from functools import cache

import pytest

from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.demonstrate import Shown, demonstrate
from tests.facts.knowledge import RUN, declare, settled

# 2^2 * 3^2 * 5 * 7 * 11 * 1009 * 4099 * (90-bit prime) + 1; 31 generates the whole group.
PARTLY_SMOOTH = 46186205656905804384367805817281370421
# 2 * 3^2 * 5^2 * 7 * 11 * 13 * q + 1, and an element of order q.
CONFINED, Q, G = 495275018295207151, 1099511640127, 329455510703305448


@cache
def claims(declaration: Declaration) -> Claims:
    """All claims about it."""
    return settled(declaration)


def shown(declaration: Declaration, seed: int = 1, budget_bits: int = 24) -> Shown:
    """A demonstration on it."""
    return demonstrate(declaration, claims(declaration), RUN, seed, budget_bits)


SHORT = declare(PARTLY_SMOOTH, 31, purpose="key-agreement", bits=56, use="single", checks=())
STATIC = declare(
    CONFINED,
    G,
    subgroup_order=Q,
    purpose="key-agreement",
    bits=40,
    use="static",
    checks=("range",),
)


@pytest.mark.parametrize(
    ("declaration", "budget", "route"),
    [
        (declare(1000003, 2), 24, "pohlig-hellman"),
        (SHORT, 24, "short exponent"),
        (STATIC, 18, "confinement"),
    ],
)
def test_each_route_recovers_the_exponent_drawn(
    declaration: Declaration, budget: int, route: str
) -> None:
    """The cheapest route within the budget is taken, and its work is near what was promised."""
    result = shown(declaration, budget_bits=budget).demonstration

    assert result is not None
    assert result.route == route
    assert result.agrees
    assert result.excess is not None
    assert result.excess < 12


def test_the_same_seed_draws_the_same_exponent() -> None:
    """And another seed another."""
    one, again, other = shown(SHORT, 1), shown(SHORT, 1), shown(SHORT, 2)

    assert one == again
    assert one.demonstration is not None
    assert other.demonstration is not None
    assert one.demonstration.drawn != other.demonstration.drawn


def test_declared_public_values_are_not_touched() -> None:
    """They change the digest that the exponent is drawn from, and nothing is recovered of them."""
    x = 12345
    victim = pow(31, x, PARTLY_SMOOTH)
    result = shown(replace(SHORT, public_values=(victim,)))

    assert result.demonstration is not None
    assert result.demonstration.agrees
    assert result.demonstration.drawn != x


def test_beyond_the_budget_there_is_a_reason_and_no_run() -> None:
    """A strong set shows nothing."""
    result = shown(SHORT, budget_bits=4)

    assert result.demonstration is None
    assert "takes more than 2^4 operations" in result.text()
