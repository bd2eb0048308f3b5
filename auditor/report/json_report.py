"""The report record as JSON text, and the check of a record against the published schema."""

import hashlib
import json
import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
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
_encode = json.JSONEncoder(ensure_ascii=False, allow_nan=False).encode


@dataclass(frozen=True, slots=True)
class Written:
    """What is known of the text of a record once it is written."""

    sha256: str
    """Over its bytes."""
    may_hide: bool
    """Whether it holds an escape of a character that does not show; False is certain."""


def write(record: Mapping[str, Any], put: Callable[[bytes], object]) -> Written:
    """Give the text of :func:`dumps`, encoded in UTF-8, to ``put`` piece by piece: a large report
    never stands in memory as a whole."""
    digest, may_hide = hashlib.sha256(), False
    for piece in _pieces(record):
        encoded = piece.encode()
        digest.update(encoded)
        put(encoded)
        may_hide = may_hide or _ESCAPE.search(piece) is not None
    return Written(digest.hexdigest(), may_hide)


def dumps(record: Mapping[str, Any]) -> str:
    """The record as JSON text with a newline at its end; equal records, equal text.

    Characters that do not show or that reorder their neighbours are written as escapes: the text
    is safe to look at, and reads back as the same record. ValueError for NaN and infinities.
    """
    return "".join(_pieces(record))


def lines(record: Mapping[str, Any]) -> Iterator[str]:
    """JSON Lines: each parameter set on a line, in input order, then a summary on the last line.

    The summary is the record without its sets: run, inputs, rulebooks, overview, claims, errors.
    """
    summary = {key: value for key, value in record.items() if key != "parameter_sets"}
    texts = _Texts()
    for item in record["parameter_sets"]:
        yield f'{{"parameter_set": {texts.entry(item)}}}\n'
    yield f'{{"summary": {_compact(summary)}}}\n'


def problems(record: Mapping[str, Any]) -> list[str]:
    """Where the record departs from ``report.schema.json``, a line each; empty for a sound one."""
    errors = _validator().iter_errors(_clamped(record))
    return [f"{_pointer(error.instance_path)}: {_brief(error.message)}" for error in errors]


def _pieces(record: Mapping[str, Any]) -> Iterator[str]:
    """The text of the record, an entry of its long members at a time."""
    before = "{"
    for key, value in record.items():
        yield f"{before}{_compact(key)}: "
        yield from _entries(value) if key in BY_LINE and value else [_compact(value)]
        before = ",\n"
    yield "{}\n" if before == "{" else "}\n"


def _entries(value: Any) -> Iterator[str]:
    """The text of a long member, an entry at a time."""
    entries: Iterator[str]
    if isinstance(value, Mapping):
        entries = (f"{_compact(name)}: {_compact(entry)}" for name, entry in value.items())
        first, last = "{\n", "}"
    else:
        entries = map(_Texts().entry, value)
        first, last = "[\n", "]"
    for entry in entries:
        yield f"{first}{entry}"
        first = ",\n"
    yield last


class _Texts:
    """Texts of the parts of entries, each written once where entries have the very same part.

    Parts are told by their identity: the entries must stay as they are while this is in use.
    """

    MOST = 1 << 25
    """Characters kept at a time."""

    DEPTH: Mapping[str, int] = {"findings": 2}
    """Which parts of a member entries have in common: its items (1), or the members of its items
    (2), since a finding of many sets has a remedy for each."""

    def __init__(self) -> None:
        self._known: dict[int | str, str] = {}
        self._kept = 0

    def entry(self, value: Any) -> str:
        """What :func:`_compact` gives for the entry."""
        if not isinstance(value, dict):
            return _compact(value)
        depth, once = self.DEPTH.get, self._once
        members = [f"{once(k, k)}: {self._text(v, depth(k, 1))}" for k, v in value.items()]
        return f"{{{', '.join(members)}}}"

    def _text(self, part: Any, depth: int) -> str:
        if isinstance(part, str):
            return self._once(part, part)
        if not isinstance(part, dict | list):
            return _compact(part)
        if not depth:
            return self._once(id(part), part)
        text, once = self._text, self._once
        if isinstance(part, dict):
            inner = [f"{once(key, key)}: {text(item, depth - 1)}" for key, item in part.items()]
            return f"{{{', '.join(inner)}}}"
        return f"[{', '.join([text(item, depth - 1) for item in part])}]"

    def _once(self, key: int | str, part: Any) -> str:
        """The text of a part that is known by ``key``."""
        text = self._known.get(key)
        if text is None:
            if self._kept > self.MOST:
                self._known.clear()
                self._kept = 0
            text = self._known[key] = _compact(part)
            self._kept += len(text)
        return text


def _compact(value: Any) -> str:
    text = _encode(value)
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
