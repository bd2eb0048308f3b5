"""DER and PEM written by hand for tests: a second implementation, which refuses nothing.

X.690, 8.1 to 8.7 and 8.19; the structures are those of PKCS #3, RFC 3279, RFC 5280 and RFC 5958.
"""

import base64
import textwrap

DH_KEY_AGREEMENT = bytes.fromhex("06092a864886f70d010301")
DH_PUBLIC_NUMBER = bytes.fromhex("06072a8648ce3e0201")
DSA = bytes.fromhex("06072a8648ce380401")
RSA = bytes.fromhex("06092a864886f70d010101")
"""Object identifiers, already encoded; RFC 3279 prints them."""


def element(tag: int, content: bytes) -> bytes:
    """Tag, length in the shortest form, content."""
    if len(content) < 128:
        return bytes([tag, len(content)]) + content
    size = len(content).to_bytes((len(content).bit_length() + 7) // 8, "big")
    return bytes([tag, 0x80 | len(size)]) + size + content


def integer(value: int) -> bytes:
    """An INTEGER, negative ones included."""
    size = (value if value >= 0 else ~value).bit_length() // 8 + 1
    return element(0x02, value.to_bytes(size, "big", signed=True))


def sequence(*parts: bytes) -> bytes:
    """A SEQUENCE of encoded parts."""
    return element(0x30, b"".join(parts))


def integers(*values: int) -> bytes:
    """A SEQUENCE of INTEGERs."""
    return sequence(*map(integer, values))


def bit_string(content: bytes, unused: int = 0) -> bytes:
    """A BIT STRING."""
    return element(0x03, bytes([unused]) + content)


def public_key(oid: bytes, parameters: bytes, y: int) -> bytes:
    """A SubjectPublicKeyInfo with an integer for a key."""
    return sequence(sequence(oid, parameters), bit_string(integer(y)))


def private_key(oid: bytes, parameters: bytes, x: int) -> bytes:
    """A PrivateKeyInfo of PKCS #8."""
    return sequence(integer(0), sequence(oid, parameters), element(0x04, integer(x)))


def validation(seed: bytes, counter: int, unused: int = 0) -> bytes:
    """ValidationParms of X9.42."""
    return sequence(bit_string(seed, unused), integer(counter))


def certificate(key: bytes) -> bytes:
    """A certificate of version 3 around a SubjectPublicKeyInfo, with a signature that is none."""
    name = sequence(
        element(0x31, sequence(bytes.fromhex("0603550403"), element(0x0C, b"harbour office")))
    )
    validity = sequence(element(0x17, b"250101000000Z"), element(0x17, b"350101000000Z"))
    algorithm = sequence(bytes.fromhex("06092a864886f70d01010b"), bytes.fromhex("0500"))
    signed = sequence(element(0xA0, integer(2)), integer(7), algorithm, name, validity, name, key)
    return sequence(signed, algorithm, bit_string(b"\xab" * 64))


def request(key: bytes) -> bytes:
    """A certification request of PKCS #10 around a SubjectPublicKeyInfo."""
    algorithm = sequence(bytes.fromhex("06092a864886f70d01010b"), bytes.fromhex("0500"))
    signed = sequence(integer(0), sequence(), key, element(0xA0, b""))
    return sequence(signed, algorithm, bit_string(b"\xab" * 64))


def pem(label: str, data: bytes) -> str:
    """A PEM block with lines of 64 characters (RFC 7468, 3)."""
    body = "\n".join(textwrap.wrap(base64.b64encode(data).decode(), 64))
    return f"-----BEGIN {label}-----\n{body}\n-----END {label}-----\n"
