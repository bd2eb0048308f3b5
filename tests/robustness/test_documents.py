"""Malformed declaration documents: the place and the message of every problem, and what is left."""

from pathlib import Path

import pytest

from auditor.intake.tree import read_inputs
from auditor.strict_yaml import load

HERE = Path(__file__).parent
EXPECTED = load((HERE / "expected.yaml").read_text("utf-8")).value
DOCUMENTS = sorted((HERE / "documents").glob("*.yaml"))


def test_every_document_has_an_expectation() -> None:
    """No case is forgotten on either side."""
    assert sorted(path.stem for path in DOCUMENTS) == sorted(EXPECTED)


@pytest.mark.parametrize("path", DOCUMENTS, ids=lambda path: path.stem)
def test_malformed_documents(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Exactly the expected errors at the expected places; sound sets are still returned."""
    monkeypatch.chdir(path.parent)
    expected = EXPECTED[path.stem]
    result = read_inputs([path.name])
    assert [declaration.name for declaration in result.declarations] == expected["sound"]
    assert all(error.path == path.name for error in result.errors)
    found = [f"{error.line}:{error.column} {error.message}" for error in result.errors]
    assert len(found) == len(expected["errors"])
    for text, pieces in zip(found, expected["errors"], strict=True):
        start = 0
        for piece in pieces.split(" … "):
            start = text.index(piece, start) + len(piece)


def test_messages_are_short_and_on_one_line(monkeypatch: pytest.MonkeyPatch) -> None:
    """Whatever a document holds, no message prints it raw or at length."""
    monkeypatch.chdir(HERE / "documents")
    errors = read_inputs([path.name for path in DOCUMENTS]).errors
    assert len(errors) > 90
    assert all(len(error.message) < 400 and error.message.isprintable() for error in errors)
