"""What is worth asking as text, Markdown, HTML and a record: short, the same in all, and inert."""

import json
import re
import secrets
from functools import cache
from pathlib import Path
from typing import Any

import jsonschema_rs
import pytest
from click.testing import CliRunner

from auditor.advice.ask import Asker
from auditor.advice.situations import inquire
from auditor.cli import main
from auditor.data_files import data
from auditor.facts import vocabulary
from auditor.intake.inputs import InputError
from auditor.intake.tree import read_inputs
from auditor.report import asking, asking_html, asking_markdown
from auditor.report.asking_record import record
from auditor.report.markdown_text import LEAST
from auditor.report.text import HIDDEN, visible
from auditor.review import Surroundings, investigate
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.run_values import RunValues
from tests.intake.der_writer import integers, pem
from tests.report.pages import Page
from tests.report.records import hostile_texts
from tests.report.test_markdown import calls, structure, tokens
from tests.test_documents import ROOT

SCHEMA = json.loads((data("reports") / "asking.schema.json").read_text(encoding="utf-8"))
VALID = jsonschema_rs.validator_for(SCHEMA)
RUN = RunValues("2026-12-01", "quick")
SAMPLES = [ROOT / "samples" / "encoded" / name for name in ("parameters.pem", "beacon.c", "moduli")]


@cache
def samples() -> str:
    """What is worth asking of encoded samples without their usage file, as JSON text."""
    books = load_all(DEFAULT_BOOKS, vocabulary())
    read = read_inputs([str(path) for path in SAMPLES])
    known, _ = investigate(read.declarations, RUN, books, Surroundings(secrets.randbelow))
    inquiry = inquire(read.declarations, Asker(known, RUN, books))
    error = InputError("broken.pem", 1, 1, "no PEM")
    text = json.dumps(record(inquiry, RUN, books, read.waiting, [error], ["a: not used."]))
    return text.replace(str(ROOT), ".")


def asked() -> dict[str, Any]:
    """A copy of it."""
    return json.loads(samples())  # type: ignore[no-any-return]


def with_text(text: str) -> dict[str, Any]:
    """The record with text from outside wherever it can have it."""
    found = asked()
    for item in found["situations"]:
        item["usage"] = [f"{text} {part}" for part in item["usage"]]
        item["open"] = [f"parties.{text}.peer_check", *item["open"]]
        for member in item["members"]:
            for place in member["places"]:
                place["path"], place["name"] = f"{text}/{place['path']}", text
        for effect in item["effects"]:
            effect["answers"] = [f"if the {text} checks membership", *effect["answers"]]
    for item in found["candidates"]:
        item["path"], item["name"] = f"{text}{item['path']}", text
    for item in found["errors"]:
        item["path"], item["message"] = text, f"found {text}"
    found["notices"] = [f"{text}: not used"]
    found["searches"] = [_search(f"{text}#{text}")]
    return found


def _search(identity: str) -> dict[str, Any]:
    risk = {"before": {"least": 0.94, "most": 0.95}, "after": {"least": 0.85, "most": 0.85}}
    return {
        "questions": ["factorization-0123456789abcdef0123", "factorization-123456789abcdef01234"],
        "digits": 15,
        "b1": 3000,
        "b2": 300_000,
        "curves": 17,
        "core_seconds": 300.0,
        "window": [20, 113],
        "risk": risk,
        "sets": [identity],
    }


def test_the_record_is_in_the_shape_of_its_schema() -> None:
    """So is one with text from outside; one with something more, less or wrong is not."""
    VALID.validate(asked())
    VALID.validate(with_text("x"))
    for broken in (
        asked() | {"surprise": 1},
        {key: value for key, value in asked().items() if key != "situations"},
        asked() | {"run": {"as_of": "today", "effort": "quick", "factor_digits": None}},
        asked() | {"searches": [_search("x") | {"curves": 0}]},
    ):
        assert not VALID.is_valid(broken)


