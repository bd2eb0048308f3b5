"""What is true of a set and is no amount of work: forgery, telling apart, what its maker may know.

These sentences restate facts for the list that reports keep apart from the work of attacks.
"""

from collections.abc import Callable
from dataclasses import dataclass

from auditor.facts import generator, provenance, schemes
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.routes.base import floor_bits
from auditor.routes.signature_forgery import unknown_origin

BLEICHENBACHER = (
    "Bleichenbacher, Generating ElGamal signatures without knowing the secret key, EUROCRYPT 1996"
)


@dataclass(frozen=True, slots=True)
class Property:
    """A short name, what holds in a sentence or two, and the document that it comes from."""

    name: str
    statement: str
    source: str


def properties(given: Given) -> tuple[Property, ...]:
    """Those that hold, in a fixed order."""
    holding = (_forgery, _open_base, _range_of_r, _symbol, _distinguisher, _collisions)
    return tuple(found for one in holding for found in one(given))


def _holds(given: Given, part: Callable[[Given], object]) -> bool:
    return given.peek(part) is True


def _is_classical(given: Given) -> bool:
    return not isinstance(given.peek(schemes.signature_base), Absent)


def _forgery(given: Given) -> list[Property]:
    found = given.peek(schemes.cheapest_forgery)
    if isinstance(found, Absent) or not _holds(given, schemes.forgery_seen):
        return []
    work = f"The work is at most 2^{floor_bits(found.bits):.2f}, once for each public key."
    return [Property("signatures can be forged", f"{found.explanation} {work}", BLEICHENBACHER)]


def _open_base(given: Given) -> list[Property]:
    if not _is_classical(given) or _holds(given, generator.canonical):
        return []
    return [
        Property("origin of the base is open", unknown_origin().explanation, BLEICHENBACHER),
    ]


def _range_of_r(given: Given) -> list[Property]:
    if not _is_classical(given):
        return []
    statement = (
        "A verifier that accepts r outside 0 < r < p lets anybody turn one signature into a "
        "signature of another message."
    )
    return [Property("range of r", statement, BLEICHENBACHER)]


def _symbol(given: Given) -> list[Property]:
    if not _holds(given, schemes.message_symbol_leaks):
        return []
    statement = (
        "A ciphertext shows the Legendre symbol of its message: whether it is a square modulo p."
    )
    source = "Tsiounis and Yung, On the security of ElGamal based encryption, PKC 1998"
    return [Property("symbol of the message", statement, source)]


def _distinguisher(given: Given) -> list[Property]:
    if not _holds(given, schemes.distinguisher_seen):
        return []
    statement = (
        "Without any key a shared secret is told apart from a random element, or the encryption "
        "of one chosen message from that of another: residue symbols of small order are public."
    )
    return [
        Property("distinguishable", statement, "Boneh, The decision Diffie-Hellman problem, 1998")
    ]


def _collisions(given: Given) -> list[Property]:
    scheme = given.peek(schemes.signature_scheme)
    if scheme != "dsa" or _holds(given, provenance.verified):
        return []
    statement = (
        "Nothing shows how q was chosen, so its maker may know two messages that share every "
        "signature: q can be made the difference of their hashes."
    )
    source = "Vaudenay, Hidden collisions on DSS, CRYPTO 1996"
    return [Property("hidden collisions", statement, source)]
