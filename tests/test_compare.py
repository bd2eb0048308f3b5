"""Two reports compared: what is new, what is settled, what only the owner's word has removed."""

import copy
import io
import secrets
from functools import cache
from typing import Any

import pytest

from auditor.compare import Change, Comparison, compare
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from tests.robustness.edits import DOCUMENT

RUN = RunValues("2026-12-01", "quick")
THRESHOLDS = ("hold", "open", "conditions", "never")

SET = """\
auditor: 1
parameter_sets:
  - name: link
    purpose: key-agreement
    modulus: {group: rfc5114-2048-256}
    exponent: {bits: 256, use: static}
    peer_check: []
"""
CHECKED = SET.replace("peer_check: []", "peer_check: [range, membership]")
SILENT = SET.replace("    peer_check: []\n", "")
ELSEWHERE = SET.replace("rfc5114-2048-256", "ffdhe2048")


@cache
def original() -> dict[str, Any]:
    """A review of 256-bit sets."""
    return review([str(DOCUMENT)], RUN, Surroundings(secrets.randbelow))


def changed() -> dict[str, Any]:
    """A copy to change."""
    return copy.deepcopy(original())


@cache
def reviewed(text: str) -> dict[str, Any]:
    """A review of a document from standard input."""
    return review(["-"], RUN, Surroundings(secrets.randbelow), stdin=io.BytesIO(text.encode()))


def conceded(record: dict[str, Any], *, in_force: bool) -> dict[str, Any]:
    """The record with a concession beside every finding."""
    member = {
        "reason": "replaced in March",
        "by": "head of port systems",
        "until": "2027-03-31",
        "in_force": in_force,
        "grade": "major",
        "requirement": "strength.sufficient",
        "granted": {},
    }
    record = copy.deepcopy(record)
    for item in record["parameter_sets"]:
        for finding in item["findings"]:
            finding["concession"] = dict(member)
    return record


def of_kind(found: Comparison, kind: str) -> list[Change]:
    """The changes of that kind."""
    return [change for change in found.changes if change.kind == kind]


def verdicts(found: Comparison) -> list[bool]:
    """Whether it fails at each threshold."""
    return [found.fails(threshold) for threshold in THRESHOLDS]


def test_equal_reports_differ_in_nothing() -> None:
    """All sets are unchanged and nothing fails."""
    found = compare(original(), changed())

    assert (found.run, found.sets, found.unchanged) == ((), (), 5)
    assert not any(verdicts(found))


def test_a_usage_that_improves_a_result_counts_as_new() -> None:
    """The integers are the same, a check was declared: each finding that went is listed as new, at
    the position that it led to, with what was changed."""
    found = compare(reviewed(SET), reviewed(CHECKED))
    new = of_kind(found, "new")

    assert {change.level for change in new} >= {"hold", "conditions"}
    assert all(change.reason == "peer_check changed, the integers did not" for change in new)
    assert any("(confinement-work), now" in change.text for change in new)
    assert not of_kind(found, "settled")
    assert verdicts(found) == [True, True, True, False]


def test_an_answer_to_an_open_question_counts_as_new() -> None:
    """Nobody had said whether values are checked: undecided then, decided by a word now."""
    found = compare(reviewed(SILENT), reviewed(CHECKED))

    assert {c.level for c in of_kind(found, "new")} & {"hold", "open", "conditions"}
    assert verdicts(found) == [False, True, True, False]


def test_an_undetermined_finding_that_was_on_hold_counts_at_hold() -> None:
    """Saying less about the usage is no way out of a nonconformity."""
    found = compare(reviewed(SET), reviewed(SILENT))
    bought = [change for change in of_kind(found, "new") if "undetermined" in change.text]

    assert any(change.level == "hold" and change.reason for change in bought)
    assert found.fails("hold")


def test_other_integers_settle() -> None:
    """A safe prime in place of the group: what went is settled, and nothing is new."""
    found = compare(reviewed(SET), reviewed(ELSEWHERE))

    assert any("(confinement-work), now" in change.text for change in of_kind(found, "settled"))
    assert all(not change.reason for change in found.changes)
    assert not found.fails("hold")


