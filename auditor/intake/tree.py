"""From paths to declarations: files as given, directories walked in sorted order.

A file that is named must be readable; in a directory, YAML and JSON files that do not call
themselves declaration documents are passed over and listed as skipped.
"""

import os
import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from pathlib import Path, PurePath
from typing import BinaryIO

from auditor.declaration import Declaration
from auditor.intake.document import DocumentResult, errors_of, is_document, parse, read_parsed
from auditor.intake.inputs import (
    InputError,
    InputFile,
    TooLarge,
    Unreadable,
    decode,
    input_file,
    read_path,
    read_stream,
    reason,
)
from auditor.strict_yaml import YamlError

STANDARD_INPUT = "-"
SUFFIXES = (".yaml", ".yml", ".json")
NOT_WALKED = (".git", ".hg", ".svn")

# A key of that name somewhere, and one that is certainly a key of the whole document.
_MENTIONED = re.compile(rb"\bauditor[\"']?[ \t]*:")
_AT_TOP = re.compile(rb"^(?:\xef\xbb\xbf)?[\"']?auditor[\"']?[ \t]*:", re.MULTILINE)


@dataclass(frozen=True, slots=True)
class Candidate:
    """A file to look at: its path as given, the tree it may refer to, and whether it was named."""

    path: str
    root: Path | None
    named: bool


@dataclass(frozen=True, slots=True)
class Passed:
    """A link that leaves the tree, which is not followed."""

    path: str


Found = Candidate | Passed | InputError


@dataclass(frozen=True, slots=True)
class InputResult:
    """All that was read in one run; ``skipped`` are paths in directories that declare nothing."""

    declarations: tuple[Declaration, ...]
    errors: tuple[InputError, ...]
    inputs: tuple[InputFile, ...]
    skipped: tuple[str, ...]


def collect(paths: Iterable[str], root: Path | None = None) -> Iterator[Found]:
    """Every file below ``paths`` once, in the order of ``paths`` and sorted below each.

    ``root`` bounds what documents may refer to; by default that is the directory given, or the
    directory of the file given. What cannot be looked into is an error. Links to directories are
    not followed, nor is any link that leaves the directory given; the latter are named.
    """
    seen: set[str] = set()
    for path in paths:
        for item in _below(path, root):
            if isinstance(item, InputError | Passed):
                yield item
            elif not _is_text(item.path):
                shown = item.path.encode("utf-8", "backslashreplace").decode()
                yield InputError(shown, 1, 1, "the file name is not UTF-8 text")
            elif (real := _identity(item.path)) not in seen:
                seen.add(real)
                yield item


def read_inputs(
    paths: Iterable[str], stdin: BinaryIO | None = None, root: Path | None = None
) -> InputResult:
    """The declarations in all files below ``paths``, and every reason why one was not read.

    ``-`` stands for ``stdin``. Errors are sorted by place; a set whose path and name together are
    not unique in the run is an error, the first one stays.
    """
    run = _Run(stdin)
    for item in collect(paths, root):
        if isinstance(item, InputError):
            run.errors.append(item)
        elif isinstance(item, Passed):
            run.skipped.append(item.path)
        else:
            run.take(item)
    return run.result()


@dataclass(slots=True)
class _Run:
    """What has been read so far."""

    stdin: BinaryIO | None
    declarations: dict[str, Declaration] = field(default_factory=dict)
    errors: list[InputError] = field(default_factory=list)
    inputs: set[InputFile] = field(default_factory=set)
    skipped: list[str] = field(default_factory=list)

    def take(self, candidate: Candidate) -> None:
        """Read one file and keep what it declares, or why it does not."""
        data = None
        try:
            data = self.bytes_of(candidate)
            result = _read(candidate, data)
        except Unreadable as error:
            unclaimed = isinstance(error, TooLarge) and not _claimed(candidate, error.start)
            failure = InputError(candidate.path, 1, 1, str(error))
            result = None if unclaimed else DocumentResult((), (failure,))
        if result is None:
            self.skipped.append(candidate.path)
            return
        if data is not None:
            self.inputs.add(input_file(candidate.path, data))
        self.inputs.update(result.files)
        self.errors += result.errors
        for declaration in result.declarations:
            self.keep(declaration)

    def bytes_of(self, candidate: Candidate) -> bytes:
        if candidate.path == STANDARD_INPUT:
            if self.stdin is None:
                raise Unreadable("there is no standard input")
            return read_stream(self.stdin)
        if candidate.named:
            return read_path(Path(candidate.path))
        return read_path(Path(os.path.realpath(candidate.path)), regular=True)

    def keep(self, declaration: Declaration) -> None:
        if self.declarations.setdefault(declaration.identity, declaration) is not declaration:
            place = declaration.place
            message = f"another set is called {declaration.identity} already"
            self.errors.append(InputError(place.path, place.line, place.column, message))

    def result(self) -> InputResult:
        return InputResult(
            tuple(self.declarations.values()),
            tuple(sorted(self.errors)),
            tuple(sorted(self.inputs)),
            tuple(self.skipped),
        )


def _read(candidate: Candidate, data: bytes) -> DocumentResult | None:
    """The document in ``data``; None for a file of a directory that does not claim to be one."""
    if not candidate.named and not _MENTIONED.search(data):
        return None
    claimed = _claimed(candidate, data)
    text = decode(candidate.path, data)
    if isinstance(text, InputError):
        return DocumentResult((), (text,)) if claimed else None
    try:
        loaded = parse(text)
    except YamlError as error:
        return DocumentResult((), errors_of(candidate.path, error.problems)) if claimed else None
    if is_document(loaded) or candidate.named:
        return read_parsed(loaded, candidate.path, candidate.root)
    return None


def _is_text(path: str) -> bool:
    try:
        path.encode("utf-8")
    except UnicodeEncodeError:
        return False
    return True


def _identity(path: str) -> str:
    return path if path == STANDARD_INPUT else os.path.realpath(path)


def _claimed(candidate: Candidate, data: bytes) -> bool:
    return candidate.named or bool(_AT_TOP.search(data))


def _below(path: str, root: Path | None) -> Iterator[Found]:
    if path == STANDARD_INPUT:
        yield Candidate(path, None, named=True)
    elif os.path.isdir(path):
        yield from _walk(path, root or Path(path))
    else:
        yield Candidate(PurePath(path).as_posix(), root or Path(path).parent, named=True)


def _leads_out(path: PurePath, root: Path) -> bool:
    """Whether ``path`` is a link that leaves the tree."""
    if not os.path.islink(path):
        return False
    real, top = os.path.realpath(path), os.path.realpath(root)
    return os.path.commonpath((real, top)) != top


def _walk(top: str, root: Path) -> Iterator[Found]:
    problems: list[InputError] = []

    def note(error: OSError) -> None:
        path = PurePath(error.filename or top).as_posix()
        problems.append(InputError(path, 1, 1, f"the directory {reason(error)}"))

    for directory, inner, names in os.walk(top, onerror=note):
        inner[:] = sorted(name for name in inner if name not in NOT_WALKED)
        yield from problems
        problems.clear()
        for name in sorted((*inner, *names)):
            path = PurePath(directory, name)
            if _leads_out(path, root):
                yield Passed(path.as_posix())
            elif name in names and path.suffix.lower() in SUFFIXES:
                yield Candidate(path.as_posix(), root, named=False)
    yield from problems
