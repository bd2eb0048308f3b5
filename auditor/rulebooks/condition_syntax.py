"""The part of CEL that rules may use, as a tree: what it names can then be checked before it runs.

CEL is the Common Expression Language (the open specification kept with Google's cel-spec). Rules
get the part of it that can be analysed: literals, facts, ``values.NAME``, ``!``, ``&&``, ``||``,
comparisons, ``in`` over a list of literals, ``+``, ``-``, ``*``, ``double()`` and parentheses.
A tree is rendered back to CEL for the library to evaluate; nothing else reaches it.
"""

import json
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

Scalar = bool | int | float | str

LONGEST = 2000
DEEPEST = 24
LARGEST_INTEGER = 2**31 - 1
"""Literals and facts stay below it, so that a product of two fits CEL's 64-bit integers."""

COMPARISONS = ("==", "!=", "<", "<=", ">", ">=")
JUNCTIONS = ("&&", "||")
_BINDING = {
    "||": 1,
    "&&": 2,
    "+": 4,
    "-": 4,
    "*": 5,
    **dict.fromkeys((*COMPARISONS, "in"), 3),
}
_END = re.compile(r"\s*\Z", re.ASCII)
_TOKEN = re.compile(
    r"""\s*(?:
      (?P<real>[0-9]+\.[0-9]+) | (?P<integer>[0-9]+)
    | (?P<text>'[^'\\\n]*' | "[^"\\\n]*")
    | (?P<name>[A-Za-z_]\w*(?:\.[A-Za-z_]\w*)*)
    | (?P<sign>&&|\|\||[=!<>]=|[-+*<>!()\[\],])
    )""",
    re.VERBOSE | re.ASCII,
)
_REFUSED = {
    "?": "write the choice with && and ||",
    "/": "multiply the other side instead; a division may fail",
    "%": "remainders are not part of it",
    "&": "write &&",
    "|": "write ||",
    "=": "write == to compare",
    "\\": "text holds no escapes",
}
_REFUSED_FUNCTIONS = {
    "has": "has() would turn 'could not be established' into 'no'",
    "int": "int() would hide a fraction; compare with a real instead",
}


class SyntaxProblem(ValueError):
    """A condition that is not of the language: what is wrong, and where (0-based character)."""

    def __init__(self, message: str, start: int) -> None:
        super().__init__(message)
        self.message = message
        self.start = start


@dataclass(frozen=True, slots=True)
class Node:
    """One operator, name or literal of a condition, with where it stands in the source.

    ``op`` is ``literal``, ``name``, ``list``, ``double``, ``negative`` or CEL's own sign.
    """

    op: str
    start: int
    end: int
    parts: tuple["Node", ...] = ()
    value: Scalar = ""

    def walk(self) -> Iterator["Node"]:
        """This node and all below it, in the order of the source."""
        yield self
        for part in self.parts:
            yield from part.walk()

    @property
    def height(self) -> int:
        """How many levels the tree has."""
        return 1 + max((part.height for part in self.parts), default=0)

    def names(self) -> tuple[str, ...]:
        """The names it uses, in the order of first use."""
        return tuple(dict.fromkeys(str(n.value) for n in self.walk() if n.op == "name"))


@dataclass(frozen=True, slots=True)
class _Token:
    kind: str
    text: str
    start: int

    @property
    def end(self) -> int:
        return self.start + len(self.text)


def parse(source: str) -> Node:
    """The tree of ``source``; SyntaxProblem where it is not of the language, or out of bounds."""
    if len(source) > LONGEST:
        raise SyntaxProblem(f"longer than {LONGEST} characters", LONGEST)
    node = _Parser(source).whole()
    if node.height > DEEPEST:
        raise SyntaxProblem(f"nested more than {DEEPEST} deep", node.start)
    return node


def render(node: Node, values: Mapping[str, Scalar]) -> str:
    """CEL text that means ``node``, with every ``values.NAME`` replaced by its value."""
    if node.op == "literal":
        return _literal(node.value)
    if node.op == "name":
        name = str(node.value)
        return _literal(values[name[7:]]) if name.startswith("values.") else name
    parts = [render(part, values) for part in node.parts]
    if node.op == "list":
        return f"[{', '.join(parts)}]"
    if node.op == "double":
        return f"double({parts[0]})"
    if node.op in ("!", "negative"):
        return f"{'!' if node.op == '!' else '-'}({parts[0]})"
    return f"({f' {node.op} '.join(parts)})"


def _literal(value: Scalar) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return json.dumps(value)
    return f"({value!r})" if value < 0 else repr(value)


