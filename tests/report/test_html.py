"""The HTML report as a parser sees it; the browser tests look at it as a reader does."""

import re
import subprocess
import sys

import pytest

from auditor.report import html
from auditor.report.html import render
from auditor.report.text import HIDDEN, visible
from tests.report.pages import Page
from tests.report.records import FIXTURES, bulky, fixture, hostile_texts, with_text

PLAIN = {name: Page.read(render(fixture(name))) for name in FIXTURES}
HARMLESS = Page.read(render(with_text("harmless")))


@pytest.mark.parametrize("name", FIXTURES)
def test_the_page_asks_for_nothing(name: str) -> None:
    """No script, no handler, no address but places in the page itself, and a policy to say so."""
    page = PLAIN[name]

    assert not page.tags() & {"script", "img", "link", "iframe", "object", "form", "input", "base"}
    assert not [a for _, attrs in page.elements for a in attrs if a.startswith("on")]
    assert all(target.startswith("#") for target in page.attributes("href"))
    assert not page.attributes("src")
    policy = page.attributes("content")[0]
    assert policy.startswith("default-src 'none'; style-src 'unsafe-inline'")
    assert not re.search(r"url\((?!#)|@import", render(fixture(name)))


@pytest.mark.parametrize("name", FIXTURES)
def test_every_link_arrives_and_every_id_is_one(name: str) -> None:
    """Links, uses and labels name ids that exist; no id stands twice."""
    page = PLAIN[name]
    ids = page.attributes("id")
    named = {target[1:] for target in page.attributes("href")}
    labels = {label for value in page.attributes("aria-labelledby") for label in value.split()}

    assert len(ids) == len(set(ids))
    assert named | labels <= set(ids)


def test_the_reader_finds_the_answer_first() -> None:
    """Verdict, title block, decision sheet, sheets, questions, limits, evidence, cautions."""
    text = PLAIN["harbour"].words()
    order = [
        "3 must not be released as declared",
        "As of 2026-12-01",
        "Decision sheet Work in bits",
        "1 lock gate <demo>",
        "Open questions Each is listed once",
        "What was not examined Not read",
        "Evidence What search established",
        "Cautions This is a technical review",
        "Sign-off For the reviewer",
    ]
    places = [text.index(part) for part in order]

    assert places == sorted(places)


@pytest.mark.parametrize("name", FIXTURES)
def test_all_that_matters_is_in_the_page(name: str) -> None:
    """Every set, statement, criterion, remedy, question, claim, error and caution is there."""
    record, text = fixture(name), PLAIN[name].words()
    for item in record["parameter_sets"]:
        assert item["name"] in text
        for finding in item["findings"]:
            assert finding["statement"] in text
            assert finding["criterion"]["clause"] in text
            if finding["remedy"]:
                assert finding["remedy"]["text"] in text
                assert all(cost in text for cost in finding["remedy"]["breaks"])
        for question in item["questions"]:
            assert question["about"] in text
        for left_out in item["books_left_out"]:
            assert left_out["why"] in text
    assert set(record["claims"]) <= set(PLAIN[name].attributes("id"))
    for error in record["errors"]:
        assert error["message"] in text
    for caution in record["cautions"]:
        assert caution in text
    for item in record["inputs"]:
        assert item["sha256"] in text


def test_every_picture_says_what_it_shows() -> None:
    """Each has a title and a description, and stands for itself to those who do not see it."""
    page = PLAIN["harbour"]
    pictures = [attrs for tag, attrs in page.elements if tag == "svg" and "role" in attrs]

    assert len(pictures) == 11
    assert all(attrs["role"] == "img" and attrs["aria-labelledby"] for attrs in pictures)
    assert len([tag for tag, _ in page.elements if tag == "desc"]) == len(pictures)


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_stays_text(text: str) -> None:
    """The same elements and attributes as without it, nothing hidden, and the text itself shown."""
    source = render(with_text(text))
    page = Page.read(source)

    assert [tag for tag, _ in page.elements] == [tag for tag, _ in HARMLESS.elements]
    assert [set(a) for _, a in page.elements] == [set(a) for _, a in HARMLESS.elements]
    assert not re.search(HIDDEN, source.replace("\n", ""))
    assert " ".join(visible(text).split()) in page.words()
    source.encode("utf-8")


def test_a_long_report_writes_out_the_worst_and_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    """Every set is on the decision sheet; what has no sheet has no link to one."""
    monkeypatch.setattr(html, "MOST_SHEETS", 5)
    monkeypatch.setattr(html, "MOST_ENTRIES", 7)
    page = Page.read(render(bulky(12)))
    text, ids = page.words(), page.attributes("id")

    assert all(f"set {number} 🏗" in text for number in range(12))
    assert len([name for name in ids if re.fullmatch(r"set-\d+", name)]) == 5
    assert {target[1:] for target in page.attributes("href")} <= set(ids)
    assert "The sheets of the other 7 sets, none of a worse position" in text
    assert "and 5 more messages, in the JSON report" in text
    assert re.search(r"The other \d+ claims", text)


def test_the_same_record_gives_the_same_bytes() -> None:
    """Nothing but the record moves the page."""
    assert render(fixture("harbour")) == render(fixture("harbour"))


def test_heavy_libraries_wait_until_they_are_needed() -> None:
    """Importing the renderers loads neither the template engine nor a validator."""
    code = (
        "import sys\n"
        "import auditor.report.html, auditor.report.markdown, auditor.report.sarif\n"
        "import auditor.report.terminal, auditor.report.json_report\n"
        "heavy = {'jinja2', 'markupsafe', 'jsonschema_rs', 'rich', 'sympy', 'cryptography'}\n"
        "sys.exit(str(sorted(heavy & set(sys.modules))) if heavy & set(sys.modules) else 0)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=False, text=True)

    assert done.returncode == 0, done.stderr
