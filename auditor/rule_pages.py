"""Rulebooks for a person: a listing, the page of a rule or a book, the reference of all rules as
one HTML page, and the result of their tests."""

import textwrap
from collections.abc import Iterable, Iterator, Sequence
from difflib import get_close_matches
from pathlib import Path
from typing import Any

from auditor.encoding import shorten
from auditor.facts import vocabulary
from auditor.report.templates import environment
from auditor.report.text import visible
from auditor.report.words import plural
from auditor.rulebooks.examples import failures
from auditor.rulebooks.loading import DEFAULT_BOOKS, available, load, load_all
from auditor.rulebooks.rulebook import Criterion, Example, Outcome, Rule, Rulebook, RulebookError

WIDTH = 88


class NoSuchRule(LookupError):
    """No shipped rule or book has that name."""


def listing() -> str:
    """Every shipped book with its rules, a line each, and which of them are in use where none are
    named."""
    lines: list[str] = []
    for name in available():
        book = load(name, vocabulary())
        usual = " (in use unless --rulebook names others)" if name in DEFAULT_BOOKS else ""
        lines += [f"{book.name}: {book.title}{usual}"]
        lines += [f"  {rule.id:<40} {rule.grade:<12} {rule.title}" for rule in book.rules]
    return "\n".join(lines) + "\n"


def page(name: str) -> str:
    """The page of the shipped rule or book of that name; raises :class:`NoSuchRule`."""
    books = [load(book, vocabulary()) for book in available()]
    for book in books:
        if book.name == name:
            return "\n".join(_book(book)) + "\n"
    rules = {rule.id: (book, rule) for book in books for rule in book.rules}
    if name not in rules:
        close = get_close_matches(name, [*rules, *available()], 3)
        hint = f"; did you mean {' or '.join(close)}?" if close else ""
        raise NoSuchRule(f"no rule or book is called {name}{hint}")
    return "\n".join(_rule(*rules[name])) + "\n"


def reference(sources: Sequence[str | Path] = ()) -> str:
    """The books of these names or files, all shipped ones for none, as one HTML page.

    It needs no other file: no script, no request; a place ``#rule-ID`` for every rule. Raises
    RulebookError for books that cannot be used together.
    """
    books = load_all(sources or available(), vocabulary())
    rules = [rule for book in books for rule in book.rules]
    showing = environment().overlay(finalize=_shown)
    return showing.get_template("rules.html.j2").render(
        books=books,
        rules=rules,
        doubtful=sum(rule.criterion.confidence != "confirmed" for rule in rules),
        count=plural,
        oneline=_oneline,
        criterion=_criterion,
        examples=_examples,
    )


def _shown(value: Any) -> Any:
    """Text of a book, which anybody may have written, with nothing hidden in it."""
    return visible(value) if type(value) is str else value


def _oneline(text: str) -> str:
    return " ".join(visible(text).split())


def _examples(rule: Rule) -> Iterator[tuple[str, list[list[str]]]]:
    """The examples of a rule by outcome, in the order of the outcomes' first example."""
    groups: dict[Outcome, list[list[str]]] = {}
    for example in rule.examples:
        groups.setdefault(example.outcome, []).append(list(_example(example)))
    yield from groups.items()


def _example(example: Example) -> Iterator[str]:
    """What an example states, a fact each: its value, its bound, or why it is absent."""
    for name, fact in example.facts.items():
        loose = "" if fact.tight else " (may still move)"
        yield f"{name} = {_value(fact.value)}{loose}"
    for name, absent in example.absent.items():
        yield f"{name} {absent.reason}"


def _value(value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, str) else shorten(value)


def tested(names: Sequence[str]) -> tuple[list[str], str]:
    """The failures of these books, all shipped ones for none, and a line that sums up."""
    found: list[str] = []
    rules = examples = 0
    for name in names or available():
        try:
            book = load(name, vocabulary())
        except RulebookError as error:
            found += [str(problem) for problem in error.problems]
            continue
        found += [str(problem) for problem in failures(book, vocabulary())]
        rules += len(book.rules)
        examples += sum(len(rule.examples) for rule in book.rules)
    count = len(names or available())
    return found, f"{count} books, {rules} rules, {examples} examples, {len(found)} failures"


def _book(book: Rulebook) -> Iterator[str]:
    yield f"{book.name}: {book.title}"
    yield ""
    for note in book.notes:
        yield from _paragraph(note)
    yield from (f"  {key}: {doc.title}, {doc.date}" for key, doc in sorted(book.documents.items()))
    yield ""
    yield from (f"  {rule.id:<40} {rule.grade:<12} {rule.title}" for rule in book.rules)


def _rule(book: Rulebook, rule: Rule) -> Iterator[str]:
    yield f"{rule.id} ({book.name}, {rule.grade})"
    yield ""
    yield from _paragraph(f"{rule.title}. {rule.why}")
    yield ""
    if rule.applies is not None:
        yield from _entry("applies", rule.applies.source)
    yield from _entry("requires", rule.requires.source)
    yield from _entry("criterion", _criterion(rule.criterion))
    yield from _entry("statement", rule.statement)
    yield from _entry("remedy", rule.remedy)
    yield from _entries("caution", rule.cautions)
    yield from _entries("CWE", [str(number) for number in rule.cwe])
    yield from _entries("reference", rule.references)


def _criterion(criterion: Criterion) -> str:
    known = {
        "confirmed": "read in the document",
        "secondary": "clause to be confirmed: read in a text that restates it",
        "memory": "clause to be confirmed: from memory",
    }[criterion.confidence]
    return f"{criterion.document.title}, {criterion.clause} ({criterion.word}; {known})"


def _entries(label: str, texts: Iterable[str]) -> Iterator[str]:
    for text in texts:
        yield from _entry(label, text)


def _entry(label: str, text: str) -> Iterator[str]:
    lines = textwrap.wrap(" ".join(text.split()), WIDTH - 12) or [""]
    yield f"{label + ':':<12}{lines[0]}"
    yield from (" " * 12 + line for line in lines[1:])


def _paragraph(text: str) -> Iterator[str]:
    yield from textwrap.wrap(" ".join(text.split()), WIDTH)
