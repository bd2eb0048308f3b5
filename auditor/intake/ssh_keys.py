"""DSA groups in public keys of SSH, a line each: key files, authorized keys, known hosts.

RFC 4253, 6.6: the base64 text of the string ``ssh-dss`` and the integers p, q, g and y, encoded as
RFC 4251, 5 has it. A certificate of OpenSSH (its PROTOCOL.certkeys) has a nonce before p, and more
behind y, which is not looked at.
"""

import re
from binascii import Error, a2b_base64
from collections.abc import Iterator
from dataclasses import replace

from auditor.core_scalars import MAX_BITS
from auditor.declaration import Declaration, Place
from auditor.intake.inputs import InputError
from auditor.intake.reading import Notice, Reading
from auditor.schema_check import quoted

KEY, CERTIFICATE = "ssh-dss", "ssh-dss-cert-v01@openssh.com"

MAX_KEYS = 10_000
MAX_LENGTH = 100_000
"""Characters of a key; four integers of 65,536 bits take fewer."""

_LINE = re.compile(
    rf"(?<![^\s\"'`])(?P<kind>{KEY}|{re.escape(CERTIFICATE)})[ \t]+"
    r"(?P<text>AAAA[A-Za-z0-9+/]{12,}={0,2})(?=[\s\"'`,\\]|$)"
)


class _KeyError(ValueError):
    """A key cannot be read; the message says why and repeats no value of it."""


def read_ssh_keys(text: str, path: str) -> Reading:
    """The group of each key in ``text`` that calls itself ``ssh-dss``, named by its number.

    A damaged key is an error at its place. Lines that begin with ``#`` are comments.
    """
    if KEY not in text:
        return Reading()
    declarations: list[Declaration] = []
    errors: list[InputError] = []
    notices: list[Notice] = []
    for number, (place, kind, key) in enumerate(_keys(text, path), 1):
        if number > MAX_KEYS:
            message = f"found more than {MAX_KEYS} keys of SSH; the rest is not read"
            errors.append(InputError(path, place.line, place.column, message))
            break
        name = f"{KEY} {number}"
        try:
            declaration, remarks = _declaration(kind, key, name, place)
        except ValueError as error:
            errors.append(InputError(path, place.line, place.column, f"{KEY}: {error}"))
            continue
        declarations.append(declaration)
        notices += [Notice(path, place.line, f"{name}: {remark}") for remark in remarks]
    return Reading(tuple(declarations), tuple(errors), notices=tuple(notices))


def _keys(text: str, path: str) -> Iterator[tuple[Place, str, str]]:
    """The place, the kind and the base64 text of each key."""
    for number, line in enumerate(text.split("\n"), 1):
        if KEY in line and not line.lstrip().startswith("#"):
            for found in _LINE.finditer(line):
                yield Place(path, number, found.start() + 1), found["kind"], found["text"]


def _declaration(
    kind: str, text: str, name: str, place: Place
) -> tuple[Declaration, tuple[str, ...]]:
    """The set for signatures in SSH, and what is odd about its encoding."""
    from auditor.intake.encoded_sets import EncodedSet, refuse_impossible

    if len(text) > MAX_LENGTH:
        raise _KeyError(f"found a key of more than {MAX_LENGTH:,} characters")
    try:
        parts = _Parts(a2b_base64(text.encode("ascii"), strict_mode=True))
    except Error as error:
        raise _KeyError(f"not base64 text: {error}") from None
    inside = parts.string().decode("latin-1")
    if inside != kind:
        raise _KeyError(f"the key inside calls itself {quoted(inside)}")
    if kind == CERTIFICATE:
        parts.string()
    p, q, g, y = (parts.integer(letter) for letter in "pqgy")
    if kind == KEY:
        parts.end()
    refuse_impossible(modulus=(p, 1), subgroup_order=(q, 1), generator=(g, 0), public_value=(y, 0))
    found = EncodedSet("signature", p, g, "dsa", subgroup_order=q, public_values=(y,))
    return replace(found.declaration(name, place), protocol="ssh"), tuple(parts.remarks)


class _Parts:
    """The parts of a key one after the other; _KeyError where the bytes do not hold the next."""

    def __init__(self, data: bytes) -> None:
        self._data = data
        self._at = 0
        self.remarks: list[str] = []

    def string(self) -> bytes:
        start = self._at + 4
        end = start + int.from_bytes(self._data[self._at : start], "big")
        if end > len(self._data) or start > len(self._data):
            raise _KeyError("it ends too early")
        self._at = end
        return self._data[start:end]

    def integer(self, name: str) -> int:
        """An mpint: two's complement, in as few bytes as it takes."""
        data = self.string()
        value = int.from_bytes(data, "big", signed=True)
        if value < 0:
            raise _KeyError(f"{name} is negative")
        if value.bit_length() > MAX_BITS:
            raise _KeyError(f"{name} has more than {MAX_BITS} bits, the most that is read")
        if len(data) > (value.bit_length() + 8) // 8 or data == b"\0":
            self.remarks.append(f"{name} is encoded with leading zeros that RFC 4251, 5 forbids")
        return value

    def end(self) -> None:
        if self._at < len(self._data):
            raise _KeyError("more follows than belongs to it")
