"""The distinct moduli of a tree: by size and strength, by how often each is used, and by whom."""

import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property

from auditor.report.sheet_view import Sheet
from auditor.report.strength_view import judged
from auditor.report.text import Number
from auditor.report.words import POSITIONS, plural

WIDTH, TOP, BOTTOM, LEFT, RIGHT = 560.0, 20.0, 300.0, 44.0, 548.0
MOST_DOTS = 80
_HIGHEST = 256


@dataclass(frozen=True)
class Modulus:
    """One modulus with the sheets that use it, worst first."""

    number: Number
    sheets: tuple[Sheet, ...]

    @property
    def uses(self) -> int:
        """How many places declare a set with it."""
        return sum(len(sheet.places) for sheet in self.sheets)

    @property
    def position(self) -> str:
        """The worst position of any set with it."""
        return min((sheet.position for sheet in self.sheets), key=POSITIONS.index)

    @cached_property
    def bits(self) -> float | None:
        """The least figure that a set with it is judged by, for a passive attacker or a peer."""
        return min(
            (
                judged(route)
                for sheet in self.sheets
                for route in sheet.record["routes"]
                if route["counted"] and route["attacker"] != "designer"
            ),
            default=None,
        )

    @property
    def files(self) -> tuple[str, ...]:
        """The files in which it stands, in order of first appearance."""
        places = (place for sheet in self.sheets for place in sheet.record["places"])
        return tuple(dict.fromkeys(place["path"] for place in places))


@dataclass(frozen=True, slots=True)
class Dot:
    """A modulus in the picture; its area grows with its uses."""

    x: float
    y: float
    radius: float
    position: str
    label: str


@dataclass(frozen=True, slots=True)
class ModuliPicture:
    """Moduli by bit length, from left to right, and strength, from bottom to top."""

    dots: tuple[Dot, ...]
    lengths: tuple[tuple[int, float], ...]
    levels: tuple[tuple[int, float], ...]
    left_out: int
    description: str


def moduli(sheets: Iterable[Sheet]) -> tuple[Modulus, ...]:
    """The distinct moduli: the worst position first, then the least strength, then most uses."""
    users: dict[str, list[Sheet]] = {}
    for sheet in sheets:
        users.setdefault(sheet.modulus.full, []).append(sheet)
    found = [Modulus(group[0].modulus, tuple(group)) for group in users.values()]
    return tuple(sorted(found, key=_urgency))


def _urgency(modulus: Modulus) -> tuple[int, float, int]:
    bits = math.inf if modulus.bits is None else modulus.bits
    return POSITIONS.index(modulus.position), bits, -modulus.uses


def moduli_picture(found: tuple[Modulus, ...]) -> ModuliPicture | None:
    """The picture of several moduli; None for fewer than two with a figure."""
    figured = [modulus for modulus in found if modulus.bits is not None]
    if len(figured) < 2:
        return None
    shown = figured[:MOST_DOTS]
    sizes = [math.log2(modulus.number.length) for modulus in shown]
    least, most = min(sizes), max(sizes)

    def x(length: int) -> float:
        inner = RIGHT - LEFT - 80
        share = (math.log2(length) - least) / (most - least) if most > least else 0.5
        return LEFT + 40 + inner * share

    dots: list[Dot] = []
    for modulus in sorted(shown, key=lambda item: -item.uses):
        dots.append(_placed(modulus, x(modulus.number.length), dots))
    lengths = sorted({modulus.number.length for modulus in shown})
    return ModuliPicture(
        dots=tuple(dots),
        lengths=tuple(_apart((length, round(x(length), 1)) for length in lengths)),
        levels=tuple((bits, round(_y(bits), 1)) for bits in range(0, _HIGHEST + 1, 32)),
        left_out=len(found) - len(shown),
        description="; ".join(_words(modulus) for modulus in shown[:40]) + ".",
    )


def _placed(modulus: Modulus, x: float, dots: list[Dot]) -> Dot:
    """The dot at its place, or beside it where others are and there is room."""
    y = _y(modulus.bits or 0.0)
    radius = min(4 + 2.5 * math.sqrt(modulus.uses - 1), 20.0)
    steps = (step * sign * 3.0 for step in range(int(WIDTH) // 3) for sign in (1, -1))
    places = (x + shift for shift in steps if LEFT + radius <= x + shift <= RIGHT - radius)
    free = (
        place
        for place in places
        if all(math.dist((place, y), (dot.x, dot.y)) >= radius + dot.radius + 1 for dot in dots)
    )
    uses = f"{modulus.uses:,}" if modulus.uses > 1 else ""
    return Dot(round(next(free, x), 1), round(y, 1), round(radius, 1), modulus.position, uses)


def _y(bits: float) -> float:
    return BOTTOM - (BOTTOM - TOP) * min(bits, _HIGHEST) / _HIGHEST


def _apart(marks: Iterable[tuple[int, float]]) -> Iterator[tuple[int, float]]:
    """Only marks whose words do not run into the mark before."""
    last = -math.inf
    for value, x in marks:
        if x - last >= 48:
            yield value, x
            last = x


def _words(modulus: Modulus) -> str:
    bits = "nothing" if modulus.bits is None else math.floor(modulus.bits)
    return (
        f"{modulus.number.length} bits, judged by {bits}, "
        f"{plural(modulus.uses, 'use')}, {modulus.position}"
    )
