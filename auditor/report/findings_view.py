"""Findings as documents show them: equal ones merged, worst first, and what each waits for."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from auditor.report.words import CONFIDENCE_MEANING, GRADES, REASON_MEANING, outcome, plain_value

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Criterion:
    """One rule that a merged finding stands for, and where its requirement comes from."""

    rule: str
    title: str
    source: str
    why: str


@dataclass(frozen=True, slots=True)
class Remedy:
    """What would remove a finding, what that breaks, and each declared key that it changes, as it
    then stands in the declaration."""

    text: str
    breaks: tuple[str, ...]
    patch: tuple[str, ...]
    position: str | None = None


@dataclass(frozen=True, slots=True)
class Concession:
    """A permission to release despite a finding."""

    text: str
    in_force: bool


@dataclass(frozen=True, slots=True)
class MergedFinding:
    """Findings of one set that are equal in defect, outcome and grade."""

    defect: str
    outcome: str
    grade: str
    title: str
    statements: tuple[str, ...]
    criteria: tuple[Criterion, ...]
    values: tuple[tuple[str, str], ...]
    missing: tuple[tuple[str, str], ...]
    remedies: tuple[Remedy, ...]
    cautions: tuple[str, ...]
    concessions: tuple[Concession, ...]
    waits_for: tuple[str, ...]
    """Ids of open questions, and declared keys as ``key:NAME``."""

    @property
    def heading(self) -> str:
        """The title as a sentence; empty where it is open, since that would assert it."""
        if self.outcome == "undetermined":
            return ""
        return self.title if self.title.endswith((".", "?", "!")) else f"{self.title}."

    @property
    def words(self) -> str:
        """Grade and outcome in the words of an audit."""
        return outcome(self.grade, self.outcome)


class Merging:
    """Merges the findings of sets; ``rules`` are those of the books, by id.

    Remedies that sets share are put in words once. They are told by their identity: the sets must
    stay as they are while this is in use.
    """

    def __init__(self, rules: Mapping[str, Record]) -> None:
        self.titles = {rule: text["title"] for rule, text in rules.items()}
        self._why = {rule: text["why"] for rule, text in rules.items()}
        self._remedies: dict[int, Remedy] = {}

    def findings(self, parameter_set: Record) -> tuple[MergedFinding, ...]:
        """The findings of a set, worst first."""
        groups: dict[tuple[str, str, str], list[Record]] = {}
        for finding in sorted(parameter_set["findings"], key=_weight(parameter_set["decided_by"])):
            key = finding["defect"], finding["outcome"], finding["grade"]
            groups.setdefault(key, []).append(finding)
        return tuple(self._merged(group, parameter_set) for group in groups.values())

    def _merged(self, group: list[Record], parameter_set: Record) -> MergedFinding:
        first = group[0]
        values = {name: value for finding in group for name, value in finding["values"].items()}
        missing = _once([name for finding in group for name in finding["missing"]])
        return MergedFinding(
            defect=first["defect"],
            outcome=first["outcome"],
            grade=first["grade"],
            title=first["title"],
            statements=_once([finding["statement"] for finding in group]),
            criteria=_once([self._criterion(finding) for finding in group]),
            values=tuple([(name, plain_value(value)) for name, value in values.items()]),
            missing=tuple([(name, _why_missing(name, parameter_set)) for name in missing]),
            remedies=_once([self._remedy(f["remedy"]) for f in group if f["remedy"]]),
            cautions=_once([caution for finding in group for caution in finding["cautions"]]),
            concessions=_once([_concession(f["concession"]) for f in group if f["concession"]]),
            waits_for=_waits_for(first["outcome"], missing, parameter_set),
        )

    def _criterion(self, finding: Record) -> Criterion:
        criterion, rule = finding["criterion"], finding["rule"]
        source = criterion["title"], criterion["clause"], criterion["word"], criterion["confidence"]
        return _criterion(rule, finding["title"], self._why.get(rule, ""), *source)

    def _remedy(self, record: Record) -> Remedy:
        known = self._remedies.get(id(record))
        if known is None:
            known = self._remedies[id(record)] = _remedy(record)
        return known


def _weight(decided_by: str | None) -> Any:
    def weight(finding: Record) -> tuple[bool, int, bool]:
        decides = finding["rule"] == decided_by
        return (
            not decides,
            GRADES.index(finding["grade"]),
            finding["outcome"] == "undetermined",
        )

    return weight


def _once(items: Iterable[Any]) -> tuple[Any, ...]:
    """Each different item once, in order of first appearance."""
    return tuple(dict.fromkeys(items))


@lru_cache(maxsize=4096)
def _criterion(
    rule: str, title: str, why: str, document: str, clause: str, word: str, confidence: str
) -> Criterion:
    parts = [document, clause, f"“{word}”", CONFIDENCE_MEANING[confidence]]
    return Criterion(rule, title, ", ".join(part for part in parts if part), why)


def _remedy(record: Record) -> Remedy:
    """A remedy of the record with its patch in one line a key."""
    patch = record["patch"] or {}
    return Remedy(
        record["text"],
        tuple(record["breaks"]),
        tuple(_entry(key, value) for key, value in patch.items()),
        record.get("position"),
    )


def _entry(key: str, value: Any) -> str:
    return f"delete {key}" if value is None else f"{key}: {_flow(value)}"


def _flow(value: Any) -> str:
    """A value as a declaration writes it on one line, long integers shortened."""
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{key}: {_flow(item)}" for key, item in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(map(_flow, value)) + "]"
    return plain_value(value)


def _concession(record: Record) -> Concession:
    state = "in force" if record["in_force"] else "not in force"
    text = f"{state}, until {record['until']}, granted by {record['by']}: {record['reason']}"
    return Concession(text, record["in_force"])


def _why_missing(name: str, parameter_set: Record) -> str:
    """Why a fact is absent and what the owner could declare; or where it stands and may move."""
    if name in parameter_set["facts"]:
        return f"{plain_value(parameter_set['facts'][name]['value'])}, and may still move"
    if name not in parameter_set["absent"]:
        return "not established"
    record = parameter_set["absent"][name]
    reason = REASON_MEANING[record["reason"]]
    keys = ", ".join(record["keys"])
    return f"{reason}; could be declared by: {keys}" if keys else reason


def _waits_for(result: str, missing: tuple[str, ...], parameter_set: Record) -> tuple[str, ...]:
    """Questions named with the absence, or that settle the fact; keys where only they would do."""
    if result != "undetermined":
        return ()
    absent = parameter_set["absent"]
    reasons = [absent[name] for name in missing if name in absent]
    named = [question for reason in reasons for question in reason["questions"]]
    loose = {name for name in missing if name not in absent}
    settling = [q["id"] for q in parameter_set["questions"] if loose & set(q["settles"])]
    keys = _once(
        f"key:{key}"
        for reason in reasons
        if reason["reason"] == "undeclared" or not reason["questions"]
        for key in reason["keys"]
    )
    return _once([*named, *settling]) + keys
