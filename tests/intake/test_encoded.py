"""Groups in PEM and DER: what is read, what is left alone, and that private values never show."""

from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.declaration import EVERYBODY, Declaration, Party, Provenance
from auditor.encoding import canonical_json
from auditor.intake import encoded
from auditor.intake.encoded import LABELS, read_der, read_pem
from auditor.intake.standard_groups import find
from tests.intake.der_writer import (
    DH_KEY_AGREEMENT,
    DH_PUBLIC_NUMBER,
    DSA,
    RSA,
    bit_string,
    certificate,
    element,
    integer,
    integers,
    pem,
    private_key,
    public_key,
    request,
    sequence,
    validation,
)

GROUP = find("rfc5114-1024-160")
assert GROUP is not None
P, Q, G = GROUP.modulus, GROUP.subgroup_order, GROUP.generator
J = (P - 1) // Q
X = 0x1BADC0DE1BADC0DE1BADC0DE1BADC0DE1BADC0DE
Y = pow(G, X, P)


def _one(label: str, data: bytes) -> Declaration:
    result = read_pem(pem(label, data), "a.pem")
    assert result.errors == result.passed == ()
    (declaration,) = result.declarations
    assert declaration.name == f"{label} 1"
    return declaration


def _error(label: str, data: bytes) -> str:
    result = read_pem(pem(label, data) + pem("DH PARAMETERS", integers(23, 5)), "a.pem")
    (error,) = result.errors
    assert (error.path, error.line, error.column) == ("a.pem", 1, 1)
    assert [item.modulus for item in result.declarations] == [23]
    return error.message


def test_parameters_of_pkcs3() -> None:
    """Modulus and generator; the private value length is the exponent width of all parties."""
    plain = _one("DH PARAMETERS", integers(P, G))
    assert (plain.modulus, plain.generator, plain.subgroup_order) == (P, G, None)
    assert (plain.purpose, plain.scheme, plain.protocol) == ("key-agreement", None, None)
    assert plain.parties == ()
    assert _one("DH PARAMETERS", integers(P, G, 225)).parties == (
        Party(EVERYBODY, exponent_bits=225),
    )


def test_parameters_of_x942() -> None:
    """Generator before order; j is the declared cofactor, whatever it is."""
    plain = _one("X9.42 DH PARAMETERS", integers(P, G, Q))
    assert (plain.modulus, plain.generator, plain.subgroup_order) == (P, G, Q)
    assert plain.cofactor is None
    assert plain.provenance is None
    for j in (J, J + 1):
        stated = read_pem(pem("X9.42 DH PARAMETERS", integers(P, G, Q, j)), "a.pem")
        assert [item.cofactor for item in stated.declarations] == [j]
        assert not stated.notices


def test_validation_parameters() -> None:
    """Seed and counter are provenance: of FIPS 186-2 where its method is that of RFC 2631."""
    seed = bytes.fromhex("00d5014e4b60ef2ba8b6211b4062ba3224e0427d")
    parts = [integer(P), integer(G), integer(Q)]
    found = _one("X9.42 DH PARAMETERS", sequence(*parts, validation(seed, 105)))
    assert found.provenance == Provenance("fips186-2", (("counter", 105), ("seed", seed.hex())))
    with_j = sequence(*parts, integer(J), validation(seed, 105))
    assert _one("X9.42 DH PARAMETERS", with_j).provenance == found.provenance
    cut = seed[:-1] + b"\x70"
    for odd in (validation(cut, 105, unused=4), validation(seed, -1), validation(b"", 0)):
        provenance = _one("X9.42 DH PARAMETERS", sequence(*parts, odd)).provenance
        assert provenance is not None
        assert provenance.method == "other"
    large = sequence(integer(2**2047 + 1), integer(2), integer(2**255 + 1), validation(seed, 2**40))
    provenance = _one("X9.42 DH PARAMETERS", large).provenance
    assert provenance == Provenance(
        "other",
        (
            (
                "text",
                f"X9.42 validation parameters: seed {seed.hex()} of 160 bits, counter {2**40}",
            ),
        ),
    )
    long = sequence(*parts, validation(b"\xaa" * 5000, 10**30))
    text = dict(_one("X9.42 DH PARAMETERS", long).provenance.values)["text"]  # type: ignore[union-attr]
    assert isinstance(text, str)
    assert len(text) <= 2000


