"""What sets have in common, in words and in the documents."""

from typing import Any

from auditor.declaration import Declaration, Place
from auditor.report import html, markdown, terminal
from auditor.report.common_view import MOST_NAMED, common
from auditor.report.overview import overview
from tests.report.pages import Page
from tests.report.records import fixture

P, Q, R = 2**61 - 1, 2**89 - 1, 2**107 - 1


def _overview(moduli: list[int], *files: str) -> dict[str, Any]:
    sets = [Declaration(f"set {n}", Place(f"file {n}", 1), m, 2) for n, m in enumerate(moduli)]
    inputs = [{"path": path, "sha256": "1" * 64} for path in files]
    return overview(["hold"] * len(sets), sets, inputs)


def test_everything_in_common_is_told() -> None:
    """Factors first, then moduli by how many use them, copies, and equal files."""
    found = common(_overview([P * Q, P * R, Q, R, R, P * Q, P * Q], "a", "b"))
    assert [thing.kind for thing in found] == [
        *["factor"] * 3,
        *["modulus"] * 2,
        *["copies"] * 2,
        "files",
    ]
    factor, *_ = found
    assert factor.text.startswith(f"2 moduli have the factor {P:#x} (61 bits) in common")
    assert "file 0#set 0, file 5#set 5, file 6#set 6, file 1#set 1" in factor.text
    assert found[3].text.startswith("3 sets in 3 files use the modulus of 150 bits")
    assert found[-1].text == "2 files are equal byte for byte: a, b."


def test_sets_with_nothing_in_common() -> None:
    """Nothing is said."""
    assert common(_overview([P, Q, R], "a")) == ()


def test_many_names_are_counted() -> None:
    """The first are named."""
    (modulus, copies) = common(_overview([P] * 40))
    for thing in (modulus, copies):
        assert f"{40 - MOST_NAMED} more" in thing.text
        assert "file 0#set 0" in thing.text
        assert "file 39" not in thing.text


def test_the_documents_tell_it() -> None:
    """HTML and Markdown everything, the terminal the factors."""
    record = fixture("harbour")
    moduli = record["overview"]["moduli"]
    record["overview"]["shared_factors"] = [
        {"factor": 65537, "length": 17, "moduli": [entry["digest"] for entry in moduli[:2]]}
    ]
    record["overview"]["equal_files"] = [{"sha256": "1" * 64, "paths": ["one.pem", "two.pem"]}]
    factor = "2 moduli have the factor 65537 (17 bits) in common"
    page = Page.read(html.render(record)).words()
    ticket = markdown.render(record)
    assert factor in page
    assert factor in ticket
    assert "2 files are equal byte for byte: one.pem, two.pem." in page
    assert "- 2 files are equal byte for byte: `one.pem`, `two.pem`." in ticket
    for document in (page, ticket):
        assert "2 sets are equal in all values and in their use:" in document
    assert factor in " ".join(terminal.render(record).split())
