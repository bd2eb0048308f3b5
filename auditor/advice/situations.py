"""What is worth asking about many sets: each question once, with all the sets it is about.

A tree has many sets that are used in one way and leave the same keys undeclared. That is one
question to its owner, not one for each set; sets with the same numbers and usage are one set in
several places, and a factor search on one number is one search.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from auditor.advice.ask import ORDER, Asked, Asker, Effect, MoreSearch
from auditor.declaration import Declaration
from auditor.search.plan import EcmLevel


@dataclass(frozen=True, slots=True)
class Member:
    """Sets with the same numbers and usage, in input order, and what was asked of them."""

    declarations: tuple[Declaration, ...]
    asked: Asked


@dataclass(frozen=True, slots=True)
class CommonEffect:
    """What the same answers would do to several members of a situation.

    ``effects`` belong to ``members``, which count from 0 in the situation; all move between the
    same two positions.
    """

    words: tuple[str, ...]
    members: tuple[int, ...]
    effects: tuple[Effect, ...]


@dataclass(frozen=True, slots=True)
class Situation:
    """Sets that are used in the same way and leave the same keys open."""

    open_keys: tuple[str, ...]
    members: tuple[Member, ...]
    effects: tuple[CommonEffect, ...]

    @property
    def sets(self) -> tuple[Declaration, ...]:
        """All its sets, member by member."""
        return tuple(item for member in self.members for item in member.declarations)


@dataclass(frozen=True, slots=True)
class CommonSearch:
    """The next steps of searches for factors of one size, one for each number, and the sets that
    wait for them."""

    searches: tuple[MoreSearch, ...]
    sets: tuple[Declaration, ...]

    @property
    def seconds(self) -> float:
        """Core-seconds of all together."""
        return round(sum(search.seconds for search in self.searches), 1)


@dataclass(frozen=True, slots=True)
class Inquiry:
    """All that is worth asking: of the owner by situation, of search by number."""

    situations: tuple[Situation, ...]
    searches: tuple[CommonSearch, ...]


def inquire(declarations: Iterable[Declaration], asker: Asker) -> Inquiry:
    """What is worth asking about these sets: the worst positions first, then most sets."""
    equal: dict[str, list[Declaration]] = {}
    for declaration in declarations:
        equal.setdefault(declaration.digest(), []).append(declaration)
    members = [Member(tuple(group), asker.ask(group[0])) for group in equal.values()]
    alike: dict[object, list[Member]] = {}
    for member in members:
        alike.setdefault(usage_of(member.asked), []).append(member)
    situations = [situation(group) for group in alike.values()]
    return Inquiry(tuple(sorted(situations, key=_urgency)), _searches(members))


def usage_of(asked: Asked) -> tuple[object, ...]:
    """What makes two sets one situation: all that is declared of their use, and what is open.

    Of an exponent's width only whether there is one: files state it for each set.
    """
    declaration = asked.declaration
    parties = tuple(
        (party.role, party.exponent_bits is None, party.exponent_use, party.peer_check)
        for party in declaration.parties
    )
    named = declaration.purpose, declaration.scheme, declaration.protocol
    return (*named, declaration.message_bits, parties, asked.open_keys)


def situation(members: Sequence[Member]) -> Situation:
    """These members, of one usage, with what the same answers would do to them."""
    common: dict[tuple[object, ...], list[tuple[int, Effect]]] = {}
    for index, member in enumerate(members):
        for effect in member.asked.effects:
            key = effect.words, effect.before.position, effect.after.position
            common.setdefault(key, []).append((index, effect))
    effects = [
        CommonEffect(
            found[0][1].words,
            tuple(index for index, _ in found),
            tuple(effect for _, effect in found),
        )
        for found in common.values()
    ]
    first = members[0].asked
    return Situation(first.open_keys, tuple(members), tuple(sorted(effects, key=_usefulness)))


def _usefulness(effect: CommonEffect) -> tuple[bool, int, int, int, tuple[str, ...]]:
    """What moves a position first, the best position first; then fewest answers, most sets."""
    first = effect.effects[0]
    after = ORDER.index(first.after.position)
    return not first.moves, -after, len(effect.words), -len(effect.members), effect.words


def _urgency(situation: Situation) -> tuple[int, int]:
    positions = [ORDER.index(member.asked.outlook.position) for member in situation.members]
    return min(positions), -len(situation.sets)


def _searches(members: Iterable[Member]) -> tuple[CommonSearch, ...]:
    """The searches of one level for factors of one range of sizes, those first that most sets wait
    for; each number is searched once."""
    common: dict[tuple[EcmLevel, tuple[int, int]], dict[MoreSearch, list[Declaration]]] = {}
    for member in members:
        for search in member.asked.searches:
            alike = common.setdefault((search.level, search.window), {})
            alike.setdefault(search, []).extend(member.declarations)
    found = [
        CommonSearch(tuple(alike), tuple(item for sets in alike.values() for item in sets))
        for alike in common.values()
    ]
    return tuple(sorted(found, key=lambda item: -len(item.sets)))
