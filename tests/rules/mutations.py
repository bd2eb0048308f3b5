"""Small wrong versions of a condition: one operator, literal or operand changed at a time."""

from collections.abc import Iterator
from dataclasses import replace

from auditor.rulebooks.condition_syntax import JUNCTIONS, Node, render
from auditor.rulebooks.conditions import Condition

_FLIPPED = {
    "==": ("!=",),
    "!=": ("==",),
    "<": ("<=", ">="),
    "<=": ("<", ">"),
    ">": (">=", "<="),
    ">=": (">", "<"),
}


def mutants(condition: Condition) -> Iterator[Condition]:
    """Every mutant of a condition."""
    for tree in _mutated(condition.tree):
        text = render(tree, condition.values)
        yield replace(condition, text=text, tree=tree)


def _mutated(node: Node) -> Iterator[Node]:
    yield from _here(node)
    for index, part in enumerate(node.parts):
        for changed in _mutated(part):
            yield replace(node, parts=(*node.parts[:index], changed, *node.parts[index + 1 :]))


def _here(node: Node) -> Iterator[Node]:
    parts = node.parts
    if node.op in _FLIPPED:
        yield from (replace(node, op=op) for op in _FLIPPED[node.op])
    elif node.op in JUNCTIONS:
        other = JUNCTIONS[1 - JUNCTIONS.index(node.op)]
        for index in range(len(parts) - 1):
            pair = replace(node, op=other, parts=parts[index : index + 2])
            rest = (*parts[:index], pair, *parts[index + 2 :])
            yield replace(node, parts=rest) if len(rest) > 1 else pair
        for index in range(len(parts)):
            rest = (*parts[:index], *parts[index + 1 :])
            yield replace(node, parts=rest) if len(rest) > 1 else rest[0]
    elif node.op == "!":
        yield parts[0]
    elif node.op == "list" and len(parts) > 1:
        for index in range(len(parts)):
            yield replace(node, parts=(*parts[:index], *parts[index + 1 :]))
    elif node.op == "literal" and type(node.value) in (int, float):
        yield replace(node, value=node.value + 1)
        yield replace(node, value=node.value - 1)
