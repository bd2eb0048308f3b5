"""What published tables say about sizes: the comparable strengths of NIST."""

from dataclasses import dataclass

STRENGTHS = (
    (1024, 80),
    (2048, 112),
    (3072, 128),
    (4096, 152),
    (6144, 176),
    (7680, 192),
    (8192, 200),
    (15360, 256),
)
"""Modulus length and strength: SP 800-57 Part 1 Rev. 5, Table 2 (1024, 2048, 3072, 7680, 15360)
joined with the maximum strengths of SP 800-56A Rev. 3, Appendix D (2048 to 8192)."""


def modulus_strength(length: int) -> int:
    """Strength of the largest listed length that is not above ``length``; 0 below the tables."""
    return max((strength for listed, strength in STRENGTHS if listed <= length), default=0)


@dataclass(frozen=True, slots=True)
class StandardFigure:
    """Strengths in bits by the tables, of each component that is known.

    A subgroup and an exponent count half their length: SP 800-57 Part 1 Rev. 5, Table 2 (the N of
    the pair L, N); SP 800-56A Rev. 3, 5.6.1.1.1 (an exponent of at least twice the strength).
    """

    modulus: int | None
    subgroup: int | None
    exponent: int | None

    @property
    def least_known(self) -> int | None:
        """The least of the known components; None when none is."""
        known = (self.modulus, self.subgroup, self.exponent)
        return min((bits for bits in known if bits is not None), default=None)

    @property
    def complete(self) -> bool:
        """Whether all three components are known."""
        return None not in (self.modulus, self.subgroup, self.exponent)


def standard_figure(
    modulus_length: int | None, largest_prime_length: int | None, exponent_width: int | None
) -> StandardFigure:
    """The components by the tables; None for what is not known.

    ``modulus_length`` is that of a prime modulus, ``largest_prime_length`` that of the largest
    prime dividing ord(g), ``exponent_width`` the narrowest declared width.
    """
    return StandardFigure(
        None if modulus_length is None else modulus_strength(modulus_length),
        None if largest_prime_length is None else largest_prime_length // 2,
        None if exponent_width is None else exponent_width // 2,
    )


def standard_bits(modulus_length: int, largest_prime_length: int, exponent_width: int) -> int:
    """The strength that the tables give: the least over modulus, subgroup and exponent."""
    return min(modulus_strength(modulus_length), largest_prime_length // 2, exponent_width // 2)
