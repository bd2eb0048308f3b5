"""From a question to claims: search proposes, the check disposes.

Search returns bare integers that nobody believes. Here they become claims, and each claim passes
its own check before it is handed on; what search got wrong ends here.
"""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import TypeVar

import gmpy2

from auditor.attested import furthest
from auditor.claims.base import Claim, Draw, Factors, Refuted, product
from auditor.claims.collection import Claims
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.forgery import forgery_relations
from auditor.claims.order import Membership, Order
from auditor.claims.origin import regenerate
from auditor.claims.origin_formula import CONSTANTS, formula_of, least_offset
from auditor.claims.origin_generator import generator_from_integers
from auditor.claims.origin_recipe import Recipe
from auditor.claims.primality_tests import DETERMINISTIC_BELOW
from auditor.claims.prime import Prime
from auditor.claims.public_values import shared_exponents, visible_exponents
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched, SpecialForm
from auditor.claims.subgroup_generator import subgroup_generator
from auditor.questions import Asks, Question
from auditor.run_values import RunValues
from auditor.search import primality
from auditor.search.curves import Engine, Executor
from auditor.search.factoring import SearchInterrupted, SearchResult, search
from auditor.search.plan import QUICK, Plan, plan_for
from auditor.search.work import Work

Kind = TypeVar("Kind", bound=Claim)

Keep = Callable[[Iterable[Claim]], None]
"""Takes claims as they are made, so that an interruption loses nothing."""


@dataclass(frozen=True, slots=True)
class Cores:
    """Where the units of a deep search run; moves no answer, except that ``engine`` is recorded."""

    executor: Executor | None = None
    jobs: int = 1
    engine: Engine | None = None


ALONE = Cores()


