"""The detector finds what is special, is silent on what only looks so, and what it finds holds."""

import random
from collections.abc import Iterator
from fractions import Fraction
from functools import cache
from itertools import product
from math import log2
from pathlib import Path
from typing import Any

import gmpy2
import pytest
import yaml
from flint import fmpz_mat, fmpz_poly
from hypothesis import assume, given
from hypothesis import strategies as st

from auditor.claims.base import Refuted
from auditor.claims.special_form_check import (
    CHANCE_BITS,
    _integer_bits,
    _polynomial_bits,
    _root_bits,
    check,
    description_bits,
)
from auditor.intake.standard_groups import find
from auditor.search import special_form_any_root as any_root
from auditor.search import special_form_hidden as hidden
from auditor.search import special_form_known_root as known_root
from auditor.search.special_form import LARGEST_HIDDEN, LEAST_LENGTH, looked_for, search
from auditor.search.special_form_pair import (
    RawPair,
    SpecialForm,
    expansion,
    homogeneous_value,
    special_form,
)
from auditor.search.special_form_work import (
    DEGREES,
    general_sieve_bits,
    n_star,
    sigma,
    special_sieve_bits,
)

DATA = yaml.safe_load(
    (Path(__file__).parents[1] / "data" / "special_forms.yaml").read_text(encoding="utf-8")
)
Pair = tuple[tuple[int, ...], int, int]


def rows(section: str) -> list[Any]:
    """The cases of that section, with their ids."""
    return [pytest.param(row, id=row["id"]) for row in DATA[section]]


def number(value: Any) -> int:
    """An integer written in decimal or hex."""
    return int(str(value), 0)


def modulus(name: str) -> int:
    """Of a standard group."""
    group = find(name)
    assert group is not None
    return group.modulus


@cache
def found(p: int, tiers: tuple[int, ...] = (1, 2)) -> SpecialForm | None:
    """What the search finds, once for all tests."""
    return search(p, tiers)


def relatives(pair: Pair) -> set[Pair]:
    """The same pair with f(-x), -f or its reversal, and the root to match."""
    f, g1, g0 = pair
    found = set()
    for form, u, v in ((f, g1, g0), (f[::-1], g0, g1)):
        for root in (v, -v):
            mirrored = form if root == v else tuple(-c if i % 2 else c for i, c in enumerate(form))
            found |= {(mirrored, u, root), (tuple(-c for c in mirrored), u, root)}
    return found


def random_primes(bits: int, count: int) -> Iterator[int]:
    """Primes of that length, the same in each run."""
    draw = random.Random(bits)
    for _ in range(count):
        yield int(gmpy2.next_prime(draw.getrandbits(bits) | 1 << (bits - 1)))


@pytest.mark.parametrize("row", rows("found"))
def test_listed_forms_are_found_and_shown(row: dict[str, Any]) -> None:
    """The listed pair is a pair, the search comes to it in its tier, and its check accepts it."""
    p, expect = number(row["p"]), row["expect"]
    pair = (tuple(expect["f"]), number(expect["g1"]), number(expect["g0"]))
    value = homogeneous_value(*pair)

    form = found(p, (3,) if expect["tier"] == 3 else (1, 2))

    assert abs(value) == expect["cofactor"] * p
    assert form is not None
    assert form.tier == expect["tier"]
    assert (form.coefficients, form.g1, form.g0) in relatives(pair)
    sizes = check(p, form.coefficients, form.g1, form.g0, form.cofactor)
    assert (sizes.degree, sizes.coefficient_bits, sizes.root_bits) == (
        form.degree,
        form.coefficient_bits,
        form.root_bits,
    )


