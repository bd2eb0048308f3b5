"""Published cost formulas of the number field sieve and of its special variant, in bits.

All are functions of the modulus length n in bits (a real where log2 of the modulus is meant),
written with A = n ln 2 and the common shape L(c) = c A^(1/3) (ln A)^(2/3), o(1) set to 0.
None is calibrated below 512 bits.
"""

import math

from auditor.routes.base import Model

GENERAL = (64 / 9) ** (1 / 3)
SPECIAL = (32 / 9) ** (1 / 3)
INDIVIDUAL = 1.232
"""Constant of one logarithm after the precomputation: Barbulescu 2013, as quoted by Adrian et
al., CCS 2015 (cited from memory)."""

CALIBRATED_FROM = 512
"""Length from which record computations exist to compare with."""

NIST_OFFSET = 4.69
"""Taken from the exponent by the NIST formula, so that 1024 bits come out at 80."""

NIST = Model("NIST comparable-strength formula", "model")
NIST_SOURCE = "FIPS 140-3 Implementation Guidance D.B; SP 800-56B Rev. 2, Appendix D"


def _exponent(length: float, constant: float) -> float:
    """c A^(1/3) (ln A)^(2/3), a natural logarithm; 0 where ln A is not positive."""
    size = length * math.log(2)
    if size <= 1:
        return 0.0
    return constant * math.cbrt(size) * math.cbrt(math.log(size)) ** 2


def asymptotic_bits(length: float, constant: float = GENERAL) -> float:
    """L_p[1/3, constant] with o(1) = 0. It gives the shape; as a cost it is far too high."""
    return _exponent(length, constant) / math.log(2)


def nist_bits(length: float) -> float:
    """Symmetric-key trials by the NIST formula (constants 1.923 and 4.69).

    Source: FIPS 140-3 Implementation Guidance D.B; SP 800-56B Rev. 2, Appendix D.
    """
    return max(0.0, (_exponent(length, 1.923) - NIST_OFFSET) / math.log(2))


def rfc3766_operation_bits(length: float) -> float:
    """Simple operations by the formula of RFC 3766, section 2 (constants 0.02 and 1.92)."""
    return math.log2(0.02) + _exponent(length, 1.92) / math.log(2)


def rfc3766_symmetric_bits(length: float) -> float:
    """Symmetric-key trials as in the table of RFC 3766, section 5.

    The table follows from the formula with the exact constant and 300 operations a trial, the
    figure of section 4; this reading reproduces its seven rows within 0.02 bit.
    """
    return math.log2(0.02 / 300) + asymptotic_bits(length)


def low_bits(length: float) -> float:
    """Symmetric-key trials, low end: the asymptotic value less 14 bits.

    The calibration of the ECRYPT reports and of RFC 7919, Appendix A (cited from memory). It is
    1 to 3 bits above what the 795-bit record cost, where the NIST formula is 8 to 10 above.
    """
    return max(0.0, asymptotic_bits(length) - 14)


def special_bits(length: float) -> float:
    """Symmetric-key trials of the special sieve, with the NIST offset so that the two compare.

    Against the 1024-bit computation of Fried et al. 2017 it is 2 to 4 bits too high.
    """
    return max(0.0, (_exponent(length, SPECIAL) - NIST_OFFSET) / math.log(2))


def individual_bits(length: float) -> float:
    """One logarithm after the precomputation for the modulus."""
    return asymptotic_bits(length, INDIVIDUAL)
