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
    deciding_route: str | None
    """The cheapest counted route open to a passive attacker or a peer."""

    @property
    def tables_text(self) -> str:
        """The table figure; 'below the tables' for 0."""
        if self.tables is None:
            return "unknown"
        return str(self.tables) if self.tables else "none"


def strength(parameter_set: Record) -> Strength:
    """The figures of one set of a record."""
    facts = parameter_set["facts"]
    settled = "strength.work_bits" in facts
    least = {attacker: _least(parameter_set["routes"], attacker) for attacker in ATTACKERS}
    designer = facts.get("strength.designer_bits_at_most")
    peer = least["peer"]
    return Strength(
        required=_value(facts, "strength.required_bits", 112),
        tables=_value(facts, "strength.standard_bits", None),
        passive=_figure(least["passive"], not settled),
        peer=_figure(peer, not settled),
        designer=_figure(least["designer"], designer is None or not designer["tight"]),
        sufficient=_value(facts, "strength.sufficient", None),
        deciding_route=None if peer is None else peer["name"],
    )


def _value(facts: Record, name: str, default: Any) -> Any:
    return facts[name]["value"] if name in facts else default


def _least(routes: list[Record], attacker: str) -> Record | None:
    """The cheapest counted route that this attacker can take; each can do what the former can."""
    able = ATTACKERS[: ATTACKERS.index(attacker) + 1]
    open_to = [route for route in routes if route["counted"] and route["attacker"] in able]
    return min(open_to, key=lambda route: float(route["bits"]), default=None)


def _figure(route: Record | None, unsettled: bool) -> Figure:
    if route is None:
        return Figure(None)
    return Figure(float(route["bits"]), unsettled or route["bound"] == "at most")
