"""The report as Markdown for a ticket: worst first, cut at a finding, saying what was left out.

Text from outside stands in code spans, where Markdown has no meaning: it cannot mention anybody,
link, break a table or become markup. Sentences of rulebooks stay readable text with the few
active characters defused.
"""

import re
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import chain
from typing import TypeVar

from auditor.report.common_view import MOST_NAMED, Common, common
from auditor.report.markdown_sheets import (
    Piece,
    Told,
    in_brief,
    in_full,
    observed,
    without_observations,
)
from auditor.report.markdown_text import (
    LIMIT,
    MESSAGE,
    cell,
    prose,
    require_room,
    span,
    units,
)
from auditor.report.questions_view import Question
from auditor.report.shared_findings import Lines, SharedFinding, by_sheet, shared_findings
from auditor.report.sheet_view import Sheet
from auditor.report.text import clipped
from auditor.report.view import Record, View, view
from auditor.report.words import plural

Item = TypeVar("Item")


def render(record: Record | View, *, limit: int = LIMIT) -> str:
    """The report in at most ``limit`` UTF-16 units. ValueError for a limit below :data:`LEAST`."""
    require_room(limit)
    report = view(record)
    head, foot = "\n".join(_head(report)), "\n".join(_foot(report))
    room = _Room(limit - units(head) - units(foot) - _RESERVE)
    decisions = _fitted("set", _DECISIONS, report.sheets, _row, room.share(3))
    things = common(report.record["overview"])
    shares = _fitted("point", "\n## In common\n\n", things, _in_common, room.share(8))
    after = [
        _fitted("question", "\n## Open questions\n\n", report.questions, _question, room.share(6)),
        _fitted("message", "\n## Not read\n\n", report.problems, _message, room.share(6)),
        _fitted("file", "\n## Skipped\n\n", report.skipped, _message, room.share(12)),
    ]
    shared, told = _shared_section(report, room.share(2))
    return "".join([head, decisions, shares, shared, *_findings(report, room, told), *after, foot])


_RESERVE = 600
"""Kept free for the sentences that say what was left out: seven, none above 85 characters."""


