"""What a condition means before it runs: the kind of every part, and which way bounds move it.

CEL's own absorption hides typing errors until the day the other side of an ``||`` is false, and
the library has no checker; so every part is typed here. A bound may still move with more
knowledge, in one direction. A condition that such a move could turn from false to true would take
a finding back; it is refused.
"""

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Literal

from auditor.encoding import shorten
from auditor.facts.base import FactType
from auditor.rulebooks.condition_syntax import JUNCTIONS, LARGEST_INTEGER, Node, Scalar

Kind = Literal["bool", "int", "real", "text", "unknown"]
Move = tuple[str, Literal[-1, 1]]
"""A fact that knowing more may still move, and the way the part goes then; false is below true."""

_NUMBERS = ("int", "real")
_DIRECTION: dict[str | None, Literal[-1, 1]] = {"at_least": 1, "at_most": -1, "seen": 1}
_LARGEST_RESULT = 2**63 - 1


@dataclass(frozen=True, slots=True)
class Typed:
    """A part's kind, moves, words (of a text), sign (of a known number), and largest size."""

    kind: Kind
    moves: frozenset[Move] = frozenset()
    words: tuple[str, ...] = ()
    known: Scalar | None = None
    size: int = 0


@dataclass(frozen=True, slots=True)
class TypeProblem:
    """What is wrong with the part of a condition from ``start`` to ``end``."""

    message: str
    start: int
    end: int


_UNKNOWN = Typed("unknown")


def problems_of(
    node: Node, vocabulary: Mapping[str, FactType], values: Mapping[str, Scalar]
) -> list[TypeProblem]:
    """Everything wrong with a condition: names, kinds, words, and moves from false to true."""
    checker = _Checker(vocabulary, values)
    typed = checker.check(node)
    if typed.kind not in ("bool", "unknown"):
        checker.problem(
            node, f"this is {_a(typed.kind)}, expected a condition that is true or false"
        )
    for name in sorted({name for name, way in typed.moves if way > 0}):
        checker.problem(node, _turning(vocabulary[name]))
    return checker.problems


def suggestion(word: str, known: Iterable[str]) -> str:
    """``; did you mean 'x'?`` for the known word nearest to ``word``, or nothing."""
    near = difflib.get_close_matches(word, sorted(known), n=1)
    return f"; did you mean {near[0]!r}?" if near else ""


def _turning(fact: FactType) -> str:
    way = "fall" if fact.bound == "at_most" else "rise" if fact.bound == "at_least" else "come true"
    return (
        f"{fact.name} may still {way}, and could turn this from false to true; "
        "a finding must not be taken back: compare it the other way or use a final fact"
    )


def _a(kind: str) -> str:
    return {
        "bool": "a truth value",
        "int": "an integer",
        "real": "a real number",
        "text": "a text",
    }[kind]


def _flip(moves: frozenset[Move]) -> frozenset[Move]:
    return frozenset((name, 1 if way < 0 else -1) for name, way in moves)


