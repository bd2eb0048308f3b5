"""Options that several commands take, and what follows from them."""

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from auditor.claims.collection import Claims
    from auditor.inquiry.cluster import Cluster
    from auditor.inquiry.pool import LocalPool
    from auditor.intake.tree import InputResult
    from auditor.review import Surroundings
    from auditor.run_values import Effort, RunValues
    from auditor.search.curves import BuiltIn
    from auditor.search.gmp_ecm import GmpEcm

Command = TypeVar("Command", bound=Callable[..., Any])

FILE = click.Path(dir_okay=False)
EFFORTS = ("quick", "standard", "thorough")
POLICY_HELP = "Take rulebook files, concessions and usage files from there alone."


class Interrupted(Exception):
    """A review was interrupted; the text says why, and what is kept of it."""


def _all(options: tuple[Callable[[Command], Command], ...]) -> Callable[[Command], Command]:
    def decorate(command: Command) -> Command:
        for option in reversed(options):
            command = option(command)
        return command

    return decorate


def search_options(effort: str = "standard") -> Callable[[Command], Command]:
    """How far a search goes, what it keeps, and where it runs; ``effort`` is the default."""
    return _all(
        (
            effort_option(effort),
            DEPTH,
            ENGINE,
            click.option(
                "--ledger", type=click.Path(dir_okay=False), help="Where claims are kept."
            ),
            click.option("--no-ledger", is_flag=True, help="Keep no claims between runs."),
            JOBS,
            click.option(
                "--cluster", metavar="ADDRESS", help="A dask scheduler, in place of --jobs."
            ),
        )
    )


def effort_option(default: str) -> Callable[[Command], Command]:
    """How much work is done."""
    return click.option("--effort", type=click.Choice(EFFORTS), default=default, show_default=True)


DEPTH = click.option(
    "--factor-digits", type=click.IntRange(0, 50), help="Depth of the factor search."
)
ENGINE = click.option(
    "--engine",
    type=click.Choice(("gmp-ecm", "built-in")),
    help="What runs elliptic curves; GMP-ECM where it is installed.",
)
JOBS = click.option("--jobs", type=click.IntRange(1, 256), help="Worker processes; one a core.")
BOOKS = click.option(
    "--rulebook",
    multiple=True,
    help="A shipped book or a file, in place of the usual books (rulebook list); may be repeated.",
)
AS_OF = click.option(
    "--as-of", type=click.DateTime(["%Y-%m-%d"]), help="Date of the review; today."
)
LEAST_MARKDOWN = 4_000
"""Characters that a Markdown document has at least; what the renderers take too."""
MARKDOWN_LIMIT = click.option(
    "--markdown-limit",
    type=click.IntRange(LEAST_MARKDOWN),
    default=32_767,
    show_default=True,
    help="Most characters.",
)
POLICY = click.option(
    "--policy-from", type=click.Path(exists=True, file_okay=False), help=POLICY_HELP
)


def policy_of(options: dict[str, Any]) -> dict[str, Any]:
    """Books, concessions and the directory of policy; files that cannot be used end the run."""
    from auditor.concessions import ConcessionsError, load
    from auditor.facts import vocabulary
    from auditor.intake.policy import NoSuchPolicy, concessions_file, named

    folder, file = options["policy_from"], options["concessions"]
    try:
        if folder:
            file = named(folder, file) if file else concessions_file(folder)
        granted = load(file, vocabulary()) if file else None
    except NoSuchPolicy as error:
        raise click.ClickException(str(error)) from error
    except ConcessionsError as error:
        click.echo(str(error), err=True)
        raise click.exceptions.Exit(2) from error
    return {
        "books": named_books(options),
        "concessions": granted,
        "policy": Path(folder) if folder else None,
    }


def named_books(options: dict[str, Any]) -> list[str]:
    """The books that are asked for, files below the directory of policy where there is one."""
    from auditor.intake.policy import NoSuchPolicy, named

    folder, books = options.get("policy_from"), list(options.get("rulebook") or ())
    if not folder:
        return books
    files = (".yaml", ".yml")
    try:
        return [named(folder, book) if book.endswith(files) else book for book in books]
    except NoSuchPolicy as error:
        raise click.ClickException(str(error)) from error


