"""The report record as JSON text, and the check of a record against the published schema."""

import json
import re
from collections.abc import Mapping
from functools import cache
from typing import TYPE_CHECKING, Any

from auditor.data_files import data
from auditor.report.text import HIDDEN

if TYPE_CHECKING:
    from jsonschema_rs import Validator

BY_LINE = ("parameter_sets", "claims")
"""Members that may be long: a line for each of their entries, so that a report can be searched and
compared line by line."""

_HIDDEN = re.compile(HIDDEN)
_ESCAPE = re.compile(r'\\[^"\\]')


def dumps(record: Mapping[str, Any]) -> str:
    """The record as JSON text with a newline at its end; equal records, equal text.

    Characters that do not show or that reorder their neighbours are written as escapes: the text
    is safe to look at, and reads back as the same record. ValueError for NaN and infinities.
    """
    members = (f"{_compact(key)}: {_member(key, value)}" for key, value in record.items())
    return "{" + ",\n".join(members) + "}\n"


def may_hide(text: str) -> bool:
    """Whether JSON text of :func:`dumps` holds an escape of a character that does not show."""
    return _ESCAPE.search(text) is not None


def problems(record: Mapping[str, Any]) -> list[str]:
    """Where the record departs from ``report.schema.json``, a line each; empty for a sound one."""
    errors = _validator().iter_errors(_clamped(record))
    return [f"{_pointer(error.instance_path)}: {_brief(error.message)}" for error in errors]


def _member(key: str, value: Any) -> str:
    if key not in BY_LINE or not value:
        return _compact(value)
    if isinstance(value, Mapping):
        entries = (f"{_compact(name)}: {_compact(entry)}" for name, entry in value.items())
        return "{\n" + ",\n".join(entries) + "}"
    text_of = _Texts()
    return "[\n" + ",\n".join(map(text_of.entry, value)) + "]"


class _Texts:
    """Texts of the members of entries, each written once where entries have the very same one."""

    MOST = 4_000
    """Texts kept at a time."""

    def __init__(self) -> None:
        self._known: dict[int, tuple[object, str]] = {}

    def entry(self, value: Any) -> str:
        """What :func:`_compact` gives for the entry."""
        if not isinstance(value, Mapping):
            return _compact(value)
        members = (f"{_compact(key)}: {self._text(member)}" for key, member in value.items())
        return "{" + ", ".join(members) + "}"

    def _text(self, member: Any) -> str:
        if not isinstance(member, dict | list):
            return _compact(member)
        known = self._known.get(id(member))
        if known is None:
            if len(self._known) >= self.MOST:
                self._known.clear()
            known = self._known[id(member)] = member, _compact(member)
        return known[1]


def _compact(value: Any) -> str:
    text = json.dumps(value, ensure_ascii=False, allow_nan=False)
    if text.isascii() and "\x7f" not in text:
        return text  # the encoder itself escapes the other control characters of ASCII
    if not _HIDDEN.search("".join(set(text))):
        return text  # looked at a character once: texts are long and have few
    return _HIDDEN.sub(lambda found: json.dumps(found.group())[1:-1], text)


@cache
def _validator() -> "Validator":
    import jsonschema_rs

    schema = json.loads((data("reports") / "report.schema.json").read_text(encoding="utf-8"))
    return jsonschema_rs.validator_for(schema)


def _clamped(value: Any) -> Any:
    """The validator misjudges the sign of integers beyond 2^1024; shape and sign are enough."""
    if type(value) is int:
        return max(-(2**62), min(2**62, value))
    if isinstance(value, Mapping):
        return {key: _clamped(item) for key, item in value.items()}
    if isinstance(value, list):
        return [_clamped(item) for item in value]
    return value


def _pointer(path: list[str | int]) -> str:
    return "$" + "".join(f"[{step!r}]" for step in path)


def _brief(message: str, limit: int = 200) -> str:
    return message if len(message) <= limit else f"{message[: limit // 2]} … {message[-40:]}"


def lines(record: Mapping[str, Any]) -> str:
    """JSON Lines: each parameter set on a line, in input order, then a summary on the last line.

    The summary is the record without its sets: run, inputs, rulebooks, overview, claims, errors.
    """
    summary = {key: value for key, value in record.items() if key != "parameter_sets"}
    rows = [{"parameter_set": item} for item in record["parameter_sets"]]
    return "".join(f"{_compact(row)}\n" for row in [*rows, {"summary": summary}])
