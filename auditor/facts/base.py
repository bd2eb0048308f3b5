"""The shape of facts: a value with its standing, or an absence with its reason."""

from dataclasses import dataclass
from typing import Any, Literal

from auditor.claims.standing import Standing
from auditor.questions import Question

Reason = Literal["undefined", "undeclared", "unsettled"]
FactKind = Literal["bool", "int", "real", "text", "exhibit"]


@dataclass(frozen=True, slots=True)
class Fact:
    """A named value that follows from the declaration, the claims and the run values.

    ``tight`` is False while something unknown could still move the value; ``questions`` are what
    would move it. ``claims`` are ids, ``rests_on`` declared keys, both sorted.
    """

    value: Any
    standing: Standing
    tight: bool = True
    claims: tuple[str, ...] = ()
    rests_on: tuple[str, ...] = ()
    questions: tuple[Question, ...] = ()


@dataclass(frozen=True, slots=True)
class Absent:
    """Why a fact has no value, which keys the owner could declare, which questions are open."""

    reason: Reason
    keys: tuple[str, ...] = ()
    questions: tuple[Question, ...] = ()


@dataclass(frozen=True, slots=True)
class FactType:
    """A word of the vocabulary: what rules may say about a fact and readers may expect of it."""

    name: str
    kind: FactKind
    meaning: str
    values: tuple[str, ...] = ()

    @property
    def namespace(self) -> str:
        """The part before the dot."""
        return self.name.split(".", 1)[0]

    @property
    def bound(self) -> Literal["at_least", "at_most", "seen"] | None:
        """The direction in which more search may still move the value; None for a final one."""
        for ending in ("at_least", "at_most", "seen"):
            if self.name.endswith(f"_{ending}"):
                return ending
        return None
