"""A tree as the command sees it: exit status, completeness, and a reason for what is left out."""

import json
import os
import secrets
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any, NamedTuple

import pytest
from click.testing import CliRunner

from auditor import cli
from auditor.intake import inputs, tree
from auditor.intake.tree import read_inputs
from auditor.verify import verify
from tests.intake.der_writer import RSA, element, integers, pem, public_key

SOUND = "auditor: 1\nparameter_sets:\n  - {name: sound, modulus: {group: ffdhe2048}}\n"


class Outcome(NamedTuple):
    """What a run of the command came to."""

    status: int
    record: dict[str, Any]
    out: str
    err: str

    @property
    def places(self) -> list[str]:
        """The paths of the errors."""
        return [error["path"] for error in self.record["errors"]]


Review = Callable[..., Outcome]


@pytest.fixture
def review(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Review:
    """A quick review of the directory 't', which is empty, in a directory of its own."""
    monkeypatch.chdir(tmp_path)
    Path("t").mkdir()

    def run(*options: str) -> Outcome:
        words = ["auditor", "review", "t", "--effort", "quick", "--no-ledger", "--fail-on", "never"]
        monkeypatch.setattr(sys, "argv", [*words, "--json", "r.json", *options])
        capsys.readouterr()
        status = cli.run()
        return Outcome(status, json.loads(Path("r.json").read_text()), *capsys.readouterr())

    return run


def write(name: str, content: str | bytes) -> None:
    """A file below 't'."""
    path = Path("t", name)
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_bytes(content.encode() if isinstance(content, str) else content)


def rsa_key() -> str:
    """A public key that carries no group."""
    return pem("PUBLIC KEY", public_key(RSA, element(0x05, b""), 65537))


NOTHING = {
    "no file": {},
    "prose": {"a.md": "Use ffdhe2048.\n", "b.txt": "modulus"},
    "other documents": {"a.yaml": "services: []\n", "b.json": "[]"},
    "keys of another kind": {"a.pem": rsa_key()},
    "a number nobody has named": {"a.c": f"char dh_p[] = {{{', '.join(['0xfb'] * 64)}}};\n"},
    "usage alone": {
        "usage.yaml": "auditor-usage: 1\nuses: [{path: '*.pem', required_strength: 128}]\n"
    },
    "a negotiated group": {"sshd_config": "KexAlgorithms diffie-hellman-group-exchange-sha256\n"},
}


@pytest.mark.parametrize("name", NOTHING)
def test_a_tree_in_which_nothing_is_recognised(review: Review, name: str) -> None:
    """Status 2 and the way to accept it; accepted it is a complete review of nothing."""
    for path, content in NOTHING[name].items():
        write(path, content)
    refused, accepted = review(), review("--allow-empty")

    assert (refused.status, accepted.status) == (2, 0)
    assert "--allow-empty" in refused.err
    assert accepted.err == ""
    assert accepted.record["parameter_sets"] == accepted.record["errors"] == []
    assert accepted.record["complete"] is True


def test_candidates_are_named_where_nothing_else_is(review: Review) -> None:
    """On the console and beside the status: a few by file and line, the others counted."""
    for name in "abcde":
        write(f"{name}.c", f"\nchar dh_p[] = {{{', '.join(['0xfb'] * 64)}}};\n")
    outcome = review()
    assert outcome.status == 2
    assert "5 candidates for a usage file: t/a.c:2, t/b.c:2, t/c.c:2 and 2 more;" in outcome.err
    assert outcome.out.count("candidate     t/") == 3
    assert "candidate     t/a.c:2: 'dh_p': 512 bits\n" in outcome.out
    assert "candidate     and 2 more\n" in outcome.out
    assert "5 candidates wait for a usage file to be reviewed.\n" in outcome.out
    write("usage.yaml", "auditor-usage: 1\nuses: [{path: a.c, modulus: dh_p, generator: 2}]\n")
    for name in "bcde":
        Path(f"t/{name}.c").unlink()
    assert "candidate" not in review().out


def test_a_broken_file_is_not_excused_by_allow_empty(review: Review) -> None:
    """Nothing recognised and something not read: status 2 whatever is allowed."""
    write("a.pem", "-----BEGIN DH PARAMETERS-----\nMAA\n-----END DH PARAMETERS-----\n")
    outcome = review("--allow-empty")

    assert (outcome.status, outcome.record["complete"], outcome.places) == (2, False, ["t/a.pem"])


def _dangling(monkeypatch: pytest.MonkeyPatch) -> str:
    Path("t/gone.yaml").symlink_to("nowhere.yaml")
    return "t/gone.yaml"


def _deep(monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.setattr(tree, "MAX_DEPTH", 3)
    write("a/b/c/d/e.yaml", SOUND)
    return "t/a/b/c"


def _many(monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.setattr(tree, "MAX_FILES", 2)
    for name in ("x/1", "x/2", "x/3"):
        write(name, "")
    return "t/x"


def _closed(monkeypatch: pytest.MonkeyPatch) -> str:
    write("closed/a.yaml", SOUND)
    listing = os.scandir

    def refuse(path: str) -> object:
        if str(path).endswith("closed"):
            raise PermissionError(13, "Permission denied", path)
        return listing(path)

    monkeypatch.setattr(os, "scandir", refuse)
    return "t/closed"


def _large(name: str, start: str) -> Callable[[pytest.MonkeyPatch], str]:
    def prepare(monkeypatch: pytest.MonkeyPatch) -> str:
        write(name, start + "#" * (inputs.MAX_BYTES + 1))
        return f"t/{name}"

    return prepare


def _broken(name: str, content: str | bytes) -> Callable[[pytest.MonkeyPatch], str]:
    def prepare(monkeypatch: pytest.MonkeyPatch) -> str:
        write(name, content)
        return f"t/{name}"

    return prepare


RECORD = f"20250102030405 2 6 100 126 5 {2**127 - 1:x}\n"

UNREAD: dict[str, Callable[[pytest.MonkeyPatch], str]] = {
    "a link to nowhere that is called like a document": _dangling,
    "a directory too deep": _deep,
    "more files than are looked at": _many,
    "a directory that cannot be listed": _closed,
    "a document too large": _large("a.yaml", "auditor: 1\n"),
    "PEM too large": _large("a.pem", ""),
    "DER too large": _large("a.der", "0"),
    "primes too large": _large("primes", RECORD),
    "a document that is no YAML": _broken("a.yaml", "auditor: 1\nx: [\n"),
    "a document with a set that cannot be read": _broken("a.yaml", SOUND + "  - {name: 1}\n"),
    "a damaged block": _broken("a.pem", pem("DH PARAMETERS", integers(23, 5)[:-1])),
    "damaged DER": _broken("a.der", integers(2**127 - 1, 5)[:-1]),
    "a damaged record": _broken("moduli", RECORD + "20250102030405 2 6\n"),
    "a usage file that is wrong": _broken("u.yaml", "auditor-usage: 1\nuses: [{pth: x}]\n"),
}


@pytest.mark.parametrize("name", UNREAD)
def test_what_cannot_be_read_makes_the_review_incomplete(
    review: Review, name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Status 2, the place of the error, and the rest is reviewed."""
    write("0.yaml", SOUND)
    path = UNREAD[name](monkeypatch)
    outcome = review()

    assert (outcome.status, outcome.record["complete"]) == (2, False)
    assert set(outcome.places) == {path}
    assert all(error["line"] >= 1 <= error["column"] for error in outcome.record["errors"])
    assert f"{path}:" in outcome.err
    assert "t/0.yaml#sound" in {item["id"] for item in outcome.record["parameter_sets"]}


def test_everything_that_is_skipped_has_a_reason(review: Review, tmp_path: Path) -> None:
    """Links out of the tree, what git ignores, what is no regular file, too large a text, other
    documents, keys and numbers that are not reviewed: in the record and in the documents."""
    subprocess.run(["git", "init", "-q", "t"], check=True)
    write(".gitignore", "*.local.yaml\nbuild/\n")
    write("mine.local.yaml", SOUND)
    write("build/made.yaml", SOUND)
    write("0.yaml", SOUND)
    write("large.txt", "#" * (inputs.MAX_BYTES + 1))
    write("other.yaml", "services: []\n")
    write("rules.yaml", "rulebook: 1\n")
    write("rsa.pem", rsa_key())
    write("sshd_config", "KexAlgorithms diffie-hellman-group-exchange-sha256\n")
    write("a.c", f"char dh_p[] = {{{', '.join(['0xfb'] * 64)}}};\n")
    Path("out").mkdir()
    Path("t/link").symlink_to(tmp_path / "out")
    Path("t/lost").symlink_to("nowhere")
    os.mkfifo("t/pipe")
    outcome = review("--html", "r.html", "--markdown", "r.md", "--sarif", "r.sarif")
    skipped = {item["path"]: item["reason"] for item in outcome.record["skipped"]}

    assert {path: " ".join(reason.split()[:4]) for path, reason in skipped.items()} == {
        "t/a.c": "candidate 'dh_p': 512 bits;",
        "t": "1 other file holds",
        "t/build": "untracked, and ignored by",
        "t/large.txt": "the file has more",
        "t/link": "a link that leads",
        "t/lost": "not a regular file,",
        "t/mine.local.yaml": "untracked, and ignored by",
        "t/other.yaml": "not a declaration document",
        "t/pipe": "not a regular file,",
        "t/rsa.pem": "PUBLIC KEY: a key",
        "t/rules.yaml": "a rulebook or a",
        "t/sshd_config": "'diffie-hellman-group-exchange-sha256': the groups are",
    }
    assert (outcome.status, outcome.record["complete"]) == (0, True)
    for report in ("r.html", "r.md", "r.sarif"):
        text = Path(report).read_text()
        assert all(path in text for path in skipped), report


def test_files_that_hold_nothing_are_no_matter_to_the_verifier(review: Review) -> None:
    """One more of them leaves a report what it is; a file that is named does not."""
    write("a.yaml", SOUND)
    write("b.log", "")
    record = review().record
    assert {"path": "t", "reason": "1 other file holds nothing that is read"} in record["skipped"]
    write("c.log", "")
    assert verify(record, secrets.randbelow, against=read_inputs(["t"])).failures == ()
    write("c.pem", "")
    (failure,) = verify(record, secrets.randbelow, against=read_inputs(["t"])).failures
    assert failure.startswith("skipped: ")


def test_findings_of_a_run_beside_its_inputs_are_no_inputs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """SARIF names groups in its remedies and declares none: two runs find the same."""
    monkeypatch.chdir(tmp_path)
    Path("weak.yaml").write_text(
        "auditor: 1\nparameter_sets:\n  - {name: a, modulus: {group: modp1024}}\n"
    )
    words = ["review", ".", "--effort", "quick", "--no-ledger", "--sarif", "o.sarif"]
    first, second = (CliRunner().invoke(cli.main, [*words, "--json", "-"]) for _ in range(2))

    found = [json.loads(run.stdout)["inputs"] for run in (first, second)]
    assert [[item["path"] for item in inputs] for inputs in found] == [["weak.yaml"]] * 2
    assert Path("o.sarif").exists()
