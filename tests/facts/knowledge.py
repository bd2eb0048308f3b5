"""Small parameter sets with everything that could be claimed about them, complete and in part."""

import random
import secrets
from math import gcd, prod

import sympy

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.composite import Composite
from auditor.claims.factorization import Factorization
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.facts import Established, establish
from auditor.inquiry.answers import Answers
from auditor.inquiry.settle import settle
from auditor.questions import Asks, Question
from auditor.run_values import RunValues

RUN = RunValues("2026-12-01", "standard")
PLACE = Place("invented.yaml", 1)


def declare(modulus: int, generator: int, **values: object) -> Declaration:
    """A declaration of these numbers; ``party`` keywords make the one party that stands for all."""
    party = {key: values.pop(key) for key in ("bits", "use", "checks") if key in values}
    if party:
        values["parties"] = (
            Party(EVERYBODY, party.get("bits"), party.get("use"), party.get("checks")),
        )
    return Declaration("set", PLACE, modulus, generator, **values)  # type: ignore[arg-type]


def settled(declaration: Declaration, run: RunValues = RUN) -> Claims:
    """All claims that a review of the declaration makes, every fact taken to be in use."""
    answers = Answers(Claims(), run, secrets.randbelow, lambda claims: None)
    refused = settle(
        [declaration],
        answers,
        run,
        lambda facts, absent: [*facts, *absent],
        lambda question: None,
        lambda question: [],
    )
    assert not refused
    return answers.claims


def known(declaration: Declaration, claims: Claims, run: RunValues = RUN) -> Established:
    """The facts."""
    return establish(declaration, claims, run)


def reviewed(declaration: Declaration, run: RunValues = RUN) -> Established:
    """The facts after a review."""
    return establish(declaration, settled(declaration, run), run)


def partial_claims(n: int, element: int, rng: random.Random) -> list[Claim]:
    """Claims of a search in n - 1 that stopped early: some primes known, a composite rest left."""
    powers = sorted(sympy.factorint(n - 1).items())
    open_powers = [power for power in powers if power[0] != 2]
    rng.shuffle(open_powers)
    left = open_powers[: rng.randrange(len(open_powers) + 1)]
    if sum(exponent for _, exponent in left) < 2:
        return []
    rest = prod(prime**exponent for prime, exponent in left)
    factors = tuple(power for power in powers if power not in left)
    answers = Answers(Claims(), RUN, secrets.randbelow, lambda claims: None)
    support: list[Claim] = [answers.settle_primality(prime) for prime, _ in factors]
    support.append(Composite(rest, factor=left[0][0]))
    uses = tuple(sorted(claim.id for claim in support))
    answers.claims.add([*support, Factorization(n - 1, factors, rest, uses)])
    if gcd(element, n) == 1 and element % n:
        answers.answer(Question(Asks.ORDER, (n, element % n, n - 1, rest)))
    return list(answers.claims)


def some(claims: Claims, rng: random.Random) -> Claims:
    """A random part of the claims, with all that they rest on."""
    ids = sorted(claim.id for claim in claims)
    chosen = [claim_id for claim_id in ids if rng.random() < 0.5]
    return Claims(claims.support(chosen))
