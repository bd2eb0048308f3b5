"""From paths to declarations: files as given, directories walked in sorted order.

A file that is named must hold something that is read. In a directory every file is looked at;
those that hold nothing are counted, and named where their name promises more. What is not looked at
is named: links that leave the tree, what git ignores and does not track, files that are
too large. Depth and number of files are bounded; beyond the bounds the rest is an error, because
nobody knows what it holds.
"""

import os
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from pathlib import Path, PurePath
from typing import BinaryIO

from auditor.declaration import Declaration
from auditor.intake.candidates import Waiting, passed_over, waiting
from auditor.intake.document import DocumentResult
from auditor.intake.ignored import ignored_below
from auditor.intake.inputs import (
    InputError,
    InputFile,
    TooLarge,
    Unreadable,
    input_file,
    read_path,
    read_stream,
    reason,
)
from auditor.intake.moduli import is_moduli
from auditor.intake.readers import DER_SUFFIXES, MODULI, Candidate, claimed, read_file
from auditor.intake.reading import Notice, Number, Passed, Reading, is_count, others
from auditor.intake.usage_file import UsageFile, apply

STANDARD_INPUT = "-"
NOT_WALKED = (".git", ".hg", ".svn")
MAX_DEPTH = 64
MAX_FILES = 200_000

Found = Candidate | Passed | InputError


