"""Plain scalars by the core schema of YAML 1.2.2, 10.3.2, and integers of any length."""

import math
import re
from typing import Any

from auditor.encoding import shorten

MAX_BITS = 65_536

_INTEGER = re.compile(r"[-+]?[0-9]+|0o[0-7]+|0x[0-9a-fA-F]+")
_FLOAT = re.compile(r"[-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?")
_NOT_FINITE = re.compile(r"[-+]?\.(?:inf|Inf|INF)|\.(?:nan|NaN|NAN)")
_CONSTANTS = {
    **dict.fromkeys(("", "~", "null", "Null", "NULL")),
    **dict.fromkeys(("true", "True", "TRUE"), True),
    **dict.fromkeys(("false", "False", "FALSE"), False),
}


def decimal(digits: str) -> int:
    """The integer of any number of decimal digits, which ``int`` refuses beyond 4,300."""
    value = 0
    for start in range(0, len(digits), 4000):
        part = digits[start : start + 4000]
        value = value * 10 ** len(part) + int(part)
    return value


def bounded_integer(digits: str, base: int) -> int:
    """The integer that ``digits`` write in base 8, 10 or 16; ValueError beyond 65,536 bits."""
    digits = digits.lstrip("0") or "0"
    if len(digits) * math.log2(base) <= MAX_BITS + 4:
        value = decimal(digits) if base == 10 else int(digits, base)
        if value.bit_length() <= MAX_BITS:
            return value
    raise ValueError(f"an integer of more than {MAX_BITS} bits, the most that is read")


def core_scalar(text: str, *, floats: bool = True) -> Any:
    """What a plain scalar means in the core schema of YAML 1.2; ValueError for what it forbids.

    Infinities and NaN are forbidden, and so are integers of more than 65,536 bits.
    """
    if text in _CONSTANTS:
        return _CONSTANTS[text]
    if _INTEGER.fullmatch(text):
        return _integer(text)
    if floats and _FLOAT.fullmatch(text) and math.isfinite(float(text)):
        return float(text)
    if floats and (_FLOAT.fullmatch(text) or _NOT_FINITE.fullmatch(text)):
        raise ValueError(f"{shorten(text)} is not a finite number")
    return text


def _integer(text: str) -> int:
    if text.startswith(("0x", "0o")):
        return bounded_integer(text[2:], 16 if text[1] == "x" else 8)
    value = bounded_integer(text.lstrip("+-"), 10)
    return -value if text.startswith("-") else value
