"""Units of work: what travels, what is believed of it, and what happens when it is lost."""

import json
import random
import secrets
from collections.abc import Callable
from concurrent.futures import Future
from typing import Any

import pytest

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.composite import Composite
from auditor.claims.factorization import Factorization
from auditor.claims.order import Membership, Order
from auditor.claims.prime import Prime
from auditor.inquiry.dispatch import MOST_LOSSES, Crew, ExecutorLost, work_through
from auditor.inquiry.work_units import (
    ONE_IN,
    context,
    step_elsewhere,
    step_here,
    taken_over,
    unit_of,
)
from auditor.questions import Asks, Question
from auditor.search.curves import BUILT_IN
from auditor.search.plan import EcmLevel, Plan
from auditor.search.plan_steps import STEP, next_part
from auditor.search.work import Work
from tests.bulk.reviews import QUICK

P = 2**127 - 1
TWO, SEVEN = Prime(2, "below-2^64"), Prime(7, "below-2^64")


def test_a_unit_is_text_and_integers() -> None:
    """Its known claims are records that JSON can carry; so is what comes back."""
    known = [TWO, SEVEN, Factorization(14, ((2, 1), (7, 1)), 1, tuple(sorted((TWO.id, SEVEN.id))))]
    unit = unit_of(Question(Asks.ORDER, (15, 2, 14, 1)), known, QUICK, BUILT_IN)
    records, finished, refused = step_elsewhere(unit)

    assert json.loads(json.dumps(unit.known)) == list(unit.known)
    assert json.loads(json.dumps(records)) == records
    assert finished
    assert refused is not None, "14 is no multiple of the order of 2 modulo 15, which is 4"


def test_what_travels_is_what_this_process_finds() -> None:
    """The same step here and elsewhere."""
    question = Question(Asks.PRIMALITY, (P,))
    here = step_here(question, [], QUICK, secrets.randbelow, lambda claims: None)
    there = taken_over(
        step_elsewhere(unit_of(question, [], QUICK, BUILT_IN)), Claims(), secrets.randbelow
    )

    assert here == there
    assert any(claim.id == Prime(P, "baillie-psw", rounds=16).id for claim in here.claims)


def test_the_context_holds_the_half_of_a_safe_prime() -> None:
    """So that its rounds are not run again for the proof of the double."""
    half = Prime(23, "below-2^64")

    assert context(Question(Asks.PRIMALITY, (47,)), Claims([half, TWO])) == [half]
    assert context(Question(Asks.MEMBERSHIP, (47, 2, 23)), Claims([half])) == []


C7919 = Prime(7919, "below-2^64").id
LIES = {
    "a composite called prime": [Prime(P * P, "baillie-psw", rounds=16).record()],
    "a composite called proven": [
        Prime(7919, "below-2^64").record(),
        Prime(
            P * 7919, "n-1", factored=((7919, 1),), witnesses=((7919, 2),), uses=(C7919,)
        ).record(),
    ],
    "a small composite called prime": [Prime(15, "below-2^64").record()],
    "a wrong product": [
        TWO.record(),
        Factorization(6, ((2, 1),), 1, (TWO.id,)).record(),
    ],
    "a wrong factor": [Composite(P, factor=3).record()],
    "leaning on what is not there": [Factorization(7919, ((7919, 1),), 1, (C7919,)).record()],
    "a proof of nothing": [Prime(P, "n-1").record()],
    "a small number's method for a large one": [Prime(P, "below-2^64").record()],
    "more rounds than are ever run": [Prime(P, "baillie-psw", rounds=10**9).record()],
    "a product that nobody could write": [
        TWO.record(),
        Factorization(P, ((2, 2**40),), 1, (TWO.id,)).record(),
    ],
    "a prime called composite": [Composite(P, witness=3).record()],
    "a false order": [Order(P, 2, ((7, 2),), 1, (SEVEN.id,)).record()],
    "a false membership": [Membership(P, 2, 8, True).record()],
    "no claim": [{"kind": "prime"}],
    "another spelling": [{**TWO.record(), "uses": [SEVEN.id, SEVEN.id]}],
}


