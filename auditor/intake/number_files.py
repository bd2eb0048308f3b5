"""Files that hold one integer, named by a declaration document and kept inside a tree."""

from pathlib import Path, PurePosixPath

from auditor.intake.inputs import (
    MAX_NUMBER_BYTES,
    InputFile,
    Unreadable,
    input_file,
    read_path,
    reason,
)
from auditor.intake.integers import NO_NUMBER, integer_of_file


class NumberFiles:
    """The number files of one document: found beside it, below a root, remembered when read.

    A reference is relative to the document's directory. Where it leads, links resolved, must lie
    below ``root``; what lies there must be a regular file.
    """

    def __init__(self, document: str, root: Path | None) -> None:
        self._document = PurePosixPath(document)
        self._root = root
        self._used: dict[str, InputFile] = {}

    @property
    def used(self) -> tuple[InputFile, ...]:
        """The files read so far, by path."""
        return tuple(sorted(self._used.values()))

    def integer(self, reference: str) -> int:
        """The integer in the file that ``reference`` names; Unreadable with the reason."""
        data = read_path(self._inside(reference), MAX_NUMBER_BYTES, regular=True)
        path = (self._document.parent / reference).as_posix()
        self._used[path] = input_file(path, data)
        try:
            return integer_of_file(data.decode("ascii"))
        except UnicodeDecodeError:
            raise Unreadable(NO_NUMBER) from None
        except ValueError as error:
            raise Unreadable(str(error)) from None

    def _inside(self, reference: str) -> Path:
        if self._root is None:
            raise Unreadable("standard input has no directory that a file could be relative to")
        if Path(reference).is_absolute() or PurePosixPath(reference).is_absolute():
            raise Unreadable("the path is absolute")
        try:
            target = (Path(self._document).parent / reference).resolve(strict=True)
            root = self._root.resolve(strict=True)
        except (OSError, RuntimeError, ValueError) as error:
            raise Unreadable(reason(error)) from None
        if not target.is_relative_to(root):
            raise Unreadable("the path leaves the tree under review")
        return target
