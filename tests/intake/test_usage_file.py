"""Usage files: which sets a use covers, how uses add up, and what is wrong with a file."""

import json
from pathlib import Path

import pytest

from auditor.data_files import data
from auditor.declaration import EVERYBODY, Declaration, Party
from auditor.intake.tree import InputResult, read_inputs
from auditor.intake.usage_file import SCHEMA, USAGE
from tests.intake.der_writer import integers, pem

DH = pem("DH PARAMETERS", integers(2**521 - 1, 5))
DH_WITH_WIDTH = pem("DH PARAMETERS", integers(2**521 - 1, 5, 225))
DSA = pem("DSA PARAMETERS", integers(2**521 - 1, 23, 5))
HEAD = "auditor-usage: 1\nuses:\n"
C_SOURCE = (
    f"static unsigned char dh_p[] = {{ {', '.join(['0xff'] * 80)} }};\n"
    "static unsigned char dh_g[] = { 0x05 };\n"
)


@pytest.fixture
def tree(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A directory to work in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def _read(files: dict[str, str], *paths: str) -> InputResult:
    for name, content in files.items():
        Path(name).parent.mkdir(parents=True, exist_ok=True)
        Path(name).write_text(content)
    return read_inputs(paths or ["."])


def _one(files: dict[str, str]) -> Declaration:
    result = _read(files)
    assert result.errors == ()
    (declaration,) = result.declarations
    return declaration


def test_a_use_says_what_the_file_does_not(tree: Path) -> None:
    """Every key of a use ends in the set that it covers."""
    uses = HEAD + (
        "  - path: tls/*.pem\n    protocol: tls1.2\n    required_strength: 128\n"
        "    protect_until: 2034\n    parties:\n"
        "      - {role: server, exponent: {bits: 256, use: static}, peer_check: [range]}\n"
        "      - {role: client, exponent: {use: single}}\n"
    )
    found = _one({"usage.yaml": uses, "tls/dh.pem": DH_WITH_WIDTH})
    assert (found.protocol, found.required_strength, found.protect_until) == ("tls1.2", 128, 2034)
    assert found.purpose == "key-agreement"
    assert found.parties == (
        Party("server", 256, "static", ("range",)),
        Party("client", 225, "single"),
    )


@pytest.mark.parametrize(
    ("pattern", "path", "covers"),
    [
        ("dh.pem", "dh.pem", True),
        ("*.pem", "dh.pem", True),
        ("*.pem", "a/dh.pem", False),
        ("**/*.pem", "dh.pem", True),
        ("**/*.pem", "a/b/dh.pem", True),
        ("a/**", "a/b/dh.pem", True),
        ("a/**/dh.pem", "a/dh.pem", True),
        ("**", "a/b/dh.pem", True),
        ("a/*/dh.pem", "a/b/c/dh.pem", False),
        ("?h.pem", "dh.pem", True),
        ("[d]h.pem", "dh.pem", False),
        ("[d]h.pem", "[d]h.pem", True),
        ("DH.pem", "dh.pem", False),
        ("*" * 400 + "x", "a" * 200, False),
        ("**/" * 300 + "x", "a/" * 60 + "dh.pem", False),
    ],
)
def test_patterns(pattern: str, path: str, covers: bool, tree: Path) -> None:
    """Stars stay within a name, double stars do not; nothing else is special, nothing is slow."""
    uses = f'{HEAD}  - {{path: "{pattern}", protocol: cms}}\n'
    result = _read({"usage.yaml": uses, path: DH})
    (found,) = result.declarations
    assert found.protocol == ("cms" if covers else None)
    unused = [(item.path, item.line) for item in result.passed]
    assert unused == ([] if covers else [("usage.yaml", 3)])


def test_names_narrow_a_use(tree: Path) -> None:
    """A pattern of names picks among the sets of a file."""
    uses = f"{HEAD}  - {{path: a.pem, name: 'DH * 2', protocol: cms}}\n"
    result = _read({"usage.yaml": uses, "a.pem": DH + DSA + DH})
    said = {item.name: item.protocol for item in result.declarations}
    assert said == {"DH PARAMETERS 1": None, "DSA PARAMETERS 1": None, "DH PARAMETERS 2": "cms"}


def test_later_and_nearer_uses_replace(tree: Path) -> None:
    """Key by key; what belongs to a purpose or to parties is replaced as a whole."""
    top = HEAD + (
        "  - {path: '**', purpose: encryption, scheme: elgamal-raw, message_bits: 128}\n"
        "  - {path: '**', required_strength: 192, exponent: {bits: 300}, peer_check: [range]}\n"
    )
    near = HEAD + (
        "  - {path: dh.pem, purpose: key-agreement, parties: [{role: a, peer_check: []}]}\n"
        "  - {path: dh.pem, required_strength: 128}\n"
    )
    found = _one({"usage.yaml": top, "tls/usage.yaml": near, "tls/dh.pem": DH})
    assert (found.purpose, found.scheme, found.message_bits) == ("key-agreement", None, None)
    assert found.required_strength == 128
    assert found.parties == (Party("a", peer_check=()),)


def test_files_govern_only_what_lies_below(tree: Path) -> None:
    """A usage file says nothing about its neighbours, whatever its pattern."""
    uses = f"{HEAD}  - {{path: '**', protocol: cms}}\n"
    result = _read({"a/usage.yaml": uses, "a/dh.pem": DH, "b/dh.pem": DH})
    assert {item.place.path: item.protocol for item in result.declarations} == {
        "a/dh.pem": "cms",
        "b/dh.pem": None,
    }


def test_the_owner_overrules_the_format_and_a_notice_says_so(tree: Path) -> None:
    """Diffie-Hellman parameters may serve encryption; the scheme of another purpose goes."""
    uses = f"{HEAD}  - {{path: dsa.pem, purpose: key-agreement, exponent: {{use: static}}}}\n"
    result = _read({"usage.yaml": uses, "dsa.pem": DSA})
    (found,) = result.declarations
    assert (found.purpose, found.scheme) == ("key-agreement", None)
    assert found.parties == (Party(EVERYBODY, exponent_use="static"),)
    assert [str(item) for item in result.notices] == [
        "usage.yaml:3: dsa.pem#DSA PARAMETERS 1: purpose is signature by its format, reviewed as "
        "key-agreement"
    ]


def test_documents_say_their_use_themselves(tree: Path) -> None:
    """No usage file touches a declaration document."""
    document = "auditor: 1\nparameter_sets:\n  - {name: a, modulus: 23, generator: 5}\n"
    uses = f"{HEAD}  - {{path: '**', protocol: cms}}\n"
    result = _read({"usage.yaml": uses, "a.yaml": document, "b.pem": DH})
    assert [item.protocol for item in result.declarations] == [None, "cms"]


def test_candidates_become_sets_when_named(tree: Path) -> None:
    """By the names in the source, or with an integer for the generator; then nothing waits."""
    waiting = _read({"src/dh.c": C_SOURCE})
    assert waiting.declarations == ()
    assert waiting.recognised == 0
    assert ["dh_p" in item.reason for item in waiting.passed] == [True]
    for generator in ("dh_g", "5"):
        uses = HEAD + (
            f"  - {{path: src/dh.c, modulus: dh_p, generator: {generator}, protocol: custom}}\n"
            "  - {path: src/*, purpose: key-agreement}\n"
        )
        result = _read({"usage.yaml": uses, "src/dh.c": C_SOURCE})
        (found,) = result.declarations
        assert (found.name, found.modulus, found.generator) == ("dh_p", 2**640 - 1, 5)
        assert (found.purpose, found.protocol) == ("key-agreement", "custom")
        assert (found.place.path, found.place.line) == ("src/dh.c", 1)
        assert result.passed == result.errors == ()


@pytest.mark.parametrize(
    ("entry", "fragment"),
    [
        ("modulus: dh_q, generator: 5", "no candidate 'dh_q' in 'dh.c'; found there: 'dh_p'"),
        ("modulus: dh_p, generator: g", "no candidate 'g' in 'dh.c'"),
        ("modulus: twice_prime, generator: 5", "stands in 'dh.c' on lines 3 and 4"),
    ],
)
def test_candidates_that_are_not_there(entry: str, fragment: str, tree: Path) -> None:
    """A use that names what is not there is an error at its place."""
    again = f"twice_prime = 0x{'F' * 128}\n" * 2
    files = {
        "usage.yaml": f"{HEAD}  - {{path: dh.c, {entry}, purpose: key-agreement}}\n",
        "dh.c": C_SOURCE + again,
    }
    (error,) = _read(files).errors
    assert (error.path, error.line, error.column) == ("usage.yaml", 3, 5)
    assert fragment in error.message


@pytest.mark.parametrize(
    ("text", "line", "fragment"),
    [
        ("auditor-usage: 2\nuses: [{path: a, protocol: cms}]\n", 1, "expected 1"),
        ("auditor-usage: 1\n", 1, "missing key 'uses'"),
        ("auditor-usage: 1\nuses: []\n", 2, "found an empty list"),
        (HEAD + "  - {path: a}\n", 3, "a use: a mapping with path"),
        (HEAD + "  - {protocol: cms}\n", 3, "missing key 'path'"),
        (HEAD + "  - {path: /a, protocol: cms}\n", 3, "a pattern of paths below"),
        (HEAD + "  - {path: a, protocol: tls}\n", 3, "tls1.2, tls1.3"),
        (HEAD + "  - {path: a, protocoll: cms}\n", 3, "did you mean 'protocol'?"),
        (HEAD + "  - {path: a, purpose: signature, scheme: elgamal-raw}\n", 3, "a scheme of sign"),
        (HEAD + "  - {path: a, scheme: dsa}\n", 3, "missing key 'purpose'"),
        (HEAD + "  - {path: a, modulus: p}\n", 3, "missing key 'generator'"),
        (HEAD + "  - {path: 'a*', modulus: p, generator: 2}\n", 3, "the path of one file"),
        (HEAD + "  - {path: a, name: b, modulus: p, generator: 2}\n", 3, "no name: a set made"),
        (HEAD + "  - {path: a, modulus: p, generator: -2}\n", 3, "an integer of at least 0"),
        (HEAD + "  - path: a\n    protocol: cms\n    protocol: ssh\n", 5, "duplicate key"),
        (HEAD + "  - {path: a, parties: [{role: x}], exponent: {bits: 9}}\n", 3, "either parties"),
        ("auditor-usage: 1\nuses: [\n", 3, "not YAML"),
    ],
)
def test_bad_files(text: str, line: int, fragment: str, tree: Path) -> None:
    """Strict as declaration documents: the place, what was found and what is expected."""
    errors = _read({"t/usage.yaml": text}, "t").errors
    assert {error.path for error in errors} == {"t/usage.yaml"}
    assert any(error.line == line and fragment in error.message for error in errors)


def test_sound_uses_beside_broken_ones(tree: Path) -> None:
    """One bad use does not silence the others."""
    uses = f"{HEAD}  - {{path: '**', protocol: what}}\n  - {{path: '**', protocol: cms}}\n"
    result = _read({"usage.yaml": uses, "dh.pem": DH})
    assert len(result.errors) == 1
    assert result.declarations[0].protocol == "cms"


def test_the_schema_agrees_with_that_of_documents() -> None:
    """What both formats have is defined alike, word for word."""
    ours = json.loads((data("reports") / SCHEMA).read_text("utf-8"))
    theirs = json.loads((data("reports") / "declaration.schema.json").read_text("utf-8"))
    use = ours["definitions"].pop("use")
    sets = theirs["definitions"]["parameter_set"]
    for name, definition in ours["definitions"].items():
        assert definition == theirs["definitions"][name]
    for key in USAGE:
        assert use["properties"][key] == sets["properties"][key]
    shared = [rule for rule in sets["allOf"] if rule["if"]["required"] == ["purpose"]]
    assert len(shared) == 3
    assert all(rule in use["allOf"] for rule in shared)
    assert use["dependencies"].items() >= sets["dependencies"].items()


def test_files_are_recorded_as_inputs(tree: Path) -> None:
    """A usage file moves answers, so its digest is in the report."""
    uses = f"{HEAD}  - {{path: '**', protocol: cms}}\n"
    result = _read({"usage.yaml": uses, "dh.pem": DH})
    assert [item.path for item in result.inputs] == ["dh.pem", "usage.yaml"]


def test_width_and_use_of_an_exponent_add_up(tree: Path) -> None:
    """Two uses say one each; so do two lists of parties with the same roles, in any order of the
    files; other roles replace them."""
    first = f"{HEAD}  - {{path: dh.pem, exponent: {{bits: 300, use: static}}}}\n"
    second = f"{HEAD}  - {{path: dh.pem, exponent: {{use: single}}}}\n"
    found = _one({"a.yaml": first, "b.yaml": second, "dh.pem": DH})
    assert found.parties == (Party(EVERYBODY, 300, "single"),)

    parties = "  - {path: dh.pem, parties: [{role: a, %s}, {role: b}]}\n"
    Path("a.yaml").write_text(HEAD + parties % "exponent: {bits: 300}, peer_check: []")
    found = _one({"b.yaml": HEAD + parties % "exponent: {use: static}"})
    assert found.parties == (Party("a", 300, "static", ()), Party("b"))

    found = _one({"c.yaml": f"{HEAD}  - {{path: dh.pem, parties: [{{role: b}}]}}\n"})
    assert found.parties == (Party("b"),)