def test_parameters_of_dsa() -> None:
    """Order before generator; for signatures."""
    found = _one("DSA PARAMETERS", integers(P, Q, G))
    assert (found.modulus, found.generator, found.subgroup_order) == (P, G, Q)
    assert (found.purpose, found.scheme) == ("signature", "dsa")


KEYS = {
    "PKCS #3": (DH_KEY_AGREEMENT, integers(P, G), None, "key-agreement"),
    "X9.42": (DH_PUBLIC_NUMBER, integers(P, G, Q), Q, "key-agreement"),
    "DSA": (DSA, integers(P, Q, G), Q, "signature"),
}
WRAPPERS: dict[str, Callable[[bytes], bytes]] = {
    "PUBLIC KEY": lambda key: key,
    "CERTIFICATE": certificate,
    "CERTIFICATE REQUEST": request,
    "NEW CERTIFICATE REQUEST": request,
}


@pytest.mark.parametrize(("oid", "parameters", "order", "purpose"), KEYS.values(), ids=KEYS)
@pytest.mark.parametrize("label", WRAPPERS)
def test_public_keys(label: str, oid: bytes, parameters: bytes, order: int, purpose: str) -> None:
    """The object identifier tells the structure; the public value is kept."""
    data = WRAPPERS[label](public_key(oid, parameters, Y))
    found = _one(label, data)
    assert (found.modulus, found.generator, found.subgroup_order) == (P, G, order)
    assert (found.purpose, found.public_values) == (purpose, (Y,))
    (alone,) = read_der(data, "a.der").declarations
    assert alone.digest() == found.digest()


@pytest.mark.parametrize(("oid", "parameters", "order", "purpose"), KEYS.values(), ids=KEYS)
def test_private_keys(oid: bytes, parameters: bytes, order: int, purpose: str) -> None:
    """Of a key file only the parameters are read."""
    data = private_key(oid, parameters, X)
    found = _one("PRIVATE KEY", data)
    assert (found.modulus, found.subgroup_order, found.purpose) == (P, order, purpose)
    assert found.public_values == ()
    (alone,) = read_der(data, "a.der").declarations
    assert (alone.name, alone.digest()) == ("PRIVATE KEY", found.digest())


def test_traditional_private_keys() -> None:
    """Parameters and public value; a value that could be the private one is left aside."""
    found = _one("DSA PRIVATE KEY", integers(0, P, Q, G, Y, X))
    assert (found.modulus, found.subgroup_order, found.public_values) == (P, Q, (Y,))
    swapped = read_pem(pem("DSA PRIVATE KEY", integers(0, P, Q, G, X, Y)), "a.pem")
    assert swapped.declarations[0].public_values == ()
    assert "no more bits than q" in swapped.notices[0].message
    _assert_absent(X, swapped)


def _assert_absent(private: int, result: object) -> None:
    shown = repr(result)
    assert str(private) not in shown
    assert f"{private:x}" not in shown.lower()


PRIVATE_FILES = {
    **{f"PKCS #8, {name}": private_key(key[0], key[1], X) for name, key in KEYS.items()},
    "traditional": integers(0, P, Q, G, Y, X),
    "traditional, swapped": integers(0, P, Q, G, X, Y),
}


@given(
    st.sampled_from(sorted(PRIVATE_FILES)),
    st.sampled_from(LABELS),
    st.lists(st.tuples(st.integers(0, 10_000), st.integers(0, 255)), max_size=4),
    st.integers(0, 40),
)
def test_private_values_never_show(
    kind: str, label: str, changes: list[tuple[int, int]], cut: int
) -> None:
    """Whatever the damage and the label, no result, error or notice holds the private value."""
    data = bytearray(PRIVATE_FILES[kind])
    for at, byte in changes:
        data[at % len(data)] = byte
    damaged = bytes(data[: len(data) - cut])
    for result in (read_pem(pem(label, damaged), "a.pem"), read_der(damaged, "a.der")):
        _assert_absent(X, result)
        for declaration in result.declarations:
            assert f"{X:x}" not in canonical_json(declaration.document())


