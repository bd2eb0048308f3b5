"""Damaged PEM, DER and moduli files: an error at its place for each, never anything else.

The cases are made from sound structures by rules, so that every kind of structure meets every kind
of damage.
"""

from collections.abc import Iterator
from pathlib import Path

import pytest

from auditor.intake.tree import read_inputs
from tests.intake.der_writer import (
    DH_KEY_AGREEMENT,
    DH_PUBLIC_NUMBER,
    DSA,
    certificate,
    integers,
    pem,
    private_key,
    public_key,
    request,
)

P = 2**1279 - 1
Q, G, J, X, Y = 2**160 - 47, 2**640 + 5, 2**1119 + 1, 2**159 + 1234567, 2**1278 + 7

SOUND = {
    "DH PARAMETERS": integers(P, G, 300),
    "X9.42 DH PARAMETERS": integers(P, G, Q, J),
    "DSA PARAMETERS": integers(P, Q, G),
    "PUBLIC KEY": public_key(DH_PUBLIC_NUMBER, integers(P, G, Q), Y),
    "PRIVATE KEY": private_key(DH_KEY_AGREEMENT, integers(P, G), X),
    "DSA PRIVATE KEY": integers(0, P, Q, G, Y, X),
    "CERTIFICATE": certificate(public_key(DSA, integers(P, Q, G), Y)),
    "CERTIFICATE REQUEST": request(public_key(DSA, integers(P, Q, G), Y)),
}
GOOD = pem("DH PARAMETERS", integers(2**607 - 1, 5))
RECORD = f"20250102030405 2 6 100 1278 5 {P:x}"


def _truncated(data: bytes) -> Iterator[tuple[str, bytes]]:
    for length in (1, 2, 3, 4, 10, len(data) // 2, len(data) - 20, len(data) - 1):
        yield f"cut to {length} bytes", data[:length]


def _with_other_tags(data: bytes) -> Iterator[tuple[str, bytes]]:
    for tag in (0x02, 0x31, 0x70, 0x1F, 0xB0):
        yield f"outer tag {tag:#x}", bytes([tag]) + data[1:]
    header = data.index(b"\x02\x81\xa0")
    for tag in (0x03, 0x04, 0x30, 0x82):
        yield f"tag {tag:#x} for p", data[:header] + bytes([tag]) + data[header + 1 :]


def _with_other_lengths(data: bytes) -> Iterator[tuple[str, bytes]]:
    body = data[4:]
    for name, header in {
        "indefinite": b"\x30\x80",
        "huge": b"\x30\x84\xff\xff\xff\xff",
        "of nine bytes": b"\x30\x89" + b"\xff" * 9,
        "of 127 bytes": b"\x30\xff",
        "not the shortest": b"\x30\x83\x00" + data[2:4],
        "one too long": b"\x30\x82" + (len(body) + 1).to_bytes(2, "big"),
        "one too short": b"\x30\x82" + (len(body) - 1).to_bytes(2, "big"),
        "zero": b"\x30\x00",
    }.items():
        yield f"length {name}", header + body
    at = data.index(b"\x02\x81\xa0")
    yield "length of p huge", data[:at] + b"\x02\x84\xff\xff\xff\xff" + data[at + 3 :]


def _with_more(data: bytes) -> Iterator[tuple[str, bytes]]:
    for more in (b"\0", b"\0\0", b"\n", data):
        yield f"{len(more)} bytes more", data + more


def damaged() -> Iterator[tuple[str, str, bytes]]:
    """Name, label and bytes of every damaged structure."""
    for label, data in SOUND.items():
        for damage in (_truncated, _with_other_tags, _with_other_lengths, _with_more):
            for name, result in damage(data):
                yield f"{label}, {name}", label, result


def bad_text() -> Iterator[tuple[str, str]]:
    """Name and text of every damaged block and every block under another's label."""
    for label, data in SOUND.items():
        text = pem(label, data)
        middle = len(text) // 2
        yield f"{label}, no END line", text[: text.index("-----END")]
        yield f"{label}, another END line", text.replace("END ", "END NO ")
        yield f"{label}, no BEGIN line", text[text.index("\n") + 1 :]
        yield f"{label}, a character of no base64", text[:middle] + "!" + text[middle + 1 :]
        yield f"{label}, a character less", text[:middle] + text[middle + 1 :]
        yield (
            f"{label}, a line less",
            "".join(line for at, line in enumerate(text.splitlines(keepends=True)) if at != 2),
        )
        for other in SOUND:
            if other not in (label, "DSA PARAMETERS", "X9.42 DH PARAMETERS"):
                yield f"{label} called {other}", pem(other, data)


def bad_records() -> Iterator[tuple[str, str]]:
    """Name and line of every damaged record."""
    fields = RECORD.split()
    for at in range(7):
        yield f"without field {at + 1}", " ".join(fields[:at] + fields[at + 1 :])
        yield f"field {at + 1} twice", " ".join([*fields[: at + 1], *fields[at:]])
        for wrong in ("-1", "0x2", "1.5", "1_0", "é", "\x00", "\x1b[31m", "9" * 30 + "z"):
            yield f"field {at + 1} {wrong!a}", " ".join([*fields[:at], wrong, *fields[at + 1 :]])
        yield f"up to field {at + 1}", " ".join(fields[: at + 1])[:-1]


DER_CASES = list(damaged())
PEM_CASES = [*((name, pem(label, data)) for name, label, data in DER_CASES), *bad_text()]
RECORD_CASES = [case for case in bad_records() if case[0] != "up to field 7"]


def test_there_are_enough_cases() -> None:
    """More than two hundred of each encoding, and more than fifty records."""
    assert min(len(DER_CASES), len(PEM_CASES)) > 200
    assert len(RECORD_CASES) > 50


def _read(content: bytes, name: str) -> list[str]:
    """The places of all errors after a sanity check of each."""
    Path(name).write_bytes(content)
    result = read_inputs([name])
    for error in result.errors:
        assert error.path == name
        assert 1 <= error.line <= content.count(b"\n") + 1
        assert error.column >= 1
        assert error.message.isprintable()
        assert len(error.message) < 300
    shown = repr(result)
    assert f"{X:x}" not in shown
    assert str(X) not in shown
    declared = [f"set {item.name}" for item in result.declarations]
    return [f"{error.line}:{error.column}" for error in result.errors] + declared


@pytest.mark.usefixtures("_here")
class TestDamage:
    """In a directory of its own."""

    @pytest.fixture
    def _here(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        monkeypatch.chdir(tmp_path)

    def test_der(self) -> None:
        """One error on the first line, no set."""
        found = {name: _read(data, "a.der") for name, _, data in DER_CASES}
        assert {name: places for name, places in found.items() if places != ["1:1"]} == {}

    def test_pem(self) -> None:
        """An error in the block, and the block after it is read."""
        for name, text in PEM_CASES:
            *errors, good = _read((text + GOOD).encode(), "a.pem")
            assert good.startswith("set DH PARAMETERS"), name
            assert errors, name
            assert not any(place.startswith("set") for place in errors), name

    def test_moduli(self) -> None:
        """One error on the line of the record, and the record after it is read."""
        for name, line in RECORD_CASES:
            found = _read(f"# primes\n{line}\n{RECORD}\n".encode(), "moduli")
            assert [place.split(":")[0] for place in found] == [
                "2",
                "set moduli line 3 (1278)",
            ], name
