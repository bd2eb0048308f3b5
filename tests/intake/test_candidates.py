"""Big integers that may belong to a group: found by name, listed, and never reviewed unasked."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake.candidates import passed_over, read_candidates, role_of, waiting
from auditor.intake.standard_groups import find

GROUP = find("modp1024")
assert GROUP is not None
VALUE = GROUP.modulus - 2
DIGITS = f"{VALUE:X}"
PAIRS = [DIGITS[at : at + 2] for at in range(0, len(DIGITS), 2)]
BYTES = ", ".join(f"0x{pair}" for pair in PAIRS)
WRAPPED = ",\n    ".join(
    ", ".join(f"0x{pair}" for pair in PAIRS[at : at + 8]) for at in range(0, len(PAIRS), 8)
)
COLONS = ":\n        ".join(":".join(PAIRS[at : at + 15]) for at in range(0, len(PAIRS), 15))
WORDS = ", ".join(f"0x{DIGITS[at : at + 8]}" for at in range(0, len(DIGITS), 8))

FORMS = {
    "static const unsigned char dh1024_p[] = {\n    " + WRAPPED + ",\n};": "dh1024_p",
    f"uint8_t dh_prime[128] = {{ {BYTES} /* the end */ }};": "dh_prime",
    f"byte[] DH_MODULUS = new byte[] {{ (byte)0xff & 0, {BYTES} }};": None,
    f"byte[] DH_MODULUS = new byte[] {{ (byte)0x00, {BYTES} }};": "DH_MODULUS",
    f"var dhPrime = []byte{{{BYTES}}}": "dhPrime",
    f"const DH_P: [u8; 128] = [{BYTES}];": "DH_P",
    f"PRIME = 0x{DIGITS}\n": "PRIME",
    f'"modulus": "0x{DIGITS.lower()}",': "modulus",
    f"DH_P = int('{DIGITS}', 16)".replace("'", '"'): "DH_P",
    f'prime = int(\n    "{DIGITS[:100]}"\n    "{DIGITS[100:]}", 16)': "prime",
    f'var groupPrime = new BigInteger("{DIGITS[:100]}" +\n   "{DIGITS[100:]}", 16);': "groupPrime",
    f'modulus: "{":".join(PAIRS)}"': "modulus",
    f"    prime:\n        00:{COLONS}\n    generator: 2 (0x2)\n": "prime",
    f"modulus = {DIGITS}\n": "modulus",
}


@pytest.mark.parametrize(("text", "name"), FORMS.items())
def test_forms(text: str, name: str | None) -> None:
    """Each form gives the one number, its name and its place."""
    moduli = [item for item in read_candidates(text, "a").candidates if item.role == "modulus"]
    if name is None:
        assert moduli == []
        return
    (found,) = moduli
    assert (found.name, found.value) == (name, VALUE)
    before = text[: text.index(name)]
    assert (found.line, found.column) == (before.count("\n") + 1, len(before.split("\n")[-1]) + 1)


@pytest.mark.parametrize(
    ("name", "role"),
    [
        ("dh2048_p", "modulus"),
        ("DHModulus", "modulus"),
        ("group14Prime", "modulus"),
        ("prime", "modulus"),
        ("elgamal_q", "subgroup order"),
        ("subgroup_order", "subgroup order"),
        ("dsa.g", "generator"),
        ("generator", "generator"),
        ("dh_base", "generator"),
        ("database", None),
        ("p", None),
        ("rsa_modulus", None),
        ("RSAPrime1", None),
        ("key", None),
        ("primes_seen", None),
    ],
)
def test_roles(name: str, role: str | None) -> None:
    """The name has to say it; single letters only beside a word for such groups."""
    assert role_of(name) == role


@pytest.mark.parametrize(
    "text",
    [
        f"digest = 0x{DIGITS}",
        f"dh_p = 0x{'F' * 100}",
        f"rsa_modulus = 0x{DIGITS}",
        f"// dh_p = 0x{DIGITS}",
        f"/* dh_p = 0x{DIGITS} */",
        "dh_p[] = { 1, 2, 3 };",
        f"uint32_t dh_p[] = {{ {WORDS} }}",
    ],
)
def test_no_candidates(text: str) -> None:
    """Other names, short numbers, comments, and words whose order nobody knows."""
    assert read_candidates(text, "a").candidates == ()


def test_what_is_listed() -> None:
    """Each modulus with what a usage file would say; known ones and generators are not."""
    text = (
        f"unsigned char dh_p[] = {{ {BYTES} }};\nunsigned char dh_g[] = {{ 0x02 }};\n"
        f"PRIME = 0x{DIGITS}\nMODULUS = 0x{VALUE + 2:X}\n"
    )
    numbers = read_candidates(text, "src/a.c").candidates
    assert [(item.role, item.name) for item in numbers] == [
        ("modulus", "dh_p"),
        ("generator", "dh_g"),
        ("modulus", "PRIME"),
        ("modulus", "MODULUS"),
    ]
    first, second, third = map(passed_over, waiting(numbers, ()))
    assert (first.path, first.line) == ("src/a.c", 1)
    assert first.reason == (
        "candidate 'dh_p': 1024 bits; not reviewed unless a usage file names it "
        "(modulus: dh_p, generator: dh_g)"
    )
    assert "generator: an integer" in second.reason
    assert "1024 bits, the modulus of modp1024;" in third.reason
    assert [item.line for item in map(passed_over, waiting(numbers, {VALUE}))] == [4]


def test_numbers_of_too_many_bits() -> None:
    """Beyond 65,536 bits there is no candidate."""
    assert len(read_candidates(f"modulus = 0x{'F' * 16384}", "a").candidates) == 1
    assert read_candidates(f"modulus = 0x{'F' * 16385}", "a").candidates == ()


PIECES = st.sampled_from(
    [*("dh_p", "prime", "[]", "=", ":", "{", "}", '"', "0x", BYTES, DIGITS, ",", "\n", "/*", "*/")]
)


@given(st.lists(PIECES | st.text(max_size=4), max_size=20).map("".join))
def test_any_text(text: str) -> None:
    """No text raises anything; every candidate stands where it says."""
    lines = text.split("\n")
    for item in read_candidates(text, "a").candidates:
        assert lines[item.line - 1][item.column - 1 :].startswith(item.name)
