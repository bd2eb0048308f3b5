"""Rules for a person: the listing, the text pages, and the reference as one HTML page."""

import re
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml

from auditor.facts import vocabulary
from auditor.report.text import HIDDEN, visible
from auditor.rule_pages import NoSuchRule, listing, page, reference
from auditor.rule_pages import tested as books_tested
from auditor.rulebooks.loading import available, load
from auditor.rulebooks.rulebook import Rule, RulebookError
from tests.report.pages import Page
from tests.report.records import SURROGATE, hostile_texts
from tests.test_cli import auditor  # noqa: F401  (the fixture is used by its name)


def book(text: str, confidence: str) -> dict[str, Any]:
    """A book in which ``text`` stands wherever text can, on one line where that is asked for."""
    line = " ".join(text.split())
    rule = {
        "id": "house-length",
        "title": line,
        "defect": "modulus-too-short",
        "grade": "major",
        "requires": "modulus.length >= 2048",
        "statement": re.sub("[{}]", "", text),
        "why": text,
        "criterion": {
            "document": "policy",
            "clause": line,
            "word": "shall",
            "confidence": confidence,
        },
        "remedy": text,
        "cautions": [text],
        "references": [text],
        "examples": {
            "conforming": [{"modulus.length": 4096}],
            "nonconforming": [{"modulus.length": 0}],
        },
    }
    documents = {"policy": {"title": line, "date": "2026", "status": line}}
    return {
        "rulebook": 1,
        "name": "house",
        "title": line,
        "documents": documents,
        "notes": [text],
        "rules": [rule],
    }


def rules() -> list[Rule]:
    """Every shipped rule."""
    return [rule for name in available() for rule in load(name, vocabulary()).rules]


@cache
def whole() -> str:
    """The reference of all shipped books."""
    return reference()


def house(tmp_path: Path, text: str, confidence: str = "confirmed") -> str:
    """The reference of a book in which a text stands wherever text can."""
    path = tmp_path / "house.yaml"
    path.write_text(yaml.safe_dump(book(text, confidence)), encoding="utf-8")
    return reference([path])


class TestReference:
    """One page, complete, safe to open."""

    def test_every_rule_has_a_place(self) -> None:
        """One anchor each; every link in the page leads to one."""
        parsed = Page.read(whole())
        ids = parsed.attributes("id")

        assert len(set(ids)) == len(ids)
        assert {f"rule-{rule.id}" for rule in rules()} | {
            f"book-{name}" for name in available()
        } == set(ids)
        links = parsed.attributes("href")
        assert links
        assert {link[1:] for link in links} == set(ids)
        assert all(link.startswith("#") for link in links)

    def test_no_script_and_a_policy_that_says_so(self) -> None:
        """Nothing but text and style; the content policy of the reports."""
        parsed = Page.read(whole())

        assert not parsed.tags() & {"script", "link", "img", "iframe", "object", "form", "base"}
        names = {name for _, attributes in parsed.elements for name in attributes}
        assert not {name for name in names if name.startswith("on")} | names & {"src", "style"}
        assert "default-src 'none'; style-src 'unsafe-inline'" in parsed.attributes("content")[0]
        assert "url(" not in whole()
        assert "@import" not in whole()

    def test_every_part_of_a_rule_is_shown(self) -> None:
        """Conditions, criterion, reasons, remedy, cautions, references and thresholds."""
        text = Page.read(whole()).words()
        for rule in rules():
            parts = [
                rule.title,
                rule.requires.source,
                rule.applies.source if rule.applies else "",
                rule.criterion.document.title,
                rule.criterion.clause,
                rule.why,
                rule.statement,
                rule.remedy,
                *rule.cautions,
                *rule.references,
                *rule.shows,
                *(f"CWE-{number}" for number in rule.cwe),
                *(f"values.{name}" for name in rule.values),
            ]
            for part in parts:
                assert " ".join(part.split()) in text, (rule.id, part)

    def test_every_example_is_shown(self) -> None:
        """As many entries as examples, each with the facts it states."""
        parsed = whole()
        for rule in rules():
            (article,) = re.findall(
                rf'<article id="rule-{re.escape(rule.id)}">(.*?)</article>', parsed, re.DOTALL
            )
            entries = re.findall(r"<li>(.*?)</li>", article, re.DOTALL)
            assert len(entries) == len(rule.examples), rule.id
            stated = sum(len(each.facts) + len(each.absent) for each in rule.examples)
            assert sum(entry.count("<code>") for entry in entries) == stated, rule.id

    @pytest.mark.parametrize(
        ("confidence", "words"),
        [
            ("confirmed", "shall; read in the document"),
            ("secondary", "clause to be confirmed: read in a text that restates it"),
            ("memory", "clause to be confirmed: from memory"),
        ],
    )
    def test_how_a_clause_is_known(self, tmp_path: Path, confidence: str, words: str) -> None:
        """Doubt stands beside the clause and in the head of the page."""
        text = Page.read(house(tmp_path, "plain", confidence)).words()

        assert words in text
        assert ("the clause of 1 is to be confirmed" in text) is (confidence != "confirmed")

    def test_the_books_named_and_no_others(self) -> None:
        """In the order given; a book that is none is refused, with those that are."""
        parsed = Page.read(reference(["tls", "strength"]))
        books = [name for name in parsed.attributes("id") if name.startswith("book-")]

        assert books == ["book-tls", "book-strength"]
        with pytest.raises(RulebookError, match="shipped"):
            reference(["no-such-book"])

    @pytest.mark.parametrize("text", [t for t in hostile_texts() if t.strip() and t != SURROGATE])
    def test_text_of_a_book_stays_text(self, tmp_path: Path, text: str) -> None:
        """The same elements as with plain text, nothing hidden, the text itself shown."""
        source = house(tmp_path, text)
        parsed, plain = Page.read(source), Page.read(house(tmp_path, "plain"))

        assert [tag for tag, _ in parsed.elements] == [tag for tag, _ in plain.elements]
        assert [set(a) for _, a in parsed.elements] == [set(a) for _, a in plain.elements]
        assert not re.search(HIDDEN, source.replace("\n", ""))
        assert visible(" ".join(text.split())) in parsed.words()

    def test_equal_books_equal_bytes(self) -> None:
        """Nothing but the books moves the page."""
        assert reference(["tls"]) == reference(["tls"])


