"""From the bytes of one encoded structure to the group it carries and what it says of its use."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

from cryptography.hazmat import asn1

from auditor.core_scalars import MAX_BITS
from auditor.declaration import EVERYBODY, Declaration, Party, Place, Provenance
from auditor.encoding import shorten
from auditor.intake import der
from auditor.intake.der import DerError, algorithm_of, decode, parse

MAX_COUNTER = 2**32 - 1

DH_KEY_AGREEMENT = "1.2.840.113549.1.3.1"
DH_PUBLIC_NUMBER = "1.2.840.10046.2.1"
DSA = "1.2.840.10040.4.1"
"""Object identifiers: PKCS #3, 9; RFC 3279, 2.3.3; RFC 3279, 2.3.2."""

RSA_EXPONENTS = (3, 17, 65537)
LONGEST_OF_A_CURVE = 521
"""Bits of the largest numbers in signatures with the curves in use (FIPS 186-5: P-521)."""

_OTHERS = {
    "1.2.840.113549.1.1.1": "RSA",
    "1.2.840.113549.1.1.10": "RSA",
    "1.2.840.10045.2.1": "elliptic curves",
    "1.3.101.110": "X25519",
    "1.3.101.111": "X448",
    "1.3.101.112": "Ed25519",
    "1.3.101.113": "Ed448",
}


class EncodingError(ValueError):
    """A structure cannot be read; the message says why and repeats no private value."""


class OtherKind(Exception):
    """A sound structure that carries no finite-field group."""


@dataclass(frozen=True, slots=True)
class EncodedSet:
    """The numbers of one structure; ``remarks`` are contradictions that do not keep it from being
    read."""

    purpose: str
    modulus: int
    generator: int
    scheme: str | None = None
    subgroup_order: int | None = None
    cofactor: int | None = None
    exponent_bits: int | None = None
    public_values: tuple[int, ...] = ()
    provenance: Provenance | None = None
    remarks: tuple[str, ...] = field(default=(), compare=False)

    def declaration(self, name: str, place: Place) -> Declaration:
        """The set as a declaration; what the structure does not say stays undeclared."""
        width = self.exponent_bits
        return Declaration(
            name=name,
            place=place,
            modulus=self.modulus,
            generator=self.generator,
            purpose=self.purpose,
            scheme=self.scheme,
            subgroup_order=self.subgroup_order,
            cofactor=self.cofactor,
            parties=() if width is None else (Party(EVERYBODY, exponent_bits=width),),
            public_values=self.public_values,
            provenance=self.provenance,
        )


def encoded_set(label: str, data: bytes) -> EncodedSet:
    """The group in the structure that the PEM ``label`` names.

    EncodingError where it cannot be read, OtherKind where it carries another kind of key.
    """
    try:
        return _READERS[label](data)
    except DerError as error:
        raise EncodingError(str(error)) from None


def label_of(data: bytes) -> str | None:
    """The PEM label of a DER structure without one, by its shape; None for any other structure.

    EncodingError for what is not DER, and for three integers of unclear meaning; OtherKind for two
    integers that are more often something else.
    """
    if not der.is_element(data):
        raise EncodingError("found bytes that are not one DER structure from first to last")
    if (label := _label_of_parameters(data)) is not None:
        return label
    return next((label for label, shape in _SHAPES.items() if _decodes(shape, data)), None)


def _decodes(structure: type, data: bytes) -> bool:
    try:
        decode(structure, data)
    except DerError:
        return False
    return True


def _label_of_parameters(data: bytes) -> str | None:
    """Which of the parameter structures a sequence that begins with integers is.

    DSA puts q before g, X9.42 g before q, PKCS #3 a small length at the end. A public key of RSA
    is two integers as well, and so is a signature.
    """
    try:
        found = decode(der.DHParameter, data)
    except DerError:
        return "X9.42 DH PARAMETERS" if _decodes(der.DomainParameters, data) else None
    p, second, third = found.prime, found.base, found.private_value_length
    if third is None:
        if second in RSA_EXPONENTS or p.bit_length() <= LONGEST_OF_A_CURVE:
            raise OtherKind(
                "two integers that may be DH parameters, a public key of RSA or a signature; "
                "PEM with a label would tell"
            )
        return "DH PARAMETERS"
    is_order = [
        100 <= q.bit_length() < p.bit_length() and (p - 1) % q == 0 for q in (second, third)
    ]
    if is_order == [True, False]:
        return "DSA PARAMETERS"
    if is_order == [False, True]:
        return "X9.42 DH PARAMETERS"
    if third <= MAX_BITS:
        return "DH PARAMETERS"
    raise EncodingError(
        "found three integers that may be parameters of PKCS #3, X9.42 or DSA; "
        "expected PEM with a label"
    )


def _pkcs3(data: bytes) -> EncodedSet:
    return _from_pkcs3(decode(der.DHParameter, data))


def _from_pkcs3(found: der.DHParameter) -> EncodedSet:
    length = found.private_value_length
    if length is not None and not 0 <= length <= MAX_BITS:
        raise EncodingError(
            f"the private value length is {shorten(length)}; expected 0 to {MAX_BITS} bits: "
            "are these parameters of X9.42 or DSA under a wrong label?"
        )
    refuse_impossible(modulus=(found.prime, 1), generator=(found.base, 0))
    remarks = ("the private value length is 0, which says nothing",) if length == 0 else ()
    return EncodedSet(
        "key-agreement", found.prime, found.base, exponent_bits=length or None, remarks=remarks
    )


def _x942(data: bytes) -> EncodedSet:
    return _from_x942(decode(der.DomainParameters, data))


