"""The SARIF report against the structure that the standard and the services that read it need."""

import json
import os
import re
from pathlib import Path
from typing import Any
from urllib.parse import unquote

import jsonschema_rs
import pytest

from auditor.report import sarif
from auditor.report.sarif import render
from auditor.report.text import HIDDEN, visible
from tests.report.records import FIXTURES, fixture, hostile_texts, with_text

SUBSET = Path(__file__).with_name("sarif_subset.schema.json")
SCHEMAS = [SUBSET, *filter(None, [os.environ.get("SARIF_SCHEMA")])]
"""Our own, and the published one where the environment names a copy of it."""

VALIDATORS = [
    jsonschema_rs.validator_for(json.loads(Path(path).read_text(encoding="utf-8")))
    for path in SCHEMAS
]


def run_of(record: dict[str, Any]) -> dict[str, Any]:
    """The one run of a record's log, after the log was found sound."""
    log = json.loads(render(record))
    for validator in VALIDATORS:
        validator.validate(log)
    (run,) = log["runs"]
    return run  # type: ignore[no-any-return]


@pytest.mark.parametrize("name", FIXTURES)
def test_the_log_is_sound(name: str) -> None:
    """For a full record, for one without a finding, and for one without a set."""
    run = run_of(fixture(name))
    findings = [f for s in fixture(name)["parameter_sets"] for f in s["findings"]]

    assert len(run["results"]) == len(findings)


def test_the_structure_check_can_fail() -> None:
    """A level where there is no failure, and a line zero, are both refused."""
    log = json.loads(render(fixture("harbour")))
    undecided = next(r for r in log["runs"][0]["results"] if r["kind"] == "open")
    undecided["level"] = "error"
    assert not VALIDATORS[0].is_valid(log)

    undecided["level"] = "none"
    assert VALIDATORS[0].is_valid(log)
    undecided["locations"][0]["physicalLocation"]["region"]["startLine"] = 0
    assert not VALIDATORS[0].is_valid(log)


def test_outcomes_and_grades_become_kinds_and_levels() -> None:
    """Nonconforming fails at the level of its grade; undetermined is open, without a level."""
    record = fixture("harbour")
    findings = [f for s in record["parameter_sets"] for f in s["findings"]]
    levels = {"major": "error", "minor": "warning", "observation": "note"}
    for finding, result in zip(findings, run_of(record)["results"], strict=True):
        if finding["outcome"] == "undetermined":
            assert (result["kind"], result["level"]) == ("open", "none")
        else:
            assert (result["kind"], result["level"]) == ("fail", levels[finding["grade"]])


def test_every_result_names_its_rule() -> None:
    """By id and by index, with the help that the rulebook gives."""
    run = run_of(fixture("harbour"))
    rules = run["tool"]["driver"]["rules"]

    assert run["results"]
    for result in run["results"]:
        assert rules[result["ruleIndex"]]["id"] == result["ruleId"]
    by_id = {rule["id"]: rule for rule in rules}
    assert "5.6.2.3.1" in by_id["received-values-confined"]["help"]["text"]
    assert "external/cwe/cwe-325" in by_id["received-values-confined"]["properties"]["tags"]


def test_fingerprints_survive_a_move_and_tell_findings_apart() -> None:
    """Other lines give the same fingerprints; no two results share one."""
    record = fixture("harbour")
    before = [r["partialFingerprints"] for r in run_of(record)["results"]]
    for item in record["parameter_sets"]:
        item["source"]["line"] += 7
    after = [r["partialFingerprints"] for r in run_of(record)["results"]]

    assert before == after
    assert len({f["primaryLocationLineHash"] for f in before}) == len(before)


def test_a_concession_is_a_suppression() -> None:
    """Accepted while in force, rejected when it has run out; the result stays."""
    record = fixture("harbour")
    concession = next(
        f["concession"] for s in record["parameter_sets"] for f in s["findings"] if f["concession"]
    )
    (accepted,) = [r["suppressions"][0] for r in run_of(record)["results"] if "suppressions" in r]
    concession["in_force"] = False
    (rejected,) = [r["suppressions"][0] for r in run_of(record)["results"] if "suppressions" in r]

    assert accepted["status"] == "accepted"
    assert concession["by"] in accepted["justification"]
    assert rejected["status"] == "rejected"


def test_what_could_not_be_read_is_a_notification() -> None:
    """With its place; an interrupted review was not successful."""
    run = run_of(fixture("nothing-read"))
    (invocation,) = run["invocations"]
    errors = [n for n in invocation["toolExecutionNotifications"] if n["level"] == "error"]

    assert not invocation["executionSuccessful"]
    assert len(errors) == 2
    region = errors[1]["locations"][0]["physicalLocation"]["region"]
    assert region == {"startLine": 7, "startColumn": 14}