@pytest.mark.parametrize("row", [r for r in rows("found") if "sigma" in r.values[0]["expect"]])
def test_figures_of_listed_forms(row: dict[str, Any]) -> None:
    """sigma, n* and the work of the special sieve are the listed ones."""
    form, expect = found(number(row["p"])), row["expect"]

    assert form is not None
    assert form.sigma == pytest.approx(expect["sigma"], abs=0.02)
    assert form.n_star == pytest.approx(expect["n_star"], abs=0.1)
    assert form.sieve_bits == pytest.approx(expect["strength_bits"], abs=0.02)


@pytest.mark.parametrize("row", [r for r in rows("found") if r.values[0]["expect"]["tier"] == 3])
def test_hidden_forms_need_the_third_tier(row: dict[str, Any]) -> None:
    """Digits and guessed roots show nothing of a hidden form."""
    assert search(number(row["p"]), (1, 2)) is None


@pytest.mark.parametrize("row", rows("of_no_use"))
def test_low_degrees_are_no_help(row: dict[str, Any]) -> None:
    """A form of degree 3 is neither reported nor accepted: the sieve is not faster with it."""
    p, expect = number(row["p"]), row["expect"]
    f, g1, g0 = expect["f"], number(expect["g1"]), number(expect["g0"])

    assert homogeneous_value(f, g1, g0) == expect["cofactor"] * p
    assert search(p) is None
    with pytest.raises(Refuted, match="degree"):
        check(p, f, g1, g0)


def helping(n: int, degree: int, root_bits: int) -> int:
    """The longest coefficients, in bits, with which a pair still helps the sieve."""
    bits = n
    while special_sieve_bits(n, degree, bits, root_bits) >= general_sieve_bits(n):
        bits -= 1
    return bits


@pytest.mark.parametrize("n", [LEAST_LENGTH, 448, 512, 1024, 2048, 8192])
@pytest.mark.parametrize("degree", DEGREES)
def test_what_helps_the_sieve_is_no_accident(n: int, degree: int) -> None:
    """The largest pairs that a tier could report are still small enough for the check: what is
    found is never refused."""
    known, any_, hidden_ = n // (degree + 1) + 1, n // degree, (n - 51) // 2
    known_f = [2 ** helping(n, degree, known)] * (degree + 1)
    any_f = [2 ** helping(n, degree, any_)] * (degree + 1)
    while special_sieve_bits(n, degree, 0, hidden_) >= general_sieve_bits(n):
        hidden_ -= 1

    descriptions = [
        description_bits(known_f, 1, 2**known),
        description_bits(any_f, 1, 2**any_ - 1),
        description_bits([1] * (degree + 1), 2**hidden_ - 1, 2**hidden_ - 3),
    ]

    assert max(descriptions) - (n - 1) <= CHANCE_BITS


@pytest.mark.parametrize("name", DATA["none_found"])
def test_published_groups_are_not_special(name: str) -> None:
    """Runs of ones from the pi and e formulas do not make a report."""
    assert search(modulus(name)) is None


def test_hidden_tier_is_silent_on_a_published_group() -> None:
    """No tiny polynomial has a small root modulo the 1024-bit group."""
    assert search(modulus("modp1024"), (3,)) is None


@pytest.mark.parametrize(
    ("bits", "count", "tiers"),
    [(384, 6, (1, 2, 3)), (512, 10, (1, 2)), (1024, 3, (1, 2))],
)
def test_random_primes_are_not_special(bits: int, count: int, tiers: tuple[int, ...]) -> None:
    """No tier reports an ordinary prime of any length."""
    assert [search(p, tiers) for p in random_primes(bits, count)] == [None] * count


@given(
    st.lists(st.integers(-99, 99), min_size=3, max_size=6),
    st.integers(-3, 3),
    st.integers(1, 24),
    st.integers(2**100, 2**110),
)
def test_planted_forms_are_found(
    low: list[int], next_to_leading: int, leading: int, m: int
) -> None:
    """f(m) with small coefficients is found for every irreducible f, prime or not."""
    coefficients = [*low, next_to_leading, leading]
    factors = fmpz_poly(coefficients).factor()
    n = homogeneous_value(coefficients, 1, m)
    assume(n % 2 and factors[0] == 1 and [exponent for _, exponent in factors[1]] == [1])

    form = search(n, (2,))

    assert form is not None
    check(n, form.coefficients, form.g1, form.g0, form.cofactor)


