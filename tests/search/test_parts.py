"""A number in coprime parts: whatever divides them, and whenever that is interrupted."""

from itertools import count
from math import gcd, prod

import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.search.parts import Parts
from tests.interrupting import NotReached, interrupted

P, Q, R, S = 1_000_003, 1_000_033, 1_000_037, 1_000_039
M = P**2 * Q * R**3 * S


def whole(parts: Parts) -> int:
    """The product of all parts."""
    return prod(part**exponent for part, exponent in (*parts.primes(), *parts.composites()))


@given(st.integers(1, 10**12), st.lists(st.integers(0, 10**6), max_size=5))
def test_the_parts_are_coprime_and_make_up_the_number(m: int, divisors: list[int]) -> None:
    """Primes are primes, the others are not, and what is told as new is there."""
    parts = Parts(m)
    new = parts.divide(divisors)
    pieces = [part for part, _ in (*parts.primes(), *parts.composites())]

    assert whole(parts) == m
    assert all(gcd(a, b) == 1 for i, a in enumerate(pieces) for b in pieces[:i])
    assert all(sympy.isprime(p) for p, _ in parts.primes())
    assert not any(sympy.isprime(c) for c, _ in parts.composites())
    assert new.items() <= dict(parts.primes()).items()
    assert parts.open == prod(c for c, _ in parts.composites())


def test_an_interruption_loses_no_part() -> None:
    """At every line of a division."""
    for at in count(1):
        parts = Parts(M)
        try:
            interrupted(lambda parts=parts: parts.divide([P * Q, Q * R, P]), at)  # type: ignore[misc]
        except NotReached:
            break
        assert whole(parts) == M, at
    assert at > 50
    assert parts.primes() == ((P, 2), (Q, 1), (R, 3), (S, 1))
