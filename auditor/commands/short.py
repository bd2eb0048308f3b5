"""The formats of the short documents of ``ask`` and ``compare``: options, and the writing."""

from collections.abc import Callable, Mapping
from typing import Any

import click

from auditor.commands.options import FILE, Command

LEAST = 4_000
"""Characters that a Markdown document has at least; what the renderers take too."""

Formats = Mapping[str, Callable[[], str]]
"""The renderers by format: ``html``, ``markdown``, ``json``, and ``text`` for the terminal."""


_OPTIONS = (
    click.option("--html", type=FILE, help="Write it as HTML."),
    click.option("--markdown", type=FILE, help="Write it as Markdown."),
    click.option("--json", "json_", type=FILE, help="Write the full record."),
    click.option(
        "--markdown-limit",
        type=click.IntRange(LEAST),
        default=32_767,
        show_default=True,
        help="Most characters.",
    ),
)


def format_options(command: Command) -> Command:
    """Where each format goes."""
    for option in reversed(_OPTIONS):
        command = option(command)
    return command


def check(options: Mapping[str, Any]) -> None:
    """Refuse, before any work is done, what cannot be written in the end."""
    from auditor.outputs import Outputs

    Outputs(html=options["html"], markdown=options["markdown"], json=options["json_"]).check()


def write(options: Mapping[str, Any], formats: Formats) -> None:
    """Write what was asked for; the text to standard output where no format goes there."""
    from auditor.outputs import STANDARD_OUTPUT, write_text

    paths = {"html": options["html"], "markdown": options["markdown"], "json": options["json_"]}
    for name, path in paths.items():
        if path:
            write_text(path, formats[name]())
    if STANDARD_OUTPUT not in paths.values():
        click.echo(formats["text"](), nl=False)
