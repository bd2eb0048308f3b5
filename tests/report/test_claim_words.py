"""Claims as sentences."""

import pytest

from auditor.claims.base import Claim
from auditor.claims.collection import KINDS
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.forgery import ForgeryRelations
from auditor.claims.order import Membership, Order
from auditor.claims.origin import Origin
from auditor.claims.origin_formula import Formula, LeastOffset
from auditor.claims.origin_generator import CanonicalGenerator
from auditor.claims.origin_recipe import Recipe
from auditor.claims.origin_replay import Outcome
from auditor.claims.prime import Prime
from auditor.claims.public_values import SharedExponents, VisibleExponents
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched, SpecialForm
from auditor.claims.subgroup_generator import SubgroupGenerator
from auditor.report.claim_words import _WRITERS, sentence

SENTENCES: list[tuple[Claim, str]] = [
    (Prime(23, "below-2^64"), "23 is prime: decided, as all numbers below 2^64"),
    (
        Prime(2**127 - 1, "baillie-psw", rounds=64),
        "0x7fffffffff…ffffffff (127 bits) is prime: probable, by the Baillie-PSW test and 64 "
        "strong tests to unpredictable bases; error at most 2^-128",
    ),
    (
        Prime(23, "n-1", factored=((11, 1),), witnesses=((11, 2),)),
        "23 is prime: proved from prime factors of n - 1",
    ),
    (Composite(15, factor=3), "15 is composite: 3 divides it"),
    (Composite(15, witness=2), "15 is composite: it fails the strong test to base 2"),
    (PerfectPower(49, 7, 2), "49 = 7 to the power 2"),
    (Factorization(22, ((2, 1), (11, 1)), 1, ()), "22 = 2 · 11"),
    (
        Factorization(4 * 391, ((2, 2),), 391, ()),
        "1564 = 2^2 · 391, which is composite and not factored",
    ),
    (Order(23, 5, ((2, 1), (11, 1)), 1, ()), "The order of 5 modulo 23 is 2 · 11"),
    (
        Order(23, 5, ((2, 1),), 11, ()),
        "The order of 5 modulo 23 is 2 times a divisor, above 1, of 11",
    ),
    (Membership(23, 4, 11, True), "4 to the power 11 = 1 modulo 23"),
    (
        SubgroupGenerator(23, 11, 2, 4, ()),
        "4 has the prime order 11 modulo 23: it is the power of 2 with exponent (n - 1)/q",
    ),
    (Membership(23, 5, 11, False), "5 to the power 11 is not 1 modulo 23"),
    (
        Searched(391, "built-in", (("ecm", (("b1", 2000), ("curves", 25))),)),
        "No factor of 391 was found by ecm (b1 2000, curves 25); attested, engine built-in",
    ),
    (
        SpecialForm(1021, (-3, 0, 1), 1, 32, 1),
        "1021 has a special form: times 1 it is the value of a polynomial of degree 2, made "
        "homogeneous, at 32 and 1; coefficients, that of x^0 first: -3, 0, 1",
    ),
    (
        FormSearched(1021, (1, 2)),
        "No special form of 1021 was found among those looked for, of tiers 1, 2; attested",
    ),
    (
        Origin(23, 11, Recipe("fips186-2", "sha1", (b"s" * 20,), (7,)), Outcome.REGENERATED),
        "The origin declared for 23, by fips186-2 with sha1, was replayed: regenerated",
    ),
    (
        Formula(1021, "pi", None),
        "1021 is not the number of the formula for pi with any offset to 2^32",
    ),
    (Formula(1021, "e", 7), "1021 is the number of the formula for e with offset 7"),
    (
        LeastOffset(1021, "e", 7),
        "In the formula for e that gives 1021 with offset 7, no smaller offset gives a safe prime",
    ),
    (
        LeastOffset(1021, "e", 7, 3),
        "In the formula for e that gives 1021 with offset 7, the smaller offset 3 gives a safe "
        "prime",
    ),
    (
        CanonicalGenerator(23, 11, 4, "sha256", b"s", 1, False),
        "4 is not what FIPS 186-4, A.2.3 makes of the seed with index 1 modulo 23",
    ),
    (
        SharedExponents(23, 2, (4, 19, 3), ((4, 19),)),
        "Of 3 public values modulo 23, these share an exponent: 2 values",
    ),
    (
        VisibleExponents(23, 5, 16, (2, 3), (3,)),
        "Of 2 public values modulo 23, 1 are plus or minus a power of 5 with an exponent of at "
        "most 16",
    ),
    (
        ForgeryRelations(23, 5, ()),
        "Among those looked for, 0 relations that could serve a forger: base 5 modulo 23",
    ),
]


@pytest.mark.parametrize(("claim", "words"), SENTENCES, ids=[words for _, words in SENTENCES])
def test_a_claim_says_what_it_claims_and_what_shows_it(claim: Claim, words: str) -> None:
    """One sentence, no stronger than the claim."""
    assert sentence(claim.record()) == words


def test_sentences_are_for_kinds_that_exist() -> None:
    """A kind that is renamed is noticed here; one that is added is written out in any case."""
    assert set(_WRITERS) <= set(KINDS)
    assert {claim.kind for claim, _ in SENTENCES} == set(_WRITERS)


def test_an_unknown_or_malformed_claim_does_not_disappear() -> None:
    """It is written out member by member."""
    unknown = {"kind": "novel", "statement": {"n": 5}, "certificate": {"by_way_of": [1, 2]}}
    malformed = {"kind": "prime", "statement": {"m": 5}, "certificate": {}}

    assert sentence(unknown) == "n: 5; shown by by way of: 1, 2"
    assert sentence(malformed) == "m: 5"
