"""Route: a modulus that is a power of a prime is no stronger than the prime."""

from auditor.routes.base import Model, Unit, Work
from auditor.routes.sieve_models import NIST, NIST_SOURCE, nist_bits

ROUTE = "prime_power"
LIFTING = Model("logarithms modulo powers of 2 bit by bit", "exact")
LIFTING_SOURCE = "structure of the units modulo 2^k: every unit is plus or minus a power of 5"
SOURCE = f"{NIST_SOURCE}; p-adic logarithms: Bach 1984, Teske (cited from memory)"


def prime_power(prime: int, exponent: int) -> Work:
    """Logarithms modulo ``prime`` to the power ``exponent`` (at least 2).

    Attacker: passive. Formula: that of the number field sieve for ``prime``; 0 for a power of 2.
    The part of the logarithm modulo prime^(exponent - 1) takes polynomial time by p-adic
    logarithms. Unit: symmetric-key trials. Precondition: the modulus is that power. Source: the
    structure (Z/p^k)* = C_(p-1) x C_(p^(k-1)); FIPS 140-3 Implementation Guidance D.B.
    """
    if prime == 2:
        return Work(
            route=ROUTE,
            attacker="passive",
            bits=0.0,
            unit=Unit.SYMMETRIC_TRIALS,
            model=LIFTING,
            source=LIFTING_SOURCE,
            explanation="Modulo a power of 2 every logarithm is read off bit by bit.",
            details=(("power", exponent),),
        )
    length = prime.bit_length()
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=nist_bits(length),
        unit=Unit.SYMMETRIC_TRIALS,
        model=NIST,
        source=SOURCE,
        explanation=(
            f"The modulus is a power of a {length}-bit prime and only as strong as that prime."
        ),
        details=(("prime length", length), ("power", exponent)),
    )
