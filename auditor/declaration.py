"""What an owner states about one parameter set: inert numbers and words, judged by nobody here.

A declaration holds any values, however bad; judgement happens in later, named steps.
"""

from dataclasses import dataclass, field, fields, replace
from typing import Any

from auditor.encoding import digest, plain

DEFAULT_STRENGTH = 112
"""Required bits where the owner states none: the least strength that SP 800-131A Rev. 2 and
SP 800-57 Part 1 Rev. 5, 5.6.3 Table 4 accept today."""

EVERYBODY = "all parties"
"""The role of the one party that stands for all when `exponent` and `peer_check` are at the top."""


@dataclass(frozen=True, slots=True)
class Place:
    """Where a set was declared: a path as given and a 1-based line and column."""

    path: str
    line: int
    column: int = 1


@dataclass(frozen=True, slots=True)
class Party:
    """Who holds an exponent, how wide and how often used, and what a received value undergoes.

    ``peer_check`` is None when the owner says nothing, and empty when nothing is checked.
    """

    role: str
    exponent_bits: int | None = None
    exponent_use: str | None = None
    peer_check: tuple[str, ...] | None = None


@dataclass(frozen=True, slots=True)
class Provenance:
    """How the owner says the numbers were made; the keys depend on the method."""

    method: str
    values: tuple[tuple[str, int | str], ...] = ()


@dataclass(frozen=True, slots=True)
class Declaration:
    """One parameter set as declared; integers are unreduced and may be any non-negative value."""

    name: str
    place: Place = field(compare=False)
    modulus: int
    generator: int
    purpose: str | None = None
    scheme: str | None = None
    protocol: str | None = None
    subgroup_order: int | None = None
    cofactor: int | None = None
    known_factors: tuple[int, ...] = ()
    parties: tuple[Party, ...] = ()
    message_bits: int | None = None
    public_values: tuple[int, ...] = ()
    provenance: Provenance | None = None
    required_strength: int | None = None
    protect_until: int | None = None

    @property
    def identity(self) -> str:
        """Path and name: unique within a run."""
        return f"{self.place.path}#{self.name}"

    @property
    def required_bits(self) -> int:
        """The declared strength, or the default."""
        return DEFAULT_STRENGTH if self.required_strength is None else self.required_strength

    @property
    def nameless(self) -> "Declaration":
        """What equal sets have in common, wherever and under whatever name they are declared."""
        return replace(self, name="", place=Place("", 1))

    @property
    def numbers(self) -> tuple[object, ...]:
        """What is declared of the integers; their use left out."""
        return (
            self.modulus,
            self.generator,
            self.subgroup_order,
            self.cofactor,
            self.known_factors,
            self.provenance,
            self.public_values,
        )

    def document(self) -> dict[str, Any]:
        """The set in the words of the declaration document, without what was not declared."""
        record: dict[str, Any] = {}
        for item in fields(self):
            value = getattr(self, item.name)
            if item.name != "place" and value is not None and value != ():
                record[item.name] = value
        record.pop("parties", None)
        record |= _parties_document(self.parties)
        if self.provenance is not None:
            record["provenance"] = {
                "method": self.provenance.method,
                **dict(self.provenance.values),
            }
        document: dict[str, Any] = plain(record)
        return document

    def digest(self) -> str:
        """SHA-256 over all values, usage included, without name and place."""
        record = self.document()
        del record["name"]
        return digest(record)


def _parties_document(parties: tuple[Party, ...]) -> dict[str, Any]:
    if [party.role for party in parties] == [EVERYBODY]:
        return _party_document(parties[0])
    listed = [{"role": party.role, **_party_document(party)} for party in parties]
    return {"parties": listed} if listed else {}


def _party_document(party: Party) -> dict[str, Any]:
    exponent = {"bits": party.exponent_bits, "use": party.exponent_use}
    exponent = {key: value for key, value in exponent.items() if value is not None}
    record: dict[str, Any] = {"exponent": exponent} if exponent else {}
    if party.peer_check is not None:
        record["peer_check"] = list(party.peer_check)
    return record
