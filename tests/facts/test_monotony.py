"""More claims only add and tighten: facts, bounds, outcomes; stricter usage is never weaker."""

import random
import secrets
from functools import cache
from math import prod

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.collection import Claims
from auditor.claims.composite import Composite
from auditor.claims.factorization import Factorization
from auditor.claims.origin_formula import formula
from auditor.claims.prime import Prime
from auditor.claims.searched import Searched
from auditor.declaration import Declaration
from auditor.facts import Established, vocabulary
from auditor.inquiry.answers import Answers
from auditor.questions import Asks, Question
from auditor.rulebooks.judging import judge
from auditor.rulebooks.loading import load_all
from auditor.rulebooks.rulebook import Rulebook
from auditor.search.work import Curves, Work
from tests.facts.knowledge import RUN, declare, known, partial_claims, reviewed, settled, some

PRIMES = (
    *(sympy.prevprime(1 << bits) for bits in range(8, 44, 3)),
    1000003,
    10007,
    2**31 - 1,
    495275018295207151,
)
LARGER_PRIMES = tuple(sympy.nextprime(1 << bits) for bits in (70, 90, 110, 130, 150))
COMPOSITES = (15, 91, 561, 1001, 7**4, 101**2, 2**10, 2 * 7**2, 2 * 10007, 1, 2, 3, 4)


@cache
def books() -> tuple[Rulebook, ...]:
    """The two books that speak about every set."""
    return load_all(["group-structure", "strength"], vocabulary())


def outcomes(facts: Established) -> dict[str, str]:
    """Of every rule of the books."""
    return dict(judge(books(), facts.facts, facts.absent, vocabulary()).outcomes)


CHECKS = (None, (), ("range",), ("membership",), ("range", "membership"), ("cofactor",))


@st.composite
def declarations(draw: st.DrawFn, moduli: tuple[int, ...] = (*PRIMES, *COMPOSITES)) -> Declaration:
    """Small sets, most of them over primes, of any usage."""
    n = draw(st.sampled_from(moduli))
    divisors = sympy.divisors(n - 1)[:200] if n > 1 else [1]
    values: dict[str, object] = {
        "subgroup_order": draw(st.none() | st.sampled_from(divisors) | st.integers(1, n + 1)),
        "purpose": draw(st.sampled_from((None, "key-agreement", "encryption", "signature"))),
        "required_strength": draw(st.integers(1, 24)),
        "bits": draw(st.none() | st.integers(1, 70)),
        "use": draw(st.sampled_from((None, "single", "reused", "static"))),
        "checks": draw(st.sampled_from(CHECKS)),
        "public_values": tuple(draw(st.lists(st.integers(0, n), max_size=2))),
    }
    return declare(n, draw(st.integers(0, 2 * n)), **values)


@settings(max_examples=150)
@given(declarations(), st.integers(0, 2**32))
def test_more_claims_only_add_and_tighten(declaration: Declaration, seed: int) -> None:
    """An exact fact, once there, stays as it is; a bound moves its own way; outcomes stand."""
    rng = random.Random(seed)
    everything = settled(declaration)
    if declaration.modulus > 4 and sympy.isprime(declaration.modulus):
        everything.add(partial_claims(declaration.modulus, declaration.generator, rng))
    more = some(everything, rng)
    fewer = some(more, rng)
    only_adds_and_tightens(known(declaration, fewer), known(declaration, more))


OF_THE_SEARCH = ("group.missed_factor_risk", "group.missed_factor_window")
"""They tell how a search stands, and end with what it was for."""


def only_adds_and_tightens(before: Established, after: Established) -> None:
    """What more claims may do to facts and outcomes."""
    for name, fact in before.facts.items():
        if name in OF_THE_SEARCH:
            continue
        assert name in after.facts, name
        now, word = after.facts[name], vocabulary()[name]
        if word.bound is None or fact.tight:
            assert now.value == fact.value, name
        elif word.bound == "at_most":
            assert now.value <= fact.value, name
        elif word.bound == "at_least":
            assert now.value >= fact.value, name
        assert now.tight or not fact.tight, name
    for name, absent in before.absent.items():
        if absent.reason != "unsettled" and not absent.questions:
            assert name in after.absent, name
            assert after.absent[name].reason == absent.reason, name
    late = outcomes(after)
    for rule, outcome in outcomes(before).items():
        # A requirement that holds is conforming even while it is open whether the rule applies.
        stays = {outcome, "not applicable"} if outcome == "conforming" else {outcome}
        assert outcome == "undetermined" or late[rule] in stays, rule


