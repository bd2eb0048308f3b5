"""Commands that read finished reports: ``verify``, ``compare``."""

import sys
from typing import Any

import click

from auditor.commands.options import POLICY, policy_of
from auditor.commands.short import check, format_options, write

FAIL_ON = ("hold", "open", "conditions", "never")


@click.command()
@click.argument("report", type=click.Path(dir_okay=False))
@click.option("--against", multiple=True, help="Check the inputs at this path too.")
@click.option("--rulebook", multiple=True, help="A book of the report that is not shipped.")
@click.option("--concessions", type=click.Path(dir_okay=False), help="Check what is conceded too.")
@POLICY
def verify(report: str, against: tuple[str, ...], **options: Any) -> int:
    """Check every claim in a JSON report, and draw its conclusions again.

    Exit status: 0 all holds, 1 something does not, 2 cannot tell.

    \b
    auditor verify report.json
    auditor verify report.json --against configs/
    """
    import secrets

    from auditor.outputs import read_report
    from auditor.review import read_under
    from auditor.verify import verify as verify_report

    policy = policy_of(options)
    inputs = read_under(policy["policy"], against, sys.stdin.buffer).result if against else None
    result = verify_report(
        read_report(report), secrets.randbelow, policy["books"], inputs, policy["concessions"]
    )
    for line in (*result.failures, *result.unclear):
        click.echo(line)
    verdict = {0: "all holds", 1: "does not hold", 2: "cannot tell"}[result.status]
    click.echo(f"{verdict}: {result.claims} claims checked")
    return result.status


@click.command()
@click.argument("old", type=click.Path(dir_okay=False))
@click.argument("new", type=click.Path(dir_okay=False))
@click.option("--fail-on", type=click.Choice(FAIL_ON), default="conditions", show_default=True)
@format_options
def compare(old: str, new: str, **options: Any) -> int:
    """Show what a new JSON report adds, settles and changes.

    What only the owner's word has removed, while the integers are the same, counts as new. Exit
    status 1 when something at or above --fail-on is new.

    \b
    auditor compare before.json after.json
    auditor compare before.json after.json --fail-on hold --markdown ticket.md
    """
    from auditor.compare import compare as compare_reports
    from auditor.report import comparing, comparing_html, comparing_markdown
    from auditor.report.json_report import dumps

    check(options, (old, new))
    before, after = _reports(old, new)
    compared = compare_reports(before, after)
    found = comparing.record(compared, before, after, options["fail_on"])
    limit = options["markdown_limit"]
    write(
        options,
        {
            "html": lambda: comparing_html.render(found),
            "markdown": lambda: comparing_markdown.render(found, limit=limit),
            "json": lambda: dumps(found),
            "text": lambda: comparing.render(found),
        },
    )
    return int(found["fails"])


def _reports(*paths: str) -> list[dict[str, Any]]:
    """The reports at these paths; a usage error for what is none."""
    from auditor.outputs import STANDARD_OUTPUT, read_report
    from auditor.report.json_report import problems

    if paths.count(STANDARD_OUTPUT) > 1:
        raise click.UsageError("only one report can come from standard input")
    records = [read_report(path) for path in paths]
    for path, record in zip(paths, records, strict=True):
        if malformed := problems(record):
            raise click.ClickException(f"{path}: not a report of this format: {malformed[0]}")
    return records
