"""PEM blocks in all the surroundings that texts have for them."""

import base64
import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake.pem import Block, PemError, Placeholder, StrayEnd, blocks
from tests.intake.der_writer import pem

DATA = bytes(range(200))
BLOCK = pem("DH PARAMETERS", DATA)
LINES = BLOCK.splitlines()
SURROUNDINGS = {
    "alone": BLOCK,
    "without a last line end": BLOCK.rstrip("\n"),
    "with carriage returns": BLOCK.replace("\n", "\r\n"),
    "after other text": f"Bag Attributes\n  name: quay\n\n{BLOCK}more text\n",
    "indented in YAML": "tls:\n  dh: |\n" + "".join(f"    {line}\n" for line in LINES),
    "in comments": "".join(f"# {line}\n" for line in LINES),
    "in comments of C++": "".join(f"    // {line}\n" for line in LINES),
    "quoted in a mail": "".join(f"> {line}\n" for line in LINES),
    "in JSON": json.dumps({"name": "quay", "dh": BLOCK}),
    "in JSON in JSON": json.dumps({"config": json.dumps({"dh": BLOCK})}),
    "as literals of C": "const char *dh =\n" + "".join(f'  "{line}\\n"\n' for line in LINES) + ";",
    "as literals of C on the line": 'char *dh = "' + '\\n"\n           "'.join(LINES) + '\\n";\n',
    "as joined literals": "dh = (" + " +\n      ".join(f"'{line}\\n'" for line in LINES) + ")\n",
    "as one long literal": f'dh = """{BLOCK}"""\n',
    "as a continued line": 'dh = "' + "\\n\\\n".join(LINES) + '"\n',
    "in a template literal": f"const dh = `{BLOCK}`;\n",
    "with lines of other lengths": "-----BEGIN DH PARAMETERS-----\n"
    + base64.b64encode(DATA).decode()
    + "\n-----END DH PARAMETERS-----\n",
    "with blank lines": BLOCK.replace("\n", "\n\n"),
    "with trailing blanks": BLOCK.replace("\n", "  \t\n"),
    "with headers": BLOCK.replace("-----\n", "-----\nComment: quay\nMore: 1\n\n", 1),
}


@pytest.mark.parametrize("text", SURROUNDINGS.values(), ids=SURROUNDINGS.keys())
def test_surroundings(text: str) -> None:
    """Whatever a text adds to a block is taken away, and nothing else."""
    (block,) = blocks(text)
    assert isinstance(block, Block)
    assert (block.label, block.data()) == ("DH PARAMETERS", DATA)
    before = text[: text.index("-----BEGIN")]
    assert block.line == before.count("\n") + 1
    assert block.column == len(before) - before.rfind("\n")


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        (BLOCK[: BLOCK.index("-----END")], "no END line follows"),
        (BLOCK.replace("END DH", "END RSA"), "the END line says 'RSA PARAMETERS'"),
        ("-----BEGIN DH PARAMETERS-----\n-----END DH PARAMETERS-----\n", "nothing stands between"),
        (BLOCK.replace("AAECAwQ", "AAEC!wQ"), "not base64"),
        (BLOCK.replace("AAECAwQ", "AAECäwQ"), "not ASCII"),
        (BLOCK.replace("AAECAwQ", "AAECAw"), "not base64"),
        (BLOCK.replace("AAECAwQ", "AAE=AwQ"), "not base64"),
    ],
)
def test_damage(text: str, reason: str) -> None:
    """Each way to damage a block has its reason, and the block after it is not touched."""
    damaged, sound = blocks(text + BLOCK)
    assert isinstance(damaged, Block)
    assert isinstance(sound, Block)
    with pytest.raises(PemError, match=reason) as caught:
        damaged.data()
    assert not isinstance(caught.value, Placeholder)
    assert sound.data() == DATA


@pytest.mark.parametrize("inside", ["{{ .Values.dh }}", "$DH", "<your parameters>", "..."])
def test_placeholders(inside: str) -> None:
    """A template is not a damaged block, even where it shows a beginning."""
    for body in (inside, f"AAECAwQFBgcICQoLDA0ODw\n{inside}\nAAEC"):
        (block,) = blocks(f"-----BEGIN CERTIFICATE-----\n{body}\n-----END CERTIFICATE-----\n")
        assert isinstance(block, Block)
        with pytest.raises(Placeholder):
            block.data()


def test_programs_that_look_for_markers() -> None:
    """Markers in code begin no block; an END line on its own closes none."""
    text = 'if line == "-----BEGIN CERTIFICATE-----":\n    stop = "-----END CERTIFICATE-----"\n'
    assert list(blocks(text)) == []
    assert list(blocks("a\n-----END DH PARAMETERS-----\n")) == [StrayEnd("DH PARAMETERS", 2, 1)]


def test_encrypted_headers() -> None:
    """The headers of traditional key files tell an encrypted body."""
    text = pem("DSA PRIVATE KEY", DATA)
    text = text.replace("-----\n", "-----\nProc-Type: 4,ENCRYPTED\nDEK-Info: X,00\n\n", 1)
    (block,) = blocks(text)
    assert isinstance(block, Block)
    assert block.encrypted


def test_order_and_places() -> None:
    """Blocks come in text order, an unclosed one ends where the next begins."""
    text = f"x\n{BLOCK}\n  -----BEGIN X-----\n{pem('PUBLIC KEY', b'abc')}"
    found = [(block.label, block.line, block.column) for block in blocks(text)]
    assert found == [("DH PARAMETERS", 2, 1), ("X", 10, 3), ("PUBLIC KEY", 11, 1)]


@given(st.binary(min_size=1, max_size=300), st.sampled_from(["A", "X9.42 DH PARAMETERS"]))
def test_any_bytes_come_back(data: bytes, label: str) -> None:
    """What is written is read."""
    (block,) = blocks(pem(label, data))
    assert isinstance(block, Block)
    assert block.data() == data


PIECES = st.sampled_from(
    ["-----BEGIN A-----", "-----END A-----", "-----", "\n", "\\n", '"', " ", "QUJD", "=", ":", "{"]
)


@given(st.lists(PIECES | st.text(max_size=5), max_size=30).map("".join))
def test_any_text(text: str) -> None:
    """No text raises anything but PemError, and every place lies in the text."""
    reasons = []
    for block in blocks(text):
        assert 1 <= block.line <= text.count("\n") + 1
        assert block.column >= 1
        if isinstance(block, Block):
            try:
                block.data()
            except PemError as error:
                reasons.append(str(error))
    assert all(len(reason) < 200 for reason in reasons)
