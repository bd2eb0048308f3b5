"""The Markdown report, read by a CommonMark parser with the tables of GitHub Flavored Markdown."""

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from markdown_it.token import Token

from auditor.report.markdown import render
from auditor.report.markdown_text import LEAST, LIMIT, cell, prose, span
from auditor.report.text import HIDDEN, clipped, visible
from tests.report.records import FIXTURES, bulky, fixture, hostile_texts, with_text

PARSER = MarkdownIt("commonmark").enable(["table", "strikethrough"])


def tokens(source: str) -> list[Token]:
    """All tokens of a document, those within lines included."""
    return [t for block in PARSER.parse(source) for t in [block, *(block.children or [])]]


def calls(found: list[Token]) -> list[str]:
    """Text that a tracker would turn into a mention, a link or a reference."""
    active = re.compile(r"@\w|://|\bwww\.|#\d|\bGH-\d", re.IGNORECASE)
    return [t.content for t in found if t.type == "text" and active.search(t.content)]


def structure(found: list[Token]) -> list[str]:
    """The kinds of tokens, text and code aside."""
    return [t.type for t in found if t.type not in {"text", "code_inline", "softbreak"}]


HARMLESS = structure(tokens(render(with_text("harmless"), limit=10**6)))


@pytest.mark.parametrize("name", FIXTURES)
def test_the_report_is_headings_tables_and_lists(name: str) -> None:
    """No HTML, no link, no image; every row of the decision sheet has its nine cells."""
    found = tokens(render(fixture(name)))
    kinds = {t.type for t in found}

    assert not kinds & {"html_block", "html_inline", "link_open", "image", "code_block", "fence"}
    rows = len([t for t in found if t.type == "tr_open"])
    cells = len([t for t in found if t.type in {"td_open", "th_open"}])
    assert cells == 9 * rows


def test_the_ticket_holds_what_decides() -> None:
    """Verdict, statements, remedies of major and minor findings, what these break, cautions."""
    record = fixture("harbour")
    text = render(record)

    assert "3 must not be released as declared" in text.split("\n## ")[0]
    for item in record["parameter_sets"]:
        for finding in item["findings"]:
            assert prose(finding["statement"]) in text
            if finding["remedy"] and finding["grade"] != "observation":
                assert prose(finding["remedy"]["text"]) in text
                assert all(prose(cost) in text for cost in finding["remedy"]["breaks"])
                for key in finding["remedy"]["patch"] or ():
                    assert re.search(
                        rf"Remedy: .* In the declaration then: .*`(delete )?{key}\b", text
                    ), key
    for caution in record["cautions"]:
        assert prose(caution) in text


@pytest.mark.parametrize("limit", [LEAST, 5_000, 10_000, LIMIT, 65_536])
@pytest.mark.parametrize("sets", [1, 40, 400])
def test_the_limit_holds_and_what_is_left_out_is_counted(limit: int, sets: int) -> None:
    """In UTF-16 units; every finding is either in the text or in the count."""
    record = bulky(sets)
    text = render(record, limit=limit)
    found = len(re.findall(r"^\d+\. \*\*major nonconformity:", text, re.MULTILINE))
    left = re.search(r"Left out for length: ([\d,]+) findings?", text)
    missing = int(left[1].replace(",", "")) if left else 0

    assert len(text.encode("utf-16-le")) // 2 <= limit
    assert found + missing == 2 * sets
    assert all(prose(caution) in text for caution in record["cautions"])


def test_the_worst_is_kept() -> None:
    """What a short limit keeps is the sheet of the worst position."""
    text = render(fixture("harbour"), limit=LEAST)

    assert "`lock gate <demo>`: hold" in text
    assert "Left out for length: 8 findings, and the sheets of 4 sets" in text


def test_nothing_is_left_out_without_need() -> None:
    """The fixture fits a ticket."""
    assert "Left out" not in render(fixture("harbour"))


def test_a_limit_without_room_is_refused() -> None:
    """The head and the cautions are never cut."""
    with pytest.raises(ValueError, match="at least 4,000"):
        render(fixture("harbour"), limit=LEAST - 1)


@given(st.text(min_size=1))
def test_a_code_span_holds_its_text_and_nothing_else(text: str) -> None:
    """One inline token, alone and in a table cell, with the text that went in."""
    shown = visible(text)
    alone, within = span(shown, 10_000), cell(shown, 10_000)
    (inline,) = PARSER.parseInline(alone)
    cells = [t for t in PARSER.parse(f"| a |\n| --- |\n| {within} |\n") if t.type == "inline"]

    assert [t.type for t in inline.children or []] == ["code_inline"]
    assert len(cells) == 2
    content = (cells[1].children or [])[0].content
    assert content.split() == shown.split()


@given(st.text(max_size=80))
def test_prose_has_no_markup(text: str) -> None:
    """A sentence gives text and the code spans that take calls apart, and calls nobody."""
    found = tokens(f"Text: {prose(visible(text))}")
    allowed = {"paragraph_open", "inline", "text", "code_inline", "paragraph_close", "text_special"}

    assert {t.type for t in found} <= allowed
    assert calls(found) == []


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_stays_text(text: str) -> None:
    """The same structure as without it, nothing hidden, nobody called, and the text shown."""
    source = render(with_text(text), limit=10**6)
    found = tokens(source)
    spans = [" ".join(t.content.split()) for t in found if t.type == "code_inline"]

    assert structure(found) == HARMLESS
    assert calls(found) == []
    assert not re.search(HIDDEN, source.replace("\n", ""))
    assert any(" ".join(clipped(visible(text), 60).split()) in span for span in spans)
    source.encode("utf-8")


def test_what_weighs_goes_before_all_observations() -> None:
    """Of a report that does not fit, findings that keep a set from release are told first, of
    whatever set; then the titles of observations."""
    record = bulky(3)
    weighty, observation = record["parameter_sets"][0]["findings"][0], "observation"
    assert weighty["grade"] != observation
    for item in record["parameter_sets"]:
        item["findings"] = [
            weighty,
            weighty | {"grade": observation, "defect": "seen", "statement": 300 * "Much. "},
        ]
    whole = render(record, limit=10**6)
    text = render(record, limit=len(whole.encode("utf-16-le")) // 2 - 500)
    told, observed = text.split("\n## Observations\n")

    assert "## Observations" not in whole
    assert told.count("nonconformity:**") == 3
    assert "observation:**" not in told
    assert observed.count(weighty["title"]) == 3
    assert "Left out" not in text
