"""The same numbers under other usages, as a table of the fewest rows that say it."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import floor
from typing import Any

from auditor.report.words import CHECKS, USES, route

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Cell:
    """The least model work for a passive attacker or a peer, and the attack that it is."""

    bits: float
    at_most: bool
    attack: str

    @property
    def text(self) -> str:
        """Whole bits, rounded down."""
        return f"{'≤ ' if self.at_most else ''}{floor(self.bits)}"


@dataclass(frozen=True, slots=True)
class Row:
    """Usages that come out alike at every width; ``declared`` is the width of the declared usage,
    where it is among them."""

    uses: tuple[str, ...]
    checks: tuple[str, ...]
    cells: tuple[Cell | None, ...]
    declared: int | None

    @property
    def exponent(self) -> str:
        """How often one exponent is used, in words."""
        return " or ".join(USES[use] for use in self.uses)

    @property
    def check(self) -> str:
        """What is done to received values, in words."""
        return ", ".join("nothing" if check == "none" else CHECKS[check] for check in self.checks)


@dataclass(frozen=True, slots=True)
class ExposureTable:
    """Widths across, usages down."""

    widths: tuple[int, ...]
    rows: tuple[Row, ...]


def _least(entry: Record) -> tuple[float, bool]:
    """The least figure; of equal ones that which could still fall."""
    return entry["bits"], entry["bound"] == "exact"


def exposure_table(exposure: Iterable[Record]) -> ExposureTable | None:
    """The table of a set; None where nothing was computed."""
    entries = [entry for entry in exposure if entry["attacker"] != "designer"]
    if not entries:
        return None
    widths = tuple(sorted({entry["width"] for entry in entries}))
    least: dict[tuple[str, str], dict[int, Record]] = {}
    declared: dict[tuple[str, str], int] = {}
    for entry in entries:
        usage = entry["use"], entry["check"]
        cells = least.setdefault(usage, {})
        before = cells.setdefault(entry["width"], entry)
        cells[entry["width"]] = min(before, entry, key=_least)
        if entry["declared"]:
            declared[usage] = entry["width"]
    by_use: dict[tuple[str, tuple[Cell | None, ...]], list[str]] = {}
    for (use, check), found in least.items():
        cells_in_line = tuple(_cell(found.get(width)) for width in widths)
        by_use.setdefault((use, cells_in_line), []).append(check)
    alike: dict[tuple[tuple[str, ...], tuple[Cell | None, ...]], list[str]] = {}
    for (use, line), checks in by_use.items():
        alike.setdefault((tuple(checks), line), []).append(use)
    rows = [
        Row(tuple(uses), checks, line, _declared(uses, checks, declared))
        for (checks, line), uses in alike.items()
    ]
    return ExposureTable(widths, tuple(rows))


def _cell(entry: Record | None) -> Cell | None:
    if entry is None:
        return None
    return Cell(float(entry["bits"]), entry["bound"] == "at most", route(entry["route"]))


def _declared(
    uses: Iterable[str], checks: Iterable[str], declared: Mapping[tuple[str, str], int]
) -> int | None:
    pairs = [(use, check) for use in uses for check in checks]
    return next((declared[pair] for pair in pairs if pair in declared), None)
