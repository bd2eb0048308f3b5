"""The books on standards: where they speak, what they merge with, and that they judge fairly."""

from collections.abc import Iterable
from typing import Any

import pytest

from auditor.claims.standing import Standing
from auditor.facts.base import Absent, Fact
from auditor.intake.standard_groups import StandardGroup, standard_groups
from auditor.rulebooks.findings import Finding
from auditor.rulebooks.judging import Judgement, facts_in_use, judge
from auditor.rulebooks.loading import load_all
from tests.vocabulary_of_the_contract import VOCABULARY

CORE = ("group-structure", "strength")
STANDARDS = (
    "sp800-56a",
    "fips186-dsa",
    "tls",
    "ssh",
    "ikev2",
    "x942-cms",
    "bsi-tr-02102",
    "transition",
)
BOOKS = load_all((*CORE, *STANDARDS), VOCABULARY)
OF_STANDARDS = [book for book in BOOKS if book.name in STANDARDS]
BOOK_OF = {rule.id: book.name for book in BOOKS for rule in book.rules}

UNDECLARED = Absent("undeclared")
UNDEFINED = Absent("undefined")


def proven(values: dict[str, Any]) -> dict[str, Fact]:
    return {name: Fact(value, Standing.PROVEN) for name, value in values.items()}


def judged(values: dict[str, Any], absent: dict[str, Absent] | None = None) -> Judgement:
    """All books on a set with these facts; routes and leaks that are not named are closed."""
    closed = [n for n in VOCABULARY if n.startswith(("strength.", "exponent.", "public_values."))]
    closed.append("subgroup.cofactor_agrees")
    absences = dict.fromkeys(closed, UNDEFINED) | (absent or {})
    absences = {name: why for name, why in absences.items() if name not in values}
    return judge(BOOKS, proven(values), absences, VOCABULARY)


def group_facts(group: StandardGroup) -> dict[str, Any]:
    """What is established about a published group whose owner declares everything."""
    safe = group.modulus == 2 * group.subgroup_order + 1
    facts = {
        "modulus.length": group.modulus.bit_length(),
        "modulus.nature": "prime",
        "modulus.safe_prime": safe,
        "modulus.standard_group": group.name,
        "modulus.standard_match": "exact",
        "modulus.special_form_seen": False,
        "modulus.occurrences": 1,
        "generator.unit": True,
        "generator.reduced": True,
        "generator.trivial": False,
        "generator.order_even": False,
        "generator.order_prime": True,
        "generator.order_length": group.subgroup_order.bit_length(),
        "generator.largest_prime_length": group.subgroup_order.bit_length(),
        "generator.order_is_declared": True,
        "subgroup.declared": True,
        "subgroup.order_length": group.subgroup_order.bit_length(),
        "subgroup.order_prime": True,
        "subgroup.divides_group": True,
        "public_values.count": 0,
        "run.year": 2026,
        "strength.required_bits": 112,
        "strength.standard_bits": 112,
        "strength.sufficient": True,
    }
    return facts | ({"provenance.verified": True} if group.formula else {})


def widths(bits: int) -> dict[str, Any]:
    """Every party declares exponents of so many bits."""
    return {
        "usage.narrowest_exponent_at_most": bits,
        "usage.widest_exponent_at_least": bits,
        "usage.exponent_widths_declared": True,
    }


def good_use(protocol: str, width: int) -> dict[str, Any]:
    """Key agreement with fresh exponents and every check, protected for two years."""
    return {
        "usage.purpose": "key-agreement",
        "usage.protocol": protocol,
        "usage.exponent_reused": False,
        "usage.ephemeral_reused": False,
        **widths(width),
        "usage.peer_range": True,
        "usage.peer_membership": True,
        "usage.peer_cofactor": False,
        "usage.protect_until": 2028,
        "usage.protection_stated": True,
    }


GROUPS = {group.name: group for group in standard_groups()}
MODP3072 = group_facts(GROUPS["modp3072"])
GROUP24 = group_facts(GROUPS["rfc5114-2048-256"])
USE: dict[str, Any] = good_use("custom", 256)


def rules_of(findings: Iterable[Finding], *grades: str) -> set[str]:
    return {finding.rule for finding in findings if not grades or finding.grade in grades}


# Where the books speak

