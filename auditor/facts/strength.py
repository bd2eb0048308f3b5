"""Facts about strength: what published tables say, what the routes cost, whether it suffices.

Tables and models are kept apart: a model figure never overrules a published figure for the same
thing. The tables cover the number field sieve, square-root and Pohlig-Hellman methods at the
largest prime of ord(g), and kangaroos at the narrowest width; every other route is judged by its
work.
"""

from collections.abc import Callable, Iterator, Mapping, Sequence
from types import MappingProxyType

from auditor.facts import generator, parts, usage, work
from auditor.facts.base import Absent, Reason
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.routes.base import Attacker, Work, floor_bits
from auditor.routes.standard_tables import modulus_strength


def _register(name: str, part: work.RoutePart) -> None:
    @fact(f"strength.{name}_bits_at_most", "real", f"work of the route {name.replace('_', ' ')}")
    def bits(given: Given) -> float:
        return floor_bits(given.see(part).bits)


for _name, _part in work.ROUTES.items():
    _register(_name, _part)


@fact("strength.required_bits", "int", "required strength, as declared, or the default")
def required_bits(given: Given) -> int:
    if given.declaration.required_strength is not None:
        given.rest_on("required_strength")
    return given.declaration.required_bits


def table_modulus(given: Given) -> int:
    """What the tables give for a prime modulus of this length."""
    if given.see(parts.nature) != "prime":
        given.undefined()
    return modulus_strength(given.declaration.modulus.bit_length())


def table_subgroup(given: Given) -> int:
    """Half the length of the largest prime of ord(g)."""
    return int(given.see(generator.largest_prime_length)) // 2


def table_exponent(given: Given) -> int:
    """Half the narrowest width, once every party declares its own."""
    given.see(usage.exponent_widths_declared)
    return int(given.see(table_exponent_at_most))


TABLE = (table_modulus, table_subgroup, table_exponent)


@fact(
    "strength.standard_bits",
    "int",
    "what the published tables give: least over modulus, subgroup and exponent",
)
def standard_bits(given: Given) -> int:
    return min(given.see(component) for component in TABLE)


def _least(given: Given, attacker: Attacker) -> Work:
    """The least work known; loose while a route may be open whose work is not known. Undefined for
    a generator that is no unit: its powers have no logarithms.
    """
    if not given.see(generator.unit):
        given.undefined()
    found: list[Work] = []
    unknown: list[Absent] = []
    for part in work.routes_for(attacker):
        outcome = given.peek(part)
        if not isinstance(outcome, Absent):
            found.append(given.see(part))
        elif outcome.reason != "undefined":
            unknown.append(outcome)
    questions = {question for absent in unknown for question in absent.questions}
    if not found and questions:
        given.unsettled(*sorted(questions))
    if not found:
        given.undefined()
    if unknown:
        given.loosen(*questions)
    return min(found, key=lambda route: (route.bits, route.route, route.attacker))


def least_for_listener(given: Given) -> Work:
    """The least work over the routes open to somebody who only sees public values."""
    return _least(given, "passive")


def least_for_peer(given: Given) -> Work:
    """The least work over the routes open to a passive attacker or a peer."""
    return _least(given, "peer")


def least_for_designer(given: Given) -> Work:
    """The same for whoever chose the parameters."""
    return _least(given, "designer")


LEAST: Mapping[Attacker, work.RoutePart] = MappingProxyType(
    {"passive": least_for_listener, "peer": least_for_peer, "designer": least_for_designer}
)
"""The least work by attacker."""


@fact(
    "strength.work_bits_at_most",
    "real",
    "least model work over the routes open to a passive attacker or a peer",
)
def work_bits_at_most(given: Given) -> float:
    return floor_bits(given.see(least_for_peer).bits)


@fact("strength.work_bits", "real", "the same, once nothing unknown could lower it")
def work_bits(given: Given) -> float:
    _require_final(given, (usage.exponent_widths_declared, *work.routes_for("peer")))
    return floor_bits(given.see(least_for_peer).bits)


@fact("strength.designer_bits_at_most", "real", "least model work for whoever chose the parameters")
def designer_bits_at_most(given: Given) -> float:
    return floor_bits(given.see(least_for_designer).bits)


