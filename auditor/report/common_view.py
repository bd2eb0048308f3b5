"""What sets of a run have in common, in words: factors of moduli, moduli, all values, files."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from auditor.report.text import Number
from auditor.report.words import listed, plural

MOST_NAMED = 12
"""Names written out in one entry; how many more there are is said."""


@dataclass(frozen=True, slots=True)
class Common:
    """One thing that several sets or files have in common, and which they are."""

    kind: str
    sentence: str
    """Without a full stop, and without a name from outside."""
    names: tuple[str, ...]

    @property
    def text(self) -> str:
        """The sentence with the first names."""
        return f"{self.sentence}: {listed(self.names, most=MOST_NAMED)}."


def common(overview: Mapping[str, Any]) -> tuple[Common, ...]:
    """Everything that the overview of a record says of more than one set or file, what weighs most
    first."""
    return (
        *_factors(overview),
        *_moduli(overview["moduli"]),
        *(_copies(entry["sets"]) for entry in overview["copies"]),
        *(_equal(entry["paths"]) for entry in overview["equal_files"]),
    )


def _factors(overview: Mapping[str, Any]) -> Iterator[Common]:
    users = {entry["digest"]: entry["sets"] for entry in overview["moduli"]}
    for entry in overview["shared_factors"]:
        number = Number.read(entry["factor"])
        sets = [name for digest in entry["moduli"] for name in users[digest]]
        yield Common(
            "factor",
            f"{plural(len(entry['moduli']), 'modulus', 'moduli')} have the factor {number.short} "
            f"({number.length} bits) in common, which anybody finds who knows two of them",
            tuple(sets),
        )


def _moduli(moduli: Sequence[Mapping[str, Any]]) -> Iterator[Common]:
    shared = [entry for entry in moduli if len(entry["sets"]) > 1]
    for entry in sorted(shared, key=lambda entry: -len(entry["sets"])):
        yield Common(
            "modulus",
            f"{plural(len(entry['sets']), 'set')} in {plural(len(entry['paths']), 'file')} use the "
            f"modulus of {entry['length']} bits with the SHA-256 {entry['digest'][:12]}",
            tuple(entry["sets"]),
        )


def _copies(sets: Sequence[str]) -> Common:
    sentence = f"{plural(len(sets), 'set')} are equal in all values and in their use"
    return Common("copies", sentence, tuple(sets))


def _equal(paths: Sequence[str]) -> Common:
    return Common("files", f"{plural(len(paths), 'file')} are equal byte for byte", tuple(paths))
