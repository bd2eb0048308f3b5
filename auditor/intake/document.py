"""The declaration document: YAML text to declarations, and every problem in one run.

The JSON Schema ``declaration.schema.json`` says what a document may hold; this module adds what a
schema cannot say (unique names, known groups, files that hold a number) and builds the
declarations. A set with a problem is left out; the sound sets beside it are returned.
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from auditor.declaration import Declaration, Place
from auditor.intake.inputs import InputError, InputFile, Unreadable
from auditor.intake.integers import advice_on_integer, marked_integer
from auditor.intake.number_files import NumberFiles
from auditor.intake.record import NUMBER_LISTS, NUMBERS, SCHEMA, build
from auditor.intake.standard_groups import StandardGroup, find, suggest
from auditor.schema_check import (
    found,
    quoted,
    schema_problems,
    sentence,
    shipped_schema,
    value_at,
)
from auditor.strict_yaml import KeyPath, Loaded, Problem, YamlError, read, shown_path

SETS = "parameter_sets"

_SEEDS = ("seed", "first_seed", "p_seed", "q_seed")
_TEXTS = ("name", "role", "text", "group", "file", *_SEEDS)


@dataclass(frozen=True, slots=True)
class DocumentResult:
    """What one document declares, what is wrong with it, and the number files it names."""

    declarations: tuple[Declaration, ...]
    errors: tuple[InputError, ...]
    files: tuple[InputFile, ...] = ()


def read_document(text: str, path: str, root: Path | None) -> DocumentResult:
    """The declarations in ``text`` and all its problems, in text order.

    ``path`` is the document's path as given; ``{file: …}`` is relative to it and stays below
    ``root``. With ``root`` None (standard input) no file can be named.
    """
    try:
        loaded = parse(text)
    except YamlError as error:
        return DocumentResult((), errors_of(path, error.problems))
    return read_parsed(loaded, path, root)


def parse(text: str) -> Loaded:
    """The YAML of a document, without floats; YamlError where it cannot be parsed."""
    return read(text, floats=False)


def is_document(loaded: Loaded) -> bool:
    """Whether the text calls itself a declaration document: a mapping with the key ``auditor``."""
    return isinstance(loaded.value, dict) and "auditor" in loaded.value


def read_parsed(loaded: Loaded, path: str, root: Path | None) -> DocumentResult:
    """Like :func:`read_document`, for text that is parsed already."""
    problems = [*loaded.problems, *schema_problems(loaded, shipped_schema(SCHEMA), _advice)]
    if not is_document(loaded) or any(problem.path == ("auditor",) for problem in problems):
        about_format = [problem for problem in problems if problem.path[:1] != (SETS,)]
        return DocumentResult((), errors_of(path, about_format))
    reading = _Reading(loaded, NumberFiles(path, root), problems)
    reading.resolve()
    declarations = tuple(reading.declarations(path))
    return DocumentResult(declarations, errors_of(path, problems), reading.files.used)


def errors_of(path: str, problems: Iterable[Problem]) -> tuple[InputError, ...]:
    """Problems of the text at ``path`` in text order, equal ones once."""
    ordered = sorted(problems, key=lambda problem: problem.order)
    errors = (InputError(path, item.line, item.column, item.message) for item in ordered)
    return tuple(dict.fromkeys(errors))


class _UnknownGroup(Exception):
    """A name of no standard group, or of two."""

    def __init__(self, name: str) -> None:
        super().__init__(f"{quoted(name)}, which names no one standard group")
        near = suggest(name)
        self.advice = f"did you mean {' or '.join(near)}?" if near else ""


@dataclass(slots=True)
class _Reading:
    """One document while it is read: integers and groups resolved so far, and the problems."""

    loaded: Loaded
    files: NumberFiles
    problems: list[Problem]
    numbers: dict[KeyPath, int] = field(default_factory=dict)
    groups: dict[KeyPath, StandardGroup] = field(default_factory=dict)

    def resolve(self) -> None:
        """Turn every integer of the right shape into its value; refuse repeated names."""
        misshapen = {item.path for item in self.problems}
        wrong = {path[:depth] for path in misshapen for depth in range(len(path) + 1)}
        names: list[KeyPath] = []
        for base, record in self.records():
            roles = [(*path, "role") for path, _ in _items((*base, "parties"), record)]
            self.refuse_repetition(roles, wrong, "role")
            names.append((*base, "name"))
            for key in (*NUMBERS, *NUMBER_LISTS):
                for path, value in _items((*base, key), record):
                    if path not in wrong and (*base, key) not in misshapen:
                        self.resolve_number(path, value, _number_node(key))
        self.refuse_repetition(names, wrong, "name")

    def records(self) -> Iterator[tuple[KeyPath, dict[str, Any]]]:
        """The parameter sets that are mappings, by path."""
        sets = self.loaded.value.get(SETS)
        for index, record in enumerate(sets if isinstance(sets, list) else []):
            if isinstance(record, dict):
                yield (SETS, index), record

    def resolve_number(self, path: KeyPath, value: Any, node: Mapping[str, Any]) -> None:
        """Keep the integer that ``value`` stands for, or say why there is none."""
        try:
            number = self.number(path, value)
            if number < node["minimum"]:
                raise ValueError(f"found {found(number)}")
        except _UnknownGroup as error:
            expected = node["properties"]["group"]["description"]
            message = sentence("", f"found {error}", expected, error.advice)
            self.problem((*path, "group"), message)
        except Unreadable as error:
            what = f"found the file {quoted(value['file'])}: {error}"
            self.problem((*path, "file"), sentence("", what, "a file that holds one integer"))
        except ValueError as error:
            self.problem(path, sentence("", str(error), node["description"]))
        else:
            self.numbers[path] = number

    def number(self, path: KeyPath, value: Any) -> int:
        """The integer that ``value`` writes or names; a group is kept for its other values."""
        if isinstance(value, str):
            return marked_integer(value)
        if not isinstance(value, dict):
            return int(value)
        if "file" in value:
            return self.files.integer(value["file"])
        group = find(value["group"])
        if group is None:
            raise _UnknownGroup(value["group"])
        self.groups[path] = group
        return group.modulus

    def refuse_repetition(self, paths: list[KeyPath], wrong: set[KeyPath], what: str) -> None:
        """A problem at every path whose text an earlier one has."""
        first: dict[str, KeyPath] = {}
        for path in paths:
            if path in wrong or path not in self.loaded.marks:
                continue
            text = value_at(self.loaded.value, path)
            if not isinstance(text, str):
                continue
            earlier = first.setdefault(text, path)
            if earlier != path:
                line = self.loaded.marks[earlier].line
                message = f"found {quoted(text)}, which is the {what} on line {line} already"
                self.problem(path, sentence("", message, f"a {what} of its own"))

    def problem(self, path: KeyPath, message: str) -> None:
        mark = self.loaded.marks[path]
        where = f"{shown_path(path)}: {message}"
        self.problems.append(Problem(mark.line, mark.column, path, where))

    def declarations(self, path: str) -> Iterator[Declaration]:
        """The sets without a problem."""
        broken = {problem.path[:2] for problem in self.problems}
        for base, record in self.records():
            if base not in broken:
                mark = self.loaded.marks[base]
                yield build(self.plain_record(base, record), Place(path, mark.line, mark.column))

    def plain_record(self, base: KeyPath, record: Mapping[str, Any]) -> dict[str, Any]:
        """The record with integers for all numbers, and what the standard group supplies.

        A generator of the owner's own replaces the group's; the group's order is then no longer
        known to be that of the generator and is not supplied.
        """
        plain = dict(record)
        if (group := self.groups.get((*base, "modulus"))) is not None:
            plain.setdefault("generator", group.generator)
            self.numbers.setdefault((*base, "generator"), group.generator)
            if self.numbers[*base, "generator"] % group.modulus == group.generator:
                plain.setdefault("subgroup_order", group.subgroup_order)
                self.numbers.setdefault((*base, "subgroup_order"), group.subgroup_order)
        for key in {*NUMBERS} & {*plain}:
            plain[key] = self.numbers[*base, key]
        for key in {*NUMBER_LISTS} & {*plain}:
            plain[key] = [self.numbers[path] for path, _ in _items((*base, key), record)]
        if "provenance" in plain:
            plain["provenance"] = _with_plain_seeds(plain["provenance"])
        return plain


def _items(path: KeyPath, record: Mapping[str, Any]) -> list[tuple[KeyPath, Any]]:
    """The value at the last key of ``path``, or its items where it is a list; none if absent."""
    value = record.get(str(path[-1]))
    if isinstance(value, list):
        return [((*path, index), item) for index, item in enumerate(value)]
    return [] if value is None else [(path, value)]


def _number_node(key: str) -> Any:
    """The schema's definition of the numbers under ``key``."""
    definitions = shipped_schema(SCHEMA).document["definitions"]
    node = definitions["parameter_set"]["properties"][key]
    reference = node.get("items", node)["$ref"]
    return definitions[reference.removeprefix("#/definitions/")]


def _with_plain_seeds(provenance: Mapping[str, Any]) -> dict[str, Any]:
    """Seeds as lower-case hex digits, two a byte."""
    return {
        key: bytes.fromhex(_seed_digits(value)).hex() if key in _SEEDS else value
        for key, value in provenance.items()
    }


def _seed_digits(text: str) -> str:
    return text.strip().removeprefix("0x").removeprefix("0X").replace(":", " ")


def _advice(path: KeyPath, value: Any) -> str:
    """How to write what was meant, for values of a wrong form."""
    key = next(part for part in reversed(path) if isinstance(part, str)) if path else ""
    if key in (*NUMBERS, *NUMBER_LISTS) and isinstance(value, str):
        return advice_on_integer(value)
    if key in _TEXTS and isinstance(value, bool | int):
        return "put it in quotes"
    return ""
