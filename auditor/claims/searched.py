"""The record of our own search effort: attested, because nobody can check what was not found."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from auditor.claims.base import Claim, Draw, require
from auditor.claims.reading import natural, only
from auditor.claims.standing import Standing

Run = tuple[str, tuple[tuple[str, int], ...]]
"""A method by name, and its parameters and counts in a fixed order."""


@dataclass(frozen=True)
class Searched(Claim):
    """A search of the stated extent was made in ``n`` and found no factor but those claimed.

    ``n`` is the composite rest that was left. ``runs`` lists each method with its bounds and
    counts; ``engine`` names what ran them.
    """

    kind = "searched"

    n: int
    engine: str
    runs: tuple[Run, ...]

    @property
    def standing(self) -> Standing:
        return Standing.ATTESTED

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "runs": [{"method": method, **dict(numbers)} for method, numbers in self.runs],
        }

    def certificate(self) -> dict[str, Any]:
        return {"engine": self.engine}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Searched":
        only(statement, "n", "runs")
        only(certificate, "engine")
        if uses:
            raise ValueError("this claim uses no other claim")
        if not isinstance(certificate["engine"], str) or not isinstance(statement["runs"], list):
            raise ValueError("expected an engine and a list of runs")
        runs = tuple(_run(record) for record in statement["runs"])
        return cls(natural(statement["n"]), certificate["engine"], runs)

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n > 1, "a search is in a number above 1")
        require(all(method for method, _ in self.runs), "a method without a name")


def _run(record: Any) -> Run:
    if not isinstance(record, dict) or not isinstance(record.get("method"), str):
        raise ValueError("expected a method and its numbers")
    numbers = ((key, natural(value)) for key, value in record.items() if key != "method")
    return record["method"], tuple(sorted(numbers))
