"""Facts about what leaks of a private exponent through factors that are cheap to use.

A leak is measured by the number modulo which the exponent becomes known, whatever its width: one
of no more bits is then known.
"""

from auditor.declaration import Party
from auditor.facts import parts, usage
from auditor.facts.base import Absent
from auditor.facts.given import Given, narrow
from auditor.facts.registry import fact
from auditor.routes.base import Closed, floor_bits
from auditor.routes.confinement import Check, confinement
from auditor.routes.factors import Factors
from auditor.routes.leaks import confinement_leak_bits, public_leak_bits


def generator_order(given: Given) -> Factors:
    """ord(g) as far as it is known."""
    order = given.see(parts.generator_order)
    return Factors(order.factors, order.rest)


def group_exponent(given: Given) -> Factors:
    """lambda(n) as far as it is known."""
    group = given.see(parts.exponent_factors)
    return Factors(group.factors, group.rest)


@narrow
def exposed_parties(given: Given) -> tuple[tuple[Party, Check], ...]:
    """The parties that use an exponent again on values which no check keeps inside <g>.

    Undefined where there is none; undeclared where a party that says too little may be one and
    that makes a difference.
    Signing receives no values. ``certified`` keeps nothing out by itself: whether the certifier
    tests membership is not declared.
    """
    if given.declaration.purpose == "signature":
        given.rest_on("purpose")
        given.undefined()
    exposed: list[tuple[Party, Check]] = []
    for party in given.see(usage.parties):
        checks, use = party.peer_check, party.exponent_use
        if use == "single":
            given.rest_on(usage.key_of(party, "exponent.use"))
        elif checks is not None and {"membership", "cofactor"} & set(checks):
            given.rest_on(usage.key_of(party, "peer_check"))
        elif use is None and _reuse_is_harmless(given, party):
            given.rest_on(usage.key_of(party, "peer_check"), usage.key_of(party, "exponent.bits"))
        elif use is None or checks is None:
            absent = {"exponent.use": use, "peer_check": checks}
            given.undeclared(*(usage.key_of(party, k) for k, v in absent.items() if v is None))
        else:
            given.rest_on(usage.key_of(party, "exponent.use"), usage.key_of(party, "peer_check"))
            exposed.append((party, "range" if "range" in checks else "none"))
    if not exposed:
        given.undefined()
    return tuple(exposed)


def _reuse_is_harmless(given: Given, party: Party) -> bool:
    """Whether a range check leaves a peer one bit at most, as over a safe prime, and the search for
    the rest costs what is required: then nothing depends on how often an exponent is used."""
    known = given.peek(generator_order), given.peek(group_exponent)
    if "range" not in (party.peer_check or ()) or party.exponent_bits is None:
        return False
    if any(isinstance(factors, Absent) or not factors.complete for factors in known):
        return False
    order, group = given.see(generator_order), given.see(group_exponent)
    work = confinement(party.exponent_bits, order, group, "range", reused=True)
    enough = isinstance(work, Closed) or work.bits >= given.declaration.required_bits
    return enough and confinement_leak_bits(order, group, "range") <= 1


@fact(
    "exponent.public_leak_bits_at_least",
    "real",
    "log2 of the number modulo which public values alone give every exponent away, through factors "
    "of ord(g) whose logarithms cost at most 2^40",
)
def public_leak(given: Given) -> float:
    return floor_bits(public_leak_bits(given.see(generator_order)))


@fact(
    "exponent.confinement_leak_bits_at_least",
    "real",
    "log2 of the number modulo which a peer learns a reused exponent under the declared checks, "
    "through factors that cost at most 2^40 trials",
)
def confinement_leak(given: Given) -> float:
    order, group = given.see(generator_order), given.see(group_exponent)
    leaks = [confinement_leak_bits(order, group, check) for _, check in given.see(exposed_parties)]
    return floor_bits(max(leaks))
