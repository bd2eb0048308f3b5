"""The declaration document: every key, every form of a number, and laws that any text obeys."""

import os
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.declaration import EVERYBODY, Party, Place, Provenance
from auditor.intake.document import DocumentResult, read_document
from auditor.intake.record import declaration_from
from auditor.intake.standard_groups import find
from tests.robustness.test_documents import DOCUMENTS

EVERY_KEY = """\
$schema: ../reports/declaration.schema.json
auditor: 1
parameter_sets:
  - name: quay-link handshake
    purpose: encryption
    scheme: elgamal-encoded
    protocol: custom
    modulus: 0x83
    generator: "00:02"
    subgroup_order: 13
    known_factors: [2, 5, "0x 0d"]
    parties:
      - {role: server, exponent: {bits: 256, use: static}, peer_check: [range]}
      - {role: client, exponent: {use: single}, peer_check: []}
      - role: witness
    message_bits: 128
    public_values: [0x3A, 7]
    provenance:
      method: fips186-4-probable-primes
      hash: sha256
      seed: "0A33 ff"
      counter: 370
      generator_index: 1
    required_strength: 128
    protect_until: 2034
  - name: alike
    modulus: 23
    generator: 5
    exponent: {bits: 4}
    peer_check: [range, membership]
"""


def _document(**keys: Any) -> str:
    record = {"name": "a", "modulus": 23, "generator": 5, **keys}
    return yaml.safe_dump({"auditor": 1, "parameter_sets": [record]})


def _read(text: str, root: Path | None = None, path: str = "links.yaml") -> DocumentResult:
    return read_document(text, path, root)


def test_every_key_is_read() -> None:
    """The document of the manual, key by key."""
    result = _read(EVERY_KEY)
    assert result.errors == ()
    one, two = result.declarations
    assert one.place == Place("links.yaml", 4, 5)
    assert one.identity == "links.yaml#quay-link handshake"
    assert (one.purpose, one.scheme, one.protocol) == ("encryption", "elgamal-encoded", "custom")
    assert (one.modulus, one.generator, one.subgroup_order) == (0x83, 2, 13)
    assert one.known_factors == (2, 5, 13)
    assert one.parties == (
        Party("server", 256, "static", ("range",)),
        Party("client", None, "single", ()),
        Party("witness"),
    )
    assert (one.message_bits, one.required_strength, one.protect_until) == (128, 128, 2034)
    assert one.public_values == (0x3A, 7)
    assert one.provenance == Provenance(
        "fips186-4-probable-primes",
        (("counter", 370), ("generator_index", 1), ("hash", "sha256"), ("seed", "0a33ff")),
    )
    assert two.parties == (Party(EVERYBODY, 4, None, ("range", "membership")),)
    assert two.provenance is None


def test_what_is_not_declared_stays_undeclared() -> None:
    """The least document leaves everything else empty."""
    (declaration,) = _read(_document()).declarations
    assert declaration.document() == {"name": "a", "modulus": 23, "generator": 5}
    assert declaration.required_bits == 112


@pytest.mark.parametrize(
    "provenance",
    [
        {"method": "fips186-4-probable-primes", "hash": "sha1", "seed": "00", "counter": 0},
        {
            "method": "fips186-4-provable-primes",
            "hash": "sha512-256",
            "first_seed": "01",
            "p_seed": "02",
            "q_seed": "03",
            "p_counter": 1,
            "q_counter": 2,
            "generator_index": 255,
        },
        {"method": "fips186-2", "seed": "0f", "counter": 4095},
        {"method": "pi-formula"},
        {"method": "e-formula"},
        {"method": "other", "text": "Drawn\nin our own workshop."},
    ],
)
def test_every_method_of_provenance(provenance: dict[str, Any]) -> None:
    """Each method with all of its keys."""
    result = _read(_document(provenance=provenance))
    assert result.errors == ()
    record = result.declarations[0].document()
    assert record["provenance"] == provenance


@pytest.mark.parametrize("modulus", [1, 2, 4, 15, 2**64])
def test_bad_numbers_are_data(modulus: int) -> None:
    """An even or composite modulus, 1 and a trivial generator are for rules to judge."""
    (declaration,) = _read(_document(modulus=modulus, generator=0)).declarations
    assert (declaration.modulus, declaration.generator) == (modulus, 0)


def test_a_group_supplies_generator_and_order() -> None:
    """``{group: NAME}`` alone is a complete set; aliases are understood."""
    text = "auditor: 1\nparameter_sets:\n  - {name: a, modulus: {group: Group 14}}\n"
    (declaration,) = _read(text).declarations
    group = find("modp2048")
    assert group is not None
    assert declaration.modulus == group.modulus
    assert declaration.generator == group.generator
    assert declaration.subgroup_order == group.subgroup_order


