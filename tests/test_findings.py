"""Outcomes, positions, the finding that decides, and which facts are still in use."""

from random import Random

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.standing import Standing
from auditor.facts.base import Absent, Fact, FactType
from auditor.questions import Asks, Question
from auditor.rulebooks.findings import show_value
from auditor.rulebooks.judging import facts_in_use, facts_named, judge, waiting
from auditor.rulebooks.loading import load
from tests.vocabulary_of_the_contract import VOCABULARY

RULE = """\
  - id: {id}
    title: The {id} is wrong
    defect: {id}
    grade: {grade}
    applies: "{applies}"
    requires: "{requires}"
    statement: "{statement}"
    why: One. Two.
    criterion: {{document: d, clause: "1", word: shall, confidence: confirmed}}
    remedy: Mend it.
    examples: {{conforming: [{{}}], nonconforming: [{{}}], undetermined: [{{}}]}}
"""
PRIME = Question(Asks.PRIMALITY, (7,))
ORDER = Question(Asks.ORDER, (7, 3))
UNDECLARED = Absent("undeclared", keys=("purpose",))
UNDEFINED = Absent("undefined")


def fact(value, tight=True, questions=()):
    return Fact(value, Standing.PROVEN, tight, questions=questions)


@pytest.fixture
def book(tmp_path):
    """A function that makes a book of rules, each given as id, requirement and more."""

    def make(*rules: dict[str, str], name: str = "book", gate: str = "true"):
        text = f'rulebook: 1\nname: {name}\ntitle: T\napplies: "{gate}"\nvalues: {{least: 112}}\n'
        text += "documents: {d: {title: D, date: 2026}}\nrules:\n"
        for rule in rules:
            defaults = {"grade": "major", "applies": "true", "statement": "It is. {values.least}"}
            text += RULE.format(**(defaults | rule))
        path = tmp_path / f"{name}.yaml"
        path.write_text(text, "utf-8")
        return load(path, VOCABULARY)

    return make


def judged(books, facts, absent=None):
    return judge(books, facts, absent or {}, VOCABULARY)


def rule(rule_id: str, requires: str, **more: str) -> dict[str, str]:
    return {"id": rule_id, "requires": requires, **more}


TRUE, FALSE = fact(True), fact(False)


@pytest.mark.parametrize(
    ("applies", "requires", "outcome"),
    [
        (TRUE, TRUE, "conforming"),
        (TRUE, FALSE, "nonconforming"),
        (TRUE, None, "undetermined"),
        (TRUE, UNDECLARED, "undetermined"),
        (TRUE, UNDEFINED, "not applicable"),
        (FALSE, TRUE, "not applicable"),
        (FALSE, FALSE, "not applicable"),
        (FALSE, None, "not applicable"),
        (UNDEFINED, FALSE, "not applicable"),
        (UNDEFINED, None, "not applicable"),
        (None, TRUE, "conforming"),
        (None, FALSE, "undetermined"),
        (None, None, "undetermined"),
        (None, UNDEFINED, "not applicable"),
        (UNDECLARED, FALSE, "undetermined"),
    ],
)
def test_outcomes(book, applies, requires, outcome):
    """A rule holds where it does not apply or its requirement is true, in three-valued logic."""
    given_facts = {"generator.unit": applies, "group.cyclic": requires}
    facts = {name: value for name, value in given_facts.items() if isinstance(value, Fact)}
    absent = {name: value for name, value in given_facts.items() if isinstance(value, Absent)}
    books = [book(rule("r", "group.cyclic", applies="generator.unit"))]
    judgement = judged(books, facts, absent)

    assert judgement.outcomes == {"r": outcome}
    assert [finding.outcome for finding in judgement.findings] == [outcome] * (
        outcome in ("nonconforming", "undetermined")
    )


