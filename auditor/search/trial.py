"""Prime factors up to a bound, by greatest common divisors with products of primes."""

from functools import lru_cache

import gmpy2
from gmpy2 import mpz

from auditor.search.primes import in_batches, primes_up_to, product

BATCH = 1_000


@lru_cache(maxsize=2)
def _batches(bound: int) -> tuple[tuple[mpz, tuple[int, ...]], ...]:
    """The primes up to ``bound`` in batches, each with its product."""
    return tuple((product(batch), tuple(batch)) for batch in in_batches(primes_up_to(bound), BATCH))


def small_factors(m: int, bound: int) -> list[int]:
    """The primes up to ``bound`` that divide ``m`` > 0, in order."""
    number = mpz(m)
    factors = []
    for product_of_batch, batch in _batches(bound):
        common = gmpy2.gcd(number, product_of_batch)
        if common > 1:
            factors += [prime for prime in batch if common % prime == 0]
    return factors