class _Parser:
    """Precedence climbing over the tokens of one condition."""

    def __init__(self, source: str) -> None:
        self.source = source
        self.tokens = list(_tokens(source))
        self.at = 0
        self.depth = 0

    def whole(self) -> Node:
        node = self.expression(1)
        if self.token.kind != "end":
            raise self.unexpected("&&, || or the end")
        return node

    @property
    def token(self) -> _Token:
        return self.tokens[self.at]

    def take(self, sign: str | None = None) -> _Token:
        token = self.token
        if sign is not None and token.text != sign:
            raise self.unexpected(repr(sign))
        self.at += 1
        return token

    def unexpected(self, wanted: str) -> SyntaxProblem:
        found = repr(self.token.text) if self.token.kind != "end" else "the end"
        return SyntaxProblem(f"found {found} where {wanted} was expected", self.token.start)

    @property
    def binding(self) -> int:
        """How tightly the operator ahead binds; 0 where none is."""
        return _BINDING.get(self.token.text, 0) if self.token.kind in ("sign", "name") else 0

    def expression(self, least: int) -> Node:
        left = self.operand()
        while self.binding >= max(least, 1):
            sign, binding = self.take(), _BINDING[self.tokens[self.at - 1].text]
            right = self.expression(binding + 1)
            left = _join(sign.text, left, right)
            if binding == 3 and self.binding == 3:
                raise SyntaxProblem("comparisons do not chain; join them with &&", self.token.start)
        return left

    def operand(self) -> Node:
        self.depth += 1
        if self.depth > DEEPEST:
            raise SyntaxProblem(f"nested more than {DEEPEST} deep", self.token.start)
        node = self.unguarded_operand()
        self.depth -= 1
        return node

    def unguarded_operand(self) -> Node:
        token = self.take()
        match token.kind:
            case "integer" | "real" | "text":
                return self.literal(token)
            case "name" if self.token.text == "(":
                return self.call(token)
            case "name":
                return _named(token)
        if token.text in ("!", "-"):
            inner = self.operand()
            op = "!" if token.text == "!" else "negative"
            return Node(op, token.start, inner.end, (inner,))
        if token.text == "(":
            inner = self.expression(1)
            closing = self.take(")")
            return Node(inner.op, token.start, closing.end, inner.parts, inner.value)
        if token.text == "[":
            return self.list(token)
        self.at -= 1
        raise self.unexpected("a fact, a value or '('")

    def literal(self, token: _Token) -> Node:
        value: Scalar
        match token.kind:
            case "integer":
                value = int(token.text) if len(token.text) < 20 else LARGEST_INTEGER + 1
                if value > LARGEST_INTEGER:
                    raise SyntaxProblem("integers stay below 2^31 here", token.start)
            case "real":
                value = float(token.text)
            case _:
                value = token.text[1:-1]
        return Node("literal", token.start, token.end, (), value)

    def call(self, name: _Token) -> Node:
        if name.text != "double":
            why = _REFUSED_FUNCTIONS.get(name.text, "the only function is double()")
            raise SyntaxProblem(f"{name.text}() is refused: {why}", name.start)
        self.take("(")
        inner = self.expression(1)
        return Node("double", name.start, self.take(")").end, (inner,))

    def list(self, opening: _Token) -> Node:
        items: list[Node] = []
        while True:
            token = self.take()
            if token.kind not in ("integer", "real", "text"):
                self.at -= 1
                raise self.unexpected("a literal of the list")
            items.append(self.literal(token))
            if self.token.text == "]":
                return Node("list", opening.start, self.take().end, tuple(items))
            self.take(",")


def _join(op: str, left: Node, right: Node) -> Node:
    """The operator over both; a chain of one junction is one node of many parts."""
    parts = left.parts if op == left.op and op in JUNCTIONS else (left,)
    return Node(op, left.start, right.end, (*parts, right))


def _named(token: _Token) -> Node:
    if token.text in ("true", "false"):
        return Node("literal", token.start, token.end, (), token.text == "true")
    return Node("name", token.start, token.end, (), token.text)


def _tokens(source: str) -> Iterator[_Token]:
    at = 0
    while not _END.match(source, at):
        found = _TOKEN.match(source, at)
        if not found or not found.lastgroup:
            at += len(source[at:]) - len(source[at:].lstrip(" \t\r\n\f\v"))
            hint = _REFUSED.get(source[at], "it is not part of the language")
            raise SyntaxProblem(f"{source[at]!r} is refused: {hint}", at)
        kind = found.lastgroup
        yield _Token(kind, found[kind], found.start(kind))
        at = found.end()
    yield _Token("end", "", len(source))
