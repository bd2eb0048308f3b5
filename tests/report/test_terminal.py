"""The summary for a terminal."""

import re
from typing import Any

import pytest

from auditor.report.terminal import render
from auditor.report.text import HIDDEN, visible
from tests.report.records import FIXTURES, fixture, hostile_texts, with_text


@pytest.mark.parametrize("name", FIXTURES)
@pytest.mark.parametrize(("width", "height"), [(80, 24), (120, 40), (72, 24)])
def test_it_fits_the_screen(name: str, width: int, height: int) -> None:
    """No line is wider, and there are not more lines, than asked for."""
    lines = render(fixture(name), width=width, height=height).splitlines()

    assert len(lines) <= height
    assert max(map(len, lines)) <= width


def test_the_worst_is_on_the_screen_and_the_rest_is_counted() -> None:
    """Position, figures, place and reason of the worst; how many more there are."""
    text = render(fixture("harbour"), height=20)

    assert re.search(r"^hold +112 +none +19 +19 +19  lock gate <demo>$", text, re.MULTILINE)
    assert re.search(r"^hold +112 +112 +≤ 110 +≤ 35 +≤ 35  crane telemetry$", text, re.MULTILINE)
    assert re.search("^ {14}A peer recovers the 224-bit static exponent", text, re.MULTILINE)
    assert "3 more sets, none of a worse position." in text
    assert "hold 3   open 1   conditions 1   no objection 1" in text


def test_all_sets_are_shown_where_there_is_room() -> None:
    """On a tall screen nothing is left out."""
    record = fixture("harbour")
    text = render(record, height=60)

    assert "more set" not in text
    assert "samples/cranes.yaml:12 and 1 more place: A peer recovers" in " ".join(text.split())
    for item in record["parameter_sets"][:5]:
        assert item["name"][:10] in text


def many(count: int, different: int) -> dict[str, Any]:
    """A record of so many sets, of which so many come out differently."""
    record = fixture("harbour")
    first = record["parameter_sets"][0]
    record["parameter_sets"] = [
        first
        | {
            "digest": f"{number:064x}",
            "name": f"set {number}",
            "outcomes": {f"rule-{n}": "conforming" for n in range(1 + number % different)},
        }
        for number in range(count)
    ]
    return record


def test_many_sets_still_fit() -> None:
    """Hundreds of sets, errors and notices take one screen and are counted."""
    record = many(200, 200)
    record["errors"] *= 1000
    record["notices"] *= 1000
    text = render(record, height=40)

    assert len(text.splitlines()) <= 40
    shown = len(re.findall("^(?:hold|open|conditions|no objection) +112", text, re.MULTILINE))
    assert shown >= 3
    assert f"{200 - shown} more sets" in text
    assert "and 997 more" in text


def test_sets_that_come_out_alike_share_a_row() -> None:
    """Three rows for a thousand sets; none is left out, and the places are counted."""
    text = render(many(1000, 3), height=40)
    rows = re.findall("^no objection +112.*$", text, re.MULTILINE)

    assert [row.rsplit("  ", 1)[1] for row in rows] == [
        "set 0 and 333 more",
        "set 1 and 332 more",
        "set 2 and 332 more",
    ]
    assert "more set" not in text
    assert " ".join(text.split()).count(" more places: All of the") == 3


def test_every_caution_and_error_is_there() -> None:
    """The limits of the review are part of the shortest summary."""
    record = fixture("nothing-read")
    text = " ".join(render(record).split())

    for caution in record["cautions"]:
        assert caution in text
    assert "samples/missing.yaml: no such file" in text
    assert "Nothing was reviewed." in text


def test_colour_only_when_asked_for_and_only_around_words() -> None:
    """Without the sequences the text is the same."""
    plain, coloured = render(fixture("harbour")), render(fixture("harbour"), colour=True)

    assert "\x1b" not in plain
    assert "\x1b[" in coloured
    assert re.sub(r"\x1b\[[0-9;]*m", "", coloured) == plain


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_does_not_speak_to_the_terminal(text: str) -> None:
    """Nothing but printable characters and line ends, and no line but our own."""
    shown = render(with_text(text), height=200)
    lines, harmless = shown.splitlines(), render(with_text("harmless"), height=200).splitlines()

    assert not re.search(HIDDEN, shown.replace("\n", ""))
    assert shown.count("\n") == len(shown.split("\n")) - 1 == len(lines)
    assert [line[:14].strip() for line in lines if line[:4] in ("hold", "open", "cond")] == [
        line[:14].strip() for line in harmless if line[:4] in ("hold", "open", "cond")
    ]
    assert visible(text)[:6].strip() in shown
    shown.encode("utf-8")
