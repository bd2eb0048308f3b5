"""How strong the same numbers are in other hands: the right half run on assumed usages.

A usage is what every party does to received values, how often it uses an exponent, and how wide
that is. The work of an attack depends on less: on the width, and on whether a reused exponent meets
values that no check keeps inside the group. So few cases are worked out, each once for all sets
that differ in nothing else.
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace

from auditor.claims.collection import Claims
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.facts import generator, strength
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.routes.base import Attacker, floor_bits
from auditor.routes.standard_tables import STRENGTHS
from auditor.run_values import RunValues

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

    An attacker is listed only where it does better than the one before it: a peer than somebody
    who only listens, the designer than a peer. ``bound`` is ``at most`` while something unknown
    could lower the figure; ``declared`` says that a party of the set declares this usage.
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
    """Works out exposures from claims and run values, equal cases once."""

    def __init__(self, claims: Claims, run: RunValues) -> None:
        self._claims = claims
        self._run = run
        self._lengths: dict[Declaration, int | None] = {}
        self._cases: dict[Declaration, tuple[tuple[_Figure, ...], frozenset[str]]] = {}

    def of(self, declaration: Declaration) -> tuple[Exposure, ...]:
        """Each usage that makes sense for the set, by check, use, width and attacker."""
        numbers = _numbers(declaration)
        widths = self._widths(declaration, numbers)
        return tuple(
            Exposure(
                check,
                use,
                width,
                figure.bits,
                figure.bound,
                figure.route,
                figure.attacker,
                declared=_is_declared(declaration, check, use, width),
            )
            for check, use in _usages(declaration)
            for width in widths
            for figure in self._case(numbers, check, use, width)[0]
        )

    def consulted(self, declaration: Declaration) -> frozenset[str]:
        """Ids of the claims that the exposure of a set was drawn from."""
        numbers = _numbers(declaration)
        cases = [
            self._case(numbers, check, use, width)[1]
            for check, use in _usages(declaration)
            for width in self._widths(declaration, numbers)
        ]
        return frozenset().union(*cases)

    def _widths(self, declaration: Declaration, numbers: Declaration) -> tuple[int, ...]:
        """The declared widths, and those to recommend: twice the required strength, twice the next
        one that the tables list, and the length of ord(g), which no recommendation exceeds."""
        if numbers not in self._lengths:
            given = Given(numbers, self._claims, self._run)
            found = given.peek(generator.order_length)
            self._lengths[numbers] = None if isinstance(found, Absent) else found
        length = self._lengths[numbers]
        required = declaration.required_bits
        above = [bits for _, bits in STRENGTHS if bits > required][:1]
        recommended = [2 * bits for bits in (required, *above)]
        if length is not None:
            recommended = [length, *(min(width, length) for width in recommended)]
        declared = [party.exponent_bits for party in declaration.parties if party.exponent_bits]
        return tuple(sorted({width for width in (*declared, *recommended) if width > 0}))

    def _case(
        self, numbers: Declaration, check: str, use: str, width: int
    ) -> tuple[tuple[_Figure, ...], frozenset[str]]:
        closed = use == "single" or check in INSIDE
        party = Party(
            EVERYBODY,
            width,
            "single" if closed else "static",
            CHECKS["membership" if closed else check],
        )
        assumed = replace(numbers, parties=(party,))
        if assumed not in self._cases:
            given = Given(assumed, self._claims, self._run)
            figures = tuple(_figures(given))
            self._cases[assumed] = figures, frozenset(given.consulted)
        return self._cases[assumed]


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


def _is_declared(declaration: Declaration, check: str, use: str, width: int) -> bool:
    return any(
        party.exponent_use == use
        and party.exponent_bits == width
        and check == (_check(party) if declaration.purpose != "signature" else "none")
        for party in declaration.parties
    )


def _check(party: Party) -> str | None:
    """The strongest of the declared checks; ``certified`` keeps nothing out by itself."""
    if party.peer_check is None:
        return None
    return next((c for c in ("membership", "cofactor", "range") if c in party.peer_check), "none")


def _figures(given: Given) -> Iterator[_Figure]:
    """The least work for each attacker who does better than the one before."""
    least: float | None = None
    attackers: tuple[Attacker, ...] = ("passive", "peer", "designer")
    for attacker in attackers:
        part = strength.LEAST[attacker]
        work = given.peek(part)
        if isinstance(work, Absent) or (least is not None and work.bits >= least):
            continue
        least = work.bits
        loose = given.trace(part).loose or work.bound == "at most"
        bound = "at most" if loose else "exact"
        yield _Figure(floor_bits(work.bits), bound, work.route, attacker)