@dataclass(frozen=True, slots=True)
class InputResult:
    """All that was read in one run.

    ``passed`` is what was seen and not reviewed, ``notices`` what to know about what is;
    ``waiting`` are the candidates that no set is made of, ``documents`` the paths of the
    declaration documents, whose sets no usage file touches.
    """

    declarations: tuple[Declaration, ...]
    errors: tuple[InputError, ...]
    inputs: tuple[InputFile, ...]
    passed: tuple[Passed, ...] = ()
    notices: tuple[Notice, ...] = ()
    waiting: tuple[Waiting, ...] = ()
    documents: frozenset[str] = frozenset()

    @property
    def skipped(self) -> tuple[str, ...]:
        """The paths that were passed over as a whole, those that are only counted left out."""
        whole = (item for item in self.passed if item.line is None)
        return tuple(dict.fromkeys(item.path for item in whole if not is_count(item.reason)))

    @property
    def recognised(self) -> int:
        """The number of files from which a set was read; candidates that wait are none."""
        return len({declaration.place.path for declaration in self.declarations})


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
    not unique in the run is an error, the first one stays. Usage files apply to what was found in
    the same run, and not to declaration documents, which say it themselves.
    """
    gathered = gather(paths, stdin, root)
    return gathered.result(gathered.usages)


def gather(
    paths: Iterable[str], stdin: BinaryIO | None = None, root: Path | None = None
) -> "Gathered":
    """What all files below ``paths`` hold, before anything is said about its use."""
    gathered = Gathered(stdin)
    for item in collect(paths, root):
        if isinstance(item, InputError):
            gathered.errors.append(item)
        elif isinstance(item, Passed):
            gathered.passed.append(item)
        else:
            gathered.take(item)
    return gathered


@dataclass(slots=True)
class Gathered:
    """What was read file by file; :meth:`result` makes the sets of a run of it.

    ``documents`` are the paths of declaration documents, whose sets say themselves how they are
    used; ``candidates`` are numbers that become sets where a usage file names them.
    """

    stdin: BinaryIO | None
    declarations: list[Declaration] = field(default_factory=list)
    documents: set[str] = field(default_factory=set)
    candidates: list[Number] = field(default_factory=list)
    usages: list[UsageFile] = field(default_factory=list)
    errors: list[InputError] = field(default_factory=list)
    inputs: set[InputFile] = field(default_factory=set)
    passed: list[Passed] = field(default_factory=list)
    notices: list[Notice] = field(default_factory=list)
    others: Counter[str] = field(default_factory=Counter)
    """How many files of each directory given hold nothing."""

    def take(self, candidate: Candidate) -> None:
        """Read one file and keep what it holds, or why it does not."""
        data = None
        try:
            data = self.bytes_of(candidate)
            found = read_file(candidate, data)
        except TooLarge as error:
            found = _failure(candidate, error, _must_be_read(candidate, error.start))
        except Unreadable as error:
            found = _failure(candidate, error, is_error=True)
        self.errors += found.errors
        if isinstance(found, UsageFile):
            self.usages.append(found)
        elif isinstance(found, DocumentResult):
            self.documents.add(candidate.path)
            self.declarations += found.declarations
            self.inputs.update(found.files)
        else:
            self.others[candidate.top] += found.empty
            self.add(found)
        if data is not None and not _holds_nothing(found):
            self.inputs.add(input_file(candidate.path, data))

    def add(self, found: Reading) -> None:
        """Keep what a file other than a document holds."""
        self.declarations += found.declarations
        self.candidates += found.candidates
        self.passed += found.passed
        self.notices += found.notices

    def bytes_of(self, candidate: Candidate) -> bytes:
        if candidate.path == STANDARD_INPUT:
            if self.stdin is None:
                raise Unreadable("there is no standard input")
            return read_stream(self.stdin)
        if candidate.named:
            return read_path(Path(candidate.path))
        return read_path(Path(os.path.realpath(candidate.path)), regular=True)

    def result(self, usages: Sequence[UsageFile]) -> InputResult:
        """The sets in input order, used as ``usages`` say, those made of candidates last."""
        stated = [item.place.path in self.documents for item in self.declarations]
        found = [item for item, own in zip(self.declarations, stated, strict=True) if not own]
        applied = apply(usages, found, self.candidates)
        with_use = iter(applied.declarations)
        in_order = [
            item if own else next(with_use)
            for item, own in zip(self.declarations, stated, strict=True)
        ]
        declarations = self.unique([*in_order, *with_use])
        unnamed = tuple(self.waiting(declarations))
        silent = (others(top, count) for top, count in self.others.items() if count)
        return InputResult(
            declarations,
            tuple(sorted([*self.errors, *applied.errors])),
            tuple(sorted(self.inputs)),
            (*self.passed, *map(passed_over, unnamed), *applied.passed, *silent),
            (*self.notices, *applied.notices),
            unnamed,
            frozenset(self.documents),
        )

    def unique(self, declarations: Iterable[Declaration]) -> tuple[Declaration, ...]:
        """The sets by identity; a second one of the same is an error."""
        kept: dict[str, Declaration] = {}
        for declaration in declarations:
            if kept.setdefault(declaration.identity, declaration) is not declaration:
                place = declaration.place
                message = f"another set is called {declaration.identity} already"
                self.errors.append(InputError(place.path, place.line, place.column, message))
        return tuple(kept.values())

    def waiting(self, declarations: Iterable[Declaration]) -> Iterator[Waiting]:
        """The candidates that no set of the same file is made of."""
        known: dict[str, set[int]] = {}
        for declaration in declarations:
            known.setdefault(declaration.place.path, set()).add(declaration.modulus)
        by_path: dict[str, list[Number]] = {}
        for number in self.candidates:
            by_path.setdefault(number.path, []).append(number)
        for path, numbers in by_path.items():
            yield from waiting(numbers, known.get(path, set()))


def _holds_nothing(found: Reading | DocumentResult | UsageFile) -> bool:
    """Whether a file was passed over as a whole."""
    return isinstance(found, Reading) and found.nothing


def _must_be_read(candidate: Candidate, start: bytes) -> bool:
    """Whether a file whose beginning is known says by its name or by it that it holds something."""
    encoded = candidate.suffix in (".pem", *DER_SUFFIXES)
    primes = PurePath(candidate.path).name == MODULI or is_moduli(start[:65_536].decode("latin-1"))
    return claimed(candidate, start) or encoded or primes


def _failure(candidate: Candidate, error: Unreadable, is_error: bool) -> Reading:
    if is_error:
        return Reading(errors=(InputError(candidate.path, 1, 1, str(error)),))
    return Reading(passed=(Passed(candidate.path, str(error)),))


def _is_text(path: str) -> bool:
    try:
        path.encode("utf-8")
    except UnicodeEncodeError:
        return False
    return True


def _identity(path: str) -> str:
    return path if path == STANDARD_INPUT else os.path.realpath(path)


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

    ignored: set[PurePath] = set()
    files = 0
    for directory, inner, names in os.walk(top, onerror=note):
        here = PurePath(directory)
        if directory == top or ".git" in (*inner, *names):
            ignored.update(here / path for path in ignored_below(directory))
        yield from problems
        problems.clear()
        for name in sorted({*inner, *names} - {*NOT_WALKED}):
            path = here / name
            found = _entry(path, top, root, path in ignored, name in names)
            files += isinstance(found, Candidate)
            if files > MAX_FILES:
                message = f"more than {MAX_FILES} files; those from {name!r} on were not looked at"
                yield InputError(here.as_posix(), 1, 1, message)
                return
            if found is not None:
                yield found
        inner[:] = sorted(n for n in inner if n not in NOT_WALKED and here / n not in ignored)
        if inner and len(here.parts) - len(PurePath(top).parts) >= MAX_DEPTH:
            message = f"more than {MAX_DEPTH} levels deep; what is below was not looked at"
            yield InputError(here.as_posix(), 1, 1, message)
            inner.clear()
    yield from problems


def _entry(
    path: PurePath, top: str, root: Path, ignored: bool, is_file: bool
) -> Candidate | Passed | None:
    """One name in a directory: a file to look at, or why not; None for a directory to walk."""
    if _leads_out(path, root):
        return Passed(path.as_posix())
    if ignored:
        return Passed(path.as_posix(), "untracked, and ignored by git")
    if not is_file:
        return None
    candidate = Candidate(path.as_posix(), root, named=False, top=PurePath(top).as_posix())
    if candidate.promising or os.path.isfile(path):
        return candidate
    return Passed(path.as_posix(), "not a regular file, or a link that leads nowhere")
