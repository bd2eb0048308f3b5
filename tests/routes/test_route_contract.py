"""What holds of all routes: names, sentences, and that they know numbers only."""

import ast
import dataclasses
from pathlib import Path

import pytest

import auditor.routes
from auditor.routes.base import Closed, Work
from auditor.routes.composite_modulus import (
    Component,
    composite_modulus,
    composite_modulus_outsider,
)
from auditor.routes.confinement import confinement
from auditor.routes.hidden_form import hidden_form
from auditor.routes.number_field_sieve import number_field_sieve
from auditor.routes.pohlig_hellman import pohlig_hellman
from auditor.routes.prime_power import prime_power
from auditor.routes.raw_message import raw_message
from auditor.routes.short_exponent import short_exponent
from auditor.routes.smooth_part import smooth_part_then_short_exponent
from auditor.routes.special_number_field_sieve import special_number_field_sieve
from auditor.routes.square_root import square_root
from tests.routes.cases import factors

ORDER = factors([1009, 2**89 - 1])
GROUP = factors([2, 2, 157, 1009, 2**89 - 1], rest=2**1900 + 1)
WORKS = [
    number_field_sieve(2048),
    number_field_sieve(500),
    special_number_field_sieve(2048, 4, 20.9, 507),
    hidden_form(2048, origin_verified=False),
    square_root(ORDER),
    pohlig_hellman(ORDER),
    short_exponent(160),
    smooth_part_then_short_exponent(60, ORDER),
    smooth_part_then_short_exponent(20, factors([2**89 - 1])),
    smooth_part_then_short_exponent(200, ORDER),
    confinement(90, ORDER, GROUP, "none", reused=True),
    confinement(90, ORDER, GROUP, "range", reused=True),
    confinement(3000, ORDER, GROUP, "none", reused=True),
    raw_message(64, 900),
    composite_modulus(2048, (), 2048),
    composite_modulus(2048, (Component(900), Component(1149)), 0),
    composite_modulus_outsider(2048, (), 2048),
    prime_power(2, 64),
    prime_power(2**89 - 1, 3),
]
CLOSED = [
    pohlig_hellman(factors([])),
    smooth_part_then_short_exponent(60, factors([])),
    hidden_form(2048, origin_verified=True),
    confinement(90, ORDER, GROUP, "none", reused=False),
    confinement(90, ORDER, GROUP, "membership", reused=True),
    raw_message(64, 1),
]
NAMES = {
    "number_field_sieve",
    "special_number_field_sieve",
    "hidden_form",
    "square_root",
    "pohlig_hellman",
    "short_exponent",
    "smooth_part_then_short_exponent",
    "confinement",
    "raw_message",
    "composite_modulus",
    "prime_power",
}


def test_routes_have_the_names_of_their_facts() -> None:
    """Each name gives a fact strength.<name>_bits_at_most."""
    assert {work.route for work in WORKS} == NAMES
    assert {closed.route for closed in CLOSED} <= NAMES


@pytest.mark.parametrize("work", WORKS, ids=lambda work: work.route)
def test_every_work_explains_itself(work: Work) -> None:
    """One sentence, a source, a named model, and labels that occur once."""
    assert isinstance(work, Work)
    assert work.explanation[0].isupper()
    assert work.explanation.endswith(".")
    assert ". " not in work.explanation
    assert work.source
    assert work.model.name
    assert work.bits >= 0
    assert len(dict(work.details)) == len(work.details)


@pytest.mark.parametrize("closed", CLOSED, ids=lambda closed: closed.route)
def test_every_closed_route_says_why(closed: Closed) -> None:
    """A reason in place of a figure."""
    assert isinstance(closed, Closed)
    assert closed.reason


def test_works_are_values() -> None:
    """Equal arguments, equal works; nothing can be changed afterwards."""
    assert square_root(ORDER) == square_root(factors([1009, 2**89 - 1]))
    with pytest.raises(dataclasses.FrozenInstanceError):
        WORKS[0].bits = 0.0  # type: ignore[misc, union-attr]


def test_routes_import_nothing_but_routes() -> None:
    """Facts feed the routes, never the other way round."""
    allowed = {"bisect", "collections", "dataclasses", "enum", "itertools", "math", "typing"}
    for path in sorted(Path(auditor.routes.__file__).parent.glob("*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            names = []
            if isinstance(node, ast.Import):
                names = [alias.name for alias in node.names]
            elif isinstance(node, ast.ImportFrom):
                names = [node.module or ""]
            for name in names:
                assert name.startswith("auditor.routes") or name.split(".")[0] in allowed, path