def test_what_a_search_may_have_missed_is_no_bound() -> None:
    """It ends when the order of the generator is known, and no bound ends with it."""
    q, rest = (1 << 89) - 1, (sympy.nextprime(1 << 61), sympy.nextprime(1 << 63))
    c = next(c for c in range(2, 2000, 2) if sympy.isprime(c * q * rest[0] * rest[1] + 1))
    n = c * q * rest[0] * rest[1] + 1
    declaration = declare(n, pow(2, (n - 1) // q, n), subgroup_order=q, use="single")
    answers = Answers(Claims(), RUN, secrets.randbelow, lambda claims: None)
    found = tuple(sorted([*sympy.factorint(c).items(), (q, 1)]))
    support = [answers.settle_primality(prime) for prime, _ in found]
    support.append(Composite(prod(rest), factor=rest[0]))
    search = Searched(prod(rest), "own", Work(curves=(Curves(2000, 147396, 25),)).runs())
    uses = tuple(sorted(claim.id for claim in support))
    partial = Factorization(n - 1, found, prod(rest), uses)
    answers.claims.add([*support, Prime(n, "baillie-psw", rounds=64), search, partial])
    before = known(declaration, Claims(answers.claims))
    answers.answer(Question(Asks.MEMBERSHIP, (n, declaration.generator, q)))
    answers.answer(Question(Asks.ORDER, (n, declaration.generator, q, 1)))
    after = known(declaration, answers.claims)

    assert set(OF_THE_SEARCH) <= before.facts.keys()
    assert not set(OF_THE_SEARCH) & after.facts.keys()
    assert all(vocabulary()[name].kind == "exhibit" for name in OF_THE_SEARCH)
    only_adds_and_tightens(before, after)


@cache
def shaped(offset: int) -> tuple[Declaration, Claims]:
    """A safe prime of 256 bits that has the shape of the formula, with everything claimed of it."""
    n = formula("pi", 256, offset)
    declaration = declare(n, 4, subgroup_order=n // 2, purpose="key-agreement", bits=64)
    return declaration, settled(declaration)


@pytest.mark.parametrize(("offset", "follows"), [(3220, True), (2**40 + 14523, False)])
@given(seed=st.integers(0, 2**32))
@settings(max_examples=40)
def test_an_origin_that_is_found_takes_nothing_back(offset: int, follows: bool, seed: int) -> None:
    """Until it is known whether the modulus follows from pi, nothing is said for its maker."""
    declaration, everything = shaped(offset)
    rng = random.Random(seed)
    more = some(everything, rng)
    settled_facts = known(declaration, everything)

    assert ("strength.hidden_form_bits_at_most" in settled_facts.facts) is not follows
    only_adds_and_tightens(known(declaration, some(more, rng)), known(declaration, more))
    only_adds_and_tightens(known(declaration, more), settled_facts)


@settings(max_examples=40)
@given(declarations())
def test_a_settled_set_leaves_nothing_unsettled(declaration: Declaration) -> None:
    """Numbers this small are settled completely: every absence has another reason.

    Replay of seeds and the search for special forms have nothing to say here.
    """
    facts = reviewed(declaration)
    unsettled = {name for name, absent in facts.absent.items() if absent.reason == "unsettled"}

    assert not unsettled


STRICTER = [((), ("range",)), (("range",), ("range", "membership")), ((), ("cofactor",))]


@pytest.mark.parametrize(("loose", "strict"), STRICTER)
@given(data=st.data())
@settings(max_examples=25)
def test_a_stricter_check_never_lowers_the_strength(
    data: st.DataObject, loose: tuple[str, ...], strict: tuple[str, ...]
) -> None:
    """Nor does a wider exponent, from the width on at which half a step is below the rounding."""
    n = data.draw(st.sampled_from(LARGER_PRIMES))
    g, bits = data.draw(st.integers(2, n - 2)), data.draw(st.integers(40, 160))
    wider = bits + data.draw(st.integers(0, 20))

    def work(width: int, checks: tuple[str, ...]) -> float:
        declaration = declare(
            n, g, purpose="key-agreement", bits=width, use="static", checks=checks
        )
        return float(reviewed(declaration).facts["strength.work_bits_at_most"].value)

    assert work(bits, loose) <= work(bits, strict)
    assert work(bits, loose) <= work(wider, loose)
