"""Every reported condition is followed by a forged signature that verifies."""

import math
from random import Random

import flint
import gmpy2
import pytest

from auditor.claims.forgery import Relation, relations
from auditor.intake.standard_groups import StandardGroup
from auditor.routes.factors import Factors
from auditor.routes.signature_forgery import (
    Condition,
    Forgery,
    power_of_divisor,
    shared_factor,
    unknown_origin,
)
from tests.routes.cases import cases, group, units

SIGNATURES = cases("signatures")
BUDGET = 5.0
"""Bits: low enough for toy moduli, where every logarithm is cheap."""


def complete(p: int) -> Factors:
    """The factorization of p - 1."""
    return Factors(tuple((int(prime), e) for prime, e in flint.fmpz(p - 1).factor()))


Found = tuple[Forgery, Relation]


def reported(p: int, alpha: int, factors: Factors) -> list[Found]:
    """Every relation between base and order, with what it costs to use."""
    routes = {"root": power_of_divisor, "power": shared_factor}
    return [(routes[found.form](p, found.r, factors), found) for found in relations(p, alpha)]


def forgeries(
    p: int, alpha: int, budget: float = BUDGET, factors: Factors | None = None
) -> dict[Condition, Found]:
    """The cheapest within the budget, by condition."""
    found = reported(p, alpha, factors or complete(p))
    found.sort(key=lambda pair: (pair[0].bits, pair[0].subgroup), reverse=True)
    return {pair[0].condition: pair for pair in found if pair[0].bits <= budget}


def verifies(p: int, alpha: int, y: int, h: int, r: int, s: int) -> bool:
    """The verification of a classical ElGamal signature."""
    return 0 < r < p and pow(alpha, h, p) == pow(y, r, p) * pow(r, s, p) % p


