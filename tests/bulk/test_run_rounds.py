"""Rounds of questions: the same report wherever and in whichever order they are answered."""

import random
import threading
from collections import Counter
from collections.abc import Callable
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path
from typing import Any

import gmpy2
import pytest

import auditor.inquiry.settle
from auditor.claims.base import Claim, Draw
from auditor.claims.prime import Prime
from auditor.declaration import Declaration
from auditor.facts import Established, establish
from auditor.inquiry.answers import Cores
from auditor.inquiry.pool import LocalPool
from auditor.inquiry.question_round import Status
from auditor.inquiry.settle import open_questions
from auditor.questions import Question
from auditor.run_values import RunValues
from auditor.search.curves import BuiltIn, Outcome, Task
from auditor.search.plan import EcmLevel
from tests.bulk.reviews import (
    QUICK,
    STANDARD,
    declared,
    mixed_sets,
    random_prime,
    reviewed,
    safe_prime,
)


class Disorder:
    """An executor that answers in an order of its own, and loses the first ``losses`` tasks."""

    started = True

    def __init__(self, seed: int, losses: int = 0) -> None:
        self._rng = random.Random(seed)
        self._losses = losses
        self._pool = ThreadPoolExecutor(4)
        self.ran = 0

    def submit(self, fn: Callable[..., Any], /, *args: Any) -> "Future[Any]":
        """Runs fn(*args) after a moment, or loses it."""
        self.ran += 1
        if self.ran <= self._losses:
            lost: Future[Any] = Future()
            lost.set_exception(RuntimeError("the worker is gone"))
            return lost
        moment = self._rng.uniform(0, 0.004)
        return self._pool.submit(self._late, moment, fn, *args)

    @staticmethod
    def _late(moment: float, fn: Callable[..., Any], *args: Any) -> Any:
        threading.Event().wait(moment)
        return fn(*args)


@pytest.fixture
def send_everything(monkeypatch: pytest.MonkeyPatch) -> None:
    """Small questions travel as large ones do."""
    monkeypatch.setattr("auditor.inquiry.question_round.SENDING_PAYS", 0.0)


@pytest.mark.parametrize("run", [QUICK, STANDARD], ids=["quick", "standard"])
def test_the_order_of_arrival_moves_nothing(run: RunValues, send_everything: None) -> None:
    """One process, an executor in disorder, and one that loses work agree."""
    sets = mixed_sets(1)
    claims, record = reviewed(sets, run)
    for seed, losses in ((1, 0), (2, 25)):
        executor = Disorder(seed, losses)
        other_claims, other = reviewed(sets, run, cores=Cores(executor, 2))

        assert executor.ran > 25
        assert other == record
        assert {claim.id for claim in other_claims} == {claim.id for claim in claims}


