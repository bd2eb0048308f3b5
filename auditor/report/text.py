"""Text from outside made safe to look at, and long numbers made short.

Names, paths and messages come from files that anybody may have written. Every document shows
them through these functions, so that nothing in them hides, reorders its neighbours or speaks to
a terminal; what a character means to one format is escaped by the renderer of that format.
"""

import hashlib
import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

HIDDEN = (
    "[\x00-\x1f\x7f-\x9f\xad\u0600-\u0605\u061c\u06dd\u070f\u0890\u0891\u08e2\u115f\u1160\u180b-\u180f"
    "\u200b-\u200f\u2028-\u202e\u2060-\u206f\u3164\ud800-\udfff\ufe00-\ufe0f\ufeff\uffa0"
    "\ufff0-\ufffb\ufffe\uffff\U000110bd\U000110cd\U00013430-\U0001343f"
    "\U0001bca0-\U0001bca3\U0001d173-\U0001d17a"
    "\U000e0000-\U000e0fff]"
)
"""A pattern for one character that controls, hides or reorders: the Unicode categories Cc, Cf, Cs,
Zl and Zp, the variation selectors and the blank fillers (Unicode 15.0, DerivedCoreProperties,
Default_Ignorable_Code_Point)."""

_HIDDEN = re.compile(HIDDEN)
_LINE_BREAKS = re.compile(r"[ \t]*[\r\n][ \t\r\n]*")


@lru_cache(maxsize=4096)
def visible(text: str) -> str:
    """``text`` with every hidden character written out, such as ⟨U+202E⟩; one line.

    Line breaks become blanks.
    """
    if text.isascii() and text.isprintable():
        return text
    return _HIDDEN.sub(_written_out, _LINE_BREAKS.sub(" ", text))


def _written_out(found: re.Match[str]) -> str:
    return f"⟨U+{ord(found.group()):04X}⟩"


def visible_record(value: Any) -> Any:
    """A JSON value with all its text, the keys included, made :func:`visible`; what stood in it at
    several places as one is one again, and what needs no change is the same."""
    known: dict[int, Any] = {}

    def shown(part: Any) -> Any:
        made = known.get(id(part))
        if made is not None:
            return made
        if isinstance(part, str):
            made = visible(part)
        elif isinstance(part, dict):
            made = {shown(key): shown(item) for key, item in part.items()}
        elif isinstance(part, list):
            made = [shown(item) for item in part]
        else:
            return part
        known[id(part)] = part if made == part else made
        return known[id(part)]

    return shown(value)


def clipped(text: str, limit: int) -> str:
    """``text`` cut to ``limit`` characters, with an ellipsis for what was cut."""
    return text if len(text) <= limit else text[: limit - 1].rstrip() + "…"


def read_integer(value: int | str) -> int:
    """An integer of a record; ValueError for text that is not hexadecimal."""
    return int(value, 16) if isinstance(value, str) else value


@dataclass(frozen=True, slots=True)
class Number:
    """An integer of a record for readers: in full and short, its bit length and its digest."""

    full: str
    length: int

    @classmethod
    def read(cls, value: int | str) -> "Number":
        """From a JSON integer or hex text; ValueError for other text."""
        number = read_integer(value)
        full = str(number) if abs(number) <= 2**53 else hex(number)
        return cls(full, number.bit_length())

    @property
    def digest(self) -> str:
        """SHA-256 over the lower-case hex text, 0x included."""
        return hashlib.sha256(hex(int(self.full, 0)).encode()).hexdigest()

    @property
    def is_long(self) -> bool:
        """Whether :attr:`short` leaves digits out."""
        return len(self.full) > 26

    @property
    def short(self) -> str:
        """Both ends of a long number, all of a short one."""
        return f"{self.full[:12]}…{self.full[-8:]}" if self.is_long else self.full

    @property
    def mark(self) -> str:
        """The first 12 hex digits of the digest."""
        return self.digest[:12]
