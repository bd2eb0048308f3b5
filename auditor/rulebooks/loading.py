"""Rulebooks: files of rules with their criteria, loaded by name or by path.

A rulebook is data. Nothing in it can run code or reach the network, and it can have no file read
but the one book it extends: a shipped book by name, or a file beside it.
"""

import hashlib
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from importlib.resources.abc import Traversable
from pathlib import Path

from auditor.data_files import data
from auditor.rulebooks.condition_types import suggestion
from auditor.rulebooks.conditions import Compiler, Vocabulary
from auditor.rulebooks.reading import BookReader, parse_book
from auditor.rulebooks.rulebook import (
    Confidence,
    Criterion,
    Document,
    Example,
    Grade,
    Outcome,
    Place,
    Problem,
    Rule,
    Rulebook,
    RulebookError,
)

__all__ = [
    "DEFAULT_BOOKS",
    "Confidence",
    "Criterion",
    "Document",
    "Example",
    "Grade",
    "Outcome",
    "Place",
    "Problem",
    "Rule",
    "Rulebook",
    "RulebookError",
    "available",
    "load",
    "load_all",
]

DEFAULT_BOOKS = (
    "group-structure",
    "strength",
    "provenance",
    "schemes",
    "tls",
    "ssh",
    "ikev2",
    "x942-cms",
)
"""The books in use where none are named: those that speak about every set, then those that speak
about a declared protocol."""

LARGEST_FILE = 2**20
LONGEST_CHAIN = 4
_NAME = re.compile(r"[a-z][a-z0-9]*(?:-[a-z0-9]+)*")
_FILE = re.compile(r"\S.*\.ya?ml")


def available() -> tuple[str, ...]:
    """The names of the shipped books, in order."""
    names = (entry.name for entry in data("rules").iterdir())
    return tuple(sorted(name.removesuffix(".yaml") for name in names if name.endswith(".yaml")))


def load(source: str | Path, vocabulary: Vocabulary) -> Rulebook:
    """The shipped book of that name, or the book in that file.

    RulebookError with every problem of it, each with file, line, column and what was expected.
    """
    return _Library(vocabulary).load(source)


def load_all(sources: Iterable[str | Path], vocabulary: Vocabulary) -> tuple[Rulebook, ...]:
    """Several books in the order given; a book that another one of them extends is replaced by it.

    RulebookError with the problems of all, and for a rule id that two books share.
    """
    library = _Library(vocabulary)
    books: list[Rulebook] = []
    problems: list[Problem] = []
    for source in dict.fromkeys(str(source) for source in sources):
        try:
            books.append(library.load(source))
        except RulebookError as error:
            problems += error.problems
    replaced = {base for book in books for base in _bases(book)}
    kept = [book for book in books if (book.name, book.sha256) not in replaced]
    problems += _collisions(kept)
    if problems:
        raise RulebookError(tuple(dict.fromkeys(problems)))
    return tuple(kept)


def _bases(book: Rulebook) -> Iterable[tuple[str, str]]:
    while book.extends:
        book = book.extends
        yield book.name, book.sha256


def _collisions(books: Sequence[Rulebook]) -> list[Problem]:
    """A book loaded twice, and rule ids that two books share."""
    problems: list[Problem] = []
    names: dict[str, Rulebook] = {}
    rules: dict[str, Rule] = {}
    for book in books:
        if book.name in names:
            message = f"a second book named {book.name!r}; the first is {names[book.name].path}"
            problems.append(Problem(Place(book.path, 1, 1), message))
            continue
        names[book.name] = book
        for rule in book.rules:
            first = rules.setdefault(rule.id, rule)
            if first is not rule:
                message = f"rule {rule.id!r} is already in {first.place}; ids are unique"
                problems.append(Problem(rule.place, message))
    return problems


@dataclass(slots=True)
class _Library:
    """Loads books over one vocabulary, following ``extends``."""

    vocabulary: Vocabulary
    compiler: Compiler = field(init=False)

    def __post_init__(self) -> None:
        self.compiler = Compiler(self.vocabulary)

    def load(self, source: str | Path, chain: tuple[str, ...] = ()) -> Rulebook:
        """The book; ``chain`` are the books on the way that extend it."""
        file = _find(str(source))
        raw = _bytes(file, str(source))
        shown = str(source) if isinstance(file, Path) and not _shipped(str(source)) else file.name
        try:
            text = raw.decode("utf-8")
        except UnicodeDecodeError as error:
            raise _refusal(shown, f"not UTF-8 at byte {error.start}") from None
        loaded, problems = parse_book(text, shown)
        if loaded is None:
            raise RulebookError(tuple(sorted(problems, key=lambda problem: problem.order)))
        reader = BookReader(loaded, shown, self.compiler, None, problems)
        extends = loaded.value.get("extends")
        if isinstance(extends, str) and not reader.flagged(("extends",)):
            reader.base = self.base(reader, extends, file, (*chain, shown))
        book = reader.book(hashlib.sha256(raw).hexdigest())
        if problems:
            raise RulebookError(tuple(sorted(problems, key=lambda problem: problem.order)))
        return book

    def base(
        self, reader: BookReader, name: str, file: Traversable, chain: tuple[str, ...]
    ) -> Rulebook | None:
        """The extended book; None, and its problems noted, where it cannot be used."""
        try:
            source = _beside(name, file)
            if len(chain) > LONGEST_CHAIN or str(source) in chain:
                raise _refusal(name, f"a circle of books, or more than {LONGEST_CHAIN} extended")
            return self.load(source, chain)
        except RulebookError as error:
            reader.problems += error.problems
            reader.problem(("extends",), f"the extended book {name!r} cannot be used")
            return None


def _shipped(source: str) -> bool:
    return bool(_NAME.fullmatch(source))


def _find(source: str) -> Traversable:
    """The file of a shipped book or of a path."""
    if not _shipped(source):
        if not _FILE.fullmatch(source):
            raise _refusal(source, "expected the name of a shipped book or a path to a .yaml file")
        return Path(source)
    names = available()
    if source not in names:
        hint = suggestion(source, names) or f"; shipped are {', '.join(names)}"
        raise _refusal(source, f"no shipped book of that name{hint}")
    return data("rules") / f"{source}.yaml"


def _beside(name: str, file: Traversable) -> str | Path:
    """What ``extends: name`` means in ``file``: a shipped book, or a file of the same directory."""
    if _shipped(name):
        return name
    if not isinstance(file, Path):
        raise _refusal(name, "a shipped book extends shipped books, by name")
    beside = file.parent / name
    if not _FILE.fullmatch(name) or beside.resolve().parent != file.resolve().parent:
        raise _refusal(name, "expected a .yaml file in the directory of this book")
    return beside


def _bytes(file: Traversable, source: str) -> bytes:
    try:
        with file.open("rb") as stream:
            raw: bytes = stream.read(LARGEST_FILE + 1)
    except OSError as error:
        raise _refusal(
            source, f"cannot be read: {error.strerror or type(error).__name__}"
        ) from None
    if len(raw) > LARGEST_FILE:
        raise _refusal(source, f"larger than {LARGEST_FILE} bytes")
    return raw


def _refusal(source: str, message: str) -> RulebookError:
    return RulebookError((Problem(Place(source, 1, 1), message),))
