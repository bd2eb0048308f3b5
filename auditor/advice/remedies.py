"""What would remove a finding, computed from what is established and checked before it is offered.

Changes of the declaration are combined, least disruptive first, and the right half is run on each
combination as if it were declared. The first with which the rule that was not met is met, or no
longer applies, and no other major finding appears, is the remedy. Nothing is searched for: what is
known of the same modulus is taken from the claims of the set, what is known of a standard group
from the registry that prints it.
"""

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import cache
from itertools import chain, product
from types import MappingProxyType
from typing import Any

from auditor.advice import changes
from auditor.advice.changes import Change, Draft
from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.factorization import Factorization
from auditor.claims.order import Membership, Order
from auditor.claims.origin_formula import Formula
from auditor.claims.prime import Prime
from auditor.declaration import Declaration
from auditor.encoding import plain
from auditor.facts import Established, establish, subgroup
from auditor.facts import parts as group_parts
from auditor.facts.base import Absent
from auditor.facts.given import Given, Shared
from auditor.facts.registry import establish as fact_of
from auditor.intake.standard_groups import StandardGroup, standard_groups
from auditor.rulebooks.findings import Finding
from auditor.rulebooks.judging import Judgement, Judging, Position
from auditor.run_values import RunValues

MOST_CHANGES = 3
"""Changes put together in one remedy."""

MOST_GROUPS = 2
"""Standard groups tried: the smallest that reaches the requirement, and the next for rules that ask
for more."""

GRADES = ("major", "minor", "observation")
HELD = ("conforming", "not applicable")


@dataclass(frozen=True, slots=True)
class Remedy:
    """What to do, what that breaks, and the declared keys with their new values, None for a key
    to take out; no patch where the remedy is the rule's own text."""

    text: str
    breaks: tuple[str, ...] = ()
    patch: Mapping[str, Any] | None = None
    position: Position | None = None
    """What the set would come to, where the remedy was judged; a review of what was changed may
    establish more and come to a better one."""

    def record(self) -> dict[str, Any]:
        """The remedy as it stands in reports."""
        patch = None if self.patch is None else plain(dict(self.patch))
        return {
            "text": self.text,
            "breaks": list(self.breaks),
            "patch": patch,
            "position": self.position,
        }


@dataclass(frozen=True, slots=True)
class _Effect:
    """What the books say of a declaration that was changed."""

    outcomes: Mapping[str, str]
    majors: frozenset[str]
    position: Position


class Remedies:
    """Chooses remedies for the findings of sets, from claims, run values and rulebooks.

    Sets that differ in their use alone have their claims in common: ``known`` says which claims
    the sets were judged by.
    """

    def __init__(
        self, claims: Claims, run: RunValues, judging: Judging, known: Iterable[Established]
    ) -> None:
        self._claims = claims
        self._run = run
        self._judging = judging
        self._consulted: dict[tuple[object, ...], set[str]] = {}
        for item in known:
            ids = self._consulted.setdefault(item.declaration.numbers, set())
            ids |= item.consulted
        self._groups: dict[tuple[object, ...], _SameNumbers] = {}
        self._moved: dict[str, _Bench] = {}
        self._found: dict[Declaration, Mapping[str, Remedy]] = {}

    def of(self, known: Established, judgement: Judgement) -> Mapping[str, Remedy]:
        """A remedy for each finding, by rule: the least disruptive that was found to remove it, or
        what its rule advises."""
        same = known.declaration.nameless
        if same not in self._found:
            here, majors = _Here(self, known), _majors(judgement)
            self._found[same] = {
                finding.rule: here.remedy(finding, majors, judgement.position)
                for finding in sorted(judgement.findings, key=_weight(judgement))
            }
        return self._found[same]

    def group(self, declaration: Declaration) -> "_SameNumbers":
        """What sets with these numbers have in common."""
        numbers = declaration.numbers
        if numbers not in self._groups:
            support = self._claims.support(sorted(self._consulted[numbers]))
            self._groups[numbers] = _SameNumbers(support, self._run, self._judging)
        return self._groups[numbers]

    def moved(self, group: StandardGroup) -> "_Bench":
        """Where drafts that move to a standard group are judged."""
        if group.name not in self._moved:
            claims = registry_claims(group.name)
            self._moved[group.name] = _Bench(claims, self._run, self._judging)
        return self._moved[group.name]


