"""Records that somebody else wrote: read or refused, checked or refuted, and nothing else."""

import copy
import secrets
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.base import Claim, Refuted
from auditor.claims.collection import read_claim
from auditor.claims.forgery import forgery_relations
from auditor.claims.origin import regenerate
from auditor.claims.origin_formula import LeastOffset, formula_of
from auditor.claims.origin_generator import generator_from_integers
from auditor.claims.origin_recipe import METHODS, seed_integer
from auditor.claims.origin_replay import Outcome
from auditor.claims.public_values import shared_exponents, visible_exponents
from auditor.intake.standard_groups import find
from tests.claims.test_origin import CASES, prime_claim

MODP = find("modp768")
assert MODP is not None
REFUSED = [
    next(c for c in CASES if (c.recipe.method, c.expected) == (method, Outcome.NOT_DIVIDING))
    for method in METHODS
]
CLAIMS: list[Claim] = [
    *(regenerate(c.p, c.q, c.recipe, prime_claim, secrets.randbelow) for c in REFUSED),
    formula_of(MODP.modulus, "pi"),
    LeastOffset(MODP.modulus, "pi", 149686, 149685),
    generator_from_integers(23, 11, 4, 0, seed_integer(b"seed"), 1),
    shared_exponents(10007, 2, (5, 7, 10002)),
    visible_exponents(10007, 4, 100, (5, 16)),
    forgery_relations(1000037, 2),
]
ODD = [
    None, True, False, -1, 0, 1, 2, 3, 4, 2**53 + 1, 1.5, "", "0x", "0x0", "-0x20000000000001",
    "zz", "pi", [], [[]], [0], [5, 3], {}, {"n": 1},
]  # fmt: skip


def leaves(record: Any, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """The paths to all members, containers included."""
    found = [path] if path else []
    if isinstance(record, dict | list):
        for key in record if isinstance(record, dict) else range(len(record)):
            found += leaves(record[key], (*path, key))
    return found


@pytest.mark.parametrize("claim", CLAIMS, ids=lambda claim: claim.kind)
@settings(max_examples=40)
@given(data=st.data())
def test_any_member_may_be_anything(claim: Claim, data: st.DataObject) -> None:
    """One member replaced by an odd value: a ValueError, a refutation, or a claim that holds."""
    record = copy.deepcopy(claim.record())
    *path, last = data.draw(st.sampled_from(leaves(record)))
    place = record
    for key in path:
        place = place[key]
    place[last] = data.draw(st.sampled_from(ODD))
    try:
        other = read_claim(record)
        other.check({}, secrets.randbelow)
    except (ValueError, Refuted):
        return
    assert other.record() == record