def test_too_many_results_are_cut_and_counted(monkeypatch: pytest.MonkeyPatch) -> None:
    """What a service would refuse whole is sent in part, and the log says so."""
    monkeypatch.setattr(sarif, "MOST_RESULTS", 3)
    run = run_of(fixture("harbour"))
    notes = [n["message"]["text"] for n in run["invocations"][0]["toolExecutionNotifications"]]

    assert len(run["results"]) == 3
    assert any("results are left out" in note for note in notes)


def observed(count: int) -> dict[str, Any]:
    """A record with so many sets that differ in name, place and modulus alone."""
    record = fixture("harbour")
    first = next(
        item
        for item in record["parameter_sets"]
        if "observation" in {finding["grade"] for finding in item["findings"]}
    )
    record["parameter_sets"] = [
        first
        | {
            "id": f"primes#prime {line}",
            "name": f"prime {line}",
            "digest": f"{line:064x}",
            "source": {"path": "primes", "line": line, "column": 1},
        }
        for line in range(1, count + 1)
    ]
    return record


def test_an_observation_of_many_sets_is_one_result() -> None:
    """With all its places; what weighs more has a result for each set."""
    record = observed(30)
    results = run_of(record)["results"]
    (one,) = [result for result in results if result["properties"]["grade"] == "observation"]
    places = [one["locations"][0], *one["relatedLocations"]]

    assert [place["physicalLocation"]["region"]["startLine"] for place in places] == [*range(1, 31)]
    assert one["occurrenceCount"] == 30
    assert "and 29 other sets" in one["message"]["text"]
    heavier = [f for f in record["parameter_sets"][0]["findings"] if f["grade"] != "observation"]
    assert len(results) == 30 * len(heavier) + 1
    assert not any("relatedLocations" in result for result in results if result is not one)


@pytest.mark.parametrize("key", ["statement", "outcome", "concession", "purpose"])
def test_observations_that_differ_stay_apart(key: str) -> None:
    """In what they say, in the usage of their sets, or in what is conceded."""
    record = observed(5)
    last = record["parameter_sets"][4]
    if key == "purpose":
        last["declaration"] = last["declaration"] | {"purpose": "signature"}
    else:
        conceded = {"by": "us", "until": "2027-01-01", "reason": "old", "in_force": True}
        other = {"statement": "Else.", "outcome": "undetermined", "concession": conceded}[key]
        last["findings"] = [finding | {key: other} for finding in last["findings"]]
    results = run_of(record)["results"]
    found = [result for result in results if result["properties"]["grade"] == "observation"]

    assert [result.get("occurrenceCount", 1) for result in found] == [4, 1]


def test_a_remedy_or_value_of_one_set_is_not_said_of_all() -> None:
    """What differs is left to the record."""
    record = observed(5)
    last = record["parameter_sets"][4]
    last["findings"] = [
        finding
        | {
            "remedy": {"text": "Mend this one.", "breaks": [], "patch": None},
            "values": finding["values"] | {"modulus.length": 1},
        }
        for finding in last["findings"]
    ]
    results = run_of(record)["results"]
    (one,) = [result for result in results if result["properties"]["grade"] == "observation"]

    assert "Remedy: each set has its own" in one["message"]["text"]
    assert "Mend this one" not in one["message"]["text"]
    assert one["properties"]["values"].get("modulus.length") != "1"


def test_more_places_than_a_service_takes_are_more_results(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """No place is left out."""
    monkeypatch.setattr(sarif, "MOST_PLACES", 4)
    results = run_of(observed(10))["results"]
    found = [result for result in results if result["properties"]["grade"] == "observation"]

    assert [result["occurrenceCount"] for result in found] == [4, 4, 2]


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_stays_text(text: str) -> None:
    """Nothing hidden, no placeholder, no link; the text is in the messages and in the address."""
    record = with_text(text)
    source = render(record)
    run = run_of(record)
    shown = visible(text)
    literal = shown.replace("{", "{{").replace("}", "}}").replace("](", "] (")

    assert not re.search(HIDDEN, source.replace("\n", ""))
    assert all(literal in result["message"]["text"] for result in run["results"])
    uri = run["results"][0]["locations"][0]["physicalLocation"]["artifactLocation"]["uri"]
    assert shown.replace("\\", "/") in unquote(uri)
    source.encode("utf-8")
