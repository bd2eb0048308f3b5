"""How integers and records become text, everywhere: reports, claims, digests, messages.

Python refuses to print decimal integers of more than 4,300 digits, and JSON readers lose
integers beyond 2^53. Integers beyond that are therefore hexadecimal text (``0x…``), and no
message ever formats one in decimal.
"""

import hashlib
import json
from typing import Any

EXACT_IN_JSON = 2**53
SHOWN_DIGITS = 24


def plain(value: Any) -> Any:
    """``value`` with every integer beyond 2^53 as hex text and every tuple as a list."""
    if isinstance(value, bool) or value is None:
        return value
    if isinstance(value, int):
        return value if abs(value) <= EXACT_IN_JSON else hex(value)
    if isinstance(value, dict):
        return {key: plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [plain(item) for item in value]
    return value


def integer(value: Any) -> int:
    """The integer that :func:`plain` wrote; ValueError for anything else, other spellings included.

    One integer has one spelling, so that equal records have equal digests.
    """
    if isinstance(value, int) and not isinstance(value, bool) and abs(value) <= EXACT_IN_JSON:
        return value
    if isinstance(value, str):
        number = int(value, 16)
        if abs(number) > EXACT_IN_JSON and hex(number) == value:
            return number
    raise ValueError(f"not an integer of this format: {shorten(value)}")


def canonical_json(record: Any) -> str:
    """JSON of ``plain(record)``, keys sorted, no blanks: equal records, equal text."""
    return json.dumps(
        plain(record), sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False
    )


def digest(record: Any) -> str:
    """SHA-256 of :func:`canonical_json`, 64 hex digits."""
    return hashlib.sha256(canonical_json(record).encode("utf-8", "surrogatepass")).hexdigest()


def identifier(kind: str, record: Any) -> str:
    """``kind`` and 20 hex digits of the record's digest: the id of a claim or a question."""
    return f"{kind}-{digest(record)[:20]}"


def shorten(value: Any, limit: int = 60) -> str:
    """``value`` for a message: integers in hex, long ones by both ends and their bit length."""
    if isinstance(value, int) and not isinstance(value, bool):
        if abs(value) < 10**SHOWN_DIGITS:
            return str(value)
        text = hex(value)
        if len(text) <= limit:
            return text
        return f"{text[:14]}…{text[-8:]} ({value.bit_length()} bits)"
    text = repr(value) if not isinstance(value, str) else value
    return text if len(text) <= limit else f"{text[: limit - 1]}…"
