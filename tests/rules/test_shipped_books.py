"""The shipped books: their examples run, catch wrong versions of each rule, and judge fairly."""

import re
from dataclasses import replace

import pytest

from auditor.claims.standing import Standing
from auditor.facts import vocabulary
from auditor.facts.base import Absent, Fact
from auditor.rulebooks.conditions import View
from auditor.rulebooks.examples import failures, rule_failures
from auditor.rulebooks.judging import Judgement, evaluate, facts_in_use, judge
from auditor.rulebooks.loading import available, load_all
from tests.rules.mutations import mutants

VOCABULARY = vocabulary()
BOOKS = load_all(available(), VOCABULARY)
CORE = load_all(("group-structure", "strength"), VOCABULARY)
RULES = [rule for book in BOOKS for rule in book.rules]
CATEGORIES_AND_DISCOURAGED = {310, 320, 1205, 20, 330, 345, 693}

SURVIVORS: dict[str, str] = {}
"""Mutants that no example tells from the rule, by rule and text, each with the reason."""


def rule_ids(rule) -> str:
    return rule.id


@pytest.mark.parametrize("book", BOOKS, ids=lambda book: book.name)
def test_examples_behave(book):
    """Every example of the book has the outcome it is listed for."""
    assert failures(book, VOCABULARY) == ()


def test_enough_rules():
    """The two books on structure and strength hold what was promised of them."""
    sizes = {book.name: len(book.rules) for book in BOOKS}

    assert sizes["group-structure"] >= 10
    assert sizes["group-structure"] + sizes["strength"] >= 27


@pytest.mark.parametrize("rule", RULES, ids=rule_ids)
def test_some_example_catches_each_mutant(rule):
    """One operator, operand or number changed in a condition makes some example fail."""
    survivors = [
        f"{rule.id} {part}: {mutant.text}"
        for part in ("applies", "requires")
        if (condition := getattr(rule, part))
        for mutant in (*mutants(condition), replace(condition, text=f"!({condition.text})"))
        if not rule_failures(replace(rule, **{part: mutant}), VOCABULARY)
    ]

    assert [mutant for mutant in survivors if mutant not in SURVIVORS] == []


@pytest.mark.parametrize("rule", RULES, ids=rule_ids)
def test_an_empty_set_of_facts_passes_nothing(rule):
    """With nothing established no rule is conforming or nonconforming."""
    outcome, missing = evaluate(rule, View({}, {}, VOCABULARY))

    assert outcome == "undetermined"
    assert set(missing) <= set(rule.names)


@pytest.mark.parametrize("rule", RULES, ids=rule_ids)
def test_a_rule_is_written_for_readers(rule):
    """Why has two sentences, the statement is a sentence, and the CWE entries label weaknesses."""
    assert len(re.findall(r"[.!?](?:\s|$)", rule.why)) == 2
    assert rule.statement.endswith(".")
    assert rule.remedy.endswith(".")
    assert not rule.title.endswith(".")
    assert not CATEGORIES_AND_DISCOURAGED.intersection(rule.cwe)


def test_defects_are_graded_by_effect():
    """Broken groups, wrong orders and too little strength are major; a lost bit is a remark."""
    grades = {rule.id: rule.grade for rule in RULES}
    major = """modulus-composite modulus-prime-power generator-trivial generator-not-a-unit
        declared-order-composite declared-order-not-of-generator subgroup-too-small
        strength-insufficient confinement-leak raw-elgamal-even-order"""

    assert {grades[rule_id] for rule_id in major.split()} == {"major"}
    assert grades["generator-order-even"] == "observation"


# Judgements of whole sets


def proven(**values: object) -> dict[str, Fact]:
    """Facts by name, with __ for the dot."""
    return {
        name.replace("__", ".", 1): Fact(value, Standing.PROVEN) for name, value in values.items()
    }


SAFE_PRIME_GROUP = proven(
    modulus__length=2048,
    modulus__nature="prime",
    modulus__safe_prime=True,
    modulus__standard_group="ffdhe2048",
    modulus__standard_match="exact",
    modulus__occurrences=12,
    generator__unit=True,
    generator__reduced=True,
    usage__protection_stated=False,
    run__year=2026,
    generator__trivial=False,
    generator__order_even=False,
    generator__order_prime=True,
    generator__order_length=2047,
    generator__largest_prime_length=2047,
    generator__order_is_declared=True,
    subgroup__declared=True,
    subgroup__order_prime=True,
    subgroup__divides_group=True,
    provenance__verified=True,
    public_values__count=0,
    usage__narrowest_exponent_at_most=225,
    usage__widest_exponent_at_least=225,
    usage__exponent_widths_declared=True,
    exponent__public_leak_bits_at_least=0.0,
    strength__required_bits=112,
    strength__smooth_part_then_short_exponent_bits_at_most=113.5,
    strength__number_field_sieve_bits_at_most=110.11,
    strength__work_bits_at_most=110.11,
    strength__standard_bits=112,
    strength__sufficient=True,
)
AGREEMENT = proven(
    usage__purpose="key-agreement", usage__exponent_reused=False, usage__peer_range=True
)
UNDEFINED = Absent("undefined")
UNUSED = dict.fromkeys(
    (
        "subgroup.cofactor_agrees",
        "strength.confinement_bits_at_most",
        "strength.hidden_form_bits_at_most",
        "exponent.confinement_leak_bits_at_least",
        "public_values.out_of_range",
        "public_values.outside_subgroup",
        "public_values.small_order",
    ),
    UNDEFINED,
)


