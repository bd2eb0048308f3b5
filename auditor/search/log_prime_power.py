"""Logarithms modulo p^k and 2^k: the part of the group of order a power of p is no obstacle.

Modulo p^k the units are C_(p-1) x C_(p^(k-1)), and the p-adic logarithm turns the second factor
into addition. A modulus p^k is therefore worth no more than p, and 2^k nothing.

Source: Koblitz, p-adic Numbers, p-adic Analysis, and Zeta-Functions, chapter IV, for the series;
the congruences are elementary (from memory).
"""

from math import prod

from gmpy2 import gcd, invert, mpz, remove

from auditor.search.log_result import Logarithm, Tally
from auditor.search.logarithm import Factors, combined, pohlig_hellman


def padic_logarithm(p: int, k: int, g: int, h: int, *, tally: Tally | None = None) -> Logarithm:
    """The x with h = g^x modulo p^k, modulo the p-part of the order of g (p an odd prime).

    That part is p^(k-1) unless g^(p-1) = 1 modulo p^2. Work: two exponentiations by p - 1 and some
    3 k multiplications each. ValueError when g or h is divisible by p; NotFound when the p-parts
    show that h is not a power of g.
    """
    tally = tally or Tally()
    p = mpz(p)
    whole = p ** (k - 1)
    base, element = (_series(tally.power(_unit(a, p), p - 1, p**k), p, k, tally) for a in (g, h))
    value, modulus = _quotient(element, base, whole, tally)
    return Logarithm(value, modulus, tally.operations)


def prime_power_logarithm(
    p: int, k: int, g: int, h: int, predecessor: Factors, *, tally: Tally | None = None
) -> Logarithm:
    """The x with h = g^x modulo p^k, modulo the order of g, from the factorization of p - 1.

    Pohlig-Hellman modulo p and the p-adic logarithm, joined. Raises as those two do.
    """
    tally = tally or Tally()
    if prod(q**e for q, e in predecessor) != p - 1:
        raise ValueError("the factors do not multiply to p - 1")
    high = padic_logarithm(p, k, g, h, tally=tally)
    low = pohlig_hellman(p, _unit(g, p), _unit(h, p), predecessor, tally=tally)
    both = combined(low, high)
    return Logarithm(both.value, both.modulus, tally.operations)


def two_power_logarithm(k: int, g: int, h: int, *, tally: Tally | None = None) -> Logarithm:
    """The x with h = g^x modulo 2^k, modulo the order of g, for odd g and h and k >= 1.

    Every odd number is (-1)^s 5^a, s modulo 2 and a modulo 2^(k-2); the equation is solved in
    both. Work: about 4 k multiplications. ValueError for an even g or h; NotFound when h is not a
    power of g.
    """
    tally = tally or Tally()
    sign, base = _sign_and_power_of_five(_unit(g, 2), k, tally)
    other_sign, element = _sign_and_power_of_five(_unit(h, 2), k, tally)
    value, modulus = _quotient(element, base, mpz(2) ** max(0, k - 2), tally)
    if sign and modulus == 1:
        value, modulus = other_sign, 2
    if (sign * value - other_sign) % 2:
        raise tally.nothing("the signs show that the element is not a power of the base")
    return Logarithm(value, modulus, tally.operations)


def _unit(a: int, p: int) -> mpz:
    if a % p == 0:
        raise ValueError("the element is divisible by the prime of the modulus")
    return mpz(a)


def _series(one_unit: mpz, p: mpz, k: int, tally: Tally) -> mpz:
    """log(1 + u)/p modulo p^(k-1), where 1 + u is given modulo p^k and p divides u.

    The term u^j/j is p^(j-v) (u/p)^j / i, with j = p^v i; it vanishes once j - v >= k, which v
    being at most log_3 j puts off by fewer terms than k has bits.
    """
    modulus, root = p ** (k - 1), (one_unit - 1) // p
    total, power = mpz(0), mpz(1)
    for j in range(1, k + k.bit_length() + 1):
        power = power * root % modulus
        i, v = remove(mpz(j), p)
        if j - v < k:
            tally.spend(3)
            term = power * p ** (j - v - 1) * invert(i, modulus) if modulus > 1 else mpz(0)
            total += term if j % 2 else -term
    return total % modulus


def _sign_and_power_of_five(a: mpz, k: int, tally: Tally) -> tuple[int, mpz]:
    """s and e with a = (-1)^s 5^e modulo 2^k: e bit by bit, as 5^(2^i) is 1 modulo 2^(i+2)."""
    n = mpz(2) ** k
    sign = int(a % min(n, 4) == 3)
    a = -a % n if sign else a % n
    exponent, power, square = mpz(0), mpz(1), mpz(5)
    for i in range(k - 2):
        if (power - a) % 2 ** (i + 3):
            exponent += 2**i
            power = power * square % n
        square = square * square % n
        tally.spend(2)
    return sign, exponent


def _quotient(element: mpz, base: mpz, whole: mpz, tally: Tally) -> tuple[int, int]:
    """The x with base x = element modulo ``whole``, and the modulus it is unique in.

    That modulus is whole/gcd(base, whole); NotFound when the gcd does not divide the element.
    """
    common = gcd(base, whole)
    if element % common:
        raise tally.nothing("the element is not a power of the base")
    modulus = whole // common
    inverse = invert(base // common, modulus) if modulus > 1 else mpz(0)
    return int(element // common * inverse % modulus), int(modulus)
