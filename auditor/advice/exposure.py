"""How strong the same numbers are in other hands: the right half run on assumed usages.

A usage is what every party does to received values, how often it uses an exponent, and how wide
that is. The work of an attack depends on less: on the width, and on whether a reused exponent meets
values that no check keeps inside the group. So few cases are worked out, each once for all sets
that differ in nothing else.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import inf

from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.facts import generator, strength
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.routes.base import Attacker, floor_bits
from auditor.routes.standard_tables import STRENGTHS

CHECKS: dict[str, tuple[str, ...]] = {
    "none": (),
    "range": ("range",),
    "membership": ("range", "membership"),
    "cofactor": ("range", "cofactor"),
}
"""What is done to received values, from the least to the most, and how a declaration says it."""

INSIDE = ("membership", "cofactor")
"""The checks that keep a received value from teaching anything outside of the generator's group."""

REPEATED = ("reused", "static")
"""Uses of one exponent more than once; no route tells them apart."""

NOWHERE = Place("", 1)


@dataclass(frozen=True, slots=True)
class Exposure:
    """The least work, in bits, under one usage for one attacker, and the route that gives it.

    An attacker is listed only where it does better than the one before it, or still could: a peer
    than somebody who only listens, the designer than a peer. ``bound`` is ``at most`` while
    something unknown could lower the figure; ``declared`` says that a party of the set declares
    this usage.
    """

    check: str
    use: str
    width: int
    bits: float
    bound: str
    route: str
    attacker: Attacker
    declared: bool


@dataclass(frozen=True, slots=True)
class _Figure:
    """The least work for an attacker in one case."""

    bits: float
    bound: str
    route: str
    attacker: Attacker


class Exposures:
    """Works out exposures from what is given with any declaration, equal cases once."""

    def __init__(self, given: Given) -> None:
        self._given = given
        self._groups: dict[Declaration, _Cases] = {}

    def of(self, declaration: Declaration) -> tuple[Exposure, ...]:
        """Each usage that makes sense for the set, by check, use, width and attacker."""
        cases = self._cases(declaration)
        widths = cases.widths(declaration)
        declared = _declared(declaration)
        return tuple(
            exposure
            for check, use in _usages(declaration)
            for width in widths
            for exposure in cases.exposures(check, use, width, (check, use, width) in declared)
        )

    def consulted(self, declaration: Declaration) -> frozenset[str]:
        """Ids of the claims that the exposure of a set was drawn from."""
        cases = self._cases(declaration)
        return frozenset().union(
            *(
                cases.case(check, use, width)[1]
                for check, use in _usages(declaration)
                for width in cases.widths(declaration)
            )
        )

    def _cases(self, declaration: Declaration) -> "_Cases":
        numbers = _numbers(declaration)
        if numbers not in self._groups:
            self._groups[numbers] = _Cases(numbers, self._given)
        return self._groups[numbers]


class _Cases:
    """The usages of the same numbers that were worked out so far."""

    def __init__(self, numbers: Declaration, given: Given) -> None:
        self._numbers = numbers
        self._given = given.changed(numbers)
        found = self._given.peek(generator.order_length)
        self._length = None if isinstance(found, Absent) else found
        self._worked: dict[tuple[str, int], tuple[tuple[_Figure, ...], frozenset[str]]] = {}
        self._exposures: dict[tuple[str, str, int, bool], tuple[Exposure, ...]] = {}

    def widths(self, declaration: Declaration) -> tuple[int, ...]:
        """The declared widths, and those to recommend: twice the required strength, twice the next
        one that the tables list, and the length of ord(g), which no recommendation exceeds."""
        length, required = self._length, declaration.required_bits
        above = [bits for _, bits in STRENGTHS if bits > required][:1]
        recommended = [2 * bits for bits in (required, *above)]
        if length is not None:
            recommended = [length, *(min(width, length) for width in recommended)]
        declared = [party.exponent_bits for party in declaration.parties if party.exponent_bits]
        return tuple(sorted({width for width in (*declared, *recommended) if width > 0}))

    def exposures(self, check: str, use: str, width: int, declared: bool) -> tuple[Exposure, ...]:
        """The rows of one usage."""
        key = check, use, width, declared
        if key not in self._exposures:
            self._exposures[key] = tuple(
                Exposure(check, use, width, f.bits, f.bound, f.route, f.attacker, declared)
                for f in self.case(check, use, width)[0]
            )
        return self._exposures[key]

    def case(self, check: str, use: str, width: int) -> tuple[tuple[_Figure, ...], frozenset[str]]:
        """The figures of one usage, and the ids of the claims that were looked at."""
        closed = use == "single" or check in INSIDE
        key = "membership" if closed else check, width
        if key not in self._worked:
            party = Party(EVERYBODY, width, "single" if closed else "static", CHECKS[key[0]])
            self._given = self._given.changed(replace(self._numbers, parties=(party,)))
            figures = tuple(_figures(self._given))
            self._worked[key] = figures, frozenset(self._given.consulted)
        return self._worked[key]


def _numbers(declaration: Declaration) -> Declaration:
    """The part of a declaration that the work of an attack depends on, usage left out."""
    return replace(
        declaration,
        name="",
        place=NOWHERE,
        parties=(),
        protocol=None,
        public_values=(),
        required_strength=None,
        protect_until=None,
    )


def _usages(declaration: Declaration) -> Iterator[tuple[str, str]]:
    """Checks with uses. Signing receives no values, so only its declared use is of interest; the
    repeated uses count once, under the name that is declared."""
    declared = [party.exponent_use for party in declaration.parties]
    repeated = [use for use in REPEATED if use in declared] or ["static"]
    if declaration.purpose == "signature":
        yield from (("none", use) for use in [u for u in ("single", *repeated) if u in declared])
        if not any(declared):
            yield "none", "static"
        return
    for check in CHECKS:
        for use in ("single", *repeated):
            yield check, use


def _declared(declaration: Declaration) -> set[tuple[str | None, str | None, int | None]]:
    """The usages that parties of the set declare."""
    signing = declaration.purpose == "signature"
    return {
        ("none" if signing else _check(party), party.exponent_use, party.exponent_bits)
        for party in declaration.parties
    }


def _check(party: Party) -> str | None:
    """The strongest of the declared checks; ``certified`` keeps nothing out by itself."""
    if party.peer_check is None:
        return None
    return next((c for c in ("membership", "cofactor", "range") if c in party.peer_check), "none")


def _figures(given: Given) -> Iterator[_Figure]:
    """The least work for each attacker who does better than the one before, or still could."""
    least, least_is_loose = inf, False
    attackers: tuple[Attacker, ...] = ("passive", "peer", "designer")
    for attacker in attackers:
        part = strength.LEAST[attacker]
        work = given.peek(part)
        if isinstance(work, Absent):
            continue
        loose = given.trace(part).loose or work.bound == "at most"
        if work.bits >= least and (least_is_loose or not loose):
            continue
        least, least_is_loose = work.bits, loose
        bound = "at most" if loose else "exact"
        yield _Figure(floor_bits(work.bits), bound, work.route, attacker)
