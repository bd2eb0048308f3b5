"""Route: index calculus with the number field sieve, against the modulus itself."""

from auditor.routes.base import Unit, Work, floor_bits
from auditor.routes.sieve_models import (
    CALIBRATED_FROM,
    NIST,
    NIST_SOURCE,
    low_bits,
    nist_bits,
    rfc3766_symmetric_bits,
)

ROUTE = "number_field_sieve"


def number_field_sieve(length: int) -> Work:
    """Logarithms modulo a prime of ``length`` bits.

    Attacker: passive. Formula: the NIST comparable-strength formula; the low end is the
    asymptotic value less 14 bits. Unit: symmetric-key trials. Precondition: the modulus is
    prime; subgroup, generator and exponent width do not matter. Source: FIPS 140-3
    Implementation Guidance D.B. Below 512 bits the formula is not calibrated.
    """
    explanation = (
        f"Index calculus on the {length}-bit modulus; once done, every exponent in every "
        "subgroup is cheap."
    )
    details: tuple[tuple[str, int | float | str], ...] = (
        ("modulus length", length),
        ("low end", floor_bits(low_bits(length))),
        ("by the table of RFC 3766", floor_bits(max(0.0, rfc3766_symmetric_bits(length)))),
    )
    if length < CALIBRATED_FROM:
        explanation = explanation[:-1] + "; at this size it is practical."
        details += (("calibration", f"none below {CALIBRATED_FROM} bits; practical"),)
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=nist_bits(length),
        unit=Unit.SYMMETRIC_TRIALS,
        model=NIST,
        source=NIST_SOURCE,
        explanation=explanation,
        details=details,
    )
