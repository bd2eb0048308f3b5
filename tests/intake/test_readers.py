"""Which reader a file is for, in directories and by name, and the bounds of a walk."""

import io
import os
import subprocess
import sys
from pathlib import Path

import pytest

from auditor.intake import inputs, tree
from auditor.intake.inputs import InputError
from auditor.intake.readers import NOTHING
from auditor.intake.reading import Passed, others
from auditor.intake.tree import InputResult, read_inputs
from tests.intake.der_writer import (
    DSA,
    RSA,
    certificate,
    element,
    integers,
    pem,
    private_key,
    public_key,
)

P = 2**1279 - 1
PARAMETERS = integers(P, 5, 100)
DH = pem("DH PARAMETERS", PARAMETERS)
RSA_CERTIFICATE = certificate(public_key(RSA, element(5, b""), 5))
MODULI = f"# primes\n20250102030405 2 6 100 1278 5 {P:X}\n"
DOCUMENT = "auditor: 1\nparameter_sets:\n  - {name: x, modulus: 23, generator: 5}\n"


@pytest.fixture(autouse=True)
def _here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def _write(files: dict[str, str | bytes]) -> None:
    for name, content in files.items():
        path = Path(name)
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content.encode() if isinstance(content, str) else content)


def _names(result: InputResult) -> list[str]:
    return [item.identity for item in result.declarations]


def test_every_kind_in_one_tree() -> None:
    """Content decides; suffixes matter only for documents."""
    _write(
        {
            "t/a.yaml": DOCUMENT,
            "t/b.conf": "Groups = ffdhe2048\n",
            "t/c": DH,
            "t/d.der": PARAMETERS,
            "t/e.crt": certificate(public_key(DSA, integers(P, 23, 5), 5)),
            "t/f.key": private_key(DSA, integers(P, 23, 5), 7),
            "t/g.txt": MODULI,
            "t/h.yaml": f"dh: |\n  {DH}".replace("\n", "\n  "),
            "t/i.json": '{"dh_group": 14}',
            "t/j.txt": "nothing here",
            "t/k.bin": bytes(range(256)),
            "t/l.md": f"An example: `Groups = ffdhe2048`.\n\nGroups = ffdhe2048\n\n{DH}",
        }
    )
    result = read_inputs(["t"])
    assert _names(result) == [
        "t/a.yaml#x",
        "t/b.conf#ffdhe2048",
        "t/c#DH PARAMETERS 1",
        "t/d.der#DH PARAMETERS",
        "t/e.crt#CERTIFICATE",
        "t/f.key#PRIVATE KEY",
        "t/g.txt#moduli line 2 (1278)",
        "t/h.yaml#DH PARAMETERS 1",
        "t/i.json#dh_group 14",
        "t/l.md#DH PARAMETERS 1",
    ]
    assert (result.errors, result.passed) == ((), (others("t", 2),))
    assert result.recognised == 10
    assert [item.path for item in result.inputs] == [name.split("#")[0] for name in _names(result)]


@pytest.mark.parametrize("content", ["nothing", "", "\n\n", "key: value\n", b"\xff\xfe\x00\x01"])
def test_named_files_have_to_hold_something(content: str | bytes) -> None:
    """In a directory nothing is counted; by name it is an error."""
    _write({"t/notes.txt": content})
    assert read_inputs(["t"]) == InputResult((), (), (), (others("t", 1),))
    (error,) = read_inputs(["t/notes.txt"]).errors
    assert error.message == NOTHING or error.message.startswith("DER: ")
    stream = io.BytesIO(content.encode() if isinstance(content, str) else content)
    assert len(read_inputs(["-"], stream).errors) == 1


def test_standard_input_may_hold_anything() -> None:
    """Each form is known without a name."""
    small = integers(2**607 - 1, 5)
    assert len(small) < 128
    for data in (DOCUMENT.encode(), DH.encode(), PARAMETERS, small, MODULI.encode()):
        result = read_inputs(["-"], io.BytesIO(data))
        assert result.recognised == 1
        assert result.errors == ()


def test_prose_is_read_when_named() -> None:
    """Who names a manual means what it shows."""
    _write({"a.md": "Groups = ffdhe2048\n"})
    assert _names(read_inputs(["a.md"])) == ["a.md#ffdhe2048"]


def test_broken_files_of_a_tree() -> None:
    """What calls itself DER or a moduli file is read or an error."""
    _write(
        {
            "t/a.der": PARAMETERS[:-1],
            "t/b.crt": RSA_CERTIFICATE[:-1],
            "t/moduli": "no records\n",
            "t/c.der": b"",
            "t/d.crt": "a text about certificates",
        }
    )
    result = read_inputs(["t"])
    assert [(error.path, error.line) for error in result.errors] == [
        ("t/a.der", 1),
        ("t/b.crt", 1),
        ("t/c.der", 1),
        ("t/moduli", 1),
    ]
    assert result.recognised == 0


def test_other_kinds_are_not_recognised() -> None:
    """A tree of other people's keys holds nothing to review, and says what it holds."""
    _write({"t/a.crt": RSA_CERTIFICATE, "t/b.pem": pem("CERTIFICATE", RSA_CERTIFICATE)})
    result = read_inputs(["t"])
    assert result.recognised == 0
    assert result.skipped == ()
    assert {(item.path, item.line, item.reason) for item in result.passed} == {
        ("t/a.crt", 1, "CERTIFICATE: a key of another kind (RSA)"),
        ("t/b.pem", 1, "CERTIFICATE: a key of another kind (RSA)"),
    }


