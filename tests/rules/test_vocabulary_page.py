"""The manual lists the vocabulary that the program has."""

from tests.rules.vocabulary_page import MANUAL, with_vocabulary


def test_the_manual_lists_every_fact() -> None:
    """As generated; ``python -m tests.rules.vocabulary_page`` writes it anew."""
    text = MANUAL.read_text(encoding="utf-8")

    assert text == with_vocabulary(text)
