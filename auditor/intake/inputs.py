"""What was read and what could not be: files by digest, errors by place, bytes within bounds."""

import hashlib
import os
import stat
from dataclasses import dataclass
from pathlib import Path
from typing import BinaryIO

MAX_BYTES = 16 * 2**20
MAX_NUMBER_BYTES = 2**18


@dataclass(frozen=True, slots=True, order=True)
class InputError:
    """Why something was not read: a path as given, a 1-based line and column, a message."""

    path: str
    line: int
    column: int
    message: str

    def __str__(self) -> str:
        return f"{self.path}:{self.line}:{self.column}: {self.message}"


@dataclass(frozen=True, slots=True, order=True)
class InputFile:
    """A file that was read: its path as given, and the SHA-256 of its bytes."""

    path: str
    sha256: str


class Unreadable(Exception):
    """A file cannot be used; the message says why, without its path."""


class TooLarge(Unreadable):
    """A file has more bytes than are read; ``start`` holds those that were."""

    def __init__(self, start: bytes, limit: int) -> None:
        super().__init__(f"the file has more than {limit} bytes, the most that is read")
        self.start = start


def input_file(path: str, data: bytes) -> InputFile:
    """The record of ``data`` read from ``path``."""
    return InputFile(path, hashlib.sha256(data).hexdigest())


def read_stream(stream: BinaryIO, limit: int = MAX_BYTES) -> bytes:
    """All bytes of ``stream``; TooLarge beyond ``limit``."""
    data = stream.read(limit + 1)
    if len(data) > limit:
        raise TooLarge(data, limit)
    return data


def read_path(path: Path, limit: int = MAX_BYTES, *, regular: bool = False) -> bytes:
    """The bytes of the file at ``path``; Unreadable when that fails, TooLarge beyond ``limit``.

    With ``regular`` only a regular file that is not a symbolic link is opened: neither a link set
    in a tree nor a pipe may decide what is read or for how long.
    """
    flags = os.O_RDONLY | getattr(os, "O_CLOEXEC", 0) | getattr(os, "O_BINARY", 0)
    if regular:
        flags |= getattr(os, "O_NOFOLLOW", 0) | getattr(os, "O_NONBLOCK", 0)
    try:
        with os.fdopen(os.open(path, flags), "rb") as stream:
            if regular and not stat.S_ISREG(os.fstat(stream.fileno()).st_mode):
                raise Unreadable("not a regular file")
            return read_stream(stream, limit)
    except (OSError, ValueError) as error:
        raise Unreadable(reason(error)) from None


def reason(error: Exception) -> str:
    """The system's words for a failure, without paths."""
    text = getattr(error, "strerror", None) or type(error).__name__
    return f"cannot be read: {text}"


def decode(path: str, data: bytes) -> str | InputError:
    """``data`` as UTF-8 text, or the place of the first byte that is not."""
    try:
        return data.decode("utf-8")
    except UnicodeDecodeError as error:
        before = data[: error.start].decode("utf-8")
        column = len(before) - before.rfind("\n")
        byte = f"0x{data[error.start]:02x}"
        message = f"byte {byte} is not UTF-8 text; expected a text file in UTF-8"
        return InputError(path, before.count("\n") + 1, column, message)
