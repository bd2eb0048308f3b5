"""What a fact may look at, and how what it looked at becomes its standing.

A fact is a plain function of :class:`Given`. Whatever it reads through ``given`` is noted: the
claims, the declared words, the facts it builds on. Its standing is the weakest among them, so no
function has to say how sure it is, and none can forget to. What it needs and does not find ends
it with :class:`Missing`; a fact built on it is then absent for the same reason.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from math import gcd
from typing import Any, NoReturn, TypeVar, cast

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.factorization import Factorization
from auditor.claims.prime import Prime
from auditor.claims.standing import Standing, weakest
from auditor.declaration import Declaration
from auditor.facts.base import Absent
from auditor.questions import Asks, Question
from auditor.run_values import RunValues

Value = TypeVar("Value")
Default = TypeVar("Default")

Part = Callable[["Given"], object]
Key = str | Part
"""What an outcome depends on: a key of the declaration, or the outcome of a narrow part."""

_narrow: set[Part] = set()


def narrow(part: Callable[["Given"], Value]) -> Callable[["Given"], Value]:
    """Mark a part that reads much and says little: what builds on it depends on its outcome alone,
    not on all that it read. Its values are hashable."""
    _narrow.add(part)
    return part


class Missing(Exception):
    """What was needed is absent."""

    def __init__(self, absent: Absent) -> None:
        super().__init__(absent.reason)
        self.absent = absent


@dataclass(slots=True)
class Trace:
    """What a value rests on."""

    claims: set[str] = field(default_factory=set)
    rests_on: set[str] = field(default_factory=set)
    questions: set[Question] = field(default_factory=set)
    loose: bool = False

    def merge(self, other: "Trace") -> None:
        """Add what another value rests on."""
        self.claims |= other.claims
        self.rests_on |= other.rests_on
        self.questions |= other.questions
        self.loose |= other.loose


@dataclass(slots=True)
class Looked:
    """What was looked at on the way to a value, rested on or not: keys, and the ids of claims. Two
    declarations that agree in these keys have the same value."""

    keys: set[Key] = field(default_factory=set)
    consulted: set[str] = field(default_factory=set)

    def merge(self, other: "Looked") -> None:
        """Add what was looked at on the way to another value."""
        self.keys |= other.keys
        self.consulted |= other.consulted


@dataclass(slots=True)
class Seen:
    """The outcome of a part, with what it rests on and what was looked at; ``fact`` is for the
    registry to keep what it makes of it."""

    value: object
    trace: Trace
    looked: Looked
    fact: object = None

    @property
    def content(self) -> tuple[object, ...]:
        """All that makes a difference to whatever builds on it."""
        trace = self.trace
        return (
            self.value,
            frozenset(trace.claims),
            frozenset(trace.rests_on),
            frozenset(trace.questions),
            trace.loose,
            frozenset(self.looked.consulted),
        )


class Shared:
    """Outcomes of parts under the same claims and run values, each computed once for all
    declarations that agree in what the part looked at.

    Claims that come make everything here void; it is then forgotten.
    """

    def __init__(self, claims: Claims, run: RunValues) -> None:
        self.claims = claims
        self.run = run
        self._size = len(claims)
        self._numbers: dict[Key, dict[object, int]] = {}
        self._seen: dict[Part, dict[tuple[Key, ...], dict[tuple[int, ...], Seen]]] = {}

    def refresh(self) -> None:
        """Forget what was seen if claims have come since."""
        if self._size != len(self.claims):
            self._size = len(self.claims)
            self._seen.clear()

    def number(self, key: Key, value: object) -> int:
        """A small number that stands for this value of the key."""
        numbers = self._numbers.setdefault(key, {})
        return numbers.setdefault(value, len(numbers))

    def recall(self, part: Part, number_of: Callable[[Key], int]) -> Seen | None:
        """The outcome of the part for a declaration whose keys have these numbers."""
        for keys, outcomes in self._seen.get(part, {}).items():
            seen = outcomes.get(tuple(map(number_of, keys)))
            if seen is not None:
                return seen
        return None

    def keep(self, part: Part, seen: Seen, number_of: Callable[[Key], int]) -> None:
        """Keep an outcome for other declarations."""
        keys = tuple(sorted(seen.looked.keys, key=_spelling))
        outcomes = self._seen.setdefault(part, {}).setdefault(keys, {})
        outcomes[tuple(map(number_of, keys))] = seen


def _spelling(key: Key) -> str:
    return key if isinstance(key, str) else f"{key.__module__}.{key.__qualname__}"


class Given:
    """One declaration, the claims about its integers, and the run values, read with a trace."""

    def __init__(
        self,
        declaration: Declaration,
        claims: Claims,
        run: RunValues,
        shared: Shared | None = None,
    ) -> None:
        self.run = run
        self._shared = Shared(claims, run) if shared is None else shared
        if self._shared.claims is not claims or self._shared.run is not run:
            raise ValueError("what is shared was seen under other claims or run values")
        self._shared.refresh()
        self._claims = claims
        self._declaration = declaration
        self._numbers: dict[Key, int] = {}
        self._known: dict[Part, Seen] = {}
        self._traces: list[Trace] = [Trace()]
        self._looked: list[Looked] = [Looked()]
        self._reader = cast(Declaration, _Reader(declaration, self._looked))

    @property
    def declaration(self) -> Declaration:
        """What was declared; whatever is read of it is noted."""
        return self._reader

    @property
    def consulted(self) -> set[str]:
        """Ids of all claims looked at."""
        return self._looked[0].consulted

    def see(self, part: Callable[["Given"], Value]) -> Value:
        """The value of ``part``, computed once; what it rests on, the caller rests on too."""
        seen = self.outcome(part)
        if isinstance(seen.value, Absent):
            raise Missing(seen.value)
        self._traces[-1].merge(seen.trace)
        # Outcomes of all parts are kept together; this one is of the part that makes a Value.
        return seen.value  # type: ignore[return-value]

    def outcome(self, part: Part) -> Seen:
        """The outcome of ``part``: its value, or its absence. The caller has looked at whatever was
        looked at on the way."""
        seen = self._seen(part)
        looked = self._looked[-1]
        if part in _narrow:
            looked.keys.add(part)
            looked.consulted |= seen.looked.consulted
        else:
            looked.merge(seen.looked)
        return seen

    def _seen(self, part: Part) -> Seen:
        seen = self._known.get(part) or self._shared.recall(part, self._number)
        if seen is None:
            seen = self._work_out(part)
            self._shared.keep(part, seen, self._number)
        self._known[part] = seen
        return seen

    def _work_out(self, part: Part) -> Seen:
        self._traces.append(Trace())
        self._looked.append(Looked())
        value: object
        try:
            value = part(self)
        except Missing as missing:
            value = missing.absent
        finally:
            trace, looked = self._traces.pop(), self._looked.pop()
        return Seen(value, trace, looked)

    def _number(self, key: Key) -> int:
        number = self._numbers.get(key)
        if number is None:
            value = self._read(key) if isinstance(key, str) else self._seen(key).content
            number = self._numbers[key] = self._shared.number(key, value)
        return number

    def _read(self, key: str) -> object:
        return getattr(self._declaration, key)

    def see_or(self, part: Callable[["Given"], Value], default: Default) -> Value | Default:
        """The value of ``part`` or, where it is absent, ``default``.

        An unsettled part leaves the caller loose: an answer could still move it.
        """
        try:
            return self.see(part)
        except Missing as missing:
            if missing.absent.reason == "unsettled":
                self.loosen(*missing.absent.questions)
            return default

    def peek(self, part: Callable[["Given"], Value]) -> Value | Absent:
        """The value of ``part`` or its absence, without resting on it; :meth:`see` it if it
        decides."""
        # As in :meth:`see`: the outcome is of the part that makes a Value.
        return self.outcome(part).value  # type: ignore[return-value]

    def trace(self, part: Part) -> Trace:
        """What ``part`` rests on, without resting on it."""
        return self.outcome(part).trace

    def standing(self, trace: Trace) -> Standing:
        """The weakest standing of what was looked at."""
        standings = [self._claims.standing(claim_id) for claim_id in sorted(trace.claims)]
        return weakest(standings + [Standing.DECLARED] * bool(trace.rests_on))

    def loosen(self, *questions: Question) -> None:
        """Say that the value in the making could still be moved by answers to ``questions``."""
        self._traces[-1].loose = True
        self._traces[-1].questions.update(questions)

    def settle(self) -> None:
        """Say that, whatever is still open about what was looked at, the value is final."""
        self._traces[-1].loose = False
        self._traces[-1].questions.clear()

    def rest_on(self, *keys: str) -> None:
        """Say that the value in the making takes the owner's word for these keys."""
        self._traces[-1].rests_on.update(keys)

    def cite(self, claim: Claim) -> None:
        """Say that the value in the making rests on ``claim``."""
        self._traces[-1].claims.add(claim.id)
        self._looked[-1].consulted.add(claim.id)

    def word(self, key: str) -> str | int:
        """The declared word for ``key``; absent as ``undeclared`` where there is none."""
        value: str | int | None = getattr(self.declaration, key)
        if value is None:
            self.undeclared(key)
        self.rest_on(key)
        return value

    def absent(self, absent: Absent) -> NoReturn:
        """The value in the making is absent in that way."""
        raise Missing(absent)

    def undeclared(self, *keys: str) -> NoReturn:
        """The owner would have to say."""
        raise Missing(Absent("undeclared", keys=keys))

    def undefined(self) -> NoReturn:
        """The question makes no sense for this set."""
        raise Missing(Absent("undefined"))

    def unsettled(self, *questions: Question) -> NoReturn:
        """An answer to these questions would settle it."""
        raise Missing(Absent("unsettled", questions=questions))

    def is_prime(self, n: int) -> bool:
        """Whether ``n`` is prime, by a claim."""
        if n < 2:
            return False
        claim = self._claims.prime(n)
        if claim is None:
            self.unsettled(Question(Asks.PRIMALITY, (n,)))
        self.cite(claim)
        return isinstance(claim, Prime)

    def is_member(self, n: int, element: int, exponent: int) -> bool:
        """Whether element^exponent = 1 modulo ``n``, by a claim."""
        claim = self._claims.membership(n, element, exponent)
        if claim is None:
            self.unsettled(Question(Asks.MEMBERSHIP, (n, element, exponent)))
        self.cite(claim)
        return claim.member

    def factorization(
        self, m: int, hints: tuple[int, ...] = (), deeper: Asks = Asks.FACTORIZATION
    ) -> Factorization:
        """The most complete factorization of ``m``, by a claim; loose while a rest is left, with
        ``deeper`` as the question that is then open."""
        claim = self._claims.factorization(m)
        if claim is None or any(1 < gcd(hint, claim.rest) < claim.rest for hint in hints):
            self.unsettled(Question(Asks.SMALL_FACTORS, (m, *hints)))
        self.cite(claim)
        if claim.rest > 1:
            self.loosen(Question(deeper, (m, claim.rest)))
        return claim

    @property
    def claims(self) -> Claims:
        """The claims themselves, for the few facts that need more than the questions above; they
        must :meth:`cite` what they use."""
        return self._claims


class _Reader:
    """A declaration that notes which of its keys are read."""

    __slots__ = ("_declaration", "_looked")

    def __init__(self, declaration: Declaration, looked: list[Looked]) -> None:
        self._declaration = declaration
        self._looked = looked

    def __getattr__(self, key: str) -> Any:
        self._looked[-1].keys.add(key)
        return getattr(self._declaration, key)