class _Bench:
    """Judges drafts under the same claims, equal ones once."""

    def __init__(self, claims: Claims, run: RunValues, judging: Judging) -> None:
        self.shared = Shared(claims, run)
        self._judging = judging
        self._judged: dict[Declaration, _Effect] = {}

    def meets(self, declaration: Declaration, rule: str) -> bool:
        """Whether the declaration meets one rule, or the rule does not apply to it."""
        shared = self.shared
        given = Given(declaration, shared.claims, shared.run, shared)
        return self._judging.outcome(rule, lambda name: fact_of(name, given)) in HELD

    def effect(self, declaration: Declaration) -> _Effect:
        """What the books say of the declaration."""
        if declaration not in self._judged:
            shared = self.shared
            known = establish(declaration, shared.claims, shared.run, shared)
            judgement = self._judging.judge(known.facts, known.absent)
            effect = _Effect(judgement.outcomes, _majors(judgement), judgement.position)
            self._judged[declaration] = effect
        return self._judged[declaration]


class _SameNumbers:
    """What is known of sets with the same numbers, and the benches for drafts of them: one for
    each order that a draft takes for known."""

    def __init__(self, support: Sequence[Claim], run: RunValues, judging: Judging) -> None:
        self._support = support
        self._run = run
        self._judging = judging
        self._benches: dict[tuple[str, ...], _Bench] = {}

    def given(self, declaration: Declaration) -> Given:
        """The declaration with what is known."""
        shared = self._bench(()).shared
        return Given(declaration, shared.claims, shared.run, shared)

    def bench(self, draft: Draft) -> _Bench:
        """Where a draft that stays with the modulus is judged."""
        return self._bench(tuple(_orders(draft, self._support)))

    def _bench(self, orders: tuple[Claim, ...]) -> _Bench:
        ids = tuple(claim.id for claim in orders)
        if ids not in self._benches:
            claims = Claims([*self._support, *orders])
            self._benches[ids] = _Bench(claims, self._run, self._judging)
        return self._benches[ids]


def _weight(judgement: Judgement) -> Callable[[Finding], tuple[bool, int]]:
    """What decides the position first, then by grade."""
    return lambda finding: (finding is not judgement.decided_by, GRADES.index(finding.grade))


def _majors(judgement: Judgement) -> frozenset[str]:
    return frozenset(finding.rule for finding in judgement.findings if finding.grade == "major")


class _Here:
    """One set: its drafts in order of disruption, each judged once and only when it is reached."""

    def __init__(self, remedies: Remedies, known: Established) -> None:
        self._remedies = remedies
        self._group = remedies.group(known.declaration)
        self._document = known.declaration.document()
        self._drafts = _drafts(_start(known.declaration, self._group))
        self._made: list[Draft] = []
        self._chosen: list[Draft] = []
        self._written: dict[Declaration, Remedy] = {}

    def remedy(self, finding: Finding, majors: frozenset[str], position: Position) -> Remedy:
        """The first draft that removes the finding; otherwise the rule's own words.

        What was chosen for a finding before comes first, so that the remedies of one set are few
        and none undoes another.
        """
        if finding.outcome == "nonconforming":
            for draft in chain(list(self._chosen), self._all()):
                bench, declaration = self._bench(draft), draft.declaration.nameless
                if not bench.meets(declaration, finding.rule):
                    continue
                effect = bench.effect(declaration)
                if effect.majors <= majors - {finding.rule}:
                    self._chosen.append(draft)
                    return self._remedy(draft, effect.position, position)
        return Remedy(finding.remedy)

    def _all(self) -> Iterator[Draft]:
        yield from list(self._made)
        for draft in self._drafts:
            self._made.append(draft)
            yield draft

    def _bench(self, draft: Draft) -> _Bench:
        if draft.group is None:
            return self._group.bench(draft)
        return self._remedies.moved(draft.group)

    def _remedy(self, draft: Draft, after: Position, before: Position) -> Remedy:
        if draft.declaration not in self._written:
            texts = draft.texts
            if after != before:
                better = "" if after == "no objection" else " or better"
                texts = (*texts, f"With this alone the position becomes '{after}'{better}.")
            changed = MappingProxyType(_patch(self._document, draft))
            self._written[draft.declaration] = Remedy(" ".join(texts), draft.breaks, changed, after)
        return self._written[draft.declaration]


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


