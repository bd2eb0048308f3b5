"""auditor structure: what a person asks about a number, whole or honest in part."""

import json
import secrets
from math import lcm, prod
from typing import Any

import pytest
import sympy
from click.testing import CliRunner

from auditor.claims.collection import Claims, check_all
from auditor.cli import main
from auditor.commands.options import Interrupted
from auditor.inquiry.answers import Answers
from auditor.inquiry.unit_groups import isomorphic, order_of, structure
from auditor.run_values import RunValues
from auditor.structure import PartialOrder, PartlyFactoredGroup, UnitGroup, UnsplitGroup


def answers(effort: str = "standard") -> Answers:
    """Fresh answers at that effort."""
    run = RunValues("2026-12-01", effort)  # type: ignore[arg-type]
    return Answers(Claims(), run, secrets.randbelow, lambda claims: None)


def shown(*words: str) -> str:
    """What the command prints."""
    result = CliRunner().invoke(main, ["structure", *words, "--jobs", "1"], standalone_mode=False)
    assert result.exception is None, result.exception
    return result.output


def test_a_complete_answer_rests_on_checked_claims() -> None:
    """Every prime used is claimed and every claim holds."""
    engine = answers()
    found = structure(3600, engine)

    assert isinstance(found.group, UnitGroup)
    assert found.group.invariant_factors == (60, 4, 2, 2)
    assert order_of(7, found).order == sympy.n_order(7, 3600)
    assert order_of(6, found).order is None
    assert check_all(engine.claims, secrets.randbelow) == {}


def test_three_hundred_digits_whose_factors_are_found() -> None:
    """A 300-digit number of small and middling primes, and its order."""
    primes = [sympy.nextprime(10**k + 777 * j) for k in range(8, 14) for j in range(4)]
    n = 2**150 * prod(primes)
    assert 290 < len(str(n)) < 320
    found = structure(n, answers())

    assert isinstance(found.group, UnitGroup)
    assert found.group.order == 2**149 * prod(p - 1 for p in primes)
    assert found.group.exponent == lcm(2**148, *(p - 1 for p in primes))


def test_an_unfactored_modulus_is_answered_in_part() -> None:
    """Two 300-bit primes: what is left is said to be left, and nothing is made of it."""
    hard = sympy.nextprime(2**300) * sympy.nextprime(3 * 2**299)
    found = structure(45 * hard, answers("quick"))

    assert isinstance(found.group, UnsplitGroup)
    assert found.group.unfactored == hard
    assert order_of(2, found).order == PartialOrder(12, 0)
    assert isomorphic([found, found]) is None
    text = shown(str(45 * hard), "--of", "2", "--effort", "quick")
    assert "was not factored" in text
    assert "a multiple of 12" in text


def test_an_unfactored_order_is_answered_in_part() -> None:
    """A prime with a hard p - 1: cycles are known, the order of an element in part."""
    left, right = sympy.nextprime(2**300), sympy.nextprime(3 * 2**299)
    k = next(k for k in range(2, 5000, 2) if sympy.isprime(k * left * right + 1))
    p = k * left * right + 1
    found = structure(p, answers("quick"))
    order = order_of(3, found).order

    assert isinstance(found.group, PartlyFactoredGroup)
    assert found.group.invariant_factors == (p - 1,)
    assert isinstance(order, PartialOrder)
    assert order.unknown_divides == left * right
    assert "times a divisor above 1 of" in shown(str(p), "--of", "3", "--effort", "quick")


@pytest.mark.parametrize(
    ("numbers", "verdict"),
    [
        (("15", "16", "20"), "The groups are isomorphic."),
        (("7", "9", "14", "18"), "The groups are isomorphic."),
        (("8", "5"), "2 classes"),
    ],
)
def test_isomorphic_groups(numbers: tuple[str, ...], verdict: str) -> None:
    """Equal invariant factors and nothing else decide."""
    assert verdict in shown(*numbers)


def test_the_record_for_programs() -> None:
    """Valid JSON with the same content; what is not settled has names of its own."""
    record: dict[str, Any] = json.loads(shown("0xe10", "--of", "7", "--json"))[0]

    assert record["modulus"] == 3600
    assert record["complete"] is True
    assert record["invariant_factors"] == [60, 4, 2, 2]
    assert record["elements"] == [{"element": 7, "unit": True, "order": 12}]
    for order, generator in record["generators"]:
        assert sympy.n_order(generator, 3600) == order


def test_an_interruption_before_anything_is_known(monkeypatch: pytest.MonkeyPatch) -> None:
    """There is nothing to show, and that is said."""

    def interrupted(modulus: int, answers: Answers) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("auditor.inquiry.unit_groups.structure", interrupted)
    with pytest.raises(Interrupted, match="nothing was found yet"):
        CliRunner().invoke(main, ["structure", "15"], standalone_mode=False, catch_exceptions=False)


@pytest.mark.parametrize("word", ["0", "-5", "x", "1.5", "0x", "9" * 30_000])
def test_what_is_no_number_is_refused(word: str) -> None:
    """With a message that names it."""
    result = CliRunner().invoke(main, ["structure", "--", word])

    assert result.exit_code == 2
    assert "expected" in result.output
