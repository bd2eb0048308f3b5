"""Commands that read finished reports: ``verify``, ``compare``."""

import sys
from typing import Any

import click

from auditor.commands.options import POLICY, policy_of


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
def compare(old: str, new: str) -> int:
    """Show what a new JSON report adds, settles and changes; status 1 if anything got worse.

    \b
    auditor compare before.json after.json
    """
    from auditor.compare import compare as compare_reports
    from auditor.outputs import read_report
    from auditor.report.comparing import render
    from auditor.report.json_report import problems

    records = [read_report(old), read_report(new)]
    for path, record in zip((old, new), records, strict=True):
        if malformed := problems(record):
            raise click.ClickException(f"{path}: not a report of this format: {malformed[0]}")
    found = compare_reports(*records)
    click.echo(render(found), nl=False)
    return int(found.worse)
