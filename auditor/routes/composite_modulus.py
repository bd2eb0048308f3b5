"""Routes against a composite modulus: by whoever knows its factors, and by an outsider."""

import math
from dataclasses import dataclass

from auditor.routes.base import Bound, Model, Unit, Work, floor_bits
from auditor.routes.sieve_models import nist_bits

ROUTE = "composite_modulus"
MAKER = Model("hardest logarithm modulo a prime factor", "model")
OUTSIDER = Model("factoring, then the hardest logarithm modulo a prime factor", "heuristic")
SOURCE = (
    "Chinese remainder theorem; Bach, Discrete logarithms and factoring, 1984; Lenstra, Ann. of "
    "Math. 126, 1987 (cited from memory)"
)


DEEPEST_SEARCH_BITS = 43.0
"""What the deepest search of this program costs, in multiplications modulo n: the curves for
factors of 50 digits and of all lengths below. Whatever it finds, anybody finds for that; most of
it, as neighbouring primes or a factor shared with another modulus, for far less."""


@dataclass(frozen=True, slots=True)
class Component:
    """A known prime factor p of the modulus, whatever its exponent.

    ``length`` is its bit length; ``logarithm_bits`` the least known work of a logarithm modulo
    p, None for that of the number field sieve; ``smooth_to`` the largest prime factor of p - 1
    where that is known; ``discovered`` says that a search of this program found p.
    """

    length: int
    logarithm_bits: float | None = None
    smooth_to: int | None = None
    discovered: bool = False

    @property
    def cost_bits(self) -> float:
        """Work of a logarithm modulo this prime."""
        sieve = nist_bits(self.length)
        return sieve if self.logarithm_bits is None else min(sieve, self.logarithm_bits)

    @property
    def discovery_bits(self) -> float:
        """Work of finding this prime as a factor, by curves, by the p - 1 method, or again."""
        ways = [elliptic_curve_bits(self.length)]
        if self.smooth_to is not None:
            ways.append(math.log2(1.44 * self.smooth_to))
        if self.discovered:
            ways.append(DEEPEST_SEARCH_BITS)
        return min(ways)


def elliptic_curve_bits(length: int) -> float:
    """Finding a prime factor of ``length`` bits: log2 of exp(sqrt(2 ln p ln ln p)), o(1) = 0.

    Unit: multiplications modulo n. Against the curve counts of the GMP-ECM table it is some 6
    bits too high at 216 bits. Source: Lenstra 1987 (cited from memory).
    """
    size = length * math.log(2)
    return math.sqrt(2 * size * max(0.0, math.log(size))) / math.log(2)


def composite_modulus(
    modulus_length: int, components: tuple[Component, ...], rest_length: int
) -> Work:
    """Logarithms modulo a composite number for its maker, who knows the factors.

    ``components`` are the distinct known primes modulo which the generator's order matters;
    ``rest_length`` the bit length of the composite rest, 0 when the factorization is complete.

    Attacker: designer. Formula: the largest work over the prime factors; a rest of L bits counts
    as a prime of L - 1 bits, and the figure is then an upper bound. Unit: symmetric-key trials.
    Precondition: the modulus is composite and no prime power. Source: Chinese remainder theorem.
    """
    explanation = (
        "The modulus is composite: whoever knows its factors takes one logarithm modulo each of "
        "them."
    )
    if rest_length:
        explanation = explanation[:-1] + ", and may have chosen factors for which that is easy."
    return Work(
        route=ROUTE,
        attacker="designer",
        bits=_hardest_bits(components, rest_length),
        unit=Unit.SYMMETRIC_TRIALS,
        model=MAKER,
        source=SOURCE,
        explanation=explanation,
        bound=_bound(rest_length),
        details=(
            ("modulus length", modulus_length),
            ("known prime factors", len(components)),
            ("unfactored length", rest_length),
        ),
    )


def composite_modulus_outsider(
    modulus_length: int, components: tuple[Component, ...], rest_length: int
) -> Work:
    """Logarithms modulo a composite number for somebody who must factor it first.

    Arguments as for :func:`composite_modulus`, the primes not restricted.

    Attacker: passive. Formula: the greater of the work of factoring and of the hardest logarithm;
    factoring takes out the primes that are cheapest to find, by elliptic curves, the p - 1 method
    or the search that found them here, and leaves the remaining length to the number field sieve.
    Unit: symmetric-key trials. Precondition: the modulus is composite. Source: Bach 1984; Lenstra
    1987.
    """
    factoring = _factoring_bits(modulus_length, components, rest_length)
    logarithm = _hardest_bits(components, rest_length)
    return Work(
        route=ROUTE,
        attacker="passive",
        bits=max(factoring, logarithm),
        unit=Unit.SYMMETRIC_TRIALS,
        model=OUTSIDER,
        source=SOURCE,
        explanation=(
            "The modulus is composite: an outsider factors it, then takes one logarithm modulo "
            "each factor."
        ),
        bound="at most" if factoring == DEEPEST_SEARCH_BITS > logarithm else _bound(rest_length),
        details=(
            ("modulus length", modulus_length),
            ("factoring", floor_bits(factoring)),
            ("smallest known factor length", min((c.length for c in components), default=0)),
        ),
    )


def _bound(rest_length: int) -> Bound:
    return "at most" if rest_length else "exact"


def _hardest_bits(components: tuple[Component, ...], rest_length: int) -> float:
    rest = nist_bits(rest_length - 1) if rest_length else 0.0
    return max([rest, *(component.cost_bits for component in components)])


def _factoring_bits(
    modulus_length: int, components: tuple[Component, ...], rest_length: int
) -> float:
    """The least, over how many of the cheapest primes are taken out one by one."""
    ordered = sorted(components, key=lambda component: component.discovery_bits)
    remaining = modulus_length
    best = nist_bits(modulus_length)
    for index, component in enumerate(ordered, start=1):
        found = component.discovery_bits
        remaining = max(rest_length, remaining - component.length + 1)
        composite_left = rest_length > 0 or len(ordered) - index > 1
        best = min(best, max(found, nist_bits(remaining) if composite_left else 0.0))
    return best