SPEAKING = [
    ({"usage.purpose": "key-agreement", "usage.protocol": "custom"}, "sp800-56a"),
    ({"usage.purpose": "signature", "usage.scheme": "dsa"}, "fips186-dsa"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "tls1.2"}, "tls"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "tls1.3"}, "tls"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "ssh"}, "ssh"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "ikev1"}, "ikev2"),
    ({"usage.purpose": "signature", "usage.protocol": "ikev2"}, "ikev2"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "cms"}, "x942-cms"),
    ({"usage.purpose": "encryption", "usage.protocol": "openpgp"}, "x942-cms"),
    ({"usage.purpose": "encryption", "usage.protocol": "custom"}, "bsi-tr-02102"),
    ({"usage.purpose": "signature", "usage.protocol": "custom"}, "transition"),
]
SILENT = [
    ({"usage.purpose": "encryption", "usage.protocol": "custom"}, "sp800-56a"),
    ({"usage.purpose": "signature", "usage.scheme": "schnorr"}, "fips186-dsa"),
    ({"usage.purpose": "encryption", "usage.scheme": "dsa"}, "fips186-dsa"),
    ({"usage.purpose": "signature", "usage.protocol": "tls1.3"}, "tls"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "ssh"}, "tls"),
    ({"usage.purpose": "signature", "usage.protocol": "ssh"}, "ssh"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "tls1.2"}, "ssh"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "custom"}, "ikev2"),
    ({"usage.purpose": "signature", "usage.protocol": "cms"}, "x942-cms"),
    ({"usage.purpose": "key-agreement", "usage.protocol": "ssh"}, "x942-cms"),
    ({"usage.purpose": "signature", "usage.protocol": "custom"}, "bsi-tr-02102"),
]


def outcomes(values: dict[str, Any], name: str) -> set[str]:
    """The outcomes of one book's rules; empty where the book is left out."""
    found = judge(BOOKS, proven(values), {}, VOCABULARY).outcomes
    return {outcome for rule, outcome in found.items() if BOOK_OF[rule] == name}


@pytest.mark.parametrize(("values", "name"), SPEAKING)
def test_a_book_speaks_where_it_should(values, name):
    """With its protocol, purpose or scheme declared, a book has something to ask or to say."""
    assert outcomes(values, name) - {"not applicable"}


@pytest.mark.parametrize(("values", "name"), SILENT)
def test_a_book_is_silent_elsewhere(values, name):
    """For any other protocol, purpose or scheme none of its rules applies."""
    assert outcomes(values, name) == {"not applicable"}


def test_every_book_has_a_gate_over_usage():
    """What decides whether a book speaks is declared usage, and nothing that search could find."""
    for book in OF_STANDARDS:
        assert book.gate
        assert set(book.gate.names) <= {"usage.purpose", "usage.protocol", "usage.scheme"}
    assert {n for b in OF_STANDARDS for n in b.gate.names} == {
        "usage.purpose",
        "usage.protocol",
        "usage.scheme",
    }


def test_an_undeclared_protocol_leaves_books_out_with_the_reason():
    """Books on protocols are left out, not passed, where the owner names no protocol."""
    values = MODP3072 | USE
    del values["usage.protocol"]
    found = judged(values, {"usage.protocol": UNDECLARED})

    assert {book.name for book in found.books_left_out} == {"tls", "ssh", "ikev2", "x942-cms"}
    assert all("does not say: usage.protocol" in book.why for book in found.books_left_out)
    assert not any(BOOK_OF[rule] in ("tls", "ssh", "ikev2") for rule in found.outcomes)


# Published groups, used well

LONG_GROUPS = [g for g in standard_groups() if g.formula and g.modulus.bit_length() >= 3072]
LENGTHS = [name for name, group in GROUPS.items() if group.modulus.bit_length() >= 2048]
PROTOCOLS = ("tls1.2", "tls1.3", "ssh", "ikev2", "cms", "custom")


@pytest.mark.parametrize("group", LONG_GROUPS, ids=lambda group: group.name)
@pytest.mark.parametrize("protocol", PROTOCOLS)
def test_long_published_groups_pass_all_books(group, protocol):
    """From 3072 bits on no book objects, but for what a protocol withdrew or cannot negotiate."""
    found = judged(group_facts(group) | good_use(protocol, 400))
    known = {"tls1.2": {"tls12-finite-field"}}.get(protocol, set())
    if protocol == "tls1.3" and not group.tls:
        known = {"tls13-group-not-registered"}

    assert rules_of(found.findings) == known
    assert rules_of(found.findings, "major", "observation") == set()


