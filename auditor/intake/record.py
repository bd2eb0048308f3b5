"""A declaration from its record: a mapping in the words of the declaration document."""

from collections.abc import Iterable, Mapping
from typing import Any

from auditor.declaration import EVERYBODY, Declaration, Party, Place, Provenance
from auditor.encoding import canonical_json, integer, shorten
from auditor.schema_check import shipped_schema

SCHEMA = "declaration.schema.json"

NUMBERS = ("modulus", "generator", "subgroup_order", "cofactor")
NUMBER_LISTS = ("known_factors", "public_values")
COUNTS = ("message_bits", "required_strength", "protect_until")
WORDS = ("purpose", "scheme", "protocol")


def build(record: Mapping[str, Any], place: Place) -> Declaration:
    """The declaration of a record whose values have the right types, integers as ``int``."""
    values: dict[str, Any] = {key: record.get(key) for key in (*NUMBERS, *WORDS, *COUNTS)}
    values |= {key: tuple(record.get(key, ())) for key in NUMBER_LISTS}
    return Declaration(
        name=record["name"],
        place=place,
        parties=_parties(record),
        provenance=_provenance(record.get("provenance")),
        **values,
    )


def declaration_from(record: Mapping[str, Any], place: Place) -> Declaration:
    """The declaration that wrote ``record`` with :meth:`Declaration.document`.

    Its inverse, for declarations whose provenance values are sorted by key. ValueError for any
    other record: a missing or unknown key, a wrong type or word, a negative or misspelt integer.
    """
    try:
        declaration = build(_typed(record), place)
        same = canonical_json(declaration.document()) == canonical_json(record)
    except (AttributeError, KeyError, RecursionError, TypeError) as error:
        raise ValueError(f"not the record of a declaration: {type(error).__name__}") from None
    if not same:
        raise ValueError("not the record of a declaration: it holds more or other keys")
    return declaration


def _parties(record: Mapping[str, Any]) -> tuple[Party, ...]:
    if "parties" in record:
        return tuple(_party(party["role"], party) for party in record["parties"])
    alike = "exponent" in record or "peer_check" in record
    return (_party(EVERYBODY, record),) if alike else ()


def _party(role: str, record: Mapping[str, Any]) -> Party:
    exponent = record.get("exponent", {})
    checks = record.get("peer_check")
    return Party(
        role=role,
        exponent_bits=exponent.get("bits"),
        exponent_use=exponent.get("use"),
        peer_check=None if checks is None else tuple(checks),
    )


def _provenance(record: Mapping[str, Any] | None) -> Provenance | None:
    if record is None:
        return None
    values = sorted((key, value) for key, value in record.items() if key != "method")
    return Provenance(record["method"], tuple(values))


def _typed(record: Mapping[str, Any]) -> dict[str, Any]:
    """``record`` with hex text as integers; ValueError for a value of the wrong type."""
    typed = dict(record)
    _text(record["name"])
    typed |= {key: _natural(record[key]) for key in ("modulus", "generator")}
    for key in ("subgroup_order", "cofactor", *COUNTS):
        if key in record:
            typed[key] = _natural(record[key])
    for key in NUMBER_LISTS:
        if key in record:
            typed[key] = [_natural(item) for item in record[key]]
    words = shipped_schema(SCHEMA).document["definitions"]
    for key in WORDS:
        _one_of(record.get(key), words["parameter_set"]["properties"][key]["enum"])
    for party in (record, *record.get("parties", ())):
        exponent = party.get("exponent", {})
        _one_of(exponent.get("use"), words["exponent"]["properties"]["use"]["enum"])
        if "bits" in exponent:
            _natural(exponent["bits"])
        for check in party.get("peer_check", ()):
            _one_of(check, words["peer_check"]["items"]["enum"])
    for party in record.get("parties", ()):
        _text(party["role"])
    for key, value in record.get("provenance", {}).items():
        _text(value) if isinstance(value, str) or key == "method" else _natural(value)
    return typed


def _text(value: Any) -> None:
    if not isinstance(value, str):
        raise ValueError(f"not text: {shorten(value)}")


def _natural(value: Any) -> int:
    number = integer(value)
    if number < 0:
        raise ValueError(f"a negative integer: {shorten(number)}")
    return number


def _one_of(value: Any, words: Iterable[str]) -> None:
    if value is not None and value not in words:
        raise ValueError(f"not one of {', '.join(words)}: {shorten(value)}")
