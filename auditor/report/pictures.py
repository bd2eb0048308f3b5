"""The geometry of the pictures: what is drawn where, in the user units of an SVG view box.

Templates turn these values into SVG. Every picture carries a description in words that says all
that it shows, for those who do not see it.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal

from auditor.report.strength_view import judged
from auditor.report.words import listed, plain_value, plural
from auditor.report.words import route as route_name

Record = Mapping[str, Any]

WIDTH = 560.0
LEFT = 8.0
RIGHT = 552.0
ROW = 54.0
FIRST = 76.0
STEP = 32


@dataclass(frozen=True, slots=True)
class RouteMark:
    """One route: its line, the place of its model figure, and that of the table figure."""

    name: str
    attacker: str
    figures: str
    y: float
    model_x: float
    table_x: float | None
    beyond: bool
    at_most: bool
    counted: bool
    short: bool


@dataclass(frozen=True, slots=True)
class RoutesPicture:
    """Attack routes on a scale of work, the required strength marked."""

    height: float
    required: int
    required_x: float
    axis_y: float
    ticks: tuple[tuple[int, float], ...]
    marks: tuple[RouteMark, ...]
    description: str


def routes_picture(routes: list[Record], required: int) -> RoutesPicture | None:
    """The picture of the routes of one set, cheapest first; None without a route."""
    if not routes:
        return None
    end = max(5 * STEP, STEP * (1 + int(required * 1.4) // STEP))

    def x(bits: float) -> float:
        return round(LEFT + (RIGHT - LEFT) * min(max(bits, 0.0), end) / end, 1)

    marks = tuple(
        _route_mark(route, required, x, end, FIRST + ROW * number)
        for number, route in enumerate(routes)
    )
    axis_y = FIRST + ROW * (len(routes) - 1) + 18
    return RoutesPicture(
        height=axis_y + 30,
        required=required,
        required_x=x(required),
        axis_y=axis_y,
        ticks=tuple((bits, x(bits)) for bits in range(0, end + 1, STEP)),
        marks=marks,
        description=f"Required are {required} bits. "
        + " ".join(f"{mark.name}, {mark.attacker}: {mark.figures}." for mark in marks),
    )


def _route_mark(route: Record, required: int, x: Any, end: int, y: float) -> RouteMark:
    table = route["table"]
    at_most = route["bound"] == "at most"
    figures = f"{'at most ' if at_most else ''}{route['bits']:.2f} by {_nature(route['nature'])}"
    if table is not None:
        figures += f", {table['bits']} by table" if table["bits"] else ", below the tables"
    short = route["counted"] and judged(route) < required
    if short:
        figures += ", too little"
    if not route["counted"]:
        figures += ", not counted"
    return RouteMark(
        name=route_name(route["name"]),
        attacker=route["attacker"],
        figures=figures,
        y=y,
        model_x=x(route["bits"]),
        table_x=None if table is None or table["bits"] > end else x(table["bits"]),
        beyond=route["bits"] > end,
        at_most=at_most,
        counted=route["counted"],
        short=short,
    )


def _nature(nature: str) -> str:
    return "count" if nature == "exact" else nature


Part = Literal["inside", "outside", "undecided", "unfactored"]


@dataclass(frozen=True, slots=True)
class Segment:
    """A prime power, or the unfactored rest, as a piece of the strip."""

    part: Part
    label: str
    bits: int
    x: float
    width: float

    @property
    def shows_label(self) -> bool:
        """Whether the piece is wide enough for its size in bits."""
        return self.width >= 84


@dataclass(frozen=True, slots=True)
class OrderStrip:
    """The group order as a strip of its prime powers by size in bits, smallest first."""

    segments: tuple[Segment, ...]
    factors: str
    parts: tuple[Part, ...]
    description: str


MOST_SEGMENTS = 40
_LEAST_WIDTH = 5.0

PARTS: tuple[Part, ...] = ("inside", "outside", "undecided", "unfactored")
PART_MEANING: Mapping[Part, str] = {
    "inside": "in the subgroup that the generator spans",
    "outside": "outside that subgroup",
    "undecided": "not settled whether inside or outside",
    "unfactored": "not factored: nothing is known of its primes but that there are two or more",
}


def order_strip(
    factors: Mapping[int, int], rest: int, order: Mapping[int, int] | None
) -> OrderStrip | None:
    """The strip of a group order of ``factors`` times the composite or trivial ``rest``.

    ``order`` holds the known prime powers of the generator's order, None where none is known.
    None for the trivial group.
    """
    pieces = [
        piece
        for prime, exponent in sorted(factors.items())
        for piece in _pieces(prime, exponent, None if order is None else order.get(prime, 0))
    ]
    if rest > 1:
        pieces.append(("unfactored", "composite rest", rest.bit_length()))
    if not pieces:
        return None
    pieces = _merged(pieces)
    segments = _laid_out(pieces)
    known = listed([_power(prime, exponent) for prime, exponent in sorted(factors.items())], " · ")
    text = f"{known} · a composite rest of {rest.bit_length()} bits" if rest > 1 else known
    parts = tuple(part for part in PARTS if any(s.part == part for s in segments))
    pieces_of = {
        part: [f"{s.label} ({plural(s.bits, 'bit')})" for s in segments if s.part == part]
        for part in parts
    }
    described = "; ".join(f"{PART_MEANING[part]}: {listed(pieces_of[part])}" for part in parts)
    return OrderStrip(segments, text, parts, f"Pieces by size in bits. {described}.")


def _pieces(prime: int, exponent: int, inside: int | None) -> list[tuple[Part, str, int]]:
    if inside is None:
        shares: list[tuple[Part, int]] = [("undecided", exponent)]
    else:
        shares = [("inside", inside), ("outside", exponent - inside)]
    return [
        (part, _power(prime, count), (prime**count).bit_length()) for part, count in shares if count
    ]


def _power(prime: int, exponent: int) -> str:
    text = plain_value(prime if prime <= 2**53 else hex(prime))
    return text if exponent == 1 else f"{text}^{exponent}"


def _merged(pieces: list[tuple[Part, str, int]]) -> list[tuple[Part, str, int]]:
    """At most :data:`MOST_SEGMENTS` pieces: the smallest of each part become one."""
    if len(pieces) <= MOST_SEGMENTS:
        return pieces
    by_size = sorted(range(len(pieces)), key=lambda number: pieces[number][2])
    small = set(by_size[: len(pieces) - MOST_SEGMENTS + len(PARTS)])
    merged = [piece for number, piece in enumerate(pieces) if number not in small]
    for part in reversed(PARTS):
        gathered = [pieces[number] for number in small if pieces[number][0] == part]
        if gathered:
            bits = sum(size for _, _, size in gathered)
            merged.insert(0, (part, f"{len(gathered)} small prime powers", bits))
    return merged


def _laid_out(pieces: list[tuple[Part, str, int]]) -> tuple[Segment, ...]:
    """Widths by size, none below a least width so that each can be seen."""
    total = sum(bits for _, _, bits in pieces)
    free = RIGHT - LEFT - _LEAST_WIDTH * len(pieces)
    segments, x = [], LEFT
    for part, label, bits in pieces:
        width = _LEAST_WIDTH + free * bits / total
        segments.append(Segment(part, label, bits, round(x, 2), round(width, 2)))
        x += width
    return tuple(segments)