@pytest.mark.parametrize("name", LENGTHS)
@pytest.mark.parametrize("protocol", PROTOCOLS)
def test_no_published_group_of_2048_bits_is_held(name, protocol):
    """A published group used with fresh exponents and every check is never held and never open."""
    found = judged(
        group_facts(GROUPS[name]) | good_use(protocol, 256), {"provenance.verified": UNDECLARED}
    )

    assert found.position in ("conditions", "no objection")


@pytest.mark.parametrize("scheme", ["dsa", "schnorr"])
def test_signatures_over_a_published_group_are_not_held(scheme):
    """The generator 2 of a published group is no defect of DSA or Schnorr in any book."""
    use = {"usage.purpose": "signature", "usage.scheme": scheme, **widths(3071)}
    found = judged(MODP3072 | use, {"usage.protocol": UNDECLARED})

    assert found.position in ("conditions", "no objection")


def test_an_even_order_is_an_observation_in_every_profile():
    """A generator of order 2q over a safe prime, as SSH files have it, is remarked on only."""
    values = MODP3072 | good_use("ssh", 256) | {"generator.order_even": True}
    values |= {"generator.order_prime": False, "modulus.standard_group": "none"}
    values |= {"modulus.standard_match": "none", "provenance.verified": True}
    found = judged(values)
    parity = [finding for finding in found.findings if finding.defect == "parity-leak"]

    assert rules_of(parity) == {
        "generator-order-even",
        "sp800-56a-generator-order",
        "bsi-generator-order-even",
    }
    assert {finding.grade for finding in parity} == {"observation"}
    assert rules_of(found.findings, "major", "minor") == {"sp800-56a-group-not-approved"}


# One defect, one finding


def merged(findings: Iterable[Finding], defect: str, grade: str) -> set[str]:
    return {f.rule for f in findings if (f.defect, f.grade) == (defect, grade)}


def test_a_short_modulus_is_one_finding_with_all_criteria():
    """The group of SSH's group1 breaks rules of four documents, which are one defect."""
    values = group_facts(GROUPS["modp1024"]) | good_use("ssh", 256)
    found = judged(values | {"strength.sufficient": False})

    assert merged(found.findings, "modulus-too-short", "major") == {
        "modulus-too-short",
        "ssh-group1",
        "ssh-modulus-below-2048",
        "transition-modulus-below-2048",
    }
    assert {f.defect for f in found.findings if f.grade == "major"} == {
        "modulus-too-short",
        "strength-insufficient",
    }


def test_confinement_in_ike_is_one_finding():
    """What RFC 6989 forbids is the defect that the book on strength measures."""
    values = GROUP24 | good_use("ikev2", 256) | {"usage.peer_membership": False}
    values |= {"usage.exponent_reused": True, "exponent.confinement_leak_bits_at_least": 35.9}
    found = judged(values | {"provenance.verified": True})

    assert merged(found.findings, "small-subgroup-confinement", "major") == {
        "confinement-leak",
        "ike-reused-without-membership",
    }


@pytest.mark.parametrize(
    ("protocol", "rule"),
    [
        ("tls1.2", "tls12-server-range-check"),
        ("tls1.3", "tls13-range-check"),
        ("ssh", "ssh-range-check"),
        ("ikev2", "ike-range-check"),
        ("cms", "cms-recipient-check"),
    ],
)
def test_unchecked_values_are_one_finding(protocol, rule):
    """The clause of the protocol joins the finding of the book on strength."""
    unchecked = {"usage.peer_range": False, "usage.peer_membership": False}
    found = judged(MODP3072 | good_use(protocol, 275) | unchecked)

    assert merged(found.findings, "peer-value-unchecked", "minor") == {
        "peer-value-unchecked",
        "sp800-56a-partial-check",
        rule,
    }


@pytest.mark.parametrize("defect", ["peer-value-unchecked", "parity-leak", "subgroup-too-small"])
def test_rules_of_one_defect_have_one_remedy(defect):
    """Where books agree on what to do they say it in the same words, so it is read once."""
    rules = [rule for book in OF_STANDARDS for rule in book.rules if rule.defect == defect]

    assert len(rules) > 1
    assert len({rule.remedy for rule in rules}) == 1


# Dates


@pytest.mark.parametrize(
    ("year", "until", "grades"),
    [
        (2026, 2030, set()),
        (2026, 2031, {"minor"}),
        (2030, 2030, set()),
        (2031, 2031, {"minor", "major"}),
    ],
)
def test_112_bits_end_with_2030(year, until, grades):
    """Protection past 2030 is minor before that date, and applying it after is major."""
    values = group_facts(GROUPS["modp2048"]) | USE
    found = judged(values | {"run.year": year, "usage.protect_until": until})
    rules = {"transition-protection-past-2030", "transition-112-bits-from-2031"}

    assert {f.grade for f in found.findings if f.rule in rules} == grades


