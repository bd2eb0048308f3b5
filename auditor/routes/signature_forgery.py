"""Properties of (p, alpha) under which classical ElGamal signatures can be forged.

A signature of h is (r, s) with 0 < r < p and alpha^h = y^r r^s modulo p. Bleichenbacher's attack
needs r = c w with w = (p - 1) / b and b smooth, and a known relation between r and alpha: then
alpha^(w z) = y^w gives z modulo b by Pohlig-Hellman, and s follows from h - c w z. The private
key stays unknown, yet any h, or any h out of a few, can be signed. Diffie-Hellman and DSA are
not affected; the figures are listed apart and never enter a minimum.

Source: Bleichenbacher, Generating ElGamal signatures without knowing the secret key, EUROCRYPT
1996 (general form cited from memory, proof worked again); Khadir, arXiv 1301.2907.
"""

from dataclasses import dataclass
from enum import StrEnum
from math import gcd

from auditor.routes.base import Attacker
from auditor.routes.factors import Factors
from auditor.routes.pohlig_hellman import pohlig_hellman_bits

LARGEST_DIVISOR = 2**20
MOST_DIVISORS = 4096
HIGHEST_POWER = 64


class Condition(StrEnum):
    """Why signatures may be forged."""

    POWER_OF_DIVISOR = "alpha is a power of a small divisor of p - 1"
    SHARED_FACTOR = "a small power of alpha shares all but a smooth part with p - 1"
    UNKNOWN_ORIGIN = "alpha has no verified origin"


@dataclass(frozen=True, slots=True)
class Forgery:
    """A condition that holds, and what a forgery costs.

    ``bits`` is log2 of the group multiplications spent once per public key; ``subgroup`` is b
    and ``r`` the first half of the forged signatures. The relation is r^power = alpha for
    POWER_OF_DIVISOR and r = alpha^power for SHARED_FACTOR, up to the sign when ``negative``. For
    UNKNOWN_ORIGIN there is no relation that anybody else could know.
    """

    condition: Condition
    attacker: Attacker
    bits: float
    explanation: str
    subgroup: int | None = None
    r: int | None = None
    power: int | None = None
    negative: bool = False


def signature_forgery(
    p: int, alpha: int, factors: Factors, budget_bits: float, origin_verified: bool
) -> tuple[Forgery, ...]:
    """The conditions that hold for a prime ``p`` and base ``alpha``, 1 < alpha < p.

    ``factors`` is the factorization of p - 1 as far as known; an unfactored rest makes costs
    upper bounds, and divisors in it are not tried. Reported are forgeries that cost at most
    2^budget_bits. Looked at are the 4096 smallest known divisors up to 2^20 of p - 1 and powers
    of alpha up to the 64th; other relations may exist. Whoever chose alpha without showing how
    may know one, for any p: alpha = (c w)^k with a secret k looks like any other base.
    """
    found = (
        _power_of_divisor(p, alpha, factors),
        _shared_factor(p, alpha, factors),
        None if origin_verified else _unknown_origin(),
    )
    return tuple(forgery for forgery in found if forgery and forgery.bits <= budget_bits)


def _power_of_divisor(p: int, alpha: int, factors: Factors) -> Forgery | None:
    """alpha = +-a^(+-k) with a | p - 1: r = (p - 1) / a = -a^-1 and b = a. The cheapest a."""
    inverse = pow(alpha, -1, p)
    targets = {alpha: 1, p - alpha: 1, inverse: -1, p - inverse: -1}
    found = []
    for divisor in _divisors(factors):
        power = 1
        for k in range(1, HIGHEST_POWER + 1):
            power = power * divisor % p
            if power in targets:
                found.append(_divisor_forgery(p, alpha, factors, divisor, k * targets[power]))
                break
    return min(found, key=lambda forgery: (forgery.bits, forgery.r), default=None)


def _divisor_forgery(p: int, alpha: int, factors: Factors, divisor: int, k: int) -> Forgery:
    r = (p - 1) // divisor
    return Forgery(
        condition=Condition.POWER_OF_DIVISOR,
        attacker="passive",
        bits=pohlig_hellman_bits(factors.restricted(divisor)),
        explanation=(
            f"The base is, up to sign, a power of {divisor}, which divides p - 1: signatures "
            "can be forged without the private key."
        ),
        subgroup=divisor,
        r=r,
        power=-k,
        negative=pow(r, -k, p) != alpha,
    )


def _shared_factor(p: int, alpha: int, factors: Factors) -> Forgery | None:
    """r = +-alpha^(+-j) with w = gcd(r, p - 1) and b = (p - 1) / w. The cheapest b, if any."""
    found = []
    for base, direction in ((alpha, 1), (pow(alpha, -1, p), -1)):
        power = 1
        for j in range(1, HIGHEST_POWER + 1):
            power = power * base % p
            for r, negative in ((power, False), (p - power, True)):
                if r not in (1, p - 1):
                    found.append(_shared_forgery(p, factors, r, direction * j, negative))
    return min(found, key=lambda forgery: (forgery.bits, forgery.subgroup), default=None)


def _shared_forgery(p: int, factors: Factors, r: int, power: int, negative: bool) -> Forgery:
    subgroup = (p - 1) // gcd(r, p - 1)
    sign = "-" if negative else ""
    return Forgery(
        condition=Condition.SHARED_FACTOR,
        attacker="passive",
        bits=pohlig_hellman_bits(factors.restricted(subgroup)),
        explanation=(
            f"{sign}alpha^{power} and p - 1 share so large a factor that signatures can be forged "
            f"after logarithms in a subgroup of {subgroup.bit_length()}-bit order."
        ),
        subgroup=subgroup,
        r=r,
        power=power,
        negative=negative,
    )


def _unknown_origin() -> Forgery:
    return Forgery(
        condition=Condition.UNKNOWN_ORIGIN,
        attacker="designer",
        bits=0.0,
        explanation=(
            "Nothing shows how the base was chosen, so a trapdoor with which its maker forges "
            "signatures cannot be excluded; require a base derived from a public seed."
        ),
    )


def _divisors(factors: Factors) -> list[int]:
    """The smallest known divisors of p - 1 from 2 to 2^20, at most 4096, ascending."""
    divisors = [1]
    for prime, exponent in factors.known:
        powers = [prime**e for e in range(exponent + 1) if prime**e <= LARGEST_DIVISOR]
        products = sorted(d * power for d in divisors for power in powers)
        divisors = [d for d in products if d <= LARGEST_DIVISOR][: MOST_DIVISORS + 1]
    return divisors[1:]
