"""Every candidate of the list has one entry: rules that exist, or the reason why it is none."""

import re
from typing import Any

import pytest

from auditor.data_files import data
from auditor.facts import vocabulary
from auditor.rulebooks.loading import available, load_all
from auditor.rulebooks.rulebook import GRADES
from auditor.strict_yaml import load

NUMBERS = range(1, 133)
STANDARD_BOOKS = (
    "bsi-tr-02102",
    "fips186-dsa",
    "ikev2",
    "sp800-56a",
    "ssh",
    "tls",
    "transition",
    "x942-cms",
)
KEYS_OF_REASON = {
    "not shown": {"because"},
    "needs a fact": {"because", "needs"},
    "duplicate": {"because", "of"},
    "unsure source": {"because"},
    "an outcome": {"because"},
}
KEYS_OF_RULES = {"left", "needs", "graded"}

FILE = load((data("rules") / "coverage" / "candidates.yaml").read_text("utf-8")).value
CANDIDATES: list[dict[str, Any]] = FILE["candidates"]
RULED = [candidate for candidate in CANDIDATES if "rules" in candidate]
WANTED: dict[str, dict[str, Any]] = FILE["facts"]
RULES = {rule.id: rule for book in load_all(available(), vocabulary()) for rule in book.rules}


def label(candidate: dict[str, Any]) -> str:
    return str(candidate["number"])


def test_each_number_stands_once():
    """The numbers 1 to 132 appear, each exactly once and in order."""
    assert [candidate["number"] for candidate in CANDIDATES] == list(NUMBERS)


@pytest.mark.parametrize("candidate", CANDIDATES, ids=label)
def test_a_candidate_is_a_rule_or_has_a_reason(candidate):
    """It names rules or a reason, not both, and nothing beside what belongs to either."""
    keys = set(candidate) - {"number", "about", "source", "listed"}

    assert candidate["about"]
    assert candidate["source"]
    assert candidate["listed"] in GRADES
    if "rules" in candidate:
        assert candidate["rules"]
        assert keys - {"rules"} <= KEYS_OF_RULES
        assert "needs" not in keys or "left" in keys
    else:
        assert keys - {"reason"} == KEYS_OF_REASON[candidate["reason"]]


@pytest.mark.parametrize("candidate", CANDIDATES, ids=label)
def test_what_a_candidate_names_exists(candidate):
    """Named rules are rules of shipped books, wanted facts are described."""
    for rule in (*candidate.get("rules", ()), *candidate.get("of", ())):
        assert rule in RULES
    for fact in candidate.get("needs", ()):
        assert fact in WANTED
    prose = " ".join(str(candidate.get(key, "")) for key in ("because", "left", "graded"))
    for word in re.findall(r"[a-z0-9]+(?:-[a-z0-9]+){2,}", prose):
        assert word in RULES


@pytest.mark.parametrize("candidate", RULED, ids=label)
def test_another_grade_than_the_listed_one_has_its_reason(candidate):
    """Where no rule has the grade the candidate was listed with, the entry says why."""
    grades = {RULES[rule].grade for rule in candidate["rules"]}

    assert ("graded" in candidate) == (candidate["listed"] not in grades)


@pytest.mark.parametrize("name", STANDARD_BOOKS)
def test_no_rule_comes_from_nowhere(name):
    """Every rule of the books on standards goes back to a candidate."""
    (book,) = load_all([name], vocabulary())
    named = {rule for candidate in RULED for rule in candidate["rules"]}

    assert {rule.id for rule in book.rules} <= named


def test_clauses_from_memory_stay_marked():
    """A rule that cites a clause which its candidate has from memory only says so."""
    marked = [candidate for candidate in RULED if "from memory" in candidate["source"]]
    rules = [rule for candidate in marked for rule in candidate["rules"]]

    assert rules == [
        "sp800-56a-partial-check",
        "dsa-evidence-provable-primes",
        "tls-version-withdrawn",
    ]
    assert {RULES[rule].criterion.confidence for rule in rules} == {"memory"}


def test_wanted_facts_are_still_wanted():
    """Each is needed by a candidate and not yet in the vocabulary: else the rule is due."""
    needed = {fact for candidate in CANDIDATES for fact in candidate.get("needs", ())}
    words = vocabulary()

    assert needed | {"provenance.declared"} == WANTED.keys()
    for name, wanted in WANTED.items():
        assert wanted["meaning"]
        assert wanted["kind"] in ("bool", "int", "real", "text")
        there = name in words and set(wanted.get("values", ())) <= set(words[name].values)
        assert not there, f"{name} is there: write the rules that need it"


def test_the_list_is_no_book():
    """What lies beside the books is not offered as one."""
    assert set(STANDARD_BOOKS) <= set(available())
    assert "candidates" not in available()
    assert "coverage" not in available()
