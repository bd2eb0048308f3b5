"""Encoded parameters against published files: those of the package cryptography-vectors.

The oracle is the reader of the library cryptography, which is another code for the same structures,
wherever it accepts a file; the numbers of RFC 5114 are those of the registry of groups. The library
warns that it will give up finite-field Diffie-Hellman.
"""

import warnings
from collections.abc import Callable, Iterator
from importlib.resources import files
from pathlib import Path

import pytest
from cryptography import x509
from cryptography.hazmat.primitives.asymmetric import dsa

from auditor.declaration import EVERYBODY, Declaration, Party
from auditor.encoding import canonical_json
from auditor.intake.standard_groups import match
from auditor.intake.tree import InputResult, read_inputs

with warnings.catch_warnings():
    warnings.simplefilter("ignore")
    from cryptography.hazmat.primitives.asymmetric import dh
    from cryptography.hazmat.primitives.serialization import (
        load_der_private_key,
        load_der_public_key,
        load_pem_parameters,
        load_pem_private_key,
        load_pem_public_key,
    )

pytestmark = pytest.mark.filterwarnings("ignore::cryptography.utils.CryptographyDeprecationWarning")

VECTORS = Path(str(files("cryptography_vectors")))
DH = "asymmetric/DH/"
DER = "asymmetric/DER_Serialization/"
PEM = "asymmetric/PEM_Serialization/"
TRADITIONAL = "asymmetric/Traditional_OpenSSL_Serialization/"
PKCS8 = "asymmetric/PKCS8/"

Numbers = tuple[int, int, int | None, tuple[int, ...]]
"""Modulus, generator, order, public values."""


def _read(name: str) -> InputResult:
    return read_inputs([str(VECTORS / name)])


def _one(name: str) -> Declaration:
    result = _read(name)
    assert result.errors == ()
    (declaration,) = result.declarations
    return declaration


def _numbers(declaration: Declaration) -> Numbers:
    return (
        declaration.modulus,
        declaration.generator,
        declaration.subgroup_order,
        declaration.public_values,
    )


def _of_key(key: object, *, with_value: bool) -> Numbers:
    """What the library says that a public key holds."""
    assert isinstance(key, dh.DHPublicKey | dsa.DSAPublicKey)
    public = key.public_numbers()
    group = public.parameter_numbers
    return group.p, group.g, group.q, (public.y,) if with_value else ()


PUBLIC_KEYS: dict[str, Callable[[bytes], object]] = {
    DH + "dhpub.pem": load_pem_public_key,
    DH + "dhpub.der": load_der_public_key,
    DH + "dhpub_rfc5114_2.pem": load_pem_public_key,
    DH + "dhpub_rfc5114_2.der": load_der_public_key,
    DER + "dsa_public_key.der": load_der_public_key,
    DER + "unenc-dsa-pkcs8.pub.der": load_der_public_key,
    PEM + "dsa_public_key.pem": load_pem_public_key,
    PKCS8 + "unenc-dsa-pkcs8.pub.pem": load_pem_public_key,
    "x509/requests/dsa_sha1.pem": lambda data: x509.load_pem_x509_csr(data).public_key(),
    "x509/requests/dsa_sha1.der": lambda data: x509.load_der_x509_csr(data).public_key(),
    "x509/custom/dsa_selfsigned_ca.pem": lambda data: x509.load_pem_x509_certificate(
        data
    ).public_key(),
}


@pytest.mark.parametrize("name", PUBLIC_KEYS)
def test_public_keys(name: str) -> None:
    """Parameters and public value are those that the library reads."""
    expected = _of_key(PUBLIC_KEYS[name]((VECTORS / name).read_bytes()), with_value=True)
    assert _numbers(_one(name)) == expected


PRIVATE_KEYS = {
    DH + "dhkey.pem": False,
    DH + "dhkey.der": False,
    DH + "dhkey_rfc5114_2.pem": False,
    DH + "dhkey_rfc5114_2.der": False,
    DER + "unenc-dsa-pkcs8.der": False,
    DER + "dsa.1024.der": True,
    DER + "dsa.2048.der": True,
    DER + "dsa.3072.der": True,
    PKCS8 + "unenc-dsa-pkcs8.pem": False,
    TRADITIONAL + "dsa.1024.pem": True,
    TRADITIONAL + "dsa.2048.pem": True,
    TRADITIONAL + "dsa.3072.pem": True,
}


@pytest.mark.parametrize("name", PRIVATE_KEYS)
def test_private_keys(name: str) -> None:
    """Parameters, in traditional files the public value, and no trace of the private one."""
    load = load_der_private_key if name.endswith(".der") else load_pem_private_key
    key = load((VECTORS / name).read_bytes(), password=None)
    assert isinstance(key, dh.DHPrivateKey | dsa.DSAPrivateKey)
    result = _read(name)
    (found,) = result.declarations
    assert _numbers(found) == _of_key(key.public_key(), with_value=PRIVATE_KEYS[name])
    private = key.private_numbers().x
    shown = repr(result) + canonical_json(found.document())
    assert str(private) not in shown
    assert f"{private:x}" not in shown


