"""The vocabulary in the manual: ``python -m tests.rules.vocabulary_page`` writes it anew."""

from pathlib import Path

from auditor.facts import vocabulary
from auditor.rulebooks.vocabulary_table import vocabulary_table

MANUAL = Path(__file__).parents[2] / "rules" / "README.md"
BEGIN, END = "<!-- vocabulary: begin -->\n", "<!-- vocabulary: end -->"


def with_vocabulary(text: str) -> str:
    """The manual with the table of all facts between its markers."""
    before, rest = text.split(BEGIN, 1)
    _, after = rest.split(END, 1)
    return f"{before}{BEGIN}{vocabulary_table(vocabulary())}{END}{after}"


if __name__ == "__main__":
    MANUAL.write_text(with_vocabulary(MANUAL.read_text(encoding="utf-8")), encoding="utf-8")
