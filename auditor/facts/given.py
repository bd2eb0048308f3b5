"""What a fact may look at, and how what it looked at becomes its standing.

A fact is a plain function of :class:`Given`. Whatever it reads through ``given`` is noted: the
claims, the declared words, the facts it builds on. Its standing is the weakest among them, so no
function has to say how sure it is, and none can forget to. What it needs and does not find ends
it with :class:`Missing`; a fact built on it is then absent for the same reason.
"""

from collections.abc import Callable, Mapping
from dataclasses import fields
from math import gcd
from typing import Any, NoReturn, TypeVar, cast

from auditor.claims.base import Claim
from auditor.claims.collection import Claims
from auditor.claims.factorization import Factorization
from auditor.claims.prime import Prime
from auditor.claims.standing import Standing, weakest
from auditor.declaration import Declaration
from auditor.facts.base import Absent
from auditor.facts.shared import Answer, Lookup, Part, Read, Seen, Shared, Trace, narrow
from auditor.questions import Asks, Question
from auditor.run_values import RunValues

__all__ = ["Given", "Missing", "Part", "Seen", "Shared", "narrow"]

Value = TypeVar("Value")
Default = TypeVar("Default")


_BITS = {item.name: 2 << place for place, item in enumerate(fields(Declaration))}
_BITS["required_bits"] = 2 << len(_BITS)
_ANYTHING = 1
"""Whatever else is read of a declaration; it is taken to differ."""


class Missing(Exception):
    """What was needed is absent."""

    def __init__(self, absent: Absent) -> None:
        super().__init__(absent.reason)
        self.absent = absent


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
        self._shared = Shared(run) if shared is None else shared
        if self._shared.run is not run:
            raise ValueError("what is shared was seen under other run values")
        self._claims = claims
        self._declaration = declaration
        self._known: dict[Part, Seen] = {}
        self._traces = [Trace()]
        self._reads: list[dict[Read, Answer]] = [{}]
        self._declaration_reader = cast(Declaration, _DeclarationReader(declaration, self._reads))
        self._claims_reader = _ClaimsReader(claims, self._reads)

    @property
    def declaration(self) -> Declaration:
        """What was declared; whatever is read of it is noted."""
        return self._declaration_reader

    @property
    def claims(self) -> Claims:
        """The claims; whatever is looked up in them is noted. A part must :meth:`cite` what it
        uses."""
        return cast(Claims, self._claims_reader)

    @property
    def consulted(self) -> set[str]:
        """Ids of all claims looked at."""
        return _consulted(self._traces[0], self._reads[0])

    def changed(self, declaration: Declaration) -> "Given":
        """Another declaration with the same claims: what was seen here is kept, unless it read
        something that differs."""
        other = Given(declaration, self._claims, self.run, self._shared)
        differ = _differ(self._declaration, declaration)
        other._known = {part: seen for part, seen in self._known.items() if not seen.keys & differ}
        return other

    def see(self, part: Callable[["Given"], Value]) -> Value:
        """The value of ``part``, computed once; what it rests on, the caller rests on too."""
        seen = self.outcome(part)
        if isinstance(seen.value, Absent):
            raise Missing(seen.value)
        self._traces[-1].merge(seen.trace)
        # Outcomes of all parts are kept together; this one is of the part that makes a Value.
        return seen.value  # type: ignore[return-value]

    def outcome(self, part: Part) -> Seen:
        """The outcome of ``part``: its value, or its absence. The caller has consulted whatever was
        consulted on the way."""
        seen = self._reads[-1][part] = self._known.get(part) or self._seen(part)
        return seen

    def _seen(self, part: Part) -> Seen:
        seen = self._shared.recall(part, self._answer) or self._work_out(part)
        self._known[part] = seen
        return seen

    def _work_out(self, part: Part) -> Seen:
        self._traces.append(Trace())
        self._reads.append({})
        value: object
        try:
            value = part(self)
        except Missing as missing:
            value = missing.absent
        finally:
            trace, reads = self._traces.pop(), self._reads.pop()
        seen = Seen(value, trace, _consulted(trace, reads), _keys(reads))
        return self._shared.keep(part, reads, seen)

    def _answer(self, read: Read) -> Answer:
        if isinstance(read, str):
            return getattr(self._declaration, read)
        if isinstance(read, tuple):
            return _ids(self._claims_reader.find(read))
        return self._known.get(read) or self._seen(read)

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
        claim = self.claims.prime(n)
        if claim is None:
            self.unsettled(Question(Asks.PRIMALITY, (n,)))
        self.cite(claim)
        return isinstance(claim, Prime)

    def is_member(self, n: int, element: int, exponent: int) -> bool:
        """Whether element^exponent = 1 modulo ``n``, by a claim."""
        claim = self.claims.membership(n, element, exponent)
        if claim is None:
            self.unsettled(Question(Asks.MEMBERSHIP, (n, element, exponent)))
        self.cite(claim)
        return claim.member

    def factorization(
        self, m: int, hints: tuple[int, ...] = (), deeper: Asks = Asks.FACTORIZATION
    ) -> Factorization:
        """The most complete factorization of ``m``, by a claim; loose while a rest is left, with
        ``deeper`` as the question that is then open."""
        claim = self.claims.factorization(m)
        if claim is None or any(1 < gcd(hint, claim.rest) < claim.rest for hint in hints):
            self.unsettled(Question(Asks.SMALL_FACTORS, (m, *hints)))
        self.cite(claim)
        if claim.rest > 1:
            self.loosen(Question(deeper, (m, claim.rest)))
        return claim


