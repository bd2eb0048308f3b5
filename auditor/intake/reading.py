"""What a reader makes of one file: parameter sets, what it passes over, what it could not read."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, fields
from typing import Any, Literal

from auditor.declaration import Declaration
from auditor.intake.inputs import InputError

LEADS_OUT = "a link that leads out of the tree"
OURS = "a rulebook or a report"
"""Why documents of this program are passed over."""
_NOTHING = "nothing that is read"

CANDIDATE, WAITS = "candidate ", "; not reviewed unless a usage file names it"
"""How the reason for which a candidate is passed over begins, and what follows name and size."""

Role = Literal["modulus", "generator", "subgroup order"]


@dataclass(frozen=True, slots=True)
class Passed:
    """Something seen and not reviewed: a file, or with ``line`` a part of one, and why."""

    path: str
    reason: str = LEADS_OUT
    line: int | None = None


def others(directory: str, count: int) -> Passed:
    """That so many files of ``directory`` hold nothing, without their names."""
    files = "1 other file holds" if count == 1 else f"{count:,} other files hold"
    return Passed(directory, f"{files} {_NOTHING}")


def is_no_matter(reason: str) -> bool:
    """Whether a reason says that nothing to review was passed over: a report or a rulebook, which
    may lie beside what it is about, or any number of other files."""
    return reason == OURS or is_count(reason)


def is_count(reason: str) -> bool:
    """Whether a reason is one of :func:`others`."""
    return reason.endswith((f" file holds {_NOTHING}", f" files hold {_NOTHING}"))


def candidates_in(skipped: Iterable[Mapping[str, Any]]) -> list[tuple[str, str]]:
    """The candidates among what a report lists as skipped: the place, and the name and size."""
    return [
        (
            f"{item['path']}:{item['line']}",
            item["reason"].removeprefix(CANDIDATE).partition(WAITS)[0],
        )
        for item in skipped
        if item["reason"].startswith(CANDIDATE) and "line" in item
    ]


@dataclass(frozen=True, slots=True)
class Notice:
    """What the reader of a report must know about something that is reviewed nevertheless."""

    path: str
    line: int
    message: str

    def __str__(self) -> str:
        return f"{self.path}:{self.line}: {self.message}"


@dataclass(frozen=True, slots=True)
class Number:
    """A big integer whose name suggests a part of a group; whether it is one, the owner knows."""

    role: Role
    name: str
    value: int
    path: str
    line: int
    column: int


@dataclass(frozen=True, slots=True)
class Reading:
    """All that one file holds, in text order; ``candidates`` are numbers nobody has named yet."""

    declarations: tuple[Declaration, ...] = ()
    errors: tuple[InputError, ...] = ()
    passed: tuple[Passed, ...] = ()
    notices: tuple[Notice, ...] = ()
    candidates: tuple[Number, ...] = ()

    @property
    def empty(self) -> bool:
        """Whether nothing at all was seen."""
        return not any(getattr(self, item.name) for item in fields(self))

    @property
    def nothing(self) -> bool:
        """Whether there is nothing but, at most, a word on the file as a whole."""
        parts = any(item.line is not None for item in self.passed)
        return not (self.declarations or self.errors or self.notices or self.candidates or parts)


def joined(readings: Iterable[Reading]) -> Reading:
    """Several readings of one file as one."""
    found = list(readings)
    merged = {
        item.name: tuple(part for reading in found for part in getattr(reading, item.name))
        for item in fields(Reading)
    }
    return Reading(**merged)