def test_reducible_form_is_reduced_to_the_factor_with_the_root() -> None:
    """Of (x^2 + 1)(x^4 + x + 3) the factor whose value p divides is kept."""
    row = next(row for row in DATA["found"] if row["id"] == "m^4+m+3")
    p, m = number(row["p"]), number(row["expect"]["g0"])
    raw = tuple(int(c) for c in (fmpz_poly([1, 0, 1]) * fmpz_poly([3, 1, 0, 0, 1])).coeffs())

    form = special_form(p, 2, RawPair(raw, 1, m))
    other = special_form(p, 2, RawPair(raw, 1, m + 1))

    assert form is not None
    assert (form.coefficients, form.cofactor) == ((3, 1, 0, 0, 1), 1)
    assert other is None


@pytest.mark.parametrize("pair", sorted(relatives(((-1, -1, 0, 0, 1), 10**30 + 57, 10**30))))
def test_forms_are_normal(pair: Pair) -> None:
    """Whatever signs a pair comes with, root and cofactor come out positive and the value exact."""
    p = abs(homogeneous_value(*pair))

    form = special_form(p, 3, RawPair(*pair))

    assert form is not None
    assert form.g0 > 0
    assert form.g1 > 0
    assert form.cofactor == 1
    assert homogeneous_value(form.coefficients, form.g1, form.g0) == p


def test_leading_digits_do_not_count() -> None:
    """They are small for every modulus; the others decide."""
    m = 10**9
    digits = (1, -3, 2, 700, 24)
    value = homogeneous_value(digits, 1, m)

    assert any_root._small_expansion(value, m, 4, limit=2) == digits
    assert any_root._small_expansion(value, m, 4, limit=1) is None


def test_tiers_commute() -> None:
    """The order in which tiers are asked for changes nothing; equal moduli give equal forms."""
    p = 2**448 - 2**224 - 1

    assert search(p, (2, 1)) == search(p, (1, 2)) == search(p, (1, 2, 3))


def test_what_was_looked_for_is_said() -> None:
    """Each tier asked for is described, in order, with its number of tests; moduli too short for
    any, and too long for the third, are not looked at."""
    p = modulus("modp2048")

    assert [(item.tier, item.tests) for item in looked_for(p, (3, 1, 2))] == [
        (1, known_root.tests(p)),
        (2, any_root.tests()),
        (3, hidden.tests()),
    ]
    assert [item.tier for item in looked_for(1 << LARGEST_HIDDEN, (1, 2, 3))] == [1, 2]
    short = (1 << (LEAST_LENGTH - 2)) + 1
    assert looked_for(short) == ()
    assert search(short) is None


@pytest.mark.parametrize(("p", "tiers"), [(2**256, (1,)), (1, (1,)), (2**521 - 1, (4,))])
def test_search_refuses_what_it_cannot_mean(p: int, tiers: tuple[int, ...]) -> None:
    """An even number, one below 3, and a tier that does not exist are the caller's mistake."""
    with pytest.raises(ValueError, match=r"odd|tier"):
        search(p, tiers)


@pytest.mark.parametrize("degree", DEGREES)
def test_lattice_is_that_of_the_root(degree: int) -> None:
    """Its rows vanish at m modulo p and its determinant is p, so it is the whole lattice."""
    p, m = modulus("modp768"), 3**61

    lattice = known_root._lattice(p, m, degree)

    assert abs(int(lattice.det())) == p
    for row in lattice.table():
        assert homogeneous_value([int(c) for c in row], 1, m) % p == 0


