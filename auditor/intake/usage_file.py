"""Usage files: how an owner uses the groups that were found in a tree, said by path.

Encoded parameters and names in configuration say little of their use. A usage file in the tree
says it, for what lies in its own directory and below; ``usage.schema.json`` is its form. Where
several uses match, each adds to those before it and replaces what they say under the same key:
files nearer to the top come first, uses in the order of their file. What an owner says here wins
over what a format suggests, and a notice says so. A use may also name candidates, which makes a
set of them.
"""

import os
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from fnmatch import fnmatchcase
from pathlib import PurePath
from typing import Any

from auditor.declaration import Declaration, Party, Place
from auditor.intake.document import errors_of
from auditor.intake.inputs import InputError
from auditor.intake.reading import Notice, Number, Passed
from auditor.intake.record import build
from auditor.schema_check import quoted, schema_problems, shipped_schema
from auditor.strict_yaml import Loaded

SCHEMA = "usage.schema.json"
KEY = "auditor-usage"
USES = "uses"

_PARTIES = ("parties", "exponent", "peer_check")
_ABOUT_PURPOSE = ("purpose", "scheme", "message_bits")
_COUNTS = ("message_bits", "required_strength", "protect_until")
_SUGGESTED = ("purpose", "scheme", "protocol")
USAGE = (*_ABOUT_PURPOSE, "protocol", *_PARTIES, "required_strength", "protect_until")
"""What a use may say, in the words of the declaration document."""


@dataclass(frozen=True, slots=True)
class Use:
    """One entry: where it stands, what it applies to, and what it says."""

    place: Place
    path: str
    name: str | None
    modulus: str | None
    generator: str | int | None
    subgroup_order: str | int | None
    said: Mapping[str, Any]

    def covers(self, declaration: Declaration) -> bool:
        """Whether the use is about ``declaration``."""
        inside = below(self.place.path, declaration.place.path)
        if inside is None or not path_matches(self.path, inside):
            return False
        if self.modulus is not None:
            return declaration.name == self.modulus
        return self.name is None or name_matches(self.name, declaration.name)


@dataclass(frozen=True, slots=True)
class UsageFile:
    """The uses of one file; with a problem in one of them the others still stand."""

    path: str
    uses: tuple[Use, ...]
    errors: tuple[InputError, ...]


@dataclass(frozen=True, slots=True)
class Applied:
    """The sets with their use, and what there is to say about the usage files."""

    declarations: tuple[Declaration, ...]
    errors: tuple[InputError, ...] = ()
    passed: tuple[Passed, ...] = ()
    notices: tuple[Notice, ...] = ()


def is_usage_file(loaded: Loaded) -> bool:
    """Whether the text calls itself a usage file."""
    return isinstance(loaded.value, dict) and KEY in loaded.value


def read_usage(loaded: Loaded, path: str) -> UsageFile:
    """The uses in a parsed text, and all its problems."""
    problems = [*loaded.problems, *schema_problems(loaded, shipped_schema(SCHEMA))]
    errors = errors_of(path, problems)
    if not is_usage_file(loaded) or any(problem.path[:1] != (USES,) for problem in problems):
        return UsageFile(path, (), errors)
    broken = {problem.path[:2] for problem in problems}
    records = loaded.value[USES] if isinstance(loaded.value[USES], list) else []
    uses = tuple(
        _use(record, Place(path, loaded.marks[USES, at].line, loaded.marks[USES, at].column))
        for at, record in enumerate(records)
        if (USES, at) not in broken and (USES,) not in broken
    )
    return UsageFile(path, uses, errors)


def apply(
    files: Iterable[UsageFile], found: Iterable[Declaration], candidates: Iterable[Number]
) -> Applied:
    """The sets that were found, and those that uses make of candidates, each with its use.

    A use that names candidates which are not there is an error; one that matches nothing is passed
    over by name.
    """
    uses = [use for file in sorted(files, key=_nearest_last) for use in file.uses]
    numbers = list(candidates)
    declarations = list(found)
    errors: list[InputError] = []
    for use in uses:
        if use.modulus is not None:
            try:
                declarations.append(_from_candidates(use, numbers))
            except _NoCandidate as error:
                errors.append(
                    InputError(use.place.path, use.place.line, use.place.column, str(error))
                )
    notices: list[Notice] = []
    covered: set[int] = set()
    declared = []
    for declaration in declarations:
        matching = [(at, use) for at, use in enumerate(uses) if use.covers(declaration)]
        covered.update(at for at, _ in matching)
        changed, overruled = _with_uses(declaration, [use for _, use in matching])
        declared.append(changed)
        notices += overruled
    passed = tuple(
        Passed(
            use.place.path, f"{quoted(use.path)}: matches nothing that was found", use.place.line
        )
        for at, use in enumerate(uses)
        if at not in covered and use.modulus is None
    )
    return Applied(tuple(declared), tuple(errors), passed, tuple(notices))


class _NoCandidate(ValueError):
    """A use names a candidate that is not there, or not there once."""


def _use(record: Mapping[str, Any], place: Place) -> Use:
    return Use(
        place=place,
        path=record["path"],
        name=record.get("name"),
        modulus=record.get("modulus"),
        generator=record.get("generator"),
        subgroup_order=record.get("subgroup_order"),
        said={key: record[key] for key in USAGE if key in record},
    )


