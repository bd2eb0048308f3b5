"""Every kind of claim: what holds is accepted, what does not is refuted for its own reason."""

import secrets
from math import prod
from typing import Any

import gmpy2
import pytest
import sympy
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.base import Claim, Factors, Refuted
from auditor.claims.collection import Claims, check_all, read_claim
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.order import Membership, Order
from auditor.claims.prime import Prime, factored_enough
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched, SpecialForm
from auditor.claims.standing import Standing
from tests.claims.test_primality_tests import CASES, cases, number

P = 10007  # = 2 * 5003 + 1; 5 generates the group, 25 has order 5003 (PARI 2.15.4)


def primes(*numbers: int) -> list[Prime]:
    """A claim for each, decided below 2^64."""
    return [Prime(n, "below-2^64") for n in numbers]


def ids(claims: list[Any]) -> tuple[str, ...]:
    """Their ids, as a claim that uses them lists them."""
    return tuple(sorted(claim.id for claim in claims))


def refutation(claim: Claim, *used: Claim) -> str:
    """The reason why the check fails; the test fails where it does not."""
    with pytest.raises(Refuted) as caught:
        claim.check({item.id: item for item in used}, secrets.randbelow)
    return str(caught.value)


def factorization(n: int) -> tuple[Factorization, list[Prime]]:
    """The complete factorization of a small number, by sympy."""
    factors = tuple(sorted(sympy.factorint(n).items()))
    used = primes(*(prime for prime, _ in factors))
    return Factorization(n, factors, 1, ids(used)), used


ORDER_USES = primes(5003)
GOOD: list[tuple[Claim, list[Claim]]] = [
    (Prime(2**61 - 1, "below-2^64"), []),
    (Prime(2**127 - 1, "baillie-psw", rounds=64), []),
    (
        Prime(P, "n-1", factored=((5003, 1),), witnesses=((5003, 2),), uses=ids(ORDER_USES)),
        list(ORDER_USES),
    ),
    (Composite(91, factor=7), []),
    (Composite(2047, witness=3), []),
    (PerfectPower(7**5, 7, 5), []),
    (Order(P, 25, ((5003, 1),), 1, ids(ORDER_USES)), list(ORDER_USES)),
    (Membership(P, 25, 5003, True), []),
    (Membership(P, 5, 5003, False), []),
    (Searched(2**67 - 1, "built-in", (("rho", (("iterations", 1000),)),)), []),
    (SpecialForm(2**1024 - 105, (-105, 0, 0, 0, 16), 1, 2**255, 1), []),
    (FormSearched(P, (1, 2)), []),
]


@pytest.mark.parametrize(("claim", "used"), GOOD, ids=lambda item: getattr(item, "kind", ""))
def test_a_claim_that_holds_is_accepted_and_read_back(claim: Claim, used: list[Claim]) -> None:
    """It passes its check, and its record gives the same claim with the same id."""
    claim.check({item.id: item for item in used}, secrets.randbelow)

    assert read_claim(claim.record()) == claim
    assert read_claim(claim.record()).id == claim.id


@pytest.mark.parametrize("case", cases("n_minus_1_proof"))
def test_published_proofs_from_factors_of_n_minus_1(case: dict[str, Any]) -> None:
    """The worked proofs hold with their witnesses; the one that factors too little is refused."""
    n = int(sympy.sympify(str(case["input"]["n"]).replace("^", "**")))
    part = int(sympy.sympify(str(case["input"]["F"]).replace("^", "**")))
    factored = tuple(sorted(sympy.factorint(part).items()))
    used = primes(*(prime for prime, _ in factored))
    witnesses = case["expect"].get("witnesses", {str(prime): 2 for prime, _ in factored})
    pairs = tuple((prime, int(witnesses[str(prime)])) for prime, _ in factored)
    claim = Prime(n, "n-1", factored=factored, witnesses=pairs, uses=ids(used))

    if case["expect"]["valid"]:
        claim.check({item.id: item for item in used}, secrets.randbelow)
    else:
        assert "too small" in refutation(claim, *used)


