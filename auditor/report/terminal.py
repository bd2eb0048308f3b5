"""The report as a summary for a terminal: plain text, one screen, worst first.

Colour is only added when asked for, around words that carry the meaning without it.
"""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from textwrap import wrap

from auditor.intake.reading import candidates_in
from auditor.report.common_view import common
from auditor.report.sheet_view import Sheet
from auditor.report.text import clipped
from auditor.report.view import Record, View, view
from auditor.report.words import plural

_STYLES: Mapping[str, str] = {"hold": "1;31", "open": "1;34", "conditions": "1", "no objection": ""}
"""Select Graphic Rendition parameters, ECMA-48 8.3.117."""

_LABEL = 14
_COLUMNS = ("required", "tables", "passive", "peer", "designer")
_MOST_LISTED = 3


def render(
    record: Record | View, *, width: int = 80, height: int = 24, colour: bool = False
) -> str:
    """The summary: ``height`` lines of ``width`` columns, more only for the worst set's own.

    As many sets as fit are shown, the worst first, and the line below counts the others; sets that
    come out alike share a row. Where not all fit with two lines of reasons, each has one, without
    its place.
    """
    report = view(record)
    head, foot = list(_head(report, width)), list(_foot(report, width))
    room = height - len(head) - len(foot) - 1
    body: list[str] = []
    shown = 0
    rows = _alike(report.sheets)
    most = 2 if 3 * len(rows) <= room else 1
    for sheets in rows:
        lines = _row(sheets, width, most, colour)
        if body and len(body) + len(lines) > room:
            break
        body += lines
        shown += len(sheets)
    if left := len(report.sheets) - shown:
        body.append(f"{plural(left, 'more set')}, none of a worse position.")
    return "\n".join([*head, *body, *foot]) + "\n"


def _head(report: View, width: int) -> Iterator[str]:
    yield clipped(f"Group parameters reviewed as of {report.as_of}: {report.size}", width)
    if report.worst is not None:
        counts = "   ".join(f"{name} {count:,}" for name, count in report.positions)
        yield clipped(f"{counts}   (figures in bits)", width)
    yield from _listed("not read", report.problems, width)
    yield from _listed("notice", report.notices, width)
    things = common(report.record["overview"])
    yield from _listed("factor", [item.text for item in things if item.kind == "factor"], width)
    found = candidates_in(report.record["skipped"])
    yield from _listed("candidate", [": ".join(item) for item in found], width, most=1)
    if report.sheets:
        yield ""
        columns = " ".join(f"{name:>8}" for name in _COLUMNS)
        yield f"{'position':<{_LABEL}}{columns}  set"


def _alike(sheets: Iterable[Sheet]) -> list[list[Sheet]]:
    """The sheets by what a row would say of them, in order of the first."""
    rows: dict[tuple[str, ...], list[Sheet]] = {}
    for sheet in sheets:
        rows.setdefault((sheet.position, *_figures(sheet), sheet.reason), []).append(sheet)
    return list(rows.values())


def _figures(sheet: Sheet) -> tuple[str, ...]:
    strength = sheet.strength
    return (
        str(strength.required),
        strength.tables_text,
        strength.passive.text,
        strength.peer.text,
        strength.designer.text,
    )


def _row(sheets: list[Sheet], width: int, most: int, colour: bool) -> list[str]:
    first = sheets[0]
    row = " ".join(f"{figure:>8}" for figure in _figures(first)) + "  "
    more = sum(len(sheet.places) for sheet in sheets) - 1
    places = first.places[0] + (f" and {plural(more, 'more place')}" if more else "")
    reason = f"{places}: {first.reason}" if most > 1 else first.reason
    others = f" and {len(sheets) - 1:,} more" if len(sheets) > 1 else ""
    room = max(width - _LABEL - len(row), 8)
    return [
        _styled(f"{first.position:<{_LABEL}}", first.position, colour)
        + row
        + clipped(first.name, max(room - len(others), 1))
        + others,
        *_entry("", reason, width, most),
    ]


def _foot(report: View, width: int) -> Iterator[str]:
    if not report.sheets:
        yield "Nothing was reviewed."
    if candidates := candidates_in(report.record["skipped"]):
        verb = "waits" if len(candidates) == 1 else "wait"
        text = f"{plural(len(candidates), 'candidate')} {verb} for a usage file to be reviewed."
        yield clipped(text, width)
    if report.questions:
        yield f"{plural(len(report.questions), 'question')} open."
    yield from wrap(" ".join(report.cautions), width)


def _listed(label: str, items: Sequence[str], width: int, most: int = 2) -> Iterator[str]:
    for item in items[:_MOST_LISTED]:
        yield from _entry(label, item, width, most)
    if len(items) > _MOST_LISTED:
        yield from _entry(label, f"and {len(items) - _MOST_LISTED:,} more", width)


def _entry(label: str, text: str, width: int, most: int = 2) -> list[str]:
    """A label and at most so many lines of text beside it."""
    room = width - _LABEL
    lines = wrap(text, room) or [""]
    if len(lines) > most:
        lines[most - 1 :] = [clipped(" ".join(lines[most - 1 :]), room)]
    return [f"{label if number == 0 else '':<{_LABEL}}{line}" for number, line in enumerate(lines)]


def _styled(text: str, position: str, colour: bool) -> str:
    style = _STYLES[position]
    return f"\x1b[{style}m{text}\x1b[0m" if colour and style else text
