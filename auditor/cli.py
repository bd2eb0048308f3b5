"""The commands, their options and exit statuses; everything else is imported where it is used.

Exit status: 0 nothing at or above ``--fail-on``; 1 something is; 2 an input that could not be read,
nothing recognised, or wrong usage, which outranks 1; 3 an internal fault; 130 interrupted; 141 the
reader of standard output went away.
"""

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from auditor import __version__

if TYPE_CHECKING:
    from auditor.inquiry.cluster import Cluster
    from auditor.inquiry.pool import LocalPool
    from auditor.review import Surroundings
    from auditor.run_values import Effort, RunValues

FAIL_ON = ("hold", "open", "conditions", "never")
EFFORTS = ("quick", "standard", "thorough")
POLICY_HELP = "Take rulebook files, concessions and usage files from there alone."
MOST_DIGITS = 20_000
"""Decimal digits that Python may read and write: enough for integers of 65,536 bits."""


class Interrupted(Exception):
    """A review was interrupted; the text says why, and what is kept of it."""


@click.group(context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="auditor")
def main() -> None:
    """Review finite-field group parameters: the group, what an attack costs, what to change.

    \b
    auditor review samples/ --html report.html
    auditor structure 3600 --of 7
    auditor rulebook list
    """


@main.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--html", type=click.Path(dir_okay=False), help="Write the report as HTML.")
@click.option("--markdown", type=click.Path(dir_okay=False), help="Write it as Markdown.")
@click.option("--json", "json_", type=click.Path(dir_okay=False), help="Write the full record.")
@click.option("--json-lines", type=click.Path(dir_okay=False), help="Write it a set a line.")
@click.option("--sarif", type=click.Path(dir_okay=False), help="Write it as SARIF 2.1.0.")
@click.option("--markdown-limit", default=32_767, show_default=True, help="Most characters.")
@click.option("--rulebook", multiple=True, help="A shipped book or a file; may be repeated.")
@click.option("--effort", type=click.Choice(EFFORTS), default="standard", show_default=True)
@click.option("--factor-digits", type=click.IntRange(0, 50), help="Depth of the factor search.")
@click.option("--as-of", type=click.DateTime(["%Y-%m-%d"]), help="Date of the review; today.")
@click.option("--fail-on", type=click.Choice(FAIL_ON), default="conditions", show_default=True)
@click.option("--concessions", type=click.Path(dir_okay=False), help="Findings conceded.")
@click.option("--policy-from", type=click.Path(exists=True, file_okay=False), help=POLICY_HELP)
@click.option("--allow-empty", is_flag=True, help="Nothing recognised is no error.")
@click.option("--ledger", type=click.Path(dir_okay=False), help="Where claims are kept.")
@click.option("--no-ledger", is_flag=True, help="Keep no claims between runs.")
@click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
@click.option("--cluster", metavar="ADDRESS", help="A dask scheduler, in place of --jobs.")
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
    outputs.check()
    record = _reviewed(paths, options)
    outputs.write(record)
    for error in record["errors"]:
        click.echo(
            f"{error['path']}:{error['line']}:{error['column']}: {error['message']}", err=True
        )
    if not record["parameter_sets"] and not record["errors"] and not options["allow_empty"]:
        click.echo("nothing was recognised as parameters; --allow-empty accepts that", err=True)
        return 2
    return _status(record, options["fail_on"])


def _reviewed(paths: tuple[str, ...], options: dict[str, Any]) -> dict[str, Any]:
    from auditor.review import DEFAULT_BOOKS
    from auditor.review import review as review_inputs

    policy = _policy(options)
    with _surroundings(options) as surroundings:
        return review_inputs(
            paths,
            _run_values(options),
            surroundings,
            books=policy.pop("books") or DEFAULT_BOOKS,
            fail_on=options["fail_on"],
            stdin=sys.stdin.buffer,
            **policy,
        )


def _policy(options: dict[str, Any]) -> dict[str, Any]:
    """Books, concessions and the directory of policy; files that cannot be used end the run."""
    from auditor.concessions import ConcessionsError, load
    from auditor.facts import vocabulary
    from auditor.intake.policy import NoSuchPolicy, concessions_file, named

    folder, file, books = options["policy_from"], options["concessions"], options["rulebook"]
    try:
        if folder:
            files = (".yaml", ".yml")
            books = [named(folder, book) if book.endswith(files) else book for book in books]
            file = named(folder, file) if file else concessions_file(folder)
        granted = load(file, vocabulary()) if file else None
    except NoSuchPolicy as error:
        raise click.ClickException(str(error)) from error
    except ConcessionsError as error:
        click.echo(str(error), err=True)
        raise click.exceptions.Exit(2) from error
    return {
        "books": books,
        "concessions": granted,
        "policy": Path(folder) if folder else None,
    }


