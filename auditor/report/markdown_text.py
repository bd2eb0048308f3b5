"""Text for Markdown: outside text as code spans, sentences defused, documents within a length."""

import re
from collections.abc import Iterable

from auditor.report.text import clipped
from auditor.report.words import plural

LIMIT = 32_767
"""Characters that the fields of common trackers hold; counted in UTF-16 units, the most that any
of them counts for a character."""

LEAST = 4_000
"""A limit below this leaves no room for what every document begins and ends with."""

NAME, MESSAGE = 120, 400
"""Most characters of a name and of a message from outside."""

_RESERVE = 120
_ACTIVE = re.compile(r"([\\`*\[\]|~]|<(?=[A-Za-z/!?])|(?<![0-9A-Za-z])_|_(?![0-9A-Za-z]))")
_CALLING = re.compile(r"(@|://|\b(?i:www)\.|#(?=\d)|\b(?i:GH)-(?=\d))")


def span(text: str, limit: int = NAME) -> str:
    """Outside text as one code span outside of any table; nothing in it is active.

    The fence is longer than any run of backticks in the text (CommonMark 0.31.2, 6.1).
    """
    text = re.sub(r"\s+", " ", clipped(text, limit)) or " "
    fence = "`" * (max(map(len, re.findall(r"`+", text)), default=0) + 1)
    pad = " " if text[0] == "`" or text[-1] == "`" else ""
    return f"{fence}{pad}{text}{pad}{fence}"


def cell(text: str, limit: int = NAME) -> str:
    """The same in a table, where a pipe is escaped (GitHub Flavored Markdown 0.29, 4.10)."""
    return span(text, limit).replace("|", "\\|")


def prose(text: str) -> str:
    """A sentence with its active characters escaped and what would call somebody taken apart."""
    text = _ACTIVE.sub(r"\\\1", re.sub(r"\s+", " ", text))
    return _CALLING.sub(r"`\1`", text.replace("&", "&amp;"))


def units(text: str) -> int:
    """The length of the text in UTF-16 units."""
    return len(text.encode("utf-16-le", "surrogatepass")) // 2


def require_room(limit: int) -> None:
    """ValueError for a limit below :data:`LEAST`."""
    if limit < LEAST:
        raise ValueError(f"a limit of at least {LEAST:,} characters is needed, not {limit:,}")


def fitted(head: str, pieces: Iterable[str], foot: str, *, limit: int, kind: str) -> str:
    """``head``, as many ``pieces`` as fit, how many do not, ``foot``: at most ``limit`` UTF-16
    units. ``kind`` names one piece, such as 'set'. ValueError for a limit below :data:`LEAST`.
    """
    require_room(limit)
    listed = list(pieces)
    room = limit - units(head) - units(foot) - _RESERVE
    shown: list[str] = []
    for piece in listed:
        room -= units(piece)
        if room < 0:
            break
        shown.append(piece)
    left = len(listed) - len(shown)
    note = f"\nLeft out for length: {plural(left, kind)}.\n" if left else ""
    return "".join([head, *shown, note, foot])
