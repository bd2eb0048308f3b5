"""Strength in figures: for each attacker the least work, beside the requirement and the tables."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import floor
from typing import Any

from auditor.report.words import ATTACKERS

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Figure:
    """A base-2 logarithm of work; an upper bound while something unknown could lower it."""

    bits: float | None
    at_most: bool = False
    short: bool = False
    """Whether a route open to this attacker is judged below the requirement."""

    @property
    def text(self) -> str:
        """Whole bits, rounded down, as summaries print them."""
        if self.bits is None:
            return "unknown"
        return f"{'≤ ' if self.at_most else ''}{floor(self.bits)}"

    @property
    def precise(self) -> str:
        """Two decimals."""
        if self.bits is None:
            return "unknown"
        return f"{'≤ ' if self.at_most else ''}{self.bits:.2f}"


@dataclass(frozen=True, slots=True)
class Strength:
    """What is required, what published tables give, and the least model work for each attacker."""

    required: int
    tables: int | None
    passive: Figure
    peer: Figure
    designer: Figure
    sufficient: bool | None

    @property
    def tables_text(self) -> str:
        """The table figure; 'below the tables' for 0."""
        if self.tables is None:
            return "unknown"
        return str(self.tables) if self.tables else "none"

    @property
    def tables_short(self) -> bool:
        """Whether the table figure is known and below the requirement."""
        return self.tables is not None and self.tables < self.required


def judged(route: Record) -> float:
    """The figure that a route is judged by: that of a published table, where there is one."""
    return float(route["bits"] if route["table"] is None else route["table"]["bits"])


def strength(parameter_set: Record) -> Strength:
    """The figures of one set of a record."""
    facts, routes = parameter_set["facts"], parameter_set["routes"]
    required = _value(facts, "strength.required_bits", 112)
    designer = facts.get("strength.designer_bits_at_most")
    listening = [
        entry["bound"]
        for entry in parameter_set.get("exposure", ())
        if entry["declared"] and entry["attacker"] == "passive"
    ]
    unsettled = "strength.work_bits" not in facts
    loose = {
        "passive": unsettled and (not listening or "at most" in listening),
        "peer": unsettled,
        "designer": designer is None or not designer["tight"],
    }
    figures = {name: _figure(_open_to(routes, name), required, loose[name]) for name in ATTACKERS}
    return Strength(
        required=required,
        tables=_value(facts, "strength.standard_bits", None),
        passive=figures["passive"],
        peer=figures["peer"],
        designer=figures["designer"],
        sufficient=_value(facts, "strength.sufficient", None),
    )


def _value(facts: Record, name: str, default: Any) -> Any:
    return facts[name]["value"] if name in facts else default


def _open_to(routes: list[Record], attacker: str) -> list[Record]:
    """The counted routes that this attacker can take; each can do what the one before can."""
    able = ATTACKERS[: ATTACKERS.index(attacker) + 1]
    return [route for route in routes if route["counted"] and route["attacker"] in able]


def _figure(routes: list[Record], required: int, loose: bool) -> Figure:
    if not routes:
        return Figure(None)
    least = min(routes, key=lambda route: float(route["bits"]))
    at_most = loose or any(route["bound"] == "at most" for route in routes)
    short = any(judged(route) < required for route in routes)
    return Figure(float(least["bits"]), at_most, short)
