"""The complete record of a review: what every document is a rendering of.

A pure function of what was read, the claims, the run values and the rulebooks, in the shape that
``report.schema.json`` describes. The verifier builds it again and compares.
"""

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import asdict, dataclass
from typing import Any, TypeVar

from auditor import __version__
from auditor.advice.exposure import Exposures
from auditor.advice.remedies import Remedies, Remedy
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.encoding import plain
from auditor.facts import Established, establish, vocabulary
from auditor.facts.base import Absent, Fact
from auditor.facts.given import Shared
from auditor.inquiry.settle import open_questions
from auditor.questions import Asks, Question
from auditor.report.overview import overview
from auditor.routes.base import Work, floor_bits
from auditor.routes.standard_tables import modulus_strength
from auditor.rulebooks.findings import Finding
from auditor.rulebooks.judging import Judgement, Judging
from auditor.rulebooks.rulebook import Criterion, Rule, Rulebook
from auditor.run_values import RunValues
from auditor.search.plan import LEVELS

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


Thing = TypeVar("Thing")


class Once:
    """Writes each thing once, so that sets which share it share its part of the record too."""

    def __init__(self) -> None:
        self._written: dict[int, tuple[object, dict[str, Any]]] = {}

    def __call__(self, thing: Thing, write: Callable[[Thing], dict[str, Any]]) -> dict[str, Any]:
        """What ``write`` makes of the thing; it is kept beside it, so that no other is taken for
        it."""
        if id(thing) not in self._written:
            self._written[id(thing)] = thing, write(thing)
        return self._written[id(thing)][1]


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
    judging, shared, once = Judging(books, vocabulary()), Shared(claims, run), Once()
    alike = {item: item.nameless for item in reading.declarations}
    known = {item: establish(item, claims, run, shared) for item in dict.fromkeys(alike.values())}
    exposures, remedies = Exposures(claims, run), Remedies(claims, run, judging, known.values())
    judged = {
        item: _judged(found, judging, exposures, remedies, once) for item, found in known.items()
    }
    places = _places(reading.declarations)
    sets = [{**_declared(item, places), **judged[alike[item]]} for item in reading.declarations]
    consulted = {claim_id for item in known.values() for claim_id in item.consulted}
    consulted |= {id_ for item in known for id_ in exposures.consulted(item)}
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


def in_use(judging: Judging, facts: Mapping[str, Fact], absent: Mapping[str, Absent]) -> list[str]:
    """The facts whose open questions are worth search: those that an outcome waits for, and the
    work factors, which every report shows."""
    strengths = [name for name in (*facts, *absent) if name.startswith("strength.")]
    return sorted({*judging.facts_in_use(facts, absent), *strengths})


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


def _judged(
    known: Established,
    judging: Judging,
    exposures: Exposures,
    remedies: Remedies,
    once: Once,
) -> dict[str, Any]:
    """The part that equal sets have in common, wherever they are declared."""
    judgement = judging.judge(known.facts, known.absent)
    remedy = remedies.of(known, judgement)
    return {
        "facts": {name: once(fact, _fact) for name, fact in known.facts.items()},
        "absent": {name: once(item, _absence) for name, item in known.absent.items()},
        "routes": [_route(work, known) for work in known.routes],
        "exposure": [once(row, asdict) for row in exposures.of(known.declaration)],
        "properties": [
            {"name": item.name, "statement": item.statement, "source": item.source}
            for item in known.properties
        ],
        "position": judgement.position,
        "decided_by": judgement.decided_by.rule if judgement.decided_by else None,
        "outcomes": dict(judgement.outcomes),
        "books_left_out": [
            {"name": left.name, "why": left.why, "missing": sorted(left.missing)}
            for left in judgement.books_left_out
        ],
        "findings": [
            {**once(finding, _finding), "remedy": once(remedy[finding.rule], Remedy.record)}
            for finding in judgement.findings
        ],
        "questions": _questions(known, judgement, judging),
    }