BAD_NUMBERS = [1, 2, 4, 2**64, P - 1, P * Q, 2**32768 + 1]


@pytest.mark.parametrize("modulus", BAD_NUMBERS, ids=lambda n: f"{n.bit_length()} bits")
@pytest.mark.parametrize("other", [0, 1, P - 1, P + 1], ids=["0", "1", "p-1", "p+1"])
def test_bad_values_are_read(modulus: int, other: int) -> None:
    """Judgement comes later: no reader refuses numbers that a declaration can hold."""
    order = max(other, 1)
    for label, data in (
        ("DH PARAMETERS", integers(modulus, other)),
        ("X9.42 DH PARAMETERS", integers(modulus, other, order)),
        ("DSA PARAMETERS", integers(modulus, order, other)),
        ("PUBLIC KEY", public_key(DSA, integers(modulus, order, other), other)),
        ("CERTIFICATE", certificate(public_key(DH_KEY_AGREEMENT, integers(modulus, other), 1))),
    ):
        found = _one(label, data)
        assert (found.modulus, found.generator) == (modulus, other)


@pytest.mark.parametrize(
    ("label", "data", "message"),
    [
        ("DH PARAMETERS", integers(0, 2), "the modulus is 0; expected at least 1"),
        ("DH PARAMETERS", integers(-P, 2), "the modulus is -0x"),
        ("DH PARAMETERS", integers(P, -2), "the generator is -2; expected at least 0"),
        ("DH PARAMETERS", integers(P, G, -1), "the private value length is -1"),
        ("DH PARAMETERS", integers(P, Q, G), "under a wrong label?"),
        ("DH PARAMETERS", integers(2**65536, 2), "has 65537 bits; expected at most 65536"),
        ("DSA PARAMETERS", integers(P, 0, G), "the subgroup order is 0; expected at least 1"),
        ("DSA PARAMETERS", integers(P, G), "it ends too early"),
        ("X9.42 DH PARAMETERS", integers(P, G, Q, 2**65536), "the j has 65537 bits"),
        ("X9.42 DH PARAMETERS", integers(P, G, Q, J, 1), "more follows than belongs to it"),
        ("PUBLIC KEY", public_key(DSA, integers(P, Q, G), -1), "the public value is -1"),
        ("PUBLIC KEY", integers(P, G), "it holds an element of another type"),
        (
            "PUBLIC KEY",
            sequence(sequence(DSA, integers(P, Q, G)), bit_string(integer(Y), 1)),
            "the public key is a bit string that does not end with a byte",
        ),
        ("PUBLIC KEY", public_key(DH_PUBLIC_NUMBER, b"", Y), "the parameters are missing"),
        ("PUBLIC KEY", public_key(DSA, element(5, b""), Y), "it holds an element of another type"),
        ("CERTIFICATE", public_key(DSA, integers(P, Q, G), Y), "it ends too early"),
    ],
)
def test_impossible_structures(label: str, data: bytes, message: str) -> None:
    """An error on the line of the block, and the next block is still read."""
    assert message in _error(label, data)


def test_a_private_value_length_of_zero_says_nothing() -> None:
    """It is no width, and no reason to refuse the parameters."""
    result = read_pem(pem("DH PARAMETERS", integers(P, G, 0)), "a.pem")
    assert result.declarations[0].parties == ()
    assert "the private value length is 0" in result.notices[0].message


def test_other_kinds_are_named_once() -> None:
    """Blocks without such a group are passed over, equal reasons together at the first."""
    rsa = public_key(RSA, element(5, b""), Y)
    text = (
        pem("CERTIFICATE", certificate(rsa))
        + pem("EC PRIVATE KEY", b"x" * 40)
        + pem("ENCRYPTED PRIVATE KEY", b"x" * 40)
        + pem("CERTIFICATE", certificate(rsa))
        + pem("PUBLIC KEY", public_key(DSA, b"", Y))
        + pem("PUBLIC KEY", public_key(bytes.fromhex("06032a0304"), b"", Y))
        + "-----BEGIN CERTIFICATE-----\n{{ certificate }}\n-----END CERTIFICATE-----\n"
    )
    result = read_pem(text, "a.pem")
    assert result.declarations == result.errors == ()
    assert [item.reason for item in result.passed] == [
        "CERTIFICATE: a key of another kind (RSA) (and 1 more in this file)",
        "EC PRIVATE KEY: not a kind of block that is read",
        "ENCRYPTED PRIVATE KEY: encrypted, which is not opened",
        "PUBLIC KEY: its DSA parameters are those of the issuer and stand elsewhere",
        "PUBLIC KEY: a key of another kind (1.2.3.4)",
        "CERTIFICATE: a placeholder stands where base64 text would",
    ]
    assert result.passed[0].line == 1