@given(st.integers(2**127, 2**9000), st.sampled_from(DEGREES), st.sampled_from(known_root.BASES))
def test_roots_span_their_range(p: int, degree: int, base: int) -> None:
    """The powers above p^(1/(d+1)) and up to 2^16 p^(1/d) are tried, all of them or regularly."""
    exponents = known_root.exponents(p, degree, base)

    inside = [base ** exponents[0], base ** exponents[-1]]
    assert all(m ** (degree + 1) > p and m**degree <= p << 16 * degree for m in inside)
    assert (inside[0] // base) ** (degree + 1) <= p
    assert (inside[1] * base**exponents.step) ** degree > p << 16 * degree
    assert exponents.step == 1 + int(log2(p)) // known_root.FINE_UP_TO


@given(st.integers(0, 2**600), st.integers(2, 2**200), st.integers(1, 8))
def test_expansion_is_balanced_and_exact(value: int, m: int, degree: int) -> None:
    """The digits give the value back, and all but the last are at most m/2 in size."""
    digits = expansion(value, m, degree)

    assert homogeneous_value(digits, 1, m) == value
    assert len(digits) == degree + 1
    assert all(2 * abs(digit) <= m for digit in digits[:-1])


@given(st.integers(3, 2**96), st.data())
def test_shortest_quotient_is_shortest(p: int, data: st.DataObject) -> None:
    """Lagrange's reduction ends at a vector as short as the one that FLINT's LLL finds."""
    root = data.draw(st.integers(0, p - 1))

    u, v = hidden._shortest_quotient(root, p)

    reduced = fmpz_mat([[p, 0], [root, 1]]).lll().table()
    assert (u - root * v) % p == 0
    assert 0 < u * u + v * v <= min(int(x) ** 2 + int(y) ** 2 for x, y in reduced)


def test_tiny_polynomials_are_one_of_each_class() -> None:
    """13, 26 and 84 classes of degree 4, 5 and 6; together with their relatives they are all the
    irreducible polynomials with coefficients -1, 0 and 1."""
    chosen = hidden.polynomials()
    orbits = [{f for f, _, _ in relatives((form, 1, 1))} for form in chosen]
    everything = {
        f
        for degree in (4, 5, 6)
        for f in product((-1, 0, 1), repeat=degree + 1)
        if f[0] and f[-1] and [e for _, e in fmpz_poly(list(f)).factor()[1]] == [1]
    }

    assert [sum(len(form) == degree + 1 for form in chosen) for degree in (4, 5, 6)] == [13, 26, 84]
    assert set().union(*orbits) == everything
    assert sum(map(len, orbits)) == len(everything)


@pytest.mark.parametrize(
    ("bits", "work"), [(512, 57.16), (1024, 80.00), (2048, 110.12), (4096, 149.73), (15360, 262.62)]
)
def test_general_sieve_has_the_tabulated_work(bits: int, work: float) -> None:
    """The formula of the FIPS 140 Implementation Guidance, evaluated elsewhere."""
    assert general_sieve_bits(bits) == pytest.approx(work, abs=0.01)


@given(st.floats(256, 16384), st.integers(4, 8))
def test_sigma_runs_from_special_to_generic(n: float, degree: int) -> None:
    """A pure special form has sigma 1 and n* = n; the best pair of an ordinary modulus 0 and 2n."""
    generic = n / (degree + 1)

    assert sigma(n, degree, 0, n / degree) == pytest.approx(1)
    assert n_star(n, degree, 0, n / degree) == pytest.approx(n)
    assert sigma(n, degree, generic, generic) == pytest.approx(0, abs=1e-9)
    assert n_star(n, degree, generic, generic) == pytest.approx(2 * n)


@given(st.integers(256, 8192), st.integers(4, 8), st.floats(0, 900), st.floats(0, 900))
def test_smaller_pairs_are_never_harder(n: int, degree: int, f: float, g: float) -> None:
    """Shrinking either polynomial cannot raise the work."""
    work = special_sieve_bits(n, degree, f, g)

    assert special_sieve_bits(n, degree, f / 2, g) <= work
    assert special_sieve_bits(n, degree, f, g / 2) <= work


@pytest.mark.parametrize(("n", "degree"), [(1024, 3), (1024, 9), (0, 4)])
def test_sigma_is_of_pairs(n: int, degree: int) -> None:
    """Degrees that it would flatter are refused, and a modulus without length."""
    with pytest.raises(ValueError, match="pair"):
        sigma(n, degree, 1, 1)


P = 2**1024 - 105
GOOD = (P, [-105, 0, 0, 0, 16], 1, 2**255, 1)
CUBIC = 11 * 2**400 + 1
REFUSED = {
    "below 2": (1, *GOOD[1:]),
    "degree": (P, [2**1000, 1], 1, 1, 1),
    "leading": (P, [-105, 0, 0, 0, 16, 0], 1, 2**255, 1),
    "common factor": (P, [-210, 0, 0, 0, 32], 1, 2**255, 2),
    "coprime": (P, [-105, 0, 0, 0, 16], 2, 2**256, 16),
    "positive": (P, [-105, 0, 0, 0, 16], 1, -(2**255), 1),
    "not a multiple": (P, [-107, 0, 0, 0, 16], 1, 2**255, 1),
    "another multiple": (P, [-105, 0, 0, 0, 16], 1, 2**255, 2),
    "ordinary": (P, expansion(P, 3**140, 4), 1, 3**140, 1),
    "reducible": (2**1024 - 1, [-1, 0, 0, 0, 1], 1, 2**256, 1),
}


@pytest.mark.parametrize(("reason", "certificate"), REFUSED.items())
def test_check_refuses_what_is_not_shown(reason: str, certificate: tuple[Any, ...]) -> None:
    """Each step of the check has a certificate that fails just there."""
    assert check(*GOOD).chance_bits < CHANCE_BITS
    with pytest.raises(Refuted, match=reason):
        check(*certificate)


def test_check_refuses_a_root_of_the_polynomial() -> None:
    """A value of 0 is a multiple of everything and shows nothing."""
    with pytest.raises(Refuted, match="not a multiple"):
        check(P, [-(2**40), 0, 0, 0, 1], 1, 2**10)


@pytest.mark.parametrize("name", ["modp2048", "ffdhe3072"])
@pytest.mark.parametrize("degree", DEGREES)
def test_check_refuses_ordinary_expansions(name: str, degree: int) -> None:
    """Every modulus has base-m pairs; being written as one is not special."""
    p = modulus(name)
    for m in (int(gmpy2.iroot(p, degree)[0]), 2 ** (p.bit_length() // degree)):
        with pytest.raises(Refuted, match="ordinary"):
            check(p, expansion(p, m, degree), 1, m, 1)


def test_prefix_codes_are_not_overfull() -> None:
    """Kraft's inequality, without which the count of short pairs would be wrong: over any set of
    different objects the sum of 2^-length is at most 1."""
    integers = sum(Fraction(1, 2 ** _integer_bits(k)) for k in range(-(2**12), 2**12))
    polynomials = sum(
        Fraction(1, 2 ** _polynomial_bits(f)) for f in product(range(-8, 9), repeat=3) if any(f)
    )
    roots = sum(Fraction(1, 2 ** _root_bits(u, v)) for u, v in product(range(1, 64), repeat=2))

    assert Fraction(9, 10) < integers <= 1
    assert polynomials <= 1
    assert roots <= 1


def test_signed_binary_weights_of_published_groups() -> None:
    """As tabulated: the moduli are the published ones, and sparse is none of them."""
    for name, weight in DATA["signed_binary_weights"].items():
        n = modulus(name)
        assert (n ^ 3 * n).bit_count() == weight
        assert weight > n.bit_length() / 16