def engine_of(options: dict[str, Any]) -> "BuiltIn | GmpEcm":
    """What runs the curves: GMP-ECM where it is installed, unless the other is asked for.

    Where no curves will run nobody looks for it. Asked for and missing it is a usage error.
    """
    from auditor.search.curves import BuiltIn
    from auditor.search.gmp_ecm import installed
    from auditor.search.plan import plan_for

    wanted = options["engine"]
    curves = plan_for(options["effort"], options["factor_digits"]).levels
    if wanted == "built-in" or not (wanted or curves):
        return BuiltIn()
    found = installed()
    if wanted and found is None:
        raise click.UsageError("--engine gmp-ecm: no program 'ecm' of GMP-ECM is on the path")
    return found or BuiltIn()


@contextmanager
def surroundings_of(options: dict[str, Any]) -> "Iterator[Surroundings]":
    """What a review needs from outside, for as long as it runs; books that cannot be used become a
    usage error."""
    import secrets

    from auditor.inquiry.answers import Cores
    from auditor.inquiry.dispatch import ExecutorLost
    from auditor.progress import Progress, is_live
    from auditor.review import Surroundings
    from auditor.rulebooks.rulebook import RulebookError

    engine = engine_of(options)
    progress = Progress(sys.stderr, is_live(os.environ, sys.stderr))
    with _workers(options) as pool:
        try:
            yield Surroundings(
                draw=secrets.randbelow,
                progress=progress,
                ledger=ledger_path(options),
                cores=Cores(pool if pool.started or pool.jobs > 1 else None, pool.jobs, engine),
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
    ledger = ledger_path(options)
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


def run_values_of(options: dict[str, Any]) -> "RunValues":
    """What the options say of them; a review fills in the rest."""
    from auditor.run_values import RunValues

    effort: Effort = options["effort"]
    day = options["as_of"].date() if options["as_of"] else date.today()
    return RunValues(day.isoformat(), effort, options["factor_digits"])


def ledger_path(options: dict[str, Any]) -> Path | None:
    if options["no_ledger"]:
        return None
    if options["ledger"]:
        return Path(options["ledger"])
    from platformdirs import user_cache_path

    return user_cache_path("group-parameter-auditor") / "ledger.sqlite"


def status_of(record: dict[str, Any], fail_on: str) -> int:
    if record["errors"]:
        return 2
    from auditor.concessions import fails

    return int(any(fails(item, fail_on) for item in record["parameter_sets"]))


def books_of(options: dict[str, Any]) -> Any:
    from auditor.facts import vocabulary
    from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
    from auditor.rulebooks.rulebook import RulebookError

    try:
        return load_all(named_books(options) or DEFAULT_BOOKS, vocabulary())
    except RulebookError as error:
        raise click.ClickException(str(error)) from error


def investigated(
    paths: tuple[str, ...], options: dict[str, Any]
) -> tuple[Any, Any, Any, list[Any]]:
    """The declarations at these paths, the claims about them, the run values, the errors."""
    read, claims, run, _ = investigated_inputs(paths, options)
    return read.declarations, claims, run, list(read.errors)


def investigated_inputs(
    paths: tuple[str, ...], options: dict[str, Any]
) -> "tuple[InputResult, Claims, RunValues, list[str]]":
    """All that was read at these paths, the claims about it, the run values, what to notice."""
    from auditor.review import investigate, read_under, situated

    folder = options.get("policy_from")
    governed = read_under(Path(folder) if folder else None, paths, sys.stdin.buffer)
    read = governed.result
    with surroundings_of(options) as surroundings:
        run = situated(run_values_of(options), read.declarations, surroundings)
        claims, told = investigate(read.declarations, run, books_of(options), surroundings)
    return read, claims, run, [*map(str, read.notices), *governed.notices, *told]
