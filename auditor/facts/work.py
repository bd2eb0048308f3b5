"""The attack routes, fed with what is established about one parameter set.

Each route here is a part in the sense of :class:`Given`: its work; undefined where the route is
closed; absent where something it needs is.
"""

from collections.abc import Callable, Mapping
from dataclasses import replace
from math import log2
from types import MappingProxyType
from typing import NoReturn

from auditor.declaration import EVERYBODY, Party
from auditor.facts import exponent, generator, parts, provenance, usage
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.routes import composite_modulus as composites
from auditor.routes import confinement as confinements
from auditor.routes import hidden_form as hidden_forms
from auditor.routes import number_field_sieve as sieves
from auditor.routes import pohlig_hellman as pohlig_hellmans
from auditor.routes import prime_power as prime_powers
from auditor.routes import raw_message as raw_messages
from auditor.routes import short_exponent as short_exponents
from auditor.routes import smooth_part as smooth_parts
from auditor.routes import special_number_field_sieve as special_sieves
from auditor.routes import square_root as square_roots
from auditor.routes.base import Attacker, Closed, Work
from auditor.routes.factors import Factors
from auditor.routes.partial_exponent import Splits
from auditor.routes.sieve_models import nist_bits

RoutePart = Callable[[Given], Work]


def _open(given: Given, outcome: Work | Closed) -> Work:
    if isinstance(outcome, Closed):
        given.undefined()
    return outcome


def _modulus_of_nature(given: Given, nature: str) -> int:
    if given.see(parts.nature) != nature:
        given.undefined()
    return given.declaration.modulus


def _generator_order(given: Given) -> Factors:
    """ord(g); undefined for the identity, which generates nothing."""
    order = given.see(exponent.generator_order)
    if not order.known and order.complete:
        given.undefined()
    return order


def number_field_sieve(given: Given) -> Work:
    return sieves.number_field_sieve(_modulus_of_nature(given, "prime").bit_length())


def hidden_form(given: Given) -> Work:
    n = _modulus_of_nature(given, "prime")
    return _open(given, hidden_forms.hidden_form(n.bit_length(), given.see(_origin_verified)))


def _origin_verified(given: Given) -> bool:
    """False where the owner shows no origin; absent while an answer could still verify one, which
    closes the route."""
    outcome = given.peek(provenance.verified)
    if isinstance(outcome, Absent) and outcome.reason == "unsettled":
        given.absent(outcome)
    return bool(given.see_or(provenance.verified, False))


def square_root(given: Given) -> Work:
    return square_roots.square_root(given.see(exponent.generator_order))


def pohlig_hellman(given: Given) -> Work:
    return _open(given, pohlig_hellmans.pohlig_hellman(given.see(_generator_order)))


def short_exponent(given: Given) -> Work:
    return _unless_silent(
        given, short_exponents.short_exponent(given.see(usage.narrowest_exponent))
    )


def _unless_silent(given: Given, work: Work) -> Work:
    """The work; a bound while a silent party may have an exponent that falls to less."""
    return replace(work, bound="at most") if given.trace(usage.narrowest_exponent).loose else work


def smooth_part_then_short_exponent(given: Given) -> Work:
    """The worst party's, as for confinement; undefined where the best division learns nothing
    first, or everything: that is the kangaroo or Pohlig-Hellman again, which the tables cover.

    A silent party may have a width that opens the route, unless the order is prime.
    """
    given.see(usage.narrowest_exponent)
    order = given.see(_generator_order)
    found = []
    for party in given.see(usage.parties):
        if party.exponent_bits is None:
            continue
        split = Splits(party.exponent_bits, order).cheapest()
        if split.logarithms and split.left_bits > 0:
            route = smooth_parts.smooth_part_then_short_exponent(party.exponent_bits, order)
            found.append((party, _open(given, route)))
    if not found:
        if order.complete and len(order.primes) > 1:
            given.see(usage.exponent_widths_declared)
        _nothing_new(given, parts.generator_order)
    party, work = min(found, key=lambda pair: (pair[1].bits, pair[0].role))
    given.rest_on(usage.key_of(party, "exponent.bits"))
    return _unless_silent(given, _named(party, work))


def _named(party: Party, work: Work) -> Work:
    """The work with the name of the party among the details where parties differ."""
    if party.role == EVERYBODY:
        return work
    return replace(work, details=(("party", party.role), *work.details))


def _nothing_new(given: Given, *known: Callable[[Given], object]) -> NoReturn:
    """Undefined, or unsettled while a factor that is not known yet could open the route."""
    traces = [given.trace(part) for part in known]
    if any(trace.loose for trace in traces):
        given.unsettled(*sorted({q for trace in traces for q in trace.questions}))
    given.undefined()


