"""The manual of rule writers: its books load and run, and its table is the vocabulary."""

import re

from auditor.data_files import data
from auditor.facts import vocabulary
from auditor.facts.base import FactType
from auditor.rulebooks.examples import failures
from auditor.rulebooks.loading import load
from auditor.rulebooks.vocabulary_table import vocabulary_table
from tests.vocabulary_of_the_contract import VOCABULARY

MANUAL = (data("rules") / "README.md").read_text("utf-8")


def test_the_books_of_the_manual_work(tmp_path):
    """Each book shown in the manual loads, and its examples behave."""
    books = re.findall(r"```yaml\n(.*?)```", MANUAL, re.DOTALL)
    names = []
    for text in books:
        path = tmp_path / "book.yaml"
        path.write_text(text, "utf-8")
        book = load(path, VOCABULARY)
        names.append(book.name)
        assert failures(book, VOCABULARY) == ()

    assert names == ["house", "house-strength"]


def test_facts_keep_the_kinds_of_the_contract():
    """A fact that rules may name has the kind and the words that the contract gives it."""
    real = vocabulary()
    shared = sorted(real.keys() & VOCABULARY.keys())

    assert len(shared) > 60
    assert [(name, real[name].kind, real[name].values) for name in shared] == [
        (name, VOCABULARY[name].kind, VOCABULARY[name].values) for name in shared
    ]


def test_the_table_has_a_place():
    """The generated table stands between its two markers."""
    assert re.search(r"<!-- vocabulary: begin -->.*<!-- vocabulary: end -->", MANUAL, re.DOTALL)


def test_the_table_of_facts():
    """The table has a row for every fact, with kind, values, and how a bound may move."""
    words = {
        word.name: word
        for word in (
            FactType("usage.purpose", "text", "as declared", ("a|b", "c")),
            FactType("group.rest_at_most", "int", "what is left"),
        )
    }

    assert vocabulary_table(words) == (
        "| fact | kind | meaning |\n"
        "| --- | --- | --- |\n"
        "| `group.rest_at_most` | int | what is left; may fall with more search |\n"
        "| `usage.purpose` | text | as declared; one of `a\\|b`, `c` |\n"
    )
    assert vocabulary_table(VOCABULARY).count("\n") == len(VOCABULARY) + 2
