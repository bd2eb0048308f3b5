"""Reading statements and certificates back: strict, because a record has one spelling."""

from collections.abc import Mapping
from typing import Any

from auditor.claims.base import Factors
from auditor.encoding import integer


def only(record: Mapping[str, Any], *keys: str) -> None:
    """ValueError unless the record has exactly these keys."""
    if set(record) != set(keys):
        raise ValueError(f"expected the keys {', '.join(sorted(keys))}")


def natural(value: Any) -> int:
    """A non-negative integer in the spelling of :func:`auditor.encoding.plain`."""
    number = integer(value)
    if number < 0:
        raise ValueError("a negative integer")
    return number


def truth(value: Any) -> bool:
    """True or False and nothing that merely resembles it."""
    if not isinstance(value, bool):
        raise ValueError("expected true or false")
    return value


def pairs(value: Any) -> Factors:
    """A list of pairs of non-negative integers."""
    if not isinstance(value, list) or not all(
        isinstance(item, list) and len(item) == 2 for item in value
    ):
        raise ValueError("expected a list of pairs of integers")
    return tuple((natural(first), natural(second)) for first, second in value)