def test_factors_that_were_declared_and_checked_settle() -> None:
    """They are proven, not believed: with them alone an undecided finding is settled."""
    then, now = copy.deepcopy(reviewed(SET)), copy.deepcopy(reviewed(SET))
    item = now["parameter_sets"][0]
    gone = next(f for f in item["findings"] if f["grade"] == "major")
    item["findings"].remove(gone)
    item["outcomes"][gone["rule"]] = "conforming"
    item["declaration"]["known_factors"] = [2]
    item["digest"] = "0" * 64
    (change,) = of_kind(compare(then, now), "settled")

    assert gone["rule"] in change.text
    item["declaration"]["protect_until"] = 2030
    assert compare(then, now).fails("hold")


@pytest.mark.parametrize("verified", [True, False])
def test_an_origin_is_a_word_until_it_is_regenerated(verified: bool) -> None:
    """A seed that gives the numbers again is evidence; one that does not is a word."""
    then, now = copy.deepcopy(reviewed(SET)), copy.deepcopy(reviewed(SET))
    item = now["parameter_sets"][0]
    gone = next(f for f in item["findings"] if f["grade"] == "major")
    item["findings"].remove(gone)
    item["declaration"]["provenance"] = {"method": "other", "text": "drawn by us"}
    item["digest"] = "0" * 64
    item["facts"]["provenance.verified"] = {"value": verified}
    found = compare(then, now)

    assert found.fails("hold") is not verified


def test_what_gets_worse_is_new() -> None:
    """Findings that were not there, and an undetermined one that is a nonconformity now."""
    there = compare(reviewed(CHECKED), reviewed(SET))
    firmer = compare(reviewed(SILENT), reviewed(SET))

    assert verdicts(there) == verdicts(firmer) == [True, True, True, False]
    assert any("was major undetermined" in change.text for change in of_kind(firmer, "new"))
    assert all(not change.reason for change in there.changes)


NARROW = """\
auditor: 1
parameter_sets:
  - name: link
    purpose: key-agreement
    modulus: {group: modp1024}
    exponent: {bits: 160, use: single}
    peer_check: [range]
"""


def test_a_finding_whose_values_get_worse_is_new() -> None:
    """An exponent of 32 bits for one of 160: the same rules object, for far less work."""
    narrow, narrower = reviewed(NARROW), reviewed(NARROW.replace("160", "32"))
    rules = [
        {f["rule"]: f["outcome"] for f in record["parameter_sets"][0]["findings"]}
        for record in (narrow, narrower)
    ]
    worse, better = compare(narrow, narrower), compare(narrower, narrow)

    assert rules[0] == rules[1]
    assert verdicts(worse) == [True, True, True, False]
    assert any("strength.work_bits was 79.99 and is 17" in c.text for c in of_kind(worse, "new"))
    assert not of_kind(better, "new")


def with_values(old: dict[str, Any], new: dict[str, Any], *, declared: bool) -> Comparison:
    """A report beside one whose deciding finding shows other values, of a set that was declared
    otherwise or not."""
    records = [copy.deepcopy(reviewed(NARROW)) for _ in range(2)]
    for record, values in zip(records, (old, new), strict=True):
        (item,) = record["parameter_sets"]
        finding = next(f for f in item["findings"] if f["rule"] == item["decided_by"])
        finding["values"] = values
    if declared:
        records[1]["parameter_sets"][0]["declaration"]["required_strength"] = 100
    return compare(*records)


WORK, LEAK, LENGTH = "strength.work_bits", "exponent.public_leak_bits_at_least", "modulus.length"


@pytest.mark.parametrize(
    ("old", "new", "declared", "worse"),
    [
        ({WORK: 60.0}, {WORK: 59.9}, False, True),
        ({WORK: 60.0}, {WORK: 60.1}, False, False),
        ({LEAK: 1.0}, {LEAK: 2.0}, False, True),
        ({LEAK: 2.0}, {LEAK: 1.0}, True, False),
        ({WORK: 60.0, LEAK: 1.0}, {WORK: 70.0, LEAK: 2.0}, True, True),
        ({LENGTH: 1024}, {LENGTH: 512}, True, True),
        ({LENGTH: 1024}, {}, True, True),
        ({LENGTH: 1024, WORK: 60.0}, {LENGTH: 1536, WORK: 70.0}, True, False),
        ({LENGTH: 1024}, {LENGTH: 512}, False, False),
        ({"run.year": 2026}, {"run.year": 2027}, True, False),
        ({WORK: 60.0}, {WORK: 60.0}, True, False),
    ],
)
def test_what_worse_values_are(
    old: dict[str, Any], new: dict[str, Any], declared: bool, worse: bool
) -> None:
    """Less work, more leaked. Of a set that was declared otherwise, any difference that nobody can
    order counts, unless another value got better; of the same set it is the progress of search."""
    assert with_values(old, new, declared=declared).fails("hold") is worse


