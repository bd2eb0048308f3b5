"""Conditions of rules: three-valued over facts that may be absent or may still move.

The one module that knows the evaluator. It is CEL as the ``common-expression-language`` package
runs it: an absent fact is a missing key, and ``&&`` and ``||`` absorb it where the other side
decides. What is added here are reasons and bounds:

- what kept a condition undecided are the absent facts it names, and the bounds that may still
  move, that could still decide it;
- when all of these are ``undefined``, the condition makes no sense for this set;
- a condition that is false with the bounds as they stand is false, since no bound can turn it to
  true (``condition_types`` refuses those); one that is true is asked again without
  the bounds that may still move, and is true only if it still is. ``_seen`` facts are exempt:
  what they have not seen they will never have excluded.
"""

import math
import sys
import types
from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from functools import lru_cache
from typing import Any

from auditor.encoding import shorten
from auditor.facts.base import Absent, Fact, FactType
from auditor.rulebooks.condition_syntax import (
    JUNCTIONS,
    LARGEST_INTEGER,
    Node,
    Scalar,
    SyntaxProblem,
    parse,
    render,
)
from auditor.rulebooks.condition_types import problems_of

# The package imports its interactive shell, which needs four more packages; nothing here does.
sys.modules.setdefault("cel.cli", types.ModuleType("cel.cli"))
import cel  # noqa: E402

Vocabulary = Mapping[str, FactType]


class ConditionError(ValueError):
    """A condition that is refused; ``problems`` are sentences that quote the part they concern."""

    def __init__(self, problems: tuple[str, ...]) -> None:
        super().__init__("; ".join(problems))
        self.problems = problems


class ConditionFault(RuntimeError):
    """A checked condition failed in the evaluator: a fault of this program, not of the set."""


class Verdict(StrEnum):
    """What a condition says of one set; ``undefined``: it makes no sense for it."""

    TRUE = "true"
    FALSE = "false"
    OPEN = "open"
    UNDEFINED = "undefined"


@dataclass(frozen=True, slots=True)
class Decision:
    """A verdict and, unless it is true or false, the facts it lacks, in the order of naming."""

    verdict: Verdict
    missing: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Condition:
    """A checked condition: its source, the facts it names, and the thresholds put into it.

    ``text`` is what the evaluator gets.
    """

    source: str
    text: str
    tree: Node
    values: Mapping[str, Scalar]
    names: tuple[str, ...]

    def decide(self, view: "View") -> Decision:
        """What the condition says of the set that ``view`` shows."""
        answer = self._ask(self.text, view.all)
        if answer is False:
            return Decision(Verdict.FALSE)
        if answer is True:
            if not any(name in view.loose for name in self.names):
                return Decision(Verdict.TRUE)
            if self._ask(self.text, view.certain) is True:
                return Decision(Verdict.TRUE)
        open_names = self._open_names(self.tree, view)
        missing = tuple(name for name in self.names if name in open_names)
        if all(view.absence(name).reason == "undefined" for name in missing):
            return Decision(Verdict.UNDEFINED, missing)
        return Decision(Verdict.OPEN, missing)

    def _ask(self, text: str, facts: "_Facts") -> bool | None:
        """What the evaluator says of a part; None where it needs an absent fact."""
        try:
            answer = _program(text).execute(facts.context)
        except KeyError:
            return None
        except Exception as error:
            raise ConditionFault(f"{self.source!r}: {error}") from error
        if not isinstance(answer, bool):
            raise ConditionFault(f"{self.source!r} gave {type(answer).__name__}")
        return answer

    def _open_names(self, node: Node, view: "View", final: bool = False) -> frozenset[str]:
        """The absent and loose facts that could still decide ``node``: none of a part that is
        decided.

        ``final`` is the answer that no bound can take back: false, or true below a negation. The
        other one stands only if it is given without the loose facts too.
        """
        text = render(node, self.values)
        answer = self._ask(text, view.all)
        if answer is final:
            return frozenset()
        if answer is not None and self._ask(text, view.certain) is not None:
            return frozenset()
        if node.op == "!" or node.op in JUNCTIONS:
            inner = final if node.op in JUNCTIONS else not final
            return frozenset().union(*(self._open_names(part, view, inner) for part in node.parts))
        known = view.all if answer is None else view.certain
        return frozenset(node.names()) - known.present


