"""A declaration to start from: of a standard group, or of the sets that a file holds.

What a file does not say stands in comments, each with a value that may be written there: only the
owner knows how the numbers are used.
"""

import json
import re
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from typing import Any

from auditor.advice.changes import TLS_WIDTHS
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.encoding import EXACT_IN_JSON
from auditor.facts.usage import PROTOCOLS, PURPOSES, SCHEMES
from auditor.intake.standard_groups import StandardGroup, match
from auditor.routes.standard_tables import modulus_strength

DIGITS_A_LINE = 72
LEAST_STRENGTH = 112

HEAD = """\
# A declaration to start from. Everything in it is the owner's word: correct what is not so, and
# where a line such as '#purpose: ...' can be said, take away its '#'. Then review this file.
auditor: 1
parameter_sets:
"""

_BARE = re.compile(r"[A-Za-z](?:[A-Za-z0-9 ()._-]*[A-Za-z0-9)])?")
_RESERVED = ("true", "false", "null", "yes", "no", "on", "off", "y", "n")
_USE = (
    "how often one exponent is used: single (drawn anew each time), reused (for a while), static "
    "(a key that stays)"
)
_CHECKS = (
    "what is done to received values: range (they are 2 to n-2), membership (y^q = 1, y != 1), "
    "cofactor (the exponent is multiplied by it, 1 is refused), certified; [] is nothing"
)

Line = tuple[str, str, str]
"""A key, a value that may be written there, and what it means."""


def of_group(group: StandardGroup) -> str:
    """A complete declaration of a standard group, used in the way that its strength asks for."""
    length, q = group.modulus.bit_length(), group.subgroup_order
    strength = max(LEAST_STRENGTH, modulus_strength(length))
    safe_prime = 2 * q + 1 == group.modulus
    width = TLS_WIDTHS.get(group.name, min(2 * strength, q.bit_length()))
    declaration = Declaration(
        name=f"key agreement in {group.name}",
        place=Place(group.source, 1),
        modulus=group.modulus,
        generator=group.generator,
        purpose="key-agreement",
        parties=(
            Party(
                EVERYBODY,
                exponent_bits=width if safe_prime else q.bit_length(),
                exponent_use="single",
                peer_check=("range",) if safe_prime else ("range", "membership"),
            ),
        ),
    )
    about = f"{group.source}: {length} bits; generator and order come with the name"
    return HEAD + "\n" + "\n".join(_lines(declaration, about, group)) + "\n"


def of_sets(declarations: Iterable[Declaration]) -> str:
    """The document of these sets, with the keys that are open in comments."""
    parts = [HEAD]
    for declaration in _distinct(declarations):
        place = declaration.place
        about = f"found in {place.path}, line {place.line}"
        name = match(declaration.modulus, declaration.generator).name
        about += "" if name == "none" else f"; the modulus is that of {name}"
        parts.append("\n".join(_lines(declaration, about)) + "\n")
    return "\n".join(parts)


def _distinct(declarations: Iterable[Declaration]) -> Iterator[Declaration]:
    """The sets under names that are unique in one document."""
    taken: set[str] = set()
    for declaration in declarations:
        name, count = declaration.name, 1
        while name in taken:
            count += 1
            name = f"{declaration.name} ({count})"
        taken.add(name)
        yield replace(declaration, name=name)


def _lines(
    declaration: Declaration, about: str, group: StandardGroup | None = None
) -> Iterator[str]:
    record = declaration.document()
    if group is not None:
        record["modulus"] = {"group": group.name}
        del record["generator"]
    yield f"  - name: {scalar(record.pop('name'))}"
    yield f"    # {' '.join(about.split())}"
    for key, example, meaning in questions(declaration):
        if key not in record and (not example or key in pointless(declaration)):
            continue
        if meaning:
            yield f"    # {meaning}"
        if key in record:
            yield from _entry(key, record[key])
        else:
            yield f"    #{key}: {example}"


def pointless(declaration: Declaration) -> tuple[str, ...]:
    """Keys that make no sense for the purpose, or are said of each party already."""
    by_party = ("exponent", "peer_check") if len(declaration.parties) > 1 else ()
    match declaration.purpose:
        case "key-agreement":
            return ("scheme", "message_bits", *by_party)
        case "signature":
            return ("message_bits", "peer_check", *by_party)
    return by_party


def questions(declaration: Declaration) -> Sequence[Line]:
    """Every key of a set in the order of the document; those without a value are not proposed."""
    width = 2 * max(LEAST_STRENGTH, modulus_strength(declaration.modulus.bit_length()))
    return (
        ("purpose", PURPOSES[0], _one_of(PURPOSES)),
        ("scheme", SCHEMES[2], f"encryption, then signatures: {_one_of(SCHEMES)}"),
        ("protocol", PROTOCOLS[-1], _one_of(PROTOCOLS)),
        ("modulus", "", ""),
        ("generator", "", ""),
        ("subgroup_order", "", "the order of the generator"),
        ("cofactor", "", "(n - 1) / subgroup_order, as X9.42 states it"),
        ("known_factors", "", "of the group order"),
        ("exponent", f"{{bits: {width}, use: single}}", f"width in bits, and {_USE}"),
        ("peer_check", "[range]", _CHECKS),
        ("parties", "", "who holds exponents, and what each checks"),
        ("message_bits", "128", "of a message that elgamal-raw encrypts"),
        ("public_values", "", "checked, never attacked"),
        ("provenance", '{method: other, text: "drawn by us"}', "how the numbers were made"),
        ("required_strength", str(LEAST_STRENGTH), "in bits; this one where nothing is said"),
        ("protect_until", "2035", "the year until which secrets have to last"),
    )


def _one_of(words: Sequence[str]) -> str:
    return ", ".join(words)


def _entry(key: str, value: Any) -> Iterator[str]:
    """A key with its value; long integers folded, lists of integers and parties an item a line."""
    if _is_long(value):
        yield f"    {key}: >-"
        yield from _folded(value, 6)
    elif isinstance(value, list) and key != "peer_check":
        yield f"    {key}:"
        for item in value:
            if _is_long(item):
                yield "      - >-"
                yield from _folded(item, 8)
            else:
                yield f"      - {flow(item)}"
    else:
        yield f"    {key}: {flow(value)}"


def _is_long(value: Any) -> bool:
    return isinstance(value, str) and value.startswith("0x") and int(value, 16) > EXACT_IN_JSON


def _folded(value: str, indent: int) -> Iterator[str]:
    for start in range(0, len(value), DIGITS_A_LINE):
        yield " " * indent + value[start : start + DIGITS_A_LINE]


def flow(value: Any) -> str:
    """A value on one line of YAML."""
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{key}: {flow(item)}" for key, item in value.items()) + "}"
    if isinstance(value, list):
        return "[" + ", ".join(map(flow, value)) + "]"
    return scalar(value) if isinstance(value, str) else str(value)


def scalar(text: str) -> str:
    """A scalar: bare where no reader could take it for anything else."""
    if _BARE.fullmatch(text) and text.lower() not in _RESERVED:
        return text
    quoted = json.dumps(text, ensure_ascii=False)
    return "".join(c if c.isprintable() else f"\\U{ord(c):08x}" for c in quoted)
