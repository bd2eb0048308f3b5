"""A short Markdown document within the length that a tracker's field takes."""

from collections.abc import Iterable

from auditor.report.markdown import code
from auditor.report.words import plural

LEAST = 4_000
"""A limit below this leaves no room for what every document begins and ends with."""

_RESERVE = 120


def fitted(head: str, pieces: Iterable[str], foot: str, *, limit: int, kind: str) -> str:
    """``head``, as many ``pieces`` as fit, how many do not, ``foot``: at most ``limit`` UTF-16
    units, the most that trackers count for a character.

    ``kind`` names one piece, such as 'set'. ValueError for a limit below :data:`LEAST`.
    """
    if limit < LEAST:
        raise ValueError(f"a limit of at least {LEAST:,} characters is needed, not {limit:,}")
    listed = list(pieces)
    room = limit - _units(head) - _units(foot) - _RESERVE
    shown: list[str] = []
    for piece in listed:
        room -= _units(piece)
        if room < 0:
            break
        shown.append(piece)
    left = len(listed) - len(shown)
    note = f"\nLeft out for length: {plural(left, kind)}.\n" if left else ""
    return "".join([head, *shown, note, foot])


def span(text: str, limit: int = 120) -> str:
    """Outside text as a code span outside of any table, where a pipe is a pipe."""
    return code(text, limit).replace("\\|", "|")


def _units(text: str) -> int:
    return len(text.encode("utf-16-le", "surrogatepass")) // 2
