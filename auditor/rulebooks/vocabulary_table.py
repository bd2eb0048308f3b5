"""The vocabulary as a table for the manual of rule writers."""

from auditor.facts.base import FactType
from auditor.rulebooks.conditions import Vocabulary

_BOUNDS = {
    "at_least": "may rise with more search",
    "at_most": "may fall with more search",
    "seen": "may come true with more search",
    None: "",
}


def vocabulary_table(vocabulary: Vocabulary) -> str:
    """A Markdown table of every fact, sorted by name, with kind, meaning and possible values."""
    lines = ["| fact | kind | meaning |", "| --- | --- | --- |"]
    lines += [_row(vocabulary[name]) for name in sorted(vocabulary)]
    return "\n".join(lines) + "\n"


def _row(word: FactType) -> str:
    values = ", ".join(f"`{value}`" for value in word.values)
    parts = (word.meaning, f"one of {values}" if values else "", _BOUNDS[word.bound])
    meaning = "; ".join(part for part in parts if part).replace("|", "\\|").replace("\n", " ")
    return f"| `{word.name}` | {word.kind} | {meaning} |"
