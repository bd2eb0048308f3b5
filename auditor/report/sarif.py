"""The findings as SARIF 2.1.0, for services that show results beside the code.

OASIS, Static Analysis Results Interchange Format 2.1.0, errata 01. A nonconformity is a result of
kind ``fail`` whose level follows the grade; what could not be decided is of kind ``open``, which
is the specification's word for too little information (3.27.9). What conforms is left out: some
services show every result as an alert, whatever its kind. An observation that is equal for several
sets is one result, with the number of its occurrences and the other places as related ones:
``locations`` may not hold what can be mended in each place by itself (3.27.12, from memory).
"""

import json
from collections.abc import Iterator, Mapping, Sequence
from hashlib import sha256
from typing import Any
from urllib.parse import quote

from auditor.report.text import clipped
from auditor.report.view import Record, View, view
from auditor.report.words import (
    CONFIDENCE_MEANING,
    POSITIONS,
    outcome,
    plain_value,
    plural,
    usage,
)

LEVELS: Mapping[str, str] = {"major": "error", "minor": "warning", "observation": "note"}
SEVERITY: Mapping[str, str] = {"major": "8.0", "minor": "5.0", "observation": "2.0"}
"""What some services sort by, as text above 0."""

MOST_RESULTS = 25_000
"""What a widely used service accepts in one run; the notifications say how many are left out."""

MOST_PLACES = 1_000
"""What such a service accepts with one result; an observation of more sets is more results."""

_DESCRIPTION = 1_024
_SCHEMA = (
    "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
)


def render(record: Record | View) -> str:
    """A SARIF log with one run: a result for every finding of every set, equal observations as one,
    in record order."""
    shown = view(record).record
    rules = {rule: text for book in shown["rulebooks"] for rule, text in book["rules"].items()}
    named = sorted(rules)
    index = {rule: number for number, rule in enumerate(named)}
    results = list(_results(shown, index))
    run = {
        "tool": {"driver": _driver(shown, rules, named)},
        "automationDetails": {"id": "group-parameters/"},
        "columnKind": "unicodeCodePoints",
        "invocations": [_invocation(shown, len(results))],
        "artifacts": [_artifact(item) for item in shown["inputs"]],
        "results": results[:MOST_RESULTS],
        "properties": {"run": shown["run"], "cautions": shown["cautions"]},
    }
    log = {"$schema": _SCHEMA, "version": "2.1.0", "runs": [run]}
    return json.dumps(log, ensure_ascii=False, allow_nan=False, indent=1) + "\n"


def _driver(shown: Record, rules: Mapping[str, Record], named: list[str]) -> dict[str, Any]:
    return {
        "name": shown["tool"]["name"],
        "semanticVersion": shown["tool"]["version"],
        "rules": [_descriptor(rule, rules[rule]) for rule in named],
    }


def _descriptor(rule: str, text: Record) -> dict[str, Any]:
    criterion = text["criterion"]
    doubt = CONFIDENCE_MEANING[criterion["confidence"]]
    source = ", ".join(filter(None, [criterion["title"], criterion["clause"], doubt]))
    help_text = f"{text['why']} Criterion: {source} ({criterion['word']})."
    tags = ["security", text["defect"], *(f"external/cwe/cwe-{number}" for number in text["cwe"])]
    return {
        "id": rule,
        "shortDescription": {"text": _message(clipped(text["title"], _DESCRIPTION))},
        "fullDescription": {"text": _message(clipped(text["why"] or text["title"], _DESCRIPTION))},
        "help": {"text": _message(" ".join([help_text, *text["references"]]))},
        "defaultConfiguration": {"level": LEVELS[text["grade"]]},
        "properties": {
            "tags": tags[:20],
            "security-severity": SEVERITY[text["grade"]],
            "requires": text["requires"],
        },
    }


_Found = tuple[Record, Record]
"""A set and one of its findings."""


def _results(shown: Record, index: Mapping[str, int]) -> Iterator[dict[str, Any]]:
    """A result for each finding of each set in record order, equal observations in the place of
    the first."""
    groups: dict[object, list[_Found]] = {}
    for parameter_set in shown["parameter_sets"]:
        for finding in parameter_set["findings"]:
            groups.setdefault(_key(parameter_set, finding), []).append((parameter_set, finding))
    for group in groups.values():
        for start in range(0, len(group), MOST_PLACES):
            yield _result(group[start : start + MOST_PLACES], index)


def _key(parameter_set: Record, finding: Record) -> object:
    """What is equal for the findings of one result: of an observation what it says, how the set is
    used, and whether it is conceded; every other finding has a result of its own."""
    if finding["grade"] != "observation":
        return parameter_set["id"], finding["rule"]
    said = finding["rule"], finding["outcome"], finding["statement"], *finding["cautions"]
    conceded = json.dumps(finding["concession"], sort_keys=True)
    return said, usage(parameter_set["declaration"]), conceded


