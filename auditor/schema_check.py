"""A value against a JSON Schema, with every disagreement placed in the text it was read from.

The schema is the contract for editors and for the program alike: the ``description`` of the node
that a value fails is what the message says was expected. Descriptions are therefore noun phrases.
"""

import json
from collections.abc import Callable, Iterator, Sequence
from difflib import get_close_matches
from functools import cache
from itertools import islice
from typing import Any

import jsonschema_rs

from auditor.data_files import data
from auditor.encoding import shorten
from auditor.strict_yaml import KeyPath, Loaded, Mark, Problem, shown_path

MAX_PROBLEMS = 1_000
LARGEST = 2**62

Advice = Callable[[KeyPath, Any], str]
"""What to write instead of the value found at a path; empty for no advice."""


class Schema:
    """A JSON Schema (draft-07) ready for use."""

    def __init__(self, document: dict[str, Any]) -> None:
        self.document = document
        self.validator = jsonschema_rs.Draft7Validator(document)

    def node(self, schema_path: Sequence[str | int]) -> tuple[Any, str]:
        """The node at the end of a path of keywords, and the nearest description on the way."""
        node: Any = self.document
        description = str(self.document.get("description", ""))
        for step in schema_path:
            node = node[step]
            if isinstance(node, dict) and isinstance(node.get("description"), str):
                description = node["description"]
        return node, description


@cache
def shipped_schema(name: str) -> Schema:
    """The schema of that file name among the shipped ones."""
    return Schema(json.loads((data("reports") / name).read_text("utf-8")))


def schema_problems(
    loaded: Loaded, schema: Schema, advice: Advice = lambda path, value: ""
) -> tuple[Problem, ...]:
    """Every disagreement of ``loaded.value`` with ``schema``, in text order.

    Values that could not be read are not judged a second time.
    """
    unread = {problem.path for problem in loaded.problems}
    problems: list[Problem] = []
    for error in schema.validator.iter_errors(small(loaded.value)):
        path = tuple(error.instance_path)
        if path in unread:
            continue
        node, expected = schema.node(list(error.schema_path)[:-1])
        kind: Any = error.kind
        if kind.name == "additionalProperties":
            problems += _unknown_keys(loaded, path, kind.unexpected, node, expected)
        elif kind.name == "required":
            problems.append(_missing_key(loaded, path, kind.property, schema, node))
        elif kind.name == "uniqueItems":
            repeated = list(islice(_repeated_items(loaded, path, expected), MAX_PROBLEMS))
            problems += repeated or [_wrong_value(loaded, path, node, expected, advice)]
        else:
            problems.append(_wrong_value(loaded, path, node, expected, advice))
        if len(problems) >= MAX_PROBLEMS:
            break
    return tuple(sorted(dict.fromkeys(problems), key=lambda problem: problem.order))


def small(value: Any) -> Any:
    """``value`` with integers clamped: the validator reads those of 1,024 bits and more wrongly.

    Shape, sign and size within 2^62 are all that a schema judges.
    """
    if type(value) is int:
        return max(-LARGEST, min(LARGEST, value))
    if isinstance(value, dict):
        return {key: small(item) for key, item in value.items()}
    return [small(item) for item in value] if isinstance(value, list) else value


def found(value: Any) -> str:
    """A value for a message: short, on one line, and never a long decimal integer."""
    if value is None:
        return "nothing"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list):
        return f"a list of {_count(value)}" if value else "an empty list"
    if isinstance(value, dict):
        return (
            f"a mapping of {', '.join(quoted(key) for key in list(value)[:4])}"
            if value
            else "an empty mapping"
        )
    return quoted(value) if isinstance(value, str) else shorten(value)


def _count(items: Sequence[Any]) -> str:
    return "one item" if len(items) == 1 else f"{len(items)} items"


def quoted(text: str) -> str:
    """Text in quotes, shortened, what cannot be printed escaped."""
    return repr(shorten(text))


def value_at(value: Any, path: KeyPath) -> Any:
    """The part of ``value`` that ``path`` leads to."""
    for step in path:
        value = value[step]
    return value


def did_you_mean(word: str, words: Sequence[str]) -> str:
    """A suggestion for a misspelt word; empty when nothing is near."""
    close = get_close_matches(word, words, n=1, cutoff=0.6)
    return f"did you mean {close[0]!r}?" if close else ""


def sentence(where: str, what: str, expected: str = "", suggestion: str = "") -> str:
    """One message of one shape: where, what was found, what was expected, a suggestion."""
    parts = [what, f"expected {expected}" if expected else "", suggestion]
    text = "; ".join(part for part in parts if part)
    return f"{where}: {text}" if where else text


def _unknown_keys(
    loaded: Loaded, path: KeyPath, keys: Sequence[str], node: Any, expected: str
) -> Iterator[Problem]:
    known = list(node.get("properties", {}))
    for key in keys:
        mark = loaded.key_marks.get((*path, key)) or _mark(loaded, path)
        suggestion = did_you_mean(key, known) or f"known keys: {', '.join(known)}"
        what = f"unknown key {quoted(key)}"
        message = sentence(shown_path(path), what, expected, suggestion)
        yield Problem(mark.line, mark.column, (*path, key), message)


def _missing_key(loaded: Loaded, path: KeyPath, key: str, schema: Schema, node: Any) -> Problem:
    mark = _mark(loaded, path)
    present = value_at(loaded.value, path)
    needs = [
        other
        for other, needed in node.get("dependencies", {}).items()
        if isinstance(needed, list) and key in needed and other in present
    ]
    because = f", called for by {' and '.join(needs)}" if needs else ""
    expected = _property_description(schema, node, key)
    message = sentence(shown_path(path), f"missing key {key!r}{because}", expected)
    return Problem(mark.line, mark.column, path, message)


def _repeated_items(loaded: Loaded, path: KeyPath, expected: str) -> Iterator[Problem]:
    """A problem for each item that stands in the list before."""
    first: dict[str, int] = {}
    for at, item in enumerate(value_at(loaded.value, path)):
        before = first.setdefault(repr(small(item)), at)
        if before < at:
            here = (*path, at)
            what = f"found {found(item)} again, after {shown_path((*path, before))}"
            mark, message = _mark(loaded, here), sentence(shown_path(here), what, expected)
            yield Problem(mark.line, mark.column, here, message)


def _wrong_value(
    loaded: Loaded, path: KeyPath, node: Any, expected: str, advice: Advice
) -> Problem:
    value = value_at(loaded.value, path)
    mark = _mark(loaded, path)
    options = [option for option in node.get("enum", ()) if isinstance(option, str)]
    suggestion = did_you_mean(value, options) if isinstance(value, str) else ""
    what = f"found {found(value)}"
    message = sentence(shown_path(path), what, expected, suggestion or advice(path, value))
    return Problem(mark.line, mark.column, path, message)


def _property_description(schema: Schema, node: Any, key: str) -> str:
    inner = node.get("properties", {}).get(key) or {}
    if "$ref" in inner:
        inner, _ = schema.node(inner["$ref"].removeprefix("#/").split("/"))
    return str(inner.get("description", ""))


def _mark(loaded: Loaded, path: KeyPath) -> Mark:
    return loaded.marks.get(path) or Mark(1, 1)
