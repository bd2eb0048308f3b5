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


class Condition(StrEnum):
    """Why signatures may be forged."""

    POWER_OF_DIVISOR = "alpha is a power of a small divisor of p - 1"
    SHARED_FACTOR = "a small power of alpha shares all but a smooth part with p - 1"
    UNKNOWN_ORIGIN = "alpha has no verified origin"


@dataclass(frozen=True, slots=True)
class Forgery:
    """A condition that holds, and what a forgery costs.

    ``bits`` is log2 of the group multiplications spent once per public key; ``subgroup`` is b
    and ``r`` the first half of the forged signatures. For UNKNOWN_ORIGIN there is no relation that
    anybody but the maker could know, and both are None.
    """

    condition: Condition
    attacker: Attacker
    bits: float
    explanation: str
    subgroup: int | None = None
    r: int | None = None


def power_of_divisor(p: int, r: int, factors: Factors) -> Forgery:
    """alpha = +-a^(+-k) with a | p - 1 and k small, where ``r`` = (p - 1) / a = -1/a: b is a.

    ``factors`` is the factorization of p - 1 as far as known; an unfactored rest makes the cost
    an upper bound.
    """
    subgroup = (p - 1) // r
    return Forgery(
        condition=Condition.POWER_OF_DIVISOR,
        attacker="passive",
        bits=pohlig_hellman_bits(factors.restricted(subgroup)),
        explanation=(
            f"The base is, up to sign, a power of {subgroup}, which divides p - 1: signatures "
            "can be forged without the private key."
        ),
        subgroup=subgroup,
        r=r,
    )


def shared_factor(p: int, r: int, factors: Factors) -> Forgery:
    """``r`` = +-alpha^(+-k) with k small: w = gcd(r, p - 1) and b = (p - 1) / w."""
    subgroup = (p - 1) // gcd(r, p - 1)
    return Forgery(
        condition=Condition.SHARED_FACTOR,
        attacker="passive",
        bits=pohlig_hellman_bits(factors.restricted(subgroup)),
        explanation=(
            "A small power of the base and p - 1 share so large a factor that signatures can be "
            f"forged after logarithms in a subgroup of {subgroup.bit_length()}-bit order."
        ),
        subgroup=subgroup,
        r=r,
    )


def unknown_origin() -> Forgery:
    """Whoever chose alpha without showing how may know a relation, for any p: alpha = (c w)^k with
    a secret k looks like any other base."""
    return Forgery(
        condition=Condition.UNKNOWN_ORIGIN,
        attacker="designer",
        bits=0.0,
        explanation=(
            "Nothing shows how the base was chosen, so a trapdoor with which its maker forges "
            "signatures cannot be excluded; require a base derived from a public seed."
        ),
    )