def _fact(fact: Fact) -> dict[str, Any]:
    return {
        "value": plain(fact.value),
        "standing": fact.standing.value,
        "tight": fact.tight,
        "claims": list(fact.claims),
        "rests_on": list(fact.rests_on),
    }


def _absence(absent: Absent) -> dict[str, Any]:
    questions = sorted(question.id for question in absent.questions)
    return {"reason": absent.reason, "keys": sorted(absent.keys), "questions": questions}


def _route(work: Work, known: Established) -> dict[str, Any]:
    return {
        "name": work.route,
        "attacker": work.attacker,
        "bits": floor_bits(work.bits),
        "bound": work.bound,
        "unit": work.unit.value,
        "model": work.model.name,
        "nature": work.model.certainty,
        "source": work.source,
        "explanation": work.explanation,
        "counted": True,
        "table": _table(work, known),
        "details": [{"label": label, "value": plain(value)} for label, value in work.details],
    }


TABLES = "NIST SP 800-57 Part 1 Rev. 5, Table 2; SP 800-56A Rev. 3, Appendix D"


def _table(work: Work, known: Established) -> dict[str, Any] | None:
    """What the published tables give for the same thing as this route."""
    match work.route:
        case "number_field_sieve":
            bits = modulus_strength(known.declaration.modulus.bit_length())
        case "square_root" | "pohlig_hellman" if work.bound == "exact":
            bits = int(known.facts["generator.largest_prime_length"].value) // 2
        case "short_exponent":
            bits = int(known.facts["usage.exponent_width"].value) // 2
        case _:
            return None
    return {"bits": bits, "source": TABLES}


def _criterion(criterion: Criterion) -> dict[str, Any]:
    return {
        "document": criterion.document.key,
        "title": criterion.document.title,
        "clause": criterion.clause,
        "word": criterion.word,
        "confidence": criterion.confidence,
    }


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "rule": finding.rule,
        "title": finding.title,
        "defect": finding.defect,
        "grade": finding.grade,
        "outcome": finding.outcome,
        "statement": finding.statement,
        "values": {name: plain(fact.value) for name, fact in finding.values.items()},
        "missing": sorted(finding.missing),
        "criterion": _criterion(finding.criterion),
        "cautions": list(finding.cautions),
        "concession": None,
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
        "criterion": _criterion(rule.criterion),
        "cwe": list(rule.cwe),
        "references": list(rule.references),
    }


def _questions(known: Established, judgement: Judgement, judging: Judging) -> list[dict[str, Any]]:
    names = in_use(judging, known.facts, known.absent)
    asked = open_questions(known, names)
    waiting = {q for finding in judgement.findings for q in finding.questions}
    records = []
    for question in sorted({*asked, *waiting}, key=lambda item: item.id):
        cost, unit = _cost(question)
        moved = [name for name, fact in known.facts.items() if question in fact.questions]
        waits = [name for name, absent in known.absent.items() if question in absent.questions]
        records.append(
            {
                "id": question.id,
                "about": question.about,
                "settles": sorted([*moved, *waits]),
                "cost": cost,
                "unit": unit,
                "effect": _effect(question, judgement),
            }
        )
    return records


def _cost(question: Question) -> tuple[float | None, str]:
    """The expected work of the next step of search."""
    match question.asks:
        case Asks.FACTORIZATION | Asks.MODULUS_FACTORS:
            level = LEVELS[2]
            return level.curves, f"elliptic curves (--factor-digits {level.digits})"
        case Asks.LEAST_OFFSET:
            return question.integers[-1], "offsets to exclude"
        case Asks.SPECIAL_FORM:
            return 1, "search for a special form"
        case _:
            return 1, "primality test or exponentiation"


def _effect(question: Question, judgement: Judgement) -> str:
    waiting = [finding for finding in judgement.findings if question in finding.questions]
    if not waiting:
        return "An answer could lower a work factor; no finding waits for it."
    titles = "; ".join(dict.fromkeys(finding.title for finding in waiting))
    decides = judgement.decided_by is not None and judgement.decided_by in waiting
    ending = ", which decides the position" if decides else ""
    return f"An answer could settle: {titles}{ending}."
