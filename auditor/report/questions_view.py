"""Every open question once, with all findings that wait for it."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.report.sheet_view import Sheet

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Question:
    """Something open, and everything that waits for it.

    ``key`` is a question's id, or ``key:NAME`` where a declared key would answer.
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
        return self.key.startswith("key:")


def questions(sheets: Iterable[Sheet]) -> tuple[Question, ...]:
    """What is open: search's before the owner's, the question that most waits for first."""
    asked: dict[str, Record] = {}
    effects: dict[str, dict[str, None]] = {}
    waiting: dict[str, list[tuple[int, str, tuple[str, ...]]]] = {}
    for sheet in sheets:
        for question in sheet.record["questions"]:
            asked[question["id"]] = question
            effects.setdefault(question["id"], {})[question["effect"]] = None
            waiting.setdefault(question["id"], [])
        for key, titles in _waiting(sheet).items():
            waiting.setdefault(key, []).append((sheet.number, sheet.name, titles))
    found = [
        Question(key, *_wording(key, asked.get(key)), tuple(effects.get(key, ())), tuple(who))
        for key, who in waiting.items()
    ]
    return tuple(sorted(found, key=lambda item: (item.is_owners, -len(item.waiting), item.key)))


def _waiting(sheet: Sheet) -> dict[str, tuple[str, ...]]:
    titles: dict[str, list[str]] = {}
    for finding in sheet.findings:
        for key in finding.waits_for:
            titles.setdefault(key, []).append(f"{finding.words}: {finding.title}")
    return {key: tuple(found) for key, found in titles.items()}


def _wording(key: str, question: Record | None) -> tuple[str, str]:
    """The question in words, and what an answer costs."""
    if key.startswith("key:"):
        return f"The owner has not declared {key[4:]}.", "the owner's word"
    if question is None:
        return f"{key.rsplit('-', 1)[0].replace('-', ' ')} ({key})", "not known"
    if question["cost"] is None:
        return question["about"], "no search is known to answer it"
    return question["about"], f"{question['cost']:,.0f} {question['unit']}"