@dataclass(slots=True)
class _Checker:
    vocabulary: Mapping[str, FactType]
    values: Mapping[str, Scalar]
    problems: list[TypeProblem] = field(default_factory=list)

    def problem(self, node: Node, message: str) -> Typed:
        self.problems.append(TypeProblem(message, node.start, node.end))
        return _UNKNOWN

    def check(self, node: Node) -> Typed:
        match node.op:
            case "literal":
                return _constant(node.value)
            case "name":
                return self.name(node)
            case "list":
                return self.literals(node)
            case "in":
                return self.membership(node)
        parts = [self.check(part) for part in node.parts]
        if any(part.kind == "unknown" for part in parts):
            return _UNKNOWN
        if node.op == "!" or node.op in JUNCTIONS:
            return self.logic(node, parts)
        if node.op in ("double", "negative", "+", "-", "*"):
            return self.arithmetic(node, parts)
        if node.op in ("==", "!="):
            return self.equality(node, *parts)
        return self.order(node, *parts)

    def name(self, node: Node) -> Typed:
        name = str(node.value)
        if name.startswith("values."):
            if name[7:] in self.values:
                return _constant(self.values[name[7:]])
            known = [f"values.{key}" for key in self.values]
            return self.problem(node, f"no such value in this book{suggestion(name, known)}")
        fact = self.vocabulary.get(name)
        if fact is None:
            return self.problem(node, f"no such fact{suggestion(name, self.vocabulary)}")
        if fact.kind == "exhibit":
            return self.problem(
                node, "this fact is an exhibit: findings may show it, conditions may not use it"
            )
        way = _DIRECTION.get(fact.bound)
        moves = frozenset({(name, way)}) if way else frozenset[Move]()
        return Typed(fact.kind, moves, fact.values, None, LARGEST_INTEGER)

    def literals(self, node: Node) -> Typed:
        kinds = {_constant(part.value).kind for part in node.parts}
        if len(kinds) > 1:
            return self.problem(node, "the literals of a list are of one kind")
        return Typed(kinds.pop())

    def membership(self, node: Node) -> Typed:
        left, right = node.parts
        if right.op != "list":
            return self.problem(right, "the right side of 'in' is a list of literals: ['a', 'b']")
        item, listed = self.check(left), self.check(right)
        if "unknown" in (item.kind, listed.kind):
            return _UNKNOWN
        if item.kind != listed.kind or item.kind not in ("int", "text"):
            return self.problem(node, f"{_a(item.kind)} cannot be in a list of this kind")
        for part in right.parts:
            self.word(part, item, _constant(part.value))
        return Typed("bool", item.moves | _flip(item.moves))

    def logic(self, node: Node, parts: list[Typed]) -> Typed:
        for part, typed in zip(node.parts, parts, strict=True):
            if typed.kind != "bool":
                return self.problem(part, f"this is {_a(typed.kind)}, {node.op} takes truth values")
        moves = frozenset[Move]().union(*(part.moves for part in parts))
        return Typed("bool", _flip(moves) if node.op == "!" else moves)

    def arithmetic(self, node: Node, parts: list[Typed]) -> Typed:
        for part, typed in zip(node.parts, parts, strict=True):
            if typed.kind not in _NUMBERS:
                return self.problem(part, f"this is {_a(typed.kind)}, expected a number")
        if node.op in ("double", "negative"):
            return _unary(node.op, parts[0])
        left, right = parts
        if left.kind != right.kind:
            return self.problem(
                node, "CEL does not mix integers and reals in + - *: write double() around one"
            )
        size = left.size * right.size if node.op == "*" else left.size + right.size
        if left.kind == "int" and size > _LARGEST_RESULT:
            return self.problem(node, "this may exceed CEL's 64-bit integers")
        moves = _product(left, right) if node.op == "*" else left.moves | right.moves
        if node.op == "-":
            moves = left.moves | _flip(right.moves)
        return Typed(left.kind, moves, (), None, size)

    def equality(self, node: Node, left: Typed, right: Typed) -> Typed:
        if "real" in (left.kind, right.kind):
            return self.problem(node, "reals are rounded; compare them with <, <=, > or >=")
        if left.kind != right.kind:
            return self.problem(node, f"{_a(left.kind)} is never equal to {_a(right.kind)}")
        self.word(node.parts[1], left, right)
        self.word(node.parts[0], right, left)
        moves = left.moves | right.moves
        return Typed("bool", moves | _flip(moves))

    def order(self, node: Node, left: Typed, right: Typed) -> Typed:
        for part, typed in zip(node.parts, (left, right), strict=True):
            if typed.kind not in _NUMBERS:
                return self.problem(
                    part, f"this is {_a(typed.kind)}, {node.op} compares numbers only"
                )
        rising = node.op in (">", ">=")
        up, down = (left.moves, right.moves) if rising else (right.moves, left.moves)
        return Typed("bool", up | _flip(down))

    def word(self, part: Node, fact: Typed, constant: Typed) -> None:
        """Refuse a text that the fact on the other side cannot take."""
        if isinstance(constant.known, str) and fact.words and constant.known not in fact.words:
            expected = ", ".join(repr(word) for word in fact.words)
            hint = suggestion(constant.known, fact.words)
            self.problem(part, f"not a value of that fact{hint} It takes {shorten(expected, 300)}")


def _constant(value: Scalar) -> Typed:
    if isinstance(value, bool):
        return Typed("bool", known=value)
    if isinstance(value, str):
        return Typed("text", known=value)
    return Typed("int" if isinstance(value, int) else "real", known=value, size=int(abs(value)))


def _unary(op: str, part: Typed) -> Typed:
    known = part.known if isinstance(part.known, int | float) else None
    if op == "double":
        return Typed("real", part.moves, (), None if known is None else float(known))
    return Typed(part.kind, _flip(part.moves), (), None if known is None else -known, part.size)


def _product(left: Typed, right: Typed) -> frozenset[Move]:
    for number, other in ((left.known, right), (right.known, left)):
        if isinstance(number, int | float):
            return _flip(other.moves) if number < 0 else other.moves
    moves = left.moves | right.moves
    return moves | _flip(moves)