@pytest.mark.parametrize(
    ("keys", "generator", "order"),
    [
        ({"generator": 2}, 2, "group"),
        ({"generator": 5}, 5, None),
        ({"generator": 5, "subgroup_order": 11}, 5, 11),
        ({"subgroup_order": 11}, 2, 11),
    ],
)
def test_what_is_declared_beside_a_group_goes_first(
    keys: dict[str, int], generator: int, order: Any
) -> None:
    """Another generator replaces the group's, whose order is then not taken for its order."""
    record = {"name": "a", "modulus": {"group": "ffdhe2048"}, **keys}
    text = yaml.safe_dump({"auditor": 1, "parameter_sets": [record]})
    (declaration,) = _read(text).declarations
    group = find("ffdhe2048")
    assert group is not None
    assert declaration.generator == generator
    assert declaration.subgroup_order == (group.subgroup_order if order == "group" else order)


@pytest.mark.parametrize(
    "content", ["131\n", " 1 3\n1 ", "0x83", "0x00\n83\n", "00:83", "00:\n83\n"]
)
def test_files_hold_numbers(content: str, tmp_path: Path) -> None:
    """A number file beside or below the document, in any form; its digest is recorded."""
    (tmp_path / "sub").mkdir()
    (tmp_path / "sub" / "p.txt").write_text(content)
    path = (tmp_path / "links.yaml").as_posix()
    result = _read(_document(modulus={"file": "sub/p.txt"}), tmp_path, path)
    assert result.errors == ()
    assert result.declarations[0].modulus == 131
    assert [file.path for file in result.files] == [(tmp_path / "sub" / "p.txt").as_posix()]


def test_files_may_lie_above_the_document_inside_the_tree(tmp_path: Path) -> None:
    """The tree under review is the bound, not the document's directory."""
    (tmp_path / "sub").mkdir()
    (tmp_path / "p.txt").write_text("131")
    path = (tmp_path / "sub" / "links.yaml").as_posix()
    text = _document(modulus={"file": "../p.txt"})
    assert _read(text, tmp_path, path).declarations[0].modulus == 131
    (error,) = _read(text, tmp_path / "sub", path).errors
    assert "leaves the tree" in error.message


@pytest.mark.parametrize(
    ("reference", "fragment"),
    [
        ("../outside.txt", "leaves the tree"),
        ("sub/../../outside.txt", "leaves the tree"),
        ("link-out.txt", "leaves the tree"),
        ("directory-out/outside.txt", "leaves the tree"),
        ("loop.txt", "cannot be read"),
        ("absent.txt", "No such file"),
        (".", "cannot be read"),
        ("pipe", "not a regular file"),
        ("zero.txt", "found 0"),
        ("negative.txt", "does not hold one integer"),
        ("letters.txt", "does not hold one integer"),
        ("octets.bin", "does not hold one integer"),
        ("two.txt", "does not hold one integer"),
        ("empty.txt", "does not hold one integer"),
        ("long.txt", "65536 bits"),
        ("huge.txt", "more than 262144 bytes"),
        ("x" * 300, "cannot be read"),
    ],
)
def test_files_that_are_refused(reference: str, fragment: str, tmp_path: Path) -> None:
    """No way out of the tree, nothing but a bounded regular file, nothing but one integer."""
    (tmp_path / "outside.txt").write_text("131")
    tree = tmp_path / "tree"
    (tree / "sub").mkdir(parents=True)
    (tree / "link-out.txt").symlink_to(tmp_path / "outside.txt")
    (tree / "directory-out").symlink_to(tmp_path)
    (tree / "loop.txt").symlink_to("loop.txt")
    os.mkfifo(tree / "pipe")
    contents = {
        "zero.txt": b"0",
        "negative.txt": b"-131",
        "letters.txt": b"FF",
        "octets.bin": b"\xff\x00",
        "two.txt": b"131, 137",
        "empty.txt": b"",
        "long.txt": b"0x1" + b"0" * 16384,
        "huge.txt": b"1" * (2**18 + 1),
    }
    for name, content in contents.items():
        (tree / name).write_bytes(content)
    path = (tree / "links.yaml").as_posix()
    result = _read(_document(modulus={"file": reference}), tree, path)
    assert result.declarations == ()
    (error,) = result.errors
    assert fragment in error.message


def test_standard_input_names_no_files() -> None:
    """Without a root there is nothing that a path could be relative to."""
    (error,) = _read(_document(modulus={"file": "p.txt"}), None, "-").errors
    assert "standard input has no directory" in error.message


