"""The findings as SARIF 2.1.0, for services that show results beside the code.

OASIS, Static Analysis Results Interchange Format 2.1.0, errata 01. A nonconformity is a result of
kind ``fail`` whose level follows the grade; what could not be decided is of kind ``open``, which
is the specification's word for too little information (3.27.9). What conforms is left out: some
services show every result as an alert, whatever its kind.
"""

import json
from collections.abc import Iterator, Mapping
from hashlib import sha256
from typing import Any
from urllib.parse import quote

from auditor.report.text import clipped
from auditor.report.view import Record, View, view
from auditor.report.words import CONFIDENCE_MEANING, outcome, plain_value

LEVELS: Mapping[str, str] = {"major": "error", "minor": "warning", "observation": "note"}
SEVERITY: Mapping[str, str] = {"major": "8.0", "minor": "5.0", "observation": "2.0"}
"""What some services sort by, as text above 0."""

MOST_RESULTS = 25_000
"""What a widely used service accepts in one run; the notifications say how many are left out."""

_DESCRIPTION = 1_024
_SCHEMA = (
    "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
)


def render(record: Record | View) -> str:
    """A SARIF log with one run: a result for every finding of every set, in record order."""
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


def _results(shown: Record, index: Mapping[str, int]) -> Iterator[dict[str, Any]]:
    for parameter_set in shown["parameter_sets"]:
        for finding in parameter_set["findings"]:
            yield _result(parameter_set, finding, index)


def _result(parameter_set: Record, finding: Record, index: Mapping[str, int]) -> dict[str, Any]:
    rule = finding["rule"]
    fails = finding["outcome"] == "nonconforming"
    print_of_place = sha256(f"{rule}\n{parameter_set['id']}".encode()).hexdigest()
    result: dict[str, Any] = {
        "ruleId": rule,
        "kind": "fail" if fails else "open",
        "level": LEVELS[finding["grade"]] if fails else "none",
        "message": {"text": _message(_text(parameter_set, finding))},
        "locations": [_location(parameter_set)],
        "partialFingerprints": {
            "primaryLocationLineHash": print_of_place[:32],
            "parameterSet/v1": parameter_set["digest"],
        },
        "properties": {
            "grade": finding["grade"],
            "defect": finding["defect"],
            "position": parameter_set["position"],
            "values": {name: plain_value(value) for name, value in finding["values"].items()},
            "missing": finding["missing"],
        },
    }
    if rule in index:
        result["ruleIndex"] = index[rule]
    if concession := finding["concession"]:
        result["suppressions"] = [_suppression(concession)]
    return result


def _text(parameter_set: Record, finding: Record) -> str:
    words = outcome(finding["grade"], finding["outcome"])
    parts = [f"{parameter_set['name']}, {words}: {finding['statement']}"]
    if finding["missing"] and finding["outcome"] == "undetermined":
        parts.append(f"Not established: {', '.join(finding['missing'])}.")
    if finding["remedy"]:
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
