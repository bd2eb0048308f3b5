"""Values against schemas: the place and the words of every kind of disagreement."""

import json
from typing import Any

import jsonschema_rs
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.data_files import data
from auditor.schema_check import Schema, found, schema_problems, shipped_schema, small
from auditor.strict_yaml import load, read

SCHEMA = Schema(
    {
        "description": "a record",
        "type": "object",
        "required": ["size"],
        "additionalProperties": False,
        "dependencies": {"unit": ["scale"], "note": ["scale"]},
        "properties": {
            "size": {"description": "a size of at least 1", "type": "integer", "minimum": 1},
            "unit": {"description": "bits or octets", "enum": ["bits", "octets"]},
            "scale": {"$ref": "#/definitions/scale"},
            "note": {"description": "a note", "type": "string"},
            "parts": {"description": "parts", "items": {"$ref": "#/definitions/scale"}},
            "kinds": {"description": "different kinds", "type": "array", "uniqueItems": True},
        },
        "definitions": {"scale": {"description": "a scale from 1 to 9", "maximum": 9}},
    }
)


@pytest.mark.parametrize(
    ("text", "problem"),
    [
        ("size: 0", "1:7 size: found 0; expected a size of at least 1"),
        ("size: true", "1:7 size: found true; expected a size of at least 1"),
        ("size: {a: 1}", "1:7 size: found a mapping of 'a'; expected a size of at least 1"),
        ("size: []", "1:7 size: found an empty list; expected a size of at least 1"),
        ("size:", "1:6 size: found nothing; expected a size of at least 1"),
        ("[1]", "1:1 found a list of one item; expected a record"),
        ("note: x\nscale: 1", "1:1 missing key 'size'; expected a size of at least 1"),
        (
            "size: 1\nunti: bits",
            "2:1 unknown key 'unti'; expected a record; did you mean 'unit'?",
        ),
        (
            "size: 1\nqqqq: bits",
            "2:1 unknown key 'qqqq'; expected a record; "
            "known keys: size, unit, scale, note, parts, kinds",
        ),
        (
            "{size: 1, scale: 1, unit: octet}",
            "1:27 unit: found 'octet'; expected bits or octets; did you mean 'octets'?",
        ),
        (
            "size: 1\nunit: bits\nnote: x",
            "1:1 missing key 'scale', called for by unit and note; expected a scale from 1 to 9",
        ),
        (
            "size: 1\nkinds: [a, b, a]",
            "2:15 kinds[2]: found 'a' again, after kinds[0]; expected different kinds",
        ),
        (
            "size: 1\nkinds:\n- {a: [1]}\n- {a: [1]}\n",
            "4:3 kinds[1]: found a mapping of 'a' again, after kinds[0]; expected different kinds",
        ),
        ("size: 1\nparts: [1, 10]", "2:12 parts[1]: found 10; expected a scale from 1 to 9"),
    ],
)
def test_every_disagreement_is_placed_and_worded(text: str, problem: str) -> None:
    """Where, what was found, what was expected, a suggestion."""
    (item,) = schema_problems(load(text), SCHEMA)
    assert f"{item.line}:{item.column} {item.message}" == problem


def test_all_disagreements_come_in_text_order() -> None:
    """One run names them all."""
    problems = schema_problems(load("unit: x\nother: 1\nsize: 0\nscale: 10"), SCHEMA)
    assert [(item.line, item.path) for item in problems] == [
        (1, ("unit",)),
        (2, ("other",)),
        (3, ("size",)),
        (4, ("scale",)),
    ]


def test_values_that_could_not_be_read_are_not_judged_again() -> None:
    """A value without a reading is one problem, not two."""
    loaded = read("size: !!int 5\nscale: !!int 10\nnote: !!str 5")
    assert len(loaded.problems) == 3
    assert schema_problems(loaded, SCHEMA) == ()


def test_advice_is_asked_for_where_no_word_is_near() -> None:
    """The caller knows what a value may have meant."""
    (problem,) = schema_problems(
        load("size: big"), SCHEMA, lambda path, value: f"write a number for {path[0]} {value}"
    )
    assert problem.message.endswith("; write a number for size big")


def test_the_number_of_problems_is_bounded() -> None:
    """A hostile document cannot fill a report."""
    loaded = load("size: 1\nparts: [" + "10, " * 5000 + "]")
    assert len(schema_problems(loaded, SCHEMA)) == 1000


@pytest.mark.parametrize("bits", [63, 64, 1023, 1024, 16384, 65536])
@pytest.mark.parametrize("sign", [1, -1])
def test_long_integers_are_judged_by_their_sign(bits: int, sign: int) -> None:
    """Clamping keeps the sign, which the validator gets wrong from 2^1024 on."""
    loaded = load("size: 1")
    loaded.value["size"] = sign * 2 ** (bits - 1)
    assert bool(schema_problems(loaded, SCHEMA)) is (sign < 0)


_json = st.recursive(
    st.none() | st.booleans() | st.integers() | st.text(max_size=5),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=3), inner),
    max_leaves=8,
)


@given(_json)
def test_clamping_changes_long_integers_only(value: Any) -> None:
    """Everything within 2^62 stays as it is, in type as well."""
    assert json.dumps(small(value)) == json.dumps(_clamped(value))


def _clamped(value: Any) -> Any:
    text = json.dumps(value)
    limit = 2**62
    return json.loads(text, parse_int=lambda digits: max(-limit, min(limit, int(digits))))


@given(_json | st.integers(-(2**20000), 2**20000))
def test_found_values_fit_on_a_line(value: Any) -> None:
    """Short, printable, and never a long decimal integer."""
    text = found(value)
    assert text.isprintable()
    assert len(text) < 340


@pytest.mark.parametrize("name", ["declaration.schema.json"])
def test_shipped_schemas_are_schemas(name: str) -> None:
    """Draft-07 throughout; each node that can fail says what is expected."""
    document = json.loads((data("reports") / name).read_text("utf-8"))
    assert document["$schema"] == "http://json-schema.org/draft-07/schema#"
    jsonschema_rs.Draft7Validator({"$ref": "http://json-schema.org/draft-07/schema#"}).validate(
        document
    )
    assert shipped_schema(name).document == document
    nodes = {**document["definitions"], **document["definitions"]["parameter_set"]["properties"]}
    for key, node in nodes.items():
        assert "$ref" in node or node["description"], key
