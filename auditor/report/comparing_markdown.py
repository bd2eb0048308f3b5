"""A comparison of two reports as Markdown for a ticket: a section for each set that differs."""

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.comparing import (
    by_urgency,
    label,
    positions,
    sentence,
    sorted_changes,
    summary,
    verdict,
)
from auditor.report.markdown_text import LIMIT, fitted, prose, span
from auditor.report.text import clipped, visible_record

Record = Mapping[str, Any]

_SENTENCE = 400
_MOST_CHANGES, _MOST_FACTS = 20, 12


def render(comparison: Record, *, limit: int = LIMIT) -> str:
    """The comparison in at most ``limit`` UTF-16 units; ValueError for a limit too small."""
    shown = visible_record(comparison)
    sets = by_urgency(shown["sets"])
    head, foot = "\n".join(_head(shown)), "\n"
    return fitted(head, map(_set, sets), foot, limit=limit, kind="set")


def _head(shown: Record) -> Iterator[str]:
    yield "# Comparison of two reviews"
    yield ""
    yield f"**{verdict(shown)}**"
    yield ""
    yield f"{prose(summary(shown))}."
    yield ""
    for name in ("old", "new"):
        report = shown[name]
        yield (
            f"- {name}: as of {span(report['as_of'])}, version {span(report['version'])}, "
            f"record SHA-256 {span(report['sha256'][:16])}"
        )
    yield from (_change(change) for change in shown["run"][:_MOST_CHANGES])
    yield ""


def _set(item: Record) -> str:
    lines = [
        f"\n## {span(item['id'], _SENTENCE)}: {positions(item)}",
        "",
        *(_change(change) for change in sorted_changes(item)[:_MOST_CHANGES]),
    ]
    if len(item["changes"]) > _MOST_CHANGES:
        lines.append(f"- and {len(item['changes']) - _MOST_CHANGES:,} more")
    if item["facts"]:
        facts = ", ".join(span(fact) for fact in item["facts"][:_MOST_FACTS])
        left = len(item["facts"]) - _MOST_FACTS
        lines.append(f"- values: {facts}" + (f" and {left:,} more" if left > 0 else ""))
    return "\n".join(lines) + "\n"


def _change(change: Record) -> str:
    name = f"**{label(change)}**" if change["counts"] else label(change)
    return f"- {name}: {prose(clipped(sentence(change), _SENTENCE))}"