def test_a_finding_shows_and_misses(book):
    """A finding carries the rule's words, the present facts it shows and the absent ones."""
    books = [
        book(
            rule(
                "r",
                "generator.unit && strength.work_bits_at_most >= values.least",
                statement="{strength.work_bits_at_most} bits, {modulus.length}, {group.cyclic}",
            )
        )
    ]
    facts = {
        "generator.unit": TRUE,
        "strength.work_bits_at_most": fact(80.456),
        "modulus.length": fact(1024),
    }
    found = judged(books, facts).findings[0]

    assert found.statement == "80.46 bits, 1024, not established"
    assert list(found.values) == ["generator.unit", "strength.work_bits_at_most", "modulus.length"]
    assert found.missing == {}
    assert (found.book, found.rule, found.grade, found.work) == ("book", "r", "major", 80.456)
    assert found.criterion.document.title == "D"


def test_an_undetermined_finding_asserts_nothing(book):
    """Its sentence says what is open, for which reasons, and nothing of the rule's statement."""
    books = [
        book(
            rule(
                "r",
                "generator.unit && strength.work_bits_at_most >= 112",
                applies="usage.purpose == 'signature'",
                statement="Broken, {values.least}.",
            )
        )
    ]
    facts = {"generator.unit": TRUE, "strength.work_bits_at_most": fact(113.0, False, (ORDER,))}
    found = judged(books, facts, {"usage.purpose": UNDECLARED}).findings[0]

    assert found.statement == (
        "Not decided yet: “The r is wrong”. The declaration does not say: purpose. "
        "Search may still move: "
        "strength.work_bits_at_most, at most 113.00."
    )
    assert found.missing == {
        "usage.purpose": UNDECLARED,
        "strength.work_bits_at_most": Absent("unsettled", questions=(ORDER,)),
    }
    assert (found.questions, found.keys) == ((ORDER,), ("purpose",))


def grades(*pairs: tuple[str, Fact | None]):
    """Rules of these grades over facts of these values, as books and facts."""
    names = ("generator.unit", "group.cyclic", "generator.trivial")
    rules = [rule(f"r{i}", names[i], grade=grade) for i, (grade, _) in enumerate(pairs)]
    return rules, {names[i]: value for i, (_, value) in enumerate(pairs) if value}


@pytest.mark.parametrize(
    ("pairs", "position", "decided_by"),
    [
        ((("major", FALSE), ("major", None)), "hold", "r0"),
        ((("major", None), ("major", FALSE)), "hold", "r1"),
        ((("minor", FALSE), ("major", FALSE)), "hold", "r1"),
        ((("major", FALSE), ("major", FALSE)), "hold", "r0"),
        ((("minor", FALSE), ("major", None)), "open", "r1"),
        ((("minor", None), ("minor", FALSE)), "conditions", "r1"),
        ((("minor", None), ("observation", FALSE)), "conditions", "r0"),
        ((("major", TRUE), ("minor", FALSE)), "conditions", "r1"),
        ((("observation", FALSE), ("observation", None)), "no objection", None),
        ((("major", TRUE), ("minor", TRUE)), "no objection", None),
        ((), "open", None),
    ],
)
def test_positions(book, pairs, position, decided_by):
    """The first position that holds, and the finding that leads to it."""
    rules, facts = grades(*pairs)
    judgement = judged([book(*rules)] if rules else [], facts)

    assert judgement.position == position
    assert (judgement.decided_by and judgement.decided_by.rule) == decided_by


def test_the_least_work_decides_within_a_book(book):
    """Of findings alike in grade, structure comes first, then the route with the least work."""
    structure = book(rule("structure", "generator.unit"), name="structure")
    strength = book(
        rule("plain", "group.cyclic"),
        rule("modulus", "strength.work_bits_at_most >= 112"),
        rule("exponent", "strength.short_exponent_bits_at_most >= 112"),
        rule("required", "strength.required_bits < 1"),
        name="strength",
    )
    facts = {
        "group.cyclic": FALSE,
        "strength.work_bits_at_most": fact(80.0),
        "strength.short_exponent_bits_at_most": fact(64.0, tight=False),
        "strength.required_bits": fact(1),
    }
    books = [structure, strength]

    assert judged(books, facts | {"generator.unit": TRUE}).decided_by.rule == "exponent"
    assert judged(books, facts | {"generator.unit": FALSE}).decided_by.rule == "structure"
    equal = facts | {"generator.unit": TRUE, "strength.work_bits_at_most": fact(64.0)}
    assert judged(books, equal).decided_by.rule == "modulus"


