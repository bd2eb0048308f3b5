"""What is worth asking, as a record: what every document of ``ask`` is a rendering of."""

import re
from collections.abc import Iterable, Sequence
from typing import Any

from auditor import __version__
from auditor.advice.ask import ORDER, Outlook, declared_key
from auditor.advice.situations import CommonEffect, CommonSearch, Inquiry, Member, Situation
from auditor.intake.candidates import Waiting
from auditor.intake.inputs import InputError
from auditor.report import words
from auditor.report.record import TOOL
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues

FORMAT = 1

_WIDTH = re.compile(r"\d+(?=-bit exponent)")


def record(
    inquiry: Inquiry,
    run: RunValues,
    books: Sequence[Rulebook],
    waiting: Iterable[Waiting] = (),
    errors: Iterable[InputError] = (),
    notices: Iterable[str] = (),
) -> dict[str, Any]:
    """The inquiry in the shape of ``asking.schema.json``; equal arguments, equal record."""
    return {
        "asking": FORMAT,
        "tool": {"name": TOOL, "version": __version__},
        "run": {"as_of": run.as_of, "effort": run.effort, "factor_digits": run.factor_digits},
        "rulebooks": [{"name": book.name, "sha256": book.sha256} for book in books],
        "sets": sum(len(item.sets) for item in inquiry.situations),
        "situations": [situation_record(item) for item in inquiry.situations],
        "searches": [_search(item) for item in inquiry.searches],
        "candidates": [_candidate(item) for item in waiting],
        "errors": [
            {"path": e.path, "line": e.line, "column": e.column, "message": e.message}
            for e in errors
        ],
        "notices": list(notices),
    }


def situation_record(item: Situation) -> dict[str, Any]:
    """One situation in the shape of the record."""
    positions = [
        member.asked.outlook.position for member in item.members for _ in member.declarations
    ]
    return {
        "usage": list(_usage(item)),
        "open": list(item.open_keys),
        "sets": len(item.sets),
        "positions": {position: positions.count(position) for position in ORDER},
        "members": [_member(member) for member in item.members],
        "effects": [_effect(effect, item) for effect in item.effects],
    }


def _usage(item: Situation) -> tuple[str, ...]:
    """The usage in words, with the range of widths where files state different ones."""
    documents = [member.declarations[0].document() for member in item.members]
    said = [words.usage(document) for document in documents]
    return tuple(_spanned(parts) for parts in zip(*said, strict=True))


def _spanned(parts: Sequence[str]) -> str:
    """One clause for several that differ in the width of an exponent alone."""
    widths = [int(width) for part in parts for width in _WIDTH.findall(part)]
    if not widths or min(widths) == max(widths):
        return parts[0]
    return _WIDTH.sub(f"{min(widths)}- to {max(widths)}", parts[0])


def _member(member: Member) -> dict[str, Any]:
    first, outlook = member.declarations[0], member.asked.outlook
    return {
        "digest": first.digest(),
        "modulus_length": first.modulus.bit_length(),
        "position": outlook.position,
        "bits": outlook.bits,
        "loose": outlook.loose,
        "places": [
            {"path": item.place.path, "line": item.place.line, "name": item.name}
            for item in member.declarations
        ],
    }


def _effect(effect: CommonEffect, situation: Situation) -> dict[str, Any]:
    first = effect.effects[0]
    declaration = situation.members[effect.members[0]].declarations[0]
    return {
        "answers": list(effect.words),
        "keys": sorted({declared_key(answer, declaration) for answer in first.answers}),
        "position": {"before": first.before.position, "after": first.after.position},
        "bits": {
            "before": _range([item.before for item in effect.effects]),
            "after": _range([item.after for item in effect.effects]),
        },
        "members": list(effect.members),
    }


def _range(outlooks: Sequence[Outlook]) -> dict[str, Any] | None:
    """The least and the most work; None where it is not known for each."""
    bits = [outlook.bits for outlook in outlooks if outlook.bits is not None]
    if len(bits) < len(outlooks):
        return None
    loose = any(outlook.loose for outlook in outlooks)
    return {"least": min(bits), "most": max(bits), "loose": loose}


def _search(item: CommonSearch) -> dict[str, Any]:
    level = item.searches[0].level
    before = [search.risk_before for search in item.searches]
    after = [search.risk_after for search in item.searches]
    return {
        "questions": [search.question.id for search in item.searches],
        "digits": level.digits,
        "b1": level.b1,
        "b2": level.b2,
        "curves": level.curves,
        "core_seconds": item.seconds,
        "window": list(item.searches[0].window),
        "risk": {
            "before": {"least": min(before), "most": max(before)},
            "after": {"least": min(after), "most": max(after)},
        },
        "sets": [declaration.identity for declaration in item.sets],
    }


def _candidate(item: Waiting) -> dict[str, Any]:
    number = item.modulus
    return {
        "path": number.path,
        "line": number.line,
        "name": number.name,
        "length": number.value.bit_length(),
        "group": item.group,
        "generator": item.generator,
        "subgroup_order": item.subgroup_order,
        "unique": item.unique,
    }
