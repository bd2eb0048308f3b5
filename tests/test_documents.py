"""What README, DEVELOPERS and the manual show is run: a document that lies fails here."""

import re
import shlex
from pathlib import Path

import click
import pytest
import yaml

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
    document, *_ = blocks("README.md", "yaml")
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


def reviewing(command: str) -> click.Context:
    """The review that a command line asks for, its options read and nothing run."""
    program, name, *words = shlex.split(command)
    assert (program, name) == ("auditor", "review")
    with main.commands["review"].make_context("review", words) as context:
        return context


def test_the_recipes_for_continuous_integration_call_a_review(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """They are YAML, and their command is one that the program takes."""
    _, actions, pipeline = map(yaml.safe_load, blocks("README.md", "yaml"))
    steps = [step["run"] for step in actions["jobs"]["group-parameters"]["steps"] if "run" in step]
    (here,) = [step for step in steps if step.startswith("auditor")]
    (there,) = [step for step in pipeline["group-parameters"]["script"] if "auditor r" in step]
    (tmp_path / "policy").mkdir()
    (tmp_path / "tree").mkdir()

    monkeypatch.chdir(tmp_path)
    assert reviewing(here).params["policy_from"] == "policy"
    monkeypatch.chdir(tmp_path / "tree")
    assert reviewing(there).params["policy_from"] == "../policy"


def test_the_commit_hook_calls_a_review() -> None:
    """Of the whole tree, at an effort that does not keep anybody waiting."""
    (hook,) = yaml.safe_load((ROOT / ".pre-commit-hooks.yaml").read_text(encoding="utf-8"))
    params = reviewing(hook["entry"]).params

    assert (params["paths"], params["effort"], params["fail_on"]) == ((".",), "quick", "hold")
    assert hook["pass_filenames"] is False


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