def test_open_findings_are_decided_by_order(book):
    """A bound that may still fall does not rank findings that are themselves open."""
    books = [
        book(
            rule("first", "group.cyclic"),
            rule("second", "strength.confinement_bits_at_most >= 112"),
        )
    ]
    facts = {"strength.confinement_bits_at_most": fact(113.0, tight=False)}

    assert judged(books, facts).decided_by.rule == "first"


def test_gates(book):
    """A book with an open gate is left out and says why; one with a shut gate does not apply."""
    gated = book(rule("r", "generator.unit"), gate="usage.protocol == 'ssh'")
    absent = {"usage.protocol": Absent("undeclared", keys=("protocol",))}

    left_out = judged([gated], {"generator.unit": FALSE}, absent)
    assert left_out.outcomes == {}
    assert left_out.books_left_out[0].name == "book"
    assert "The declaration does not say: protocol" in left_out.books_left_out[0].why
    assert left_out.books_left_out[0].missing == absent
    shut = judged([gated], {"generator.unit": FALSE, "usage.protocol": fact("cms")})
    assert (shut.outcomes, shut.books_left_out) == ({"r": "not applicable"}, ())
    undefined = judged([gated], {"generator.unit": FALSE}, {"usage.protocol": UNDEFINED})
    assert undefined.outcomes == {"r": "not applicable"}
    opened = judged([gated], {"generator.unit": FALSE, "usage.protocol": fact("ssh")})
    assert opened.position == "hold"


def test_findings_wait_together(book):
    """Undetermined findings with the same questions and keys stand in one group."""
    books = [
        book(
            rule("a", "generator.unit"),
            rule("b", "generator.order_prime"),
            rule("c", "generator.order_even"),
            rule("d", "usage.peer_range"),
            rule("e", "group.cyclic"),
        )
    ]
    absent = {
        "generator.unit": Absent("unsettled", questions=(PRIME,)),
        "generator.order_prime": Absent("unsettled", questions=(ORDER,)),
        "generator.order_even": Absent("unsettled", questions=(ORDER,)),
        "usage.peer_range": Absent("undeclared", keys=("peer_check",)),
    }
    groups = waiting(judged(books, {"group.cyclic": FALSE}, absent).findings)

    assert [(group.questions, group.keys) for group in groups] == [
        ((PRIME,), ()),
        ((ORDER,), ()),
        ((), ("peer_check",)),
    ]
    assert [[finding.rule for finding in group.findings] for group in groups] == [
        ["a"],
        ["b", "c"],
        ["d"],
    ]


def in_use(books, facts, absent=None):
    return facts_in_use(books, facts, absent or {}, VOCABULARY)


def test_facts_in_use(book):
    """Only what could still change an outcome is in use."""
    books = [
        book(
            rule(
                "r",
                "!usage.exponent_reused || exponent.confinement_leak_bits_at_least <= 1.0",
                applies="usage.purpose == 'key-agreement'",
            ),
            gate="usage.protocol == 'ssh'",
        )
    ]
    leak = "exponent.confinement_leak_bits_at_least"
    ssh = {"usage.protocol": fact("ssh")}
    agreed = {**ssh, "usage.purpose": fact("key-agreement")}
    reused = {**agreed, "usage.exponent_reused": TRUE}

    assert facts_named(books) == (
        leak,
        "usage.exponent_reused",
        "usage.protocol",
        "usage.purpose",
    )
    assert in_use(books, {}) == ("usage.protocol",)
    assert in_use(books, {"usage.protocol": fact("cms")}) == ()
    assert in_use(books, ssh) == (leak, "usage.exponent_reused", "usage.purpose")
    assert in_use(books, {**ssh, "usage.purpose": fact("signature")}) == ()
    assert in_use(books, agreed) == (leak, "usage.exponent_reused")
    assert in_use(books, {**agreed, "usage.exponent_reused": FALSE}) == ()
    assert in_use(books, reused) == (leak,)
    assert in_use(books, reused | {leak: fact(0.5, tight=False)}) == (leak,)
    assert in_use(books, reused | {leak: fact(0.5)}) == ()
    assert in_use(books, reused | {leak: fact(18.8, tight=False)}) == ()
    assert in_use(books, reused, {leak: UNDEFINED}) == ()


