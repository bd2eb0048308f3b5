"""The formats of the short documents of ``ask`` and ``compare``: options, and the writing."""

from collections.abc import Callable, Iterable, Mapping
from typing import Any

import click

from auditor.commands.options import FILE, MARKDOWN_LIMIT, Command

Formats = Mapping[str, Callable[[], str]]
"""The renderers by format: ``html``, ``markdown``, ``json``, and ``text`` for the terminal."""


_OPTIONS = (
    click.option("--html", type=FILE, help="Write it as HTML."),
    click.option("--markdown", type=FILE, help="Write it as Markdown."),
    click.option("--json", "json_", type=FILE, help="Write the full record."),
    MARKDOWN_LIMIT,
)


def format_options(command: Command) -> Command:
    """Where each format goes."""
    for option in reversed(_OPTIONS):
        command = option(command)
    return command


def check(options: Mapping[str, Any], read: Iterable[str], beside: str | None = None) -> None:
    """Refuse, before any work is done, what cannot be written in the end: among it the files that
    are ``read``; ``beside`` is the path of a file that is written as well."""
    from auditor.outputs import Outputs

    html, markdown, json = options["html"], options["markdown"], options["json_"]
    Outputs(html=html, markdown=markdown, json=json, json_lines=beside).check(read)


def write(options: Mapping[str, Any], formats: Formats, beside: str | None = None) -> None:
    """Write what was asked for; the text to standard output where nothing else goes there."""
    from auditor.outputs import STANDARD_OUTPUT, write_text

    paths = {"html": options["html"], "markdown": options["markdown"], "json": options["json_"]}
    for name, path in paths.items():
        if path:
            write_text(path, formats[name]())
    if STANDARD_OUTPUT not in (*paths.values(), beside):
        click.echo(formats["text"](), nl=False)
