"""What numbers of one run share is used: across documents, and beyond what curves would reach."""

import random
import secrets
from pathlib import Path

import sympy

from auditor.claims.collection import Claims, check_all
from auditor.inquiry.answers import Answers
from auditor.inquiry.sharing import share_among_moduli, share_among_rests
from auditor.questions import Asks, Question
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.verify import verify

RUN = RunValues("2026-12-01", "quick")
LEFT, RIGHT, COMMON = (int(sympy.nextprime(k << 400)) for k in (3, 5, 7))


def answers() -> Answers:
    """Fresh ones."""
    return Answers(Claims(), RUN, secrets.randbelow, lambda claims: None)


def test_moduli_with_a_common_prime_fall_together() -> None:
    """Two products of 400-bit primes are factored; a third one stays as it is."""
    engine = answers()
    other = int(sympy.nextprime(11 << 400)) * int(sympy.nextprime(13 << 400))
    moduli = [LEFT * COMMON, RIGHT * COMMON, other]

    assert share_among_moduli(moduli, engine)
    for prime, n in ((LEFT, moduli[0]), (RIGHT, moduli[1])):
        claim = engine.claims.factorization(n)
        assert claim is not None
        assert claim.factors == tuple(sorted(((prime, 1), (COMMON, 1))))
    assert engine.claims.factorization(other) is None
    assert check_all(engine.claims, secrets.randbelow) == {}


def test_nothing_is_shared_by_a_number_with_itself() -> None:
    """Equal moduli, primes, and moduli without a common factor give nothing."""
    engine = answers()

    assert not share_among_moduli([LEFT * COMMON, LEFT * COMMON, RIGHT, 1], engine)
    assert not share_among_rests(engine)
    assert len(engine.claims) == 0


def test_a_shared_factor_that_stays_composite_is_no_news(tmp_path: Path) -> None:
    """Two moduli share a prime p, hence two group orders what no search factors in p - 1: found out
    once, the review ends."""
    rng = random.Random(12)
    p, q, r = (int(sympy.nextprime(rng.getrandbits(256) | 1 << 255)) for _ in range(3))
    engine = answers()
    for number in (p * q, p * r):
        engine.answer(Question(Asks.SMALL_FACTORS, (number, p)))
    for number in ((p - 1) * (q - 1), (p - 1) * (r - 1)):
        engine.answer(Question(Asks.SMALL_FACTORS, (number,)))
    assert not share_among_rests(engine)

    document = tmp_path / "two.yaml"
    document.write_text(
        "auditor: 1\nparameter_sets:\n"
        f"  - {{name: one, modulus: {p * q:#x}, generator: 2}}\n"
        f"  - {{name: two, modulus: {p * r:#x}, generator: 2}}\n"
    )
    record = review([str(document)], RUN, Surroundings(secrets.randbelow))
    assert [item["position"] for item in record["parameter_sets"]] == ["hold", "hold"]


def test_a_review_factors_group_orders_by_each_other(tmp_path: Path) -> None:
    """Two primes whose p - 1 share a 400-bit prime: both orders end up factored."""

    def prime_over(*factors: int) -> int:
        product = 1
        for factor in factors:
            product *= factor
        return next(k * product + 1 for k in range(2, 10**5, 2) if sympy.isprime(k * product + 1))

    document = tmp_path / "two.yaml"
    sets = "".join(
        f"  - {{name: set {i}, modulus: {p:#x}, generator: 3}}\n"
        for i, p in enumerate((prime_over(LEFT, COMMON), prime_over(RIGHT, COMMON)))
    )
    document.write_text(f"auditor: 1\nparameter_sets:\n{sets}")
    record = review([str(document)], RUN, Surroundings(secrets.randbelow))

    assert [s["facts"]["group.factored"]["value"] for s in record["parameter_sets"]] == [True, True]
    assert verify(record, secrets.randbelow).status == 0
