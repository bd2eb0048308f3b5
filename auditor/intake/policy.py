"""Policy from elsewhere: what a review is judged by, read from another directory.

Rulebooks that are named by file, concessions and usage files lie beside the parameters, so a change
could excuse itself. A review that is given another directory, such as a checkout of the branch
that the change is to be merged into, takes them from there and names those it leaves unused.
"""

import os
import re
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import BinaryIO, TypeVar

from auditor.declaration import Place
from auditor.intake.inputs import InputError, InputFile, Unreadable, input_file, read_path
from auditor.intake.readers import DOCUMENT_SUFFIXES, Candidate, read_file
from auditor.intake.reading import Notice, Passed
from auditor.intake.tree import STANDARD_INPUT, InputResult, collect, gather
from auditor.intake.usage_file import UsageFile

CONCESSIONS = "concessions.yaml"
"""The file of that name in the directory is used where none is named."""

_KINDS = {
    "concessions": "concessions",
    "auditor-usage": "a usage file",
    "rulebook": "a rulebook",
}
_KIND = re.compile(
    rb"^(?:\xef\xbb\xbf)?(?:\{[ \t\r\n]*)?[\"']?(concessions|auditor-usage|rulebook)[\"']?[ \t]*:",
    re.MULTILINE,
)
_Told = TypeVar("_Told", InputError, Passed, Notice)


class NoSuchPolicy(ValueError):
    """A file that is named is not in the directory."""


@dataclass(frozen=True, slots=True)
class Governed:
    """What was read under a policy: the inputs, the usage files in use, and what is not used."""

    result: InputResult
    usage_files: tuple[InputFile, ...]
    notices: tuple[str, ...]


def named(policy: str | Path, name: str) -> str:
    """The path of the file ``name`` of the policy; NoSuchPolicy where it lies elsewhere or is no
    file."""
    path = Path(policy) / name
    inside = path.resolve().is_relative_to(Path(policy).resolve())
    if Path(name).is_absolute() or not inside:
        raise NoSuchPolicy(f"{name}: expected a file in {policy}, where policy is taken from")
    if not path.is_file():
        raise NoSuchPolicy(f"{name}: there is no such file in {policy}")
    return str(path)


def concessions_file(policy: str | Path) -> str | None:
    """The path of the concessions that the policy has under their usual name."""
    path = Path(policy) / CONCESSIONS
    return named(policy, CONCESSIONS) if path.exists() or path.is_symlink() else None


def read_governed(
    paths: Sequence[str], policy: str | Path, stdin: BinaryIO | None = None
) -> Governed:
    """Like :func:`auditor.intake.tree.read_inputs`, with the usage files of ``policy`` alone.

    Where ``policy`` is a git checkout it stands for the checkout that a path lies in; otherwise for
    the current directory where it has that path too, and else for the path itself.
    """
    gathered = gather(paths, stdin)
    unused = _unused(paths, policy)
    tops = tuple(dict.fromkeys(_counterpart(path, policy) for path in paths))
    files = list(_usage_files(policy))
    moved = {_moved(file.path, policy, top): file for top in tops for file, _ in files}
    result = gathered.result([_at(file, path) for path, file in moved.items()])
    origin = {path: file.path for path, file in moved.items()}
    idle = [item for item in result.passed if item.path in origin]
    result = replace(
        result,
        errors=tuple(sorted([*_told_once(result.errors, origin, len(tops)), *_errors(files)])),
        passed=tuple(item for item in result.passed if item.path not in origin),
        notices=tuple(_told_once(result.notices, origin, 1)),
    )
    unmatched = tuple(
        f"{item.path}:{item.line}: {item.reason}." for item in _told_once(idle, origin, len(tops))
    )
    return Governed(result, tuple(sorted(read for _, read in files)), (*unused, *unmatched))


def _errors(files: Iterable[tuple[UsageFile, InputFile]]) -> list[InputError]:
    return [error for file, _ in files for error in file.errors]


def _usage_files(policy: str | Path) -> Iterator[tuple[UsageFile, InputFile]]:
    """Every usage file in the directory, with the digest of its bytes."""
    for candidate, data in _documents([str(policy)]):
        if _kind(data) != "auditor-usage":
            continue
        found = read_file(candidate, data)
        if isinstance(found, UsageFile):
            yield found, input_file(candidate.path, data)
        elif found.errors:
            yield UsageFile(candidate.path, (), found.errors), input_file(candidate.path, data)


def _documents(paths: Iterable[str]) -> Iterator[tuple[Candidate, bytes]]:
    for candidate in collect(paths):
        if not isinstance(candidate, Candidate) or candidate.path == STANDARD_INPUT:
            continue
        if candidate.suffix in DOCUMENT_SUFFIXES:
            try:
                yield candidate, read_path(Path(os.path.realpath(candidate.path)), regular=True)
            except Unreadable:
                continue


def _kind(data: bytes) -> str:
    found = _KIND.search(data)
    return found[1].decode() if found else ""


def _unused(paths: Iterable[str], policy: str | Path) -> tuple[str, ...]:
    """A notice for each file of policy among what is reviewed."""
    own = Path(policy).resolve()
    return tuple(
        f"{candidate.path}: {_KINDS[kind]}, not used: policy is taken from {policy}."
        for candidate, data in _documents(paths)
        if (kind := _kind(data)) and not Path(candidate.path).resolve().is_relative_to(own)
    )


def _counterpart(path: str, policy: str | Path) -> str:
    """The directory under review that ``policy`` stands for, seen from one reviewed path."""
    if path == STANDARD_INPUT:
        return "."
    if (Path(policy) / ".git").exists() and (checkout := _checkout(path)):
        return checkout
    inside = not os.path.isabs(path) and ".." not in Path(path).parts
    if inside and (Path(policy) / path).exists():
        return "."
    return path if os.path.isdir(path) else os.path.dirname(path) or "."


def _checkout(path: str) -> str | None:
    """The top of the git checkout that ``path`` lies in."""
    here = Path(os.path.abspath(path))
    return next((str(top) for top in (here, *here.parents) if (top / ".git").exists()), None)


def _moved(path: str, policy: str | Path, top: str) -> str:
    """Where a usage file of ``policy`` would lie below ``top``, under a name that no file has."""
    inner = os.path.relpath(path, policy)
    return os.path.join(top, os.path.dirname(inner), f"{os.path.basename(inner)}\0policy")


def _at(file: UsageFile, path: str) -> UsageFile:
    """The usage file as if it lay at ``path``; its own errors are told apart."""
    uses = tuple(
        replace(use, place=Place(path, use.place.line, use.place.column)) for use in file.uses
    )
    return UsageFile(path, uses, ())


def _told_once(items: Iterable[_Told], origin: dict[str, str], times: int) -> Iterator[_Told]:
    """What is told of usage files, at their real paths, once each, where every copy tells it."""
    listed = list(items)
    real = [replace(item, path=origin.get(item.path, item.path)) for item in listed]
    count = Counter(real)
    kept: set[_Told] = set()
    for item, told in zip(listed, real, strict=True):
        if item.path not in origin:
            yield told
        elif told not in kept and count[told] >= times:
            kept.add(told)
            yield told
