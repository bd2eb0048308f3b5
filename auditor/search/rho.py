"""Pollard's rho method in Brent's version, and Fermat's method for close factors."""

import gmpy2
from gmpy2 import mpz

BATCH = 128


def rho(n: int, iterations: int, constant: int = 1) -> int:
    """A divisor of odd composite ``n`` above 1, or 1, by at most about ``iterations`` steps.

    Iterates x -> x^2 + constant from 2. A prime factor r shows after about 1.25 to 2 sqrt(r)
    steps. Differences are multiplied up ``BATCH`` at a time; if a batch swallows all of n it is
    gone through again step by step. The divisor may be ``n`` itself.
    Source: R. P. Brent, "An improved Monte Carlo factorization algorithm", BIT 20, 1980.
    """
    modulus = mpz(n)
    here = mpz(2)
    steps, distance = 0, 1
    while steps < iterations:
        anchor = here
        for start in range(0, distance, BATCH):
            mark, product = here, mpz(1)
            for _ in range(min(BATCH, distance - start)):
                here = (here * here + constant) % modulus
                product = product * (anchor - here) % modulus
            steps += min(BATCH, distance - start)
            common = gmpy2.gcd(product, modulus)
            if common == modulus:
                return _step_by_step(anchor, mark, constant, modulus)
            if common > 1:
                return int(common)
            if steps >= iterations:
                return 1
        distance *= 2
    return 1


def _step_by_step(anchor: mpz, here: mpz, constant: int, n: mpz) -> int:
    while True:
        here = (here * here + constant) % n
        common = gmpy2.gcd(anchor - here, n)
        if common > 1:
            return int(common)


def fermat(n: int, steps: int) -> int:
    """A proper divisor of odd ``n``, or 1: looks for n = a^2 - b^2 at the ``steps`` least a.

    Finds factors p, q with (p - q)^2 / (8 sqrt(n)) < steps (Fermat, letter of 1643).
    """
    a = gmpy2.isqrt(mpz(n) - 1) + 1
    square = a * a - n
    for _ in range(steps):
        if gmpy2.is_square(square):
            return int(a - gmpy2.isqrt(square))
        square += 2 * a + 1
        a += 1
    return 1
