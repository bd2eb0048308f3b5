"""What documents need from a record and the record does not say outright.

The record has one entry for each declared set and one finding for each rule. A reader wants one
sheet for each different modulus, generator and usage, the one reason that decides it, and every
open question once with all that waits for it. All text that leaves this module is visible text
(:mod:`auditor.report.text`); what it means to a format is the renderer's to escape.
"""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from auditor.report import words
from auditor.report.findings_view import Merging
from auditor.report.json_report import write
from auditor.report.questions_view import Question, questions
from auditor.report.sheet_view import Sheet, sheet
from auditor.report.strength_view import strength
from auditor.report.text import visible_record
from auditor.report.words import plural

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Input:
    """A file that was read."""

    path: str
    sha256: str


@dataclass(frozen=True, slots=True)
class Book:
    """A rulebook in force."""

    name: str
    title: str
    sha256: str
    rules: int
    documents: tuple[str, ...]
    notes: tuple[str, ...]


@dataclass(frozen=True)
class View:
    """A whole report, ready to be written in any format."""

    record: Record
    record_digest: str
    """SHA-256 of the JSON report: of the record as it was given, before its text was made
    visible."""

    sheets: tuple[Sheet, ...]
    books: tuple[Book, ...]

    @property
    def as_of(self) -> str:
        """The date of the review."""
        return str(self.record["run"]["as_of"])

    @property
    def tool(self) -> str:
        """Program and version."""
        return f"{self.record['tool']['name']} {self.record['tool']['version']}"

    @property
    def effort(self) -> str:
        """How far search went, in words."""
        run = self.record["run"]
        digits = run["factor_digits"]
        depth = f", factors of up to {digits} digits searched for" if digits is not None else ""
        return f"{run['effort']}{depth}; engine: {run['engine']}"

    @property
    def inputs(self) -> tuple[Input, ...]:
        """The files that were read."""
        return tuple(Input(item["path"], item["sha256"]) for item in self.record["inputs"])

    @property
    def positions(self) -> tuple[tuple[str, int], ...]:
        """How many sets have each position, worst first."""
        counts = self.record["overview"]["positions"]
        return tuple((name, counts[name]) for name in words.POSITIONS)

    @property
    def by_position(self) -> tuple[tuple[str, tuple[Sheet, ...]], ...]:
        """The sheets that something keeps from release, by position, worst first."""
        found = {name: [s for s in self.sheets if s.position == name] for name in words.POSITIONS}
        return tuple((name, tuple(found[name])) for name in words.POSITIONS[:-1] if found[name])

    @property
    def worst(self) -> str | None:
        """The worst position of any set; None without a set."""
        return next((name for name, count in self.positions if count), None)

    @property
    def size(self) -> str:
        """How many sets, moduli and sheets."""
        overview = self.record["overview"]
        sets, moduli = overview["sets"], len(overview["moduli"])
        different = f" ({len(self.sheets):,} of them different)" if sets != len(self.sheets) else ""
        return f"{plural(sets, 'parameter set')}{different}, {plural(moduli, 'modulus', 'moduli')}"

    @property
    def verdict(self) -> str:
        """What the positions say about release, in one sentence."""
        return words.verdict(dict(self.positions))

    @cached_property
    def questions(self) -> tuple[Question, ...]:
        """What is open, the question that most waits for first; the owner's after search's."""
        return questions(self.sheets)

    @cached_property
    def limits(self) -> Mapping[str, tuple[Sheet, ...]]:
        """What was not examined or settled, each sentence once with the sheets it is true of."""
        found: dict[str, list[Sheet]] = {}
        for item in self.sheets:
            for limit in item.limits:
                found.setdefault(limit, []).append(item)
        return {limit: tuple(sheets) for limit, sheets in found.items()}

    def claims_behind(self, sheets: Iterable[Sheet]) -> list[str]:
        """Ids of the claims that any value of these sheets rests on, directly or not, sorted."""
        claims = self.record["claims"]
        wanted = [
            key
            for item in sheets
            for fact in item.record["facts"].values()
            for key in fact["claims"]
        ]
        found: set[str] = set()
        while wanted:
            key = wanted.pop()
            if key in claims and key not in found:
                found.add(key)
                wanted += claims[key]["uses"]
        return sorted(found)

    @property
    def problems(self) -> tuple[str, ...]:
        """Inputs that could not be read: place and message."""
        return tuple(_problem(error) for error in self.record["errors"])

    @property
    def skipped(self) -> tuple[str, ...]:
        """What was seen and not reviewed."""
        return tuple(
            f"{_at(item, 'path', 'line')}: {item['reason']}" for item in self.record["skipped"]
        )

    @property
    def notices(self) -> tuple[str, ...]:
        """What the reader of the whole run must know."""
        missing = "This report is incomplete: inputs, sets or answers are missing."
        return (() if self.record["complete"] else (missing,)) + tuple(self.record["notices"])

    @property
    def cautions(self) -> tuple[str, ...]:
        """The limits of the whole report."""
        return tuple(self.record["cautions"])


def _nowhere(_: bytes) -> None:
    """Where the JSON report goes that nobody asked for."""


def view(record: "Record | View", put: Callable[[bytes], object] = _nowhere) -> View:
    """The view of a record in the shape of ``report.schema.json``; a view is its own view, so
    that several renderers can share one.

    The digest takes the JSON report, which ``put`` gets on the way, in pieces.
    """
    if isinstance(record, View):
        return record
    written = write(record, put)
    shown = visible_record(record) if written.may_hide else record
    merging = Merging(
        {rule: text for book in shown["rulebooks"] for rule, text in book["rules"].items()}
    )
    groups: dict[str, list[Record]] = {}
    for parameter_set in shown["parameter_sets"]:
        groups.setdefault(parameter_set["digest"], []).append(parameter_set)
    ordered = sorted(groups.values(), key=_urgency)
    return View(
        shown,
        written.sha256,
        tuple(sheet(number, group, merging) for number, group in enumerate(ordered, 1)),
        tuple(_book(book) for book in shown["rulebooks"]),
    )


def _urgency(group: list[Record]) -> tuple[int, float]:
    """Worst position first, then the least work; sorting is stable, so then input order."""
    first = group[0]
    work = strength(first).peer.bits
    return words.POSITIONS.index(first["position"]), float("inf") if work is None else work


def _book(book: Record) -> Book:
    return Book(
        book["name"],
        book["title"],
        book["sha256"],
        len(book["rules"]),
        tuple(document["title"] for document in book["documents"].values()),
        tuple(book.get("notes", ())),
    )


def _problem(error: Record) -> str:
    return f"{_at(error, 'path', 'line', 'column')}: {error['message']}"


def _at(record: Record, *keys: str) -> str:
    return ":".join(str(record[key]) for key in keys if record.get(key) is not None)
