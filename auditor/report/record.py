"""The complete record of a review: what every document is a rendering of.

A pure function of what was read, the claims, the run values and the rulebooks, in the shape that
``report.schema.json`` describes. The verifier builds it again and compares.
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from auditor import __version__
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.report.overview import overview
from auditor.report.set_record import criterion_record, judged_sets
from auditor.rulebooks.rulebook import Rule, Rulebook
from auditor.run_values import RunValues

FORMAT = 1
TOOL = "group-parameter auditor"

CAUTIONS = (
    "This is a technical review of parameters, not a certification of a system.",
    "Published guidance, local policy and the judgement of qualified cryptographers have the last "
    "word.",
    "Finding nothing proves nothing: what was not examined is listed, and what was looked for in "
    "vain may still be there.",
    "Work factors come from published cost models and are compared as if one step of each cost the "
    "same; they are no forecast of time or money.",
    "Every group here falls to a large quantum computer, whatever its size.",
)


@dataclass(frozen=True, slots=True)
class Reading:
    """What was read and what could not be, as the record lists it."""

    declarations: tuple[Declaration, ...]
    inputs: tuple[Mapping[str, Any], ...] = ()
    errors: tuple[Mapping[str, Any], ...] = ()
    skipped: tuple[Mapping[str, Any], ...] = ()
    notices: tuple[str, ...] = ()


def build(
    reading: Reading,
    claims: Claims,
    run: RunValues,
    books: Sequence[Rulebook],
    fail_on: str,
) -> dict[str, Any]:
    """The record; equal arguments, equal record."""
    alike = {item: item.nameless for item in reading.declarations}
    judged, consulted = judged_sets(dict.fromkeys(alike.values()), claims, run, books)
    places = _places(reading.declarations)
    sets = [{**_declared(item, places), **judged[alike[item]]} for item in reading.declarations]
    return {
        "report": FORMAT,
        "tool": {"name": TOOL, "version": __version__},
        "run": _run(run, fail_on),
        "inputs": [dict(item) for item in reading.inputs],
        "rulebooks": [_rulebook(book) for book in books],
        "complete": not reading.errors,
        "overview": overview(
            [item["position"] for item in sets], reading.declarations, reading.inputs
        ),
        "parameter_sets": sets,
        "claims": {claim.id: claim.record() for claim in claims.support(sorted(consulted))},
        "notices": list(reading.notices),
        "skipped": [dict(item) for item in reading.skipped],
        "errors": [dict(item) for item in reading.errors],
        "cautions": list(CAUTIONS),
    }


def _run(run: RunValues, fail_on: str) -> dict[str, Any]:
    return {
        "as_of": run.as_of,
        "effort": run.effort,
        "factor_digits": run.factor_digits,
        "engine": run.engine,
        "rounds": run.rounds,
        "fail_on": fail_on,
    }


def _places(declarations: Iterable[Declaration]) -> dict[str, list[dict[str, Any]]]:
    places: dict[str, list[dict[str, Any]]] = {}
    for declaration in declarations:
        place = {**_place(declaration), "name": declaration.name}
        places.setdefault(declaration.digest(), []).append(place)
    return places


def _place(declaration: Declaration) -> dict[str, Any]:
    place = declaration.place
    return {"path": place.path, "line": place.line, "column": place.column}


def _declared(
    declaration: Declaration, places: Mapping[str, list[dict[str, Any]]]
) -> dict[str, Any]:
    """The part of a set's record that says where and how it was declared."""
    digest = declaration.digest()
    return {
        "id": declaration.identity,
        "digest": digest,
        "name": declaration.name,
        "source": _place(declaration),
        "places": places[digest],
        "declaration": declaration.document(),
    }


def _rulebook(book: Rulebook) -> dict[str, Any]:
    record: dict[str, Any] = {
        "name": book.name,
        "title": book.title,
        "sha256": book.sha256,
        "notes": list(book.notes),
        "documents": {
            key: {"title": document.title, "date": document.date}
            for key, document in sorted(book.documents.items())
        },
        "rules": {rule.id: _rule(rule) for rule in book.rules},
    }
    if book.extends is not None:
        record["extends"] = book.extends.name
    return record


def _rule(rule: Rule) -> dict[str, Any]:
    return {
        "title": rule.title,
        "defect": rule.defect,
        "grade": rule.grade,
        "requires": rule.requires.source,
        "requirement": rule.requires.text,
        "why": rule.why,
        "criterion": criterion_record(rule.criterion),
        "cwe": list(rule.cwe),
        "references": list(rule.references),
    }
