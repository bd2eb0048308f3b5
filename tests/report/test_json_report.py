"""The record as JSON text."""

import json
import re
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.report.json_report import dumps
from auditor.report.text import HIDDEN
from tests.report.records import FIXTURES, SURROGATE, fixture, hostile_texts, with_text

VALUES = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(),
    lambda items: st.lists(items) | st.dictionaries(st.text(), items),
    max_leaves=20,
)


@given(
    st.fixed_dictionaries(
        {"run": VALUES},
        optional={
            "parameter_sets": st.lists(VALUES),
            "claims": st.dictionaries(st.text(), VALUES),
        },
    )
)
def test_text_reads_back_as_the_same_record(record: dict[str, Any]) -> None:
    """Whatever the values, and in the same order."""
    text = dumps(record)

    assert json.loads(text) == record
    assert list(json.loads(text)) == list(record)
    assert text.endswith("}\n")


@pytest.mark.parametrize("name", FIXTURES)
def test_writing_again_gives_the_same_bytes(name: str) -> None:
    """Reading and writing once more changes nothing."""
    text = dumps(fixture(name))

    assert dumps(json.loads(text)) == text


@pytest.mark.parametrize("text", hostile_texts())
def test_the_text_is_safe_to_look_at(text: str) -> None:
    """Hidden characters are escapes in the file and themselves again when read."""
    record = with_text(text)
    written = dumps(record)

    assert not re.search(HIDDEN, written.replace("\n", ""))
    assert json.loads(written) == record
    written.encode("utf-8")


def test_a_set_and_a_claim_have_a_line_each() -> None:
    """A report can be searched and compared line by line."""
    record = fixture("harbour")
    lines = dumps(record).splitlines()

    assert len([line for line in lines if '"decided_by"' in line]) == len(record["parameter_sets"])
    assert len([line for line in lines if '"certificate"' in line]) == len(record["claims"])


def test_what_json_cannot_say_is_refused() -> None:
    """A figure that is no number must not become a file that others cannot read."""
    with pytest.raises(ValueError, match="not JSON compliant"):
        dumps({"x": float("nan")})


def test_a_lone_surrogate_survives() -> None:
    """A name that is no Unicode text is written as the escape it is."""
    assert json.loads(dumps({"x": SURROGATE})) == {"x": SURROGATE}


def test_members_that_entries_share_are_written_alike() -> None:
    """Whether entries have the very same member or an equal one makes no difference to the text."""
    shared = {"“a”": [1, 2], "b": "\u202e"}
    one = {"parameter_sets": [{"id": "x", "facts": shared}, {"id": "y", "facts": shared}]}
    two = {"parameter_sets": [{"id": "x", "facts": {**shared}}, {"id": "y", "facts": {**shared}}]}

    assert dumps(one) == dumps(two)
    assert json.loads(dumps(one)) == two
    assert "\u202e" not in dumps(one)
