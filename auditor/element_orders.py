"""The order of an element modulo n from a factored multiple of it, and primitive roots lifted.

Pure arithmetic on given factors; nothing is searched for and no primality is tested.
Source: Cohen, A Course in Computational Algebraic Number Theory (1993), algorithm 1.4.3 (from
memory); Menezes, van Oorschot, Vanstone, Handbook of Applied Cryptography (1996), 4.79 (from
memory).
"""

from collections.abc import Iterable
from math import gcd, prod

from gmpy2 import mpz, powmod, remove

Factors = tuple[tuple[int, int], ...]
"""Primes with positive exponents, primes ascending."""


class NotAUnit(ValueError):
    """The element has a common divisor with the modulus."""


class WrongFactorization(ValueError):
    """The given factors contradict the modulus, the group order, or an element's power."""


def order_by_stripping(a: int, n: int, factors: Iterable[tuple[int, int]]) -> int:
    """The order of a modulo n from the factorization of a multiple T of it.

    Halves the list of primes at each level, so the work is about lg T lg(number of primes)
    multiplications. WrongFactorization when a^T is not 1: then T, or a prime of it, is wrong.
    """
    return _strip(unit(a, n), n, tuple(factors))


def lift_primitive_root(g: int, p: int, k: int) -> int:
    """A primitive root modulo p^k (p an odd prime) from one modulo p: g or g + p.

    g serves for every k unless g^(p-1) = 1 modulo p^2; then g + p does.
    """
    g %= p
    return g + p if k > 1 and powmod(g, p - 1, p * p) == 1 else g


def double_primitive_root(g: int, power: int) -> int:
    """A primitive root modulo 2 p^k from one modulo ``power`` = p^k: the odd one of g, g + p^k."""
    g %= power
    return g if g % 2 else g + power


def _strip(a: int, n: int, factors: Factors) -> int:
    if not factors:
        if a != 1 % n:
            raise WrongFactorization("the element's power by the supposed exponent is not 1")
        return 1
    if len(factors) == 1:
        return _prime_power_order(a, n, *factors[0])
    middle = len(factors) // 2
    left, right = factors[:middle], factors[middle:]
    return _strip(int(powmod(a, product_of(right), n)), n, left) * _strip(
        int(powmod(a, product_of(left), n)), n, right
    )


def _prime_power_order(a: int, n: int, r: int, e: int) -> int:
    order = 1
    for _ in range(e):
        if a == 1 % n:
            return order
        a, order = int(powmod(a, r, n)), order * r
    return order * _strip(a, n, ())


def generates(a: int, n: int, order_factors: Factors) -> bool:
    """The unit a has exactly the order that these factors multiply to, the order of a group."""
    order = product_of(order_factors)
    return all(powmod(a, order // r, n) != 1 % n for r, _ in order_factors)


def lifted(u: int, m: int, n: int) -> int:
    """The element that is u modulo m and 1 modulo n/m, by the Chinese remainder theorem."""
    rest = n // m
    return (1 + rest * ((u - 1) * pow(rest, -1, m) % m)) % n


def unit(a: int, n: int) -> int:
    """The element a reduced modulo n; NotAUnit when it has a common divisor with n."""
    if gcd(a, n) != 1:
        raise NotAUnit("the element has a common divisor with the modulus")
    return a % n


def split(m: int, primes: Iterable[int]) -> tuple[Factors, int]:
    """The powers of these primes in m, and what is left of m."""
    found = []
    for r in primes:
        rest, exponent = remove(mpz(m), mpz(r))
        if exponent:
            found.append((r, exponent))
            m = int(rest)
    return tuple(found), m


def part_of(m: int, r: int) -> int:
    """The largest power of r that divides m."""
    return m // int(remove(mpz(m), mpz(r))[0])


def product_of(factors: Iterable[tuple[int, int]]) -> int:
    """The number these prime powers multiply to."""
    return prod(r**e for r, e in factors)
