"""The record as JSON text."""

import json
import re
from hashlib import sha256
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.report.json_report import dumps, lines, write
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


@given(st.lists(st.dictionaries(st.sampled_from(["facts", "findings", "x"]), VALUES), max_size=4))
def test_lines_and_text_agree_on_every_set(sets: list[dict[str, Any]]) -> None:
    """JSON Lines and the text have the same sets, also where one stands twice."""
    record = {"run": "a", "parameter_sets": [*sets, *sets]}
    *each, summary = map(json.loads, lines(record))

    assert [line["parameter_set"] for line in each] == json.loads(dumps(record))["parameter_sets"]
    assert summary == {"summary": {"run": "a"}}


def test_more_parts_than_are_kept_change_nothing(monkeypatch: pytest.MonkeyPatch) -> None:
    """The text is the same where nearly nothing is kept."""
    record = fixture("harbour")
    record["parameter_sets"] *= 3
    text = dumps(record)
    monkeypatch.setattr("auditor.report.json_report._Texts.MOST", 10)

    assert dumps(record) == text
    assert json.loads(text) == record


@pytest.mark.parametrize("text", ["plain", "\u202e"])
def test_writing_in_pieces_gives_the_text(text: str) -> None:
    """The pieces are the text; its digest and whether it may hide something are said."""
    record = with_text(text)
    pieces: list[bytes] = []
    written = write(record, pieces.append)

    assert b"".join(pieces) == dumps(record).encode()
    assert written.sha256 == sha256(b"".join(pieces)).hexdigest()
    assert written.may_hide == (text == "\u202e")
    assert max(map(len, pieces)) < len(b"".join(pieces))
