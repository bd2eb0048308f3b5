"""Moduli files: fields, places, and what a record says against itself."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake.moduli import is_moduli, read_moduli
from auditor.intake.standard_groups import find

GROUP = find("modp2048")
assert GROUP is not None
MODULUS = GROUP.modulus


def _record(**fields: object) -> str:
    values: dict[str, object] = {
        "time": "20250102030405",
        "type": 2,
        "tests": 6,
        "trials": 100,
        "size": 2047,
        "generator": 2,
        "modulus": f"{MODULUS:X}",
    } | fields
    return " ".join(str(value) for value in values.values())


def test_records() -> None:
    """Each record is a set for key agreement in SSH; comments and blank lines are none."""
    text = f"# Time Type Tests\n\n{_record()}\r\n  {_record(generator='1F')}\n"
    result = read_moduli(text, "etc/moduli")
    first, second = result.declarations
    assert (first.name, first.modulus, first.generator) == ("moduli line 3 (2047)", MODULUS, 2)
    assert (second.name, second.generator) == ("moduli line 4 (2047)", 31)
    assert (second.place.line, second.place.column) == (4, 3)
    assert (first.purpose, first.protocol, first.parties) == ("key-agreement", "ssh", ())
    assert result.errors == result.notices == ()


@pytest.mark.parametrize(
    ("line", "column", "fragment"),
    [
        ("20250102030405 2 6 100 2047 2", 29, "found 6 fields; expected 7: time, type"),
        (_record() + " more", 544, "found 8 fields"),
        (_record(time="today"), 1, "time: found 'today'; expected YYYYMMDDHHMMSS"),
        (_record(type="two"), 16, "type: found 'two'; expected a decimal integer"),
        (_record(tests="0x6"), 18, "tests: found '0x6'"),
        (_record(trials="-1"), 20, "trials: found '-1'"),
        (_record(size="4294967296"), 24, "size: found '4294967296'"),
        (_record(generator="g"), 29, "generator: found 'g'; expected hexadecimal digits"),
        (_record(modulus="0x17"), 31, "modulus: found '0x17'"),
        (_record(modulus="00"), 31, "modulus: found 0; expected at least 1"),
        (_record(modulus="F" * 16385), 31, "modulus: an integer of more than 65536 bits"),
        (_record(type="٢"), 16, "type: found"),
    ],
)
def test_bad_records(line: str, column: int, fragment: str) -> None:
    """A record that cannot be read is an error at its field; the records beside it are read."""
    result = read_moduli(f"{_record()}\n{line}\n{_record()}\n", "moduli")
    (error,) = result.errors
    assert (error.line, error.column) == (2, column)
    assert fragment in error.message
    assert [item.place.line for item in result.declarations] == [1, 3]


@pytest.mark.parametrize(
    ("fields", "fragment"),
    [
        ({"size": 2048}, "size is 2048; expected 2047, one less than the 2048 bits"),
        ({"size": 4095}, "size is 4095; expected 2047"),
        ({"type": 4}, "type is 4 (Sophie Germain prime); servers use only type 2"),
        ({"type": 0}, "type is 0 (unknown, not tested)"),
        ({"type": 9}, "type is 9 (not a type of the manual page)"),
        ({"tests": 7}, "tests is 7, which says that the modulus was found composite"),
        ({"tests": 2}, "tests is 2, which does not say that Miller-Rabin tests were done"),
        ({"trials": 0}, "trials is 0, although"),
        ({"tests": 14}, "tests is 14, which has bits"),
    ],
)
def test_contradictions(fields: dict[str, object], fragment: str) -> None:
    """What a record says against itself is noticed at its line, and the set is still read."""
    result = read_moduli(_record(**fields), "moduli")
    (notice,) = result.notices
    assert str(notice).startswith("moduli:1: ")
    assert fragment in notice.message
    assert [item.modulus for item in result.declarations] == [MODULUS]
    assert result.errors == ()


@pytest.mark.parametrize(
    ("text", "is_one"),
    [
        (_record(), True),
        (f"# comment\n\n   # more\n{_record()}", True),
        (f"Lines look like this:\n{_record()}", False),
        ("# only a comment\n", False),
        (_record(modulus="17"), False),
        ("", False),
    ],
)
def test_recognition(text: str, is_one: bool) -> None:
    """The first line that is no comment decides."""
    assert is_moduli(text) is is_one


FIELD = st.sampled_from(["2", "6", "20250102030405", "F" * 40, "x", "-1", "#", "0x1"])


@given(st.lists(st.lists(FIELD | st.text(max_size=6), max_size=9).map(" ".join)).map("\n".join))
def test_any_text(text: str) -> None:
    """Every line is a comment, a set or an error at its place."""
    result = read_moduli(text, "moduli")
    lines = text.split("\n")
    read = [item.place.line for item in result.declarations]
    failed = [error.line for error in result.errors]
    counted = [n for n, x in enumerate(lines, 1) if x.strip() and not x.lstrip().startswith("#")]
    assert sorted(read + failed) == counted
    assert all(error.column <= len(lines[error.line - 1]) for error in result.errors)
    assert all(error.message.isprintable() for error in result.errors)