def test_other_values_are_not_called_worse() -> None:
    """Nobody knows, and an observation objects to neither."""
    other = with_values({LENGTH: 1024}, {LENGTH: 1536}, declared=True)
    checked = compare(reviewed(SET), reviewed(CHECKED))

    assert [c.text.split(", ")[1] for c in of_kind(other, "new")] == [
        "on other values: modulus.length was 1024 and is 1536"
    ]
    assert not any(c.level == "no objection" for c in of_kind(checked, "new"))


def test_a_concession_counts_as_new() -> None:
    """Granted, it is new with who granted it; withdrawn or run out, the finding counts again."""
    bare, granted = reviewed(SET), conceded(reviewed(SET), in_force=True)
    out = conceded(reviewed(SET), in_force=False)

    for found in (compare(bare, granted), compare(out, granted)):
        assert verdicts(found) == [True, True, True, False]
        assert {c.reason for c in found.changes} == {
            "conceded until 2027-03-31 by head of port systems: replaced in March"
        }
    for found in (compare(granted, bare), compare(granted, out)):
        assert found.fails("hold")
        assert all("no longer conceded" in change.text for change in found.changes)


def test_a_concession_that_is_extended_is_a_change() -> None:
    """It was in force and still is."""
    granted = conceded(reviewed(SET), in_force=True)
    later = copy.deepcopy(granted)
    later["parameter_sets"][0]["findings"][0]["concession"]["until"] = "2028-03-31"
    (change,) = compare(granted, later).changes

    assert (change.kind, "until 2028-03-31" in change.text) == ("changed", True)


def test_another_name_hides_nothing() -> None:
    """A set that was renamed is the same set, also when its usage was changed with the name."""
    renamed = compare(reviewed(SET), reviewed(SET.replace("link", "bridge")))
    (item,) = renamed.sets
    assert [change.text for change in item.changes] == ["was -#link"]
    assert not renamed.fails("conditions")

    disguised = compare(reviewed(SET), reviewed(CHECKED.replace("link", "bridge")))
    assert disguised.fails("hold")


def test_sets_come_and_go() -> None:
    """By their ids; a new one counts by its position, one that is gone does not."""
    fewer = changed()
    removed = fewer["parameter_sets"].pop()
    gone, added = compare(original(), fewer), compare(fewer, original())

    assert gone.sets[0].changes[0].text == f"set gone, was {removed['position']}"
    assert not gone.fails("conditions")
    assert added.sets[0].identity == removed["id"]
    assert added.sets[0].changes[0].text.startswith(f"new set, {removed['position']}")
    assert added.sets[0].changes[0].level == removed["position"]


def test_a_file_that_is_no_longer_read_is_new_and_open() -> None:
    """Its sets are gone, which is no improvement."""
    broken = changed()
    broken["parameter_sets"].pop()
    broken["errors"].append({"path": "a.yaml", "line": 1, "column": 1, "message": "not YAML"})
    found = compare(original(), broken)

    assert "a.yaml: not YAML" in found.run[0].text
    assert verdicts(found) == [False, True, True, False]
    assert not any(verdicts(compare(broken, broken)))


def test_run_and_books() -> None:
    """What else may explain a difference is said first; a rule that left is not settled."""
    other = changed()
    other["run"]["effort"] = "standard"
    other["rulebooks"][0]["sha256"] = "0" * 64
    other["rulebooks"].pop()
    gone = other["parameter_sets"][0]["findings"].pop()
    del other["parameter_sets"][0]["outcomes"][gone["rule"]]
    found = compare(original(), other)
    texts = [change.text for change in found.run]

    assert texts[0] == "effort quick to standard"
    assert any(text.endswith("changed") for text in texts)
    assert any(text.endswith("removed") for text in texts)
    assert [c.kind for c in found.sets[0].changes] == ["changed"]
    assert found.sets[0].changes[0].text.endswith("now no longer judged")


def test_values_are_listed_strengths_first() -> None:
    """What moved, what came, what went, with the reason where it went."""
    other = changed()
    facts = other["parameter_sets"][0]["facts"]
    facts["strength.work_bits_at_most"]["value"] += 10
    facts["group.order_bits"] = facts.pop("modulus.length")
    (item,) = compare(original(), other).sets

    assert item.facts[0].startswith("strength.work_bits_at_most ")
    assert any(text.startswith("modulus.length is no longer established") for text in item.facts)
