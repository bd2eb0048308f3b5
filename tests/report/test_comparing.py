"""A comparison as text, Markdown, HTML and a record: short, the same in all, and inert."""

import json
import re
from functools import cache
from pathlib import Path
from typing import Any

import jsonschema_rs
import pytest
from click.testing import CliRunner

from auditor.cli import main
from auditor.commands import options
from auditor.compare import compare
from auditor.data_files import data
from auditor.report import comparing, comparing_html, comparing_markdown
from auditor.report.markdown_text import LEAST
from auditor.report.text import HIDDEN, clipped, visible
from tests.report.pages import Page
from tests.report.records import bulky, fixture, hostile_texts, with_text
from tests.report.test_markdown import calls, structure, tokens

SCHEMA = json.loads((data("reports") / "comparison.schema.json").read_text(encoding="utf-8"))
VALID = jsonschema_rs.validator_for(SCHEMA)


def compared(old: dict[str, Any], new: dict[str, Any], fail_on: str = "hold") -> dict[str, Any]:
    """The record of the comparison of two records."""
    return comparing.record(compare(old, new), old, new, fail_on)


def hostile(text: str) -> dict[str, Any]:
    """A comparison with text from outside wherever a report can have it; something is new, some
    sets came and some went."""
    old, new = with_text(text), with_text(text)
    old["parameter_sets"].pop()
    new["parameter_sets"].pop(0)
    new["errors"].append({"path": text, "line": 1, "column": 1, "message": f"again {text}"})
    item = next(item for item in new["parameter_sets"] if item["findings"])
    item["findings"][0]["title"] = text
    item["findings"][0]["rule"] = "another"
    item["facts"]["usage.protocol"]["value"] = f"other {text}"
    item["id"] += " moved"
    return compared(old, new, "conditions")


@cache
def harmless() -> dict[str, Any]:
    """The same with a word that nobody minds."""
    return hostile("harmless")


def test_the_record_is_in_the_shape_of_its_schema() -> None:
    """With and without differences; an unknown member, a missing one and a wrong word are not."""
    for record in (harmless(), compared(fixture("harbour"), fixture("harbour"))):
        VALID.validate(record)
    for broken in (
        harmless() | {"surprise": 1},
        {key: value for key, value in harmless().items() if key != "fails"},
        harmless() | {"fail_on": "sometimes"},
        harmless() | {"run": [{"kind": "new", "text": "x"}]},
        harmless() | {"counts": {"new": -1, "settled": 0, "changed": 0}},
    ):
        assert not VALID.is_valid(broken)


def test_every_document_says_the_same() -> None:
    """Verdict, sums, every change with its reason; the text is as short as its changes."""
    record = harmless()
    text = comparing.render(record)
    page = Page.read(comparing_html.render(record)).words()
    ticket = comparing_markdown.render(record)

    assert record["fails"]
    assert any(change["counts"] for item in record["sets"] for change in item["changes"])
    for document in (text, page, ticket):
        assert comparing.verdict(record) in document
        assert comparing.summary(record) in document
    for item in record["sets"]:
        for change in item["changes"]:
            assert change["text"] in text
            assert change["text"] in page
    assert len(text.splitlines()) < 60


@pytest.mark.parametrize(
    ("fail_on", "sentence"),
    [
        ("hold", "Nothing new leads to hold."),
        ("conditions", "Nothing new leads to hold, open or conditions."),
        ("never", "Nothing fails this comparison: it was asked to fail never."),
    ],
)
def test_nothing_new(fail_on: str, sentence: str) -> None:
    """Says at which threshold."""
    record = compared(fixture("harbour"), fixture("harbour"), fail_on)
    sets = len(fixture("harbour")["parameter_sets"])

    assert comparing.render(record) == (
        f"0 new, 0 settled, 0 changed; {sets} sets unchanged\n{sentence}\n"
    )


def test_a_long_comparison_is_cut_at_a_set_and_says_so() -> None:
    """What counts comes first; the limit holds in UTF-16 units."""
    old, new = bulky(120), bulky(120)
    for item in new["parameter_sets"][:-1]:
        item["declaration"] = item["declaration"] | {"protect_until": 2031}
    last = new["parameter_sets"][-1] = dict(new["parameter_sets"][-1])
    last["findings"] = [last["findings"][0] | {"rule": "another"}, *last["findings"]]
    text = comparing_markdown.render(compared(old, new), limit=LEAST)

    assert len(text.encode("utf-16-le")) // 2 <= LEAST
    assert text.index("#119") < text.index("#0`")
    left = re.search(r"Left out for length: (\d+) sets", text)
    assert left is not None
    assert int(left[1]) + len(re.findall(r"^## ", text, re.MULTILINE)) == 120
    with pytest.raises(ValueError, match="at least 4,000"):
        comparing_markdown.render(compared(old, new), limit=LEAST - 1)


