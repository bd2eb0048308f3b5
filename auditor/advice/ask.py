"""Which answers would change a position, and how: the right half run on assumed answers.

An answer is the owner's (a check made, a width, a use) or that of more search. Assumed answers of
the owner change the declaration and nothing else; no search is made for them.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from typing import Any

from auditor.attested import furthest
from auditor.claims.collection import Claims
from auditor.declaration import EVERYBODY, Declaration, Party
from auditor.facts import Established, establish, vocabulary
from auditor.questions import Asks, Question
from auditor.routes.base import floor_bits
from auditor.rulebooks.judging import Judgement, Position, judge
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues
from auditor.search.expected_curves import missed_factor_risk
from auditor.search.plan import LEVELS, EcmLevel
from auditor.search.work import Work

ORDER: tuple[Position, ...] = ("hold", "open", "conditions", "no objection")


@dataclass(frozen=True, slots=True)
class Answer:
    """One assumed answer of the owner: in words, and which key of which party it sets to what."""

    words: str
    party: int
    key: str
    value: object


@dataclass(frozen=True, slots=True)
class Outlook:
    """Where a set stands: its position, and the work in bits for a passive attacker or peer.

    ``bits`` is None while no route is known; ``loose`` says that the work could still fall.
    """

    position: Position
    bits: float | None
    loose: bool

    def text(self) -> str:
        """For a line of text."""
        if self.bits is None:
            return f"{self.position}, work unknown"
        return f"{self.position}, {'at most ' if self.loose else ''}{self.bits:.2f} bits"


@dataclass(frozen=True, slots=True)
class Effect:
    """What some answers of the owner, together, would lead to."""

    answers: tuple[str, ...]
    before: Outlook
    after: Outlook


@dataclass(frozen=True, slots=True)
class MoreSearch:
    """The next step of a factor search: its cost, and how far the risk of a missed factor falls.

    ``minutes`` are core-minutes by the cost model below; ``window`` bounds the sizes in bits of the
    factors that matter.
    """

    question: Question
    level: EcmLevel
    minutes: float
    risk_before: float
    risk_after: float
    window: tuple[int, int]


@dataclass(frozen=True, slots=True)
class Asked:
    """What is worth asking about one set."""

    declaration: Declaration
    outlook: Outlook
    effects: tuple[Effect, ...]
    searches: tuple[MoreSearch, ...]


def ask(
    declaration: Declaration, claims: Claims, run: RunValues, books: Sequence[Rulebook]
) -> Asked:
    """The fewest answers of the owner that change the position for the better or the worse, those
    that only change the work of an attack, and the next step of every open factor search."""
    now, known = _outlook(declaration, claims, run, books)
    answers = tuple(_answers(declaration))

    def effects(size: int) -> Iterator[Effect]:
        for group in combinations(answers, size):
            if _compatible(group):
                changed = _answered(declaration, group)
                after, _ = _outlook(changed, claims, run, books)
                if after != now:
                    yield Effect(tuple(answer.words for answer in group), now, after)

    found = list(effects(1))
    if all(effect.after.position == now.position for effect in found):
        found += [effect for effect in effects(2) if effect.after.position != now.position]
    return Asked(
        declaration,
        now,
        tuple(sorted(found, key=_usefulness)),
        tuple(_searches(known, claims)),
    )


def _outlook(
    declaration: Declaration, claims: Claims, run: RunValues, books: Sequence[Rulebook]
) -> tuple[Outlook, Established]:
    known = establish(declaration, claims, run)
    judgement: Judgement = judge(books, known.facts, known.absent, vocabulary())
    work = known.facts.get("strength.work_bits_at_most")
    bits = None if work is None else float(work.value)
    return Outlook(judgement.position, bits, work is not None and not work.tight), known


def _usefulness(effect: Effect) -> tuple[int, int, float, tuple[str, ...]]:
    """Best position first, then fewest answers, then most work, then by the words."""
    bits = effect.after.bits if effect.after.bits is not None else 0.0
    return -ORDER.index(effect.after.position), len(effect.answers), -bits, effect.answers


def _answered(declaration: Declaration, group: Sequence[Answer]) -> Declaration:
    """The declaration with these answers put in."""
    parties = list(_parties(declaration))
    for answer in group:
        changed: dict[str, Any] = {answer.key: answer.value}
        parties[answer.party] = replace(parties[answer.party], **changed)
    return replace(declaration, parties=tuple(parties))


def _compatible(group: Sequence[Answer]) -> bool:
    return len({(answer.party, answer.key) for answer in group}) == len(group)


def _parties(declaration: Declaration) -> tuple[Party, ...]:
    return declaration.parties or (Party(EVERYBODY),)


def _answers(declaration: Declaration) -> Iterator[Answer]:
    """What the owner could say or change: of each party its check, its use, its width."""
    for index, party in enumerate(_parties(declaration)):
        for words, key, value in _of_party(party, declaration):
            yield Answer(words, index, key, value)


def _of_party(party: Party, declaration: Declaration) -> Iterator[tuple[str, str, object]]:
    who = "every party" if party.role == EVERYBODY else f"the {party.role}"
    checks = party.peer_check
    if declaration.purpose != "signature" and "membership" not in (checks or ()):
        yield f"if {who} checks membership", "peer_check", (*(checks or ("range",)), "membership")
        if checks is None:
            yield f"if {who} checks the range only", "peer_check", ("range",)
            yield f"if {who} checks nothing", "peer_check", ()
    if party.exponent_use != "single" and declaration.purpose == "key-agreement":
        yield f"if {who} uses each exponent once", "exponent_use", "single"
    if party.exponent_use is None:
        yield f"if {who} uses exponents again", "exponent_use", "reused"
    needed = 2 * declaration.required_bits
    if party.exponent_bits is None or party.exponent_bits < needed:
        yield f"if {who} uses exponents of {needed} bits", "exponent_bits", needed


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
            floor_bits(left * seconds_per_curve(length, level) / 60),
            missed_factor_risk(done, (low, high), length).risk,
            missed_factor_risk(after, (low, high), length).risk,
            (low, high),
        )


def seconds_per_curve(length: int, level: EcmLevel) -> float:
    """Core-seconds of one curve on a number of ``length`` bits, by a rule of thumb.

    Fitted to the built-in engine on one machine at 2048 bits, B1 = 11,000 and 50,000; the cost is
    taken as proportional to B1 and to length^1.6. A hint for planning, no promise.
    """
    return float(SECONDS_AT_2048 * level.b1 * (length / 2048) ** 1.6)


SECONDS_AT_2048 = 1.0e-4
