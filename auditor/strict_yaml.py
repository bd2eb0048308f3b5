"""Strict YAML: the core scalars of YAML 1.2 with positions, and no surprises.

Parameter files are full of text that YAML 1.1 readers turn into something else: a colon-separated
hex number becomes a base-60 integer, ``017`` an octal one, a repeated key silently wins. Here a
plain scalar is an integer, a float, a boolean or null by the core schema of YAML 1.2.2, 10.3.2,
and text otherwise; quoted and block scalars are always text. Tags, merge keys, duplicate keys and
keys that are not scalars are problems. Size, depth and the number of nodes after alias expansion
are bounded, so that no short text expands into a long one.

Values are built from parser events, so that bounds act while a text is parsed; the C parser is
used where PyYAML has it. The two differ in some malformed texts that only one of them refuses,
such as a tab after a colon, and never in the value.
"""

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

import yaml

from auditor.core_scalars import core_scalar
from auditor.encoding import shorten

MAX_CHARACTERS = 16 * 2**20
MAX_NODES = 200_000
MAX_DEPTH = 40
MAX_PROBLEMS = 1_000

KeyPath = tuple[str | int, ...]
"""The keys and indexes that lead from the document to a value."""

LOADER: Any = getattr(yaml, "CBaseLoader", yaml.BaseLoader)