@fact("strength.sufficient", "bool", "tables and routes reach the required strength")
def sufficient(given: Given) -> bool:
    """False as soon as one known component is too low, or one other route costs too little; true
    when every component is known, and every other open route is known exactly, and all reach the
    requirement. A False rests on what decides it alone: of several, on the best founded."""
    too_low = tuple(_too_low(given, given.see(required_bits)))
    if not too_low:
        return _all_reach(given)
    given.see(min(too_low, key=lambda part: given.standing(given.trace(part)).weakness))
    given.settle()
    return False


@fact(
    "strength.shortfalls_seen",
    "text",
    "what is known to stay below the required strength: its bits and its name, least first",
)
def shortfalls(given: Given) -> str:
    too_low = tuple(_too_low(given, given.see(required_bits)))
    if not too_low:
        given.see(sufficient)
        given.undefined()
    found = {_named_bits(given.see(part), part) for part in too_low}
    # What is unknown may come to stay below it too, and what is a bound may fall.
    given.loosen()
    return "; ".join(f"{shown} by {name}" for _, shown, name in sorted(found))


def _named_bits(found: object, part: Callable[[Given], object]) -> tuple[float, str, str]:
    """The bits of a component or route, as they are shown, and its name."""
    if isinstance(found, Work):
        bits = floor_bits(found.bits)
        return bits, f"{bits:.2f}", found.route.replace("_", " ")
    bits = int(str(found))
    return bits, str(bits), f"the published table for the {_TABLE_NAMES[part]}"


def _too_low(given: Given, required: int) -> Iterator[Callable[[Given], object]]:
    """The components and other routes that are known to stay below the requirement."""
    for component in (*TABLE, table_subgroup_at_most, table_exponent_at_most):
        bits = given.peek(component)
        if not isinstance(bits, Absent) and bits < required:
            yield component
    for route in BESIDE_TABLES:
        found = given.peek(route)
        if not isinstance(found, Absent) and floor_bits(found.bits) < required:
            yield route


def table_subgroup_at_most(given: Given) -> int:
    """Half the length that the largest prime of ord(g) has at most."""
    order = given.see(parts.generator_order)
    return max([order.rest, *(prime for prime, _ in order.factors)]).bit_length() // 2


def table_exponent_at_most(given: Given) -> int:
    """Half the narrowest width that is declared."""
    return int(given.see(usage.narrowest_exponent)) // 2


_TABLE_NAMES: Mapping[Callable[[Given], object], str] = MappingProxyType(
    {
        table_modulus: "modulus",
        table_subgroup: "subgroup",
        table_subgroup_at_most: "subgroup",
        table_exponent: "exponent",
        table_exponent_at_most: "exponent",
    }
)

BESIDE_TABLES = (
    work.special_number_field_sieve,
    work.smooth_part_then_short_exponent,
    work.confinement,
    work.raw_message,
    work.prime_power,
    work.OUTSIDER,
)
"""The routes that the tables do not cover."""


def _all_reach(given: Given) -> bool:
    """True; undefined, where a component is (a generator that is no unit, a modulus that is no
    prime) and nothing unknown could still be too low; or absent with everything that is open."""
    _require_final(given, (*TABLE, *work.routes_for("peer")))
    for component in TABLE:
        given.see(component)
    return True


def _require_final(given: Given, needed: Sequence[Callable[[Given], object]]) -> None:
    """Rest on all of these that are defined; absent, where one is unknown or could still move."""
    outcomes = [given.peek(part) for part in needed]
    known = [part for part, o in zip(needed, outcomes, strict=True) if not isinstance(o, Absent)]
    unknown = [o for o in outcomes if isinstance(o, Absent) and o.reason != "undefined"]
    for part in known:
        given.see(part)
    loose = [given.trace(part) for part in known if given.trace(part).loose]
    if unknown or loose:
        questions = {q for holder in unknown for q in holder.questions}
        questions |= {q for trace in loose for q in trace.questions}
        keys = tuple(sorted({key for absent in unknown for key in absent.keys}))
        reason: Reason = "undeclared" if keys else "unsettled"
        given.absent(Absent(reason, keys, tuple(sorted(questions))))
