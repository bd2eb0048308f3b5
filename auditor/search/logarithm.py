"""Discrete logarithms by the structure of the group: Pohlig-Hellman, whole or in part.

For demonstrations of a weakness and for tests, on exponents that the program itself has drawn;
never for public values that somebody declared. Everything is deterministic, given the seed.

    what is known of g                      function
    x lies in an interval                   log_steps.logarithm_in_interval, log_kangaroo.kangaroo
    its order is prime                      prime_order_logarithm (steps, or log_rho.rho)
    prime factors of its order              pohlig_hellman
    some of them, and x is short            short_exponent
    it is taken modulo p^k or 2^k           log_prime_power

Sources: Pohlig, Hellman, "An improved algorithm for computing logarithms over GF(p) and its
cryptographic significance", IEEE Trans. Inf. Theory 24 (1978); van Oorschot, Wiener, "On
Diffie-Hellman key agreement with short exponents", EUROCRYPT 1996 (both from memory).
"""

from collections.abc import Iterator, Sequence
from concurrent.futures import Executor
from math import gcd, prod

from gmpy2 import invert, mpz

from auditor.search.log_kangaroo import kangaroo
from auditor.search.log_result import Logarithm, LogarithmError, NotFound, OutOfBudget, Tally
from auditor.search.log_rho import rho
from auditor.search.log_small import in_small_field
from auditor.search.log_steps import Steps, baby_steps, logarithm_in_interval

__all__ = [
    "Logarithm",
    "LogarithmError",
    "NotFound",
    "OutOfBudget",
    "Tally",
    "kangaroo",
    "logarithm_in_interval",
    "pohlig_hellman",
    "prime_order_logarithm",
    "rho",
    "short_exponent",
]

Factors = Sequence[tuple[int, int]]
"""Different primes, each with a positive exponent."""

LARGEST_BY_STEPS = 2**50
"""Above it rho is quicker than giant steps over a table of the default size (2048 bits)."""


def prime_order_logarithm(
    n: int,
    g: int,
    h: int,
    q: int,
    *,
    seed: int = 0,
    executor: Executor | None = None,
    tally: Tally | None = None,
) -> Logarithm:
    """The logarithm of h to the base g modulo n, where g has prime order q.

    By giant steps up to q = 2^50 (about sqrt(2 q) operations, NotFound is certain), by rho above.
    """
    if q > LARGEST_BY_STEPS:
        return rho(n, g, h, q, seed=seed, executor=executor, tally=tally)
    found = logarithm_in_interval(n, g, h, q, tally=tally)
    return Logarithm(found.value, q, found.operations)


def pohlig_hellman(
    n: int,
    g: int,
    h: int,
    factors: Factors,
    *,
    rest: int = 1,
    seed: int = 0,
    executor: Executor | None = None,
    tally: Tally | None = None,
) -> Logarithm:
    """The logarithm of h to the base g modulo n, as far as these prime factors reveal it.

    T = prod q^e times ``rest`` is the order of g or a multiple of it; the result is x modulo the
    part of ord(g) that is made of the primes in ``factors``: all of ord(g) when ``rest`` is 1.
    Work: for each prime power e (lg T + sqrt(2 q)) operations or so; without a ``tally`` the whole
    group of a small field is left to :mod:`auditor.search.log_small`. ValueError when g^T is not 1;
    NotFound when h is not a power of g, as far as these factors show it.
    """
    if tally is None and rest == 1:
        found = in_small_field(n, g % n, h % n, factors)
        if found is not None:
            return found
    tally = tally or Tally()
    n, g, h = mpz(n), mpz(g) % n, mpz(h) % n
    order = prod(q**e for q, e in factors) * rest
    if tally.power(g, order, n) != 1:
        raise ValueError("the order of the base does not divide the given multiple of it")
    if tally.power(h, order, n) != 1:
        raise tally.nothing("the element is not in the group of the base")
    known = Logarithm(0, 1, 0)
    if rest > 1:
        g, h = tally.power(g, rest, n), tally.power(h, rest, n)
    for q, e, base, element in _primary_parts(n, g, h, tuple(factors), tally):
        part = _prime_power_order(n, base, element, q, e, seed, executor, tally)
        known = combined(known, part)
    return Logarithm(known.value, known.modulus, tally.operations)


