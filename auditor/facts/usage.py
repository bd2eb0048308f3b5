"""Facts about how the owner says the parameters are used: the owner's word, taken as such.

Facts over parties take the worst party, as the contract asks.
"""

from collections.abc import Callable

from auditor.declaration import EVERYBODY, Party
from auditor.facts.given import Given, narrow
from auditor.facts.registry import fact

PURPOSES = ("key-agreement", "encryption", "signature")
SCHEMES = (
    "elgamal-raw",
    "elgamal-encoded",
    "elgamal-hashed",
    "elgamal",
    "dsa",
    "schnorr",
)
PROTOCOLS = (
    "tls1.0",
    "tls1.1",
    "tls1.2",
    "tls1.3",
    "ssh",
    "ikev1",
    "ikev2",
    "cms",
    "openpgp",
    "custom",
)


def key_of(party: Party, key: str) -> str:
    """The declared key of a party, as messages and reports write it."""
    return key if party.role == EVERYBODY else f"parties.{party.role}.{key}"


def parties(given: Given) -> tuple[Party, ...]:
    """The declared parties, of which there is at least one."""
    return given.declaration.parties or (Party(EVERYBODY),)


@narrow
@fact("usage.purpose", "text", "what the group is for, as declared", PURPOSES)
def purpose(given: Given) -> str:
    return str(given.word("purpose"))


@narrow
@fact("usage.scheme", "text", "the scheme, as declared", SCHEMES)
def scheme(given: Given) -> str:
    if given.declaration.purpose == "key-agreement":
        given.rest_on("purpose")
        given.undefined()
    return str(given.word("scheme"))


@narrow
@fact("usage.protocol", "text", "the protocol, as declared", PROTOCOLS)
def protocol(given: Given) -> str:
    return str(given.word("protocol"))


@narrow
@fact("usage.message_length", "int", "bits of a raw message, as declared")
def message_length(given: Given) -> int:
    return int(given.word("message_bits"))


@narrow
@fact("usage.protect_until", "int", "year until which protection is needed, as declared")
def protect_until(given: Given) -> int:
    return int(given.word("protect_until"))


@narrow
@fact("usage.protection_stated", "bool", "a year until which protection is needed is declared")
def protection_stated(given: Given) -> bool:
    stated = given.declaration.protect_until is not None
    if stated:
        given.rest_on("protect_until")
    return stated


@fact("run.year", "int", "the year of the date that the review takes as today")
def year(given: Given) -> int:
    return given.run.year


def every_party_checks(given: Given, check: str) -> bool:
    """Whether each party makes that check; False as soon as one declares its checks without it."""
    silent = [party for party in given.see(parties) if party.peer_check is None]
    spoken = [party for party in given.see(parties) if party.peer_check is not None]
    without = [party for party in spoken if check not in (party.peer_check or ())]
    if silent and not without:
        given.undeclared(*(key_of(party, "peer_check") for party in silent))
    given.rest_on(*(key_of(party, "peer_check") for party in without or spoken))
    return not without


@narrow
@fact("usage.peer_range", "bool", "every party checks that a received value is in [2, n-2]")
def peer_range(given: Given) -> bool:
    return every_party_checks(given, "range")


@narrow
@fact(
    "usage.peer_membership",
    "bool",
    "every party checks that a received value y has y^q = 1 and y != 1",
)
def peer_membership(given: Given) -> bool:
    return every_party_checks(given, "membership")


@narrow
@fact(
    "usage.peer_cofactor",
    "bool",
    "every party multiplies its exponent by the cofactor and refuses the identity",
)
def peer_cofactor(given: Given) -> bool:
    return every_party_checks(given, "cofactor")


@narrow
@fact("usage.exponent_reused", "bool", "some party uses an exponent more than once")
def exponent_reused(given: Given) -> bool:
    return _some_party_uses(given, ("reused", "static"))


@narrow
@fact(
    "usage.ephemeral_reused",
    "bool",
    "some party uses an exponent more than once that is not declared to be static",
)
def ephemeral_reused(given: Given) -> bool:
    return _some_party_uses(given, ("reused",))


def _some_party_uses(given: Given, uses: tuple[str, ...]) -> bool:
    """Whether some party declares one of these uses; undeclared while a silent one might."""
    declared = given.see(parties)
    spoken = [party for party in declared if party.exponent_use is not None]
    silent = [party for party in declared if party.exponent_use is None]
    such = [party for party in spoken if party.exponent_use in uses]
    if silent and not such:
        given.undeclared(*(key_of(party, "exponent.use") for party in silent))
    given.rest_on(*(key_of(party, "exponent.use") for party in such or spoken))
    return bool(such)


@narrow
@fact(
    "usage.exponent_widths_declared",
    "bool",
    "present, and true, when every party declares the width of its exponent",
)
def exponent_widths_declared(given: Given) -> bool:
    silent = [party for party in given.see(parties) if party.exponent_bits is None]
    if silent:
        given.undeclared(*(key_of(party, "exponent.bits") for party in silent))
    given.rest_on(*(key_of(party, "exponent.bits") for party in given.see(parties)))
    return True


@narrow
@fact("usage.narrowest_exponent_at_most", "int", "bits of the narrowest exponent")
def narrowest_exponent(given: Given) -> int:
    """Loose while a party is silent: its exponent may be narrower still."""
    return _declared_width(given, min)


@narrow
@fact("usage.widest_exponent_at_least", "int", "bits of the widest exponent")
def widest_exponent(given: Given) -> int:
    """Loose while a party is silent: its exponent may be wider still."""
    return _declared_width(given, max)


def _declared_width(
    given: Given, extreme: Callable[[list[tuple[int, str]]], tuple[int, str]]
) -> int:
    spoken = [
        (party.exponent_bits, key_of(party, "exponent.bits"))
        for party in given.see(parties)
        if party.exponent_bits is not None
    ]
    if not spoken:
        given.see(exponent_widths_declared)
    bits, key = extreme(spoken)
    given.rest_on(key)
    if not given.see_or(exponent_widths_declared, False):
        given.loosen()
    return bits


@narrow
@fact("usage.exponent_width", "exhibit", "bits of the narrowest exponent whose width is declared")
def exponent_width(given: Given) -> int:
    width = given.see(narrowest_exponent)
    given.settle()
    return int(width)
