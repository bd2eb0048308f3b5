"""Outcomes of parts, found again by what was read on the way to them.

A part is a function of what it reads: of keys of the declaration, of answers of the claims, and of
other parts. What it reads first is always the same, and each answer decides what it reads next. So
a tree leads to its outcomes, with something to read at each fork and an answer on each way.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any, TypeVar

from auditor.questions import Question
from auditor.run_values import RunValues

Part = Callable[[Any], object]
"""A function of what is given."""

Lookup = tuple[str, tuple[object, ...], tuple[tuple[str, object], ...]]
"""A question to the claims: the name of the method, and with what it is called."""

Read = str | Lookup | Part
"""What an outcome depends on: a key of the declaration, a question to the claims, a part."""

Answer = object
"""What was read there; equal where it makes no difference to whatever reads it."""

NarrowPart = TypeVar("NarrowPart", bound=Part)

_narrow: set[Part] = set()


def narrow(part: NarrowPart) -> NarrowPart:
    """Mark a part that reads much and says little: what builds on it depends on what it says, not
    on what it read. Its values are hashable."""
    _narrow.add(part)
    return part


@dataclass(slots=True)
class Trace:
    """What a value rests on."""

    claims: set[str] = field(default_factory=set)
    rests_on: set[str] = field(default_factory=set)
    questions: set[Question] = field(default_factory=set)
    loose: bool = False

    def merge(self, other: "Trace") -> None:
        """Add what another value rests on."""
        self.claims |= other.claims
        self.rests_on |= other.rests_on
        self.questions |= other.questions
        self.loose |= other.loose


@dataclass(slots=True, eq=False)
class Seen:
    """The outcome of a part, with what it rests on and the ids of all claims consulted on the way.

    ``keys`` has a bit for each key of the declaration read on the way; ``fact`` is for the registry
    to keep what it makes of it.
    """

    value: object
    trace: Trace
    consulted: set[str]
    keys: int
    fact: object = None

    @property
    def content(self) -> tuple[object, ...]:
        """All that makes a difference to whatever builds on it."""
        trace = self.trace
        return (
            self.value,
            frozenset(trace.claims),
            frozenset(trace.rests_on),
            frozenset(trace.questions),
            trace.loose,
            frozenset(self.consulted),
        )


@dataclass(slots=True)
class _Fork:
    """Something to read, and where each answer leads."""

    read: Read
    ways: dict[Answer, "_Fork | Seen"] = field(default_factory=dict)


class Shared:
    """Outcomes of parts under the same run values, each computed once for all declarations and
    claims that agree in what the part read."""

    def __init__(self, run: RunValues) -> None:
        self.run = run
        self._ways: dict[Answer, _Fork | Seen] = {}
        self._said: dict[object, Seen] = {}

    def recall(self, part: Part, answer: Callable[[Read], Answer]) -> Seen | None:
        """The outcome of the part where everything that it reads has these answers."""
        found = self._ways.get(part)
        while isinstance(found, _Fork):
            found = found.ways.get(answer(found.read))
        return found

    def keep(self, part: Part, reads: Mapping[Read, Answer], seen: Seen) -> Seen:
        """Keep the outcome of a part that read this, in this order. Where a narrow part said the
        same before, that outcome comes back."""
        if part in _narrow:
            seen = self._said.setdefault((part, seen.content), seen)
        ways: dict[Answer, _Fork | Seen] = self._ways
        way: Answer = part
        for read, answer in reads.items():
            fork = ways.get(way)
            if fork is None:
                fork = ways[way] = _Fork(read)
            elif not isinstance(fork, _Fork) or fork.read != read:
                raise AssertionError(f"{part} does not read in an order that its reading decides")
            ways, way = fork.ways, answer
        ways[way] = seen
        return seen