@contextmanager
def _surroundings(options: dict[str, Any]) -> "Iterator[Surroundings]":
    """What a review needs from outside, for as long as it runs; books that cannot be used become a
    usage error."""
    import secrets

    from auditor.inquiry.answers import Cores
    from auditor.inquiry.dispatch import ExecutorLost
    from auditor.progress import Progress, is_live
    from auditor.review import Surroundings
    from auditor.rulebooks.rulebook import RulebookError

    progress = Progress(sys.stderr, is_live(os.environ, sys.stderr))
    with _workers(options) as pool:
        try:
            yield Surroundings(
                draw=secrets.randbelow,
                progress=progress,
                ledger=_ledger_path(options),
                cores=Cores(pool if pool.started or pool.jobs > 1 else None, pool.jobs),
            )
        except RulebookError as error:
            raise click.ClickException(str(error)) from error
        except KeyboardInterrupt:
            raise Interrupted(f"; {_kept(options)}") from None
        except ExecutorLost as error:
            raise Interrupted(f": {error}; {_kept(options)}") from error
        finally:
            progress.done()


def _kept(options: dict[str, Any]) -> str:
    ledger = _ledger_path(options)
    if ledger is None:
        return "nothing is kept, since there is no ledger"
    return f"what was found is kept in {ledger.name}, and the next run goes on from there"


def _workers(options: dict[str, Any]) -> "LocalPool | Cluster":
    """The workers of the cluster where one is named, otherwise those of this machine."""
    from auditor.inquiry.cluster import Cluster, NoCluster
    from auditor.inquiry.pool import LocalPool

    if not options.get("cluster"):
        return LocalPool(options["jobs"])
    try:
        return Cluster(options["cluster"])
    except NoCluster as error:
        raise click.ClickException(str(error)) from error


def _run_values(options: dict[str, Any]) -> "RunValues":
    from auditor.run_values import RunValues

    effort: Effort = options["effort"]
    day = options["as_of"].date() if options["as_of"] else date.today()
    return RunValues(day.isoformat(), effort, options["factor_digits"])


def _ledger_path(options: dict[str, Any]) -> Path | None:
    if options["no_ledger"]:
        return None
    if options["ledger"]:
        return Path(options["ledger"])
    from platformdirs import user_cache_path

    return user_cache_path("group-parameter-auditor") / "ledger.sqlite"


def _status(record: dict[str, Any], fail_on: str) -> int:
    if record["errors"]:
        return 2
    from auditor.concessions import fails

    return int(any(fails(item, fail_on) for item in record["parameter_sets"]))


@main.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--rulebook", multiple=True, help="A shipped book or a file; may be repeated.")
@click.option("--effort", type=click.Choice(EFFORTS), default="standard", show_default=True)
@click.option("--factor-digits", type=click.IntRange(0, 50), help="Depth of the factor search.")
@click.option("--as-of", type=click.DateTime(["%Y-%m-%d"]), help="Date of the review; today.")
@click.option("--ledger", type=click.Path(dir_okay=False), help="Where claims are kept.")
@click.option("--no-ledger", is_flag=True, help="Keep no claims between runs.")
@click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
@click.option("--cluster", metavar="ADDRESS", help="A dask scheduler, in place of --jobs.")
def ask(paths: tuple[str, ...], **options: Any) -> int:
    """Show which answers, the owner's or of more search, would change a position, and how.

    \b
    auditor ask links.yaml
    auditor ask configs/ --effort quick
    """
    from auditor.report.asking import render

    asked, errors = _asked(paths, options)
    click.echo(render(asked), nl=False)
    for error in errors:
        click.echo(str(error), err=True)
    return 2 if errors or not asked else 0


def _asked(paths: tuple[str, ...], options: dict[str, Any]) -> tuple[list[Any], list[Any]]:
    from auditor.advice.ask import ask as ask_about

    declarations, claims, run, errors = _investigated(paths, options)
    books = _books(options)
    return [ask_about(item, claims, run, books) for item in declarations], errors


def _books(options: dict[str, Any]) -> Any:
    from auditor.facts import vocabulary
    from auditor.review import DEFAULT_BOOKS
    from auditor.rulebooks.loading import load_all

    return load_all(options.get("rulebook") or DEFAULT_BOOKS, vocabulary())


