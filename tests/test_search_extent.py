"""How far a search has to have gone, kind by kind of question."""

from dataclasses import replace

import pytest

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from auditor.search.curves import BUILT_IN
from auditor.search.factoring import search
from auditor.search.plan import EcmLevel, Plan
from auditor.search.work import Work
from auditor.search_extent import carried_out, shortfall

PLAN = Plan(
    trial_bound=1_000,
    complete_digits=20,
    rho_iterations=64,
    p_minus_1=(100, 1_000),
    p_plus_1=(50, 500),
    p_plus_1_starts=2,
    levels=(EcmLevel(15, 100, 1_000, 2), EcmLevel(20, 200, 2_000, 1)),
    fermat_steps=8,
)
N = (2**89 - 1) * (2**107 - 1)
"""Two Mersenne primes: nothing in the plan finds them."""


def done() -> Work:
    """What a search by the plan records."""
    result = search(N, PLAN, engine=BUILT_IN)
    assert result.rest == N
    return result.work


def test_a_search_by_the_plan_carries_it_out() -> None:
    """And any further one."""
    assert carried_out(PLAN, done())
    assert carried_out(PLAN, replace(done(), p_plus_1=(60, 500), p_plus_1_starts=1))
    assert carried_out(PLAN, done().with_curves(100, 1_000, 9, "built-in"))


@pytest.mark.parametrize(
    "less",
    [
        {"trial_bound": 999},
        {"complete_digits": 19},
        {"rho_iterations": 63},
        {"p_minus_1": (100, 999)},
        {"p_plus_1": (50, 499)},
        {"p_plus_1_starts": 1},
        {"fermat_steps": 7},
        {"curves": ()},
    ],
)
def test_each_method_counts(less: dict[str, object]) -> None:
    """One that went less far is enough to fall short."""
    assert not carried_out(PLAN, replace(done(), **less))  # type: ignore[arg-type]


STANDARD, THOROUGH = RunValues("2026-12-01"), RunValues("2026-12-01", "thorough")
P = 2**521 - 1
SHALLOW = Searched(N, "built-in", (("trial division", (("bound", 1_000),)),))


@pytest.mark.parametrize(
    ("question", "claims", "run", "told"),
    [
        (Question(Asks.FACTORIZATION, (2 * N, N)), (SHALLOW,), STANDARD, "searched less"),
        (Question(Asks.MODULUS_FACTORS, (N, N)), (SHALLOW,), STANDARD, "searched less"),
        (Question(Asks.FACTORIZATION, (2 * N, N)), (), STANDARD, ""),
        (Question(Asks.SPECIAL_FORM, (P,)), (), STANDARD, "no search is recorded"),
        (Question(Asks.SPECIAL_FORM, (P,)), (FormSearched(P, (1,)),), STANDARD, "searched less"),
        (Question(Asks.SPECIAL_FORM, (P,)), (FormSearched(P, (1, 2)),), STANDARD, ""),
        (Question(Asks.SPECIAL_FORM, (P,)), (FormSearched(P, (1, 2)),), THOROUGH, "searched less"),
        (Question(Asks.SPECIAL_FORM, (P,)), (FormSearched(P, (1, 2, 3)),), THOROUGH, ""),
        (Question(Asks.LEAST_OFFSET, (P, 0, 9)), (), STANDARD, ""),
        (Question(Asks.LEAST_OFFSET, (P, 0, 9)), (), THOROUGH, "no offset was excluded"),
        (Question(Asks.PRIMALITY, (N,)), (), THOROUGH, ""),
    ],
)
def test_what_an_open_question_has_to_show(
    question: Question, claims: tuple[Claim, ...], run: RunValues, told: str
) -> None:
    """By kind and effort."""
    found = shortfall(question, Claims(claims), run)

    assert found.endswith(told) if told else found == ""