def _start(declaration: Declaration, group: _SameNumbers) -> Draft:
    """The declaration as it is, with what is known of its group."""
    given = group.given(declaration)
    order = given.peek(group_parts.generator_order_value)
    factors = given.peek(group_parts.complete_generator_order)
    replacement = given.peek(subgroup.prime_generator)
    is_prime = not isinstance(factors, Absent) and [power for _, power in factors] == [1]
    value = None if isinstance(order, Absent) else order
    return Draft(
        declaration,
        order=value if is_prime else None,
        length=None if value is None else value.bit_length(),
        replacement=None if isinstance(replacement, Absent) else replacement,
    )


def _drafts(start: Draft) -> Iterator[Draft]:
    """All combinations of a few changes that change something, least disruptive first.

    The rank of a combination is that of its most disruptive change. Of each family at most one
    change is made: first the numbers, then how they are used, last the widths, which depend on
    both and follow every move to another group.
    """
    combinations = [
        [(rank, change) for rank, change in combination if change is not None]
        for combination in product(*_families(start))
    ]
    fit = [chosen for chosen in combinations if 0 < len(chosen) <= MOST_CHANGES]
    seen: set[Declaration] = set()
    for chosen in sorted(fit, key=lambda chosen: (max(rank for rank, _ in chosen), len(chosen))):
        draft = _applied(start, [change for _, change in chosen])
        if draft is not None and draft.declaration not in seen:
            seen.add(draft.declaration)
            yield draft


Ranked = tuple[int, Change | None]
NO_CHANGE: Ranked = (0, None)


def _families(start: Draft) -> list[list[Ranked]]:
    """The changes with their ranks by disruption: the owner alone, the peers' code, keys, data.

    Those that could not apply are left out, so that few combinations remain: where the order of
    the generator is open, a change that needs it may still follow a move to a known group.
    """
    groups = changes.groups_for(start.declaration)[:MOST_GROUPS]
    families: list[list[tuple[int, Change]]] = [
        [
            (1, changes.true_order),
            (7, changes.prime_order_generator),
            *((8 + i, changes.move_to(group)) for i, group in enumerate(groups)),
        ],
        [(6, changes.hashed_message)],
        [(5, changes.fresh_exponents)],
        [
            (2, changes.range_check),
            (3, changes.membership_where_reused),
            (4, changes.membership_everywhere),
        ],
    ]
    hopeful = start if start.order else replace(start, order=start.declaration.modulus)
    possible: list[list[Ranked]] = [
        [NO_CHANGE, *(item for item in family if item[1](hopeful) is not None)]
        for family in families
    ]
    return [*possible, [NO_CHANGE, (1, changes.fit_widths)]]


def _applied(start: Draft, chosen: Sequence[Change]) -> Draft | None:
    """The draft with these changes; None where one of them does not apply."""
    draft = start
    for change in chosen:
        changed = change(draft)
        if changed is None:
            return None
        draft = changed
    if draft.group is not None:
        draft = changes.fit_widths(draft) or draft
    return draft


def _patch(document: Mapping[str, Any], draft: Draft) -> dict[str, Any]:
    """The keys of the declaration document that differ, None for one to take out."""
    after = draft.declaration.document()
    if draft.group is not None:
        after["modulus"] = {"group": draft.group.name}
        del after["generator"], after["subgroup_order"]
    return {
        key: after.get(key)
        for key in sorted(document.keys() | after.keys())
        if document.get(key) != after.get(key)
    }


def patched(document: Mapping[str, Any], patch: Mapping[str, Any]) -> dict[str, Any]:
    """A set of a declaration document with a patch put in."""
    merged = {**document, **patch}
    return {key: value for key, value in merged.items() if value is not None}


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
