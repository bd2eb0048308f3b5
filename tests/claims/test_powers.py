"""Powers that Fermat and Euler give away are the powers; orders that are read off are orders."""

import secrets
from dataclasses import replace

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.base import Refuted
from auditor.claims.order import Order
from auditor.claims.powers import euler_decides, prime_modulus_power
from auditor.claims.prime import Prime

SAFE = 10_007
"""A safe prime: 5003 is prime (sympy)."""


@given(st.integers(1, 3000).map(sympy.prime), st.data())
def test_powers_modulo_a_prime(n: int, data: st.DataObject) -> None:
    """Multiples of (n-1)/2, which are read off, and all others."""
    a = data.draw(st.integers(1, n - 1))
    half = max(1, (n - 1) // 2)
    e = data.draw(st.integers(0, 3 * n) | st.integers(0, 6).map(lambda k: k * half))

    assert prime_modulus_power(a, e, n) == pow(a, e, n)
    assert euler_decides(n, e) == (n > 2 and e % half == 0)


def order(element: int, known: tuple[tuple[int, int], ...]) -> tuple[Order, dict[str, Prime]]:
    """A claim about an element modulo the safe prime, and what it uses."""
    used = [Prime(prime, "below-2^64") for prime, _ in known]
    used.append(Prime(SAFE, "below-2^64"))
    uses = tuple(sorted(claim.id for claim in used))
    return Order(SAFE, element, known, 1, uses), {claim.id: claim for claim in used}


@pytest.mark.parametrize("element", range(2, 40))
def test_orders_that_are_read_off(element: int) -> None:
    """The true order passes, with or without the primality of the modulus; no other does."""
    true = sympy.n_order(element, SAFE)
    for known in (((2, 1), (5003, 1)), ((5003, 1),), ((2, 1),)):
        claim, used = order(element, known)
        value = sympy.prod(p**e for p, e in known)
        if value == true:
            claim.check(used, secrets.randbelow)
            plain = {id_: item for id_, item in used.items() if item.n != SAFE}
            replace(claim, uses=tuple(sorted(plain))).check(plain, secrets.randbelow)
        else:
            with pytest.raises(Refuted):
                claim.check(used, secrets.randbelow)


def test_a_modulus_that_saves_nothing_is_no_support() -> None:
    """The claim that the modulus is prime is used only where powers are read off by it."""
    prime = 1_000_003
    (factor, _), *_ = reversed(list(sympy.factorint(prime - 1).items()))
    element = pow(2, (prime - 1) // factor, prime)
    used = {claim.id: claim for claim in (Prime(n, "below-2^64") for n in (factor, prime))}
    claim = Order(prime, element, ((factor, 1),), 1, tuple(sorted(used)))

    with pytest.raises(Refuted, match="prime claims used"):
        claim.check(used, secrets.randbelow)
