"""Sheets of a ticket in Markdown, in full or in few words, in pieces that may not be cut apart."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

from auditor.report.findings_view import MergedFinding, Remedy
from auditor.report.markdown_text import MESSAGE, prose, span
from auditor.report.shared_findings import SharedFinding
from auditor.report.sheet_view import Sheet
from auditor.report.text import Number, clipped

Told = Mapping[tuple[int, int], SharedFinding]
"""What is told of several sets together, by number of the sheet and place on it."""


@dataclass(frozen=True, slots=True)
class Piece:
    """What may not be cut apart: how many findings are in it, and whether it opens a sheet."""

    text: str
    findings: int
    opens: bool = False


def in_full(sheets: Iterable[Sheet], told: Told) -> Iterator[Piece]:
    """Sheet by sheet; an opening goes with its first finding."""
    title = "\n## Findings\n"
    for sheet in sheets:
        first = _finding(sheet, 1, told) if sheet.findings else ""
        yield Piece(title + _opening(sheet) + first, len(sheet.findings[:1]), opens=True)
        title = ""
        for number in range(2, len(sheet.findings) + 1):
            yield Piece(_finding(sheet, number, told), 1)


def in_brief(sheets: Iterable[Sheet], told: Told) -> Iterator[Piece]:
    """The same in few words: what is wrong and what to do, without sources and cautions."""
    title = (
        "\n## Findings\n\nIn few words; sources, cautions and evidence are in the full report.\n"
    )
    for sheet in sheets:
        for number in range(1, len(sheet.findings) + 1):
            opening = title + _brief_opening(sheet) if number == 1 else ""
            yield Piece(opening + _brief_finding(sheet, number, told), 1, opens=number == 1)
            title = ""


def _brief_opening(sheet: Sheet) -> str:
    published = f" of {prose(sheet.group)}" if sheet.group else ""
    usage = "; ".join(span(part, 200) for part in sheet.usage[:6])
    return (
        f"\n### {sheet.number}. {span(sheet.name)}: {sheet.position}\n\n"
        f"{', '.join(span(place) for place in sheet.places[:3])}: modulus{published} "
        f"{_number(sheet.modulus)}; generator {span(sheet.generator.short)}; {usage}\n"
    )


def _brief_finding(sheet: Sheet, number: int, told: Told) -> str:
    finding = sheet.findings[number - 1]
    shared = told.get((sheet.number, number))
    rules = ", ".join(span(item.rule) for item in finding.criteria)
    known = shared is not None and shared.same_words
    stated = _stated(finding, number, () if known else finding.statements[:1])
    lines = [f"{stated} ({rules})" if shared is None else f"{stated} See F{shared.number}."]
    for remedy, first in sheet.remedies(number):
        if first == number and (shared is None or remedy not in shared.remedies):
            breaks = f" It breaks: {' '.join(map(prose, remedy.breaks))}" if remedy.breaks else ""
            lines.append(remedy_lines(remedy)[0] + breaks)
    lines += [f"   - Concession: {prose(item.text)}" for item in finding.concessions]
    return "\n".join([*lines[:1], *([""] if lines[1:] else []), *lines[1:]]) + "\n"


def without_observations(sheets: Iterable[Sheet]) -> Iterator[Sheet]:
    """The sheets with a finding of weight, and these findings alone, which stand first on them."""
    for sheet in sheets:
        weighty = tuple(item for item in sheet.findings if item.grade != "observation")
        if weighty:
            yield replace(sheet, findings=weighty)


def observed(sheets: Iterable[Sheet]) -> Iterator[Piece]:
    """The titles of the observations, a line for each sheet."""
    title = "\n## Observations\n\n"
    for sheet in sheets:
        found = [item for item in sheet.findings if item.grade == "observation"]
        if found:
            titles = "; ".join(prose(_observation(item)) for item in found)
            yield Piece(f"{title}- {sheet.number}. {span(sheet.name, 60)}: {titles}.\n", len(found))
            title = ""


def _observation(finding: MergedFinding) -> str:
    undecided = "not decided: " if finding.outcome == "undetermined" else ""
    return f"{undecided}{finding.title.rstrip('.')}"


def _opening(sheet: Sheet) -> str:
    numbers = [("Modulus", sheet.modulus), ("Generator", sheet.generator)]
    published = "" if sheet.group is None else f", published as {prose(sheet.group)}"
    if sheet.subgroup_order is not None:
        numbers.append(("Declared order", sheet.subgroup_order))
    places = ", ".join(span(place) for place in sheet.places[:8])
    if len(sheet.places) > 8:
        places += f" and {len(sheet.places) - 8:,} more"
    lines = [
        f"\n### {sheet.number}. {span(sheet.name)}: {sheet.position}",
        "",
        prose(sheet.meaning) if sheet.findings else prose(f"{sheet.meaning} {sheet.reason}"),
        "",
        f"- Where: {places}",
        *(
            f"- {name}: {_number(number)}{published if name == 'Modulus' else ''}"
            for name, number in numbers
        ),
        f"- Usage: {'; '.join(span(part, 200) for part in sheet.usage[:6])}",
        f"- On the owner's word: {', '.join(map(span, sheet.owners_word)) or 'nothing'}",
        *(f"- Limit: {prose(clipped(limit, MESSAGE))}" for limit in sheet.limits),
    ]
    return "\n".join(lines) + "\n"


def _number(number: Number) -> str:
    text = span(number.short)
    return f"{text}, {number.length} bits, SHA-256 {span(number.mark)}" if number.is_long else text


def _finding(sheet: Sheet, number: int, told: Told) -> str:
    """A finding with its criteria and remedies; an observation in one paragraph. Of what is told
    of several sets together only what is this sheet's own."""
    finding = sheet.findings[number - 1]
    if shared := told.get((sheet.number, number)):
        return _reference(finding, number, shared)
    if finding.grade == "observation":
        rules = ", ".join(span(item.rule) for item in finding.criteria)
        return f"{_stated(finding, number, finding.statements[:1])} ({rules})\n"
    lines = [_stated(finding, number, finding.statements[:1]), ""]
    lines += [f"   Also: {prose(statement)}" for statement in finding.statements[1:]]
    lines += [
        f"   - Criterion: {prose(item.source)} ({span(item.rule)})" for item in finding.criteria
    ]
    for name, why in finding.missing if finding.outcome == "undetermined" else ():
        lines.append(f"   - Missing: {span(name)}, {prose(why)}")
    for remedy, first in sheet.remedies(number):
        if first != number:
            lines.append(f"   - Remedy: as for {first}.")
        else:
            lines += remedy_lines(remedy)
    lines += [f"   - Caution: {prose(caution)}" for caution in finding.cautions]
    lines += [f"   - Concession: {prose(item.text)}" for item in finding.concessions]
    return "\n".join(lines) + "\n"