SHIPPED = [load(name, VOCABULARY) for name in ("group-structure", "strength")]
SAMPLES = {"bool": (True, False), "int": (0, 80, 112, 224, 2048), "real": (0.0, 1.0, 80.0, 112.0)}


def any_facts(random: Random) -> tuple[dict[str, Fact], dict[str, Fact]]:
    """Facts for every name in the shipped books, and some of them."""
    facts: dict[str, Fact] = {}
    for name in facts_named(SHIPPED):
        word = VOCABULARY[name]
        facts[name] = fact(random.choice(SAMPLES.get(word.kind) or word.values or ("none",)))
    return facts, {name: value for name, value in facts.items() if random.random() < 0.7}


def test_nothing_judged_is_no_pass(book):
    """A set that no requirement applies to is open, with nothing that decides it."""
    idle = book(rule("r", "generator.unit", applies="group.cyclic"))
    judgement = judged([idle], {"generator.unit": TRUE, "group.cyclic": FALSE})

    assert judgement.outcomes == {"r": "not applicable"}
    assert (judgement.position, judgement.decided_by) == ("open", None)


def settled(outcomes) -> dict[str, bool | None]:
    """Whether a rule is broken; None while that is open."""
    return {
        rule: None if o == "undetermined" else o == "nonconforming" for rule, o in outcomes.items()
    }


@given(st.integers(0, 2**32))
def test_no_answer_about_other_facts_changes_an_outcome(seed):
    """Answers about facts that are not in use leave every rule as it was."""
    facts, some = any_facts(Random(seed))
    used = in_use(SHIPPED, some)
    idle = {name: value for name, value in facts.items() if name not in used}

    assert settled(judged(SHIPPED, some | idle).outcomes) == settled(judged(SHIPPED, some).outcomes)
    assert set(used).isdisjoint(some)


@given(st.integers(0, 2**32))
def test_more_facts_only_settle(seed):
    """A rule that is broken or unbroken stays so when more facts become known."""
    facts, some = any_facts(Random(seed))
    before, after = (
        settled(judged(SHIPPED, some).outcomes),
        settled(judged(SHIPPED, facts).outcomes),
    )

    assert {rule: after[rule] for rule in before if before[rule] is not None} == {
        rule: broken for rule, broken in before.items() if broken is not None
    }
    assert None not in after.values()


@pytest.mark.parametrize(
    ("kind", "value", "shown"),
    [
        ("bool", True, "yes"),
        ("bool", False, "no"),
        ("real", 79.99, "79.99"),
        ("real", 112.0, "112.00"),
        ("int", 2048, "2048"),
        ("text", "dsa", "dsa"),
        ("exhibit", [], "none"),
        ("exhibit", [[2, 1], [3, 2]], "2, 3^2"),
        ("exhibit", [2**2000, 6], "0x100000000000…00000000 (2001 bits), 6"),
        ("exhibit", list(range(10)), "0, 1, 2, 3, 4, 5, 6, 7 and 2 more"),
        ("exhibit", "0x" + "f" * 100, "0x" + "f" * 57 + "…"),
    ],
)
def test_values_in_sentences(kind, value, shown):
    """Reals have two decimals, big integers show both ends, long lists their beginning."""
    assert show_value(FactType("a.b", kind, ""), value) == shown
