"""A drafted usage file is one as it stands, and with its comments lifted; answered, it is quiet."""

import re
import secrets
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner

from auditor.advice.ask import Asker
from auditor.advice.situations import Inquiry, inquire
from auditor.cli import main
from auditor.facts import vocabulary
from auditor.intake.document import parse
from auditor.intake.tree import InputResult, read_inputs
from auditor.intake.usage_file import UsageFile, read_usage
from auditor.report.view import view
from auditor.review import Surroundings, investigate, review
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.run_values import RunValues
from auditor.usage_draft import MOST_USES, Draft, draft
from tests.intake.der_writer import integers, pem
from tests.report.records import hostile_texts
from tests.test_documents import ROOT

RUN = RunValues("2026-12-01", "quick")
BOOKS = load_all(DEFAULT_BOOKS, vocabulary())
P = 2**521 - 1
DH, DSA = pem("DH PARAMETERS", integers(P, 5)), pem("DSA PARAMETERS", integers(P, 23, 5))
C_SOURCE = (
    f"static unsigned char dh_p[] = {{ {', '.join(['0xff'] * 80)} }};\n"
    "static unsigned char dh_g[] = { 0x05 };\nstatic unsigned char dh_q[] = { 0x17 };\n"
)
USES = "auditor-usage: 1\nuses:\n"


