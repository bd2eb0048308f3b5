"""A factor search interrupted at any line: what was kept is true, and the next run ends alike."""

import random
import secrets
from typing import Any

import pytest

from auditor.attested import furthest
from auditor.claims.base import Claim
from auditor.claims.collection import Claims, check_all
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from auditor.search.plan import EcmLevel
from tests.bulk.reviews import random_prime
from tests.interrupting import NotReached, interrupted

RNG = random.Random(16)
EASY, MIDDLE, HARD = (random_prime(RNG, bits) for bits in (20, 40, 70))
NUMBER = 2**3 * EASY * MIDDLE**2 * HARD * random_prime(RNG, 75)
QUESTION = Question(Asks.FACTORIZATION, (NUMBER, NUMBER))
RUN = RunValues("2026-12-01", "standard")
POINTS = 60


@pytest.fixture(autouse=True)
def short_levels(monkeypatch: pytest.MonkeyPatch) -> None:
    """A few curves in several steps, which find one of the primes and not the others."""
    levels = (EcmLevel(15, 60, 1_200, 6), EcmLevel(20, 200, 6_000, 8))
    monkeypatch.setattr("auditor.search.plan.LEVELS", levels)
    monkeypatch.setattr("auditor.search.plan_steps.STEP", 400)


def answers(kept: list[Claim]) -> Answers:
    """From these claims, and keeping more of them."""
    return Answers(Claims(list(kept)), RUN, secrets.randbelow, kept.extend)


def outcome(claims: list[Claim]) -> tuple[Any, ...]:
    """What is known of the number: its factors, the rest, and the search in it."""
    together = Claims(claims)
    found = together.factorization(NUMBER)
    assert found is not None
    searched = furthest(together, found.rest)
    assert searched is not None
    return found.factors, found.rest, searched[1]


def test_wherever_it_is_interrupted() -> None:
    """Every claim kept passes its check, and going on from them leads where nothing disturbed."""
    undisturbed: list[Claim] = []
    answers(undisturbed).answer(QUESTION)
    wanted, rng, points = outcome(undisturbed), random.Random(17), 0
    assert wanted[1] > 1
    most = 2**22
    while points < POINTS:
        kept: list[Claim] = []
        at = rng.randrange(1, most)
        try:
            interrupted(lambda: answers(kept).answer(QUESTION), at)  # noqa: B023
        except NotReached:
            most = at
            continue
        points += 1
        assert check_all(Claims(kept), secrets.randbelow) == {}
        answers(kept).answer(QUESTION)
        assert outcome(kept) == wanted, at