def test_every_document_says_the_same() -> None:
    """Each question with its keys, its answers and where; the candidates; what was not read."""
    found = with_text("harmless")
    text = asking.render(found)
    page = Page.read(asking_html.render(found)).words()
    ticket = asking_markdown.render(found, limit=10**6)

    assert asking.summary(found) in page
    assert asking.summary(found) in ticket
    for item in found["situations"]:
        assert asking.standing(item) in page
        for effect in item["effects"][:2]:
            assert asking.condition(effect) in page
            assert asking.condition(effect) in text
    assert "the risk of a missed factor of 20 to 113 bits falls from 94–95 % to 85 %" in text
    assert "about 5 core-minutes" in page
    assert "candidate not reviewed" in text
    assert "broken" not in text


def test_sets_used_alike_are_one_paragraph() -> None:
    """Thirty places of one question take a few lines, and the first of them are named."""
    found = asked()
    item = found["situations"][0]
    place = item["members"][0]["places"][0]
    item["members"][0]["places"] = [place | {"path": f"{n}.pem"} for n in range(30)]
    item["sets"] = 29 + item["sets"]
    found["situations"] = [item]
    text = asking.render(found)

    assert text.startswith(f"{item['sets']} sets used alike")
    assert "0.pem:" in text
    assert "29.pem:" not in text
    assert len(text.splitlines()) < 20


def test_what_no_answer_would_change_is_told_last_and_briefly() -> None:
    """A line for each, naming two of several sets."""
    found = asked()
    item = found["situations"][0]
    place = item["members"][0]["places"][0]
    item["effects"] = []
    item["members"] = [item["members"][0] | {"places": [place | {"line": n} for n in (1, 2, 3)]}]
    item["sets"] = 3
    found["situations"] = [item]
    where = f"{place['path']}:1 ({place['name']})"

    assert asking.summary(found).startswith("No answer of the owner would change anything")
    last = asking.render(found).split("\n\n")[0].splitlines()
    assert last[0] == asking.NO_ANSWER
    assert len(last) == 2
    assert last[1].endswith(", 1 more)")
    for document in (
        asking.render(found),
        asking_markdown.render(found),
        Page.read(asking_html.render(found)).words(),
    ):
        assert where in document


def effect(**changes: Any) -> dict[str, Any]:
    """An effect of the record."""
    figure = {"least": 80.0, "most": 80.0, "loose": True}
    return {
        "answers": ["if every party checks membership"],
        "keys": ["peer_check"],
        "position": {"before": "open", "after": "open"},
        "bits": {"before": figure, "after": figure},
        "members": [0],
    } | changes


@pytest.mark.parametrize(
    ("answers", "condition"),
    [
        (["if every party checks membership"], "if every party checks membership"),
        (
            ["if every party checks membership", "if every party uses exponents of 224 bits"],
            "if every party checks membership and uses exponents of 224 bits",
        ),
        (
            ["if the server checks membership", "if the client checks membership"],
            "if the server checks membership and the client checks membership",
        ),
        (
            ["if the scheme is dsa", "if the server uses x"],
            "if the scheme is dsa and the server uses x",
        ),
    ],
)
def test_conditions(answers: list[str], condition: str) -> None:
    """One sentence, without saying the same subject twice."""
    assert asking.condition(effect(answers=answers)) == condition


def test_moves() -> None:
    """The position where it moves, the work where it does, and a bound that becomes a figure."""
    loose = {"least": 80.0, "most": 80.0, "loose": True}
    tight, wide = loose | {"loose": False}, {"least": 30.0, "most": 40.5, "loose": False}
    to_hold = {"before": "open", "after": "hold"}

    assert asking.moves(effect(position=to_hold)) == "open to hold"
    assert asking.moves(effect(bits={"before": loose, "after": tight})) == (
        "80.00 bits, cannot fall"
    )
    assert asking.moves(effect(bits={"before": loose, "after": wide})) == (
        "at most 80.00 to 30.00–40.50 bits"
    )
    assert asking.moves(effect(bits={"before": None, "after": tight})) == "unknown to 80.00 bits"


