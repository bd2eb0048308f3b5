"""What is worth asking, as Markdown for a ticket: one section for each question."""

from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report import asking as words
from auditor.report.markdown_text import LIMIT, fitted, prose, span
from auditor.report.text import clipped, visible_record

Record = Mapping[str, Any]

_SENTENCE = 400
_MOST_SETTLED = 40
_MOST_SEARCHES, _MOST_CANDIDATES, _MOST_LINES = 20, 20, 10


def render(asking: Record, *, limit: int = LIMIT) -> str:
    """The questions in at most ``limit`` UTF-16 units; ValueError for a limit too small."""
    shown = visible_record(asking)
    pieces = [
        *map(_situation, words.worth_asking(shown)),
        *_part(words.NO_ANSWER.rstrip(":"), map(_settled, words.settled(shown)[:_MOST_SETTLED])),
        *_part("More search", map(_search, shown["searches"][:_MOST_SEARCHES])),
        *_part("Not reviewed", map(_candidate, shown["candidates"][:_MOST_CANDIDATES])),
        *_part("Not read", map(_line, list(words.lines_of_errors(shown))[:_MOST_LINES])),
        *_part("Notices", map(_line, shown["notices"][:_MOST_LINES])),
    ]
    return fitted("\n".join(_head(shown)), pieces, "\n", limit=limit, kind="part")


def _head(shown: Record) -> Iterator[str]:
    yield "# What is worth asking"
    yield ""
    yield f"**{words.summary(shown)}**"
    yield ""
    yield f"As of {shown['run']['as_of']}, effort {span(shown['run']['effort'])}."
    yield ""


def _situation(item: Record) -> str:
    found = words.places(item)
    left = len(found) - words.MOST_PLACES
    more = f" and {left:,} more" if left > 0 else ""
    lines = [
        f"\n## {_heading(item)}: {words.standing(item)}",
        "",
        *([f"- Not declared: {', '.join(map(span, item['open']))}"] if item["open"] else []),
        f"- Used as: {'; '.join(span(part, 200) for part in item['usage'][:6])}",
        f"- Where: {', '.join(span(place) for place in found[: words.MOST_PLACES])}{more}",
        *(f"- {_effect(each, item)}" for each in item["effects"][: words.MOST_EFFECTS]),
    ]
    if (left := len(item["effects"]) - words.MOST_EFFECTS) > 0:
        lines.append(f"- and {left:,} more answers")
    return "\n".join(lines) + "\n"


def _settled(item: Record) -> str:
    which = words.examples(item)
    where = f" ({span(which, _SENTENCE)})" if which else ""
    return f"- {_heading(item)}: {words.standing(item)}{where}\n"


def _heading(item: Record) -> str:
    return words.heading(item) if item["sets"] > 1 else span(words.heading(item))


def _effect(each: Record, situation: Record) -> str:
    return prose(clipped(words.effect(each, situation), _SENTENCE))


def _search(item: Record) -> str:
    return f"- {prose(words.search(item))}, for {span(words.sets_of(item), _SENTENCE)}\n"


def _candidate(item: Record) -> str:
    where = span(f"{item['path']}:{item['line']}")
    return f"- {span(item['name'])} in {where}, {item['length']} bits\n"


def _line(text: str) -> str:
    return f"- {span(text, _SENTENCE)}\n"


def _part(title: str, lines: Iterator[str]) -> list[str]:
    listed = "".join(lines)
    return [f"\n## {title}\n\n{listed}"] if listed else []
