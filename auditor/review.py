"""The whole way through the house, as one short function: bytes in, the record of a review out."""

from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from types import MappingProxyType
from typing import Any, BinaryIO

from auditor.claims.base import Claim, Draw
from auditor.claims.collection import Claims
from auditor.claims.ledger import Ledger
from auditor.concessions import Concessions, conceded
from auditor.concessions import notices as notices_of
from auditor.declaration import Declaration
from auditor.encoding import shorten
from auditor.facts import parts, vocabulary
from auditor.facts.given import Given
from auditor.inquiry.answers import ALONE, Answers, Cores
from auditor.inquiry.question_round import Progress
from auditor.inquiry.settle import settle
from auditor.inquiry.sharing import share_among_moduli, share_among_rests
from auditor.intake.policy import Governed, read_governed
from auditor.intake.tree import InputResult, read_inputs
from auditor.report.record import Reading, build
from auditor.report.set_record import in_use
from auditor.rulebooks.judging import Judging
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What a review needs from outside and what moves no answer: unpredictable numbers, cores, the
    store of claims, and somebody to tell of progress and trouble."""

    draw: Draw
    progress: Progress = lambda status: None
    ledger: Path | None = None
    cores: Cores = ALONE


def review(
    paths: Iterable[str],
    run: RunValues,
    surroundings: Surroundings,
    *,
    books: Sequence[str | Path] = DEFAULT_BOOKS,
    fail_on: str = "conditions",
    stdin: BinaryIO | None = None,
    concessions: Concessions | None = None,
    policy: Path | None = None,
) -> dict[str, Any]:
    """Read what is at ``paths``, settle what is worth settling, judge it by the rulebooks.

    Usage files are those in the directory ``policy`` where there is one. Returns the record that
    every document is a rendering of. Raises RulebookError for books that cannot be used; inputs
    that cannot be read are errors in the record.
    """
    rulebooks = load_all(books, vocabulary())
    governed = read_under(policy, paths, stdin)
    read = governed.result
    run = situated(run, read.declarations, surroundings)
    claims, notices = investigate(read.declarations, run, rulebooks, surroundings)
    reading = reading_of(read, (*governed.notices, *notices))
    record = build(reading, claims, run, rulebooks, fail_on)
    return _with_policy(record, governed, concessions)


def read_under(
    policy: Path | None, paths: Iterable[str], stdin: BinaryIO | None = None
) -> Governed:
    """What is at ``paths``, its use as said in the directory ``policy`` where there is one."""
    if policy is None:
        return Governed(read_inputs(paths, stdin), (), ())
    return read_governed(tuple(paths), policy, stdin)


def _with_policy(
    record: dict[str, Any], governed: Governed, concessions: Concessions | None
) -> dict[str, Any]:
    """The record with the files of policy among its inputs, and what is conceded."""
    files = [("usage", file) for file in governed.usage_files]
    if concessions is not None:
        record = conceded(record, concessions.granted)
        told = notices_of(record, concessions.granted)
        record = {**record, "notices": [*record["notices"], *told]}
        files.append(("concessions", concessions.file))
    named = [{"path": file.path, "sha256": file.sha256, "role": role} for role, file in files]
    return {**record, "inputs": [*record["inputs"], *named]}


def situated(
    run: RunValues, declarations: Iterable[Declaration], surroundings: Surroundings
) -> RunValues:
    """The run values with what follows from the inputs and from the surroundings."""
    return replace(run, census=census(declarations), engine=surroundings.cores.engine.name)


def census(declarations: Iterable[Declaration]) -> MappingProxyType[int, int]:
    """How many of the sets have each modulus."""
    return MappingProxyType(Counter(item.modulus for item in declarations))


def investigate(
    declarations: Sequence[Declaration],
    run: RunValues,
    books: Sequence[Rulebook],
    surroundings: Surroundings,
) -> tuple[Claims, tuple[str, ...]]:
    """The claims about these declarations, from the ledger and from search, and what to notice."""
    notices: list[str] = []
    ledger = _ledger(surroundings, notices)
    claims = Claims()

    held, recalled = Claims(), set[int]()

    def keep(made: Iterable[Claim]) -> None:
        batch = list(made)
        held.add(batch)
        if ledger is not None:
            ledger.keep(batch)

    def recall(numbers: Iterable[int]) -> list[Claim]:
        if ledger is None:
            return []
        fresh = set(numbers) - recalled
        recalled.update(fresh)
        found = ledger.recall(fresh, run.rounds, held)
        held.add(found)
        return found

    judging = Judging(books, vocabulary())
    answers = Answers(claims, run, surroundings.draw, keep, surroundings.cores)

    def pursue() -> list[str]:
        return settle(
            declarations,
            answers,
            run,
            lambda facts, absent: in_use(judging, facts, absent),
            surroundings.progress,
            recall,
        )

    try:
        share_among_moduli((item.modulus for item in declarations), answers)
        refused = pursue()
        while share_among_rests(answers):
            refused += pursue()
    finally:
        if ledger is not None:
            ledger.close()
    return claims, (*notices, *refused, *strange_factors(declarations, claims, run))


def strange_factors(
    declarations: Iterable[Declaration], claims: Claims, run: RunValues
) -> Iterator[str]:
    """A notice for each set with declared factors that do not divide the order of the unit group.

    Nothing is said where the order is not known, as modulo a composite that is not factored.
    """
    for item in declarations:
        if not item.known_factors:
            continue
        order = Given(item, claims, run).outcome(parts.group_order).value
        wrong = [n for n in item.known_factors if order % n] if isinstance(order, int) else []
        if wrong:
            named = ", ".join(map(shorten, wrong[:3]))
            more = f" and {len(wrong) - 3} more" if len(wrong) > 3 else ""
            yield (
                f"{item.identity}: known_factors names what does not divide the group order: "
                f"{named}{more}."
            )


def _ledger(surroundings: Surroundings, notices: list[str]) -> Ledger | None:
    if surroundings.ledger is None:
        return None
    jobs = surroundings.cores.jobs
    return Ledger(surroundings.ledger, surroundings.draw, notices.append, jobs)


def reading_of(read: InputResult, notices: tuple[str, ...] = ()) -> Reading:
    """What was read as the record lists it; ``notices`` are those of the run, after those of the
    inputs."""
    return Reading(
        declarations=read.declarations,
        inputs=tuple({"path": item.path, "sha256": item.sha256} for item in read.inputs),
        errors=tuple(
            {
                "path": error.path,
                "line": error.line,
                "column": error.column,
                "message": error.message,
            }
            for error in read.errors
        ),
        skipped=tuple(
            {"path": item.path, "reason": item.reason}
            | ({} if item.line is None else {"line": item.line})
            for item in read.passed
        ),
        notices=(*map(str, read.notices), *notices),
    )
