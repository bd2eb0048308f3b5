"""Cases and groups that the tests of several routes share."""

from collections import Counter
from functools import cache
from pathlib import Path
from typing import Any

import yaml

from auditor.intake.standard_groups import StandardGroup, find
from auditor.routes.factors import Factors

DATA = Path(__file__).parent.parent / "data"


@cache
def cases(name: str) -> dict[str, Any]:
    """The data file of that name."""
    return yaml.safe_load((DATA / f"routes_{name}.yaml").read_text(encoding="utf-8"))


def number(value: int | str, **names: int) -> int:
    """An integer, or the value of sums, products and powers of integers and ``names``."""
    if isinstance(value, int):
        return value
    return sum(_term(term, names) for term in value.replace("-", "+-").split("+") if term)


def _term(term: str, names: dict[str, int]) -> int:
    product = -1 if term.startswith("-") else 1
    for part in term.lstrip("-").split("*"):
        base, _, exponent = part.partition("^")
        product *= (names[base] if base in names else int(base)) ** int(exponent or 1)
    return product


def pairs(listed: list[list[Any]]) -> tuple[tuple[int, int], ...]:
    """Prime powers as a data file lists them."""
    return tuple((number(prime), exponent) for prime, exponent in listed)


def factors(primes: list[int], rest: int = 1) -> Factors:
    """``primes``, with multiplicity and in any order, and a rest."""
    return Factors(tuple(sorted(Counter(primes).items())), rest)


def divided(value: int, primes: list[int]) -> Factors:
    """``value`` with ``primes`` divided out, each of which must divide it."""
    rest = value
    for prime in primes:
        quotient, remainder = divmod(rest, prime)
        assert remainder == 0
        rest = quotient
    return factors(primes, rest)


def group(name: str) -> StandardGroup:
    """A standard group that must exist."""
    found = find(name)
    assert found is not None
    return found


def cofactor_primes(name: str) -> list[int]:
    """The known primes of (p - 1) / q of a standard group."""
    return [] if name == "modp2048" else list(cases("confinement")["groups"][name])


def units(name: str, largest: int | None = None) -> Factors:
    """p - 1 of a standard group with its known factors up to ``largest``, and q."""
    standard = group(name)
    known = [r for r in cofactor_primes(name) if largest is None or r <= largest]
    if name == "modp2048":
        known = [2]
    return divided(standard.modulus - 1, [*known, standard.subgroup_order])


def subgroup(name: str) -> Factors:
    """The prime order q of a standard group."""
    return Factors(((group(name).subgroup_order, 1),))
