"""Lenstra's elliptic-curve method: one curve at a time, embedded, on GMP integers.

Curves: Suyama's family (torsion of order 12) restricted to those that are twisted Edwards curves
-x^2 + y^2 = 1 + d x^2 y^2, which have the torsion group Z/6 and, on average, one factor two in
three more (Bernstein, Birkner, Lange, "Starfish on strike", 2010; Barbulescu, Bos, Bouvier,
Kleinjung, Montgomery, "Finding ECM-friendly curves through a study of Galois properties", 2012;
from memory, the averages). In Suyama's terms u = s^2 - 5, v = 4 s the restriction is that
(s - 5)(s + 1)(3s - 5)(s + 3) be a square w^2. With s = 5 + 480/X, w = 480 Y/X^2 that is the
elliptic curve Y^2 = X^3 + 284 X^2 + 24960 X + 691200, whose point (-120, 240) has infinite order:
each multiple of it, taken modulo n, gives a curve and a point on it.
"""

import hashlib
from dataclasses import dataclass

import gmpy2
from gmpy2 import mpz

from auditor.search import edwards, stage_two
from auditor.search.divisor import Divisor, inverses
from auditor.search.weierstrass import Weierstrass

GENERATOR = (mpz(-120), mpz(240))


def parameter(number: int, b1: int, index: int) -> int:
    """The parameter of the curve ``index`` for ``number`` at ``b1``: 32 bits of a hash, at least 6.

    A search can thus be repeated, shared out and taken up again, and nobody who makes a number
    can choose it against curves drawn for all numbers.
    """
    text = f"elliptic curve {index} for {number:#x} with bound {b1}"
    return 6 + int.from_bytes(hashlib.sha256(text.encode()).digest()[:4], "big")


@dataclass(frozen=True, slots=True)
class EdwardsCurve:
    """-x^2 + y^2 = 1 + d x^2 y^2 modulo n, with a point on it."""

    n: mpz
    d: mpz
    x: mpz
    y: mpz


def suyama(n: mpz, k: int) -> tuple[mpz, mpz]:
    """Suyama's parameter s of the curve ``k``, which programs call sigma, and w; modulo n.

    Raises Divisor where the curve degenerates modulo a factor of n.
    """
    family = Weierstrass(n, mpz(284), mpz(24960))
    big_x, big_y = stage_two.times(family, GENERATOR, k)
    [inverse] = inverses([big_x], n)
    return (5 + 480 * inverse) % n, 480 * big_y * inverse * inverse % n


def curve(n: mpz, k: int) -> EdwardsCurve:
    """The curve of parameter ``k``; raises Divisor where it degenerates modulo a factor of n."""
    s, w = suyama(n, k)
    u, v = (s * s - 5) % n, 4 * s % n
    uuu, vvv = u * u * u % n, v * v * v % n
    quotient = [(s - 1) * (s + 5) * (s * s + 5), uuu + vvv, (v - u) ** 3 * (3 * u + v)]
    over_x, over_y, over_d = inverses([value % n for value in quotient], n)
    return EdwardsCurve(
        n,
        d=(16 * uuu * v * over_d - 1) % n,
        x=2 * s * w * over_x % n,
        y=(uuu - vvv) * over_y % n,
    )


def run_curve(n: int, b1: int, b2: int, k: int) -> int:
    """A divisor of ``n`` above 1, or 1, from the curve of parameter ``k``.

    Finds a prime factor when the order of the point modulo it is a product of prime powers not
    above ``b1`` and at most one prime up to ``b2``. The divisor may be ``n`` itself. ``n`` is odd,
    not divisible by 3.
    """
    modulus = mpz(n)
    try:
        drawn = curve(modulus, k)
        x, y, z = edwards.multiply((drawn.x, drawn.y), b1, modulus)
        common = gmpy2.gcd(x, modulus)
        if common == 1 and b2 > b1:
            common = stage_two.common_divisor(*_to_weierstrass(drawn.d, x, y, z, modulus), b1, b2)
    except Divisor as found:
        common = found.divisor
    return int(common)


def _to_weierstrass(d: mpz, x: mpz, y: mpz, z: mpz, n: mpz) -> tuple[Weierstrass, tuple[mpz, mpz]]:
    """The same curve and point as Y^2 = X^3 + a2 X^2 + a4 X.

    By the Montgomery curve B v^2 = u^3 + A u^2 + u with A = 2(a+d)/(a-d), B = 4/(a-d), a = -1,
    u = (1+y)/(1-y), v = u/x (Bernstein et al. 2008, theorem 3.2) and X = B u, Y = B^2 v.
    """
    over_difference, over_x, over_y = inverses([-1 - d, x, z - y], n)
    a, b = 2 * (d - 1) * over_difference % n, 4 * over_difference % n
    u = (z + y) * over_y % n
    v = u * z * over_x % n
    return Weierstrass(n, a * b % n, b * b % n), (b * u % n, b * b * v % n)
