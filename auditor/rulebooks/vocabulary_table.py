"""The vocabulary as a table for the manual of rule writers."""

from auditor.facts.base import FactType
from auditor.rulebooks.conditions import Vocabulary

_BOUNDS = {
    "at_least": "may rise with more {}",
    "at_most": "may fall with more {}",
    "seen": "may come true with more {}",
    None: "",
}


def vocabulary_table(vocabulary: Vocabulary) -> str:
    """A Markdown table of every fact, sorted by name, with kind, meaning and possible values."""
    lines = ["| fact | kind | meaning |", "| --- | --- | --- |"]
    lines += [_row(vocabulary[name]) for name in sorted(vocabulary)]
    return "\n".join(lines) + "\n"


def _row(word: FactType) -> str:
    values = ", ".join(f"`{value}`" for value in word.values)
    cause = "of the owner's word" if word.namespace == "usage" else "search"
    bound = _BOUNDS[word.bound].format(cause)
    parts = (word.meaning, f"one of {values}" if values else "", bound)
    meaning = "; ".join(part for part in parts if part).replace("|", "\\|").replace("\n", " ")
    return f"| `{word.name}` | {word.kind} | {meaning} |"
