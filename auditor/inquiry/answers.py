"""From a question to claims: search proposes, the check disposes.

Search returns bare integers that nobody believes. Here they become claims, and each claim passes
its own check before it is handed on; what search got wrong ends here.
"""

from collections.abc import Callable, Iterable
from contextlib import suppress
from dataclasses import dataclass, replace
from typing import TypeVar

import gmpy2

from auditor.attested import furthest
from auditor.claims.base import Claim, Draw, Factors, Refuted, product
from auditor.claims.collection import Claims
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.forgery import ForgeryRelations, forgery_relations
from auditor.claims.order import Membership, Order
from auditor.claims.origin import Origin, regenerate
from auditor.claims.origin_formula import (
    CONSTANTS,
    Formula,
    LeastOffset,
    formula_of,
    least_offset,
)
from auditor.claims.origin_generator import CanonicalGenerator, generator_from_integers
from auditor.claims.origin_recipe import Recipe
from auditor.claims.powers import euler_decides, prime_modulus_power
from auditor.claims.primality_tests import DETERMINISTIC_BELOW, is_prime_below_2_64
from auditor.claims.prime import Prime
from auditor.claims.public_values import (
    SharedExponents,
    VisibleExponents,
    shared_exponents,
    visible_exponents,
)
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched, SpecialForm
from auditor.claims.subgroup_generator import subgroup_generator
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from auditor.search import primality
from auditor.search.curves import BUILT_IN, Engine, Executor
from auditor.search.factoring import SearchInterrupted, SearchResult, search
from auditor.search.plan import Plan, plan_for, quick_plan_for
from auditor.search.plan_steps import next_part
from auditor.search.primes import primes_up_to
from auditor.search.work import Work

Kind = TypeVar("Kind", bound=Claim)

Keep = Callable[[Iterable[Claim]], None]
"""Takes claims as they are made, so that an interruption loses nothing."""


@dataclass(frozen=True, slots=True)
class Cores:
    """Where the units of a deep search run, and what runs elliptic curves: moves no answer, except
    that the engine is recorded."""

    executor: Executor | None = None
    jobs: int = 1
    engine: Engine = BUILT_IN


ALONE = Cores()

MADE_BY_CHECKING = (
    Membership,
    Origin,
    Formula,
    LeastOffset,
    CanonicalGenerator,
    SharedExponents,
    VisibleExponents,
    ForgeryRelations,
)


def worth_keeping(claim: Claim) -> bool:
    """Whether recalling a claim is cheaper than making it again; not where the check, which it
    undergoes when it is recalled, is the very computation that makes it."""
    return not isinstance(claim, MADE_BY_CHECKING)


