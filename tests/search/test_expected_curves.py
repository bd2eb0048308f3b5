"""The success model meets the published table; the risk of a missed factor, its worked values."""

from math import isclose, log
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.expected_curves import (
    ASSUMPTION,
    dickman,
    expected_curves,
    log_of_bits,
    log_of_digits,
    miss,
    missed_factor_risk,
    searched_digits,
    success_per_curve,
)
from auditor.search.plan import LEVELS, plan_for
from auditor.search.work import Curves, Work

DATA = yaml.safe_load(
    (Path(__file__).parents[1] / "data" / "expected_curves.yaml").read_text(encoding="utf-8")
)


def cases(kind: str) -> list[Any]:
    """The cases of that kind, named."""
    return [pytest.param(case, id=case["id"]) for case in DATA[kind]]


def curves_of_the_table(digits: int) -> Work:
    """The published numbers of curves up to that level."""
    first = [Curves(2_000, 147_396, 25)] if digits >= 15 else []
    levels = [level for level in LEVELS if 15 < level.digits <= digits]
    return Work(curves=(*first, *(Curves(lv.b1, lv.b2, lv.curves) for lv in levels)))


@pytest.mark.parametrize("case", cases("curves"))
def test_the_model_meets_the_table_and_its_independent_evaluation(case: dict[str, Any]) -> None:
    """Within 5 % of the published number, within 3 % of another program."""
    size = log_of_digits(case["digits"]) if "digits" in case else log_of_bits(case["bits"])
    expected = 1 / success_per_curve(case["b1"], case["b2"], size)

    assert expected == pytest.approx(case["model"], rel=0.03)
    assert expected == pytest.approx(case.get("table", expected), rel=0.05)


@pytest.mark.parametrize("case", cases("residual"))
def test_the_risk_of_a_missed_factor(case: dict[str, Any]) -> None:
    """The worked values, within the half percent they are given to."""
    missed = missed_factor_risk(curves_of_the_table(case["digits"]), tuple(case["window"]))

    assert missed.expected == pytest.approx(case["expected"], abs=0.005)
    assert missed.risk == pytest.approx(case["risk"], abs=0.005)
    assert missed.assumption == ASSUMPTION


@pytest.mark.parametrize(
    ("u", "value"),
    [(2, 1 - log(2)), (3, 0.0486084), (4, 0.0049109), (5, 0.00035472), (6, 1.9650e-5)],
)
def test_dickman_at_integers(u: int, value: float) -> None:
    """1 - ln 2 and published values (Bach and Peralta 1996, table 1, from memory)."""
    assert dickman(u) == pytest.approx(value, rel=2e-5)


@given(st.floats(1.001, 18))
def test_dickman_solves_its_equation(u: float) -> None:
    """u rho'(u) = -rho(u - 1), by a central difference inside one unit interval."""
    h = 1e-4
    if int(u - h) != int(u + h):
        return
    slope = (dickman(u + h) - dickman(u - h)) / (2 * h)

    assert isclose(u * slope, -dickman(u - 1), rel_tol=1e-4)


def test_the_levels_of_the_plans_have_the_curves_of_the_model() -> None:
    """Each level's number of curves is what the model expects, within 5 %."""
    for level in LEVELS:
        assert level.curves == pytest.approx(
            expected_curves(level.b1, level.b2, level.digits), rel=0.05
        )


@given(st.integers(1, 2000), st.integers(1, 2000), st.integers(40, 140))
def test_more_curves_never_raise_the_risk(few: int, more: int, high: int) -> None:
    """More work only tightens; so does a window cut at its lower end."""
    less = Work(curves=(Curves(11_000, 1_900_000, few),))
    greater = Work(curves=(Curves(11_000, 1_900_000, few + more),))
    window = (32, high)

    assert missed_factor_risk(greater, window).expected <= missed_factor_risk(less, window).expected
    assert (
        missed_factor_risk(less, (36, high)).expected <= missed_factor_risk(less, window).expected
    )
    assert searched_digits(less) <= searched_digits(greater)


def test_a_known_composite_rest_carries_more_risk() -> None:
    """The chance that the number would have been prime is taken out; never above 1."""
    work, window = curves_of_the_table(25), (20, 128)

    anything = missed_factor_risk(work, window).risk
    composite = missed_factor_risk(work, window, 2048).risk

    assert anything < composite < 1.2 * anything
    assert missed_factor_risk(work, window, 385).risk <= 1


def test_outside_the_model_the_risk_is_the_trivial_bound() -> None:
    """A window above a third of the rest's length: nothing is said."""
    assert missed_factor_risk(curves_of_the_table(35), (20, 128), 383).risk == 1.0


@pytest.mark.parametrize("window", [(0, 10), (-5, 10), (20, 10)])
def test_a_window_must_be_one(window: tuple[int, int]) -> None:
    """Empty, negative and zero windows are refused."""
    with pytest.raises(ValueError, match="window"):
        missed_factor_risk(Work(), window)


def test_trial_division_misses_nothing_below_its_bound() -> None:
    """Below the bound the chance of a miss is 0, above it is 1 without curves."""
    work = Work(trial_bound=1_000_000)

    assert miss(work, log(999_983)) == 0
    assert miss(work, log(1_000_003)) == 1
    assert searched_digits(work) == 6


@pytest.mark.parametrize(("effort", "digits"), [("quick", 6), ("standard", 15), ("thorough", 25)])
def test_efforts_reach_the_digits_they_promise(effort: Any, digits: int) -> None:
    """A factor of the promised size is missed with probability 1/e at most."""
    plan = plan_for(effort)
    work = Work(
        trial_bound=plan.trial_bound,
        curves=tuple(Curves(level.b1, level.b2, level.curves) for level in plan.levels),
    )

    assert searched_digits(work) >= digits
