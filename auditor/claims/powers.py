"""Powers modulo a prime whose value Fermat and Euler give away."""

import gmpy2


def prime_modulus_power(a: int, e: int, n: int) -> int:
    """a^e modulo ``n``, a prime that does not divide ``a``; e >= 0.

    a^(n-1) = 1 (Fermat), and a^((n-1)/2) is the Legendre symbol of a, -1 taken as n - 1 (Euler's
    criterion): an exponent that is a multiple of (n-1)/2 needs no exponentiation.
    """
    if not euler_decides(n, e):
        return int(gmpy2.powmod(a, e, n))
    if e % (n - 1) == 0:
        return 1
    return int(gmpy2.jacobi(a, n)) % n


def euler_decides(n: int, e: int) -> bool:
    """Whether the exponent is such a multiple, for an odd ``n`` above 2."""
    return n > 2 and n % 2 == 1 and e % (n // 2) == 0
