"""What a fact may look at, and how what it looked at becomes its standing.

A fact is a plain function of :class:`Given`. Whatever it reads through ``given`` is noted: the
claims, the declared words, the facts it builds on. Its standing is the weakest among them, so no
function has to say how sure it is, and none can forget to. What it needs and does not find ends
it with :class:`Missing`; a fact built on it is then absent for the same reason.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from math import gcd
from typing import NoReturn, TypeVar

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


class Missing(Exception):
    """What was needed is absent."""

    def __init__(self, absent: Absent) -> None:
        super().__init__(absent.reason)
        self.absent = absent


@dataclass(slots=True)
class Trace:
    """What was looked at on the way to a value."""

    claims: set[str] = field(default_factory=set)
    rests_on: set[str] = field(default_factory=set)
    questions: set[Question] = field(default_factory=set)
    loose: bool = False

    def merge(self, other: "Trace") -> None:
        """Add what another value looked at."""
        self.claims |= other.claims
        self.rests_on |= other.rests_on
        self.questions |= other.questions
        self.loose |= other.loose


class Given:
    """One declaration, the claims about its integers, and the run values, read with a trace."""

    def __init__(self, declaration: Declaration, claims: Claims, run: RunValues) -> None:
        self.declaration = declaration
        self.run = run
        self.consulted: set[str] = set()
        self._claims = claims
        self._known: dict[Callable[[Given], object], tuple[object, Trace]] = {}
        self._traces: list[Trace] = [Trace()]

    def see(self, part: Callable[["Given"], Value]) -> Value:
        """The value of ``part``, computed once; what it looked at, the caller looked at too."""
        if part not in self._known:
            self._traces.append(Trace())
            outcome: object
            try:
                outcome = part(self)
            except Missing as missing:
                outcome = missing
            self._known[part] = outcome, self._traces.pop()
        value, trace = self._known[part]
        if isinstance(value, Missing):
            raise value
        self._traces[-1].merge(trace)
        return value  # type: ignore[return-value]

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
        self._traces.append(Trace())
        try:
            return self.see(part)
        except Missing as missing:
            return missing.absent
        finally:
            self._traces.pop()

    def trace(self, part: Callable[["Given"], object]) -> Trace:
        """What ``part``, already seen, looked at."""
        return self._known[part][1]

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
        self.consulted.add(claim.id)

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