def short_exponent(
    n: int,
    g: int,
    h: int,
    factors: Factors,
    width: int,
    *,
    rest: int = 1,
    seed: int = 0,
    executor: Executor | None = None,
    tally: Tally | None = None,
) -> Logarithm:
    """The x below 2^``width`` with h = g^x modulo n: Pohlig-Hellman, then a kangaroo on the rest.

    ``factors`` are the primes worth attacking, ``rest`` what else the order of g may divide. With
    z the part of ord(g) they make up, x = x0 + z k, and k is below 2^width / z: about
    2 sqrt(2^width / z) operations more. Raises as pohlig_hellman and kangaroo do.
    """
    tally = tally or Tally()
    known = pohlig_hellman(n, g, h, factors, rest=rest, seed=seed, executor=executor, tally=tally)
    order = prod(q**e for q, e in factors) * rest
    return finish_by_kangaroo(n, g, h, known, 2**width, order=order, seed=seed, tally=tally)


def finish_by_kangaroo(
    n: int,
    g: int,
    h: int,
    known: Logarithm,
    bound: int,
    *,
    order: int,
    seed: int = 0,
    tally: Tally | None = None,
) -> Logarithm:
    """The x below ``bound`` with h = g^x modulo n, when x is ``known`` modulo something.

    ``order`` is that of g or a multiple of it. Raises as kangaroo does.
    """
    tally = tally or Tally()
    z, x0 = known.modulus, known.value
    base = tally.power(g, z, mpz(n))
    element = h * tally.power(g, -x0, mpz(n)) % n
    remaining = -((x0 - bound) // z)
    reduced = order // gcd(order, z)
    found = kangaroo(n, base, element, 0, remaining, order=reduced, seed=seed, tally=tally)
    return Logarithm(x0 + z * found.value, 0, tally.operations)


def _primary_parts(
    n: mpz, g: mpz, h: mpz, factors: tuple[tuple[int, int], ...], tally: Tally
) -> Iterator[tuple[int, int, mpz, mpz]]:
    """For each (q, e) the powers of g and h whose orders divide q^e, by halving the list."""
    if len(factors) == 1:
        yield (*factors[0], g, h)
    elif factors:
        middle = len(factors) // 2
        for mine, others in (
            (factors[:middle], factors[middle:]),
            (factors[middle:], factors[:middle]),
        ):
            away = prod(q**e for q, e in others)
            pair = tally.power(g, away, n), tally.power(h, away, n)
            yield from _primary_parts(n, *pair, mine, tally)


def _prime_power_order(
    n: mpz,
    g: mpz,
    h: mpz,
    q: int,
    e: int,
    seed: int,
    executor: Executor | None,
    tally: Tally,
) -> Logarithm:
    """The logarithm of h to the base g, both of order dividing q^e: its digits to the base q."""
    chain = _powers_of_q(n, g, q, e, tally)
    digits = len(chain)
    if digits < e and tally.power(h, q**digits, n) != 1:
        raise tally.nothing("the element is not in the group of the base")
    steps = baby_steps(n, chain[-1], q, tally=tally) if chain and q <= LARGEST_BY_STEPS else None
    value = 0
    for index in range(digits):
        digit = h * tally.power(g, -value, n) % n if value else h
        if index < digits - 1:
            digit = tally.power(digit, q ** (digits - 1 - index), n)
        value += _digit(n, chain[-1], digit, q, steps, seed, executor, tally) * q**index
    return Logarithm(value, q**digits, 0)


def _powers_of_q(n: mpz, g: mpz, q: int, e: int, tally: Tally) -> list[mpz]:
    """g, g^q, g^(q^2), ... as long as they are not 1; the last has order q, as g^(q^e) is 1."""
    chain = [g] if g != 1 % n else []
    while chain and len(chain) < e:
        power = tally.power(chain[-1], q, n)
        if power == 1:
            break
        chain.append(power)
    return chain


def _digit(
    n: mpz,
    base: mpz,
    element: mpz,
    q: int,
    steps: Steps | None,
    seed: int,
    executor: Executor | None,
    tally: Tally,
) -> int:
    """The logarithm in the group of prime order q, by the table where there is one."""
    if steps is not None:
        return steps.search(element, q, tally).value
    return rho(n, base, element, q, seed=seed, executor=executor, tally=tally).value


def combined(one: Logarithm, other: Logarithm) -> Logarithm:
    """Both congruences, for coprime moduli (Chinese remainder theorem)."""
    lift = (other.value - one.value) * invert(one.modulus, other.modulus) % other.modulus
    return Logarithm(int(one.value + one.modulus * lift), one.modulus * other.modulus, 0)
