"""Big integers that may belong to a group: found by name, listed, and never reviewed unasked."""

from collections.abc import Callable

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

ESCAPED = "".join(rf"\x{pair}" for pair in PAIRS)
DECIMALS = ", ".join(str(int(pair, 16)) for pair in PAIRS)
LOW_FIRST = ",".join(f"0x{VALUE >> at & 2**64 - 1:x}ULL" for at in range(0, 1024, 64))

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
    f'static const char *dh_p =\n  "{DIGITS[:100]}"\n  "{DIGITS[100:]}";': "dh_p",
    f'const char dh_p[] = "0x{DIGITS[:100]}" "{DIGITS[100:]}";': "dh_p",
    f'static const unsigned char dh_p[128] =\n "{ESCAPED[:256]}"\n "{ESCAPED[256:]}";': "dh_p",
    f"DH_P = b'{ESCAPED}'": "DH_P",
    f'#define DH_P "{DIGITS[:100]}" \\\n  "{DIGITS[100:]}"': "DH_P",
    f"# define DH_PRIME {DIGITS}": "DH_PRIME",
    f'var dhPrime, _ = new(big.Int).SetString("{DIGITS}", 16)': "dhPrime",
    f'dhPrime, ok := new(big.Int).SetString("{VALUE}", 10)': "dhPrime",
    f'dhPrime := big.NewInt(0).SetString("{VALUE}", 0)': "dhPrime",
    f'BigInteger PRIME = new BigInteger("{VALUE}");': "PRIME",
    f'BigInteger PRIME = new BigInteger("{VALUE}", 36);': None,
    f'let prime = BigUint::parse_bytes(b"{DIGITS}", 16).unwrap();': "prime",
    f'const DH_P: &\'static str = "{DIGITS}";': "DH_P",
    f"dh_p = {VALUE}\n": "dh_p",
    f"export const DH_P: bigint = 0x{DIGITS}n;": "DH_P",
    f"dh_p: Final[str] = '{DIGITS}'": "dh_p",
    f"case 'dh_p': prime = 0x{DIGITS};": "prime",
    f'case dh_p: prime = "{DIGITS}";': "prime",
    f"    #define DH_P 0x{DIGITS}": "DH_P",
    f"p = {VALUE}\n": "p",
    f'{{"p": "{DIGITS}", "g": 2}}': "p",
    f"const prime = {VALUE}n;": "prime",
    f"const DH_P: [u8; 128] = [{DECIMALS}];": "DH_P",
    f"dh_prime = bytes([{DECIMALS}])": "dh_prime",
    f"const DH_P: [u8; 128] = [0x{PAIRS[0]}u8, {DECIMALS.partition(', ')[2]}];": "DH_P",
    f"static const BN_ULONG dh1024_p[] = {{{LOW_FIRST}}};": "dh1024_p",
    f"const mp_limb_t dh_p[16] =\n{{\n {LOW_FIRST},\n}};": "dh_p",
    f"static const BN_ULONG dh_p[] = {{{', '.join(WORDS.split(', ')[::-1])}}};": "dh_p",
    f'a, prime = 2, "{DIGITS}"': None,
    f"group = DH(g=2, prime=0x{DIGITS})": "prime",
}
"""Text to the name of its one modulus, or None where there is more than one reading."""


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
        f"uint64_t dh_p[] = {{ {LOW_FIRST} }}",
        f"p = 0x{'F' * 100}",
        f"p = 0x{DIGITS}\nn = 0x{DIGITS}7\n",
        f"g = 0x{DIGITS}",
        "dh_p = [" + ", ".join("31415926535897932384" * 8) + "]",
        "dh_p = [" + ", ".join(["1000"] * 80) + "]",
        "dh_p = {" + ", ".join(["012"] * 80) + "};",
        f'BN_hex2bn(&dh_p, "{DIGITS}");',
        f"p, q = 0x{DIGITS}, 0x{DIGITS}",
    ],
)
def test_no_candidates(text: str) -> None:
    """Other names, short numbers, comments, keys of RSA, and what can be read in several ways."""
    assert read_candidates(text, "a").candidates == ()


def test_letters_alone() -> None:
    """A generator and an order are what they are called where a big p stands in the same file."""
    text = f'{{"p": "{DIGITS}", "q": "{DIGITS[:40]}", "g": "0x02"}}'
    found = read_candidates(text, "a.json").candidates
    assert [(item.name, item.role, item.value) for item in found] == [
        ("p", "modulus", VALUE),
        ("q", "subgroup order", int(DIGITS[:40], 16)),
        ("g", "generator", 2),
    ]


@pytest.mark.parametrize(
    ("text", "value"),
    [("'2'", 2), ("'11'", None), ("'0x11'", 17), ("'1a'", 26), ("'11', 16", 17), ("'11', 10", 11)],
)
def test_digits_whose_base_nobody_says(text: str, value: int | None) -> None:
    """A short number without a letter may be decimal or hexadecimal; then there is none."""
    found = read_candidates(f"dh_g = f({text})\ndh_p = 0x{DIGITS}", "a").candidates
    assert [item.value for item in found if item.role == "generator"] == ([value] if value else [])


WRITERS: dict[str, Callable[[int], str]] = {
    "hexadecimal": lambda n: f"dh_p = 0x{n:x};",
    "decimal": lambda n: f"dh_p = {n}\n",
    "text": lambda n: f"char dh_p[] =\n '{n:x}'\n;",
    "decimal text": lambda n: f'Integer dh_p = new Integer("{n}");',
    "bytes": lambda n: f"dh_p[] = {{{','.join(map(hex, _bytes(n)))}}}",
    "decimal bytes": lambda n: f"let dh_p: [u8; 9] = [{', '.join(map(str, _bytes(n)))}];",
    "escapes": lambda n: f'dh_p = b"{"".join(f"{chr(92)}x{byte:02x}" for byte in _bytes(n))}"',
    "words": lambda n: f"BN_ULONG dh_p[] = {{{', '.join(map(hex, _words(n)))}}};",
}


def _bytes(n: int) -> bytes:
    return n.to_bytes((n.bit_length() + 7) // 8, "big")


def _words(n: int) -> list[int]:
    return [n >> at & 2**64 - 1 for at in range(0, n.bit_length(), 64)]


@given(st.integers(2**511, 2**640).map(lambda n: n | 0xAB), st.sampled_from(sorted(WRITERS)))
def test_every_form_keeps_the_value(n: int, form: str) -> None:
    """What is written in a form is read back, where neither hexadecimal digits nor bytes are all
    decimal digits."""
    (found,) = read_candidates(f"// a\n{WRITERS[form](n)}\n", "a").candidates
    assert (found.name, found.value, found.line) == ("dh_p", n, 2)


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
    [
        *(
            "dh_p",
            "p",
            "BN_ULONG ",
            "#define ",
            r"\x41",
            "10, ",
            "'",
            "SetString(",
            ", 16)",
            "prime",
            "[]",
            "=",
            ":",
            "{",
            "}",
            '"',
            "0x",
            BYTES,
            DIGITS,
            ",",
            "\n",
            "/*",
            "*/",
        )
    ]
)


@given(st.lists(PIECES | st.text(max_size=4), max_size=20).map("".join))
def test_any_text(text: str) -> None:
    """No text raises anything; every candidate stands where it says."""
    lines = text.split("\n")
    for item in read_candidates(text, "a").candidates:
        assert lines[item.line - 1][item.column - 1 :].startswith(item.name)
