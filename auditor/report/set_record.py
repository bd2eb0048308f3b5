"""What the record says of parameter sets: facts, routes, exposures, findings with remedies, open
questions; all but where and how they are declared."""

from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Any, TypeVar

from auditor.advice.exposure import Exposure, Exposures
from auditor.advice.remedies import Remedies, Remedy
from auditor.advice.trials import Moves
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.encoding import plain
from auditor.facts import Established, established, vocabulary
from auditor.facts.base import Absent, Fact
from auditor.facts.given import Given, Shared
from auditor.inquiry.settle import open_questions
from auditor.questions import Asks, Question
from auditor.routes.base import Work, floor_bits
from auditor.routes.standard_tables import modulus_strength
from auditor.rulebooks.findings import Finding
from auditor.rulebooks.judging import Judgement, Judging
from auditor.rulebooks.rulebook import Criterion, Rulebook
from auditor.run_values import RunValues
from auditor.search.plan import LEVELS

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


def judged_sets(
    declarations: Iterable[Declaration],
    claims: Claims,
    run: RunValues,
    books: Sequence[Rulebook],
) -> tuple[dict[Declaration, dict[str, Any]], set[str]]:
    """The records of sets, and the ids of all claims consulted for them.

    Sets are taken by modulus: what is worked out for one is of use to the others of its modulus,
    and forgotten with them.
    """
    judging = Judging(books, vocabulary())
    moves = Moves(run, judging)
    judged: dict[Declaration, dict[str, Any]] = {}
    consulted: set[str] = set()
    for group in _by_modulus(declarations):
        found, ids = _judged_together(group, claims, run, judging.afresh(), moves)
        judged |= found
        consulted |= ids
    return judged, consulted


def _by_modulus(declarations: Iterable[Declaration]) -> Iterable[list[Declaration]]:
    groups: dict[int, list[Declaration]] = {}
    for item in declarations:
        groups.setdefault(item.modulus, []).append(item)
    return groups.values()


def _judged_together(
    declarations: Iterable[Declaration],
    claims: Claims,
    run: RunValues,
    judging: Judging,
    moves: Moves,
) -> tuple[dict[Declaration, dict[str, Any]], set[str]]:
    """The same for sets of one modulus."""
    shared, once = Shared(run), Once()
    alike = sorted(declarations, key=lambda item: item.generator)
    given = Given(alike[0], claims, run, shared)
    known: dict[Declaration, Established] = {}
    for item in alike:
        given = given.changed(item)
        known[item] = established(item, given)
    exposures = Exposures(given)
    remedies = Remedies(claims, judging, known.values(), shared, moves)
    judged = {
        item: _judged(found, judging, exposures, remedies, once) for item, found in known.items()
    }
    consulted = {claim_id for found in known.values() for claim_id in found.consulted}
    return judged, consulted.union(*(exposures.consulted(item) for item in known))


def in_use(judging: Judging, facts: Mapping[str, Fact], absent: Mapping[str, Absent]) -> list[str]:
    """The facts whose open questions are worth search: those that an outcome waits for, and the
    work factors, which every report shows."""
    strengths = [name for name in (*facts, *absent) if name.startswith("strength.")]
    return sorted({*judging.facts_in_use(facts, absent), *strengths})


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
        "exposure": [once(row, _exposure) for row in exposures.of(known.declaration)],
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


def _exposure(row: Exposure) -> dict[str, Any]:
    return {
        "check": row.check,
        "use": row.use,
        "width": row.width,
        "bits": row.bits,
        "bound": row.bound,
        "route": row.route,
        "attacker": row.attacker,
        "declared": row.declared,
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


def criterion_record(criterion: Criterion) -> dict[str, Any]:
    """Where a requirement comes from."""
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
        "criterion": criterion_record(finding.criterion),
        "cautions": list(finding.cautions),
        "concession": None,
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