def _result(group: Sequence[_Found], index: Mapping[str, int]) -> dict[str, Any]:
    parameter_set, finding = group[0]
    rule = finding["rule"]
    fails = finding["outcome"] == "nonconforming"
    print_of_place = sha256(f"{rule}\n{parameter_set['id']}".encode()).hexdigest()
    result: dict[str, Any] = {
        "ruleId": rule,
        "kind": "fail" if fails else "open",
        "level": LEVELS[finding["grade"]] if fails else "none",
        "message": {"text": _message(_text(group))},
        "locations": [_location(parameter_set)],
        "partialFingerprints": {
            "primaryLocationLineHash": print_of_place[:32],
            "parameterSet/v1": parameter_set["digest"],
        },
        "properties": {
            "grade": finding["grade"],
            "defect": finding["defect"],
            "position": min((other["position"] for other, _ in group), key=POSITIONS.index),
            "values": _common_values(group),
            "missing": finding["missing"],
        },
    }
    if len(group) > 1:
        result["occurrenceCount"] = len(group)
        result["relatedLocations"] = [_location(other) for other, _ in group[1:]]
    if rule in index:
        result["ruleIndex"] = index[rule]
    if concession := finding["concession"]:
        result["suppressions"] = [_suppression(concession)]
    return result


def _common_values(group: Sequence[_Found]) -> dict[str, str]:
    """The values that are the same for every set."""
    return {
        name: plain_value(value)
        for name, value in group[0][1]["values"].items()
        if all(finding["values"].get(name) == value for _, finding in group)
    }


def _text(group: Sequence[_Found]) -> str:
    parameter_set, finding = group[0]
    words = outcome(finding["grade"], finding["outcome"])
    others = f" and {plural(len(group) - 1, 'other set')}" if len(group) > 1 else ""
    parts = [f"{parameter_set['name']}{others}, {words}: {finding['statement']}"]
    if finding["missing"] and finding["outcome"] == "undetermined":
        parts.append(f"Not established: {', '.join(finding['missing'])}.")
    if any(other["remedy"] != finding["remedy"] for _, other in group):
        parts.append("Remedy: each set has its own, in the JSON report.")
    elif finding["remedy"]:
        parts.append(f"Remedy: {finding['remedy']['text']}")
        parts += [f"It breaks: {item}" for item in finding["remedy"]["breaks"]]
    return " ".join([*parts, *finding["cautions"]])


def _location(parameter_set: Record) -> dict[str, Any]:
    source = parameter_set["source"]
    line, column = source["line"], source.get("column", 1)
    region = {"startLine": line, "startColumn": column, "endLine": line, "endColumn": column + 1}
    return {
        "physicalLocation": {"artifactLocation": {"uri": _uri(source["path"])}, "region": region},
        "logicalLocations": [
            {"fullyQualifiedName": parameter_set["id"], "name": parameter_set["name"]}
        ],
    }


def _suppression(concession: Record) -> dict[str, Any]:
    return {
        "kind": "external",
        "status": "accepted" if concession["in_force"] else "rejected",
        "justification": (
            f"{concession['reason']} Granted by {concession['by']} until {concession['until']}."
        ),
    }


def _invocation(shown: Record, results: int) -> dict[str, Any]:
    notes = [_notification("error", error["message"], error) for error in shown["errors"]]
    notes += [_notification("note", item["reason"], item) for item in shown["skipped"]]
    notes += [_notification("note", notice) for notice in shown["notices"]]
    if results > MOST_RESULTS:
        left = f"{results - MOST_RESULTS:,} of {results:,} results are left out for their number."
        notes.append(_notification("warning", left))
    return {"executionSuccessful": shown["complete"], "toolExecutionNotifications": notes}


def _notification(level: str, text: str, place: Record | None = None) -> dict[str, Any]:
    note: dict[str, Any] = {"level": level, "message": {"text": _message(text)}}
    if place is not None:
        physical: dict[str, Any] = {"artifactLocation": {"uri": _uri(place["path"])}}
        if place.get("line") is not None:
            physical["region"] = {"startLine": place["line"]}
            if place.get("column") is not None:
                physical["region"]["startColumn"] = place["column"]
        note["locations"] = [{"physicalLocation": physical}]
    return note


def _artifact(item: Record) -> dict[str, Any]:
    return {"location": {"uri": _uri(item["path"])}, "hashes": {"sha-256": item["sha256"]}}


def _uri(path: str) -> str:
    """A path as a relative or absolute URI reference, percent-encoded; '-' is standard input."""
    uri = quote("stdin" if path == "-" else path.replace("\\", "/"), safe="/")
    return uri[2:] if uri.startswith("./") else uri


def _message(text: str) -> str:
    """Plain text in which nothing is a placeholder (3.11.5) or an embedded link (3.11.6)."""
    return text.replace("{", "{{").replace("}", "}}").replace("](", "] (")