def test_two_processes_give_the_report_of_one(
    send_everything: None, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Worker processes of this machine."""
    monkeypatch.setattr("auditor.inquiry.question_round.STARTING_PAYS", 0.0)
    sets = mixed_sets(2)
    with LocalPool(2) as pool:
        record = reviewed(sets, cores=Cores(pool, 2))[1]

        assert pool.started
    assert record == reviewed(sets)[1]


def test_the_order_of_the_sets_moves_no_claim() -> None:
    """The claims are those of the sets together."""
    sets = mixed_sets(3)
    ids = {claim.id for claim in reviewed(sets)[0]}

    assert {claim.id for claim in reviewed(sets[::-1])[0]} == ids


@pytest.mark.parametrize("run", [QUICK, STANDARD], ids=["quick", "standard"])
def test_a_warm_ledger_gives_the_report_of_a_cold_one(run: RunValues, tmp_path: Path) -> None:
    """And what is recalled is not answered again; of a rest that was searched the question is put,
    with nothing left to do."""
    sets, statuses = mixed_sets(4), list[Status]()
    sets.append(declared("a rest is left", random_prime(random.Random(5), 420)))
    claims, cold = reviewed(sets, run, ledger=tmp_path / "l")
    warm = reviewed(sets, run, ledger=tmp_path / "l", progress=statuses.append)[1]

    assert warm == cold == reviewed(sets, run)[1]
    assert any(claim.kind == "searched" for claim in claims)
    assert {status.question.asks for status in statuses} <= {"membership", "order", "factorization"}


@pytest.mark.parametrize("after", [1, 7, 20, 33])
def test_an_interrupted_review_is_resumed(after: int, tmp_path: Path) -> None:
    """Ctrl-C at some question: the ledger keeps what was answered, the report ends the same."""
    sets, seen = mixed_sets(5), list[Status]()

    def interrupt(status: Status) -> None:
        seen.append(status)
        if len(seen) == after:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        reviewed(sets, ledger=tmp_path / "l", progress=interrupt)

    assert reviewed(sets, ledger=tmp_path / "l")[1] == reviewed(sets)[1]


def test_the_rounds_of_a_prime_are_run_once(monkeypatch: pytest.MonkeyPatch) -> None:
    """However many sets name a prime, as a modulus, as a subgroup or by its double plus one."""
    counted: Counter[int] = Counter()
    check = Prime.check

    def counting(claim: Prime, used: dict[str, Claim], draw: Draw) -> None:
        if claim.method == "baillie-psw":
            counted[claim.n] += 1
        check(claim, used, draw)

    monkeypatch.setattr(Prime, "check", counting)
    rng = random.Random(6)
    safe = [safe_prime(rng, 120) for _ in range(3)]
    sets = [declared(f"m{place}", p, 3, width=100 + place) for place, p in enumerate(safe * 2)]
    sets += [declared(f"q{p}", p, 4, subgroup_order=p // 2) for p in safe]
    sets += [declared(f"h{p}", p // 2, 3) for p in safe[:1]]
    reviewed(sets)

    assert {p // 2 for p in safe} <= set(counted)
    assert not set(safe) & set(counted)
    assert set(counted.values()) == {1}


def test_hints_of_two_sets_are_used_together() -> None:
    """Each owner names one large factor of the same group order; both are divided out."""
    sets = [item for item in mixed_sets(7) if "known" in item.name]
    claims, _ = reviewed(sets)
    found = claims.factorization(sets[0].modulus - 1)

    assert found is not None
    assert {n for item in sets for n in item.known_factors} <= {p for p, _ in found.factors}


def test_nothing_worth_asking_is_left() -> None:
    """Looking at every set again finds no cheap question that was not asked."""
    sets, asked = mixed_sets(8), set[Question]()
    claims, _ = reviewed(sets, progress=lambda status: asked.add(status.question))
    about = {(question.asks, question.integers[0]) for question in asked}
    for item in sets:
        known = establish(item, claims, replace(QUICK))
        for question in open_questions(known, [*known.facts, *known.absent]):
            if question.asks not in ("factorization", "modulus-factors", "special-form"):
                assert (question.asks, question.integers[0]) in about, question


def test_a_set_is_looked_at_again_only_when_a_claim_concerns_it(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Sets with the same numbers are looked at once each, but for the first; equal ones share."""
    looks: Counter[int] = Counter()

    def counting(item: Declaration, *known: Any) -> Established:
        looks[item.parties[0].exponent_bits or 0] += 1
        return establish(item, *known)

    monkeypatch.setattr(auditor.inquiry.settle, "establish", counting)
    p = random_prime(random.Random(9), 128)
    reviewed([declared(f"s{n}", p, width=100 + n % 20) for n in range(60)])

    assert set(looks) == set(range(100, 120))
    assert looks.pop(100) <= 6
    assert set(looks.values()) <= {1, 2}


class Recording:
    """The built-in engine, noting which curves of which number it ran."""

    def __init__(self) -> None:
        self.ran: Counter[tuple[int, int, int]] = Counter()

    def unit(self, b1: int) -> int:
        """As the built-in one."""
        return BuiltIn().unit(b1)

    def run(self, task: Task) -> Outcome:
        """As the built-in one."""
        outcome = BuiltIn().run(task)
        for index in range(task.first, outcome.next):
            self.ran[task.number, task.b1, index] += 1
        return outcome


def test_a_deeper_effort_goes_on_where_the_last_one_stopped(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Through the ledger and in steps: no curve runs twice, and all those of one search ran."""
    levels = (EcmLevel(15, 300, 9_000, 12), EcmLevel(20, 600, 20_000, 10))
    monkeypatch.setattr("auditor.search.plan.LEVELS", levels)
    monkeypatch.setattr("auditor.search.plan_steps.STEP", 2_000)
    rng = random.Random(10)
    r, s = random_prime(rng, 105), random_prime(rng, 110)
    p = next(n for k in range(1, 10**6) if gmpy2.is_prime(n := 2 * k * r * s + 1))
    sets, engine, whole = [declared("x", p)], Recording(), Recording()
    deeper = replace(STANDARD, factor_digits=20)
    reviewed(sets, STANDARD, cores=Cores(engine=engine), ledger=tmp_path / "l")
    first = sum(engine.ran.values())
    resumed = reviewed(sets, deeper, cores=Cores(engine=engine), ledger=tmp_path / "l")[1]

    assert resumed == reviewed(sets, deeper, cores=Cores(engine=whole))[1]
    assert 0 < first < sum(engine.ran.values())
    assert engine.ran == whole.ran
    assert set(engine.ran.values()) == {1}
