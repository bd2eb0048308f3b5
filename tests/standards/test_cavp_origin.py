"""NIST's example files for the generation and validation of p and q: verdicts and reasons agree.

Here run all cases that are refused, all of 1024 bits, and one accepted of each larger size, method
and file, since the replay of these can take seconds. ``python -m tests.standards.cavp_all`` runs
all 310, which takes about a minute.
"""

import secrets
from typing import Any

import pytest

from auditor.claims.collection import Claims, check_all
from auditor.claims.origin import Origin
from auditor.claims.origin_recipe import METHODS, Recipe
from auditor.claims.origin_replay import Outcome
from auditor.claims.standing import Standing
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from tests.standards.vectors import OriginCase, origin_cases

QUICK = RunValues("2026-12-01", "quick")
CASES = origin_cases()


def answered(case: OriginCase) -> tuple[Origin, Claims]:
    """The claim about the case, and all that it rests on."""
    claims = Claims()
    answers = Answers(claims, QUICK, secrets.randbelow, lambda made: None)
    answers.answer(Question(Asks.ORIGIN, (case.p, case.q, *case.recipe.integers())))
    claim = claims.about(Origin, case.p, q=case.q, recipe=case.recipe)
    assert claim is not None
    return claim, claims


def in_the_gate() -> list[OriginCase]:
    """The cases that run always; of the long replays those with the least counter."""
    small = [c for c in CASES if c.lengths[0] == 1024 or c.expected is not Outcome.REGENERATED]
    long: dict[tuple[object, ...], OriginCase] = {}
    for case in sorted(CASES, key=lambda case: case.recipe.counters):
        long.setdefault((case.name.split()[0], case.recipe.method, case.lengths), case)
    return list(dict.fromkeys((*small, *long.values())))


@pytest.mark.parametrize("case", in_the_gate(), ids=lambda case: case.name)
def test_verdict_and_reason(case: OriginCase) -> None:
    """The replay ends where the file says, and is no stronger than the primality it rests on."""
    claim, claims = answered(case)

    assert claim.outcome is case.expected
    if claim.outcome is Outcome.REGENERATED:
        assert claims.standing(claim.id) is Standing.PROBABLE


def test_all_files_are_read() -> None:
    """75 cases of each section of PQGVer and PQGGen, and ten of the older files."""
    counts = {name: sum(case.recipe.method == name for case in CASES) for name in METHODS}

    assert counts == dict(zip(METHODS, (150, 150, 10), strict=True))


@pytest.mark.parametrize("method", METHODS)
def test_the_claim_holds_on_its_own(method: str) -> None:
    """A verifier with bases of its own comes to the same end."""
    for outcome in {case.expected for case in CASES}:
        chosen = (c for c in CASES if (c.recipe.method, c.expected) == (method, outcome))
        case = next(chosen, None)
        if case is not None:
            assert check_all(answered(case)[1], secrets.randbelow) == {}


@pytest.mark.parametrize("method", METHODS)
def test_a_bit_changed_anywhere_is_noticed(method: str) -> None:
    """A seed, counter, hash or q that is not the right one never regenerates the set."""
    case = next(c for c in CASES if c.recipe.method == method and c.expected is Outcome.REGENERATED)
    right = case.recipe
    wrong = [
        *(
            Recipe(method, right.hash, _with(right.seeds, i, _flipped(seed)), right.counters)
            for i, seed in enumerate(right.seeds)
        ),
        *(
            Recipe(method, right.hash, right.seeds, _with(right.counters, i, counter + step))
            for i, counter in enumerate(right.counters)
            for step in (1, -1)
        ),
        Recipe(method, right.hash, _with(right.seeds, 0, b"\x00" + right.seeds[0]), right.counters),
    ]
    if method != "fips186-2":
        wrong.append(Recipe(method, "sha512-256", right.seeds, right.counters))

    for recipe in wrong:
        claim, _ = answered(case._replace(recipe=recipe))
        assert claim.outcome is not Outcome.REGENERATED
    for p, q in ((case.p + 2 * case.q, case.q), (case.p, case.q + 2)):
        assert answered(case._replace(p=p, q=q))[0].outcome is not Outcome.REGENERATED


def _with(items: tuple[Any, ...], index: int, item: Any) -> tuple[Any, ...]:
    return (*items[:index], item, *items[index + 1 :])


def _flipped(seed: bytes) -> bytes:
    return bytes((*seed[:-1], seed[-1] ^ 1))
