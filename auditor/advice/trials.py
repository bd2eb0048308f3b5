"""Drafts of declarations, judged by what is established and by what their changes take for known.

Nothing is searched for: what is known of the same modulus is taken from the claims of the set, what
is known of a standard group from the registry that prints it.
"""

from collections.abc import Iterator, Sequence
from functools import cache

from auditor.advice.changes import Draft
from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.factorization import Factorization
from auditor.claims.order import Membership, Order
from auditor.claims.origin_formula import Formula
from auditor.claims.prime import Prime
from auditor.declaration import Declaration
from auditor.facts.given import Given, Shared
from auditor.facts.registry import establish as fact_of
from auditor.intake.standard_groups import StandardGroup, standard_groups
from auditor.rulebooks.judging import Brief, Judging
from auditor.run_values import RunValues

HELD = ("conforming", "not applicable")


class Bench:
    """Judges drafts under the same claims, equal ones once."""

    def __init__(self, claims: Claims, judging: Judging, shared: Shared) -> None:
        self._claims = claims
        self._judging = judging
        self._shared = shared
        self._last: Given | None = None
        self._judged: dict[Declaration, Brief] = {}

    def given(self, declaration: Declaration) -> Given:
        """The declaration with what is known."""
        if self._last is None:
            self._last = Given(declaration, self._claims, self._shared.run, self._shared)
        else:
            self._last = self._last.changed(declaration)
        return self._last

    def meets(self, given: Given, rule: str) -> bool:
        """Whether the declaration meets one rule, or the rule does not apply to it."""
        return self._judging.outcome(rule, lambda name: fact_of(name, given)) in HELD

    def effect(self, declaration: Declaration, given: Given) -> Brief:
        """What the books say of the declaration."""
        if declaration not in self._judged:
            self._judged[declaration] = self._judging.brief(lambda name: fact_of(name, given))
        return self._judged[declaration]


class SameNumbers:
    """What is known of sets with the same numbers, and the benches for drafts of them: one for
    each order that a draft takes for known."""

    def __init__(self, support: Sequence[Claim], judging: Judging, shared: Shared) -> None:
        self._support = support
        self._judging = judging
        self._shared = shared
        self._benches: dict[tuple[object, ...], Bench] = {}

    def given(self, declaration: Declaration) -> Given:
        """The declaration with what is known."""
        claims = Claims(self._support)
        return Given(declaration, claims, self._shared.run, self._shared)

    def bench(self, draft: Draft) -> Bench:
        """Where a draft that stays with the modulus is judged."""
        taken = draft.declaration.generator, draft.order, draft.moved
        if taken not in self._benches:
            claims = Claims([*self._support, *_orders(draft, self._support)])
            self._benches[taken] = Bench(claims, self._judging, self._shared)
        return self._benches[taken]


class Moves:
    """Where drafts that move to a standard group are judged, whatever group they come from."""

    def __init__(self, run: RunValues, judging: Judging) -> None:
        self._judging = judging
        self._shared = Shared(run)
        self._benches: dict[str, Bench] = {}

    def bench(self, group: StandardGroup) -> Bench:
        """Where drafts that move to this group are judged."""
        if group.name not in self._benches:
            claims = registry_claims(group.name)
            self._benches[group.name] = Bench(claims, self._judging, self._shared)
        return self._benches[group.name]


class Trial:
    """One draft of a set, with what is known of it."""

    def __init__(self, draft: Draft, bench: Bench) -> None:
        self.draft = draft
        self._bench = bench
        self._given = bench.given(draft.declaration)

    def meets(self, rule: str) -> bool:
        """Whether the draft meets one rule, or the rule does not apply to it."""
        return self._bench.meets(self._given, rule)

    @property
    def effect(self) -> Brief:
        """What the books say of the draft."""
        return self._bench.effect(self.draft.declaration, self._given)


def _orders(draft: Draft, support: Sequence[Claim]) -> Iterator[Claim]:
    """What a draft takes from a claim or from the registry about the order of its generator."""
    n, g, q = draft.declaration.modulus, draft.declaration.generator, draft.order
    if q is None:
        return
    yield Membership(n, g % n, q, True)
    if draft.moved:
        primes = [c for c in support if isinstance(c, Prime) and c.n == q] or [assumed_prime(q)]
        yield from primes
        yield Order(n, g, ((q, 1),), 1, (primes[0].id,))


def assumed_prime(n: int) -> Prime:
    """What the registry is believed to say of a number; never part of a report."""
    return Prime(n, "baillie-psw", rounds=64)


@cache
def registry_claims(name: str) -> Claims:
    """What a standard safe-prime group is, as its document prints it: assumed, as an answer of the
    owner would be; a review of the changed declaration establishes it anew."""
    (group,) = (group for group in standard_groups() if group.name == name)
    return Claims(_printed(group))


def _printed(group: StandardGroup) -> Iterator[Claim]:
    n, q = group.modulus, group.subgroup_order
    primes = [Prime(2, "below-2^64"), assumed_prime(q), assumed_prime(n)]
    yield from primes
    two, half, _ = (prime.id for prime in primes)
    yield Factorization(n - 1, ((2, 1), (q, 1)), 1, tuple(sorted((two, half))))
    yield Order(n, group.generator, ((q, 1),), 1, (half,))
    yield Membership(n, group.generator, q, True)
    if group.formula is not None:
        yield Formula(n, group.formula.constant, group.formula.offset)
