"""NIST example files for the generator: A.2.2 and A.2.4, sets of A.2.1 and A.2.3, older files."""

import secrets

import pytest

from auditor.claims.collection import Claims
from auditor.claims.origin_generator import CanonicalGenerator, generator_from_integers
from auditor.claims.origin_recipe import HASHES, seed_integer
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from tests.standards.vectors import Block, blocks

OLD = "DSA/FIPS_186-2/"
NEW = "DSA/FIPS_186-3/"


def section(file: str, number: str) -> list[Block]:
    """The blocks of one section of a file of FIPS 186-3."""
    return [block for block in blocks(NEW + file) if block.section.startswith(number)]


def canonical(block: Block) -> CanonicalGenerator:
    """The claim about the generator; three seeds in a row make the domain parameter seed."""
    keys = [
        key
        for key in ("domain_parameter_seed", "firstseed", "pseed", "qseed")
        if key in block.values
    ]
    seed = b"".join(block.data(key) for key in keys)
    p, q, g, index = (block.number(key) for key in ("P", "Q", "G", "index"))
    return generator_from_integers(p, q, g, HASHES.index(block.hash), seed_integer(seed), index)


def is_member(block: Block) -> bool:
    """Whether g^q = 1, as the program answers it."""
    p, q, g = (block.number(key) for key in ("P", "Q", "G"))
    claims = Claims()
    answers = Answers(claims, RunValues("2026-12-01"), secrets.randbelow, lambda made: None)
    answers.answer(Question(Asks.MEMBERSHIP, (p, g, q)))
    claim = claims.membership(p, g, q)
    assert claim is not None
    return claim.member


def test_canonical_generators_are_judged_as_in_the_file() -> None:
    """A.2.4: 75 verdicts, and each claim passes its check."""
    cases = section("PQGVer.rsp", "A.2.4")
    for block in cases:
        claim = canonical(block)
        assert claim.canonical == block.values["Result"].startswith("P")
        claim.check({}, secrets.randbelow)
    assert len(cases) == 75


def test_generated_canonical_generators_verify() -> None:
    """A.2.3: 75 sets, 30 of them with the three seeds of a provable construction."""
    cases = section("PQGGen.rsp", "A.2.3")

    assert all(canonical(block).canonical for block in cases)
    assert len(cases) == 75


@pytest.mark.parametrize("position", [0, -1])
def test_another_index_or_seed_is_another_generator(position: int) -> None:
    """The index separates uses, and the seed is taken with its leading zeros."""
    claim = canonical(section("PQGGen.rsp", "A.2.3")[position])
    spelled = HASHES.index(claim.hash), seed_integer(claim.seed), claim.index
    others = [
        (spelled[0], spelled[1], (claim.index + 1) % 256),
        (spelled[0], seed_integer(b"\x00" + claim.seed), claim.index),
    ]

    for other in others:
        assert not generator_from_integers(claim.n, claim.q, claim.g, *other).canonical


def test_membership_decides_as_in_the_file() -> None:
    """A.2.2: 75 verdicts; A.2.1: 75 sets whose generators are in the subgroup."""
    cases = section("PQGVer.rsp", "A.2.2")

    assert all(is_member(b) == b.values["Result"].startswith("P") for b in cases)
    assert all(is_member(b) for b in section("PQGGen.rsp", "A.2.1"))
    assert len(cases) == 75


def test_old_generators() -> None:
    """FIPS 186-2: the generator that was modified is in no subgroup of order q, the sound are."""
    modified = [b for b in blocks(OLD + "PQGVer.rsp") if "G modified" in b.values["Result"]]
    sound = [b for b in blocks(OLD + "PQGVer.rsp") if "P (" in b.values["Result"]]

    assert [is_member(b) for b in modified] == [False]
    assert all(is_member(b) for b in (*sound, *blocks(OLD + "PQGGen.rsp")))