_OPENING = (yaml.MappingStartEvent, yaml.SequenceStartEvent)
_CLOSING = (yaml.MappingEndEvent, yaml.SequenceEndEvent)
_NOT_YAML = re.compile("[^\t\n\r\x20-\x7e\x85\xa0-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


@dataclass(frozen=True, slots=True, order=True)
class Mark:
    """A place in the text; line and column count from 1, columns in characters."""

    line: int
    column: int


@dataclass(frozen=True, slots=True)
class Problem:
    """What is wrong at a place, and the keys that lead there."""

    line: int
    column: int
    path: KeyPath
    message: str

    @property
    def order(self) -> tuple[int, int, str]:
        """Sorts problems as they stand in the text."""
        return self.line, self.column, self.message


class YamlError(ValueError):
    """The text is not YAML of this kind; ``problems`` holds every reason found, in text order."""

    def __init__(self, problems: tuple[Problem, ...]) -> None:
        super().__init__(problems)
        self.problems = problems

    @property
    def message(self) -> str:
        """The first problem's message."""
        return self.problems[0].message

    @property
    def line(self) -> int:
        """The first problem's line, from 1."""
        return self.problems[0].line

    @property
    def column(self) -> int:
        """The first problem's column, from 1."""
        return self.problems[0].column

    def __str__(self) -> str:
        return "\n".join(f"{item.line}:{item.column}: {item.message}" for item in self.problems)


@dataclass(frozen=True, slots=True)
class Loaded:
    """A value, where each part of it stands, and what could not be read.

    ``marks`` gives the place of every value, ``key_marks`` that of every mapping key, by the path
    of the value. Where ``problems`` is not empty, the value at a problem's path is None, or the
    first of the values where a key stands twice.
    """

    value: Any
    marks: Mapping[KeyPath, Mark]
    key_marks: Mapping[KeyPath, Mark]
    problems: tuple[Problem, ...] = ()


def load(text: str, *, floats: bool = True) -> Loaded:
    """The value of ``text`` and its places; YamlError with every problem found otherwise."""
    loaded = read(text, floats=floats)
    if loaded.problems:
        raise YamlError(loaded.problems)
    return loaded


def read(text: str, *, floats: bool = True, loader: Any = LOADER) -> Loaded:
    """Like :func:`load`, but problems that spoil one value only are returned beside the others.

    With ``floats`` False a number with a point or an exponent stays text. YamlError where nothing
    can be read: text that does not parse, is too large or too deep, or has several documents.
    """
    text = text.removeprefix("\ufeff")
    _refuse_unreadable(text)
    builder = _Builder(_node_events(text, loader), floats)
    value = builder.build()
    problems = tuple(sorted(builder.problems, key=lambda problem: problem.order))
    return Loaded(value, builder.marks, builder.key_marks, problems)


def shown_path(path: KeyPath) -> str:
    """``path`` for a message: ``parameter_sets[0].modulus``."""
    parts = (f"[{part}]" if isinstance(part, int) else f".{visible(part)}" for part in path)
    return "".join(parts).removeprefix(".")


def visible(text: str) -> str:
    """Text of a document for a message: shortened, what cannot be printed escaped."""
    return repr(shorten(text))[1:-1]


def _fatal(mark: Mark, message: str, path: KeyPath = ()) -> YamlError:
    return YamlError((Problem(mark.line, mark.column, path, message),))


def _refuse_unreadable(text: str) -> None:
    if len(text) > MAX_CHARACTERS:
        raise _fatal(Mark(1, 1), f"{len(text)} characters, expected at most {MAX_CHARACTERS}")
    if found := _NOT_YAML.search(text):
        before = text[: found.start()]
        column = found.start() - before.rfind("\n")
        code = f"U+{ord(found[0]):04X}"
        mark = Mark(before.count("\n") + 1, column)
        raise _fatal(mark, f"character {code} is not allowed in YAML")


def _mark(mark: Any) -> Mark:
    return Mark(mark.line + 1, mark.column + 1) if mark else Mark(1, 1)


def _node_events(text: str, loader: Any) -> list[Any]:
    """The events of the one document's nodes; YamlError where it cannot be parsed or is too big."""
    events: list[Any] = []
    depth = documents = 0
    for event in _parse(text, loader):
        if isinstance(event, _OPENING):
            depth += 1
        elif isinstance(event, _CLOSING):
            depth -= 1
        elif isinstance(event, yaml.DocumentStartEvent):
            documents += 1
        elif not isinstance(event, yaml.NodeEvent):
            continue
        if documents > 1:
            raise _fatal(_mark(event.start_mark), "a second document, expected only one")
        if depth > MAX_DEPTH:
            raise _fatal(_mark(event.start_mark), _too_much("deep"))
        if len(events) >= 2 * MAX_NODES:
            raise _fatal(_mark(event.start_mark), _too_much("large"))
        if not isinstance(event, yaml.DocumentStartEvent):
            events.append(event)
    return events


def _too_much(what: str) -> str:
    return (
        f"too {what}: expected at most {MAX_DEPTH} levels and {MAX_NODES} values, "
        "aliases written out"
    )


def _parse(text: str, loader: Any) -> Iterator[Any]:
    try:
        yield from yaml.parse(text, Loader=loader)
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark or error.context_mark
        place = _mark(mark)
        message = f"not YAML: {error.problem or 'cannot be parsed'}"
        if error.context and error.context_mark:
            start = _mark(error.context_mark)
            message += f" {error.context} from {start.line}:{start.column}"
        if mark and text[mark.index : mark.index + 1] == "\t":
            message += "; indent with blanks, not with tabs"
        raise _fatal(place, message) from None
    except (yaml.YAMLError, RecursionError, ValueError) as error:
        raise _fatal(Mark(1, 1), f"not YAML: {type(error).__name__}") from None


@dataclass(slots=True)
class _Builder:
    """Values from events. An alias is built again at its own path, from its anchor's events."""

    events: list[Any]
    floats: bool
    marks: dict[KeyPath, Mark] = field(default_factory=dict)
    key_marks: dict[KeyPath, Mark] = field(default_factory=dict)
    problems: list[Problem] = field(default_factory=list)
    targets: dict[int, int | None] = field(default_factory=dict)
    scalars: dict[int, Any] = field(default_factory=dict)
    characters: int = 0

    def build(self) -> Any:
        if not self.events:
            self.marks[()] = Mark(1, 1)
            return None
        anchors: dict[str, int] = {}
        for position, event in enumerate(self.events):
            if isinstance(event, yaml.AliasEvent):
                self.targets[position] = anchors.get(str(event.anchor))
            elif getattr(event, "anchor", None):
                anchors[event.anchor] = position
        return self.node(0, ())[0]

    def node(self, position: int, path: KeyPath) -> tuple[Any, int]:
        """The value that starts at ``position``, and the position after it."""
        event = self.events[position]
        mark = _mark(event.start_mark)
        self.marks[path] = mark
        if len(self.marks) > MAX_NODES:
            raise _fatal(mark, _too_much("large"), path)
        if len(path) > MAX_DEPTH:
            raise _fatal(mark, _too_much("deep"), path)
        if isinstance(event, yaml.AliasEvent):
            return self.alias(position, path, mark), position + 1
        if event.tag is not None:
            self.problem(mark, path, f"tag {visible(event.tag)}: tags are not allowed")
        if isinstance(event, yaml.ScalarEvent):
            return self.scalar(position, path, mark), position + 1
        if isinstance(event, yaml.SequenceStartEvent):
            return self.sequence(position + 1, path)
        return self.mapping(position + 1, path)

    def alias(self, position: int, path: KeyPath, mark: Mark) -> Any:
        target = self.targets[position]
        if target is None:
            name = visible(self.events[position].anchor)
            self.problem(mark, path, f"alias *{name} without an anchor &{name} before it")
            return None
        value = self.node(target, path)[0]
        self.marks[path] = mark
        return value

    def scalar(self, position: int, path: KeyPath, mark: Mark) -> Any:
        event = self.events[position]
        self.characters += len(event.value)
        if self.characters > 2 * MAX_CHARACTERS:
            raise _fatal(mark, _too_much("large"), path)
        if event.style not in (None, ""):
            return event.value
        if position not in self.scalars:
            try:
                self.scalars[position] = core_scalar(event.value, floats=self.floats)
            except ValueError as error:
                self.scalars[position] = error
        value = self.scalars[position]
        if isinstance(value, ValueError):
            self.problem(mark, path, str(value))
            return None
        return value

    def sequence(self, position: int, path: KeyPath) -> tuple[list[Any], int]:
        items: list[Any] = []
        while not isinstance(self.events[position], yaml.SequenceEndEvent):
            item, position = self.node(position, (*path, len(items)))
            items.append(item)
        return items, position + 1

    def mapping(self, position: int, path: KeyPath) -> tuple[dict[str, Any], int]:
        items: dict[str, Any] = {}
        while not isinstance(self.events[position], yaml.MappingEndEvent):
            event = self.events[position]
            mark = _mark(event.start_mark)
            reason = _key_reason(event)
            key = "" if reason else event.value
            inner = (*path, key)
            if reason or key in items:
                if not reason:
                    first = self.key_marks[inner]
                    reason = f"duplicate key {shorten(key)!r} (first on line {first.line})"
                self.problem(mark, path if not key else inner, reason)
                position = self.skip(self.skip(position))
                continue
            self.key_marks[inner] = mark
            items[key], position = self.node(position + 1, inner)
        return items, position + 1

    def skip(self, position: int) -> int:
        """The position after the node at ``position``, whatever it holds."""
        depth = 0
        while True:
            event = self.events[position]
            depth += isinstance(event, _OPENING)
            depth -= isinstance(event, _CLOSING)
            position += 1
            if depth == 0:
                return position

    def problem(self, mark: Mark, path: KeyPath, message: str) -> None:
        where = f"{shown_path(path)}: " if path else ""
        if len(self.problems) < MAX_PROBLEMS:
            self.problems.append(Problem(mark.line, mark.column, path, where + message))


def _key_reason(event: Any) -> str:
    """Why an event cannot be a key of a mapping; empty when it can."""
    if not isinstance(event, yaml.ScalarEvent):
        return "a key that is not plain text: keys are text, not lists, mappings or aliases"
    if event.tag is not None:
        return f"tag {visible(event.tag)}: tags are not allowed"
    if event.value == "<<" and event.style in (None, ""):
        return "merge key <<: write the keys out"
    return ""