@given(st.integers(min_value=3, max_value=40_000).map(lambda n: 2 * n + 1))
def test_no_factored_part_proves_a_composite(n: int) -> None:
    """For no composite does any full set of factors of n-1 come with witnesses that pass."""
    factors = tuple(sorted(sympy.factorint(n - 1).items()))
    used = primes(*(prime for prime, _ in factors))
    base = next(
        (
            a
            for a in range(2, 50)
            if pow(a, n - 1, n) == 1
            and all(gmpy2.gcd(pow(a, (n - 1) // r, n) - 1, n) == 1 for r, _ in factors)
        ),
        None,
    )
    if base is None:
        return
    witnesses = tuple((prime, base) for prime, _ in factors)
    Prime(n, "n-1", factored=factors, witnesses=witnesses, uses=ids(used)).check(
        {item.id: item for item in used}, secrets.randbelow
    )

    assert sympy.isprime(n)


def test_the_bound_of_brillhart_lehmer_selfridge_is_sharp_where_it_must_be() -> None:
    """A product of two primes = 1 mod F with F just above the cube root is told from a prime."""
    composites = [
        (left, right)
        for left in sympy.primerange(3, 400)
        for right in sympy.primerange(left, 400)
        for part in [gmpy2.gcd(left - 1, right - 1)]
        if part > 2 and part % 2 == 0 and gmpy2.gcd(part, (left * right - 1) // part) == 1
    ]

    assert len(composites) > 50
    assert not any(
        factored_enough(left * right, int(gmpy2.gcd(left - 1, right - 1)))
        for left, right in composites
    )


REFUTED: list[tuple[str, Claim, list[Claim]]] = [
    ("composite", Prime(91, "below-2^64"), []),
    ("below 2\\^64", Prime(2**89 - 1, "below-2^64"), []),
    ("composite", Prime((2**61 - 1) * (2**89 - 1), "baillie-psw", rounds=64), []),
    ("decided", Prime(2**61 - 1, "baillie-psw", rounds=64), []),
    ("rounds", Prime(2**127 - 1, "baillie-psw", rounds=1), []),
    ("no other claim", Prime(7, "below-2^64", uses=ids(primes(5))), primes(5)),
    (
        "a witness does not show",
        Prime(P, "n-1", factored=((5003, 1),), witnesses=((5003, P - 1),), uses=ids(ORDER_USES)),
        list(ORDER_USES),
    ),
    (
        "out of range",
        Prime(P, "n-1", factored=((5003, 1),), witnesses=((5003, 1),), uses=ids(ORDER_USES)),
        list(ORDER_USES),
    ),
    (
        "not one for each",
        Prime(P, "n-1", factored=((5003, 1),), witnesses=((5003, 2),)),
        [],
    ),
    (
        "do not divide",
        Prime(P, "n-1", factored=((4999, 1),), witnesses=((4999, 2),), uses=ids(primes(4999))),
        list(primes(4999)),
    ),
    ("not a proper one", Composite(91, factor=91), []),
    ("not a proper one", Composite(91, factor=1), []),
    ("does not divide", Composite(91, factor=6), []),
    ("witnesses nothing", Composite(2047, witness=2), []),
    ("least prime base", Composite(2047, witness=5), []),
    ("witnesses nothing", Composite(2**61 - 1, witness=3), []),
    ("out of range", Composite(2047, witness=2**16 + 1), []),
    ("too long", Factorization(2**70, ((2, 2**36),), 1, ids(primes(2))), list(primes(2))),
    ("too long", Order(P, 5, ((2, 2**36),), 1, ids(primes(2))), list(primes(2))),
    (
        "says nothing",
        Prime(
            P,
            "n-1",
            factored=((5003, 1),),
            witnesses=((5003, 2),),
            uses=ids([*primes(5003), Composite(91, factor=7)]),
        ),
        [*primes(5003), Composite(91, factor=7)],
    ),
    ("odd numbers", Composite(4, witness=3), []),
    ("another number", PerfectPower(7**5 + 1, 7, 5), []),
    ("itself a perfect power", PerfectPower(7**4, 49, 2), []),
    ("out of range", PerfectPower(7, 7, 1), []),
    ("superfluous", Order(P, 25, ((2, 1), (5003, 1)), 1, ids(primes(2, 5003))), primes(2, 5003)),
    ("does not divide", Order(P, 5, ((5003, 1),), 1, ids(ORDER_USES)), list(ORDER_USES)),
    ("known part alone", Order(P, 25, ((5003, 1),), 2, ids(ORDER_USES)), list(ORDER_USES)),
    ("not reduced", Order(P, P + 25, ((5003, 1),), 1, ids(ORDER_USES)), list(ORDER_USES)),
    ("divides the rest", Order(P, 25, ((5003, 1),), 5003, ids(ORDER_USES)), list(ORDER_USES)),
    ("says otherwise", Membership(P, 25, 5003, False), []),
    ("says otherwise", Membership(P, 5, 5003, True), []),
    ("not reduced", Membership(P, P, 5003, False), []),
    ("product", Factorization(12, ((2, 1), (3, 1)), 1, ids(primes(2, 3))), primes(2, 3)),
    ("ascending", Factorization(6, ((3, 1), (2, 1)), 1, ids(primes(2, 3))), primes(2, 3)),
    ("divides the rest", Factorization(36, ((2, 1),), 18, ids(primes(2))), primes(2)),
    ("not shown composite", Factorization(182, ((2, 1),), 91, ids(primes(2))), primes(2)),
    ("above 1", Searched(1, "built-in", ()), []),
    ("multiple", SpecialForm(2**1024 - 107, (-105, 0, 0, 0, 16), 1, 2**255, 1), []),
    ("multiple", SpecialForm(2**1024 - 105, (-105, 0, 0, 0, 16), 1, 2**255, 2), []),
    ("ordinary", SpecialForm(P, (-105, 0, 0, 0, 16), 1, 2**255, 1), []),
    ("degree", SpecialForm(2**1024 - 9, (-9, 0, 1), 1, 2**512, 1), []),
    ("reducible", SpecialForm(2**1024 - 9, (-9, 0, 0, 0, 1), 1, 2**256, 1), []),
    ("no polynomial", SpecialForm(P, (1,), 1, 2, 1), []),
    ("tiers", FormSearched(P, (2, 1)), []),
    ("tiers", FormSearched(P, ()), []),
]


@pytest.mark.parametrize(("reason", "claim", "used"), REFUTED)
def test_a_claim_that_does_not_hold_is_refuted(
    reason: str, claim: Claim, used: list[Claim]
) -> None:
    """Each way to be wrong is refused, for its own reason."""
    if reason == "below 2\\^64":
        assert "not below 2^64" in refutation(claim, *used)
    else:
        assert reason in refutation(claim, *used)


def test_a_partial_factorization_names_its_composite_rest() -> None:
    """A rest is allowed when it is shown composite and shares no known factor."""
    used: list[Claim] = [*primes(2), Composite(91, factor=7)]
    Factorization(182, ((2, 1),), 91, ids(used)).check(
        {claim.id: claim for claim in used}, secrets.randbelow
    )


@given(st.integers(min_value=2, max_value=10**12))
def test_factorizations_by_sympy_are_accepted(n: int) -> None:
    """And with one exponent raised they are not."""
    claim, used = factorization(n)
    by_id: dict[str, Claim] = {item.id: item for item in used}
    claim.check(by_id, secrets.randbelow)
    (prime, exponent), *others = claim.factors
    raised: Factors = ((prime, exponent + 1), *others)
    reason = refutation(Factorization(n, raised, 1, claim.uses), *used)

    assert "product" in reason or "too long" in reason


@given(st.integers(min_value=2, max_value=20_000), st.integers(min_value=1, max_value=20_000))
def test_orders_by_sympy_are_accepted_and_no_other_number_is(n: int, a: int) -> None:
    """The check accepts exactly the order, for any modulus and unit."""
    a %= n
    if gmpy2.gcd(a, n) != 1 or a == 0:
        return
    order = int(sympy.n_order(a, n))
    for candidate in {order, 2 * order, 3 * order, max(1, order // 2)}:
        factors = tuple(sorted(sympy.factorint(candidate).items()))
        used = primes(*(prime for prime, _ in factors))
        claim = Order(n, a, factors, 1, ids(used))
        if candidate == order:
            claim.check({item.id: item for item in used}, secrets.randbelow)
        else:
            assert refutation(claim, *used)


def test_standing_is_that_of_the_weakest_prime() -> None:
    """A proof from a probable q is probable."""
    q = 2**127 - 1
    k = next(k for k in range(2, 1000, 2) if sympy.isprime(k * q + 1))
    weak = Prime(q, "baillie-psw", rounds=64)
    p = k * q + 1
    base = next(a for a in range(2, 50) if gmpy2.gcd(pow(a, k, p) - 1, p) == 1)
    proof = Prime(p, "n-1", factored=((q, 1),), witnesses=((q, base),), uses=(weak.id,))
    claims = Claims([weak, proof])

    assert check_all(claims, secrets.randbelow) == {}
    assert claims.standing(proof.id) == Standing.PROBABLE


def test_what_rests_on_a_failed_or_missing_claim_fails() -> None:
    """A true statement with a false support is not established."""
    false = Prime(91, "below-2^64")
    claim = Factorization(91, ((91, 1),), 1, (false.id,))
    orphan = Factorization(7, ((7, 1),), 1, ids(primes(7)))
    failed = check_all(Claims([false, claim, orphan]), secrets.randbelow)

    assert failed[false.id] == "composite"
    assert false.id in failed[claim.id]
    assert "not here" in failed[orphan.id]


def test_more_claims_never_make_an_answer_weaker() -> None:
    """The proven claim is preferred to the probable, the complete to the partial, in any order."""
    complete, used = factorization(182)
    partial = Factorization(182, ((2, 1),), 91, ids([*primes(2), Composite(91, factor=7)]))
    everything = [partial, complete, *used, Composite(91, factor=7)]

    for claims in (Claims(everything), Claims(reversed(everything))):
        assert claims.factorization(182) == complete
        assert prod(p**e for p, e in complete.factors) == 182


MALFORMED: list[dict[str, Any]] = [
    {},
    {"kind": "prime"},
    {"kind": "wish", "statement": {}, "certificate": {}, "uses": []},
    {"kind": "prime", "statement": {"n": -7}, "certificate": {"method": "below-2^64"}, "uses": []},
    {"kind": "prime", "statement": {"n": "7"}, "certificate": {"method": "below-2^64"}, "uses": []},
    {"kind": "prime", "statement": {"n": 7.0}, "certificate": {"method": "below-2^64"}, "uses": []},
    {"kind": "prime", "statement": {"n": 7}, "certificate": {"method": "faith"}, "uses": []},
    {
        "kind": "prime",
        "statement": {"n": "0x7fffffffffffffffffffffffffffffff"},
        "certificate": {"method": "baillie-psw", "rounds": 64, "error_bits": 256},
        "uses": [],
    },
    {"kind": "composite", "statement": {"n": 91}, "certificate": {"factor": 7}, "uses": ["a"]},
    {"kind": "composite", "statement": {"n": 91}, "certificate": {"factor": True}, "uses": []},
    {"kind": "composite", "statement": {"n": 91}, "certificate": {"factor": 7, "x": 1}, "uses": []},
    {
        "kind": "membership",
        "statement": {"modulus": 7, "element": 2, "exponent": 3, "member": 1},
        "certificate": {},
        "uses": [],
    },
    {
        "kind": "factorization",
        "statement": {"n": 6, "factors": [[2, 1, 1]], "rest": 1},
        "certificate": {},
        "uses": [],
    },
    {"kind": "prime", "statement": {"n": 7}, "certificate": {"method": "below-2^64"}, "uses": "ab"},
    {"kind": "prime", "statement": None, "certificate": None, "uses": []},
]


@pytest.mark.parametrize("record", MALFORMED)
def test_a_malformed_record_is_no_claim(record: dict[str, Any]) -> None:
    """Reading refuses it with ValueError and nothing else."""
    with pytest.raises(ValueError, match=r"."):
        read_claim(record)


def test_the_data_file_is_read() -> None:
    """All kinds of primality values are there."""
    assert {case["kind"] for case in CASES} == {
        "miller_rabin",
        "strong_lucas_selfridge",
        "adversarial_composite",
        "dh_parameters",
        "n_minus_1_proof",
        "elliptic_chain",
        "elliptic_forgery",
    }
    assert number("0x10") == 16
    assert yaml.__version__