def _from_candidates(use: Use, numbers: Sequence[Number]) -> Declaration:
    here = [
        number
        for number in numbers
        if (inside := below(use.place.path, number.path)) is not None
        and path_matches(use.path, inside)
    ]
    modulus = _candidate(use.modulus or "", here, use.path)
    generator, order = (
        _candidate(value, here, use.path).value if isinstance(value, str) else value
        for value in (use.generator, use.subgroup_order)
    )
    if modulus.value < 1 or generator is None or order == 0:
        raise _NoCandidate(f"{quoted(modulus.name)}: expected a modulus and an order of at least 1")
    return Declaration(
        name=modulus.name,
        place=Place(modulus.path, modulus.line, modulus.column),
        modulus=modulus.value,
        generator=generator,
        subgroup_order=order,
    )


def _candidate(name: str, numbers: Sequence[Number], path: str) -> Number:
    found = [number for number in numbers if number.name == name]
    if len(found) == 1:
        return found[0]
    if not found:
        names = ", ".join(quoted(number.name) for number in numbers[:5]) or "none"
        raise _NoCandidate(f"no candidate {quoted(name)} in {quoted(path)}; found there: {names}")
    lines = " and ".join(str(number.line) for number in found[:5])
    raise _NoCandidate(f"the candidate {quoted(name)} stands in {quoted(path)} on lines {lines}")


def _with_uses(declaration: Declaration, uses: Sequence[Use]) -> tuple[Declaration, list[Notice]]:
    """The set with what the uses say of it, and where they overrule its format."""
    said: dict[str, Any] = {}
    overruled = []
    for use in uses:
        said = _added(said, use.said)
        for key in _SUGGESTED:
            own = getattr(declaration, key)
            if own is not None and use.said.get(key, own) != own:
                message = (
                    f"{declaration.identity}: {key} is {own} by its format, "
                    f"reviewed as {use.said[key]}"
                )
                overruled.append(Notice(use.place.path, use.place.line, message))
    if not said:
        return declaration, overruled
    return _declared(declaration, said), overruled


def _added(said: Mapping[str, Any], more: Mapping[str, Any]) -> dict[str, Any]:
    """``more`` over ``said``; keys that belong together are replaced together. Width and use of an
    exponent are two keys, and parties of the same roles add up like sets."""
    dropped: set[str] = set()
    if "purpose" in more:
        dropped.update(_ABOUT_PURPOSE)
    if "parties" in more or ("parties" in said and {*_PARTIES} & {*more}):
        dropped.update(_PARTIES)
    merged = {key: value for key, value in said.items() if key not in dropped} | dict(more)
    if "exponent" in said and "exponent" in more and "exponent" not in dropped:
        merged["exponent"] = {**said["exponent"], **more["exponent"]}
    if _roles(said) and _roles(said) == _roles(more):
        pairs = zip(said["parties"], more["parties"], strict=True)
        merged["parties"] = [_added(before, after) for before, after in pairs]
    return merged


def _roles(said: Mapping[str, Any]) -> list[str]:
    return [party["role"] for party in said.get("parties", ())]


def _declared(declaration: Declaration, said: Mapping[str, Any]) -> Declaration:
    built = build({"name": "", "modulus": 1, "generator": 1, **said}, declaration.place)
    repurposed = built.purpose not in (None, declaration.purpose)
    return replace(
        declaration,
        purpose=built.purpose or declaration.purpose,
        scheme=built.scheme if repurposed else built.scheme or declaration.scheme,
        protocol=built.protocol or declaration.protocol,
        parties=_parties(declaration.parties, built.parties),
        **{key: said[key] for key in _COUNTS if key in said},
    )


def _parties(own: Sequence[Party], said: Sequence[Party]) -> tuple[Party, ...]:
    """The parties as said, with the exponent width of the format where a party has none."""
    width = own[0].exponent_bits if own else None
    widened = (
        replace(party, exponent_bits=width) if party.exponent_bits is None else party
        for party in said
    )
    return tuple(widened) or tuple(own)


def _nearest_last(file: UsageFile) -> tuple[int, str]:
    directory = os.path.abspath(os.path.dirname(file.path))
    return len(PurePath(directory).parts), file.path


def below(usage: str, path: str) -> str | None:
    """``path`` relative to the directory of the usage file; None outside of it."""
    directory = PurePath(os.path.abspath(os.path.dirname(usage)))
    target = PurePath(os.path.abspath(path))
    return target.relative_to(directory).as_posix() if target.is_relative_to(directory) else None


def path_matches(pattern: str, path: str) -> bool:
    """Whether ``path`` fits: ``*`` and ``?`` within a name, ``**`` for any number of directories.

    The positions in the pattern that the names so far can have led to are carried along, so that
    no pattern takes long.
    """
    parts = pattern.split("/")
    at = _past_directories(parts, {0})
    for name in path.split("/"):
        stay = {index for index in at if index < len(parts) and parts[index] == "**"}
        move = {
            index + 1
            for index in at - stay
            if index < len(parts) and name_matches(parts[index], name)
        }
        at = _past_directories(parts, stay | move)
    return len(parts) in at


def _past_directories(parts: Sequence[str], at: set[int]) -> set[int]:
    """``at`` and what can be reached from there by letting ``**`` stand for nothing."""
    for index, part in enumerate(parts):
        if index in at and part == "**":
            at = {*at, index + 1}
    return at


def name_matches(pattern: str, name: str) -> bool:
    """Whether ``name`` fits: ``*`` and ``?`` stand for any characters, nothing else is special."""
    return fnmatchcase(name, pattern.replace("[", "[[]"))
