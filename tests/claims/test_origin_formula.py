"""Claims about the digits of pi and e, and about the offset that follows them."""

import secrets

import gmpy2
import mpmath
import pytest

from auditor.claims.base import Claim, Refuted
from auditor.claims.collection import read_claim
from auditor.claims.origin_formula import (
    CONSTANTS,
    LARGEST_OFFSET,
    Constant,
    Formula,
    LeastOffset,
    formula,
    formula_of,
    has_shape,
    least_offset,
    offset_of,
    scaled,
)
from auditor.claims.origin_offsets import MOST_OFFSETS, feasible, first_safe_prime
from auditor.claims.small_primes import odd_primes
from auditor.claims.standing import Standing
from auditor.intake.standard_groups import StandardGroup, find, standard_groups

WITH_FORMULA = [group for group in standard_groups() if group.formula]
BITS = 256


def group(name: str) -> StandardGroup:
    """A group that must exist."""
    found = find(name)
    assert found is not None
    return found


def refutation(claim: Claim) -> str:
    """The reason why the check fails; the test fails where it does not."""
    with pytest.raises(Refuted) as caught:
        claim.check({}, secrets.randbelow)
    return str(caught.value)


@pytest.mark.parametrize("constant", CONSTANTS)
@pytest.mark.parametrize("bits", [0, 1, 62, 638, 8062])
def test_digits_are_those_of_another_library(constant: Constant, bits: int) -> None:
    """floor(2^bits c) with the digits of mpmath, which computes them by other series."""
    with mpmath.workprec(bits + 64):
        assert scaled(constant, bits) == int(mpmath.floor(+getattr(mpmath, constant) * 2**bits))


@pytest.mark.parametrize("standard", WITH_FORMULA, ids=lambda item: item.name)
def test_every_published_modulus_has_its_offset(standard: StandardGroup) -> None:
    """RFC 2409, 3526 and 7919: constant and offset follow from the modulus alone."""
    assert standard.formula is not None
    constant, offset = standard.formula
    other: Constant = "e" if constant == "pi" else "pi"

    claim = formula_of(standard.modulus, constant)
    assert claim == Formula(standard.modulus, constant, offset)
    claim.check({}, secrets.randbelow)
    assert formula_of(standard.modulus, other).offset is None
    formula_of(standard.modulus, other).check({}, secrets.randbelow)


def test_groups_without_a_formula_have_none() -> None:
    """The groups of RFC 5114 follow from no digits."""
    for name in ("rfc5114-1024-160", "rfc5114-2048-224", "rfc5114-2048-256"):
        assert not has_shape(group(name).modulus)


def test_false_statements_are_refuted() -> None:
    """Another offset, another constant, or a denial."""
    n = group("modp768").modulus
    for claim in (Formula(n, "pi", 149687), Formula(n, "e", 149686), Formula(n, "pi", None)):
        assert "another number" in refutation(claim)
        assert read_claim(claim.record()) == claim


@pytest.mark.parametrize("offset", [0, LARGEST_OFFSET + 1, 2**64])
def test_offsets_out_of_bounds_are_no_formula(offset: int) -> None:
    """Offsets are positive and leave their maker little choice."""
    assert offset_of(formula("pi", BITS, offset), "pi") is None
    assert offset_of(formula("pi", BITS, LARGEST_OFFSET), "pi") == LARGEST_OFFSET


def test_the_shape_is_all_ones_at_both_ends() -> None:
    """A single zero among the 128 ones, or a short number, is another shape."""
    n = group("modp768").modulus

    assert has_shape(n)
    assert not any(has_shape(n ^ (1 << i)) for i in (0, 1, 63, 704, 766))
    assert not has_shape(2**255 - 1)
    assert not has_shape(2**65537 - 1)


# The least offset


def safe_offsets(constant: Constant, count: int) -> list[int]:
    """The first positive offsets that give a safe prime of 256 bits, one by one."""
    found: list[int] = []
    offset = 0
    while len(found) < count:
        offset += 1
        p = formula(constant, BITS, offset)
        if gmpy2.is_prime(p // 2) and gmpy2.is_prime(p):
            found.append(offset)
    return found


@pytest.mark.parametrize("constant", CONSTANTS)
def test_least_and_second_offset(constant: Constant) -> None:
    """The least offset is proven to be so; for the second the least is shown, as probable."""
    least, second = safe_offsets(constant, 2)
    first = least_offset(formula(constant, BITS, least), constant, least, secrets.randbelow)
    other = least_offset(formula(constant, BITS, second), constant, second, secrets.randbelow)

    assert (first.smaller, first.standing) == (None, Standing.PROVEN)
    assert (other.smaller, other.standing) == (least, Standing.PROBABLE)
    for claim in (first, other):
        claim.check({}, secrets.randbelow)
        assert read_claim(claim.record()) == claim
    assert "gives a safe prime" in refutation(LeastOffset(other.n, constant, second, None))
    assert "no safe prime" in refutation(LeastOffset(other.n, constant, second, least + 1))
    assert "not a smaller" in refutation(LeastOffset(other.n, constant, second, second))
    assert "another number" in refutation(LeastOffset(other.n, constant, second - 1, None))


@pytest.mark.parametrize("name", ["modp768", "modp1024", "modp2048"])
def test_published_offsets_are_the_least(name: str) -> None:
    """RFC 2409 and 3526 take the first offset that gives a safe prime."""
    standard = group(name)
    assert standard.formula is not None

    LeastOffset(standard.modulus, *standard.formula).check({}, secrets.randbelow)


def test_the_search_is_bounded() -> None:
    """Minutes of work are accepted, more are not, whatever a claim says."""
    assert feasible(4096, group("ffdhe4096").formula.offset)  # type: ignore[union-attr]
    assert not feasible(8192, group("ffdhe8192").formula.offset)  # type: ignore[union-attr]
    assert not feasible(BITS, MOST_OFFSETS + 1)
    huge = formula("pi", BITS, MOST_OFFSETS + 1)
    assert "too many" in refutation(LeastOffset(huge, "pi", MOST_OFFSETS + 1, None))


def test_progressions_are_searched_in_order() -> None:
    """The first safe prime of a progression, against one test after the other."""
    start = (1 << 96) + 3
    expected = next(
        x
        for x in range(1, 10**5)
        if gmpy2.is_prime((start + 4 * x) // 2) and gmpy2.is_prime(start + 4 * x)
    )

    assert first_safe_prime(start, 4, expected + 1, secrets.randbelow) == expected
    assert first_safe_prime(start, 4, expected, secrets.randbelow) is None


@pytest.mark.parametrize("bound", [0, 1, 2, 3, 4, 9, 10, 25, 26, 121, 1000, 10007])
def test_odd_primes(bound: int) -> None:
    """Against one test after the other."""
    assert list(odd_primes(bound)) == [n for n in range(3, bound, 2) if gmpy2.is_prime(n)]