class _DeclarationReader:
    """A declaration that notes which of its keys are read."""

    __slots__ = ("_declaration", "_reads")

    def __init__(self, declaration: Declaration, reads: list[dict[Read, Answer]]) -> None:
        self._declaration = declaration
        self._reads = reads

    def __getattr__(self, key: str) -> Any:
        value = self._reads[-1][key] = getattr(self._declaration, key)
        return value


class _ClaimsReader:
    """Claims that note what is looked up in them."""

    __slots__ = ("_claims", "_found", "_reads")

    def __init__(self, claims: Claims, reads: list[dict[Read, Answer]]) -> None:
        self._claims = claims
        self._reads = reads
        self._found: dict[Lookup, object] = {}

    def __getattr__(self, name: str) -> Any:
        def look_up(*asked: object, **values: object) -> object:
            lookup = name, asked, tuple(sorted(values.items()))
            found = self.find(lookup)
            self._reads[-1][lookup] = _ids(found)
            return found

        return look_up

    def find(self, lookup: Lookup) -> object:
        """What the claims say."""
        if lookup not in self._found:
            name, asked, values = lookup
            self._found[lookup] = getattr(self._claims, name)(*asked, **dict(values))
        return self._found[lookup]


def _consulted(trace: Trace, reads: Mapping[Read, Answer]) -> set[str]:
    """Ids of the claims cited, and of those consulted for the parts that were read."""
    return trace.claims.union(*(s.consulted for s in reads.values() if isinstance(s, Seen)))


def _keys(reads: Mapping[Read, Answer]) -> int:
    """The keys of the declaration that were read here, and for the parts that were read."""
    keys = 0
    for read, answer in reads.items():
        if isinstance(answer, Seen):
            keys |= answer.keys
        elif isinstance(read, str):
            keys |= _BITS.get(read, _ANYTHING)
    return keys


def _differ(one: Declaration, other: Declaration) -> int:
    """The keys in which two declarations differ."""
    bits = [bit for key, bit in _BITS.items() if getattr(one, key) != getattr(other, key)]
    return sum(bits, _ANYTHING)


def _ids(found: object) -> Answer:
    """What was looked up, by the ids of the claims."""
    if isinstance(found, Claim):
        return found.id
    return tuple(map(_ids, found)) if isinstance(found, tuple) else found
