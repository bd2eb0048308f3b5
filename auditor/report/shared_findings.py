"""Findings that several sets of a run share: each told once, with all its sets and places.

A tree has one sheet for each different modulus, generator and usage, and often the same finding on
hundreds of them. What is equal in defect, outcome, grade and usage is one finding to its reader:
documents tell it once, and a sheet refers to it and adds what is its own.
"""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import chain
from typing import TypeVar

from auditor.report.findings_view import Criterion, MergedFinding, Remedy
from auditor.report.sheet_view import Sheet
from auditor.report.words import GRADES

Item = TypeVar("Item")

FEWEST = 4
"""Sheets that share a finding before it is told apart from them: what two or three have in common
is read more easily on each."""


@dataclass(frozen=True, slots=True)
class Lines:
    """The places in one file."""

    path: str
    lines: tuple[int, ...]

    @property
    def text(self) -> str:
        """The path with its lines, neighbours as a range: 'primes:2-5, 9'."""
        return f"{self.path}:{ranges(self.lines)}"


@dataclass(frozen=True)
class SharedFinding:
    """One finding of several sheets; ``members`` are these, and its place on each, from 1."""

    number: int
    members: tuple[tuple[Sheet, int], ...]

    @cached_property
    def _each(self) -> tuple[MergedFinding, ...]:
        return tuple(sheet.findings[place - 1] for sheet, place in self.members)

    @property
    def first(self) -> MergedFinding:
        """As its first sheet has it: words, heading and grade are the same on all."""
        return self._each[0]

    @property
    def usage(self) -> tuple[str, ...]:
        """How all its sets are used."""
        return self.members[0][0].usage

    @cached_property
    def same_words(self) -> bool:
        """Whether all sheets state it alike; otherwise figures differ."""
        return len({finding.statements for finding in self._each}) == 1

    @cached_property
    def criteria(self) -> tuple[Criterion, ...]:
        """All criteria that it stands for on any sheet."""
        return _once(chain.from_iterable(finding.criteria for finding in self._each))

    @cached_property
    def missing(self) -> tuple[tuple[str, str], ...]:
        """What is absent on every sheet, and why."""
        return _common([finding.missing for finding in self._each])

    @cached_property
    def remedies(self) -> tuple[Remedy, ...]:
        """The remedies that hold on every sheet."""
        return _common([finding.remedies for finding in self._each])

    @property
    def has_own_remedies(self) -> bool:
        """Whether some sheet has a remedy that others have not."""
        return any(len(finding.remedies) > len(self.remedies) for finding in self._each)

    @cached_property
    def cautions(self) -> tuple[str, ...]:
        """The cautions of every sheet."""
        return _common([finding.cautions for finding in self._each])

    @property
    def numbers(self) -> str:
        """The numbers of its sheets: '1-12, 15'."""
        return ranges(sheet.number for sheet, _ in self.members)

    @cached_property
    def places(self) -> tuple[Lines, ...]:
        """Where its sets stand, a file each, in order of appearance."""
        return places_of(sheet for sheet, _ in self.members)


def shared_findings(sheets: Iterable[Sheet]) -> tuple[SharedFinding, ...]:
    """The findings of :data:`FEWEST` sheets or more: the heaviest first, then in order of
    appearance."""
    groups: dict[tuple[str, str, str, tuple[str, ...]], list[tuple[Sheet, int]]] = {}
    for sheet in sheets:
        for place, finding in enumerate(sheet.findings, 1):
            key = finding.defect, finding.outcome, finding.grade, sheet.usage
            groups.setdefault(key, []).append((sheet, place))
    several = [(key, members) for key, members in groups.items() if len(members) >= FEWEST]
    several.sort(key=lambda item: (GRADES.index(item[0][2]), item[0][1] == "undetermined"))
    return tuple(
        SharedFinding(number, tuple(members)) for number, (_, members) in enumerate(several, 1)
    )


def by_sheet(shared: Iterable[SharedFinding]) -> Mapping[tuple[int, int], SharedFinding]:
    """The shared finding behind a place on a sheet, by the number of the sheet and the place."""
    return {
        (sheet.number, place): finding for finding in shared for sheet, place in finding.members
    }


def places_of(sheets: Iterable[Sheet]) -> tuple[Lines, ...]:
    """Where the sets of these sheets stand, a file each, in order of appearance."""
    found: dict[str, set[int]] = {}
    for sheet in sheets:
        for place in sheet.record["places"]:
            found.setdefault(place["path"], set()).add(place["line"])
    return tuple(Lines(path, tuple(sorted(lines))) for path, lines in found.items())


def ranges(numbers: Iterable[int]) -> str:
    """Numbers in rising order, three or more neighbours as a range: '1, 2, 5-9'."""
    runs: list[tuple[int, int]] = []
    for number in sorted({*numbers}):
        if runs and number == runs[-1][1] + 1:
            runs[-1] = runs[-1][0], number
        else:
            runs.append((number, number))
    return ", ".join(_range(first, last) for first, last in runs)


def _range(first: int, last: int) -> str:
    if last - first > 1:
        return f"{first}-{last}"
    return f"{first}" if first == last else f"{first}, {last}"


def _once(items: Iterable[Item]) -> tuple[Item, ...]:
    return tuple(dict.fromkeys(items))


def _common(lists: list[tuple[Item, ...]]) -> tuple[Item, ...]:
    """What stands in every list, in the order of the first."""
    everywhere = set(lists[0]).intersection(*lists[1:])
    return tuple(item for item in lists[0] if item in everywhere)
