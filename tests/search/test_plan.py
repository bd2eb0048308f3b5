"""Plans are values; work is recorded without loss."""

from itertools import pairwise

import gmpy2
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.factoring import Factor, search
from auditor.search.plan import LEVELS, plan_for, quick_plan_for
from auditor.search.work import Curves, Work

counts = st.integers(0, 10**12)
bounds = st.tuples(st.integers(2, 10**12), counts).map(lambda b: (b[0], sum(b)))
works = st.builds(
    Work,
    trial_bound=counts,
    rho_iterations=counts,
    fermat_steps=counts,
    p_minus_1=st.just((0, 0)) | bounds,
    curves=st.dictionaries(bounds, counts.filter(bool), max_size=4).map(
        lambda levels: tuple(sorted(Curves(*key, count) for key, count in levels.items()))
    ),
    complete_digits=counts,
)


@given(works)
def test_work_survives_its_record(work: Work) -> None:
    """from_runs inverts runs, whatever the order of the runs."""
    assert Work.from_runs(work.runs()) == work
    assert Work.from_runs(reversed(work.runs())) == work


def test_p_plus_1_survives_its_record() -> None:
    """Its starts are kept with its bounds."""
    work = Work(p_plus_1=(10, 20), p_plus_1_starts=2)

    assert Work.from_runs(work.runs()) == work


def test_curves_are_counted_by_both_bounds() -> None:
    """A new count replaces the old one of the same bounds, and no other."""
    work = Work().with_curves(5, 7, 1, "b").with_curves(5, 6, 2, "a").with_curves(5, 7, 3, "a")

    assert work.curves == (Curves(5, 6, 2), Curves(5, 7, 3))
    assert (work.count(5, 6), work.count(5, 7), work.count(6, 7)) == (2, 3, 0)
    assert work.engines == ("a", "b")


@pytest.mark.parametrize(
    "run",
    [
        ("divination", ()),
        ("rho", ()),
        ("rho", (("iterations", 2**63),)),
        ("elliptic curves", (("b1", 5), ("b2", 6))),
        ("elliptic curves", (("b1", 1), ("b2", 6), ("curves", 1))),
        ("elliptic curves", (("b1", 7), ("b2", 6), ("curves", 1))),
        ("elliptic curves", (("b1", 7), ("b2", 9), ("curves", 2**2000))),
        ("p-1", (("b1", 0), ("b2", 0))),
    ],
)
def test_unknown_runs_are_refused(run: tuple[str, tuple[tuple[str, int], ...]]) -> None:
    """A method that is not ours, or one without its numbers, or with impossible ones."""
    with pytest.raises(ValueError, match=run[0]):
        Work.from_runs([run])


def test_depth_by_hand() -> None:
    """The depth picks the levels; efforts are depths; what cannot be is refused."""
    assert plan_for("quick", 25).levels == plan_for("thorough").levels
    assert plan_for("quick", 15).levels == plan_for("standard").levels
    assert plan_for("thorough", 0).levels == () == plan_for("quick").levels
    for digits in range(11, 51):
        assert plan_for("standard", digits).digits >= digits
    for digits in (-1, 51):
        with pytest.raises(ValueError, match="digits"):
            plan_for("standard", digits)


def test_deeper_plans_contain_shallower_ones() -> None:
    """Levels are never taken away, so that a deeper search continues a shallower one."""
    for shallow, deep in pairwise(LEVELS):
        before = plan_for("standard", shallow.digits).levels
        after = plan_for("standard", deep.digits).levels
        assert after[: len(before)] == before


def test_a_modulus_is_searched_as_its_maker_may_have_made_it() -> None:
    """Close factors and smooth neighbours of factors, beyond what a group order calls for."""
    plan = plan_for("standard")
    for_modulus = plan.for_modulus()

    assert for_modulus.p_minus_1 > plan.p_minus_1
    assert for_modulus.p_plus_1 > plan.p_plus_1
    assert for_modulus.fermat_steps > plan.fermat_steps == 0
    assert for_modulus.levels == plan.levels


def test_neighbouring_primes_are_found_at_once() -> None:
    """In a modulus, by Fermat's method; a group order, which is even, is spared it."""
    p, q = 2**521 - 1, int(gmpy2.next_prime(2**521))
    found = search(p * q, quick_plan_for(p * q))

    assert found.factors == (Factor(p, 1, "Fermat"), Factor(q, 1, "Fermat"))
    assert quick_plan_for(p * q).fermat_steps > 0
    assert quick_plan_for(p - 1).fermat_steps == 0
