"""The finite-field groups of the IETF registries, by the names of the trade and by their numbers.

The moduli of RFC 2409, 3526 and 7919 are safe primes made from the digits of pi and e; their
generator 2 has order (p-1)/2. The groups of RFC 5114 have a generator of a printed prime order and
no published account of their origin. Whether a group is fit for use is judged elsewhere.
"""

import re
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from typing import Literal, NamedTuple

from auditor.intake.standard_group_numbers import GENERATORS, MODULI, SUBGROUP_ORDERS


class Formula(NamedTuple):
    """The constant whose digits fill the modulus, and the offset that makes it a safe prime.

    With b the bit length: 2^b - 2^(b-64) - 1 + 2^64 (floor(2^(b-130) constant) + offset). RFC 2409,
    6.1 and RFC 7919, Appendix A write its terms in different orders.
    """

    constant: Literal["pi", "e"]
    offset: int


@dataclass(frozen=True, slots=True)
class StandardGroup:
    """A published group: names, registry numbers and values, with the place that prints them.

    ``ike`` is the number in the IKE registries (Group Description, Transform Type 4), ``tls`` the
    code point in TLS Supported Groups. ``aliases`` are spelled as documents spell them.
    """

    name: str
    aliases: tuple[str, ...]
    ike: int | None
    tls: int | None
    modulus: int
    generator: int
    subgroup_order: int
    formula: Formula | None
    source: str


class StandardMatch(NamedTuple):
    """The registry's name for a modulus, or ``none``, and whether the generator agrees too."""

    name: str
    match: Literal["exact", "modulus only", "none"]


# Bits, IKE number, offset, section. RFC 2409: the first two; RFC 3526: the others.
_MODP = (
    (768, 1, 149686, "RFC 2409, 6.1"),
    (1024, 2, 129093, "RFC 2409, 6.2"),
    (1536, 5, 741804, "RFC 3526, 2"),
    (2048, 14, 124476, "RFC 3526, 3"),
    (3072, 15, 1690314, "RFC 3526, 4"),
    (4096, 16, 240904, "RFC 3526, 5"),
    (6144, 17, 929484, "RFC 3526, 6"),
    (8192, 18, 4743158, "RFC 3526, 7"),
)

# Bits, TLS code point, offset, section of RFC 7919.
_FFDHE = (
    (2048, 256, 560316, "A.1"),
    (3072, 257, 2625351, "A.2"),
    (4096, 258, 5736041, "A.3"),
    (6144, 259, 15705020, "A.4"),
    (8192, 260, 10965728, "A.5"),
)

# Bits of p and q, IKE number, section of RFC 5114.
_WITH_PRINTED_ORDER = ((1024, 160, 22, "2.1"), (2048, 224, 23, "2.2"), (2048, 256, 24, "2.3"))

# SSH names of the same groups by IKE number: RFC 4253, 8.1 (its group1 is IKE's second), RFC 8268,
# 3, and RFC 9142, Table 12.
_SSH = {
    2: ("diffie-hellman-group1", "diffie-hellman-group1-sha1"),
    14: (
        "diffie-hellman-group14",
        "diffie-hellman-group14-sha1",
        "diffie-hellman-group14-sha256",
    ),
    **{
        number: (f"diffie-hellman-group{number}", f"diffie-hellman-group{number}-sha512")
        for number in (15, 16, 17, 18)
    },
}

_TWO_MEANINGS = {"group1": ("modp768", "modp1024")}
"""IKE counts the 768-bit group as its first, SSH the 1024-bit one: a bare number says nothing."""


@cache
def standard_groups() -> tuple[StandardGroup, ...]:
    """All groups of the registry, MODP first, then those with a printed order, then ffdhe."""
    modp = (_modp(*row) for row in _MODP)
    printed = (_printed(*row) for row in _WITH_PRINTED_ORDER)
    return (*modp, *printed, *(_ffdhe(*row) for row in _FFDHE))


def find(name: str) -> StandardGroup | None:
    """The group of that name or alias; case, blanks and punctuation do not matter."""
    return _by_name().get(_plain(name))


def suggest(name: str) -> tuple[str, ...]:
    """Registry names that ``name`` may have meant: none, one, or several for a number of two
    meanings."""
    plain = _plain(name)
    if plain in _TWO_MEANINGS:
        return _TWO_MEANINGS[plain]
    close = get_close_matches(plain, _by_name(), n=3, cutoff=0.75)
    return tuple(dict.fromkeys(_by_name()[key].name for key in close))[:1]


def match(modulus: int, generator: int) -> StandardMatch:
    """The published group with this modulus, and whether the generator is the published one."""
    group = _by_modulus().get(modulus)
    if group is None:
        return StandardMatch("none", "none")
    same = generator % modulus == group.generator
    return StandardMatch(group.name, "exact" if same else "modulus only")


@cache
def _by_name() -> dict[str, StandardGroup]:
    return {
        _plain(name): group for group in standard_groups() for name in (group.name, *group.aliases)
    }


@cache
def _by_modulus() -> dict[int, StandardGroup]:
    return {group.modulus: group for group in standard_groups()}


def _plain(name: str) -> str:
    return re.sub(r"[^a-z0-9]", "", name.lower())


def _ike_aliases(number: int) -> tuple[str, ...]:
    by_number = (f"group{number}", f"DH group {number}", f"dh{number}")
    return (f"ike{number}", *(by_number if number != 1 else ()))


def _modp(bits: int, number: int, offset: int, source: str) -> StandardGroup:
    aliases = (f"MODP-{bits}", f"{bits}-bit MODP", *_ike_aliases(number), *_SSH.get(number, ()))
    if number <= 2:
        aliases = (*aliases, f"oakley{number}")
    name = f"modp{bits}"
    return _safe_prime_group(name, aliases, number, None, Formula("pi", offset), source)


def _ffdhe(bits: int, code_point: int, offset: int, section: str) -> StandardGroup:
    source = f"RFC 7919, Appendix {section}"
    return _safe_prime_group(f"ffdhe{bits}", (), None, code_point, Formula("e", offset), source)


def _safe_prime_group(
    name: str,
    aliases: tuple[str, ...],
    ike: int | None,
    tls: int | None,
    formula: Formula,
    source: str,
) -> StandardGroup:
    modulus = int(MODULI[name], 16)
    order = (modulus - 1) // 2
    return StandardGroup(name, aliases, ike, tls, modulus, 2, order, formula, source)


def _printed(bits: int, order_bits: int, number: int, section: str) -> StandardGroup:
    name = f"rfc5114-{bits}-{order_bits}"
    aliases = (*_ike_aliases(number), f"modp{bits}s{order_bits}", f"RFC 5114 {section}")
    modulus, generator, order = (
        int(numbers[name], 16) for numbers in (MODULI, GENERATORS, SUBGROUP_ORDERS)
    )
    source = f"RFC 5114, {section}"
    return StandardGroup(name, aliases, number, None, modulus, generator, order, None, source)