def _from_x942(found: der.DomainParameters) -> EncodedSet:
    refuse_impossible(
        modulus=(found.p, 1), generator=(found.g, 0), subgroup_order=(found.q, 1), j=(found.j, None)
    )
    return EncodedSet(
        "key-agreement",
        found.p,
        found.g,
        subgroup_order=found.q,
        cofactor=found.j,
        provenance=_provenance(found),
    )


def _provenance(found: der.DomainParameters) -> Provenance | None:
    """Seed and counter of X9.42 validation parameters.

    The structure names neither method nor hash. For q of 160 bits and p of at most 1024, the
    generation of RFC 2631, 2.2.1.1 is that of FIPS 186-2, Appendix 2.2, step for step; otherwise
    the values are kept as an account.
    """
    if found.validation is None:
        return None
    seed, counter = found.validation.seed, found.validation.counter
    digits, unused = seed.as_bytes().hex(), seed.padding_bits()
    small = found.q.bit_length() == 160 and found.p.bit_length() <= 1024
    if small and digits and unused == 0 and 0 <= counter <= MAX_COUNTER:
        return Provenance("fips186-2", (("counter", counter), ("seed", digits)))
    bits = 4 * len(digits) - unused
    text = (
        f"X9.42 validation parameters: seed {shorten(digits, 1500) or 'empty'} of {bits} bits, "
        f"counter {shorten(counter)}"
    )
    return Provenance("other", (("text", text),))


def _dsa(data: bytes) -> EncodedSet:
    return _from_dss(decode(der.DssParms, data))


def _from_dss(found: der.DssParms | der.DSAPrivateKey) -> EncodedSet:
    refuse_impossible(modulus=(found.p, 1), generator=(found.g, 0), subgroup_order=(found.q, 1))
    return EncodedSet("signature", found.p, found.g, scheme="dsa", subgroup_order=found.q)


def _dsa_key(data: bytes) -> EncodedSet:
    """The parameters of a traditional key, and y.

    Only a value of more bits than q is taken for y: whatever order a file has its integers in, the
    private one, which is less than q, is not among those kept.
    """
    found = decode(der.DSAPrivateKey, data)
    group = _from_dss(found)
    if found.y.bit_length() <= found.q.bit_length():
        return replace(group, remarks=("the public value has no more bits than q: left aside",))
    return _with_public_value(group, found.y)


def _public_key(data: bytes) -> EncodedSet:
    return _from_key(decode(der.SubjectPublicKeyInfo, data))


def _certificate(data: bytes) -> EncodedSet:
    return _from_key(decode(der.Certificate, data).to_be_signed.key)


def _request(data: bytes) -> EncodedSet:
    return _from_key(decode(der.Request, data).info.key)


def _private_key(data: bytes) -> EncodedSet:
    return _from_algorithm(decode(der.PrivateKeyInfo, data).algorithm)


def _from_key(info: der.SubjectPublicKeyInfo) -> EncodedSet:
    found = _from_algorithm(info.algorithm)
    if info.key.padding_bits():
        raise EncodingError("the public key is a bit string that does not end with a byte")
    return _with_public_value(found, decode(int, info.key.as_bytes()))


def _from_algorithm(element: asn1.TLV) -> EncodedSet:
    """The parameters of an AlgorithmIdentifier."""
    identifier, parameters = algorithm_of(element)
    if identifier not in (DH_KEY_AGREEMENT, DH_PUBLIC_NUMBER, DSA):
        raise OtherKind(f"a key of another kind ({_OTHERS.get(identifier, identifier)})")
    if parameters is None:
        if identifier == DSA:
            raise OtherKind("its DSA parameters are those of the issuer and stand elsewhere")
        raise EncodingError("the parameters are missing")
    if identifier == DH_KEY_AGREEMENT:
        return _from_pkcs3(parse(der.DHParameter, parameters))
    if identifier == DH_PUBLIC_NUMBER:
        return _from_x942(parse(der.DomainParameters, parameters))
    return _from_dss(parse(der.DssParms, parameters))


def _with_public_value(found: EncodedSet, value: int) -> EncodedSet:
    refuse_impossible(public_value=(value, 0))
    return replace(found, public_values=(value,))


def refuse_impossible(**numbers: tuple[int | None, int | None]) -> None:
    """EncodingError for integers that no declaration holds: too small, or of too many bits."""
    for key, (value, least) in numbers.items():
        name = key.replace("_", " ")
        if value is None:
            continue
        if least is not None and value < least:
            raise EncodingError(f"the {name} is {shorten(value)}; expected at least {least}")
        if value.bit_length() > MAX_BITS:
            raise EncodingError(
                f"the {name} has {value.bit_length()} bits; expected at most {MAX_BITS}"
            )


_READERS: Mapping[str, Callable[[bytes], EncodedSet]] = {
    "DH PARAMETERS": _pkcs3,
    "X9.42 DH PARAMETERS": _x942,
    "DSA PARAMETERS": _dsa,
    "DSA PRIVATE KEY": _dsa_key,
    "PUBLIC KEY": _public_key,
    "PRIVATE KEY": _private_key,
    "CERTIFICATE": _certificate,
    "CERTIFICATE REQUEST": _request,
    "NEW CERTIFICATE REQUEST": _request,
}

_SHAPES: Mapping[str, type] = {
    "CERTIFICATE": der.Certificate,
    "CERTIFICATE REQUEST": der.Request,
    "PUBLIC KEY": der.SubjectPublicKeyInfo,
    "PRIVATE KEY": der.PrivateKeyInfo,
    "DSA PRIVATE KEY": der.DSAPrivateKey,
}