def confinement(given: Given) -> Work:
    """The worst party's, with its name among the details where parties differ; undefined where no
    probe makes an attack cheaper."""
    exposed = given.see(exponent.exposed_parties)
    keys = [usage.key_of(party, "exponent.bits") for party, _ in exposed]
    silent = [key for (party, _), key in zip(exposed, keys, strict=True) if not party.exponent_bits]
    if silent:
        given.undeclared(*silent)
    given.rest_on(*keys)
    order, group = given.see(_generator_order), given.see(exponent.group_exponent)
    found = []
    for party, check in exposed:
        width = party.exponent_bits or 0
        work = _open(given, confinements.confinement(width, order, group, check, reused=True))
        if not dict(work.details)["queries"]:
            continue
        found.append(_named(party, work))
    if not found:
        _nothing_new(given, parts.generator_order, parts.exponent_factors)
    return min(found, key=lambda work: work.bits)


def special_number_field_sieve(given: Given) -> Work:
    """Open only where a form was found: none found says nothing about those not looked for."""
    n = _modulus_of_nature(given, "prime")
    form = given.claims.special_form(n)
    if form is None:
        given.undefined()
    given.cite(form)
    return special_sieves.special_number_field_sieve(
        log2(n),
        len(form.coefficients) - 1,
        log2(max(map(abs, form.coefficients))),
        log2(max(form.g0, form.g1)),
    )


def raw_message(given: Given) -> Work:
    if given.declaration.purpose not in (None, "encryption"):
        given.rest_on("purpose")
        given.undefined()
    if given.see(usage.scheme) != "elgamal-raw":
        given.undefined()
    length = given.see(usage.message_length)
    index = given.see(parts.group_order) // given.see(parts.generator_order_value)
    return _open(given, raw_messages.raw_message(length, log2(index)))


def prime_power(given: Given) -> Work:
    if given.see(parts.nature) not in ("prime power", "power of two"):
        given.undefined()
    ((prime, power),) = given.see(parts.modulus_factors)
    return prime_powers.prime_power(prime, power)


def _components(given: Given) -> tuple[tuple[composites.Component, ...], int]:
    """What is known of a composite modulus: its prime factors, and the length of the rest. Nobody
    declares factors of a modulus: what is known was found by a search.
    """
    _modulus_of_nature(given, "composite")
    factors, rest = given.see(parts.known_modulus_factors)
    components = []
    for prime, _ in factors:
        group = given.factorization(prime - 1)
        order = Factors(group.factors, group.rest)
        cost = min(nist_bits(prime.bit_length()), pohlig_hellmans.pohlig_hellman_bits(order))
        largest = max(order.primes, default=1) if order.complete else None
        found = composites.Component(prime.bit_length(), cost, largest, discovered=True)
        components.append(found)
    return tuple(components), 0 if rest == 1 else rest.bit_length()


def composite_modulus(given: Given) -> Work:
    """For the maker of the modulus, who knows its factors."""
    components, rest = given.see(_components)
    length = given.declaration.modulus.bit_length()
    return composites.composite_modulus(length, components, rest)


def composite_modulus_outsider(given: Given) -> Work:
    """For somebody who must factor the modulus first."""
    components, rest = given.see(_components)
    length = given.declaration.modulus.bit_length()
    return composites.composite_modulus_outsider(length, components, rest)


ROUTES: Mapping[str, RoutePart] = MappingProxyType(
    {
        "number_field_sieve": number_field_sieve,
        "special_number_field_sieve": special_number_field_sieve,
        "square_root": square_root,
        "pohlig_hellman": pohlig_hellman,
        "short_exponent": short_exponent,
        "smooth_part_then_short_exponent": smooth_part_then_short_exponent,
        "confinement": confinement,
        "raw_message": raw_message,
        "composite_modulus": composite_modulus,
        "prime_power": prime_power,
        "hidden_form": hidden_form,
    }
)
"""One part for each route that has a fact of its name."""

OUTSIDER = composite_modulus_outsider
"""The passive side of the composite-modulus route, which shares its name."""

_DESIGNER_ONLY = ("composite_modulus", "hidden_form")


def routes_for(attacker: Attacker) -> tuple[RoutePart, ...]:
    """The routes that an attacker can take: a peer also listens, a designer is also a peer."""
    passive_or_peer = [part for name, part in ROUTES.items() if name not in _DESIGNER_ONLY]
    passive = [part for part in passive_or_peer if part is not confinement]
    return {
        "passive": (*passive, OUTSIDER),
        "peer": (*passive_or_peer, OUTSIDER),
        "designer": (*ROUTES.values(), OUTSIDER),
    }[attacker]


def all_open(given: Given) -> tuple[Work, ...]:
    """Every open route whose work is known, without resting on them, cheapest first; none to a
    generator that is no unit, whose powers have no logarithms."""
    if not given.peek(generator.unit):
        return ()
    peeked = [given.peek(part) for part in routes_for("designer")]
    found = [work for work in peeked if not isinstance(work, Absent)]
    return tuple(sorted(found, key=lambda work: (work.bits, work.route, work.attacker)))