def forge(p: int, alpha: int, y: int, h: int, found: Found) -> tuple[int, int] | None:
    """A signature of ``h`` from the reported relation alone; None where it does not reach h."""
    forgery, relation = found
    assert forgery.r == relation.r
    assert forgery.subgroup is not None
    sign = -1 if relation.negative else 1
    if relation.form == "root":
        assert pow(relation.r, relation.power, p) == sign * alpha % p
    else:
        assert relation.r == sign * pow(alpha, relation.power, p) % p
    w = (p - 1) // forgery.subgroup
    step, target = pow(alpha, w, p), pow(y, w, p)
    z = next(z for z in range(forgery.subgroup) if pow(step, z, p) == target)
    need = (h - relation.r * z) % (p - 1)
    if relation.form == "root":
        candidates = [relation.power * need]
    else:
        candidates = solutions(relation.power, need, p - 1) + solutions(
            relation.power + (p - 1) // 2, need, p - 1
        )
    for s in candidates:
        for shifted in (s, s + (p - 1) // 2):
            if verifies(p, alpha, y, h, relation.r, shifted % (p - 1)):
                return relation.r, shifted % (p - 1)
    return None


def solutions(i: int, value: int, modulus: int) -> list[int]:
    """All s with i s = value modulo ``modulus``, at most 200 of them."""
    common = math.gcd(i, modulus)
    if value % common:
        return []
    part = modulus // common
    first = value // common * int(gmpy2.invert(i // common, part)) % part
    return [first + k * part for k in range(min(common, 200))]


@pytest.mark.parametrize("case", SIGNATURES["forged"], ids=lambda case: f"{case['p']}")
def test_reported_conditions_forge_signatures(case: dict[str, int]) -> None:
    """For random keys and messages the stated share is signed without the key."""
    p, alpha = case["p"], case["alpha"]
    generator = Random(p)
    found = forgeries(p, alpha)
    assert Condition.POWER_OF_DIVISOR in found

    for forgery in found.values():
        signed = 0
        for _ in range(200):
            y = pow(alpha, generator.randrange(1, p - 1), p)
            signed += forge(p, alpha, y, generator.randrange(1, p - 1), forgery) is not None
        assert signed / 200 == pytest.approx(case["share"], abs=0.12)
        assert signed == 200 or case["share"] < 1


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize("power", [1, 2, 3, -1, -4, 7])
def test_powers_of_a_divisor_of_either_sign(power: int, sign: int) -> None:
    """A base +-a^k is reported for k of either sign, and at least half of all messages signed."""
    p = 1000117
    alpha = sign * pow(6, power, p) % p
    forgery = forgeries(p, alpha)[Condition.POWER_OF_DIVISOR]
    generator = Random(power)

    signed = 0
    for _ in range(100):
        y = pow(alpha, generator.randrange(1, p - 1), p)
        signed += forge(p, alpha, y, generator.randrange(1, p - 1), forgery) is not None
    assert signed >= 35


def test_a_worked_forgery() -> None:
    """The pair worked out beforehand is the one that the relation gives."""
    case = SIGNATURES["forged"][0]
    p, alpha, example = case["p"], case["alpha"], case["example"]
    forgery = forgeries(p, alpha)[Condition.POWER_OF_DIVISOR]
    expected = example["r"], example["s"]

    assert verifies(p, alpha, example["y"], example["h"], *expected)
    assert forge(p, alpha, example["y"], example["h"], forgery) == expected


def test_generator_two_of_a_standard_group() -> None:
    """g = 2 with a safe prime, right for Diffie-Hellman, signs any message without a key."""
    case = SIGNATURES["standard"]
    standard = group(case["group"])
    p, q = standard.modulus, standard.subgroup_order
    found = forgeries(p, 2, factors=units("modp2048"))
    generator = Random(2048)

    assert set(found) == {Condition.POWER_OF_DIVISOR, Condition.SHARED_FACTOR}
    for forgery, relation in found.values():
        assert (forgery.subgroup, forgery.r) == (case["subgroup"], q)
        for _ in range(case["messages"]):
            y = pow(2, generator.randrange(1, q), p)
            assert forge(p, 2, y, generator.randrange(1, q), (forgery, relation))


def test_a_trapdoor_leaves_no_trace() -> None:
    """Whoever chose alpha forges with a secret relation; only the missing origin is reported."""
    case = SIGNATURES["trapdoor"]
    p, alpha, r, k = case["p"], case["alpha"], case["beta"], case["k"]
    assert pow(r, k, p) == alpha

    assert forgeries(p, alpha) == {}
    assert unknown_origin().attacker == "designer"
    subgroup = (p - 1) // math.gcd(r, p - 1)
    secret = (
        Forgery(Condition.POWER_OF_DIVISOR, "designer", 0, "", subgroup, r),
        Relation("root", r, k, negative=False),
    )
    generator = Random(p)
    for _ in range(100):
        y = pow(alpha, generator.randrange(1, p - 1), p)
        assert forge(p, alpha, y, generator.randrange(1, p - 1), secret)


def test_a_verified_base_without_relations_is_not_reported() -> None:
    """The same numbers with a verified origin are clean at a budget below the hard prime."""
    case = SIGNATURES["trapdoor"]

    assert forgeries(case["p"], case["alpha"], budget=7) == {}
    found, _ = forgeries(case["p"], case["alpha"], budget=20)[Condition.SHARED_FACTOR]
    assert 7 < found.bits < 8


@pytest.mark.parametrize("case", SIGNATURES["least_subgroup"], ids=str)
def test_least_subgroups(case: dict[str, int]) -> None:
    """The subgroup in which a logarithm is needed is the one worked out beforehand."""
    found = forgeries(case["p"], case["alpha"], budget=64)

    assert found[Condition.SHARED_FACTOR][0].subgroup == case["b"]


def test_a_group_of_rfc_5114_is_not_affected() -> None:
    """The least subgroup has nearly the size of p - 1, and its logarithms cost 2^256."""
    name = "rfc5114-1024-160"
    standard = group(name)
    order = units(name)

    assert not forgeries(standard.modulus, standard.generator, 128, order)
    ((found, _),) = forgeries(standard.modulus, standard.generator, 1024, order).values()
    assert found.condition is Condition.SHARED_FACTOR
    assert found.subgroup is not None
    for highest, bits in SIGNATURES["rfc5114_1024_160_subgroup_bits"].items():
        assert least_subgroup_bits(standard, highest) == pytest.approx(bits, abs=0.005)
    assert math.log2(found.subgroup) == least_subgroup_bits(standard, 64)


def least_subgroup_bits(standard: StandardGroup, highest: int) -> float:
    """log2 of the least (p - 1) / gcd(+-g^j, p - 1) for 1 <= |j| <= highest, one by one."""
    p, g = standard.modulus, standard.generator
    powers = [pow(g, sign * j, p) for j in range(1, highest + 1) for sign in (1, -1)]
    shared = max(math.gcd(r, p - 1) for power in powers for r in (power, p - power))
    return math.log2((p - 1) // shared)


def test_a_verifier_must_check_the_range_of_r() -> None:
    """Without 0 < r < p one signature gives another, by the Chinese remainder theorem."""
    case = SIGNATURES["range"]
    p, alpha, y, h, r, s = (case[key] for key in ("p", "alpha", "y", "h", "r", "s"))
    assert verifies(p, alpha, y, h, r, s)

    u = case["other"] * int(gmpy2.invert(h, p - 1)) % (p - 1)
    wide = (r * u % (p - 1) * p - r * (p - 1)) % (p * (p - 1))
    forged = [wide, s * u % (p - 1)]

    assert forged == case["forged"]
    assert not verifies(p, alpha, y, case["other"], *forged)
    assert pow(alpha, case["other"], p) == pow(y, wide, p) * pow(wide, forged[1], p) % p


def test_an_incomplete_factorization_only_raises_the_cost() -> None:
    """With p - 1 unfactored the same relation is found, at a price that is an upper bound."""
    case = SIGNATURES["trapdoor"]
    p = case["p"]
    partial = Factors(((2, 1),), (p - 1) // 2)

    complete_cost = forgeries(p, case["alpha"], budget=64)[Condition.SHARED_FACTOR][0].bits
    ((found, _),) = forgeries(p, case["alpha"], 64, partial).values()
    assert found.bits >= complete_cost
