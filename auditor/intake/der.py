"""The ASN.1 structures that carry finite-field groups, and their DER decoding, which judges nothing
but the encoding.

PKCS #3, 9 (DHParameter); RFC 3279, 2.3.2 and 2.3.3 (Dss-Parms, DomainParameters, the public keys);
RFC 5280, 4.1 (certificates); RFC 2986, 4 (requests); RFC 5958, 2 (PKCS #8). Mind the order of q and
g, which differs between DSA and X9.42. Private values stay undecoded elements.
"""

import re
from typing import Annotated, TypeVar

from cryptography.hazmat import asn1
from cryptography.x509 import ObjectIdentifier

T = TypeVar("T")

_REASONS = {
    "ShortData": "it ends too early",
    "ExtraData": "more follows than belongs to it",
    "UnexpectedTag": "it holds an element of another type",
    "InvalidTag": "it holds an element of no valid type",
    "InvalidLength": "a length is not encoded as DER demands",
    "InvalidValue": "a value is not encoded as DER demands",
    "InvalidSize": "a part has a size that is not allowed",
    "OidTooLong": "an object identifier is too long",
}


class DerError(ValueError):
    """Bytes are not the DER encoding of a structure; the message says why, without the bytes."""


@asn1.sequence
class DHParameter:
    prime: int
    base: int
    private_value_length: int | None


@asn1.sequence
class ValidationParms:
    seed: asn1.BitString
    counter: int


@asn1.sequence
class DomainParameters:
    p: int
    g: int
    q: int
    j: int | None
    validation: ValidationParms | None


@asn1.sequence
class DssParms:
    p: int
    q: int
    g: int


@asn1.sequence
class DSAPrivateKey:
    version: int
    p: int
    q: int
    g: int
    y: int
    x: asn1.TLV


@asn1.sequence
class Algorithm:
    identifier: ObjectIdentifier


@asn1.sequence
class AlgorithmWithParameters:
    identifier: ObjectIdentifier
    parameters: asn1.TLV


@asn1.sequence
class SubjectPublicKeyInfo:
    algorithm: asn1.TLV
    key: asn1.BitString


@asn1.sequence
class TBSCertificate:
    version: Annotated[int | None, asn1.Explicit(0)]
    serial: asn1.TLV
    signature: asn1.TLV
    issuer: asn1.TLV
    validity: asn1.TLV
    subject: asn1.TLV
    key: SubjectPublicKeyInfo
    issuer_id: Annotated[asn1.BitString | None, asn1.Implicit(1)]
    subject_id: Annotated[asn1.BitString | None, asn1.Implicit(2)]
    extensions: Annotated[list[asn1.TLV] | None, asn1.Explicit(3)]


@asn1.sequence
class Certificate:
    to_be_signed: TBSCertificate
    algorithm: asn1.TLV
    signature: asn1.BitString


@asn1.sequence
class RequestInfo:
    version: int
    subject: asn1.TLV
    key: SubjectPublicKeyInfo
    attributes: asn1.TLV


@asn1.sequence
class Request:
    info: RequestInfo
    algorithm: asn1.TLV
    signature: asn1.BitString


@asn1.sequence
class PrivateKeyInfo:
    version: int
    algorithm: asn1.TLV
    private_key: asn1.TLV
    attributes: Annotated[asn1.SetOf[asn1.TLV] | None, asn1.Implicit(0)]
    public_key: Annotated[asn1.BitString | None, asn1.Implicit(1)]


@asn1.sequence
class EncryptedPrivateKeyInfo:
    algorithm: AlgorithmWithParameters
    data: bytes


def decode(structure: type[T], data: bytes) -> T:
    """The structure that ``data`` encodes, nothing before or after it; DerError otherwise."""
    try:
        return asn1.decode_der(structure, data)
    except ValueError as error:
        raise _der_error(error) from None


def parse(structure: type[T], element: asn1.TLV) -> T:
    """The structure that an undecoded element holds; DerError otherwise."""
    try:
        parsed: T = element.parse(structure)
        return parsed
    except ValueError as error:
        raise _der_error(error) from None


def is_element(data: bytes) -> bool:
    """Whether ``data`` is exactly one DER element, of whatever type."""
    try:
        decode(asn1.TLV, data)
    except DerError:
        return False
    return True


def algorithm_of(element: asn1.TLV) -> tuple[str, asn1.TLV | None]:
    """The dotted object identifier of an AlgorithmIdentifier, and its parameters if present."""
    try:
        alone = parse(Algorithm, element)
    except DerError:
        full = parse(AlgorithmWithParameters, element)
        return full.identifier.dotted_string, full.parameters
    return alone.identifier.dotted_string, None


def _der_error(error: ValueError) -> DerError:
    kind = re.search(r"kind: (\w+)", str(error))
    return DerError(_REASONS.get(kind[1] if kind else "", "it cannot be decoded"))