def test_the_end_of_classical_key_agreement():
    """Past 2031 a guideline objects, past 2035 a draft does as well, whatever the length."""
    past = {
        until: {
            f.rule
            for f in judged(MODP3072 | USE | {"usage.protect_until": until}).findings
            if f.defect == "quantum-horizon"
        }
        for until in (2031, 2032, 2036)
    }

    assert past[2031] == set()
    assert past[2032] == {"bsi-classical-only"}
    assert past[2036] == {"bsi-classical-only", "transition-protection-past-2035"}


def test_an_undeclared_horizon_matters_to_112_bits_only():
    """Where the group carries 128 bits, the year is asked for by the quantum horizon alone."""
    open_rules = {}
    for name in ("modp2048", "modp3072"):
        values = group_facts(GROUPS[name]) | USE
        del values["usage.protect_until"]
        values["usage.protection_stated"] = False
        found = judged(values, {"usage.protect_until": UNDECLARED})
        open_rules[name] = {f.rule for f in found.findings if f.outcome == "undetermined"}

    horizon = {"bsi-classical-only", "transition-protection-past-2035"}
    assert open_rules["modp3072"] == horizon
    assert open_rules["modp2048"] == horizon | {"transition-protection-past-2030"}


# What the books ask of search


def deep(values: dict[str, Any], absent: dict[str, Absent]) -> list[str]:
    """The facts in use that only factoring could settle."""
    used = facts_in_use(BOOKS, proven(values), absent, VOCABULARY)
    return [n for n in used if n.startswith(("group.", "generator.order", "generator.largest"))]


@pytest.mark.parametrize("protocol", PROTOCOLS)
def test_a_known_order_asks_for_no_factors(protocol):
    """With q declared and established, no book waits for factors of the cofactor."""
    values = GROUP24 | good_use(protocol, 256)
    absent = {
        name: UNDEFINED
        for name in VOCABULARY
        if name.startswith(("exponent.", "strength.")) and name not in values
    }

    assert deep(values, absent) == []


@pytest.mark.parametrize("protocol", PROTOCOLS)
def test_a_composite_modulus_asks_for_no_factors(protocol):
    """What presupposes a prime modulus does not apply, in any book."""
    values = good_use(protocol, 256) | {
        "modulus.nature": "composite",
        "modulus.length": 2048,
        "modulus.safe_prime": False,
        "modulus.standard_group": "none",
        "modulus.standard_match": "none",
        "generator.unit": True,
        "subgroup.declared": False,
        "strength.required_bits": 112,
    }

    assert deep(values, {}) == []
    assert deep(values | {"modulus.nature": "prime"}, {}) != []


# How clauses are known

SECONDARY_BOOKS = ("sp800-56a", "bsi-tr-02102")
NOT_CONFIRMED = {
    "sp800-56a-partial-check": "memory",
    "dsa-evidence-provable-primes": "memory",
    "tls-version-withdrawn": "memory",
    "dsa-sizes": "secondary",
    "dsa-evidence-probable-primes": "secondary",
    "dsa-generator-not-canonical": "secondary",
    "transition-protection-past-2035": "secondary",
    "transition-dsa-signing": "secondary",
}


def test_clauses_are_no_surer_than_their_sources():
    """Clauses known from texts that restate them say so, and so do those known from memory."""
    for book in OF_STANDARDS:
        usual = "secondary" if book.name in SECONDARY_BOOKS else "confirmed"
        for rule in book.rules:
            expected = NOT_CONFIRMED.get(rule.id, usual)
            assert (rule.id, rule.criterion.confidence) == (rule.id, expected)


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("sp800-56a", ("103", "110", "112", "p-2", "order q")),
        ("tls", ("103", "112", "RFC 10015")),
        ("ssh", ("2q", "RFC 9142", "RFC 8268")),
        ("ikev2", ("RFC 8247", "RFC 6989")),
        ("x942-cms", ("p-1", "SP 800-56A")),
        ("bsi-tr-02102", ("ECCG",)),
        ("transition", ("2030", "draft", "103")),
        ("fips186-dsa", ("FIPS 186-4", "FIPS 186-2")),
    ],
)
def test_notes_say_which_document_is_followed(name, words):
    """Where documents disagree the notes of the book name them and the choice."""
    (book,) = [book for book in BOOKS if book.name == name]
    notes = " ".join(book.notes)

    assert [word for word in words if word not in notes] == []