@pytest.mark.parametrize(
    ("seconds", "words"),
    [
        (0.1, "1 core-seconds"),
        (90.0, "90 core-seconds"),
        (300.0, "5 core-minutes"),
        (9000.0, "2 core-hours"),
    ],
)
def test_durations(seconds: float, words: str) -> None:
    """In the unit that gives a figure of at least two."""
    assert asking.duration(seconds) == words


def test_a_long_inquiry_is_cut_and_says_so() -> None:
    """The limit holds in UTF-16 units; what was left out is counted."""
    found = asked()
    found["situations"] *= 60
    text = asking_markdown.render(found, limit=LEAST)

    assert len(text.encode("utf-16-le")) // 2 <= LEAST
    assert re.search(r"Left out for length: \d+ parts", text)


def test_the_page_asks_for_nothing() -> None:
    """No script, no address, a strict policy."""
    page = Page.read(asking_html.render(asked()))

    assert not page.tags() & {"script", "img", "link", "iframe", "object", "form", "input", "base"}
    assert page.attributes("content")[0].startswith("default-src 'none'; style-src 'unsafe-inline'")
    assert not page.attributes("src")
    assert len(page.attributes("id")) == len(set(page.attributes("id")))


HARMLESS_PAGE = Page.read(asking_html.render(with_text("harmless")))
HARMLESS_TICKET = structure(tokens(asking_markdown.render(with_text("harmless"), limit=10**6)))


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_stays_text(text: str) -> None:
    """In all three documents: the same structure as without it, nothing hidden, nobody called."""
    found = with_text(text)
    source = asking_html.render(found)
    page = Page.read(source)
    assert [tag for tag, _ in page.elements] == [tag for tag, _ in HARMLESS_PAGE.elements]
    assert [set(a) for _, a in page.elements] == [set(a) for _, a in HARMLESS_PAGE.elements]
    assert " ".join(visible(text).split()) in page.words()

    ticket = asking_markdown.render(found, limit=10**6)
    parsed = tokens(ticket)
    assert structure(parsed) == HARMLESS_TICKET
    assert calls(parsed) == []
    spans = [" ".join(t.content.split()) for t in parsed if t.type == "code_inline"]
    assert any(" ".join(visible(text)[:40].split()) in span for span in spans)

    for document in (source, ticket, asking.render(found)):
        assert not re.search(HIDDEN, document.replace("\n", ""))
        document.encode("utf-8")


def run(*words: str) -> tuple[int, str, str]:
    """Exit status and what was written."""
    arguments = ["ask", *words, "--effort", "quick", "--no-ledger", "--jobs", "1"]
    result = CliRunner().invoke(main, arguments, standalone_mode=False)
    if result.exception is not None:
        raise result.exception
    return result.return_value or 0, result.stdout, result.stderr


def test_the_command(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Every format, the text unless one goes to standard output; 2 for what is not read."""
    monkeypatch.chdir(tmp_path)
    Path("dh.pem").write_text(pem("DH PARAMETERS", integers(2**521 - 1, 5)))
    status, out, _ = run("dh.pem", "--html", "a.html", "--markdown", "a.md")

    assert status == 0
    assert out.startswith("dh.pem#DH PARAMETERS 1: ")
    assert "<h1>What is worth asking</h1>" in Path("a.html").read_text()
    assert Path("a.md").read_text().startswith("# What is worth asking")
    status, out, _ = run("dh.pem", "--json", "-")
    VALID.validate(json.loads(out))
    Path("bad.yaml").write_text("auditor: 2\n")
    status, _, err = run("dh.pem", "bad.yaml")
    assert status == 2
    assert "bad.yaml:1:" in err


def test_a_book_that_is_not_there_is_a_message(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Not a fault of the program."""
    monkeypatch.chdir(tmp_path)
    result = CliRunner().invoke(
        main, ["ask", str(SAMPLES[0]), "--rulebook", "gone.yaml", "--no-ledger"]
    )

    assert result.exit_code == 1
    assert "gone.yaml:1:1: cannot be read" in result.output


def test_equal_runs_give_equal_bytes() -> None:
    """Nothing but the record moves a document."""
    assert asking_html.render(asked()) == asking_html.render(asked())
    assert asking.render(asked()) == asking.render(asked())