@pytest.mark.parametrize("name", [DH + "dhp.pem", DH + "dhp_rfc5114_2.pem"])
def test_parameters(name: str) -> None:
    """Parameters without a key are those that the library reads."""
    parameters = load_pem_parameters((VECTORS / name).read_bytes())
    assert isinstance(parameters, dh.DHParameters)
    group = parameters.parameter_numbers()
    assert _numbers(_one(name)) == (group.p, group.g, group.q, ())


@pytest.mark.parametrize("name", ["dhp", "dhp_rfc5114_2", "dhpub", "dhpub_rfc5114_2", "dhkey"])
def test_both_encodings_agree(name: str) -> None:
    """PEM and DER of one structure give one set; bare DER is known by its shape."""
    assert _one(f"{DH}{name}.pem").digest() == _one(f"{DH}{name}.der").digest()


def test_private_value_length() -> None:
    """The length in the file of that name is the width of all exponents."""
    (party,) = _one(DH + "dhp_privatevaluelength.pem").parties
    assert isinstance(party, Party)
    assert party.role == EVERYBODY
    assert party.exponent_bits is not None


@pytest.mark.parametrize("name", ["dhp", "dhpub", "dhkey"])
def test_the_group_of_rfc_5114(name: str) -> None:
    """The files named after RFC 5114, 2.2 hold the group of that section."""
    found = _one(f"{DH}{name}_rfc5114_2.pem")
    assert match(found.modulus, found.generator) == ("rfc5114-2048-224", "exact")
    assert found.purpose == "key-agreement"


def test_dsa_parameters() -> None:
    """The library has no reader for them; their own law decides: g has order q modulo p."""
    found = _one(PEM + "dsaparam.pem")
    assert found.subgroup_order is not None
    assert (found.modulus - 1) % found.subgroup_order == 0
    assert pow(found.generator, found.subgroup_order, found.modulus) == 1 != found.generator
    assert (found.purpose, found.scheme) == ("signature", "dsa")


def test_values_that_make_no_group() -> None:
    """The file of that name has a generator that no key should have: read all the same."""
    found = _one("asymmetric/DSA/custom/nilpotent.pem")
    assert found.subgroup_order is not None
    assert pow(found.generator, found.subgroup_order, found.modulus) != 1


def _certificates() -> Iterator[tuple[str, object]]:
    """Every certificate of the public key interoperability test suite of NIST, with its key.

    The library refuses those that inherit the parameters of a DSA key.
    """
    for path in sorted((VECTORS / "x509/PKITS_data/certs").glob("*.crt")):
        try:
            yield str(path), x509.load_der_x509_certificate(path.read_bytes()).public_key()
        except ValueError:
            yield str(path), None


def test_certificates() -> None:
    """Of 405 certificates exactly those with a DSA key of their own give a set, and its numbers."""
    keys = dict(_certificates())
    assert len(keys) == 405
    result = read_inputs([str(VECTORS / "x509/PKITS_data/certs")])
    found = {item.place.path: item for item in result.declarations}
    expected = {path: key for path, key in keys.items() if isinstance(key, dsa.DSAPublicKey)}
    assert result.errors == ()
    assert found.keys() == expected.keys()
    assert len(found) > 1
    for path, key in expected.items():
        assert _numbers(found[path]) == _of_key(key, with_value=True)
    inherited = {item.path for item in result.passed if "those of the issuer" in item.reason}
    assert inherited == {path for path, key in keys.items() if key is None} != set()


@pytest.mark.parametrize(
    ("name", "reason"),
    [
        (DER + "dsa_public_key_no_params.der", "DSA parameters are those of the issuer"),
        (DER + "rsa_public_key.der", "(RSA)"),
        (DER + "ec_public_key.der", "(elliptic curves)"),
        (PEM + "dsa_private_key.pem", "encrypted, which is not opened"),
        (PKCS8 + "enc-rsa-pkcs8.pem", "encrypted, which is not opened"),
        ("x509/cryptography.io.with_headers.pem", "(RSA)"),
        ("asymmetric/Ed25519/ed25519-pub.pem", "(Ed25519)"),
    ],
)
def test_what_carries_no_group(name: str, reason: str) -> None:
    """Other keys, inherited parameters and encrypted files are passed over with the reason."""
    result = _read(name)
    assert result.declarations == result.errors == ()
    assert reason in result.passed[0].reason


@pytest.mark.parametrize(
    "name",
    [
        DER + "dsa_public_key_invalid_bit_string.der",
        "asymmetric/EC/truncated-private-key.der",
        "x509/cryptography.io.with_garbage.pem",
    ],
)
def test_damaged_files(name: str) -> None:
    """An error, and no set."""
    result = _read(name)
    assert result.declarations == ()
    assert result.errors != ()
