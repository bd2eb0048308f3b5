"""Facts about strength: what published tables say, what the routes cost, whether it suffices.

Tables and models are kept apart: a model figure never overrules a published figure for the same
thing. The tables cover the number field sieve, square-root and Pohlig-Hellman methods at the
largest prime of ord(g), and kangaroos at the declared width; every other route is judged by its
work.
"""

from collections.abc import Callable, Sequence

from auditor.facts import exponent, generator, parts, usage, work
from auditor.facts.base import Absent, Reason
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Question
from auditor.routes.base import Attacker, Work, floor_bits
from auditor.routes.partial_exponent import Splits
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
    return given.see(generator.largest_prime_length) // 2


def table_exponent(given: Given) -> int:
    """Half the narrowest declared width."""
    return given.see(usage.exponent_width) // 2


TABLE = (table_modulus, table_subgroup, table_exponent)


@fact(
    "strength.standard_bits",
    "int",
    "what the published tables give: least over modulus, subgroup and exponent",
)
def standard_bits(given: Given) -> int:
    return min(given.see(component) for component in TABLE)


def _least(given: Given, attacker: Attacker) -> Work:
    """The least work known; loose while a route may be open whose work is not known."""
    found: list[Work] = []
    for part in work.routes_for(attacker):
        outcome = given.peek(part)
        if not isinstance(outcome, Absent):
            found.append(given.see(part))
        elif outcome.reason != "undefined":
            given.loosen(*outcome.questions)
    if not found:
        given.undefined()
    return min(found, key=lambda route: (route.bits, route.route, route.attacker))


def least_for_peer(given: Given) -> Work:
    """The least work over the routes open to a passive attacker or a peer."""
    return _least(given, "peer")


def least_for_designer(given: Given) -> Work:
    """The same for whoever chose the parameters."""
    return _least(given, "designer")


@fact(
    "strength.work_bits_at_most",
    "real",
    "least model work over the routes open to a passive attacker or a peer",
)
def work_bits_at_most(given: Given) -> float:
    return floor_bits(given.see(least_for_peer).bits)


@fact("strength.work_bits", "real", "the same, once nothing unknown could lower it")
def work_bits(given: Given) -> float:
    least = given.see(least_for_peer)
    trace = given.trace(least_for_peer)
    if trace.loose:
        _raise_unknown(
            given, [given.peek(part) for part in work.routes_for("peer")], trace.questions
        )
    return floor_bits(least.bits)


@fact("strength.designer_bits_at_most", "real", "least model work for whoever chose the parameters")
def designer_bits_at_most(given: Given) -> float:
    return floor_bits(given.see(least_for_designer).bits)


@fact("strength.sufficient", "bool", "tables and routes reach the required strength")
def sufficient(given: Given) -> bool:
    """False as soon as one known component is too low, or one other route costs too little; true
    when every component is known, and every other open route is known exactly, and all reach the
    requirement. What decides a False is all that it rests on."""
    required = given.see(required_bits)
    for part in (*TABLE, table_subgroup_at_most):
        if _is_below(given, part, required):
            given.see(part)
            given.settle()
            return False
    for route in _routes_beside_tables(given):
        if _is_below(given, lambda seen, route=route: floor_bits(seen.see(route).bits), required):
            given.see(route)
            given.settle()
            return False
    return _all_reach(given)


def table_subgroup_at_most(given: Given) -> int:
    """Half the length that the largest prime of ord(g) has at most."""
    order = given.see(parts.generator_order)
    return max([order.rest, *(prime for prime, _ in order.factors)]).bit_length() // 2


def _is_below(given: Given, part: Callable[[Given], float], required: int) -> bool:
    value = given.peek(part)
    return not isinstance(value, Absent) and value < required


def _routes_beside_tables(given: Given) -> tuple[work.RoutePart, ...]:
    """The routes that the tables do not cover, as far as they are open and do something new.

    Learning a part of the exponent first is something new only where a part is learnt and a part
    is left; otherwise it is a route that the tables cover.
    """
    routes: list[work.RoutePart] = [work.raw_message, work.prime_power, work.OUTSIDER]
    if given.peek(_learns_part_of_exponent) is True:
        routes.append(work.smooth_part_then_short_exponent)
    confinement = given.peek(work.confinement)
    if isinstance(confinement, Work) and dict(confinement.details).get("queries"):
        routes.append(work.confinement)
    return tuple(routes)


def _learns_part_of_exponent(given: Given) -> bool:
    split = Splits(given.see(usage.exponent_width), given.see(exponent.generator_order)).cheapest()
    return split.logarithms > 0 and split.left_bits > 0


def _all_reach(given: Given) -> bool:
    """True, or absent with everything that is still open."""
    parts_needed = (*TABLE, *work.routes_for("peer"))
    outcomes = [given.peek(part) for part in parts_needed]
    if isinstance(outcomes[0], Absent) and outcomes[0].reason == "undefined":
        given.undefined()
    open_ended: set[Question] = set()
    for part, outcome in zip(parts_needed, outcomes, strict=True):
        if not isinstance(outcome, Absent):
            given.see(part)
            open_ended |= given.trace(part).questions if given.trace(part).loose else set()
    _raise_unknown(given, outcomes, open_ended)
    return True


def _raise_unknown(given: Given, outcomes: Sequence[object], questions: set[Question]) -> None:
    """Absent, where some outcome is unknown or something open could still move one."""
    unknown = [o for o in outcomes if isinstance(o, Absent) and o.reason != "undefined"]
    found = set(questions).union(*(absent.questions for absent in unknown))
    keys = sorted({key for absent in unknown for key in absent.keys})
    if unknown or found:
        reason: Reason = "undeclared" if keys else "unsettled"
        given.absent(Absent(reason, tuple(keys), tuple(sorted(found))))
