"""The command ``ask``: what is worth asking, and a usage file to answer in."""

import os
from typing import TYPE_CHECKING, Any

import click

from auditor.commands.options import (
    AS_OF,
    BOOKS,
    FILE,
    POLICY,
    books_of,
    investigated_inputs,
    search_options,
)
from auditor.commands.short import check, format_options, write

if TYPE_CHECKING:
    from auditor.usage_draft import Draft


@click.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--draft-usage", type=FILE, help="Write a usage file with what is open.")
@click.option("--overwrite", is_flag=True, help="Let --draft-usage replace a file.")
@format_options
@BOOKS
@POLICY
@AS_OF
@search_options()
def ask(paths: tuple[str, ...], **options: Any) -> int:
    """Show which answers, the owner's or of more search, would change a position, and how.

    Sets that are used alike and leave the same keys open are one question. --draft-usage writes
    them as a usage file to complete; paths in it are relative to its directory, and with '-' to
    the current one.

    \b
    auditor ask links.yaml
    auditor ask configs/ --draft-usage configs/usage.yaml
    auditor ask configs/ --effort quick --markdown questions.md
    """
    from auditor.advice.ask import Asker
    from auditor.advice.situations import inquire
    from auditor.report import asking, asking_html, asking_markdown
    from auditor.report.asking_record import record
    from auditor.report.json_report import dumps
    from auditor.report.text import visible
    from auditor.usage_draft import draft

    target = options["draft_usage"]
    check(options, paths, target)
    _spare(target, options["overwrite"])
    books = books_of(options)
    read, claims, run, notices = investigated_inputs(paths, options)
    inquiry = inquire(read.declarations, Asker(claims, run, books))
    found = record(inquiry, run, books, read.waiting, read.errors, notices)
    limit = options["markdown_limit"]
    write(
        options,
        {
            "html": lambda: asking_html.render(found),
            "markdown": lambda: asking_markdown.render(found, limit=limit),
            "json": lambda: dumps(found),
            "text": lambda: asking.render(found),
        },
        target,
    )
    if target:
        _write_draft(target, draft(target, inquiry, read.waiting, read.documents))
    for line in (*notices, *asking.lines_of_errors(found)):
        click.echo(visible(line), err=True)
    return 2 if found["errors"] or not (found["sets"] or found["candidates"]) else 0


def _spare(target: str | None, overwrite: bool) -> None:
    """Refuse to write over a file that nobody gave up."""
    if target and os.path.lexists(target) and not overwrite:
        raise click.UsageError(
            f"--draft-usage {target}: there is such a file; --overwrite replaces it, and another "
            "name adds to it, since usage files add up"
        )


def _write_draft(target: str, made: "Draft") -> None:
    from auditor.outputs import write_text
    from auditor.report.text import visible

    for line in made.left_out:
        click.echo(f"not in the draft: {visible(line)}", err=True)
    if made.is_empty:
        click.echo(f"{target}: not written, since a usage file has nothing to answer", err=True)
        return
    write_text(target, made.text)
