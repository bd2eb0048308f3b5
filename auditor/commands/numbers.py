"""Commands about numbers: ``structure``, ``demonstrate``, ``declare``."""

import re
import sys
from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from auditor.commands.options import (
    DEPTH,
    ENGINE,
    JOBS,
    Interrupted,
    effort_option,
    engine_of,
    investigated,
    run_values_of,
    search_options,
)

if TYPE_CHECKING:
    from auditor.inquiry.unit_groups import Structure


@click.command()
@click.argument("numbers", nargs=-1, required=True)
@click.option("--of", "elements", multiple=True, help="An element whose order is wanted.")
@click.option("--json", "as_json", is_flag=True, help="A record for programs.")
@effort_option("standard")
@DEPTH
@ENGINE
@JOBS
def structure(
    numbers: tuple[str, ...], elements: tuple[str, ...], as_json: bool, **options: Any
) -> int:
    """Show the units modulo N: factors, cycles, orders, whether several groups are isomorphic.

    Numbers are decimal or hexadecimal (0x…). An interruption shows what was found until then.

    \b
    auditor structure 3600 --of 7
    auditor structure 15 16 20
    auditor structure 0xffffffffffffffff --json
    """
    import secrets

    from auditor.claims.collection import Claims
    from auditor.inquiry.answers import Answers, Cores
    from auditor.inquiry.pool import LocalPool
    from auditor.inquiry.unit_groups import known_so_far
    from auditor.inquiry.unit_groups import structure as structure_of

    engine, values = engine_of(options), [_number(number) for number in numbers]
    run = run_values_of({**options, "as_of": None})
    found: list[Structure] = []
    interrupted = False
    with LocalPool(options["jobs"]) as pool:
        cores = Cores(pool if pool.jobs > 1 else None, pool.jobs, engine)
        answers = Answers(Claims(), run, secrets.randbelow, lambda claims: None, cores)
        try:
            for value in values:
                found.append(structure_of(value, answers))
        except KeyboardInterrupt:
            interrupted = True
            with suppress(KeyError):
                found.append(known_so_far(values[len(found)], answers.claims))
    if found or not interrupted:
        _show(found, [_number(element, 0, "--of") for element in elements], as_json)
    if interrupted:
        raise Interrupted("; shown is what was found" if found else "; nothing was found yet")
    return 0


def _show(found: "list[Structure]", elements: list[int], as_json: bool) -> None:
    import json

    from auditor.inquiry.unit_groups import isomorphic, order_of
    from auditor.report.unit_group_text import classes_text, record, text

    orders = [[order_of(element, item) for element in elements] for item in found]
    if as_json:
        records = [record(item, listed) for item, listed in zip(found, orders, strict=True)]
        click.echo(json.dumps(records, indent=2))
    else:
        click.echo(text(found, orders), nl=False)
        if len(found) > 1:
            click.echo(classes_text(isomorphic(found)), nl=False)


def _number(word: str, least: int = 1, hint: str = "N") -> int:
    """An integer from ``least`` to 65,536 bits from the command line."""
    value = None
    if _NUMBER.fullmatch(word):
        # No text that long is a number in range, and the interpreter has a limit of its own.
        with suppress(ValueError):
            value = int(word, 0 if word[1:2] in "xX" else 10)
    if value is None or not least <= value < 1 << 65_536:
        expected = f"expected {least} to 2^65536 - 1, decimal or as 0x…"
        raise click.BadParameter(f"{word[:40]}: {expected}", param_hint=hint)
    return value


_NUMBER = re.compile(r"0[xX][0-9a-fA-F]+|[0-9]+", re.ASCII)


@click.command()
@click.argument("paths", nargs=-1, required=True)
@click.option("--set", "name", help="Only the parameter set of that name.")
@click.option("--seed", type=click.IntRange(0), help="Draw the same exponents again.")
@click.option("--budget", type=click.IntRange(1, 40), default=26, show_default=True)
@search_options("quick")
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
    declarations, claims, run, errors = investigated(paths, {**options, "as_of": None})
    chosen = [item for item in declarations if options["name"] in (None, item.name)]
    click.echo(f"exponents drawn with seed {seed}")
    for item in chosen:
        click.echo(demonstrate_on(item, claims, run, seed, options["budget"]).text())
    for error in errors:
        click.echo(str(error), err=True)
    return 2 if errors or not chosen else 0


@click.command()
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
