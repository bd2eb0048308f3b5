"""Where reports go: files written whole or not at all, standard output, the terminal."""

import json
import os
import sys
import tempfile
from collections.abc import Callable, Iterable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from auditor.report.view import View

STANDARD_OUTPUT = "-"
_SOURCE = "this file is read; a document does not take the place of what it is about"
PIPED = (80, 200)
"""Columns and lines of the summary where there is no screen to fit."""


@dataclass(frozen=True, slots=True)
class Outputs:
    """The formats asked for, each with the path it goes to; ``-`` is standard output."""

    html: str | None = None
    markdown: str | None = None
    json: str | None = None
    json_lines: str | None = None
    sarif: str | None = None
    markdown_limit: int = 32_767

    def check(self, read: Iterable[str | None] = ()) -> None:
        """Refuse, before any work is done, what cannot be written in the end: among it the files
        that are ``read``."""
        paths = list(self._paths().values())
        if paths.count(STANDARD_OUTPUT) > 1:
            raise click.UsageError("only one format can go to standard output")
        files = [os.path.realpath(path) for path in paths if path != STANDARD_OUTPUT]
        if len(set(files)) < len(files):
            raise click.UsageError("two formats cannot go to one file")
        sources = _files(read)
        for path in files:
            if path in sources:
                raise click.UsageError(f"{path}: {_SOURCE}")
            if not os.access(os.path.dirname(path), os.W_OK):
                raise click.UsageError(f"{path}: the directory cannot be written")

    def write(self, record: Mapping[str, Any]) -> None:
        """Write each format; a summary to standard output where no format goes there. A file that
        was found among the inputs is left as it is, and in the end that is a usage error."""
        sources = _files(item["path"] for item in record["inputs"])
        spared = {name: path for name, path in self._paths().items() if _files([path]) & sources}
        nowhere: dict[str, Any] = dict.fromkeys(spared)
        replace(self, **nowhere)._write(record)
        if spared:
            raise click.UsageError(f"{', '.join(sorted(spared.values()))}: {_SOURCE}")

    def _write(self, record: Mapping[str, Any]) -> None:
        from auditor.report import html, json_report, markdown, sarif
        from auditor.report.view import view

        if self.json:
            with written(self.json) as put:
                shown = view(record, put)
        else:
            shown = view(record)
        if self.json_lines:
            with written(self.json_lines) as put:
                for line in json_report.lines(record):
                    put(line.encode())
        renderers: list[tuple[str | None, Callable[[], str]]] = [
            (self.html, lambda: html.render(shown)),
            (self.markdown, lambda: markdown.render(shown, limit=self.markdown_limit)),
            (self.sarif, lambda: sarif.render(shown)),
        ]
        for path, render in renderers:
            if path:
                write_text(path, render())
        if STANDARD_OUTPUT not in self._paths().values():
            _summary(shown)

    def _paths(self) -> dict[str, str]:
        """The paths of the formats asked for."""
        formats = ("html", "markdown", "json", "json_lines", "sarif")
        return {name: path for name in formats if (path := getattr(self, name))}


def _files(paths: Iterable[str | None]) -> set[str]:
    """What these paths lead to; without standard input and output."""
    return {os.path.realpath(path) for path in paths if path and path != STANDARD_OUTPUT}


def _summary(shown: "View") -> None:
    from auditor.report import terminal

    live = sys.stdout.isatty()
    size = os.get_terminal_size() if live else os.terminal_size(PIPED)
    colour = live and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"
    width, height = max(60, size.columns), max(20, size.lines)
    click.echo(terminal.render(shown, width=width, height=height, colour=colour), nl=False)


def write_text(path: str, text: str) -> None:
    """Write a text as :func:`written` does."""
    with written(path) as put:
        put(text.encode())


@contextmanager
def written(path: str) -> Iterator[Callable[[bytes], object]]:
    """What takes the bytes of a file in pieces: they stand beside it first, then in its place, and
    are gone where something fails before. OSError becomes a usage error.

    Standard output has them at once.
    """
    if path == STANDARD_OUTPUT:
        yield lambda piece: click.echo(piece, nl=False)
        return
    target = Path(path)
    try:
        handle, name = tempfile.mkstemp(dir=target.parent, prefix=".")
        with _removed_on_failure(Path(name)) as beside:
            with open(handle, "wb") as file:
                yield file.write
            beside.chmod(0o666 & ~_umask())
            beside.replace(target)
    except OSError as error:
        raise click.FileError(path, error.strerror or str(error)) from error


@contextmanager
def _removed_on_failure(path: Path) -> Iterator[Path]:
    try:
        yield path
    except BaseException:
        path.unlink()
        raise


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def read_report(path: str) -> dict[str, Any]:
    """A JSON report; a usage error for anything that is not one JSON object with unique keys."""
    try:
        data = Path(path).read_bytes() if path != STANDARD_OUTPUT else sys.stdin.buffer.read()
        report = json.loads(data, object_pairs_hook=_unique, parse_constant=_no_constant)
    except OSError as error:
        raise click.FileError(path, error.strerror or str(error)) from error
    except (ValueError, RecursionError) as error:
        raise click.ClickException(f"{path}: not a JSON report: {error}") from error
    if not isinstance(report, dict):
        raise click.ClickException(f"{path}: not a JSON report: expected an object")
    return report


def _unique(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    record = dict(pairs)
    if len(record) < len(pairs):
        raise ValueError("a key stands twice in one object")
    return record


def _no_constant(name: str) -> float:
    raise ValueError(f"{name} is no number")
