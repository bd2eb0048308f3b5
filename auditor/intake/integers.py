"""Integers as people write them: with 0x, in colon-separated bytes, and decimal in number files.

Digits without either mark are refused where both readings are possible: nobody can tell whether
``1024`` in quotes, or ``FFFF``, was meant as decimal, as hexadecimal or as a mistake.
"""

import re

from auditor.core_scalars import bounded_integer
from auditor.encoding import shorten
from auditor.intake.standard_groups import find

NO_NUMBER = "it does not hold one integer, decimal or hexadecimal with 0x or colons"

_BLANKS = re.compile(r"[ \t\r\n]+")
_MARKED = re.compile(r"0[xX]([0-9a-fA-F]+)")
_COLONS = re.compile(r"[0-9a-fA-F]{1,2}(?::[0-9a-fA-F]{2})+")
_DECIMAL = re.compile(r"[0-9]+")
_HEX_DIGITS = re.compile(r"[0-9a-fA-F]+")


def marked_integer(text: str) -> int:
    """The integer that hexadecimal ``text`` with 0x or colons writes; blanks do not matter.

    ValueError for any other text, and beyond 65,536 bits.
    """
    compact = _BLANKS.sub("", text)
    if found := _MARKED.fullmatch(compact):
        return bounded_integer(found[1], 16)
    if _COLONS.fullmatch(compact):
        return bounded_integer(compact.replace(":", ""), 16)
    raise ValueError(f"{shorten(compact)!r} is no hexadecimal text with 0x or colons")


def integer_of_file(text: str) -> int:
    """The one integer in the text of a number file: decimal, or marked hexadecimal.

    ValueError for any other text, and beyond 65,536 bits; the message does not repeat the text,
    which may be that of a file named by mistake.
    """
    compact = _BLANKS.sub("", text)
    if _DECIMAL.fullmatch(compact):
        return bounded_integer(compact, 10)
    if not _MARKED.fullmatch(compact) and not _COLONS.fullmatch(compact):
        raise ValueError(NO_NUMBER)
    return marked_integer(compact)


def advice_on_integer(text: str) -> str:
    """How to write what unmarked ``text`` may have meant; empty when that is unclear."""
    compact = _BLANKS.sub("", text)
    if (group := find(text)) is not None:
        return f"for the standard group write {{group: {group.name}}}"
    if _DECIMAL.fullmatch(compact):
        short = shorten(compact, 30)
        return f"write {short} without quotes if it is decimal, 0x{short} if it is hexadecimal"
    if _HEX_DIGITS.fullmatch(compact):
        return f"write 0x{shorten(compact, 30)} if it is hexadecimal"
    if re.fullmatch(r"(?:0[xX])?[0-9a-fA-F_]+", compact):
        return "write the digits without underscores"
    return ""
