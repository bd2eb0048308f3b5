"""Routes recover from drawn exponents what they promise, and nothing where they promise none."""

from math import log2
from pathlib import Path

import pytest
import sympy
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.intake.standard_groups import find
from auditor.search.log_confinement import (
    Check,
    Victim,
    confine,
    confirmation,
    element_of_order,
)
from auditor.search.log_demonstration import (
    run_confinement,
    run_confinement_leak,
    run_pohlig_hellman,
    run_short_exponent,
)
from auditor.search.log_result import OutOfBudget, Tally
from auditor.search.log_seed import drawn

DATA = Path(__file__).parents[1] / "data" / "logarithms.yaml"
CASES = yaml.safe_load(DATA.read_text(encoding="utf-8"))
TOY = CASES["confinement"]
COFACTOR = [(r, e) for r, e in TOY["cofactor"]]
NONE: frozenset[Check] = frozenset()
RANGE: frozenset[Check] = frozenset({"range"})
MEMBERSHIP: frozenset[Check] = frozenset({"membership"})
COFACTOR_CHECK: frozenset[Check] = frozenset({"cofactor"})


# Confinement


@pytest.mark.parametrize("checks", [NONE, RANGE])
def test_listed_confinement(checks: frozenset[Check]) -> None:
    """Six questions give the listed residue; a check of the range alone prevents none of it."""
    run = run_confinement_leak(TOY["p"], TOY["g"], TOY["q"], COFACTOR, checks, TOY["x"])

    assert run.recovered.modulus == TOY["recovered_modulus"]
    assert abs(log2(run.recovered.modulus) - TOY["leak_bits"]) < 0.01
    assert run.recovered.value == TOY["x_modulo"]
    assert (run.queries, run.refused) == (6, 0)
    assert run.agrees


def test_listed_public_value() -> None:
    """The victim's public value is the listed one."""
    assert Victim(TOY["p"], TOY["g"], TOY["q"], TOY["x"]).public == TOY["public"]


@pytest.mark.parametrize(("checks", "refused"), [(MEMBERSHIP, 6), (COFACTOR_CHECK, 0)])
def test_effective_checks_reveal_nothing(checks: frozenset[Check], refused: int) -> None:
    """Membership refuses every probe; the cofactor method answers each with what is public."""
    run = run_confinement_leak(TOY["p"], TOY["g"], TOY["q"], COFACTOR, checks, TOY["x"])

    assert (run.recovered.modulus, run.promised, run.excess) == (1, 0, None)
    assert (run.queries, run.refused) == (6, refused)


@pytest.mark.parametrize(
    ("checks", "received", "accepted"),
    [
        (NONE, 1, True),
        (RANGE, 1, False),
        (RANGE, 10006, False),
        (RANGE, 10005, True),
        (MEMBERSHIP, 1, False),
        (MEMBERSHIP, 5, False),
        (MEMBERSHIP, 25, True),
        (COFACTOR_CHECK, 10006, False),
        (COFACTOR_CHECK, 5, True),
    ],
)
def test_what_a_victim_accepts(checks: frozenset[Check], received: int, accepted: bool) -> None:
    """Each check refuses what it is meant to, modulo the safe prime 10007 = 2 * 5003 + 1."""
    victim = Victim(10007, 25, 5003, 4321, checks)

    assert (victim.answer(received) is not None) is accepted


def test_a_range_check_on_a_safe_prime_leaves_the_parity() -> None:
    """The probe -g is in range and its answer is (-1)^x g^x, for odd x and for even x."""
    for x in (4321, 4322):
        run = run_confinement_leak(10007, 25, 5003, [(2, 1)], RANGE, x)
        assert (run.recovered.value, run.recovered.modulus) == (x % 2, 2)


def test_an_unexplained_answer_reveals_nothing() -> None:
    """An oracle that answers with noise is not misread."""
    victim = Victim(TOY["p"], TOY["g"], TOY["q"], TOY["x"])
    shown = confine(
        victim.n, victim.g, victim.public, COFACTOR, lambda received: confirmation(received)
    )

    assert shown.logarithm.modulus < TOY["recovered_modulus"]
    assert (TOY["x"] - shown.logarithm.value) % shown.logarithm.modulus == 0


@given(st.sampled_from([7, 31, 181, 2521, 10007]), st.data())
def test_elements_of_prime_power_order(n: int, data: st.DataObject) -> None:
    """They have exactly that order; where it does not divide n - 1 there is none."""
    r, most = data.draw(st.sampled_from(sorted(sympy.factorint(n - 1).items())))
    e = data.draw(st.integers(1, most))
    u = int(element_of_order(n, r, e, Tally()))

    assert sympy.n_order(u, n) == r**e
    with pytest.raises(ValueError, match="divide"):
        element_of_order(n, r, most + 1, Tally())


@pytest.mark.parametrize("checks", [NONE, RANGE])
def test_confinement_recovers_the_whole_exponent(checks: frozenset[Check]) -> None:
    """Questions and a kangaroo give x, near the work promised and far below sqrt(q)."""
    run = run_confinement(TOY["p"], TOY["g"], TOY["q"], COFACTOR, 40, checks, TOY["x"])

    assert run.agrees
    assert run.recovered.modulus == 0
    assert run.excess is not None
    assert run.excess < 4
    assert run.recovered.operations < TOY["q"] ** 0.5 / 100