@pytest.fixture
def tree(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A directory to work in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def written(files: dict[str, str]) -> None:
    """The files in the current directory."""
    for name, text in files.items():
        Path(name).parent.mkdir(parents=True, exist_ok=True)
        Path(name).write_text(text, encoding="utf-8")


def asked(*paths: str) -> tuple[InputResult, Inquiry]:
    """What was read and what is worth asking."""
    read = read_inputs(paths or ["."])
    assert read.errors == ()
    known, _ = investigate(read.declarations, RUN, BOOKS, Surroundings(secrets.randbelow))
    return read, inquire(read.declarations, Asker(known, RUN, BOOKS))


def drafted(path: str, *paths: str) -> Draft:
    """The draft at ``path`` for what is there."""
    read, inquiry = asked(*paths)
    return draft(path, inquiry, read.waiting, read.documents)


def lifted(text: str) -> str:
    """The draft with every example taken in."""
    return re.sub(r"^( *)#(?=[a-z_]+: |- |  [a-z_]+: )", r"\1", text, flags=re.MULTILINE)


def uses(text: str) -> UsageFile:
    """The uses of a text without problems."""
    found = read_usage(parse(text), "usage.yaml")
    assert found.errors == ()
    return found


def keys(text: str) -> list[list[str]]:
    """What each use says once all is lifted."""
    return [list(use.said) for use in uses(lifted(text)).uses]


def questions() -> set[str]:
    """The usage keys that are still open."""
    _, inquiry = asked()
    open_keys = {key for item in inquiry.situations for key in item.open_keys}
    return {key for key in open_keys if key not in ("provenance", "public_values")}


THIRTY = {f"certs/dh{number:02}.pem": DH for number in range(30)}


def test_thirty_files_are_one_question(tree: Path) -> None:
    """One use with the three keys that matter and the protocol; then nothing is open any more."""
    written(THIRTY)
    found = drafted("usage.yaml")
    assert (found.uses, found.candidates, found.left_out) == (1, 0, ())
    assert [(u.path, u.name) for u in uses(found.text).uses] == [("certs/*.pem", "*")]
    assert keys(found.text) == [["protocol", "exponent", "peer_check"]]
    assert {"exponent.bits", "exponent.use", "peer_check", "protocol"} <= questions()

    written({"usage.yaml": lifted(found.text)})
    assert questions() == set()
    assert drafted("more.yaml").is_empty
    assert len({item["digest"] for item in reviewed()["parameter_sets"]}) == 1


def test_thirty_different_sets_are_one_question_in_the_report_too(tree: Path) -> None:
    """Thirty sheets wait for the same keys: one question with all of them, and one use."""
    written({f"a/{g}.pem": pem("DH PARAMETERS", integers(P, g)) for g in range(2, 32)})
    owners = [question for question in view(reviewed()).questions if question.is_owners]

    assert [len(question.waiting) for question in owners].count(30) == 1
    assert owners[0].about.startswith("The owner has not declared exponent.bits, exponent.use")
    assert drafted("usage.yaml").uses == 1


def reviewed() -> dict[str, Any]:
    """A review of the current directory."""
    return review(["."], RUN, Surroundings(secrets.randbelow))


def test_the_draft_as_it_stands_says_nothing(tree: Path) -> None:
    """Put in place it moves no set, and is no error."""
    written({**THIRTY, "sign.pem": DSA})
    before = [item.digest() for item in read_inputs(["."]).declarations]
    written({"usage.yaml": drafted("usage.yaml").text})
    after = read_inputs(["."])

    assert [item.digest() for item in after.declarations] == before
    assert after.errors == after.notices == ()
    assert [item for item in after.passed if item.path == "usage.yaml"] == []


def test_what_an_answer_would_change_stands_beside_its_key(tree: Path) -> None:
    """With the words and positions of 'ask'."""
    text = (ROOT / "samples" / "encoded" / "parameters.pem").read_text(encoding="utf-8")
    written({"parameters.pem": text})
    found = drafted("usage.yaml").text
    about = found.split("DH PARAMETERS 1: open")[1].split("\n\n")[0]

    assert re.search(r"# if every party uses exponents of 256 bits: open to no objection", found)
    assert "range (they are 2 to n-2), membership" in about.replace("\n    #   ", "")


def test_answers_that_were_given_are_not_asked_again(tree: Path) -> None:
    """Another usage file has said the check and half of the exponent, for some of the sets."""
    said = "exponent: {bits: 512}, peer_check: [range], protocol: custom}"
    written({**THIRTY, "usage.yaml": f"{USES}  - {{path: certs/dh0*.pem, {said}\n"})
    found = drafted("more.yaml")
    ten = "certs/dh0{}.pem"

    assert keys(found.text).count(["exponent"]) == 10
    assert {u.path for u in uses(found.text).uses} >= {ten.format(0), "certs/dh10.pem"}
    written({"more.yaml": lifted(found.text)})
    result = read_inputs(["."])
    assert questions() == set()
    (party,) = next(d for d in result.declarations if d.place.path == "certs/dh03.pem").parties
    assert (party.exponent_bits, party.exponent_use, party.peer_check) == (
        512,
        "single",
        ("range",),
    )


def test_several_parties_are_completed(tree: Path) -> None:
    """What is known of each stays, what is open gets an example."""
    parties = "[{role: server, exponent: {bits: 512}, peer_check: [range]}, {role: client}]"
    written({"a.pem": DH, "usage.yaml": f"{USES}  - {{path: a.pem, parties: {parties}}}\n"})
    text = drafted("more.yaml").text
    assert keys(text) == [["protocol", "parties"]]

    written({"more.yaml": lifted(text)})
    (declared,) = read_inputs(["."]).declarations
    server, client = declared.parties
    assert (server.exponent_bits, server.exponent_use, server.peer_check) == (
        512,
        "single",
        ("range",),
    )
    assert (client.exponent_use, client.peer_check) == ("single", ("range",))
    assert questions() == set()


def test_a_scheme_is_asked_for_with_its_purpose(tree: Path) -> None:
    """The format wants them together: the purpose stands beside the question as it is known."""
    written({"a.pem": DH, "usage.yaml": f"{USES}  - {{path: a.pem, purpose: encryption}}\n"})
    text = drafted("more.yaml").text

    assert uses(text).uses[0].said == {"purpose": "encryption"}
    assert uses(lifted(text)).uses[0].said["scheme"].startswith("elgamal-")


def test_candidates_are_there_to_be_taken_up(tree: Path) -> None:
    """With the names that belong together; lifted they are sets, and asked about like others."""
    written({"src/dh.c": C_SOURCE, "src/lone.c": C_SOURCE.split("\n")[0].replace("dh", "my_dh")})
    found = drafted("usage.yaml")
    assert (found.uses, found.candidates) == (0, 2)
    uses(found.text)

    written({"usage.yaml": lifted(found.text)})
    result = read_inputs(["."])
    assert result.errors == ()
    named = {d.name: (d.modulus, d.generator, d.subgroup_order) for d in result.declarations}
    assert named == {"dh_p": (2**640 - 1, 5, 23), "my_dh_p": (2**640 - 1, 2, None)}
    assert drafted("more.yaml").uses == 1
    assert drafted("more.yaml").candidates == 0


def test_candidates_that_no_use_can_name_are_told(tree: Path) -> None:
    """A name that stands twice, a path that would be a pattern, a file elsewhere."""
    twice = f"dh_p = 0x{'F' * 160}\n" * 2
    written({"t/twice.txt": twice, "t/a*b.c": C_SOURCE, "elsewhere.c": C_SOURCE})
    found = drafted("t/usage.yaml", ".")

    assert found.candidates == 0
    assert sorted(reason.rsplit(": ", 1)[1] for reason in found.left_out) == [
        "no pattern names this file alone",
        "not below t",
        "the file has this name more than once",
        "the file has this name more than once",
    ]


def test_documents_and_what_lies_elsewhere_are_no_part_of_it(tree: Path) -> None:
    """A document says its use itself; a set outside is named as left out."""
    document = "auditor: 1\nparameter_sets:\n  - {name: a, modulus: 23, generator: 5}\n"
    written({"t/a.yaml": document, "t/b.pem": DH, "c.pem": DH})
    found = drafted("t/usage.yaml", ".")

    assert [use.path for use in uses(found.text).uses] == ["b.pem"]
    assert found.left_out == ("c.pem#DH PARAMETERS 1: not below t",)


def test_outside_text_breaks_no_draft(tree: Path) -> None:
    """Names of files are text in comments and quoted in patterns, however hostile."""
    for number, text in enumerate(hostile_texts()):
        name = re.sub(r"[/\0]", "_", text)[:60].encode("utf-8", "replace").decode()
        end = ("pem", "txt", "conf")[number % 3]
        written({f"{number}/{name}.{end}": (DH, DSA)[number % 2], f"{name}/dh.c": C_SOURCE})
    found = drafted("usage.yaml")
    assert found.uses >= 2
    uses(found.text)

    written({"usage.yaml": lifted(found.text)})
    result = read_inputs(["."])
    assert result.errors == ()
    taken_up = len(result.declarations) - len(hostile_texts())
    assert taken_up == found.candidates > 20
    again = drafted("more.yaml")
    assert {use.name for use in uses(again.text).uses} == {"*"}
    assert all(use.path.endswith(".c") for use in uses(again.text).uses)


def test_more_uses_than_the_format_takes_are_left_out(
    tree: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """And named."""
    monkeypatch.setattr("auditor.usage_draft.MOST_USES", 1)
    written({"a.pem": DH, "b.pem": DSA})
    found = drafted("usage.yaml")

    assert found.uses == 1
    assert found.left_out == ("b.pem#DSA PARAMETERS 1: no pattern of this file names it alone",)
    assert MOST_USES == 1_000


def run(*words: str) -> tuple[int, str, str]:
    """Exit status and what the command wrote."""
    arguments = ["ask", *words, "--effort", "quick", "--no-ledger", "--jobs", "1"]
    result = CliRunner().invoke(main, arguments, standalone_mode=False)
    if result.exception is not None:
        raise result.exception
    return result.return_value or 0, result.stdout, result.stderr


def test_the_command(tree: Path) -> None:
    """To a file or to standard output; nothing is written over, and nothing for nothing."""
    written({"configs/a.pem": DH, "src/dh.c": C_SOURCE})
    status, out, err = run("configs", "--draft-usage", "configs/usage.yaml")
    assert status == 0
    assert out.startswith("configs/a.pem#DH PARAMETERS 1")
    assert uses(Path("configs/usage.yaml").read_text()).uses[0].path == "a.pem"

    again = CliRunner().invoke(main, ["ask", "configs", "--draft-usage", "configs/usage.yaml"])
    assert again.exit_code == 2
    assert "--overwrite replaces it" in again.stderr
    status, out, err = run("configs", "src", "--draft-usage", "-")
    assert [use.path for use in uses(out).uses] == ["configs/a.pem"]
    assert '#- path: "src/dh.c"' in out

    written({"configs/usage.yaml": lifted(Path("configs/usage.yaml").read_text())})
    assert run("configs", "--draft-usage", "configs/usage.yaml", "--overwrite")[0] == 0
    status, _, err = run("configs", "--draft-usage", "configs/more.yaml")
    assert "not written" in err
    assert not Path("configs/more.yaml").exists()


def test_a_draft_and_a_report_cannot_share_a_place(tree: Path) -> None:
    """Told before anything is read."""
    for words in (["--draft-usage", "-", "--json", "-"], ["--draft-usage", "x", "--html", "x"]):
        assert CliRunner().invoke(main, ["ask", "absent", *words]).exit_code == 2