def test_the_page_asks_for_nothing() -> None:
    """No script, no address, a strict policy; ids are unique."""
    page = Page.read(comparing_html.render(harmless()))

    assert not page.tags() & {"script", "img", "link", "iframe", "object", "form", "input", "base"}
    assert page.attributes("content")[0].startswith("default-src 'none'; style-src 'unsafe-inline'")
    assert not page.attributes("src")
    assert all(target.startswith("#") for target in page.attributes("href"))
    assert len(page.attributes("id")) == len(set(page.attributes("id")))


HARMLESS_PAGE = Page.read(comparing_html.render(harmless()))
HARMLESS_TICKET = structure(tokens(comparing_markdown.render(harmless(), limit=10**6)))


@pytest.mark.parametrize("text", hostile_texts())
def test_outside_text_stays_text(text: str) -> None:
    """In all three documents: the same structure as without it, nothing hidden, nobody called."""
    record = hostile(text)
    source = comparing_html.render(record)
    page = Page.read(source)
    assert [tag for tag, _ in page.elements] == [tag for tag, _ in HARMLESS_PAGE.elements]
    assert [set(a) for _, a in page.elements] == [set(a) for _, a in HARMLESS_PAGE.elements]
    assert " ".join(visible(text).split()) in page.words()

    ticket = comparing_markdown.render(record, limit=10**6)
    found = tokens(ticket)
    assert structure(found) == HARMLESS_TICKET
    assert calls(found) == []
    spans = [" ".join(t.content.split()) for t in found if t.type == "code_inline"]
    assert any(" ".join(clipped(visible(text), 60).split()) in span for span in spans)

    for document in (source, ticket, comparing.render(record)):
        assert not re.search(HIDDEN, document.replace("\n", ""))
        document.encode("utf-8")


def run(*words: str) -> tuple[int, str, str]:
    """Exit status and what was written."""
    result = CliRunner().invoke(main, ["compare", *words], standalone_mode=False)
    if result.exception is not None:
        raise result.exception
    return result.return_value or 0, result.stdout, result.stderr


def test_the_command(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Every format, the summary unless one goes to standard output, and the exit statuses."""
    monkeypatch.chdir(tmp_path)
    old, new = fixture("harbour"), fixture("harbour")
    item = next(item for item in old["parameter_sets"] if item["position"] == "conditions")
    old["parameter_sets"].remove(item)
    Path("old.json").write_text(json.dumps(old))
    Path("new.json").write_text(json.dumps(new))

    status, out, _ = run("old.json", "new.json", "--html", "c.html", "--markdown", "c.md")
    assert status == 1
    assert "new set, conditions" in out
    assert "<h1>Comparison of two reviews</h1>" in Path("c.html").read_text()
    assert Path("c.md").read_text().startswith("# Comparison of two reviews")
    status, out, _ = run("old.json", "new.json", "--json", "-", "--fail-on", "open")
    assert status == 0
    VALID.validate(json.loads(out))
    assert run("new.json", "old.json")[0] == 0
    assert run("old.json", "new.json", "--fail-on", "never")[0] == 0


def test_the_least_limit_is_that_of_the_renderers() -> None:
    """The command refuses what they would refuse, without loading them."""
    assert options.LEAST_MARKDOWN == LEAST


@pytest.mark.parametrize(
    "words",
    [
        ("--html", "-", "--json", "-"),
        ("--html", "c", "--markdown", "c"),
        ("--markdown", "no/such/directory/c.md"),
        ("--markdown-limit", "100"),
        ("--fail-on", "sometimes"),
    ],
)
def test_wrong_usage(words: tuple[str, ...], tmp_path: Path) -> None:
    """Told before anything is read: there is no report here."""
    absent = str(tmp_path / "absent.json")
    result = CliRunner().invoke(main, ["compare", absent, absent, *words])

    assert result.exit_code == 2
    assert "absent.json" not in result.stderr


def test_what_is_no_report_is_refused(tmp_path: Path) -> None:
    """By what is wrong with it."""
    path = tmp_path / "r.json"
    path.write_text("{}")
    result = CliRunner().invoke(main, ["compare", str(path), str(path)])

    assert result.exit_code != 0
    assert "not a report of this format" in result.stderr
    twice = CliRunner().invoke(main, ["compare", "-", "-"], input="{}")
    assert "only one report can come from standard input" in twice.stderr