@dataclass(slots=True)
class _Room:
    """UTF-16 units that may still be written."""

    left: int

    def share(self, parts: int) -> "_Room":
        """One of so many equal parts; what is taken from it is taken from the whole."""
        return _Share(self.left // parts, self)

    def take(self, text: str) -> bool:
        """Whether ``text`` fits; its room is then taken."""
        size = units(text)
        if size > self.left:
            return False
        self.left -= size
        return True


@dataclass(slots=True)
class _Share(_Room):
    whole: _Room

    def take(self, text: str) -> bool:
        size = units(text)
        if size > self.left:
            return False
        self.left -= size
        self.whole.left -= size
        return True


def _head(report: View) -> Iterator[str]:
    yield "# Review of finite-field group parameters"
    yield ""
    yield f"**{report.verdict}**"
    yield ""
    yield f"{report.size[0].upper()}{report.size[1:]}."
    yield ""
    yield f"As of {report.as_of}, {span(report.tool)}, effort {span(report.effort)}."
    books = ", ".join(f"{span(book.name)} ({span(book.sha256[:12])})" for book in report.books[:20])
    yield f"Rulebooks (SHA-256): {books or 'none'}."
    yield f"{plural(len(report.inputs), 'input')}; record SHA-256 {span(report.record_digest)}."
    for notice in report.notices[:10]:
        yield ""
        yield f"Note: {span(notice, MESSAGE)}"
    yield ""


_DECISIONS = """
## Decision sheet

Bits: what is required, what published tables give, and the least work by model for one who sees
public values (passive), also sends values (peer), or chose the parameters (designer). A model
figure never overrules a published figure for the same thing.

| | position | set | required | tables | passive | peer | designer | decided by |
| ---: | --- | --- | ---: | ---: | ---: | ---: | ---: | --- |
"""


def _row(sheet: Sheet) -> str:
    strength = sheet.strength
    cells = [
        str(sheet.number),
        f"**{sheet.position}**" if sheet.position == "hold" else sheet.position,
        cell(sheet.name, 60),
        str(strength.required),
        strength.tables_text,
        strength.passive.text,
        strength.peer.text,
        strength.designer.text,
        prose(clipped(sheet.reason, 160)),
    ]
    return f"| {' | '.join(cells)} |\n"


def _shared_section(report: View, room: _Room) -> tuple[str, Told]:
    """As many of the findings of several sets as fit, and where these stand on the sheets; the
    others are told on each sheet."""
    found = shared_findings(report.sheets)
    fits = bool(found) and room.take(_SHARED)
    texts: list[str] = []
    for text in map(_shared, found) if fits else ():
        if not room.take(text):
            break
        texts.append(text)
    return (_SHARED if texts else "") + "".join(texts), by_sheet(found[: len(texts)])


_SHARED = """
## Findings of several sets

Equal in defect, outcome, grade and usage. Each is told once; sheets refer to it by its number.
"""


def _shared(finding: SharedFinding) -> str:
    sets = plural(len(finding.members), "set")
    heading = f"{prose(finding.first.heading)} {prose(finding.first.statements[0])}"
    note = f"The words are those of set {finding.members[0][0].number}; each sheet has its own."
    lines = [
        f"\n### F{finding.number}. {finding.first.words}, {sets}",
        "",
        re.sub(" +", " ", heading).strip(),
        *(f"Also: {prose(statement)}" for statement in finding.first.statements[1:]),
        *([] if finding.same_words else ["", note]),
        "",
        f"- Sets: {finding.numbers}",
        f"- Where: {_where(finding.places)}",
        *(f"- Criterion: {prose(item.source)} ({span(item.rule)})" for item in finding.criteria),
    ]
    if finding.first.outcome == "undetermined":
        lines += [f"- Missing: {span(name)}, {prose(why)}" for name, why in finding.missing]
    for remedy in finding.remedies:
        lines.append(f"- Remedy: {prose(remedy.text)}")
        lines += [f"- It breaks: {prose(item)}" for item in remedy.breaks]
    if finding.has_own_remedies:
        own = "in the JSON report" if finding.first.grade == "observation" else "on its sheet"
        lines.append(f"- Remedy: each set has its own, {own}.")
    lines += [f"- Caution: {prose(caution)}" for caution in finding.cautions]
    return "\n".join(lines) + "\n"


def _where(places: Sequence[Lines]) -> str:
    """The first files with their lines, each within bounds, and how many more files there are."""
    text = ", ".join(span(place.text, 400) for place in places[:8])
    return text + (f" and {plural(len(places) - 8, 'more file')}" if len(places) > 8 else "")


def _findings(report: View, room: _Room, told: Told) -> Iterator[str]:
    """Sheets with their findings, worst first, until one does not fit; then what was left out.

    Where not everything fits, what keeps any set from release is told in few words, before all
    observations.
    """
    pieces: Iterable[Piece] | None = _all_that_fit(in_full(report.sheets, told), room.left)
    if pieces is None:
        weighty = without_observations(report.sheets)
        pieces = chain(in_brief(weighty, told), observed(report.sheets))
    shown: list[Piece] = []
    for piece in pieces:
        if not room.take(piece.text):
            break
        shown.append(piece)
        yield piece.text
    findings = sum(len(sheet.findings) for sheet in report.sheets)
    findings -= sum(piece.findings for piece in shown)
    sheets = len(report.sheets) - sum(piece.opens for piece in shown)
    if findings or sheets:
        yield (
            f"\nLeft out for length: {plural(findings, 'finding')}, and the sheets of "
            f"{plural(sheets, 'set')}; the worst are above.\n"
        )


def _all_that_fit(pieces: Iterable[Piece], room: int) -> list[Piece] | None:
    """The pieces where there is room for all of them."""
    taken = []
    for piece in pieces:
        room -= units(piece.text)
        if room < 0:
            return None
        taken.append(piece)
    return taken


def _question(question: Question) -> str:
    sets = ", ".join(f"{number}" for number, _, _ in question.waiting[:20])
    waiting = f" Sets that wait for it: {sets}." if sets else ""
    effects = " ".join(prose(effect) for effect in question.effects[:3])
    return (
        f"- {prose(question.about)} Cost: {prose(question.cost)}.{waiting} {effects}".rstrip()
        + "\n"
    )


def _in_common(thing: Common) -> str:
    names = ", ".join(span(name) for name in thing.names[:MOST_NAMED])
    more = len(thing.names) - MOST_NAMED
    return f"- {prose(thing.sentence)}: {names}{f' and {more:,} more' if more > 0 else ''}.\n"


def _message(text: str) -> str:
    return f"- {span(text, MESSAGE)}\n"


def _fitted(
    kind: str, title: str, items: Sequence[Item], write: Callable[[Item], str], room: _Room
) -> str:
    """A section with as many of its items as fit, and how many do not."""
    shown: list[str] = []
    fits = room.take(title) if items else False
    for text in map(write, items) if fits else ():
        if not room.take(text):
            break
        shown.append(text)
    left = len(items) - len(shown)
    note = f"\nLeft out for length: {plural(left, kind)}.\n" if left else ""
    return (title if fits else "") + "".join(shown) + note


def _foot(report: View) -> Iterator[str]:
    yield ""
    yield "## Cautions"
    yield ""
    yield from (f"- {prose(caution)}" for caution in report.cautions)
    yield ""
