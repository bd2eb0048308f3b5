"""The commands as a person meets them: outputs, messages, exit statuses."""

import io
import json
import os
import re
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from auditor import __version__, cli
from auditor.report.json_report import problems

ROOT = Path(__file__).parents[1]
DOCUMENTS = sorted((ROOT / "tests" / "robustness" / "documents").glob("*.yaml"))
SOUND = """\
auditor: 1
parameter_sets:
  - name: sound
    purpose: key-agreement
    modulus: {group: ffdhe2048}
    exponent: {bits: 256, use: single}
    peer_check: [range]
"""


RUN = "import sys; from auditor.cli import run; sys.exit(run())"


class Result:
    """What a command left behind."""

    def __init__(self, status: int, out: str, err: str) -> None:
        self.status, self.out, self.err = status, out, err


@pytest.fixture
def auditor(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Any:
    """Runs a command in an empty directory, with a cache of its own."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "cache"))

    def command(*words: str, stdin: str = "") -> Result:
        stream = io.TextIOWrapper(io.BytesIO(stdin.encode()))
        monkeypatch.setattr(sys, "stdin", stream)
        monkeypatch.setattr(sys, "argv", ["auditor", *words])
        capsys.readouterr()
        status = cli.run()
        captured = capsys.readouterr()
        assert "Traceback" not in captured.err
        assert status != 3 or "of our own" in captured.err, captured.err
        return Result(status, captured.out, captured.err)

    return command


def quick(*words: str) -> tuple[str, ...]:
    """A quick review on a fixed day."""
    return ("review", *words, "--effort", "quick", "--as-of", "2026-12-01")


def test_a_sound_set_leaves_every_report_and_status_0(auditor: Any, tmp_path: Path) -> None:
    """All formats in one run; the record is valid and verifies, with its inputs."""
    Path("sound.yaml").write_text(SOUND)
    formats = ("--html", "r.html", "--markdown", "r.md", "--json", "r.json", "--sarif", "r.sarif")
    result = auditor(*quick("sound.yaml"), *formats)

    assert result.status == 0
    assert "no objection 1" in result.out
    assert problems(json.loads(Path("r.json").read_text())) == []
    assert "sound" in Path("r.html").read_text()
    assert "sound" in Path("r.md").read_text()
    assert json.loads(Path("r.sarif").read_text())["version"] == "2.1.0"
    verified = auditor("verify", "r.json", "--against", "sound.yaml")
    assert (verified.status, verified.out.split(":")[0]) == (0, "all holds")
    Path("sound.yaml").write_text(SOUND.replace("256", "200"))
    assert auditor("verify", "r.json", "--against", "sound.yaml").status == 1


def test_a_second_run_gives_the_same_bytes(auditor: Any) -> None:
    """Cold, warm from the ledger, and without one."""
    Path("sound.yaml").write_text(SOUND)
    for name in ("cold", "warm"):
        auditor(*quick("sound.yaml"), "--json", f"{name}.json")
    auditor(*quick("sound.yaml"), "--json", "none.json", "--no-ledger", "--jobs", "1")

    texts = {Path(f"{name}.json").read_bytes() for name in ("cold", "warm", "none")}
    assert len(texts) == 1
    assert (Path("cache") / "group-parameter-auditor" / "ledger.sqlite").exists()


@pytest.mark.parametrize("option", ["--html", "--markdown", "--json", "--json-lines", "--sarif"])
def test_no_document_takes_the_place_of_what_is_read(auditor: Any, option: str) -> None:
    """A named input is refused at once; one that was found in a directory in the end, when all else
    is written."""
    Path("tree").mkdir()
    Path("tree/sound.yaml").write_text(SOUND)
    Path("link").symlink_to("tree/sound.yaml")
    for words in (("tree/sound.yaml", option, "link"), ("link", option, "tree/sound.yaml")):
        refused = auditor(*quick(*words))
        assert (refused.status, refused.out) == (2, "")
        assert "this file is read" in refused.err
    other = "--html" if option != "--html" else "--markdown"
    late = auditor(*quick("tree", option, "tree/sound.yaml", other, "r"))
    assert late.status == 2
    assert "tree/sound.yaml: this file is read" in late.err
    assert "sound" in Path("r").read_text()
    assert Path("tree/sound.yaml").read_text() == SOUND


def test_a_short_document_does_not_either(auditor: Any) -> None:
    """Of reports that are compared, and of what is asked about."""
    Path("sound.yaml").write_text(SOUND)
    auditor(*quick("sound.yaml", "--json", "r.json"))
    before = Path("r.json").read_bytes()

    assert auditor("compare", "r.json", "r.json", "--html", "r.json").status == 2
    assert auditor("ask", "sound.yaml", "--effort", "quick", "--json", "sound.yaml").status == 2
    assert auditor("ask", "sound.yaml", "--draft-usage", "sound.yaml", "--overwrite").status == 2
    assert (Path("r.json").read_bytes(), Path("sound.yaml").read_text()) == (before, SOUND)


def test_json_lines(auditor: Any) -> None:
    """A line for each set in input order, then the rest of the record: nothing is lost."""
    two = SOUND + WEAK.split("parameter_sets:\n")[1]
    auditor(*quick("-"), "--json", "r.json", "--json-lines", "r.jsonl", stdin=two)
    *sets, last = [json.loads(line) for line in Path("r.jsonl").read_text().splitlines()]
    record = json.loads(Path("r.json").read_text())

    assert [item["parameter_set"]["name"] for item in sets] == ["sound", "short"]
    assert {"parameter_sets": [s["parameter_set"] for s in sets], **last["summary"]} == record


def test_standard_input_and_output(auditor: Any) -> None:
    """'-' stands for both, and then nothing but the report is written to standard output."""
    result = auditor(*quick("-"), "--json", "-", stdin=SOUND)

    assert result.status == 0
    assert json.loads(result.out)["parameter_sets"][0]["id"] == "-#sound"


WEAK = SOUND.replace("ffdhe2048", "modp1024").replace("sound", "short")


@pytest.mark.parametrize(
    ("fail_on", "status"), [("hold", 1), ("open", 1), ("conditions", 1), ("never", 0)]
)
def test_fail_on(auditor: Any, fail_on: str, status: int) -> None:
    """A set on hold fails at every threshold but never."""
    assert auditor(*quick("-"), "--fail-on", fail_on, stdin=WEAK).status == status


def test_an_error_outranks_findings_and_the_rest_is_reviewed(auditor: Any) -> None:
    """One broken set, one weak one: status 2, the place of the error, the finding all the same."""
    broken = WEAK + "  - name: broken\n    modulus: {group: ffdhe2049}\n"
    result = auditor(*quick("-"), "--json", "r.json", stdin=broken)

    assert result.status == 2
    assert re.search(r"^-:\d+:\d+: .*ffdhe2049.*ffdhe2048", result.err, re.MULTILINE)
    record = json.loads(Path("r.json").read_text())
    assert [item["position"] for item in record["parameter_sets"]] == ["hold"]
    assert record["complete"] is False


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda path: path.stem)
def test_malformed_documents(auditor: Any, document: Path) -> None:
    """Status 2 and file:line:column, whatever is wrong."""
    result = auditor(*quick(str(document)), "--no-ledger")

    assert result.status == 2
    assert re.search(rf"^{re.escape(str(document))}:\d+:\d+: ", result.err, re.MULTILINE)


def test_nothing_recognised(auditor: Any) -> None:
    """An empty directory is an error unless that is accepted."""
    Path("empty").mkdir()

    assert auditor(*quick("empty")).status == 2
    assert auditor(*quick("empty"), "--allow-empty").status == 0


@pytest.mark.parametrize(
    "words",
    [
        ("review",),
        ("reveiw", "x"),
        ("review", "x", "--efort", "quick"),
        ("review", "x", "--as-of", "yesterday"),
        ("review", "x", "--html", "-", "--json", "-"),
        ("review", "x", "--html", "same", "--json", "same"),
        ("review", "x", "--html", "no/such/directory/r.html"),
        ("review", "x", "--rulebook", "no-such-book"),
        ("verify", "absent.json"),
        ("rulebook", "show", "no-such-rule"),
    ],
)
def test_wrong_usage(auditor: Any, words: tuple[str, ...]) -> None:
    """Status 2 and a message, before anything is computed."""
    result = auditor(*words)

    assert result.status == 2
    assert result.err.strip()


@pytest.mark.parametrize(
    "text", ["", "[]", "{", '{"report": 1, "report": 1}', '{"report": NaN}', "[" * 100_000]
)
def test_verify_refuses_what_is_no_report(auditor: Any, text: str) -> None:
    """Whatever the file holds, there is a message and no traceback."""
    Path("r.json").write_text(text)

    assert auditor("verify", "r.json").status in (1, 2)


def test_verify_names_what_does_not_hold(auditor: Any) -> None:
    """A changed position is found, with its place."""
    auditor(*quick("-"), "--json", "r.json", stdin=WEAK)
    text = Path("r.json").read_text().replace('"position": "hold"', '"position": "no objection"')
    Path("r.json").write_text(text)
    result = auditor("verify", "r.json")

    assert result.status == 1
    assert "parameter_sets[0].position" in result.out


def test_other_endings(auditor: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """An interruption, a fault of our own."""

    def interrupted(*args: Any, **options: Any) -> Any:
        raise KeyboardInterrupt

    def faulty(*args: Any, **options: Any) -> Any:
        raise RuntimeError("of our own")

    monkeypatch.setattr("auditor.review.review", interrupted)
    assert auditor(*quick("-"), stdin=SOUND).status == 130
    monkeypatch.setattr("auditor.review.review", faulty)
    result = auditor(*quick("-"), stdin=SOUND)
    assert result.status == 3
    assert "internal fault: RuntimeError: of our own" in result.err


def test_a_closed_pipe(tmp_path: Path) -> None:
    """The reader of standard output goes away: status 141, no traceback."""
    read_end, write_end = os.pipe()
    os.close(read_end)
    result = subprocess.run(
        [sys.executable, "-c", RUN, "rulebook", "list"],
        stdout=write_end,
        stderr=subprocess.PIPE,
        check=False,
    )
    os.close(write_end)

    assert result.returncode == 141
    assert b"Traceback" not in result.stderr


def test_rulebook_commands(auditor: Any) -> None:
    """List, show and test speak about the shipped books."""
    listed = auditor("rulebook", "list")
    shown = auditor("rulebook", "show", "generator-trivial")
    tested = auditor("rulebook", "test")

    assert "generator-trivial" in listed.out
    assert "requires:" in shown.out
    assert tested.status == 0
    assert tested.out.endswith("0 failures\n")
    Path("mine.yaml").write_text("rulebook: 1\nname: mine\n")
    assert auditor("rulebook", "test", "mine.yaml").status == 1


def test_help_shows_examples(auditor: Any) -> None:
    """Every command has one."""
    for words in (("review",), ("verify",), ("rulebook", "show"), ("rulebook", "test")):
        result = auditor(*words, "--help")
        assert result.status == 0
        assert f"auditor {' '.join(words)} " in result.out
    assert auditor("--version").out == f"auditor, version {__version__}\n"


@pytest.mark.parametrize("words", [("0",), ("1_000",), ("９",), ("-5",), ("15", "--of", "1e3")])
def test_numbers_have_one_spelling(auditor: Any, words: tuple[str, ...]) -> None:
    """Decimal or 0x…; the message says which of them is meant."""
    result = auditor("structure", *words)

    assert result.status == 2
    assert ("--of" in result.err) == ("--of" in words)


def test_sigterm_ends_like_an_interruption(tmp_path: Path) -> None:
    """What was found is kept, nothing is printed that nobody understands, status 143."""
    p = "0x" + "f" * 1024 + "61"
    (tmp_path / "x.yaml").write_text(
        f"auditor: 1\nparameter_sets: [{{name: x, modulus: {p}, generator: 2}}]\n"
    )
    words = ("--effort", "thorough", "--factor-digits", "40", "--ledger", "l")
    process = subprocess.Popen(
        [sys.executable, "-c", RUN, "review", "x.yaml", *words],
        cwd=tmp_path,
        stderr=subprocess.PIPE,
        env={**os.environ, "PYTHONPATH": str(Path(__file__).parents[1])},
    )
    while not (tmp_path / "l").exists():
        assert process.poll() is None
        time.sleep(0.05)
    time.sleep(1)
    process.terminate()
    _, errors = process.communicate(timeout=60)

    assert process.returncode == 143
    assert errors.decode().splitlines()[-1].startswith("interrupted; what was found is kept in l")
    assert b"Traceback" not in errors
