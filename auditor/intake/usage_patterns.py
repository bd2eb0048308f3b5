"""Which patterns of a usage file name these sets and no others.

A use covers sets by a pattern of paths and one of names. Asked for are few uses, each for sets with
one label and none of any other: by file, by directory and ending, by directory and below; by the
kind of name where one file holds sets of several labels.
"""

import re
from collections.abc import Callable, Hashable, Iterable, Iterator, Sequence
from dataclasses import dataclass

from auditor.declaration import Declaration
from auditor.intake.usage_file import below, name_matches, path_matches

MAX_PATH, MAX_NAME = 1_000, 200
"""Characters of a pattern that the format takes."""

ANY_NAME = "*"
NOT_LITERAL = re.compile(r"[*?\\\x00-\x1f\x7f-\x9f]")
"""What a path that is its own pattern cannot hold."""

_Pattern = tuple[str, str]
_REFUSED = re.compile(r"[\x00-\x1f\x7f-\x9f\\]")
_NUMBER = re.compile(r"(?<= )\d+\Z")


@dataclass(frozen=True, slots=True)
class Labelled:
    """A set, its path relative to the usage file, and what may not be mixed."""

    declaration: Declaration
    path: str
    label: Hashable

    @property
    def kind(self) -> str:
        """A pattern for names that differ from this one in the number at their end alone."""
        return _NUMBER.sub("*", self.declaration.name)


@dataclass(frozen=True, slots=True)
class Covered:
    """A use: its patterns, and the sets that it is for."""

    path: str
    name: str
    sets: tuple[Labelled, ...]

    def covers(self, item: Labelled) -> bool:
        """Whether the patterns are about that set."""
        return path_matches(self.path, item.path) and name_matches(self.name, item.declaration.name)


def labelled(usage: str, sets: Iterable[tuple[Declaration, Hashable]]) -> Iterator[Labelled]:
    """The sets with labels that a usage file at ``usage`` can be about: those in its directory and
    below."""
    for declaration, what in sets:
        path = below(usage, declaration.place.path)
        if path is not None:
            yield Labelled(declaration, path, what)


def fewest(sets: Iterable[Labelled]) -> tuple[Covered, ...]:
    """Uses that cover each set once where patterns can tell it from sets with another label.

    In the order of their first sets. A set that no pattern tells apart is in none of them.
    """
    listed = list(sets)
    by_file = _largest(listed, lambda item: (item.path, ANY_NAME))
    by_kind = _largest(listed, lambda item: (item.path, item.kind))
    by_name = _largest(listed, lambda item: (item.path, item.declaration.name), deep=False)
    tree = _Tree(listed)
    tried: dict[_Pattern | None, Covered | None] = {None: None}
    uses: dict[_Pattern, Covered] = {}
    for patterns in zip(by_file, by_kind, by_name, strict=True):
        for pattern in patterns:
            if pattern is not None and pattern not in tried:
                tried[pattern] = tree.use(pattern)
        found = [use for pattern in patterns if (use := tried[pattern]) is not None]
        if found:
            most = max(found, key=lambda use: len(use.sets))
            uses[most.path, most.name] = most
    return tuple(_once(list(uses.values())))


class _Tree:
    """The sets by the patterns of their paths, so that few have to be matched with each."""

    def __init__(self, listed: Sequence[Labelled]) -> None:
        self._listed = listed
        self._by_path: dict[str, list[Labelled]] = {}
        self._odd: set[str] = set()
        for item in listed:
            chain = tuple(_chain(item.path))
            if NOT_LITERAL.search(item.path):
                self._odd.update(chain)
            for pattern in chain:
                self._by_path.setdefault(pattern, []).append(item)

    def use(self, pattern: _Pattern) -> Covered | None:
        """The use with all sets that usage files would match with it; None where it mixes labels.

        Patterns of a path with characters that mean something in a pattern are matched with all.
        """
        path, name = pattern
        near = self._listed if path in self._odd else self._by_path[path]
        empty = Covered(path, name, ())
        sets = tuple(item for item in near if empty.covers(item))
        fits = 0 < len(name) <= MAX_NAME
        return Covered(path, name, sets) if fits and len({i.label for i in sets}) == 1 else None


def _once(uses: Sequence[Covered]) -> Iterator[Covered]:
    """The uses, largest first choice, each with the sets that no larger one has, in input order."""
    taken: set[int] = set()
    kept: list[tuple[int, Covered]] = []
    for at, use in sorted(enumerate(uses), key=lambda pair: -len(pair[1].sets)):
        own = tuple(item for item in use.sets if id(item) not in taken)
        taken.update(map(id, own))
        if own:
            kept.append((at, Covered(use.path, use.name, own)))
    return (use for _, use in sorted(kept, key=lambda pair: pair[0]))


def _largest(
    listed: Sequence[Labelled], unit: Callable[[Labelled], _Pattern], *, deep: bool = True
) -> list[_Pattern | None]:
    """For each set the pattern of most sets with its label and none of another; the narrowest of
    these. ``deep`` is for patterns of more than one file."""
    labels: dict[_Pattern, set[Hashable]] = {}
    size: dict[_Pattern, int] = {}
    chains = []
    for item in listed:
        path, name = unit(item)
        fitting = [(pattern, name) for pattern in _chain(path) if len(pattern) <= MAX_PATH]
        chain = fitting if deep else fitting[:1]
        chains.append(chain)
        for pattern in chain:
            labels.setdefault(pattern, set()).add(item.label)
            size[pattern] = size.get(pattern, 0) + 1
    return [
        max((p for p in chain if len(labels[p]) == 1), key=lambda p: size[p], default=None)
        for chain in chains
    ]


def _chain(path: str) -> Iterator[str]:
    """Patterns for a file, each covering all that the one before it covers: itself, its directory
    by ending (or by name where it has none), each directory above with all below it."""
    *directories, name = _REFUSED.sub("?", path).split("/")
    last = "*" + name[name.rindex(".") :] if "." in name else name
    yield "/".join([*directories, name])
    if last != name:
        yield "/".join([*directories, last])
    for depth in range(len(directories), -1, -1):
        yield "/".join([*directories[:depth], "**", last])
