"""Concessions: recorded, expiring permissions to release a set despite a finding.

A concession (the word is that of ISO 9000) is granted for the finding of one rule about one set, as
it was on that day: the same requirement and outcome, a grade and values that are not worse. It
changes what counts for the
exit status and nothing else: the finding, its grading and the position stay what they are. One that
has run out stays visible beside its finding; one that does not fit is a notice of the run.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Any, Literal

from auditor.declaration import Place
from auditor.encoding import plain, shorten
from auditor.facts.base import FactType
from auditor.intake.inputs import (
    InputError,
    InputFile,
    Unreadable,
    decode,
    input_file,
    read_path,
)
from auditor.rulebooks.conditions import Vocabulary
from auditor.rulebooks.example_values import stated
from auditor.rulebooks.rulebook import GRADES
from auditor.schema_check import did_you_mean, quoted, schema_problems, sentence, shipped_schema
from auditor.strict_yaml import KeyPath, Loaded, Mark, YamlError, read, shown_path

SCHEMA = "concessions.schema.json"
ROLE = "concessions"
"""How the inputs of a report mark the file."""

CALENDAR = frozenset({"run.year"})
"""Facts of the day of the review: time passes under a concession too, until it runs out."""

Worse = Literal["lower", "higher"]
Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Concession:
    """One permission: rule, digest of the set, requirement, grade, outcome and values shown as of
    the grant; why, by which role, and its last day in ISO 8601."""

    rule: str
    set_digest: str
    requirement: str
    grade: str
    outcome: str
    values: Mapping[str, Any]
    reason: str
    by: str
    until: str
    place: Place

    def member(self, as_of: str) -> dict[str, Any]:
        """What the report says of it beside its finding."""
        return {
            "reason": self.reason,
            "by": self.by,
            "until": self.until,
            "in_force": as_of <= self.until,
            "grade": self.grade,
            "requirement": self.requirement,
            "granted": dict(self.values),
        }


@dataclass(frozen=True, slots=True)
class Concessions:
    """The concessions of one file, in its order, at most one for a rule and a set."""

    file: InputFile
    granted: tuple[Concession, ...]


class ConcessionsError(ValueError):
    """A file that cannot be used; ``problems`` holds every reason found, in text order."""

    def __init__(self, problems: Iterable[InputError]) -> None:
        self.problems = tuple(sorted(dict.fromkeys(problems)))
        super().__init__("\n".join(str(problem) for problem in self.problems))


def load(path: str | Path, vocabulary: Vocabulary) -> Concessions:
    """The concessions in a file; ConcessionsError with all its problems, each with its place."""
    try:
        data = read_path(Path(path))
    except Unreadable as error:
        raise ConcessionsError([InputError(str(path), 1, 1, str(error))]) from None
    return parse(data, str(path), vocabulary)


def parse(data: bytes, path: str, vocabulary: Vocabulary) -> Concessions:
    """The concessions in the bytes of a file; ConcessionsError with all its problems."""
    text = decode(path, data)
    if isinstance(text, InputError):
        raise ConcessionsError([text])
    try:
        loaded = read(text)
    except YamlError as error:
        raise ConcessionsError(
            InputError(path, problem.line, problem.column, problem.message)
            for problem in error.problems
        ) from None
    problems = _problems(loaded, path, vocabulary)
    if problems:
        raise ConcessionsError(problems)
    granted = tuple(
        _concession(record, path, loaded.marks["granted", at])
        for at, record in enumerate(loaded.value["granted"])
    )
    return Concessions(input_file(path, data), granted)


def _concession(record: Record, path: str, mark: Mark) -> Concession:
    return Concession(
        rule=record["rule"],
        set_digest=record["set"],
        requirement=" ".join(record["requirement"].split()),
        grade=record["grade"],
        outcome=record["outcome"],
        values=plain(record["values"]),
        reason=record["reason"].strip(),
        by=record["by"].strip(),
        until=record["until"],
        place=Place(path, mark.line, mark.column),
    )


def _problems(loaded: Loaded, path: str, vocabulary: Vocabulary) -> list[InputError]:
    found = [*loaded.problems, *schema_problems(loaded, shipped_schema(SCHEMA), _advice)]
    problems = [InputError(path, item.line, item.column, item.message) for item in found]
    wrong = {item.path for item in found}
    records = loaded.value.get("granted") if isinstance(loaded.value, dict) else None
    first: dict[tuple[str, str], int] = {}
    for at, record in enumerate(records if isinstance(records, list) else []):
        if not isinstance(record, dict):
            continue
        here = _Entry(loaded, path, ("granted", at), wrong)
        problems += here.date_problems(record)
        problems += here.value_problems(record, vocabulary)
        problems += here.repeated(record, first)
    return problems


@dataclass(frozen=True, slots=True)
class _Entry:
    """One entry of a file that is read: what no schema can judge."""

    loaded: Loaded
    path: str
    base: KeyPath
    wrong: set[KeyPath]

    def problem(self, inner: KeyPath, message: str) -> InputError:
        path = (*self.base, *inner)
        marks = self.loaded.marks
        mark = self.loaded.key_marks.get(path) if inner[:1] == ("values",) else marks.get(path)
        mark = mark or marks[self.base]
        return InputError(self.path, mark.line, mark.column, f"{shown_path(path)}: {message}")

    def date_problems(self, record: Record) -> Iterable[InputError]:
        """A day that is not in the calendar."""
        until = record.get("until")
        if isinstance(until, str) and (*self.base, "until") not in self.wrong:
            try:
                date.fromisoformat(until)
            except ValueError:
                message = sentence("", f"found {quoted(until)}", "a day of the calendar")
                yield self.problem(("until",), message)

    def value_problems(self, record: Record, vocabulary: Vocabulary) -> Iterable[InputError]:
        """Names that are no facts, and values of another kind than their fact."""
        values = record.get("values")
        for name, value in values.items() if isinstance(values, dict) else ():
            if any(path[:4] == (*self.base, "values", name) for path in self.wrong):
                continue
            if name not in vocabulary:
                suggestion = did_you_mean(name, sorted(vocabulary))
                message = sentence("", f"unknown fact {quoted(name)}", suggestion=suggestion)
                yield self.problem(("values", name), message)
            elif message := _misfit(vocabulary[name], value):
                yield self.problem(("values", name), message)

    def repeated(self, record: Record, first: dict[tuple[str, str], int]) -> Iterable[InputError]:
        """A second entry for the same rule and set."""
        key = (record.get("rule"), record.get("set"))
        line = self.loaded.marks[self.base].line
        if isinstance(key[0], str) and isinstance(key[1], str):
            earlier = first.setdefault((key[0], key[1]), line)
            if earlier != line:
                message = f"a second concession for {quoted(key[0])} and this set; expected one"
                yield self.problem((), f"{message}, the first is on line {earlier}")


def _misfit(word: FactType, value: Any) -> str:
    """What is wrong with a value of that fact; empty for nothing."""
    if word.kind == "exhibit":
        return "" if isinstance(value, list) else f"found {shorten(value)}; expected a list"
    found = stated(word, value)
    return found if isinstance(found, str) else ""


def _advice(path: KeyPath, value: Any) -> str:
    if path and path[-1] in ("rule", "set", "by", "reason") and isinstance(value, int | float):
        return "put it in quotes"
    return ""


def worse_when(name: str) -> Worse | None:
    """In which direction a value of that fact gets worse; None where that is not known.

    Work that an attack costs: lower. What leaks, what is required, who shares, how likely a factor
    was missed: higher; a defect that is seen is worse than one that is not.
    """
    family, _, rest = name.partition(".")
    if name == "strength.required_bits":
        return "higher"
    if family == "strength" and rest.endswith(("_bits", "_bits_at_most")):
        return "lower"
    if name == "scheme.forgery_bits_at_most":
        return "lower"
    if "leak" in rest or name in ("modulus.occurrences", "group.missed_factor_risk"):
        return "higher"
    return "higher" if rest in ("special_form_seen", "distinguisher_seen", "forgery_seen") else None


def worsened(granted: Record, shown: Record, *, certainly: bool = False) -> tuple[str, ...]:
    """What is worse, or differs where nobody knows what worse is, since the grant; a clause each.

    A value that appears or is gone was not granted either. With ``certainly`` only what is there
    both times and known to be worse counts.
    """
    names = granted.keys() | shown.keys()
    if certainly:
        names = {name for name in granted.keys() & shown.keys() if worse_when(name)}
    return tuple(
        f"{name} was {_shown(granted, name)} and is {_shown(shown, name)}"
        for name in sorted(names - CALENDAR)
        if name not in granted or name not in shown or _is_worse(name, granted[name], shown[name])
    )


def _shown(values: Record, name: str) -> str:
    if name not in values:
        return "not shown"
    value = values[name]
    return ("no", "yes")[value] if isinstance(value, bool) else shorten(value)


def _is_worse(name: str, before: Any, now: Any) -> bool:
    direction = worse_when(name)
    if direction is None or not (_comparable(before) and _comparable(now)):
        return bool(before != now or isinstance(before, bool) != isinstance(now, bool))
    return bool(now < before if direction == "lower" else now > before)


def _comparable(value: Any) -> bool:
    return isinstance(value, int | float)


def conceded(record: Record, granted: Sequence[Concession]) -> dict[str, Any]:
    """The record with each concession beside the findings that it covers.

    A member of findings is all that differs; nothing else of a set is touched.
    """
    as_of = record["run"]["as_of"]
    by_finding = {(item.set_digest, item.rule): item for item in granted}
    required = _requirements(record)

    def finding(digest: str, shown: Record) -> dict[str, Any]:
        item = by_finding.get((digest, shown["rule"]))
        covers = item is not None and not _mismatch(item, shown, required)
        return {**shown, "concession": item.member(as_of) if item and covers else None}

    sets = [
        {**each, "findings": [finding(each["digest"], shown) for shown in each["findings"]]}
        for each in record["parameter_sets"]
    ]
    return {**record, "parameter_sets": sets}


def _requirements(record: Record) -> dict[str, str]:
    """What each rule in force requires, its thresholds put in."""
    return {
        rule: text["requirement"]
        for book in record["rulebooks"]
        for rule, text in book["rules"].items()
    }


def _mismatch(item: Concession, finding: Record, required: Mapping[str, str]) -> str:
    """Why a concession does not cover the finding of its rule about its set; empty if it does."""
    if finding["outcome"] != item.outcome:
        return f"it was granted for {item.outcome}, the rule is {finding['outcome']}"
    if GRADES.index(finding["grade"]) < GRADES.index(item.grade):
        return (
            f"it was granted for a finding graded {item.grade}, this is graded {finding['grade']}"
        )
    if (now := required[item.rule]) != item.requirement:
        then = shorten(item.requirement, 200)
        return f"it was granted for the requirement {then}, which is {shorten(now, 200)} now"
    return "; ".join(worsened(item.values, finding["values"]))


def notices(record: Record, granted: Iterable[Concession]) -> tuple[str, ...]:
    """What the reader of the run must know of the concessions: those that have run out, that fit
    nothing or do not fit any more, and how many findings are conceded."""
    as_of = record["run"]["as_of"]
    sets: dict[str, Record] = {}
    for each in record["parameter_sets"]:
        sets.setdefault(each["digest"], each)
    required = _requirements(record)
    found = [
        f"{item.place.path}:{item.place.line}:{item.place.column}: the concession for {item.rule} "
        f"{told}."
        for item in granted
        if (told := _told(item, sets.get(item.set_digest), as_of, required))
    ]
    in_force = sum(
        is_conceded(shown) for each in record["parameter_sets"] for shown in each["findings"]
    )
    if in_force:
        what = "finding is" if in_force == 1 else "findings are"
        found.append(f"{in_force} {what} conceded: that moves no position, only the exit status.")
    return tuple(found)


def _told(
    item: Concession, parameter_set: Record | None, as_of: str, required: Mapping[str, str]
) -> str:
    if parameter_set is None:
        return f"is unused: no set has the digest {item.set_digest[:16]}…"
    name = shorten(parameter_set["name"])
    for finding in parameter_set["findings"]:
        if finding["rule"] == item.rule:
            if why := _mismatch(item, finding, required):
                return f"does not cover {name}: {why}"
            return (
                f"has run out for {name}: it held until {item.until}" if item.until < as_of else ""
            )
    outcome = parameter_set["outcomes"].get(item.rule)
    why = f"the rule is {outcome}" if outcome else "no rulebook in force has that rule"
    return f"is unused for {name}: {why}"


def is_conceded(finding: Record) -> bool:
    """Whether a concession is in force for the finding."""
    return bool(finding["concession"] and finding["concession"]["in_force"])


FAIL_ON = ("hold", "open", "conditions")
"""The positions that may make a run fail, worst first."""


def fails(parameter_set: Record, fail_on: str) -> bool:
    """Whether the set counts for exit status 1: a finding that leads to a position at or above
    ``fail_on`` is not conceded, or no requirement applied."""
    if fail_on not in FAIL_ON:
        return False
    counted = FAIL_ON[: FAIL_ON.index(fail_on) + 1]
    if parameter_set["position"] == "open" and parameter_set["decided_by"] is None:
        # Nothing was judged, so there is nothing to concede.
        return "open" in counted
    return any(
        leads_to(finding) in counted and not is_conceded(finding)
        for finding in parameter_set["findings"]
    )


def leads_to(finding: Record) -> str:
    """The position that the finding alone would lead to."""
    if finding["grade"] == "observation":
        return "no objection"
    if finding["grade"] == "minor":
        return "conditions"
    return "hold" if finding["outcome"] == "nonconforming" else "open"


def recorded(report: Record) -> tuple[Concession, ...]:
    """The concessions that a report names beside its findings, as the owner's word.

    They are applied again, so that one in the report holds only where it covers its finding and
    says rightly whether it has run out.
    """
    found: dict[tuple[str, str], Concession] = {}
    for each in report["parameter_sets"]:
        for finding in each["findings"]:
            member = finding["concession"]
            if member is not None:
                found.setdefault(
                    (each["digest"], finding["rule"]),
                    Concession(
                        rule=finding["rule"],
                        set_digest=each["digest"],
                        requirement=member["requirement"],
                        grade=member["grade"],
                        outcome=finding["outcome"],
                        values=member.get("granted", finding["values"]),
                        reason=member["reason"],
                        by=member["by"],
                        until=member["until"],
                        place=Place("", 1),
                    ),
                )
    return tuple(found.values())