def _reference(finding: MergedFinding, number: int, shared: SharedFinding) -> str:
    """What a sheet adds to a finding that it shares with others."""
    said = () if shared.same_words else finding.statements
    lines = [f"{_stated(finding, number, said)} See F{shared.number}."]
    if finding.grade != "observation":
        own = [remedy for remedy in finding.remedies if remedy not in shared.remedies]
        lines += [line for remedy in own for line in remedy_lines(remedy)]
    lines += [f"   - Concession: {prose(item.text)}" for item in finding.concessions]
    return "\n".join([*lines[:1], *([""] if lines[1:] else []), *lines[1:]]) + "\n"


def _stated(finding: MergedFinding, number: int, statements: Sequence[str]) -> str:
    parts = [prose(part) for part in (finding.heading, *statements) if part]
    return " ".join([f"\n{number}. **{finding.words}:**", *parts])


def remedy_lines(remedy: Remedy) -> list[str]:
    """What to do, the declaration afterwards, and in lines of their own what that breaks."""
    patch = ", ".join(span(entry, 200) for entry in remedy.patch)
    declare = f" In the declaration then: {patch}." if patch else ""
    breaks = [f"   - It breaks: {prose(item)}" for item in remedy.breaks]
    return [f"   - Remedy: {prose(remedy.text)}{declare}", *breaks]
