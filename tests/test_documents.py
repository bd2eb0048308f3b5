"""What README, DEVELOPERS and the manual show is run: a document that lies fails here."""

import re
import shlex
from pathlib import Path

import pytest

from auditor.cli import main
from auditor.intake.document import read_document
from auditor.run_values import EFFORTS
from tests.test_imports import LINE

ROOT = Path(__file__).parents[1]


def blocks(name: str, language: str) -> list[str]:
    """The fenced blocks of that language in a document."""
    text = (ROOT / name).read_text(encoding="utf-8")
    return re.findall(rf"```{language}\n(.*?)```", text, re.DOTALL)


def test_the_declaration_in_the_readme_is_one() -> None:
    """It is read without an error."""
    (document,) = blocks("README.md", "yaml")
    result = read_document(document, "README.md", None)

    assert result.errors == ()
    assert [declaration.name for declaration in result.declarations] == ["quay-link handshake"]


def test_the_first_command_reviews_the_samples() -> None:
    """It installs this project, and its options are options of the command."""
    first, second = blocks("README.md", "sh")
    setup, install, command = (part.strip() for part in first.split("&&"))

    assert setup == "python3 -m venv .venv"
    assert install == ".venv/bin/pip install --quiet ."
    words = shlex.split(command)
    assert words[:3] == [".venv/bin/auditor", "review", "samples/"]
    options = {option for parameter in main.commands["review"].params for option in parameter.opts}
    assert {word for word in words if word.startswith("--")} <= options
    assert second.strip() == "bash tests/run"
    assert (ROOT / "tests" / "run").exists()


def test_every_command_named_exists() -> None:
    """In the list of commands and in the text."""
    (listing,) = blocks("README.md", "text")
    named = {line.split()[1] for line in listing.splitlines()}
    text = (ROOT / "README.md").read_text(encoding="utf-8")

    assert named == set(main.commands)
    assert all(effort in text for effort in EFFORTS)


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md", "rules/README.md"])
def test_links_and_paths_lead_somewhere(name: str) -> None:
    """Links to files, and paths in code marks that look like ours."""
    text = (ROOT / name).read_text(encoding="utf-8")
    linked = [link for link in re.findall(r"\]\(([^)#]+)\)", text) if "://" not in link]
    marked = re.findall(r"`((?:auditor|tests|rules|reports|samples)/[\w./-]*)`", text)

    for path in linked:
        assert ((ROOT / name).parent / path).exists(), path
    for path in marked:
        assert (ROOT / path).exists(), path


def test_the_developers_page_knows_every_room() -> None:
    """Each part of the package that is a room of its own is named, or belongs to one that is."""
    text = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    rooms = {room for rooms in LINE for room in rooms}
    packages = {room for room in rooms if (ROOT / "auditor" / room).is_dir()}

    assert all(f"auditor/{package}/" in text for package in packages)