def judged(facts: dict[str, Fact], absent: dict[str, Absent] | None = None) -> Judgement:
    absent = {name: why for name, why in (UNUSED | (absent or {})).items() if name not in facts}
    return judge(CORE, facts, absent, VOCABULARY)


SIGNATURE = {"usage.purpose": Fact("signature", Standing.DECLARED)}


def scheme(name: str) -> dict[str, Fact]:
    return {"usage.scheme": Fact(name, Standing.DECLARED)}


@pytest.mark.parametrize(
    "use", [AGREEMENT, SIGNATURE | scheme("dsa"), SIGNATURE | scheme("schnorr")]
)
def test_a_published_group_is_not_condemned(use):
    """A standard group with generator 2, shared by many, passes for key agreement, DSA, Schnorr."""
    judgement = judged(SAFE_PRIME_GROUP | use)

    assert (judgement.position, judgement.findings) == ("no objection", ())


def test_the_same_group_forges_classical_signatures():
    """For classical ElGamal signatures generator 2 of a published group is fatal."""
    judgement = judged(SAFE_PRIME_GROUP | SIGNATURE | scheme("elgamal"))

    assert judgement.position == "hold"
    assert judgement.decided_by.rule == "elgamal-signature-generator-origin"


def test_an_open_order_is_never_passed():
    """A modulus long enough whose generator order is open stays open, and asks for that order."""
    facts = (
        SAFE_PRIME_GROUP | AGREEMENT | proven(subgroup__declared=False, modulus__safe_prime=False)
    )
    for name in list(facts):
        if name.startswith(("generator.order", "generator.largest")) or name in (
            "strength.sufficient",
            "strength.standard_bits",
            "subgroup.order_prime",
            "subgroup.divides_group",
        ):
            del facts[name]
    judgement = judged(facts)

    assert judgement.position == "open"
    assert judgement.decided_by.rule == "subgroup-too-small"
    assert judgement.outcomes["strength-insufficient"] == "undetermined"
    assert "generator.largest_prime_length" in judgement.decided_by.missing


def test_what_the_position_rests_on():
    """Without an answer whether the strength suffices no set is let go, whatever else conforms."""
    facts = SAFE_PRIME_GROUP | AGREEMENT
    del facts["strength.sufficient"]

    assert judged(facts).position == "open"
    assert judged(facts).decided_by.rule == "strength-insufficient"


def test_confinement_decides_by_its_work():
    """A static exponent without membership check is held, for the route with the least work."""
    facts = (
        SAFE_PRIME_GROUP
        | AGREEMENT
        | proven(
            modulus__safe_prime=False,
            usage__exponent_reused=True,
            exponent__confinement_leak_bits_at_least=161.63,
            strength__confinement_bits_at_most=35.9,
            strength__work_bits_at_most=35.9,
            strength__sufficient=False,
        )
    )
    judgement = judged(facts)

    assert judgement.position == "hold"
    assert judgement.decided_by.rule == "confinement-work"
    assert "35.90 bits of work" in judgement.decided_by.statement


def test_nothing_asks_for_factors_where_nothing_depends_on_them():
    """With the order of the generator known and exponents used once, no search is in use."""
    facts = SAFE_PRIME_GROUP | AGREEMENT | proven(modulus__safe_prime=False)

    assert facts_in_use(CORE, facts, UNUSED, VOCABULARY) == ()


def test_a_composite_modulus_asks_for_nothing_deep():
    """What presupposes a prime modulus does not apply to a composite one, and asks nothing."""
    facts = proven(
        modulus__nature="composite",
        modulus__length=2048,
        usage__purpose="key-agreement",
        generator__unit=True,
        generator__reduced=True,
        usage__protection_stated=False,
        run__year=2026,
        strength__required_bits=112,
    )
    used = facts_in_use(CORE, facts, UNUSED, VOCABULARY)

    assert judged(facts).decided_by.rule == "modulus-composite"
    assert not [name for name in used if name.startswith(("group.", "exponent."))]
    assert "generator.largest_prime_length" not in used
