"""Which answers would change a position, and how: the right half run on assumed answers.

An answer is the owner's (a check made, a width, a use, a protocol) or that of more search. Assumed
answers of the owner change the declaration and nothing else; no search is made for them.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from math import sqrt
from typing import Any

from auditor.attested import furthest
from auditor.claims.collection import Claims
from auditor.declaration import EVERYBODY, Declaration, Party
from auditor.facts import Established, establish, vocabulary
from auditor.facts.base import Absent
from auditor.facts.given import Shared
from auditor.facts.usage import PROTOCOLS, PURPOSES, SCHEMES, key_of
from auditor.questions import Asks, Question
from auditor.rulebooks.judging import Judgement, Judging, Position
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues
from auditor.search.expected_curves import missed_factor_risk
from auditor.search.plan import LEVELS, EcmLevel
from auditor.search.work import Work

ORDER: tuple[Position, ...] = ("hold", "open", "conditions", "no objection")

MOST_TOGETHER = 4
"""Answers that are tried together, at most: two for each of two parties."""

_PARTY_FIELDS = {
    "exponent.bits": "exponent_bits",
    "exponent.use": "exponent_use",
    "peer_check": "peer_check",
}


@dataclass(frozen=True, slots=True)
class Answer:
    """One assumed answer of the owner: in words, and which key it sets to what.

    ``party`` is the index of the party whose key it is; None for a key of the set. ``helps`` says
    that it is worth trying together with others: it closes something, or opens what must be open.
    """

    words: str
    key: str
    value: object
    party: int | None = None
    helps: bool = True


@dataclass(frozen=True, slots=True)
class Outlook:
    """Where a set stands: its position, and the work in bits for a passive attacker or peer.

    ``bits`` is None while no route is known; ``loose`` says that the work could still fall.
    """

    position: Position
    bits: float | None
    loose: bool


@dataclass(frozen=True, slots=True)
class Effect:
    """What some answers of the owner, together, would lead to."""

    answers: tuple[Answer, ...]
    before: Outlook
    after: Outlook

    @property
    def words(self) -> tuple[str, ...]:
        """The answers in words."""
        return tuple(answer.words for answer in self.answers)

    @property
    def moves(self) -> bool:
        """Whether the position changes."""
        return self.after.position != self.before.position


@dataclass(frozen=True, slots=True)
class MoreSearch:
    """The next step of a factor search: its cost, and how far the risk of a missed factor falls.

    ``seconds`` are of one core by the cost model below; ``window`` bounds the sizes in bits of the
    factors that matter.
    """

    question: Question
    level: EcmLevel
    seconds: float
    risk_before: float
    risk_after: float
    window: tuple[int, int]


@dataclass(frozen=True, slots=True)
class Asked:
    """What is worth asking about one set; ``open_keys`` are the declared keys that an undecided
    outcome waits for."""

    declaration: Declaration
    outlook: Outlook
    open_keys: tuple[str, ...]
    effects: tuple[Effect, ...]
    searches: tuple[MoreSearch, ...]


def ask(
    declaration: Declaration, claims: Claims, run: RunValues, books: Sequence[Rulebook]
) -> Asked:
    """What is worth asking about a single set: see :class:`Asker`."""
    return Asker(claims, run, books).ask(declaration)


class Asker:
    """Tries answers on sets, from claims, run values and rulebooks."""

    def __init__(self, claims: Claims, run: RunValues, books: Sequence[Rulebook]) -> None:
        self._claims = claims
        self._run = run
        self._judging = Judging(books, vocabulary())
        self._shared = Shared(run)

    def ask(self, declaration: Declaration) -> Asked:
        """The answers of the owner that change the position or the work of an attack, the fewest
        that lead to each better position, and the next step of every open factor search."""
        known, judgement = self._judged(declaration)
        now = _outlook(known, judgement)
        answers = tuple(_answers(declaration))
        found = [e for e in self._effects(declaration, now, answers, 1) if e.after != now]
        helpful = [answer for answer in answers if answer.helps]
        for size in range(2, MOST_TOGETHER + 1):
            best = max([_rank(now), *(_rank(effect.after) for effect in found)])
            if best == len(ORDER) - 1:
                break
            tried = self._effects(declaration, now, helpful, size)
            found += [effect for effect in tried if _rank(effect.after) > best]
        return Asked(
            declaration,
            now,
            _open_keys(judgement),
            tuple(sorted(found, key=_usefulness)),
            tuple(_searches(known, self._claims)),
        )

    def _judged(self, declaration: Declaration) -> tuple[Established, Judgement]:
        known = establish(declaration, self._claims, self._run, self._shared)
        return known, self._judging.judge(known.facts, known.absent)

    def _effects(
        self, declaration: Declaration, now: Outlook, answers: Sequence[Answer], size: int
    ) -> Iterator[Effect]:
        for group in combinations(answers, size):
            if _compatible(group):
                after = _outlook(*self._judged(_answered(declaration, group)))
                yield Effect(group, now, after)


def _outlook(known: Established, judgement: Judgement) -> Outlook:
    work = known.facts.get("strength.work_bits_at_most")
    bits = None if work is None else float(work.value)
    return Outlook(judgement.position, bits, work is not None and not work.tight)


def _rank(outlook: Outlook) -> int:
    return ORDER.index(outlook.position)


def _open_keys(judgement: Judgement) -> tuple[str, ...]:
    """The keys whose values an undecided rule or the gate of a book waits for, sorted."""
    undecided = [f.missing for f in judgement.findings if f.outcome == "undetermined"]
    gates = [left.missing for left in judgement.books_left_out]
    return tuple(sorted({key for missing in (*undecided, *gates) for key in _keys(missing)}))


def _keys(missing: Mapping[str, Absent]) -> Iterator[str]:
    for absent in missing.values():
        if absent.reason == "undeclared":
            yield from absent.keys


def _usefulness(effect: Effect) -> tuple[int, int, float, tuple[str, ...]]:
    """Best position first, then fewest answers, then most work, then by the words."""
    bits = effect.after.bits if effect.after.bits is not None else 0.0
    return -_rank(effect.after), len(effect.answers), -bits, effect.words


def _answered(declaration: Declaration, group: Sequence[Answer]) -> Declaration:
    """The declaration with these answers put in."""
    parties = list(_parties(declaration))
    said: dict[str, Any] = {}
    for answer in group:
        if answer.party is None:
            said[answer.key] = answer.value
        else:
            changed: dict[str, Any] = {_PARTY_FIELDS[answer.key]: answer.value}
            parties[answer.party] = replace(parties[answer.party], **changed)
            said["parties"] = tuple(parties)
    return replace(declaration, **said)


def _compatible(group: Sequence[Answer]) -> bool:
    return len({(answer.party, answer.key) for answer in group}) == len(group)


def _parties(declaration: Declaration) -> tuple[Party, ...]:
    return declaration.parties or (Party(EVERYBODY),)


def _answers(declaration: Declaration) -> Iterator[Answer]:
    """What the owner could say or change: of the set what it is for, of each party its check, its
    use, its width."""
    yield from _of_set(declaration)
    for index, party in enumerate(_parties(declaration)):
        for words, key, value, helps in _of_party(party, declaration):
            yield Answer(words, key, value, index, helps)


def _of_set(declaration: Declaration) -> Iterator[Answer]:
    if declaration.purpose is None:
        for purpose in PURPOSES:
            yield Answer(f"if the purpose is {purpose}", "purpose", purpose)
    if declaration.scheme is None:
        for scheme in SCHEMES_OF.get(declaration.purpose or "", ()):
            yield Answer(f"if the scheme is {scheme}", "scheme", scheme)
    if declaration.protocol is None:
        for protocol in PROTOCOLS:
            yield Answer(f"if the protocol is {protocol}", "protocol", protocol, helps=False)


SCHEMES_OF: Mapping[str, tuple[str, ...]] = {
    "encryption": tuple(word for word in SCHEMES if word.startswith("elgamal-")),
    "signature": tuple(word for word in SCHEMES if not word.startswith("elgamal-")),
}


def _of_party(party: Party, declaration: Declaration) -> Iterator[tuple[str, str, object, bool]]:
    who = "every party" if party.role == EVERYBODY else f"the {party.role}"
    checks = party.peer_check
    if declaration.purpose != "signature" and "membership" not in (checks or ()):
        with_membership = (*(checks or ("range",)), "membership")
        yield f"if {who} checks membership", "peer_check", with_membership, True
        if checks is None:
            yield f"if {who} checks the range only", "peer_check", ("range",), True
            yield f"if {who} checks nothing", "peer_check", (), False
    if party.exponent_use != "single" and declaration.purpose == "key-agreement":
        yield f"if {who} uses each exponent once", "exponent.use", "single", True
    if party.exponent_use is None:
        yield f"if {who} uses exponents again", "exponent.use", "reused", False
    needed = needed_width(declaration)
    if party.exponent_bits is None or party.exponent_bits < needed:
        yield f"if {who} uses exponents of {needed} bits", "exponent.bits", needed, True


def needed_width(declaration: Declaration) -> int:
    """Bits of an exponent: twice the required strength, and for signatures, whose secret numbers
    fill the order, no less than a declared order has."""
    order = declaration.subgroup_order if declaration.purpose == "signature" else None
    return max(2 * declaration.required_bits, (order or 0).bit_length())


def declared_key(answer: Answer, declaration: Declaration) -> str:
    """The key that an answer is for, as messages and reports write it."""
    if answer.party is None:
        return answer.key
    return key_of(_parties(declaration)[answer.party], answer.key)


def _searches(known: Established, claims: Claims) -> Iterator[MoreSearch]:
    """The next curve level for every open factorization that moves a fact."""
    window = known.facts.get("group.missed_factor_window")
    questions = {q for fact in known.facts.values() for q in fact.questions}
    questions |= {q for absent in known.absent.values() for q in absent.questions}
    for question in sorted(questions):
        if question.asks is not Asks.FACTORIZATION or window is None:
            continue
        rest = question.integers[1]
        record = furthest(claims, rest)
        done = record[1] if record else Work()
        level = next((lv for lv in LEVELS if done.count(lv.b1, lv.b2) < lv.curves), None)
        if level is None:
            continue
        low, high = window.value
        left = level.curves - done.count(level.b1, level.b2)
        after = done.with_curves(level.b1, level.b2, level.curves, "")
        length = rest.bit_length()
        yield MoreSearch(
            question,
            level,
            round(left * seconds_per_curve(length, level), 1),
            missed_factor_risk(done, (low, high), length).risk,
            missed_factor_risk(after, (low, high), length).risk,
            (low, high),
        )


def seconds_per_curve(length: int, level: EcmLevel) -> float:
    """Core-seconds of one curve on a number of ``length`` bits, both stages, by a rule of thumb.

    Stage 1 is taken as proportional to B1, stage 2 to the square root of B2, and both to
    length^1.6, the time of a product. The two factors were fitted to what ``curve_time`` printed
    for 2048 bits (``tests/benchmarks/README.md``: 105 ms at B1 = 3,000, 359 ms at 11,000, 1,285
    ms at 50,000, within a tenth), on one core of an AMD EPYC with CPython 3.11 and gmpy2 2.3.2; on
    the same machine, a fifth faster that time, a curve at B1 = 3,000 took 30, 84, 270 and 766 ms
    at 1024, 2048, 4096 and 8192 bits. GMP-ECM came within 10 % there. Beyond B1 = 50,000 nothing
    was measured. A hint for planning, no promise.
    """
    at_2048 = STAGE_1_SECONDS * level.b1 + STAGE_2_SECONDS * sqrt(level.b2)
    return float(at_2048 * (length / 2048) ** 1.6)


STAGE_1_SECONDS, STAGE_2_SECONDS = 2.2e-5, 6.0e-5
"""For each unit of B1, and of the square root of B2, at 2048 bits."""
