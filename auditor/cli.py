"""The command line, its exit statuses and every way to end.

Exit status: 0 nothing at or above ``--fail-on``; 1 something is; 2 an input that could not be read,
nothing recognised, or wrong usage, which outranks 1; 3 an internal fault; 130 interrupted, 143 when
by SIGTERM; 141 the reader of standard output went away.
"""

import gc
import os
import signal
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType

import click

from auditor import __version__
from auditor.commands.asking import ask
from auditor.commands.books import rulebook
from auditor.commands.numbers import declare, demonstrate, structure
from auditor.commands.options import Interrupted
from auditor.commands.reports import compare, verify
from auditor.commands.reviewing import review

MOST_DIGITS = 20_000
"""Decimal digits that Python may read and write: enough for integers of 65,536 bits."""

_INTERRUPTED = 130

RARELY = (100_000, 20, 100)
"""Thresholds of the collector of cycles: large reports are frozen data and have none."""


@click.group(context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="auditor")
def main() -> None:
    """Review finite-field group parameters: the group, what an attack costs, what to change.

    \b
    auditor review samples/ --html report.html
    auditor structure 3600 --of 7
    auditor rulebook list
    """


for command in (review, ask, verify, compare, structure, demonstrate, declare, rulebook):
    main.add_command(command)


def run() -> int:
    """The entry point: every way to end has its exit status, and none shows a traceback."""
    sys.set_int_max_str_digits(MOST_DIGITS)
    gc.set_threshold(*RARELY)
    with _interrupted_by_sigterm() as signals:
        status = _status()
    return 128 + signals[0] if status == _INTERRUPTED and signals else status


@contextmanager
def _interrupted_by_sigterm() -> Iterator[list[int]]:
    """SIGTERM, which ends a job that takes too long, interrupts like Ctrl-C; the signals that came
    are in the list."""
    came: list[int] = []

    def interrupt(number: int, _: FrameType | None) -> None:
        came.append(number)
        raise KeyboardInterrupt

    before = signal.signal(signal.SIGTERM, interrupt)
    try:
        yield came
    finally:
        signal.signal(signal.SIGTERM, before)


def _status() -> int:
    try:
        status = main(standalone_mode=False) or 0
        sys.stdout.flush()
    except click.ClickException as error:
        error.show()
        status = 2
    except (click.Abort, KeyboardInterrupt, Interrupted) as reason:
        click.echo(f"interrupted{reason}", err=True)
        status = _INTERRUPTED
    except (BrokenPipeError, SystemExit):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        status = 141
    except Exception as error:
        click.echo(f"internal fault: {type(error).__name__}: {error}", err=True)
        status = 3
    return int(status)