def test_under_an_effective_check_the_kangaroo_is_alone() -> None:
    """No question is asked, and the promise is that of the whole width."""
    run = run_confinement(TOY["p"], TOY["g"], TOY["q"], COFACTOR, 20, MEMBERSHIP, 700_000)

    assert run.agrees
    assert (run.queries, run.promised) == (0, 2 * 2**10)
    with pytest.raises(OutOfBudget, match=r"2\^21\.0"):
        run_confinement(
            TOY["p"], TOY["g"], TOY["q"], COFACTOR, 40, MEMBERSHIP, TOY["x"], budget=2**20
        )


def test_confinement_in_a_published_group() -> None:
    """RFC 5114 group 23, static and unchecked: six questions show 25.4 bits of a drawn exponent."""
    group = find("rfc5114-2048-224")
    assert group is not None
    p, g, q = group.modulus, group.generator, group.subgroup_order
    factors = [(2, 1), (3, 2), (5, 1), (43, 1), (73, 1), (157, 1)]
    x = drawn(q, "published group")
    run = run_confinement_leak(p, g, q, factors, RANGE, x)

    assert run.agrees
    assert run.recovered.modulus == 2 * 9 * 5 * 43 * 73 * 157
    with pytest.raises(OutOfBudget):
        run_confinement(p, g, q, factors, 224, RANGE, x)


# Pohlig-Hellman and short exponents


@pytest.mark.parametrize("seed", range(4))
def test_pohlig_hellman_as_promised(seed: int) -> None:
    """A smooth order gives the whole exponent, for less than twice the promised operations."""
    order = [(2, 3), (3, 1), (101, 2), (1009, 1), (65537, 1), (1000003, 1)]
    size = 8 * 3 * 101**2 * 1009 * 65537 * 1000003
    k = next(k for k in range(1, 10**4) if sympy.isprime(k * size + 1))
    n = k * size + 1
    g = pow(sympy.primitive_root(n), k, n)
    x = drawn(size, "smooth", seed)
    run = run_pohlig_hellman(n, g, order, x, seed=seed)

    assert (run.recovered.value, run.recovered.modulus) == (x, size)
    assert run.agrees
    assert run.excess is not None
    assert run.excess < 2


def test_short_exponent_as_promised() -> None:
    """The listed run: its promise is the listed jumps and what Pohlig-Hellman adds."""
    case = CASES["short_exponent"]
    *small, (large, _) = [(q, e) for q, e in case["predecessor"]]
    for factors, rest in (([*small, (large, 1)], 1), (small, large)):
        run = run_short_exponent(case["p"], case["g"], factors, case["width"], case["x"], rest=rest)
        assert run.agrees
        assert case["expected_jumps"] < run.promised < case["expected_jumps"] + 300
        assert run.excess is not None
        assert run.excess < 4


def test_only_factors_worth_their_cost_are_used() -> None:
    """For a width of 8 bits no 10-bit prime is attacked: the kangaroo alone is promised."""
    case = CASES["short_exponent"]
    factors = [(q, e) for q, e in case["predecessor"]]
    run = run_short_exponent(case["p"], case["g"], factors, 8, 200)

    assert run.agrees
    assert run.promised < 2 * 2**4


def test_what_is_refused() -> None:
    """Exponents out of range, and routes whose promise exceeds the budget, before any work."""
    case = CASES["short_exponent"]
    factors = [(q, e) for q, e in case["predecessor"]]
    with pytest.raises(ValueError, match="below 2"):
        run_short_exponent(case["p"], case["g"], factors, 8, 256)
    with pytest.raises(ValueError, match="below 2"):
        run_short_exponent(case["p"], case["g"], factors[:2], 8, 200)
    with pytest.raises(ValueError, match="below 2"):
        run_confinement(TOY["p"], TOY["g"], TOY["q"], COFACTOR, 64, NONE, TOY["q"])
    with pytest.raises(OutOfBudget) as stopped:
        run_pohlig_hellman(case["p"], case["g"], factors, 12345)
    assert stopped.value.operations == 0


def test_a_safe_prime_of_2048_bits_is_out_of_reach() -> None:
    """Promises far beyond the range of floating point are still stated and refused."""
    group = find("ffdhe2048")
    assert group is not None
    with pytest.raises(OutOfBudget, match=r"2\^1023\.8 operations"):
        run_pohlig_hellman(group.modulus, group.generator, [(group.subgroup_order, 1)], 12345)


def test_same_arguments_same_run() -> None:
    """A run is a function of its arguments; another seed walks elsewhere and finds the same."""
    case = CASES["short_exponent"]
    factors = [(q, e) for q, e in case["predecessor"]]
    runs = [
        run_short_exponent(case["p"], case["g"], factors, case["width"], case["x"], seed=seed)
        for seed in (1, 1, 2)
    ]

    assert runs[0] == runs[1]
    assert runs[0].recovered.value == runs[2].recovered.value
    assert runs[0].recovered.operations != runs[2].recovered.operations
