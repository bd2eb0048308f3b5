"""What a precomputation costs once and each target afterwards, when many share the parameters.

Shown beside the routes, for judging how attractive a common target is; never part of a minimum.
"""

import math
from dataclasses import dataclass

from auditor.routes.base import Model, Unit, log2_sum
from auditor.routes.sieve_models import NIST, NIST_SOURCE, individual_bits, nist_bits


@dataclass(frozen=True, slots=True)
class SharedFigures:
    """``once_bits`` for the precomputation, ``each_bits`` for every target after it, both log2."""

    once_bits: float
    each_bits: float
    unit: Unit
    model: Model
    source: str
    explanation: str

    def amortised_bits(self, targets: int) -> float:
        """log2 of the work per target when the precomputation serves ``targets`` of them."""
        per_target = math.log2(targets)
        return log2_sum(self.once_bits, per_target + self.each_bits) - per_target


def shared_sieve(length: int) -> SharedFigures:
    """The number field sieve once for a prime of ``length`` bits, then single logarithms.

    Unit: symmetric-key trials. Formula: the NIST formula once; L[1/3, 1.232] each, cited from
    memory. Source: Adrian et al., Imperfect forward secrecy, CCS 2015.
    """
    return SharedFigures(
        once_bits=nist_bits(length),
        each_bits=individual_bits(length),
        unit=Unit.SYMMETRIC_TRIALS,
        model=NIST,
        source=f"{NIST_SOURCE}; Adrian et al., Imperfect forward secrecy, CCS 2015",
        explanation=(
            "One computation for the modulus serves against everybody who uses it; after it, "
            "each exponent costs little."
        ),
    )


TABLES = Model("precomputed table of distinguished points, cube-root size", "model")
TABLES_SOURCE = "Bernstein and Lange, Computing small discrete logarithms faster, INDOCRYPT 2012"


def shared_table(order_bits: float) -> SharedFigures:
    """A table for one generator of prime order 2^order_bits, of as many entries as its cube root.

    Unit: group multiplications. Formula: 1.24 q^(2/3) once, 1.77 q^(1/3) each. Source: Bernstein
    and Lange 2012.
    """
    return _table(order_bits, 1.24, 1.77, "subgroup")


def shared_interval_table(width: float) -> SharedFigures:
    """The same for exponents of ``width`` bits: 1.21 W^(2/3) once, 1.93 W^(1/3) each."""
    return _table(width, 1.21, 1.93, "exponent range")


def _table(bits: float, once: float, each: float, what: str) -> SharedFigures:
    return SharedFigures(
        once_bits=math.log2(once) + bits * 2 / 3,
        each_bits=math.log2(each) + bits / 3,
        unit=Unit.GROUP_MULTIPLICATIONS,
        model=TABLES,
        source=TABLES_SOURCE,
        explanation=(
            f"A table for the generator, as large as the cube root of the {what}, serves against "
            "everybody who uses it."
        ),
    )