@pytest.mark.parametrize("records", LIES.values(), ids=LIES.keys())
def test_another_machine_is_not_believed(records: list[dict[str, Any]]) -> None:
    """A step with a claim that fails is refused as a whole."""
    known = Claims([SEVEN])
    step = taken_over((records, True, None), known, secrets.randbelow)

    assert step.claims == ()
    assert step.refused


WRONG = {
    "an order": Order(P, 2, ((7, 1),), 1, (SEVEN.id,)),
    "a membership": Membership(P, 2, 7, True),
    "a witness": Composite(P * P, witness=3),
    "a prime": Prime(P * (2**89 - 1), "baillie-psw", rounds=16),
}


@pytest.mark.parametrize("claim", WRONG.values(), ids=WRONG.keys())
def test_of_claims_that_cost_something_one_in_eight_is_checked(claim: Claim) -> None:
    """Of those of this machine, drawn where nobody can foresee it."""
    rng = random.Random(5)
    reports = [([claim.record()], True, None) for _ in range(400)]
    steps = [taken_over(report, Claims([SEVEN]), rng.randrange, here=True) for report in reports]
    refused = sum(step.refused is not None for step in steps)

    assert abs(refused - 400 / ONE_IN) < 25
    assert all(step.refused is None or step.claims == () for step in steps)


class Losing:
    """Loses each task ``losses`` times, or takes none, or is lost itself."""

    def __init__(self, losses: int, takes: bool = True, lost: bool = False) -> None:
        self.losses, self.takes, self.lost = losses, takes, lost
        self.submitted: list[int] = []

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """A future that is done already."""
        if not self.takes:
            raise RuntimeError("closed")
        self.submitted.append(args[0])
        future: Future[Any] = Future()
        if self.submitted.count(args[0]) <= self.losses:
            future.set_exception(RuntimeError("the worker is gone"))
        else:
            future.set_result(("there", fn(*args)))
        return future


def _worked(executor: Losing) -> dict[int, tuple[str, int]]:
    results: dict[int, tuple[str, int]] = {}

    def done(task: int, result: tuple[str, int]) -> int | None:
        results[task] = result
        return task + 100 if task < 3 else None

    crew: Crew[int] = Crew(
        executor, 2, lambda n: -n, lambda task: (task,), lambda task: ("here", -task)
    )
    work_through(range(8), crew, done)
    return results


def test_lost_work_is_handed_in_again() -> None:
    """Each loss costs one repetition, and what follows from a task is done as well."""
    executor = Losing(2)
    results = _worked(executor)

    assert results == {n: ("there", -n) for n in (*range(8), 100, 101, 102)}
    assert {executor.submitted.count(n) for n in results} == {3}


def test_work_that_is_always_lost_is_done_here() -> None:
    """Also where nothing can be handed in."""
    always = Losing(10**6)

    assert set(_worked(always).values()) == {("here", -n) for n in (*range(8), 100, 101, 102)}
    assert always.submitted.count(0) == MOST_LOSSES + 1
    assert {where for where, _ in _worked(Losing(0, takes=False)).values()} == {"here"}


def test_an_executor_that_is_lost_ends_the_work() -> None:
    """Nobody is left; it is not all done here."""
    with pytest.raises(ExecutorLost):
        _worked(Losing(10**6, lost=True))


def test_the_parts_of_a_plan_amount_to_it() -> None:
    """Each goes further by a bounded number of curves, the last one is the plan."""
    plan = Plan(10, 10, levels=(EcmLevel(15, STEP // 3, 1, 7), EcmLevel(20, 2 * STEP, 2, 3)))
    work, seen = Work(), []
    for _ in range(20):
        part = next_part(plan, work, 100)
        for level in part.levels:
            work = work.with_curves(level.b1, level.b2, level.curves, "x")
        seen.append((work.count(STEP // 3, 1), work.count(2 * STEP, 2)))
        if part.levels == plan.levels:
            break

    assert seen == [(3, 0), (6, 0), (7, 1), (7, 2), (7, 3)]
    assert next_part(plan, Work(), 10_000) == plan
