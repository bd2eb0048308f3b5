"""The primality tests that checks rely on.

Sources: Miller-Rabin: Rabin 1980, Monier 1980 (a composite passes for at most a quarter of the
bases). Baillie-PSW: Baillie and Wagstaff 1980, Pomerance, Selfridge and Wagstaff 1980, by GMP
integers through gmpy2. First twelve primes as bases decide below 318665857834031151167461:
Sorenson and Webster, "Strong pseudoprimes to twelve prime bases", Math. Comp. 86, 2017 (from
memory; the bound and its least composite are tested).
"""

import gmpy2

from auditor.claims.base import Draw

DETERMINISTIC_BELOW = 2**64
TWELVE_PRIMES = (2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37)


def passes_strong_test(n: int, base: int) -> bool:
    """Whether odd ``n`` > 2 passes the strong (Miller-Rabin) test to ``base``.

    A base that is 0 modulo n says nothing and passes.
    """
    base %= n
    if base == 0:
        return True
    twos = gmpy2.bit_scan1(n - 1) or 0
    power = gmpy2.powmod(base, (n - 1) >> twos, n)
    if power in (1, n - 1):
        return True
    for _ in range(twos - 1):
        power = power * power % n
        if power == n - 1:
            return True
    return False


def is_prime_below_2_64(n: int) -> bool:
    """Whether ``n`` < 2^64 is prime: decided, by strong tests to the first twelve primes.

    Raises ValueError for larger numbers.
    """
    if n >= DETERMINISTIC_BELOW:
        raise ValueError("the twelve bases are used below 2^64 only")
    if n < 2:
        return False
    if n in TWELVE_PRIMES:
        return True
    if any(n % prime == 0 for prime in TWELVE_PRIMES):
        return False
    return all(passes_strong_test(n, base) for base in TWELVE_PRIMES)


def is_probable_prime(n: int, rounds: int, draw: Draw) -> bool:
    """Baillie-PSW and ``rounds`` strong tests to bases from ``draw``.

    False is certain. A composite chosen by anybody who cannot foresee ``draw`` passes with
    probability at most 4^-rounds.
    """
    if n < 4:
        return n in (2, 3)
    if n % 2 == 0 or not gmpy2.is_strong_bpsw_prp(n):
        return False
    return all(passes_strong_test(n, 2 + draw(n - 3)) for _ in range(rounds))