class Answers:
    """Answers questions about integers and adds what it establishes to ``claims``."""

    def __init__(
        self, claims: Claims, run: RunValues, draw: Draw, keep: Keep, cores: Cores = ALONE
    ) -> None:
        self.claims = claims
        self._run = run
        self._draw = draw
        self._keep = keep
        self._cores = cores

    @property
    def deep(self) -> bool:
        """Whether the effort goes beyond what costs next to nothing."""
        return self._run.effort != "quick" or self._run.factor_digits is not None

    def answer(self, question: Question) -> None:
        """Make the claims that the question calls for.

        Raises :class:`Refuted` when search proposes what its check refuses; the question then
        stays open.
        """
        match question.asks:
            case Asks.PRIMALITY:
                self.settle_primality(*question.integers)
            case Asks.SMALL_FACTORS:
                number, *hints = question.integers
                self._factor(number, tuple(hints), QUICK)
            case Asks.FACTORIZATION:
                self._factor(question.integers[0], (), self._plan())
            case Asks.MODULUS_FACTORS:
                self._factor(question.integers[0], (), self._plan().for_modulus())
            case Asks.ORDER:
                n, element, multiple, _ = question.integers
                self._order(n, element, multiple)
            case Asks.MEMBERSHIP:
                n, element, exponent = question.integers
                member = gmpy2.powmod(element, exponent, n) == 1
                self._accept(Membership(n, element, exponent, bool(member)))

            case Asks.SPECIAL_FORM:
                self._special_form(*question.integers)

            case Asks.SUBGROUP_GENERATOR:
                self._subgroup_generator(*question.integers)

            case Asks.LEAST_OFFSET if self._run.effort != "thorough":
                pass
            case _:
                self.claims.add([self._made(question)])

    def _made(self, question: Question) -> Claim:
        """A claim whose check is the very computation that makes it: that is not done twice, and
        nothing is gained by keeping the claim, since what is recalled is checked again."""
        n, *others = question.integers
        match question.asks:
            case Asks.ORIGIN:
                recipe = Recipe.from_integers(tuple(others[1:]))
                return regenerate(n, others[0], recipe, self.settle_primality, self._draw)
            case Asks.CANONICAL_GENERATOR:
                return generator_from_integers(*question.integers)
            case Asks.FORMULA:
                return formula_of(n, CONSTANTS[others[0]])
            case Asks.LEAST_OFFSET:
                return least_offset(n, CONSTANTS[others[0]], others[1], self._draw)
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
        candidate = primality.candidate(n)
        if not candidate.prime:
            return self._composite(candidate)
        if n < DETERMINISTIC_BELOW:
            return self._accept(Prime(n, "below-2^64"))
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
        """A proof of n = 2q + 1 from q, where q is a prime itself: it costs one witness."""
        half = (n - 1) // 2
        if not primality.is_likely_prime(half):
            return None
        support = self.settle_primality(half)
        proof = primality.n_minus_1_proof(n, [half])
        if proof is None or not isinstance(support, Prime):
            return None
        return self._accept(
            Prime(n, "n-1", factored=proof.factored, witnesses=proof.witnesses, uses=(support.id,))
        )

    def _probable(self, n: int) -> Prime | Composite:
        try:
            return self._accept(Prime(n, "baillie-psw", rounds=self._run.rounds))
        except Refuted:
            # No quick test found it, an unpredictable base did.
            return self._accept(Composite(n, witness=primality.least_witness(n)))

    def _plan(self) -> Plan:
        return plan_for(self._run.effort, self._run.factor_digits)

    def _factor(self, number: int, hints: tuple[int, ...], plan: Plan) -> None:
        """Search on from what is known about ``number``; an interruption keeps what was found."""
        known = self.claims.factorization(number)
        primes = tuple(prime for prime, _ in known.factors) if known else ()
        try:
            result = search(
                number,
                plan,
                known=(*hints, *primes),
                executor=self._cores.executor,
                jobs=self._cores.jobs,
                engine=self._cores.engine,
                done=self._work_done(known),
            )
        except SearchInterrupted as interrupted:
            self._keep_factorization(number, interrupted.result)
            raise
        self._keep_factorization(number, result)

    def _work_done(self, known: Factorization | None) -> Work | None:
        record = furthest(self.claims, known.rest) if known else None
        return record[1] if record else None

    def _keep_factorization(self, number: int, result: SearchResult) -> None:
        claims = [self.settle_primality(prime) for prime, _ in result.pairs]
        if result.rest > 1:
            claims.append(self.settle_primality(result.rest))
        uses = tuple(sorted(claim.id for claim in claims))
        self._accept(Factorization(number, result.pairs, result.rest, uses))
        if result.rest > 1:
            self._accept(Searched(result.rest, result.engine or "built-in", result.work.runs()))

    def _special_form(self, n: int) -> None:
        from auditor.search import special_form

        tiers = (1, 2, 3) if self._run.effort == "thorough" else (1, 2)
        found = special_form.search(n, tiers)
        if found is None:
            self._accept(FormSearched(n, tiers))
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
        whole = gmpy2.powmod(element, rest, n)
        known: list[tuple[int, int]] = []
        for prime, exponent in factors:
            others = product(factors) // prime**exponent
            power, steps = gmpy2.powmod(whole, others, n), 0
            while power != 1 and steps < exponent:
                power, steps = gmpy2.powmod(power, prime, n), steps + 1
            if steps:
                known.append((prime, steps))
        complete = gmpy2.powmod(element, product(tuple(known)), n) == 1
        uses = tuple(sorted(self.settle_primality(prime).id for prime, _ in known))
        self._accept(Order(n, element, tuple(known), 1 if complete else rest, uses))

    def _known_factors(self, multiple: int) -> tuple[Factors, int]:
        claim = self.claims.factorization(multiple)
        if claim is not None:
            return claim.factors, claim.rest
        if multiple > 1 and isinstance(self.settle_primality(multiple), Prime):
            return ((multiple, 1),), 1
        return (), multiple

    def _accept(self, claim: Kind) -> Kind:
        used = {claim_id: self.claims[claim_id] for claim_id in claim.uses}
        claim.check(used, self._draw)
        self.claims.add([claim])
        self._keep([claim])
        return claim
