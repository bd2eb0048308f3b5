"""The formulas of the number field sieve agree with their published and computed values."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.special_form_check import LARGEST_DEGREE, LEAST_DEGREE
from auditor.routes.base import Closed, Unit, Work, floor_bits
from auditor.routes.hidden_form import hidden_form
from auditor.routes.number_field_sieve import number_field_sieve
from auditor.routes.shared_precomputation import shared_sieve
from auditor.routes.sieve_models import (
    SPECIAL,
    asymptotic_bits,
    individual_bits,
    low_bits,
    nist_bits,
    rfc3766_operation_bits,
    rfc3766_symmetric_bits,
    special_bits,
)
from auditor.routes.special_number_field_sieve import (
    DEGREES,
    advantage,
    special_number_field_sieve,
)
from auditor.search import special_form_work
from tests.routes.cases import cases, group, number

SIEVES = cases("sieves")
LENGTHS = st.integers(min_value=2, max_value=65_536)


@pytest.mark.parametrize("row", SIEVES["lengths"], ids=lambda row: str(row["length"]))
def test_every_model_reproduces_its_column(row: dict[str, float]) -> None:
    """Seven formulas at thirteen lengths."""
    length = row["length"]

    assert asymptotic_bits(length) == pytest.approx(row["general"], abs=0.01)
    assert nist_bits(length) == pytest.approx(row["nist"], abs=0.01)
    assert rfc3766_operation_bits(length) == pytest.approx(row["rfc3766_operations"], abs=0.01)
    assert rfc3766_symmetric_bits(length) == pytest.approx(row["rfc3766_symmetric"], abs=0.01)
    assert low_bits(length) == pytest.approx(row["low"], abs=0.01)
    assert asymptotic_bits(length, SPECIAL) == pytest.approx(row["special"], abs=0.01)
    assert individual_bits(length) == pytest.approx(row["individual"], abs=0.01)


@pytest.mark.parametrize("row", SIEVES["rfc3766"], ids=lambda row: str(row["strength"]))
def test_the_table_of_rfc_3766(row: dict[str, float]) -> None:
    """All seven rows of the table come out within 0.02 bit."""
    model = rfc3766_symmetric_bits(row["length"])

    assert model == pytest.approx(row["model"], abs=0.001)
    assert model == pytest.approx(row["strength"], abs=0.02)


def test_the_nist_formula_rounds_to_the_strengths_of_the_safe_prime_groups() -> None:
    """The nearest multiple of 8 is what SP 800-56A Rev. 3 attaches to each length."""
    for length, strength in SIEVES["nist_rounded"].items():
        assert 8 * round(nist_bits(length) / 8) == strength


def test_the_nist_formula_to_four_places() -> None:
    """The figures keep what rounding would hide: 1024 bits are a hair below 80."""
    for length, bits in SIEVES["nist_four_places"].items():
        assert nist_bits(length) == pytest.approx(bits, abs=0.00005)


def test_1024_bits_are_not_rounded_up_to_80() -> None:
    """79.999905 is 79.99 when rounded down to 0.01, whatever tables print."""
    assert 79.9999 < number_field_sieve(1024).bits < 80

    assert floor_bits(number_field_sieve(1024).bits) == 79.99


def test_lengths_of_equal_cost() -> None:
    """A special modulus is worth an ordinary one of 0.57 to 0.59 of its length."""
    for special, ordinary in SIEVES["equal_cost"].items():
        cost = asymptotic_bits(special, SPECIAL)

        assert asymptotic_bits(ordinary - 1) < cost < asymptotic_bits(ordinary + 1)


@given(LENGTHS, LENGTHS)
def test_longer_moduli_cost_more(one: int, other: int) -> None:
    """Both sieves rise with the length, and the special one never costs more."""
    shorter, longer = sorted((one, other))

    assert nist_bits(shorter) <= nist_bits(longer)
    assert special_bits(shorter) <= special_bits(longer)
    assert special_bits(longer) <= nist_bits(longer)


def test_sizes_without_calibration_are_marked() -> None:
    """Below 512 bits the work says that the formula has no record to compare with."""
    assert "calibration" in dict(number_field_sieve(511).details)
    assert "practical" in number_field_sieve(511).explanation
    assert "calibration" not in dict(number_field_sieve(512).details)
    assert "practical" not in number_field_sieve(512).explanation


def test_the_low_end_stands_beside_the_headline() -> None:
    """For 2048 bits the two calibrations are 110.1 and 102.9."""
    work = number_field_sieve(2048)

    assert floor_bits(work.bits) == 110.11
    assert dict(work.details)["low end"] == 102.88
    assert work.unit is Unit.SYMMETRIC_TRIALS


def test_tiny_moduli_have_a_figure() -> None:
    """The formula is cut off at 0 where its logarithms would be negative."""
    assert [number_field_sieve(length).bits for length in (1, 2, 3)] == [0.0, 0.0, 0.0]


@pytest.mark.parametrize("case", SIEVES["special_forms"], ids=lambda case: case["p"])
def test_special_forms(case: dict[str, object]) -> None:
    """The polynomial represents the modulus, and the interpolated figures are as computed."""
    names = {"M": SIEVES["M"]}
    p = number(case["p"], **names)
    f = [number(c) for c in case["f"]]
    g0, g1 = number(case["g0"], **names), number(case["g1"])
    degree = len(f) - 1
    value = sum(c * g0 ** (degree - i) * g1**i for i, c in enumerate(f))
    assert value % p == 0

    sizes = math.log2(max(map(abs, f))), math.log2(max(g0, g1))
    work = special_number_field_sieve(math.log2(p), degree, *sizes)
    details = dict(work.details)

    assert details["advantage, 0 to 1"] == case["sigma"]
    assert details["effective length"] == case["effective"]
    assert work.bits == pytest.approx(case["bits"], abs=0.02)
    assert work.model.certainty == "heuristic"


def test_an_ordinary_polynomial_gives_the_general_sieve() -> None:
    """With both sizes at p^(1/(d+1)) there is no advantage and no figure above the general one."""
    n = math.log2(group("rfc5114-1024-160").modulus)
    work = special_number_field_sieve(n, 5, n / 6, n / 6)

    assert advantage(n, 5, n / 6, n / 6) == pytest.approx(0, abs=1e-9)
    assert work.bits == pytest.approx(79.98, abs=0.005)


@given(
    LENGTHS,
    st.integers(1, 10),
    st.floats(0, 1000),
    st.floats(0, 1000),
    st.floats(0, 1000),
)
def test_larger_coefficients_never_lower_the_figure(
    length: int, degree: int, coefficient: float, root: float, more: float
) -> None:
    """The advantage lies in [0, 1], and a worse polynomial never makes the attack cheaper."""
    small = special_number_field_sieve(length, degree, coefficient, root)
    large = special_number_field_sieve(length, degree, coefficient + more, root)

    assert 0 <= advantage(length, degree, coefficient, root) <= 1
    assert small.bits <= large.bits <= nist_bits(length)


@pytest.mark.parametrize("degree", [1, 2, 3, 9, 40])
def test_no_advantage_is_claimed_outside_the_degrees_of_the_formula(degree: int) -> None:
    """2^1024 - 105 is x^2 - 105 at 2^512 as well: as small a pair as a special form allows, of a
    degree for which the sieve gains nothing by it."""
    root_bits = 1024 / degree
    work = special_number_field_sieve(1024, degree, math.log2(105), root_bits)

    assert advantage(1024, degree, math.log2(105), root_bits) == 0
    assert work.bits == nist_bits(1024)


@pytest.mark.parametrize("degree", DEGREES)
def test_a_pure_form_of_every_degree_covered_is_full_advantage(degree: int) -> None:
    """With coefficients 0 and 1 and a root of n/d bits."""
    assert advantage(2048, degree, 0, 2048 / degree) == 1
    assert special_number_field_sieve(2048, degree, 0, 2048 / degree).bits < nist_bits(2048) - 20


def test_the_degrees_are_those_of_the_search_and_of_the_claim() -> None:
    """What is looked for, what a claim can show and what has a figure are the same."""
    assert (DEGREES.start, DEGREES.stop - 1) == (LEAST_DEGREE, LARGEST_DEGREE)
    assert DEGREES == special_form_work.DEGREES


def test_a_skewed_pair_is_measured_by_its_largest_coefficient() -> None:
    """Which only raises the figure: the bound stays one from above."""
    even = special_number_field_sieve(2048, 5, 20, 410)
    skewed = special_number_field_sieve(2048, 5, 60, 410)

    assert even.bits < skewed.bits <= nist_bits(2048)


def test_a_hidden_form_is_full_advantage() -> None:
    """For 1024 bits without an origin whoever made it may need 62.1 bits."""
    work = hidden_form(SIEVES["hidden"]["length"], origin_verified=False)

    assert isinstance(work, Work)
    assert work.attacker == "designer"
    assert work.bits == pytest.approx(SIEVES["hidden"]["bits"], abs=0.05)


def test_a_verified_origin_closes_the_hidden_form() -> None:
    """A modulus that follows from a formula or a seed has no hidden polynomial."""
    assert isinstance(hidden_form(2048, origin_verified=True), Closed)


def test_one_modulus_and_many_targets() -> None:
    """The precomputation is shared, a single logarithm is not."""
    row = SIEVES["shared"]
    figures = shared_sieve(row["length"])

    assert figures.once_bits == pytest.approx(row["once"], abs=0.01)
    assert figures.each_bits == pytest.approx(row["each"], abs=0.05)
    for targets, bits in row["targets"].items():
        assert figures.amortised_bits(2**targets) == pytest.approx(bits, abs=0.05)
