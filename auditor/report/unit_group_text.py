"""Unit groups as text for a person, and as a record for a program."""

from collections.abc import Iterator, Sequence
from typing import Any

from auditor.claims.base import Factors
from auditor.encoding import plain, shorten
from auditor.inquiry.unit_groups import ElementOrder, Structure
from auditor.structure import PartialOrder, PartlyFactoredGroup, UnitGroup, UnsplitGroup

MOST_ORDERS = 48
"""So many different orders of elements are listed one by one."""


def text(found: Sequence[Structure], orders: Sequence[Sequence[ElementOrder]]) -> str:
    """A paragraph for each number."""
    lines: list[str] = []
    for item, elements in zip(found, orders, strict=True):
        lines += [*_group(item), *(_element(item, element) for element in elements), ""]
    return "\n".join(lines)


def classes_text(classes: Sequence[Sequence[int]] | None) -> str:
    """Whether the groups are isomorphic."""
    if classes is None:
        return "Whether the groups are isomorphic is open: a modulus is not factored.\n"
    if len(classes) == 1:
        return "The groups are isomorphic.\n"
    shown = "; ".join(", ".join(shorten(n) for n in members) for members in classes)
    return f"The groups fall into {len(classes)} classes of isomorphic ones: {shown}.\n"


def _row(label: str, value: object) -> str:
    return f"  {label:<22}{value}"


def _group(item: Structure) -> Iterator[str]:
    group = item.group
    if isinstance(group, UnsplitGroup):
        yield f"{shorten(item.modulus)} = {_product(group.part.modulus_factors, group.unfactored)}"
        yield _row("order", f"a multiple of {shorten(group.order_multiple_of)}")
        yield _row("not settled", "the composite factor in brackets was not factored")
        if group.known_not_cyclic:
            yield _row("primitive root", "none")
        return
    yield f"{shorten(item.modulus)} = {_product(group.modulus_factors, 1)}"
    yield _row("primes", item.standing.value)
    known = group.order_factors if isinstance(group, UnitGroup) else group.known_exponent_factors
    if isinstance(group, PartlyFactoredGroup):
        yield _row("order (phi)", shorten(group.order))
        yield _row("exponent (lambda)", _product(known, group.unfactored_exponent))
        yield _row("not settled", "the composite factor in brackets was not factored")
    else:
        yield _row("order (phi)", f"{shorten(group.order)} = {_product(known, 1)}")
        exponent = _product(group.exponent_factors, 1)
        yield _row("exponent (lambda)", f"{shorten(group.exponent)} = {exponent}")
    yield _row("cycles", " × ".join(f"C{shorten(d)}" for d in group.invariant_factors) or "trivial")
    yield _row("primitive root", _primitive_root(group))
    if isinstance(group, UnitGroup):
        yield from _counts(group)


def _primitive_root(group: UnitGroup | PartlyFactoredGroup) -> str:
    if not group.cyclic:
        return "none"
    if isinstance(group, UnitGroup):
        return f"{shorten(group.least_primitive_root() or 0)} is the least"
    return "exists"


def _counts(group: UnitGroup) -> Iterator[str]:
    share = 100 * float(group.share_of_maximal_order)
    most = shorten(group.elements_of_order(group.exponent))
    yield _row("of maximal order", f"{most} elements, {share:.2f} %")
    if _number_of_orders(group) <= MOST_ORDERS:
        listed = (f"{d}: {group.elements_of_order(d)}" for d in sorted(group.orders()))
        yield _row("elements by order", ", ".join(listed))


def _number_of_orders(group: UnitGroup) -> int:
    count = 1
    for _, exponent in group.exponent_factors:
        count *= exponent + 1
    return count


def _element(item: Structure, element: ElementOrder) -> str:
    label = f"order of {shorten(element.element)}"
    match element.order:
        case None:
            return _row(label, "none: it has a common divisor with the modulus")
        case PartialOrder(known, 0):
            return _row(label, f"a multiple of {shorten(known)}")
        case PartialOrder(known, rest):
            return _row(label, f"{shorten(known)} times a divisor above 1 of {shorten(rest)}")
        case order:
            return _row(label, shorten(order))


def _product(factors: Factors, rest: int) -> str:
    parts = [shorten(p) if k == 1 else f"{shorten(p)}^{k}" for p, k in factors]
    if rest > 1:
        parts.append(f"[{shorten(rest)}]")
    return " · ".join(parts) or "1"


def record(item: Structure, elements: Sequence[ElementOrder]) -> dict[str, Any]:
    """The same for a program: integers as everywhere, what is not settled under its own names."""
    group = item.group
    found: dict[str, Any] = {"modulus": item.modulus, "standing": item.standing.value}
    if isinstance(group, UnsplitGroup):
        found |= {
            "complete": False,
            "factors": group.part.modulus_factors,
            "unfactored": group.unfactored,
            "order_multiple_of": group.order_multiple_of,
        }
    else:
        found |= {
            "complete": isinstance(group, UnitGroup),
            "factors": group.modulus_factors,
            "order": group.order,
            "exponent": group.exponent,
            "invariant_factors": group.invariant_factors,
            "cyclic": group.cyclic,
        }
    if isinstance(group, UnitGroup):
        found["order_factors"] = group.order_factors
        found["elements_of_maximal_order"] = group.elements_of_order(group.exponent)
        found["generators"] = group.invariant_generators()
    if isinstance(group, PartlyFactoredGroup):
        found["known_exponent_factors"] = group.known_exponent_factors
        found["unfactored_exponent"] = group.unfactored_exponent
    found["elements"] = [_element_record(element) for element in elements]
    written: dict[str, Any] = plain(found)
    return written


def _element_record(element: ElementOrder) -> dict[str, Any]:
    match element.order:
        case None:
            return {"element": element.element, "unit": False}
        case PartialOrder(known, rest):
            unknown = {} if rest == 0 else {"unknown_divides": rest}
            return {"element": element.element, "unit": True, "order_multiple_of": known, **unknown}
        case order:
            return {"element": element.element, "unit": True, "order": order}
