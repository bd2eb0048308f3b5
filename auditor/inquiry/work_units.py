"""A question as a unit of work: answered from a few claims and nothing else, here or elsewhere.

A unit carries text and integers only, and what comes back are records of claims. What it is
answered from is fixed before it starts, so the answer is the same wherever it is found and
whatever else is found meanwhile.
"""

import secrets
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from auditor.claims.base import Claim, Draw, Refuted
from auditor.claims.collection import Claims, read_claim
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.origin import Origin
from auditor.claims.origin_formula import LeastOffset
from auditor.claims.primality_tests import DETERMINISTIC_BELOW
from auditor.claims.prime import Prime
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched
from auditor.inquiry.answers import ALONE, Answers, Cores, Keep
from auditor.questions import Asks, Question
from auditor.run_values import Effort, RunValues
from auditor.search.curves import Engine
from auditor.search.plan import plan_for

MOST_DIGITS = 20_000
"""Decimal digits that Python may read and write: enough for integers of 65,536 bits."""

NEEDS_NOTHING = frozenset(
    {
        Asks.MEMBERSHIP,
        Asks.SPECIAL_FORM,
        Asks.CANONICAL_GENERATOR,
        Asks.FORMULA,
        Asks.LEAST_OFFSET,
        Asks.SHARED_EXPONENTS,
        Asks.VISIBLE_EXPONENTS,
        Asks.FORGERY_RELATIONS,
    }
)
"""Kinds that are answered from their integers alone."""

WITHOUT_A_POWER = (Composite, Factorization, PerfectPower, Searched, FormSearched)
"""Kinds of claims whose check takes no exponentiation of large numbers, but for witnesses."""
LONG_TO_MAKE = (Origin, LeastOffset)
"""Kinds whose check is a long computation, the one that made them."""
ONE_IN = 8
"""One in so many of the others is checked again where this machine made it."""


@dataclass(frozen=True, slots=True)
class Unit:
    """One step of a question, as it travels: ``known`` are records, the used before the user."""

    asks: str
    integers: tuple[int, ...]
    known: tuple[dict[str, Any], ...]
    effort: Effort
    factor_digits: int | None
    engine: Engine


@dataclass(frozen=True, slots=True)
class Step:
    """The claims that a step made, in the order made; whether the question is done with; and why
    a proposed answer was refused, if one was."""

    claims: tuple[Claim, ...] = ()
    finished: bool = True
    refused: str | None = None


def context(question: Question, claims: Claims) -> list[Claim]:
    """The claims that may help to answer a question: about its integers, about the number before
    and after them that primality proofs and group orders lead to, with all that they rest on."""
    if question.asks in NEEDS_NOTHING:
        return []
    numbers = {near for n in question.integers for near in (n, n + 1, n // 2)}
    found: list[Claim | None] = []
    for number in numbers:
        found += [claims.prime(number), claims.perfect_power(number), claims.factorization(number)]
        found += claims.searched(number)
    return claims.support({claim.id for claim in found if claim is not None})


def step_here(
    question: Question,
    known: Iterable[Claim],
    run: RunValues,
    draw: Draw,
    keep: Keep,
    cores: Cores = ALONE,
) -> Step:
    """One step of a question, in this process; ``keep`` gets claims as they are made."""
    answers = Answers(Claims(known), run, draw, keep, cores)
    before = len(answers.claims)
    finished, refused = True, None
    try:
        finished = answers.step(question)
    except Refuted as reason:
        refused = str(reason)
    return Step(tuple(answers.claims)[before:], finished, refused)


def unit_of(question: Question, known: Iterable[Claim], run: RunValues, engine: Engine) -> Unit:
    """The step that is next, ready to travel."""
    records = tuple(claim.record() for claim in known)
    return Unit(
        question.asks.value, question.integers, records, run.effort, run.factor_digits, engine
    )


def step_elsewhere(unit: Unit) -> tuple[list[dict[str, Any]], bool, str | None]:
    """The fields of a :class:`Step`, claims as records: what a worker process runs."""
    sys.set_int_max_str_digits(MOST_DIGITS)
    step = step_here(
        Question(Asks(unit.asks), unit.integers),
        [read_claim(record) for record in unit.known],
        RunValues("", unit.effort, unit.factor_digits),
        secrets.randbelow,
        lambda claims: None,
        Cores(engine=unit.engine),
    )
    return [claim.record() for claim in step.claims], step.finished, step.refused


def taken_over(
    fields: tuple[list[dict[str, Any]], bool, str | None],
    known: Claims,
    draw: Draw,
    here: bool = False,
) -> Step:
    """The step that a worker reports, on this machine where ``here`` says so. Its claims are read
    strictly and checked as far as :func:`_check_again` goes; a step with a claim that fails is
    refused as a whole."""
    records, finished, refused = fields
    try:
        claims = [read_claim(record) for record in records]
        by_id = {claim.id: claim for claim in claims}
        for claim in claims:
            used = {id_: by_id[id_] if id_ in by_id else known[id_] for id_ in claim.uses}
            _check_again(claim, used, draw, here)
    except KeyError as missing:
        return Step(refused=f"it rests on {missing.args[0]}, which is not here")
    except ValueError as reason:
        return Step(refused=str(reason))
    return Step(tuple(claims), finished, refused)


def _check_again(claim: Claim, used: dict[str, Claim], draw: Draw, here: bool) -> None:
    """What another machine reports is checked like what the ledger holds: in full, but of the
    rounds of a probable prime a single one, to a base that the worker could not foresee. Processes
    of this program on this machine are believed more, since that would cost as much as their work:
    what takes no exponentiation is checked in full, and of the rest one in eight, drawn, but for
    what is long to make. The verifier checks everything.
    """
    trusted = here and (isinstance(claim, LONG_TO_MAKE) or draw(ONE_IN) > 0)
    if isinstance(claim, Prime):
        believed = trusted and claim.n >= DETERMINISTIC_BELOW
        claim.check_form(used) if believed else claim.check_again(used, draw)
    elif not trusted or _takes_no_power(claim):
        claim.check(used, draw)


def _takes_no_power(claim: Claim) -> bool:
    by_witness = isinstance(claim, Composite) and claim.factor is None
    return isinstance(claim, WITHOUT_A_POWER) and not by_witness


def expected_seconds(question: Question, run: RunValues) -> float:
    """About how long a question takes on one core, by a rule of thumb: enough to decide what is
    worth sending elsewhere and to say roughly what is left. It moves no answer."""
    length = max(number.bit_length() for number in question.integers)
    power: float = POWER_AT_2048 * (length / 2048) ** 2.6
    match question.asks:
        case Asks.PRIMALITY:
            return power * (run.rounds + 10)
        case Asks.SMALL_FACTORS:
            return power * 30
        case Asks.FACTORIZATION | Asks.MODULUS_FACTORS:
            levels = plan_for(run.effort, run.factor_digits).levels
            steps = sum(level.curves * level.b1 for level in levels)
            curves: float = CURVE_STEP_AT_2048 * steps * (length / 2048) ** 1.6
            return power * 30 + curves
        case Asks.ORIGIN | Asks.SPECIAL_FORM | Asks.LEAST_OFFSET:
            return power * 200
        case _:
            return power * max(4, len(question.integers))


POWER_AT_2048 = 5e-3
"""Seconds of an exponentiation modulo 2048 bits; the exponent 2.6 fits GMP from 512 to 8192."""
CURVE_STEP_AT_2048 = 1e-4
"""Seconds of a curve at 2048 bits per unit of its first bound."""
