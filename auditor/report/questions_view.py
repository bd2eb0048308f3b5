"""Every open question once, with all findings that wait for it."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.report.sheet_view import Sheet

Record = Mapping[str, Any]
Waiting = list[tuple[int, str, tuple[str, ...]]]

OWNERS = "key:"
OWNERS_WORD = (
    "the owner's word, in the declaration or in a usage file (auditor ask --draft-usage drafts one)"
)


@dataclass(frozen=True, slots=True)
class Question:
    """Something open, and everything that waits for it.

    ``key`` is a question's id, or ``key:NAME`` where declared keys would answer: those that the
    same sheets wait for are one question, their names joined by a comma.
    """

    key: str
    about: str
    cost: str
    effects: tuple[str, ...]
    waiting: tuple[tuple[int, str, tuple[str, ...]], ...]
    """(number of the sheet, name of the set, words and titles of the findings)."""

    @property
    def is_owners(self) -> bool:
        """Whether the owner's word would answer it."""
        return self.key.startswith(OWNERS)


def questions(sheets: Iterable[Sheet]) -> tuple[Question, ...]:
    """What is open: search's before the owner's, the question that most waits for first."""
    asked: dict[str, Record] = {}
    effects: dict[str, dict[str, None]] = {}
    waiting: dict[str, Waiting] = {}
    for sheet in sheets:
        for question in sheet.record["questions"]:
            asked[question["id"]] = question
            effects.setdefault(question["id"], {})[question["effect"]] = None
            waiting.setdefault(question["id"], [])
        for key, titles in _waiting(sheet).items():
            waiting.setdefault(key, []).append((sheet.number, sheet.name, titles))
    waiting = _grouped(waiting)
    found = [
        Question(key, *_wording(key, asked.get(key)), tuple(effects.get(key, ())), tuple(who))
        for key, who in waiting.items()
    ]
    return tuple(sorted(found, key=lambda item: (item.is_owners, -len(item.waiting), item.key)))


def _grouped(waiting: Mapping[str, Waiting]) -> dict[str, Waiting]:
    """The owner's keys that the same sheets wait for as one, in the order of their names."""
    grouped: dict[str, Waiting] = {}
    alike: dict[tuple[int, ...], list[str]] = {}
    for key, who in waiting.items():
        if key.startswith(OWNERS):
            alike.setdefault(tuple(number for number, _, _ in who), []).append(key)
        else:
            grouped[key] = who
    for keys in alike.values():
        names = ", ".join(sorted(key.removeprefix(OWNERS) for key in keys))
        each = zip(*(waiting[key] for key in keys), strict=True)
        grouped[OWNERS + names] = [
            (found[0][0], found[0][1], tuple(dict.fromkeys(t for _, _, ts in found for t in ts)))
            for found in each
        ]
    return grouped


def _waiting(sheet: Sheet) -> dict[str, tuple[str, ...]]:
    titles: dict[str, list[str]] = {}
    for finding in sheet.findings:
        for key in finding.waits_for:
            titles.setdefault(key, []).append(f"{finding.words}: {finding.title}")
    return {key: tuple(found) for key, found in titles.items()}


def _wording(key: str, question: Record | None) -> tuple[str, str]:
    """The question in words, and what an answer costs."""
    if key.startswith(OWNERS):
        return f"The owner has not declared {key.removeprefix(OWNERS)}.", OWNERS_WORD
    if question is None:
        return f"{key.rsplit('-', 1)[0].replace('-', ' ')} ({key})", "not known"
    if question["cost"] is None:
        return question["about"], "no search is known to answer it"
    return question["about"], f"{question['cost']:,.0f} {question['unit']}"
