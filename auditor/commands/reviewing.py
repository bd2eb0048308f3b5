"""The command ``review``."""

import sys
from typing import Any

import click

from auditor.commands.options import (
    AS_OF,
    BOOKS,
    MARKDOWN_LIMIT,
    POLICY,
    policy_of,
    run_values_of,
    search_options,
    status_of,
    surroundings_of,
)

FAIL_ON = ("hold", "open", "conditions", "never")


@click.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--html", type=click.Path(dir_okay=False), help="Write the report as HTML.")
@click.option("--markdown", type=click.Path(dir_okay=False), help="Write it as Markdown.")
@click.option("--json", "json_", type=click.Path(dir_okay=False), help="Write the full record.")
@click.option("--json-lines", type=click.Path(dir_okay=False), help="Write it a set a line.")
@click.option("--sarif", type=click.Path(dir_okay=False), help="Write it as SARIF 2.1.0.")
@MARKDOWN_LIMIT
@BOOKS
@AS_OF
@click.option("--fail-on", type=click.Choice(FAIL_ON), default="conditions", show_default=True)
@click.option("--concessions", type=click.Path(dir_okay=False), help="Findings conceded.")
@POLICY
@click.option("--allow-empty", is_flag=True, help="Nothing recognised is no error.")
@search_options()
def review(paths: tuple[str, ...], **options: Any) -> int:
    """Review parameter declarations in files and directories; '-' is standard input.

    \b
    auditor review links.yaml
    auditor review configs/ --html report.html --markdown ticket.md --fail-on hold
    auditor review - --effort thorough --json report.json < links.yaml
    """
    from auditor.outputs import Outputs

    outputs = Outputs(
        html=options["html"],
        markdown=options["markdown"],
        json=options["json_"],
        json_lines=options["json_lines"],
        sarif=options["sarif"],
        markdown_limit=options["markdown_limit"],
    )
    outputs.check([*paths, options["concessions"], *options["rulebook"]])
    record = _reviewed(paths, options)
    outputs.write(record)
    for error in record["errors"]:
        click.echo(
            f"{error['path']}:{error['line']}:{error['column']}: {error['message']}", err=True
        )
    if not record["parameter_sets"] and not record["errors"] and not options["allow_empty"]:
        click.echo(_nothing(record), err=True)
        return 2
    return status_of(record, options["fail_on"])


def _nothing(record: dict[str, Any]) -> str:
    """Why there is nothing to review: candidates are named, which nobody else has."""
    from auditor.intake.reading import candidates_in
    from auditor.report.text import visible
    from auditor.report.words import plural

    found = candidates_in(record["skipped"])
    waiting = ""
    if found:
        more = f" and {len(found) - 3} more" if len(found) > 3 else ""
        named = ", ".join(place for place, _ in found[:3])
        waiting = f" but {plural(len(found), 'candidate')} for a usage file: {visible(named)}{more}"
    return f"nothing was recognised as parameters{waiting}; --allow-empty accepts that"


def _reviewed(paths: tuple[str, ...], options: dict[str, Any]) -> dict[str, Any]:
    from auditor.review import review as review_inputs
    from auditor.rulebooks.loading import DEFAULT_BOOKS

    policy = policy_of(options)
    with surroundings_of(options) as surroundings:
        return review_inputs(
            paths,
            run_values_of(options),
            surroundings,
            books=policy.pop("books") or DEFAULT_BOOKS,
            fail_on=options["fail_on"],
            stdin=sys.stdin.buffer,
            **policy,
        )
