"""Is a report what it says? Its claims checked one by one, its conclusions drawn again.

Nothing is searched for and nothing in the report is believed but the owner's words and the record
of search effort, which nobody can check. The verifier draws its own bases.
"""

from collections import Counter
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from auditor import __version__
from auditor.claims.base import Draw
from auditor.claims.collection import Claims, check_all, read_claim
from auditor.claims.prime import Prime
from auditor.concessions import ROLE, Concessions, conceded, recorded
from auditor.declaration import Declaration, Place
from auditor.encoding import shorten
from auditor.facts import vocabulary
from auditor.intake.reading import is_no_matter
from auditor.intake.record import declaration_from
from auditor.intake.tree import InputResult
from auditor.report.json_report import problems
from auditor.report.record import FORMAT, Reading, build
from auditor.review import census, reading_of
from auditor.rulebooks.loading import available, load_all
from auditor.rulebooks.rulebook import Rulebook, RulebookError
from auditor.run_values import RunValues
from auditor.search_extent import SEARCHES, shortfalls

_OTHER_FORMAT = f"not a report of format {FORMAT}, as review --json writes it; its format: {{}}"


@dataclass(frozen=True, slots=True)
class Verification:
    """``failures`` do not hold; ``unclear`` is what kept a part from being checked at all."""

    failures: tuple[str, ...]
    unclear: tuple[str, ...] = ()
    claims: int = 0

    @property
    def status(self) -> int:
        """Exit status: 1 something does not hold, 2 cannot tell, 0 all holds."""
        return 1 if self.failures else 2 if self.unclear else 0


def verify(
    report: Mapping[str, Any],
    draw: Draw,
    books: Iterable[str] = (),
    against: InputResult | None = None,
    concessions: Concessions | None = None,
) -> Verification:
    """Check a report that was read from JSON.

    ``books`` are files of rulebooks that are not shipped; ``against`` is what is in the inputs now.
    Without ``concessions`` those in the report are the word of whoever granted them: each must
    cover its finding and say rightly whether it has run out.
    """
    if report.get("report") != FORMAT:
        return Verification((), (_OTHER_FORMAT.format(shorten(report.get("report", "none"))),))
    if malformed := problems(report):
        return Verification(tuple(malformed))
    if repeated := list(_repeated(report)):
        return Verification(tuple(repeated))
    claims, failures = _claims(report)
    failed = check_all(claims, draw)
    failures += [f"claims.{claim_id}: {reason}" for claim_id, reason in failed.items()]
    failures += _too_few_rounds(claims, report["run"]["rounds"])
    if against is not None:
        failures += _differences_of_inputs(report, against)
    failures += _differences_of_concessions(report, concessions)
    if failures:
        return Verification(tuple(failures), claims=len(claims))
    if report["tool"]["version"] != __version__:
        version = report["tool"]["version"]
        return Verification(
            (), (f"written by version {version}, this is {__version__}",), len(claims)
        )
    try:
        granted = recorded(report) if concessions is None else concessions.granted
        again = conceded(_again(report, claims, books), granted)
    except RulebookError as error:
        return Verification((), (f"the rulebooks cannot be loaded: {error}",), len(claims))
    except (ValueError, KeyError, ArithmeticError) as error:
        return Verification((f"the report cannot be drawn again: {error}",), claims=len(claims))
    if other := _other_books(report, again):
        return Verification((), tuple(other), len(claims))
    failures = differences(again, report) or _shortfalls(report, claims, books)
    return Verification(tuple(failures), claims=len(claims))


def _repeated(report: Mapping[str, Any]) -> Iterator[str]:
    """What stands twice and may not: under the id of another set one could hide, or a file behind
    another of the same path."""
    names = {
        "parameter_sets": [item["id"] for item in report["parameter_sets"]],
        "inputs": [item["path"] for item in report["inputs"] if "role" not in item],
        "rulebooks": [item["name"] for item in report["rulebooks"]],
    }
    for member, listed in names.items():
        for name, count in Counter(listed).items():
            if count > 1:
                yield f"{member}: {shorten(name, 200)} stands {count} times"


def _claims(report: Mapping[str, Any]) -> tuple[Claims, list[str]]:
    claims, failures = Claims(), []
    for claim_id, record in report["claims"].items():
        try:
            claim = read_claim(record)
        except ValueError as error:
            failures.append(f"claims.{claim_id}: {error}")
            continue
        if claim.id != claim_id:
            failures.append(f"claims.{claim_id}: its id is not that of its content")
        claims.add([claim])
    return claims, failures


def _too_few_rounds(claims: Claims, rounds: int) -> list[str]:
    """Probable primes that were tested less than the run says; recalled ones may have had more."""
    return [
        f"claims.{claim.id}: {claim.rounds} rounds, and the run says {rounds}"
        for claim in claims
        if isinstance(claim, Prime) and claim.method == "baillie-psw" and claim.rounds < rounds
    ]


def _again(report: Mapping[str, Any], claims: Claims, books: Iterable[str]) -> dict[str, Any]:
    """The record that the declarations and claims in the report lead to."""
    declarations, values, rulebooks = _premises(report, books)
    reading = Reading(
        declarations,
        tuple(report["inputs"]),
        tuple(report["errors"]),
        tuple(report["skipped"]),
        tuple(report["notices"]),
    )
    return build(reading, claims, values, rulebooks, report["run"]["fail_on"])


Premises = tuple[tuple[Declaration, ...], RunValues, tuple[Rulebook, ...]]