class TestTextPages:
    """What the terminal shows."""

    @pytest.mark.parametrize("name", ["tls", "group-structure"])
    def test_a_rule_and_a_book(self, name: str) -> None:
        """A page of each that names it first; that of the book has all its rules."""
        book_rules = load(name, vocabulary()).rules
        text = page(name)

        assert text.startswith(f"{name}: ")
        assert all(rule.id in text for rule in book_rules)
        assert page(book_rules[-1].id).startswith(f"{book_rules[-1].id} ({name}, ")

    def test_a_misspelt_name(self) -> None:
        """What is near is suggested."""
        with pytest.raises(NoSuchRule, match="generator-trivial"):
            page("generator-trivail")

    def test_the_listing_names_every_rule(self) -> None:
        """A line for each."""
        lines = listing().splitlines()
        assert {rule.id for rule in rules()} <= {line.split()[0] for line in lines}

    def test_a_broken_book_is_counted(self, tmp_path: Path) -> None:
        """Its problems are the failures."""
        path = tmp_path / "broken.yaml"
        path.write_text("rulebook: 1\n")
        failures, summary = books_tested([str(path)])

        assert failures
        assert summary.endswith(f"{len(failures)} failures")


class TestCommand:
    """``rulebook show`` as a person meets it."""

    def test_the_page_is_written(self, auditor: Any) -> None:  # noqa: F811
        """To a file or to standard output; all books, or those named."""
        assert auditor("rulebook", "show", "--html", "rules.html").status == 0
        assert Path("rules.html").read_text(encoding="utf-8") == whole()
        some = auditor("rulebook", "show", "tls", "--html", "-")
        assert some.out == reference(["tls"])

    def test_wrong_usage(self, auditor: Any) -> None:  # noqa: F811
        """Neither a name nor a file, a book that is none, a place that cannot be written."""
        for words in ((), ("none-such", "--html", "x"), ("--html", "no/such/folder/x"), ("nix",)):
            result = auditor("rulebook", "show", *words)
            assert result.status == 2
            assert result.err.strip()

    def test_several_names(self, auditor: Any) -> None:  # noqa: F811
        """Their pages one after the other."""
        result = auditor("rulebook", "show", "generator-trivial", "tls")

        assert result.out == page("generator-trivial") + "\n" + page("tls")
