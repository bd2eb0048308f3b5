"""A comparison of two reports: the record of it, and the record as text."""

import hashlib
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from auditor import __version__
from auditor.compare import Change, Comparison, SetChanges
from auditor.report.json_report import dumps
from auditor.report.record import TOOL
from auditor.report.text import visible_record
from auditor.report.words import plural

Record = Mapping[str, Any]

FORMAT = 1
KINDS = ("new", "settled", "changed")
MOST_FACTS = 4
"""Values listed for one set in text; the JSON record has all."""


def record(found: Comparison, old: Record, new: Record, fail_on: str) -> dict[str, Any]:
    """The comparison in the shape of ``comparison.schema.json``; equal arguments, equal record."""
    kinds: list[str] = [change.kind for change in found.changes]
    return {
        "comparison": FORMAT,
        "tool": {"name": TOOL, "version": __version__},
        "old": _report(old),
        "new": _report(new),
        "fail_on": fail_on,
        "fails": found.fails(fail_on),
        "counts": {kind: kinds.count(kind) for kind in KINDS},
        "run": [_change(change, fail_on) for change in found.run],
        "sets": [_set(item, fail_on) for item in found.sets],
        "unchanged": found.unchanged,
    }


def _report(report: Record) -> dict[str, Any]:
    return {
        "as_of": report["run"]["as_of"],
        "version": report["tool"]["version"],
        "sets": len(report["parameter_sets"]),
        "sha256": hashlib.sha256(dumps(report).encode()).hexdigest(),
    }


def _set(item: SetChanges, fail_on: str) -> dict[str, Any]:
    return {
        "id": item.identity,
        "before": item.before,
        "after": item.after,
        "changes": [_change(change, fail_on) for change in item.changes],
        "facts": list(item.facts),
    }


def _change(change: Change, fail_on: str) -> dict[str, Any]:
    return {
        "kind": change.kind,
        "text": change.text,
        "level": change.level,
        "reason": change.reason,
        "counts": change.counts(fail_on),
    }


def verdict(comparison: Record) -> str:
    """What the comparison comes to, in one sentence."""
    counts = [change["counts"] for change in _all(comparison)].count(True)
    threshold = comparison["fail_on"]
    if threshold == "never":
        return "Nothing fails this comparison: it was asked to fail never."
    if not counts:
        return f"Nothing new leads to {_at_or_above(threshold)}."
    one = "One new point leads" if counts == 1 else f"{counts:,} new points lead"
    return f"{one} to {_at_or_above(threshold)}."


def _at_or_above(threshold: str) -> str:
    return {"hold": "hold", "open": "hold or open", "conditions": "hold, open or conditions"}[
        threshold
    ]


def summary(comparison: Record) -> str:
    """How much is new, settled, changed and as it was."""
    counts = ", ".join(f"{comparison['counts'][kind]:,} {kind}" for kind in KINDS)
    return f"{counts}; {plural(comparison['unchanged'], 'set')} unchanged"


def by_urgency(sets: Iterable[Record]) -> list[Record]:
    """Sets with something that counts first, then those with a finding that came or went."""
    return sorted(sets, key=lambda item: (not _counting(item), not is_weighty(item)))


def _counting(item: Record) -> bool:
    return any(change["counts"] for change in item["changes"])


def is_weighty(item: Record) -> bool:
    """Whether a finding came or went, or the position moved."""
    moved = item["before"] != item["after"]
    return moved or any(change["kind"] != "changed" for change in item["changes"])


def sorted_changes(item: Record) -> list[Record]:
    """What is new first, then what is settled, then the rest."""
    return sorted(item["changes"], key=lambda change: KINDS.index(change["kind"]))


def positions(item: Record) -> str:
    """The position of a set, then and now; 'new' and 'gone' for none."""
    before, after = item["before"] or "new", item["after"] or "gone"
    return str(after) if before == after else f"{before} to {after}"


def label(change: Record) -> str:
    """The kind, and the position that something new leads to."""
    level = change["level"]
    return (
        f"new, {level}" if change["kind"] == "new" and level != "no objection" else change["kind"]
    )


def render(comparison: Record) -> str:
    """Changes of the run, then those of each set, new ones first; last what it comes to."""
    shown = visible_record(comparison)
    lines = [f"run: {_line(change)}" for change in shown["run"]]
    for item in by_urgency(shown["sets"]):
        lines.append(f"{item['id']}: {positions(item)}")
        lines += [f"  {_line(change)}" for change in sorted_changes(item)]
        lines += [f"  value: {fact}" for fact in item["facts"][:MOST_FACTS]]
        if len(item["facts"]) > MOST_FACTS:
            lines.append(f"  and {plural(len(item['facts']) - MOST_FACTS, 'more value')}")
    return "\n".join([*lines, summary(shown), verdict(shown)]) + "\n"


def _line(change: Record) -> str:
    return f"{label(change)}: {sentence(change)}"


def sentence(change: Record) -> str:
    """What differs, and the word of the owner that did it."""
    return f"{change['text']}; {change['reason']}" if change["reason"] else str(change["text"])


def _all(comparison: Record) -> Iterator[Record]:
    yield from comparison["run"]
    for item in comparison["sets"]:
        yield from item["changes"]
