"""What would remove a finding, computed from what is established and checked before it is offered.

Changes of the declaration are combined, least disruptive first, and the right half is run on each
combination as if it were declared. The first with which the rule that was not met is met, or no
longer applies, and no other major finding appears, is the remedy.
"""

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import chain, product
from types import MappingProxyType
from typing import Any

from auditor.advice import changes
from auditor.advice.changes import Change, Draft
from auditor.advice.trials import Moves, SameNumbers, Trial
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.encoding import plain
from auditor.facts import Established, subgroup
from auditor.facts import parts as group_parts
from auditor.facts.base import Absent
from auditor.facts.given import Shared
from auditor.rulebooks.findings import Finding
from auditor.rulebooks.judging import Judgement, Judging, Position

MOST_CHANGES = 3
"""Changes put together in one remedy."""

MOST_GROUPS = 2
"""Standard groups tried: the smallest that reaches the requirement, and the next for rules that ask
for more."""

GRADES = ("major", "minor", "observation")


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


class Remedies:
    """Chooses remedies for the findings of sets, from claims and rulebooks.

    Sets that differ in their use alone have their claims in common: ``known`` says which claims
    the sets were judged by.
    """

    def __init__(
        self,
        claims: Claims,
        judging: Judging,
        known: Iterable[Established],
        shared: Shared,
        moves: Moves,
    ) -> None:
        self._claims = claims
        self._judging = judging
        self._shared = shared
        self._moves = moves
        self._consulted: dict[tuple[object, ...], set[str]] = {}
        for item in known:
            ids = self._consulted.setdefault(item.declaration.numbers, set())
            ids |= item.consulted
        self._groups: dict[tuple[object, ...], SameNumbers] = {}

    def of(self, known: Established, judgement: Judgement) -> Mapping[str, Remedy]:
        """A remedy for each finding, by rule: the least disruptive that was found to remove it, or
        what its rule advises."""
        group = self._group(known.declaration.numbers)
        here, majors = _Here(known.declaration, group, self._moves), _majors(judgement)
        return {
            finding.rule: here.remedy(finding, majors, judgement.position)
            for finding in sorted(judgement.findings, key=_weight(judgement))
        }

    def _group(self, numbers: tuple[object, ...]) -> SameNumbers:
        """What sets with these numbers have in common."""
        if numbers not in self._groups:
            support = self._claims.support(sorted(self._consulted[numbers]))
            self._groups[numbers] = SameNumbers(support, self._judging, self._shared)
        return self._groups[numbers]


def _weight(judgement: Judgement) -> Callable[[Finding], tuple[bool, int]]:
    """What decides the position first, then by grade."""
    return lambda finding: (finding is not judgement.decided_by, GRADES.index(finding.grade))


def _majors(judgement: Judgement) -> frozenset[str]:
    return frozenset(finding.rule for finding in judgement.findings if finding.grade == "major")


OF_VALUES = ("exponent-shared", "exponent-visible", "public-value-invalid")
"""Defects of public values: no change of the parameters mends what was made or received."""


class _Here:
    """One set: its drafts in order of disruption, each judged once and only when it is reached."""

    def __init__(self, declaration: Declaration, group: SameNumbers, moves: Moves) -> None:
        declaration = declaration.nameless
        self._group = group
        self._moves = moves
        self._document = declaration.document()
        self._drafts = _drafts(_start(declaration, group))
        self._made: list[Trial] = []
        self._chosen: list[Trial] = []
        self._written: dict[Declaration, Remedy] = {}

    def remedy(self, finding: Finding, majors: frozenset[str], position: Position) -> Remedy:
        """The first draft that removes the finding; otherwise the rule's own words.

        What was chosen for a finding before comes first, so that the remedies of one set are few
        and none undoes another.
        """
        if finding.outcome == "nonconforming" and finding.defect not in OF_VALUES:
            for trial in chain(list(self._chosen), self._all()):
                if trial.meets(finding.rule):
                    effect = trial.effect
                    if effect.majors <= majors - {finding.rule}:
                        self._chosen.append(trial)
                        return self._remedy(trial.draft, effect.position, position)
        return Remedy(finding.remedy)

    def _all(self) -> Iterator[Trial]:
        yield from list(self._made)
        for draft in self._drafts:
            to = draft.group
            bench = self._group.bench(draft) if to is None else self._moves.bench(to)
            self._made.append(Trial(draft, bench))
            yield self._made[-1]

    def _remedy(self, draft: Draft, after: Position, before: Position) -> Remedy:
        if draft.declaration not in self._written:
            texts = draft.texts
            if after != before:
                better = "" if after == "no objection" else " or better"
                texts = (*texts, f"With this alone the position becomes '{after}'{better}.")
            changed = MappingProxyType(_patch(self._document, draft))
            self._written[draft.declaration] = Remedy(" ".join(texts), draft.breaks, changed, after)
        return self._written[draft.declaration]


def _start(declaration: Declaration, group: SameNumbers) -> Draft:
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
    applied = _Applied(start)
    for chosen in sorted(fit, key=lambda chosen: (max(rank for rank, _ in chosen), len(chosen))):
        draft = applied(tuple(change for _, change in chosen))
        if draft is not None and draft.group is not None:
            draft = changes.fit_widths(draft) or draft
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
            (1, changes.reduced_generator),
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


class _Applied:
    """Makes changes to a draft one after the other, equal beginnings once."""

    def __init__(self, start: Draft) -> None:
        self._made: dict[tuple[Change, ...], Draft | None] = {(): start}

    def __call__(self, chosen: tuple[Change, ...]) -> Draft | None:
        """The draft with these changes; None where one of them does not apply."""
        if chosen not in self._made:
            *before, change = chosen
            draft = self(tuple(before))
            self._made[chosen] = None if draft is None else change(draft)
        return self._made[chosen]


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
