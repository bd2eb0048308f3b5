"""The published schema takes what is sound and refuses what is not."""

import json
from collections.abc import Iterator
from copy import deepcopy
from typing import Any

import pytest

from auditor.data_files import data
from auditor.report import words
from auditor.report.json_report import problems
from tests.report.records import FIXTURES, fixture

SCHEMA = json.loads((data("reports") / "report.schema.json").read_text(encoding="utf-8"))
OPEN_OBJECTS = {"statement", "certificate", "patch", "values", "provenance"}
"""Members whose own members depend on something else."""


def objects(value: Any, name: str = "$") -> Iterator[tuple[str, dict[str, Any]]]:
    """Every object in a record whose members are fixed, with its name."""
    if isinstance(value, dict):
        yield name, value
        for key, item in value.items():
            if key not in OPEN_OBJECTS:
                yield from objects(item, key)
    elif isinstance(value, list):
        for item in value:
            yield from objects(item, name)


@pytest.mark.parametrize("name", FIXTURES)
def test_a_sound_record_has_no_problem(name: str) -> None:
    """The fixtures are in the shape that the schema describes."""
    assert problems(fixture(name)) == []


def test_an_unknown_member_is_refused_everywhere() -> None:
    """No object of the format takes a member that the schema does not name."""
    count = len(list(objects(fixture("harbour"))))
    refused = 0
    for number in range(count):
        record = fixture("harbour")
        name, item = list(objects(record))[number]
        item["a surprise"] = 1
        assert problems(record), name
        refused += 1
        if refused >= 400:
            break
    assert refused >= 100


def test_every_required_member_is_missed() -> None:
    """Taking a required member away is a problem, for every kind of object."""
    record = fixture("harbour")
    parameter_set = record["parameter_sets"][1]
    kinds = [
        (record, SCHEMA),
        (record["tool"], SCHEMA["properties"]["tool"]),
        (record["run"], SCHEMA["properties"]["run"]),
        (record["overview"], SCHEMA["properties"]["overview"]),
        (record["rulebooks"][0], SCHEMA["definitions"]["rulebook"]),
        (parameter_set, SCHEMA["definitions"]["parameter_set"]),
        (parameter_set["findings"][0], SCHEMA["definitions"]["finding"]),
        (parameter_set["findings"][0]["criterion"], SCHEMA["definitions"]["criterion"]),
        (parameter_set["findings"][0]["remedy"], SCHEMA["definitions"]["remedy"]),
        (parameter_set["routes"][0], SCHEMA["definitions"]["route"]),
        (parameter_set["facts"]["modulus.length"], SCHEMA["definitions"]["fact"]),
        (next(iter(record["claims"].values())), SCHEMA["definitions"]["claim"]),
    ]
    for item, node in kinds:
        assert set(node["required"]) <= set(item)
        for member in node["required"]:
            kept = item.pop(member)
            assert problems(record), member
            item[member] = kept
    assert problems(record) == []


@pytest.mark.parametrize(
    ("path", "value"),
    [
        (("report",), 2),
        (("run", "as_of"), "1 December 2026"),
        (("run", "effort"), "heroic"),
        (("overview", "positions", "hold"), -1),
        (("parameter_sets", 0, "position"), "pass"),
        (("parameter_sets", 0, "digest"), "abc"),
        (("parameter_sets", 0, "id"), "without a mark"),
        (("parameter_sets", 0, "declaration", "modulus"), "FFFF"),
        (("parameter_sets", 0, "declaration", "modulus"), 1.5),
        (("parameter_sets", 0, "facts", "modulus.length", "standing"), "sure"),
        (("parameter_sets", 0, "facts", "modulus.length", "value"), None),
        (("parameter_sets", 0, "routes", 0, "attacker"), "everybody"),
        (("parameter_sets", 1, "findings", 0, "outcome"), "conforming"),
        (("cautions",), []),
        (("claims",), {"not an id": {}}),
    ],
)
def test_a_wrong_value_is_refused(path: tuple[str | int, ...], value: Any) -> None:
    """Closed lists of words, patterns and ranges hold."""
    record: Any = deepcopy(fixture("harbour"))
    node = record
    for step in path[:-1]:
        node = node[step]
    node[path[-1]] = value

    assert problems(record)


def test_integers_of_any_size_are_taken_and_a_problem_stays_short() -> None:
    """Neither the validator's own limits nor the length of a number get in the way."""
    record = fixture("one-set")
    record["parameter_sets"][0]["declaration"]["modulus"] = 2**65535
    assert problems(record) == []

    record["parameter_sets"][0]["declaration"]["modulus"] = "f" * 20_000
    (problem,) = problems(record)
    assert len(problem) < 400


def nodes(node: Any, name: str) -> Iterator[tuple[str, dict[str, Any]]]:
    """Every schema node below ``node``."""
    if not isinstance(node, dict):
        return
    yield name, node
    for group in ("properties", "definitions"):
        for key, item in node.get(group, {}).items():
            yield from nodes(item, f"{name}/{key}")
    for key in ("items", "additionalProperties", "propertyNames"):
        yield from nodes(node.get(key), f"{name}/{key}")


def test_every_node_is_described_and_every_fixed_object_is_closed() -> None:
    """A reader of the schema finds a meaning everywhere, and no back door."""
    for name, node in nodes(SCHEMA, "$"):
        assert "description" in node or "$ref" in node, name
        if "properties" in node:
            assert "additionalProperties" in node, name


def test_the_words_of_the_schema_have_sentences() -> None:
    """Each closed list of words that documents explain is explained in full."""
    definitions = SCHEMA["definitions"]
    route = definitions["route"]["properties"]

    assert definitions["position"]["enum"] == list(words.POSITIONS)
    assert set(words.POSITION_MEANING) == set(words.POSITIONS)
    assert definitions["grade"]["enum"] == list(words.GRADES)
    assert set(definitions["standing"]["enum"]) == set(words.STANDING_MEANING)
    assert set(definitions["absence"]["properties"]["reason"]["enum"]) == set(words.REASON_MEANING)
    assert route["attacker"]["enum"] == list(words.ATTACKERS)
    confidence = definitions["criterion"]["properties"]["confidence"]["enum"]
    assert set(confidence) == set(words.CONFIDENCE_MEANING)
