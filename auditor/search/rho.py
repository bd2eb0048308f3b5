"""Pollard's rho method in Brent's version, and Fermat's method for close factors."""

import gmpy2
from gmpy2 import mpz

BATCH = 128


def rho(n: int, iterations: int, constant: int = 1) -> list[int]:
    """Divisors of odd ``n`` above 1, coprime to what they leave of n, by at most about
    ``iterations`` steps; a divisor may be ``n`` itself.

    Iterates x -> x^2 + constant from 2. A prime factor r shows after about 1.25 to 2 sqrt(r)
    steps. Differences are multiplied up ``BATCH`` at a time; a batch that shares a factor with n
    is gone through again step by step.
    Source: R. P. Brent, "An improved Monte Carlo factorization algorithm", BIT 20, 1980.
    """
    found: list[int] = []
    rest, here = mpz(n), mpz(2)
    steps, distance = 0, 1
    while True:
        anchor = here
        for start in range(0, distance, BATCH):
            size = min(BATCH, distance - start)
            mark, product = here, mpz(1)
            for _ in range(size):
                here = (here * here + constant) % rest
                product = product * (anchor - here) % rest
            steps += size
            if gmpy2.gcd(product, rest) > 1:
                divisors, rest = _step_by_step(anchor, mark, constant, size, rest)
                found += divisors
                here %= rest
            if steps >= iterations or rest == 1:
                return found
        distance *= 2


def _step_by_step(
    anchor: mpz, here: mpz, constant: int, size: int, n: mpz
) -> tuple[list[int], mpz]:
    """The divisors that one batch shows, and what they leave of n."""
    divisors = []
    for _ in range(size):
        here = (here * here + constant) % n
        common = gmpy2.gcd(anchor - here, n)
        if common > 1:
            divisors.append(int(common))
            n //= common
    return divisors, n


def fermat(n: int, steps: int) -> list[int]:
    """Both factors of odd ``n`` = a^2 - b^2, or nothing, from the ``steps`` least possible a.

    Finds factors p, q with (p - q)^2 / (8 sqrt(n)) < steps (Fermat, letter of 1643).
    """
    a = gmpy2.isqrt(mpz(n) - 1) + 1
    square = a * a - n
    for _ in range(steps):
        if gmpy2.is_square(square):
            b = gmpy2.isqrt(square)
            return [int(a - b), int(a + b)]
        square += 2 * a + 1
        a += 1
    return []