class Answers:
    """Answers questions about integers and adds what it establishes to ``claims``."""

    def __init__(
        self, claims: Claims, run: RunValues, draw: Draw, keep: Keep, cores: Cores = ALONE
    ) -> None:
        self.claims = claims
        self.run = run
        self.draw = draw
        self.keep = keep
        self.cores = cores

    @property
    def deep(self) -> bool:
        """Whether the effort goes beyond what costs next to nothing."""
        return self.run.effort != "quick" or self.run.factor_digits is not None

    def answer(self, question: Question) -> None:
        """Make the claims that the question calls for.

        Raises :class:`Refuted` when search proposes what its check refuses; the question then
        stays open.
        """
        while not self.step(question):
            pass

    def step(self, question: Question) -> bool:
        """Answer the question, or go on with it for a bounded amount of work; whether that was
        all. What a step found is in ``claims`` and the next one goes on from there.

        Raises :class:`Refuted`.
        """
        match question.asks:
            case Asks.PRIMALITY:
                self.settle_primality(*question.integers)
            case Asks.SMALL_FACTORS:
                number, *hints = question.integers
                return self._factor(number, tuple(hints), quick_plan_for(number))
            case Asks.FACTORIZATION:
                return self._factor(question.integers[0], (), self._plan())
            case Asks.MODULUS_FACTORS:
                return self._factor(question.integers[0], (), self._plan().for_modulus())
            case Asks.ORDER:
                n, element, multiple, _ = question.integers
                self._order(n, element, multiple)
            case Asks.SPECIAL_FORM:
                self._special_form(*question.integers)
            case Asks.SUBGROUP_GENERATOR:
                self._subgroup_generator(*question.integers)
            case Asks.LEAST_OFFSET if self.run.effort != "thorough":
                pass
            case _:
                self._take(self._made(question))
        return True

    def _made(self, question: Question) -> Claim:
        """A claim whose check is the very computation that makes it; that is not done twice."""
        n, *others = question.integers
        match question.asks:
            case Asks.MEMBERSHIP:
                return _membership(*question.integers)
            case Asks.ORIGIN:
                recipe = Recipe.from_integers(tuple(others[1:]))
                return regenerate(n, others[0], recipe, self.settle_primality, self.draw)
            case Asks.CANONICAL_GENERATOR:
                return generator_from_integers(*question.integers)
            case Asks.FORMULA:
                return formula_of(n, CONSTANTS[others[0]])
            case Asks.LEAST_OFFSET:
                return least_offset(n, CONSTANTS[others[0]], others[1], self.draw)
            case Asks.SHARED_EXPONENTS:
                return shared_exponents(n, others[0], others[1:])
            case Asks.VISIBLE_EXPONENTS:
                return visible_exponents(n, others[0], others[1], others[2:])
            case Asks.FORGERY_RELATIONS:
                return forgery_relations(n, others[0])
        raise ValueError(f"no such question: {question.asks}")

    def settle_primality(self, n: int) -> Prime | Composite:
        """The claim that ``n`` > 1 is prime, or that it is composite; made if not yet there."""
        known = self.claims.prime(n)
        if known is not None and (self.claims.perfect_power(n) or not gmpy2.is_power(n)):
            return known
        likely = self._prime(n)
        if likely is not None:
            return likely
        candidate = primality.candidate(n)
        if candidate.prime:
            # No quick test found it, an unpredictable base did.
            return self._accept(Composite(n, witness=primality.least_witness(n)))
        return self._composite(candidate)

    def _prime(self, n: int) -> Prime | None:
        """The claim that ``n`` is prime, by the best method that costs no search; None, and nothing
        claimed of it, where it is not. Each test is run once: the check is what finds out."""
        if n < DETERMINISTIC_BELOW:
            return self._accept(Prime(n, "below-2^64")) if is_prime_below_2_64(n) else None
        if any(n % prime == 0 for prime in primes_up_to(primality.TRIAL_BOUND)):
            return None
        return self._proved_from_half(n) or self._probable(n)

    def _composite(self, candidate: primality.Candidate) -> Composite:
        if candidate.power is not None:
            base, exponent = candidate.power
            self._accept(PerfectPower(candidate.n, base, exponent))
            self.settle_primality(base)
        factor = candidate.factor or (candidate.power[0] if candidate.power else None)
        if factor is not None:
            return self._accept(Composite(candidate.n, factor=factor))
        return self._accept(Composite(candidate.n, witness=candidate.witness))

    def _proved_from_half(self, n: int) -> Prime | None:
        """A proof of n = 2q + 1 from q, where q is a prime itself: it costs one exponentiation.
        The base 2 serves whenever n is prime, since its square less 1 is 3."""
        half = (n - 1) // 2
        support = self.claims.prime(half) or self._prime(half)
        if not isinstance(support, Prime):
            return None
        proof = Prime(n, "n-1", factored=((half, 1),), witnesses=((half, 2),), uses=(support.id,))
        return self._if_it_holds(proof)

    def _probable(self, n: int) -> Prime | None:
        return self._if_it_holds(Prime(n, "baillie-psw", rounds=self.run.rounds))

    def _if_it_holds(self, claim: Kind) -> Kind | None:
        try:
            return self._accept(claim)
        except Refuted:
            return None

    def _plan(self) -> Plan:
        return plan_for(self.run.effort, self.run.factor_digits)

    def _factor(self, number: int, hints: tuple[int, ...], plan: Plan) -> bool:
        """Search on from what is known about ``number``, up to a bounded number of curves;
        whether the plan is carried out. An interruption keeps what was found."""
        known = self.claims.factorization(number)
        primes = (*hints, *(prime for prime, _ in known.factors)) if known else hints
        if pairs := self._divided(number, primes):
            self._keep_factors(number, pairs, 1)
            return True
        done = self._work_done(known)
        part = next_part(plan, done or Work(), number.bit_length())
        try:
            result = search(
                number,
                part,
                known=primes,
                executor=self.cores.executor,
                jobs=self.cores.jobs,
                engine=self.cores.engine,
                done=done,
            )
        except SearchInterrupted as interrupted:
            # Whatever is wrong with what it had, whoever interrupts wants an end.
            with suppress(Refuted):
                self._keep_factorization(number, interrupted.result)
            raise
        self._keep_factorization(number, result)
        return result.rest == 1 or part.levels == plan.levels

    def _divided(self, number: int, known: Iterable[int]) -> Factors | None:
        """All of ``number`` in primes, where those that are claimed already are all there are."""
        proof = self.claims.prime(number + 1)
        proven = {prime for prime, _ in proof.factored} if isinstance(proof, Prime) else set()
        rest, pairs = gmpy2.mpz(number), []
        for prime in sorted({2, *known, *proven}):
            if prime > 2 and not isinstance(self.claims.prime(prime), Prime):
                continue
            rest, exponent = gmpy2.remove(rest, prime)
            if exponent:
                pairs.append((prime, int(exponent)))
        return tuple(pairs) if rest == 1 else None

    def _work_done(self, known: Factorization | None) -> Work | None:
        record = furthest(self.claims, known.rest) if known else None
        if record is None:
            return None
        _, work = record
        # Where no curves were run no engine has done anything.
        return work if work.curves else replace(work, engines=())

    def _keep_factorization(self, number: int, result: SearchResult) -> None:
        # The record first: factors without it would make the next run search from the beginning.
        if result.rest > 1:
            self._accept(Searched(result.rest, result.engine or "built-in", result.work.runs()))
        self._keep_factors(number, result.pairs, result.rest)

    def _keep_factors(self, number: int, pairs: Factors, rest: int) -> None:
        claims = [self.settle_primality(prime) for prime, _ in pairs]
        if rest > 1:
            claims.append(self.settle_primality(rest))
        uses = tuple(sorted(claim.id for claim in claims))
        self._accept(Factorization(number, pairs, rest, uses))

    def _special_form(self, n: int) -> None:
        from auditor.search import special_form

        tiers = (1, 2, 3) if self.run.effort == "thorough" else (1, 2)
        found = special_form.search(n, tiers)
        if found is None:
            done = tuple(sorted(item.tier for item in special_form.looked_for(n, tiers)))
            self._accept(FormSearched(n, done))
        else:
            self._accept(SpecialForm(n, found.coefficients, found.g1, found.g0, found.cofactor))

    def _subgroup_generator(self, n: int, q: int) -> None:
        uses = tuple(sorted(self.settle_primality(number).id for number in {n, q}))
        claim = subgroup_generator(n, q, uses)
        if claim is not None:
            self._accept(claim)

    def _order(self, n: int, element: int, multiple: int) -> None:
        """The order of an element whose ``multiple``-th power is 1, by stripping primes from it
        (Cohen 1993, algorithm 1.4.3, from memory)."""
        factors, rest = self._known_factors(multiple)
        modulus = self.claims.prime(n)
        power = prime_modulus_power if isinstance(modulus, Prime) else gmpy2.powmod
        whole = power(element, rest, n)
        known: list[tuple[int, int]] = []
        for prime, exponent in factors:
            others = product(factors) // prime**exponent
            reached, steps = power(whole, others, n), 0
            while reached != 1 and steps < exponent:
                # The last power is 1 if the multiple is one: the check would notice.
                reached = gmpy2.powmod(reached, prime, n) if steps + 1 < exponent else 1
                steps += 1
            if steps:
                known.append((prime, steps))
        complete = rest == 1 or gmpy2.powmod(element, product(tuple(known)), n) == 1
        left = 1 if complete else rest
        support = [self.settle_primality(prime) for prime, _ in known]
        if isinstance(modulus, Prime) and euler_decides(n, product(tuple(known)) * left):
            support.append(modulus)
        uses = tuple(sorted(claim.id for claim in support))
        self._accept(Order(n, element, tuple(known), left, uses))

    def _known_factors(self, multiple: int) -> tuple[Factors, int]:
        claim = self.claims.factorization(multiple)
        if claim is not None:
            return claim.factors, claim.rest
        if multiple > 1 and isinstance(self.settle_primality(multiple), Prime):
            return ((multiple, 1),), 1
        return (), multiple

    def _accept(self, claim: Kind) -> Kind:
        used = {claim_id: self.claims[claim_id] for claim_id in claim.uses}
        claim.check(used, self.draw)
        return self._take(claim)

    def _take(self, claim: Kind) -> Kind:
        self.claims.add([claim])
        if worth_keeping(claim):
            self.keep([claim])
        return claim


def _membership(n: int, element: int, exponent: int) -> Membership:
    if n < 2 or not 0 <= element < n:
        raise Refuted("the element is not reduced modulo the modulus")
    return Membership(n, element, exponent, bool(gmpy2.powmod(element, exponent, n) == 1))
