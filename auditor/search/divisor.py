"""Inverses modulo a number whose factors are sought: a failure is a find."""

from collections.abc import Sequence

import gmpy2
from gmpy2 import mpz


class Divisor(Exception):
    """A common divisor of the modulus and a number that should have been invertible."""

    def __init__(self, divisor: mpz) -> None:
        super().__init__(divisor)
        self.divisor = divisor


def inverses(numbers: Sequence[mpz], n: mpz) -> list[mpz]:
    """The inverses modulo ``n``, by one inversion and three products a number (Montgomery 1987).

    Raises Divisor with gcd(product, n) if that is not 1.
    """
    products = [mpz(1), *numbers[:1]]
    for number in numbers[1:]:
        products.append(products[-1] * number % n)
    try:
        rest = gmpy2.invert(products[-1], n)
    except ZeroDivisionError:
        raise Divisor(gmpy2.gcd(products[-1], n)) from None
    products.pop()
    inverted = []
    for number in reversed(numbers[1:]):
        inverted.append(rest * products.pop() % n)
        rest = rest * number % n
    if numbers:
        inverted.append(rest)
    inverted.reverse()
    return inverted
