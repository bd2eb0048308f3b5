"""Small fields are left to python-flint only where that is safe, and its answers are checked."""

from types import SimpleNamespace

import flint
import pytest
import sympy

from auditor.search import log_small
from auditor.search.log_small import in_small_field

P = 2_159_157_001
FACTORS = list(sympy.factorint(P - 1).items())


def test_the_field_of_the_tests_is_one() -> None:
    """A prime of 32 bits with a smooth predecessor."""
    assert sympy.isprime(P)
    assert max(q for q, _ in FACTORS) < 2**10


@pytest.mark.parametrize("exponent", [0, 1, 12_345, P - 2])
@pytest.mark.parametrize("base", [sympy.primitive_root(P), pow(3, 50, P), P - 1, 1])
def test_the_logarithm_is_modulo_the_order_of_the_base(base: int, exponent: int) -> None:
    """Also for a base that generates a subgroup only (sympy's order)."""
    found = in_small_field(P, base, pow(base, exponent, P), FACTORS)

    assert found is not None
    assert found.modulus == sympy.n_order(base, P)
    assert found.value == exponent % found.modulus
    assert found.operations > 0


def test_no_logarithm_is_no_answer() -> None:
    """A non-square is no power of a square, whatever the library says."""
    root = sympy.primitive_root(P)

    assert in_small_field(P, root * root % P, root, FACTORS) is None


@pytest.mark.parametrize(
    ("n", "g", "h", "factors"),
    [
        (P, 2, 0, FACTORS),
        (P, 0, 1, FACTORS),
        (P, 2, 4, FACTORS[1:]),
        (561, 2, 4, [(2, 4), (5, 1), (7, 1)]),
        (2, 1, 1, []),
        (2**61 - 1, 37, 5, list(sympy.factorint(2**61 - 2).items())),
        (5_001_119, 5, 25, [(2, 1), (2_500_559, 1)]),
    ],
)
def test_what_is_not_for_the_library_never_reaches_it(
    n: int,
    g: int,
    h: int,
    factors: list[tuple[int, int]],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """0, a part of the group, a composite modulus, a larger field or prime: it may end the process
    or take long."""
    monkeypatch.setattr(log_small, "flint", SimpleNamespace(fmpz=flint.fmpz))

    assert in_small_field(n, g, h, factors) is None