def test_der_of_other_kinds() -> None:
    """Passed over in a tree, an error by name."""
    _write({"t/a.der": element(0x31, b"\0" * 200), "t/b": element(0x30, b"\0" * 200)})
    assert [(item.path, item.reason) for item in read_inputs(["t"]).passed] == [
        ("t/a.der", "DER of a kind that is not read"),
        ("t/b", "DER of a kind that is not read"),
    ]
    assert [error.message for error in read_inputs(["t/a.der", "t/b"]).errors] == [NOTHING] * 2


def test_own_rulebooks_and_reports_are_no_configuration() -> None:
    """Names of groups in them are criteria and results."""
    _write(
        {
            "t/a.yaml": "rulebook: 1\nname: a\ngroups: [ffdhe2048]\n",
            "t/b.json": '{"report": 1,\n"groups": ["ffdhe2048"]}\n',
        }
    )
    result = read_inputs(["t"])
    assert result.declarations == ()
    assert {item.reason for item in result.passed} == {"a rulebook or a report"}


@pytest.mark.parametrize(
    "data",
    [
        f"\ufeff{DH}".encode(),
        f"# Fähre\n{DH}".encode("latin-1"),
        DH.replace("\n", "\r\n").encode(),
    ],
)
def test_encodings_of_text(data: bytes) -> None:
    """Any encoding that agrees with ASCII will do."""
    _write({"t/a.pem": data})
    assert read_inputs(["t"]).recognised == 1


def test_text_that_begins_like_der() -> None:
    """A zero at the beginning of a text makes no structure of it."""
    text = "0" + chr(100) + "x" * 100
    _write({"t/a": text, "t/b": "0B" + "y" * 66})
    assert read_inputs(["t"]) == InputResult((), (), (), (others("t", 2),))


@pytest.mark.parametrize("name", ["x.pem", "X.PEM", "a.key", "id.pub", "openssl.cnf", "store.p12"])
@pytest.mark.parametrize("content", [b"", b"\x8f\x00\x01" * 99, b"[req]\nbits = 2048\n"])
def test_what_is_called_like_parameters_is_named_if_it_holds_nothing(
    name: str, content: bytes
) -> None:
    """With the reason; other files are counted for each directory that was given."""
    _write({f"t/{name}": content, "t/b.conf": content, "t/a/c": content, "u/d": content})
    result = read_inputs(["t", "u"])
    assert (result.declarations, result.errors, result.inputs) == ((), (), ())
    assert result.skipped == (f"t/{name}",)
    assert result.passed[1:] == (others("t", 2), others("u", 1))
    assert str(result.passed[0].reason).endswith(("nothing in it is read", "that is not read"))


def test_files_of_too_many_bytes() -> None:
    """Passed over with the reason, which is not the same as holding nothing; an error where the
    name promises parameters."""
    _write({f"t/{name}": b"#" * (inputs.MAX_BYTES + 1) for name in ("a.txt", "b.pem")})
    result = read_inputs(["t"])
    reason = "the file has more than 16777216 bytes, the most that is read"
    assert [(item.path, item.reason) for item in result.passed] == [("t/a.txt", reason)]
    assert result.errors == (InputError("t/b.pem", 1, 1, reason),)


def test_depth_and_number_are_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    """Beyond the bounds is an error: nobody knows what is there."""
    monkeypatch.setattr(tree, "MAX_DEPTH", 2)
    _write({"t/a/b/c.pem": DH, "t/a/b/c/d.pem": DH})
    result = read_inputs(["t"])
    assert _names(result) == ["t/a/b/c.pem#DH PARAMETERS 1"]
    assert [str(error) for error in result.errors] == [
        "t/a/b:1:1: more than 2 levels deep; what is below was not looked at"
    ]
    monkeypatch.setattr(tree, "MAX_FILES", 2)
    _write({f"u/{name}": DH for name in "abcd"})
    result = read_inputs(["u"])
    assert len(result.declarations) == 2
    assert [str(error) for error in result.errors] == [
        "u:1:1: more than 2 files; those from 'c' on were not looked at"
    ]


def test_what_is_no_file() -> None:
    """Pipes and links that lead nowhere are passed over unless their names promise something."""
    os.mkdir("t")
    os.mkfifo("t/pipe")
    os.symlink("absent", "t/link")
    os.symlink("absent", "t/link.pem")
    result = read_inputs(["t"])
    assert result.passed == tuple(
        Passed(f"t/{name}", "not a regular file, or a link that leads nowhere")
        for name in ("link", "pipe")
    )
    assert [error.path for error in result.errors] == ["t/link.pem"]


def test_unnamed_candidates_wait() -> None:
    """A candidate that is declared in the same file, in whatever form, does not wait."""
    _write({"t/a.pem": f"    prime:\n        00:{'ff:' * 64}01\n    base: 5 (0x5)\n{DH}"})
    assert len(read_inputs(["t"]).passed) == 1
    _write({"t/a.pem": f"prime = 0x{P:X}\n{DH}"})
    assert read_inputs(["t"]).passed == ()


def test_the_library_is_loaded_for_encoded_input_only() -> None:
    """Who reviews documents and configuration does not wait for a library that neither needs."""
    _write({"a.yaml": DOCUMENT, "b.conf": "Groups = ffdhe2048\n", "c.pem": DH})
    program = (
        "import sys\n"
        "from auditor.intake.tree import read_inputs\n"
        "loaded = []\n"
        "for path in ('a.yaml', 'b.conf', 'c.pem'):\n"
        "    assert read_inputs([path]).recognised == 1\n"
        "    loaded.append('cryptography' in sys.modules)\n"
        "print(loaded)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    assert done.stdout == "[False, False, True]\n"