def test_numbers_within_a_label() -> None:
    """Sets are named by label and number; a bad block keeps its number."""
    text = (
        pem("DH PARAMETERS", integers(23, 5))
        + pem("DH PARAMETERS", b"nothing")
        + pem("DSA PARAMETERS", integers(23, 11, 4))
        + pem("DH PARAMETERS", integers(47, 5))
        + "-----END DH PARAMETERS-----\n"
    )
    result = read_pem(text, "a.pem")
    names = [(item.name, item.place.line) for item in result.declarations]
    assert names == [("DH PARAMETERS 1", 1), ("DSA PARAMETERS 1", 7), ("DH PARAMETERS 3", 10)]
    assert [(error.line, error.message.split(":")[0]) for error in result.errors] == [
        (4, "DH PARAMETERS"),
        (13, "found the END line of DH PARAMETERS without a BEGIN line"),
    ]


@pytest.mark.parametrize(
    ("data", "label"),
    [
        (integers(P, G), "DH PARAMETERS"),
        (integers(P, 2, 225), "DH PARAMETERS"),
        (integers(P, Q, G), "DSA PARAMETERS"),
        (integers(P, G, Q), "X9.42 DH PARAMETERS"),
        (integers(P, G, Q, J), "X9.42 DH PARAMETERS"),
        (sequence(integer(P), integer(G), integer(Q), validation(b"ab", 1)), "X9.42 DH PARAMETERS"),
        (integers(0, P, Q, G, Y, X), "DSA PRIVATE KEY"),
    ],
)
def test_shapes_of_der(data: bytes, label: str) -> None:
    """Without a label the shape tells, and the orders of q and g."""
    (found,) = read_der(data, "a.der").declarations
    assert (found.name, found.modulus, found.place.line) == (label, P, 1)


def test_shapes_that_two_kinds_share() -> None:
    """Nobody guesses: an error, or passed over where it is more often something else."""
    result = read_der(integers(P, P - 2, P - 4), "a.der")
    assert "may be parameters of PKCS #3, X9.42 or DSA" in result.errors[0].message
    for data in (integers(P, 65537), integers(2**520 + 1, 2**519 + 1)):
        result = read_der(data, "a.der")
        assert result.declarations == result.errors == ()
        assert "a public key of RSA or a signature" in result.passed[0].reason
    assert read_der(sequence(b""), "a.der").empty
    assert "not one DER structure" in read_der(integers(P, G) + b"\0", "a.der").errors[0].message


def test_the_number_of_blocks_is_bounded(monkeypatch: pytest.MonkeyPatch) -> None:
    """Beyond the bound the rest is an error, not silence."""
    monkeypatch.setattr(encoded, "MAX_BLOCKS", 2)
    result = read_pem(pem("DH PARAMETERS", integers(23, 5)) * 3, "a.pem")
    assert len(result.declarations) == 2
    assert [error.line for error in result.errors] == [7]


@given(st.binary(max_size=80), st.sampled_from(LABELS))
def test_any_bytes(data: bytes, label: str) -> None:
    """No bytes raise anything; each block ends as a set, an error or something passed over."""
    block, alone = read_pem(pem(label, b"0" + data), "a.pem"), read_der(data, "a.der")
    assert len(block.declarations) + len(block.errors) + len(block.passed) == 1
    assert len(alone.declarations) + len(alone.errors) + len(alone.passed) <= 1
    for result in (block, alone):
        assert all(len(error.message) < 300 for error in result.errors)