def test_links_inside_the_tree_are_followed(tmp_path: Path) -> None:
    """A link is judged by where it leads."""
    (tmp_path / "p.txt").write_text("131")
    (tmp_path / "link.txt").symlink_to("p.txt")
    path = (tmp_path / "links.yaml").as_posix()
    result = _read(_document(modulus={"file": "link.txt"}), tmp_path, path)
    assert result.declarations[0].modulus == 131


@pytest.mark.parametrize(("bits", "sound"), [(65536, True), (65537, False)])
def test_moduli_have_at_most_65536_bits(bits: int, sound: bool) -> None:
    """The bound holds for numbers and for text."""
    number = hex(2**bits - 1)
    text = f"auditor: 1\nparameter_sets:\n  - {{name: a, modulus: {number}, generator: '{number}'}}"
    result = _read(text)
    assert (len(result.declarations), len(result.errors)) == ((1, 0) if sound else (0, 2))


def test_a_problem_inside_an_alias_is_placed_where_it_stands() -> None:
    """A value used twice by an alias is an error of both sets that use it."""
    text = (
        "auditor: 1\nparameter_sets:\n"
        "  - {name: a, modulus: 23, generator: 5, exponent: &e {bits: 0}}\n"
        "  - {name: b, modulus: 23, generator: 5, exponent: *e}\n"
    )
    result = _read(text)
    assert result.declarations == ()
    assert [(error.line, error.column) for error in result.errors] == [(3, 62), (3, 62)]


def test_seeds_keep_their_leading_zeros() -> None:
    """A seed is a string of bytes, not an integer (FIPS 186-4, A.1.1.3)."""
    for text in ("000A33", "0x000a33", "00:0A:33", "00 0a 33"):
        result = _read(_document(provenance={"method": "fips186-2", "seed": text}))
        assert dict(result.declarations[0].provenance.values) == {"seed": "000a33"}


TEXTS = [EVERY_KEY, *(path.read_bytes().decode("utf-8", "replace") for path in DOCUMENTS)]
PIECES = [
    '"\\u202e": ',
    "!<%0A> ",
    "\n",
    "  ",
    "- ",
    ": ",
    "{",
    "}",
    "[",
    "]",
    '"',
    "&a ",
    "*a",
    "<<: ",
    "!!x ",
    "0x",
    "\t",
]


@given(
    st.sampled_from(TEXTS),
    st.lists(st.tuples(st.integers(0, 2000), st.integers(0, 8), st.sampled_from(PIECES))),
)
def test_mutated_documents_are_read_or_refused(text: str, cuts: list[tuple[int, int, str]]) -> None:
    """Any change to any document gives declarations and errors, and never an exception."""
    for position, length, piece in cuts:
        at = position % (len(text) + 1)
        text = text[:at] + piece + text[at + length :]
    _check(text)


@given(st.text(max_size=60))
def test_any_text_is_read_or_refused(text: str) -> None:
    """Arbitrary text, as a document and inside one."""
    _check(text)
    _check(f"auditor: 1\nparameter_sets:\n  - name: {text}\n    modulus: {text}\n")


KEYS = [
    *("name", "purpose", "scheme", "protocol", "modulus", "generator", "subgroup_order"),
    *("known_factors", "parties", "exponent", "peer_check", "message_bits", "public_values"),
    *("provenance", "required_strength", "protect_until", "other\n"),
]

_values = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**1100), 2**1100)
    | st.sampled_from(["0x17", "AB:CD", "FF", "ffdhe2048", "", "range", "single", "\u202e"]),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(
            st.sampled_from(["file", "group", "bits", "use", "role", "method", "seed", "\u202e"]),
            inner,
        )
    ),
    max_leaves=6,
)


@given(st.dictionaries(st.sampled_from(KEYS), _values, max_size=6))
def test_any_value_under_any_key_is_read_or_refused(keys: dict[str, Any]) -> None:
    """Shapes that no schema foresaw end as errors with places, too."""
    _check(_document(**keys))


@pytest.mark.parametrize(
    "keys", [{"parties": {"role": []}}, {"parties": [{"role": []}] * 2}, {"name": ["a"]}]
)
def test_names_of_other_shapes_are_not_compared(keys: dict[str, Any]) -> None:
    """Only text can be a repetition."""
    errors = _read(_document(**keys)).errors
    assert errors
    assert not any("already" in error.message for error in errors)


def _check(text: str) -> None:
    lines = text.count("\n") + text.count("\r") + 2
    result = _read(text)
    assert result.declarations or result.errors
    for error in result.errors:
        assert error.path == "links.yaml"
        assert error.message.isprintable()
        assert error.line >= 1
        assert error.column >= 1
        assert error.line <= lines + text.count("\x85") + text.count("\u2028") + text.count(
            "\u2029"
        )
    for declaration in result.declarations:
        assert declaration_from(declaration.document(), declaration.place) == declaration