def _premises(report: Mapping[str, Any], books: Iterable[str]) -> Premises:
    """What was declared, what the run was given, and the books in force."""
    declarations = tuple(_declaration(item) for item in report["parameter_sets"])
    run = report["run"]
    values = RunValues(
        as_of=run["as_of"],
        effort=run["effort"],
        factor_digits=run["factor_digits"],
        engine=run["engine"],
        census=census(declarations),
    )
    return declarations, values, _rulebooks([book["name"] for book in report["rulebooks"]], books)


def _shortfalls(report: Mapping[str, Any], claims: Claims, books: Iterable[str]) -> list[str]:
    """Searches that did not go as far as the run says, in a report whose open questions are known
    to follow. One whose answer was refused is told in a notice of the run."""
    asked = {question["id"] for item in report["parameter_sets"] for question in item["questions"]}
    if not any(name.startswith(f"{asks}-") for name in asked for asks in SEARCHES):
        return []
    declarations, values, rulebooks = _premises(report, books)
    return [
        f"run.effort: is {values.effort}, but: {question.about} {why}"
        for question, why in shortfalls(declarations, claims, values, rulebooks)
        if not any(line.startswith(question.about) for line in report["notices"])
    ]


def _rulebooks(names: Sequence[str], files: Iterable[str]) -> tuple[Rulebook, ...]:
    """The books of the report, in its order: shipped ones by name, others from the files given."""
    shipped = [name for name in names if name in available()]
    loaded = load_all([*shipped, *files], vocabulary())
    places = {name: place for place, name in enumerate(names)}
    return tuple(sorted(loaded, key=lambda book: places.get(book.name, len(names))))


def _declaration(record: Mapping[str, Any]) -> Declaration:
    return declaration_from(record["declaration"], _place(record["source"]))


def _place(source: Mapping[str, Any]) -> Place:
    return Place(source["path"], source["line"], source.get("column", 1))


def _other_books(report: Mapping[str, Any], again: Mapping[str, Any]) -> list[str]:
    now = {book["name"]: book["sha256"] for book in again["rulebooks"]}
    return [
        f"the rulebook {book['name']} is another one than the report was made with"
        for book in report["rulebooks"]
        if now.get(book["name"]) != book["sha256"]
    ]


def _differences_of_inputs(report: Mapping[str, Any], against: InputResult) -> list[str]:
    then = {item["path"]: item["sha256"] for item in report["inputs"] if "role" not in item}
    now = {item.path: item.sha256 for item in against.inputs}
    failures = [
        f"inputs: {path} is another file now" if path in now else f"inputs: {path} is not there"
        for path in sorted(then)
        if now.get(path) != then[path]
    ]
    failures += [f"inputs: {path} was not reviewed" for path in sorted(now.keys() - then.keys())]
    declared = {item.identity: (item.document(), item.place) for item in against.declarations}
    reviewed = {
        item["id"]: (item["declaration"], _place(item["source"]))
        for item in report["parameter_sets"]
    }
    failures += [
        f"parameter_sets: {identity} is not what the inputs declare"
        for identity in sorted(declared.keys() | reviewed.keys())
        if declared.get(identity) != reviewed.get(identity)
    ]
    return failures + _differences_of_reading(report, against)


def _differences_of_reading(report: Mapping[str, Any], against: InputResult) -> list[str]:
    """What is told otherwise of inputs that were not read, were passed over, or need a word; in
    whatever order they were named. Reports beside them, and how many files hold nothing, are no
    matter."""
    now = reading_of(against)
    failures = []
    for member, follow in (("errors", now.errors), ("skipped", now.skipped)):
        then, now_told = (
            [item for item in told if not is_no_matter(item.get("reason", ""))]
            for told in (report[member], follow)
        )
        failures += differences(_in_order(now_told), _in_order(then), member)
    untold = Counter(now.notices) - Counter(report["notices"])
    return failures + [f"notices: {shorten(line, 200)} is missing" for line in sorted(untold)]


def _in_order(records: Iterable[Mapping[str, Any]]) -> list[dict[str, Any]]:
    return sorted(map(dict, records), key=lambda record: repr(sorted(record.items())))


def _differences_of_concessions(
    report: Mapping[str, Any], concessions: Concessions | None
) -> list[str]:
    files = [item["sha256"] for item in report["inputs"] if item.get("role") == ROLE]
    if not files and recorded(report):
        return ["inputs: findings are conceded, and no file of concessions was read"]
    if concessions is not None and files != [concessions.file.sha256]:
        return [f"inputs: {concessions.file.path} is not the file of concessions that was read"]
    return []


def differences(expected: Any, found: Any, path: str = "") -> list[str]:
    """Where ``found`` departs from ``expected``, a line each, deepest place first named."""
    if type(expected) is not type(found) and not _both_numbers(expected, found):
        return [f"{path or 'report'}: is {_shown(found)}, follows as {_shown(expected)}"]
    if isinstance(expected, dict):
        lines = []
        for key in sorted(expected.keys() | found.keys()):
            if key not in found:
                lines.append(f"{path}.{key}".strip(".") + ": is missing")
            elif key not in expected:
                lines.append(f"{path}.{key}".strip(".") + ": does not follow from anything")
            else:
                lines += differences(expected[key], found[key], f"{path}.{key}".strip("."))
        return lines
    if isinstance(expected, list):
        if len(expected) != len(found):
            return [f"{path}: has {len(found)} entries, {len(expected)} follow"]
        pairs = zip(expected, found, strict=True)
        return [
            line for i, (a, b) in enumerate(pairs) for line in differences(a, b, f"{path}[{i}]")
        ]
    if expected != found:
        return [f"{path}: is {_shown(found)}, follows as {_shown(expected)}"]
    return []


def _both_numbers(*values: Any) -> bool:
    return all(isinstance(value, int | float) and not isinstance(value, bool) for value in values)


def _shown(value: Any) -> str:
    return shorten(value) if isinstance(value, str | int) else shorten(repr(value))