class Compiler:
    """Turns sources into conditions over one vocabulary, with a trial run of each."""

    def __init__(self, vocabulary: Vocabulary) -> None:
        self.vocabulary = vocabulary
        self._samples = [_sample(vocabulary, last) for last in (False, True)]

    def compile(self, source: str, values: Mapping[str, Scalar] | None = None) -> Condition:
        """The condition; ConditionError with everything that is wrong with it."""
        values = values or {}
        try:
            tree = parse(source)
        except SyntaxProblem as problem:
            raise ConditionError((_placed(problem.message, source, problem.start),)) from None
        found = problems_of(tree, self.vocabulary, values)
        if found:
            raise ConditionError(
                tuple(f"{shorten(source[p.start : p.end])}: {p.message}" for p in found)
            )
        names = tuple(name for name in tree.names() if not name.startswith("values."))
        condition = Condition(source, render(tree, values), tree, values, names)
        self._try(condition)
        return condition

    def _try(self, condition: Condition) -> None:
        """Run it on sample facts of every kind: the evaluator must agree with the checks."""
        for sample in self._samples:
            try:
                decided = condition._ask(condition.text, sample) is not None
            except ConditionFault as fault:
                raise ConditionError((f"the evaluator refuses it: {fault}",)) from fault
            if not decided:
                raise ConditionError(("the evaluator cannot decide it with every fact present",))


@dataclass(frozen=True, slots=True)
class _Facts:
    """Present facts, ready for the evaluator."""

    context: Any
    present: frozenset[str]


class View:
    """The facts of one parameter set, prepared once and read by every condition.

    A word of the vocabulary that is neither present nor absent counts as unsettled. ValueError
    for a fact outside the vocabulary, of another kind, or given both as present and as absent.
    """

    def __init__(
        self, facts: Mapping[str, Fact], absent: Mapping[str, Absent], vocabulary: Vocabulary
    ) -> None:
        for name in sorted((facts.keys() | absent.keys()) - vocabulary.keys()):
            raise ValueError(f"{name} is not in the vocabulary")
        for name in sorted(facts.keys() & absent.keys()):
            raise ValueError(f"{name} is given both as present and as absent")
        self.vocabulary = vocabulary
        self.facts = facts
        self._absent = absent
        values = {
            name: _evaluable(vocabulary[name], fact.value)
            for name, fact in facts.items()
            if vocabulary[name].kind != "exhibit"
        }
        self.loose = frozenset(
            name
            for name in values
            if not facts[name].tight and vocabulary[name].bound in ("at_least", "at_most")
        )
        self.all = _facts(vocabulary, values)
        self.certain = self.all
        if self.loose:
            kept = {name: value for name, value in values.items() if name not in self.loose}
            self.certain = _facts(vocabulary, kept)

    def absence(self, name: str) -> Absent:
        """Why a fact is missing; a bound that may still move is unsettled."""
        if name in self.facts:
            return Absent("unsettled", questions=self.facts[name].questions)
        return self._absent.get(name, Absent("unsettled"))


def _facts(vocabulary: Vocabulary, values: Mapping[str, Scalar]) -> _Facts:
    """Every namespace exists, if empty: the evaluator reports an absent one differently."""
    spaces: dict[str, dict[str, Scalar]] = {word.namespace: {} for word in vocabulary.values()}
    for name, value in values.items():
        space, _, short = name.partition(".")
        spaces[space][short] = value
    return _Facts(cel.Context(spaces), frozenset(values))


def _evaluable(word: FactType, value: Any) -> Scalar:
    """The value as the evaluator takes it; it would round a larger integer without a word."""
    if word.kind == "bool" and isinstance(value, bool):
        return value
    if word.kind == "text" and isinstance(value, str):
        return value
    if isinstance(value, int | float) and not isinstance(value, bool):
        if word.kind == "int" and isinstance(value, int) and abs(value) <= LARGEST_INTEGER:
            return value
        if word.kind == "real" and math.isfinite(value):
            return float(value)
    raise ValueError(f"{word.name} is {word.kind}, which {shorten(value)} is not, or out of range")


def _sample(vocabulary: Vocabulary, last: bool) -> _Facts:
    """A value of the right kind for every fact a condition may name."""
    values: dict[str, Scalar] = {}
    for name, word in vocabulary.items():
        words = word.values or ("text",)
        samples: dict[str, Scalar] = {
            "bool": last,
            "int": LARGEST_INTEGER if last else 1,
            "real": 1.5,
            "text": words[-1 if last else 0],
        }
        if word.kind in samples:
            values[name] = samples[word.kind]
    return _facts(vocabulary, values)


def _placed(message: str, source: str, start: int) -> str:
    rest = shorten(source[start:], 24)
    return f"{message} (character {start + 1}{f', at {rest!r}' if rest else ''})"


@lru_cache(maxsize=4096)
def _program(source: str) -> Any:
    """Compiled once for each text: a pure function, kept because it is asked for often."""
    return cel.compile(source)
