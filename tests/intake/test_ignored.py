"""What git leaves out of a tree, and what it does not."""

import os
import subprocess
from pathlib import Path

import pytest

from auditor.intake import ignored
from auditor.intake.ignored import ignored_below
from auditor.intake.tree import read_inputs
from tests.intake.der_writer import integers, pem

DH = pem("DH PARAMETERS", integers(2**521 - 1, 5))


def _git(*arguments: str) -> None:
    subprocess.run(("git", *arguments), check=True, capture_output=True)


def _write(*names: str, content: str = DH) -> None:
    for name in names:
        Path(name).parent.mkdir(parents=True, exist_ok=True)
        Path(name).write_text(content)


def _sets(*paths: str) -> set[str]:
    return {item.place.path for item in read_inputs(paths or (".",)).declarations}


@pytest.fixture
def repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A repository with ignored directories and files, one of them tracked nevertheless."""
    monkeypatch.chdir(tmp_path)
    _git("init", "--quiet")
    _write(".gitignore", content="build/\n*.tmp\n")
    _write("a.pem", "new.pem", "a.tmp", "build/b.pem", "build/kept.pem", "x/c.tmp", "x/d.pem")
    _git("add", "--force", "a.pem", "build/kept.pem")
    return tmp_path


def test_untracked_and_ignored(repository: Path) -> None:
    """Both at once: new files are read, and so are tracked ones in an ignored directory."""
    result = read_inputs(["."])
    assert _sets() == {"a.pem", "new.pem", "build/kept.pem", "x/d.pem"}
    assert [(item.path, item.reason) for item in result.passed] == [
        ("a.tmp", "untracked, and ignored by git"),
        ("build/b.pem", "untracked, and ignored by git"),
        ("x/c.tmp", "untracked, and ignored by git"),
        (".", "1 other file holds nothing that is read"),
    ]
    assert result.skipped == ("a.tmp", "build/b.pem", "x/c.tmp")


def test_a_directory_is_named_as_a_whole(repository: Path) -> None:
    """Nothing below an ignored directory is listed one by one."""
    _git("rm", "--quiet", "--cached", "build/kept.pem")
    assert "build" in read_inputs(["."]).skipped
    assert _sets() == {"a.pem", "new.pem", "x/d.pem"}


def test_what_is_named_is_read(repository: Path) -> None:
    """A file or a directory that is given is meant, ignored or not."""
    _git("rm", "--quiet", "--cached", "build/kept.pem")
    assert _sets("build", "a.tmp") == {"build/b.pem", "build/kept.pem", "a.tmp"}
    assert _sets("x") == {"x/d.pem"}


def test_repositories_inside(repository: Path) -> None:
    """A repository below has rules of its own."""
    _write("inner/e.pem", "inner/f.key")
    _write("inner/.gitignore", content="*.key\n")
    _git("init", "--quiet", "inner")
    assert "inner/e.pem" in _sets()
    assert "inner/f.key" in read_inputs(["."]).skipped


def test_rules_of_the_machine_do_not_count(
    repository: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Neither the user's excludes nor the clone's change what is reviewed."""
    _write("home/git/ignore", ".git/info/exclude", content="*.pem\n")
    monkeypatch.setenv("XDG_CONFIG_HOME", str(repository / "home"))
    monkeypatch.setenv("GIT_DIR", str(repository / "nowhere"))
    assert _sets() == {"a.pem", "new.pem", "build/kept.pem", "x/d.pem"}


def test_a_repository_cannot_run_programs(repository: Path) -> None:
    """The file monitor is a command of the repository's choice; it is not called."""
    hook = repository / "hook"
    hook.write_text(f"#!/bin/sh\ntouch {repository}/called\n")
    hook.chmod(0o755)
    _git("config", "core.fsmonitor", str(hook))
    _sets()
    assert not (repository / "called").exists()
    _git("status")
    assert (repository / "called").exists()


@pytest.mark.parametrize("command", [("no-such-program",), ("false",)])
def test_without_git_everything_is_read(
    command: tuple[str, ...], repository: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A missing or refusing git leaves nothing out."""
    monkeypatch.setattr(ignored, "_LIST", command)
    assert ignored_below(".") == frozenset()
    assert _sets() >= {"a.tmp", "build/b.pem", "x/c.tmp"}


def test_names_that_are_no_text(repository: Path) -> None:
    """An ignored name that is not UTF-8 is ignored all the same."""
    with open(b"\xff.tmp", "w") as file:
        file.write(DH)
    assert os.fsdecode(b"\xff.tmp") in ignored_below(".")