def _investigated(
    paths: tuple[str, ...], options: dict[str, Any]
) -> tuple[Any, Any, Any, list[Any]]:
    """The declarations at these paths, the claims about them, the run values, the errors."""
    from dataclasses import replace

    from auditor.intake.tree import read_inputs
    from auditor.review import census, investigate

    read = read_inputs(paths, sys.stdin.buffer)
    run = replace(_run_values(options), census=census(read.declarations))
    with _surroundings(options) as surroundings:
        claims, _ = investigate(read.declarations, run, _books(options), surroundings)
    return read.declarations, claims, run, list(read.errors)


@main.command()
@click.argument("report", type=click.Path(dir_okay=False))
@click.option("--against", multiple=True, help="Check the inputs at this path too.")
@click.option("--rulebook", multiple=True, help="A book of the report that is not shipped.")
@click.option("--concessions", type=click.Path(dir_okay=False), help="Check what is conceded too.")
@click.option("--policy-from", type=click.Path(exists=True, file_okay=False), help=POLICY_HELP)
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

    policy = _policy(options)
    inputs = read_under(policy["policy"], against, sys.stdin.buffer).result if against else None
    result = verify_report(
        read_report(report), secrets.randbelow, policy["books"], inputs, policy["concessions"]
    )
    for line in (*result.failures, *result.unclear):
        click.echo(line)
    verdict = {0: "all holds", 1: "does not hold", 2: "cannot tell"}[result.status]
    click.echo(f"{verdict}: {result.claims} claims checked")
    return result.status


@main.command()
@click.argument("source", metavar="PATH|GROUP")
def declare(source: str) -> int:
    """Write a declaration to start from: of a standard group, or of what a file holds.

    \b
    auditor declare ffdhe2048 > links.yaml
    auditor declare server.pem > server.yaml
    """
    from auditor.declare import of_group, of_sets
    from auditor.intake.standard_groups import find, suggest
    from auditor.intake.tree import read_inputs

    if source != "-" and not Path(source).exists():
        group = find(source)
        if group is None:
            advice = " or ".join(suggest(source))
            message = f"{source[:60]!r} is no file and names no standard group"
            raise click.UsageError(f"{message}; did you mean {advice}?" if advice else message)
        click.echo(of_group(group), nl=False)
        return 0
    read = read_inputs([source], sys.stdin.buffer)
    for error in read.errors:
        click.echo(str(error), err=True)
    for notice in read.notices:
        click.echo(str(notice), err=True)
    if read.declarations:
        click.echo(of_sets(read.declarations), nl=False)
    elif not read.errors:
        click.echo("nothing was recognised as parameters", err=True)
    return 2 if read.errors or not read.declarations else 0


@main.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--set", "name", help="Only the parameter set of that name.")
@click.option("--seed", type=click.IntRange(0), help="Draw the same exponents again.")
@click.option("--budget", type=click.IntRange(1, 40), default=26, show_default=True)
@click.option("--effort", type=click.Choice(EFFORTS), default="quick", show_default=True)
@click.option("--factor-digits", type=click.IntRange(0, 50), help="Depth of the factor search.")
@click.option("--ledger", type=click.Path(dir_okay=False), help="Where claims are kept.")
@click.option("--no-ledger", is_flag=True, help="Keep no claims between runs.")
@click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
@click.option("--cluster", metavar="ADDRESS", help="A dask scheduler, in place of --jobs.")
def demonstrate(paths: tuple[str, ...], **options: Any) -> int:
    """Carry out a weak route on an exponent drawn here, within 2^BUDGET group operations.

    Declared public values are never attacked.

    \b
    auditor demonstrate links.yaml --set 'dredger log'
    auditor demonstrate links.yaml --budget 30 --seed 7
    """
    import secrets

    from auditor.demonstrate import demonstrate as demonstrate_on

    seed = options["seed"] if options["seed"] is not None else secrets.randbits(64)
    declarations, claims, run, errors = _investigated(paths, {**options, "as_of": None})
    chosen = [item for item in declarations if options["name"] in (None, item.name)]
    click.echo(f"exponents drawn with seed {seed}")
    for item in chosen:
        click.echo(demonstrate_on(item, claims, run, seed, options["budget"]).text())
    for error in errors:
        click.echo(str(error), err=True)
    return 2 if errors or not chosen else 0


@main.command()
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


@main.command()
@click.argument("numbers", nargs=-1, required=True)
@click.option("--of", "elements", multiple=True, help="An element whose order is wanted.")
@click.option("--json", "as_json", is_flag=True, help="A record for programs.")
@click.option("--effort", type=click.Choice(EFFORTS), default="standard", show_default=True)
@click.option("--factor-digits", type=click.IntRange(0, 50), help="Depth of the factor search.")
@click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
def structure(
    numbers: tuple[str, ...], elements: tuple[str, ...], as_json: bool, **options: Any
) -> int:
    """Show the units modulo N: factors, cycles, orders, whether several groups are isomorphic.

    Numbers are decimal or hexadecimal (0x…).

    \b
    auditor structure 3600 --of 7
    auditor structure 15 16 20
    auditor structure 0xffffffffffffffff --json
    """
    import json
    import secrets

    from auditor.claims.collection import Claims
    from auditor.inquiry.answers import Answers, Cores
    from auditor.inquiry.pool import LocalPool
    from auditor.inquiry.unit_groups import isomorphic, order_of
    from auditor.inquiry.unit_groups import structure as structure_of
    from auditor.report.unit_group_text import classes_text, record, text

    run = _run_values({**options, "as_of": None})
    with LocalPool(options["jobs"]) as pool:
        cores = Cores(pool if pool.jobs > 1 else None, pool.jobs)
        answers = Answers(Claims(), run, secrets.randbelow, lambda claims: None, cores)
        found = [structure_of(_number(number), answers) for number in numbers]
    orders = [[order_of(_number(element), item) for element in elements] for item in found]
    if as_json:
        records = [record(item, listed) for item, listed in zip(found, orders, strict=True)]
        click.echo(json.dumps(records, indent=2))
    else:
        click.echo(text(found, orders), nl=False)
        if len(found) > 1:
            click.echo(classes_text(isomorphic(found)), nl=False)
    return 0


def _number(word: str) -> int:
    """A positive integer of at most 65,536 bits from the command line."""
    try:
        value = int(word.replace("_", ""), 16 if word.lower().startswith("0x") else 10)
    except ValueError:
        raise click.BadParameter(f"{word[:40]}: expected a decimal or 0x… integer") from None
    if not 1 <= value < 1 << 65_536:
        raise click.BadParameter(f"{word[:40]}: expected 1 to 2^65536 - 1")
    return value


@main.group()
def rulebook() -> None:
    """List, read and test the rules.

    \b
    auditor rulebook list
    auditor rulebook show generator-trivial
    auditor rulebook test my-rules.yaml
    """


@rulebook.command("list")
def list_books() -> int:
    """List the shipped rulebooks and their rules."""
    from auditor.rule_pages import listing

    click.echo(listing(), nl=False)
    return 0


@rulebook.command("show")
@click.argument("names", nargs=-1)
@click.option("--html", type=click.Path(dir_okay=False), help="Write whole books as one page.")
def show_rule(names: tuple[str, ...], html: str | None) -> int:
    """Show a rule or a whole book, by its id or name.

    With --html the page holds the books named, shipped ones or files; without a name, all shipped.

    \b
    auditor rulebook show generator-trivial
    auditor rulebook show strength
    auditor rulebook show --html rules.html
    """
    from auditor.outputs import write_text
    from auditor.rule_pages import NoSuchRule, page, reference
    from auditor.rulebooks.rulebook import RulebookError

    if not names and not html:
        raise click.UsageError("name a rule or a book, or write the whole reference with --html")
    try:
        if html:
            write_text(html, reference(names))
        else:
            click.echo("\n".join(map(page, names)), nl=False)
    except (NoSuchRule, RulebookError) as error:
        raise click.ClickException(str(error)) from error
    return 0


@rulebook.command("test")
@click.argument("books", nargs=-1)
def test_books(books: tuple[str, ...]) -> int:
    """Load rulebooks and run the examples of their rules; all shipped ones by default.

    \b
    auditor rulebook test
    auditor rulebook test my-rules.yaml
    """
    from auditor.rule_pages import tested

    failures, summary = tested(books)
    for failure in failures:
        click.echo(failure)
    click.echo(summary)
    return 1 if failures else 0


def run() -> int:
    """The entry point: every way to end has its exit status, and none shows a traceback."""
    sys.set_int_max_str_digits(MOST_DIGITS)
    try:
        status = main(standalone_mode=False) or 0
        sys.stdout.flush()
    except click.ClickException as error:
        error.show()
        status = 2
    except (click.Abort, KeyboardInterrupt, Interrupted) as reason:
        click.echo(f"interrupted{reason}", err=True)
        status = 130
    except (BrokenPipeError, SystemExit):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = 141
    except Exception as error:
        click.echo(f"internal fault: {type(error).__name__}: {error}", err=True)
        status = 3
    return int(status)
