"""The claim about a generator made from a seed and an index."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import gmpy2

from auditor.claims.base import Claim, Draw, require
from auditor.claims.origin_recipe import HASHES, hash_number, seed_bytes
from auditor.claims.reading import natural, only, truth

MOST_COUNTS = 256
"""FIPS 186-4, A.2.3 counts in 16 bits. Modulo a prime p a count fails with probability 1/q, so
more than a few are met only where p is no prime."""


@dataclass(frozen=True)
class CanonicalGenerator(Claim):
    """Whether ``g`` is what FIPS 186-4, A.2.3 makes of ``seed`` and ``index`` modulo ``n``.

    ``seed`` is domain_parameter_seed as bytes. The least count for which the power exceeds 1 is
    taken; none among the first 256 makes the statement false as well.
    """

    kind = "canonical-generator"

    n: int
    q: int
    g: int
    hash: str
    seed: bytes
    index: int
    canonical: bool

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "q": self.q,
            "g": self.g,
            "hash": self.hash,
            "seed": self.seed.hex(),
            "index": self.index,
            "canonical": self.canonical,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "CanonicalGenerator":
        only(statement, "n", "q", "g", "hash", "seed", "index", "canonical")
        only(certificate)
        if uses or statement["hash"] not in HASHES:
            raise ValueError("expected a known hash function, and no claim used")
        return cls(
            natural(statement["n"]),
            natural(statement["q"]),
            natural(statement["g"]),
            statement["hash"],
            bytes.fromhex(statement["seed"]),
            natural(statement["index"]),
            truth(statement["canonical"]),
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n > 2 and self.q > 0, "no group")
        require((self.n - 1) % self.q == 0, "q does not divide p - 1")
        require(0 <= self.index < 256, "the index is not one byte")
        made = canonical_generator(self.n, self.q, self.hash, self.seed, self.index)
        require((made == self.g) == self.canonical, "the construction says otherwise")


def generator_from_integers(
    n: int, q: int, g: int, name: int, seed: int, index: int
) -> CanonicalGenerator:
    """The claim about numbers that spell hash and seed as :class:`Recipe` does."""
    values = HASHES[name], seed_bytes(seed), index
    made = canonical_generator(n, q, *values)
    return CanonicalGenerator(n, q, g, *values, made == g)


def canonical_generator(p: int, q: int, name: str, seed: bytes, index: int) -> int | None:
    """FIPS 186-4, A.2.3; None where the first 256 counts lead to nothing."""
    for count in range(1, MOST_COUNTS + 1):
        data = seed + b"ggen" + bytes((index,)) + count.to_bytes(2, "big")
        g = int(gmpy2.powmod(hash_number(name, data), (p - 1) // q, p))
        if g >= 2:
            return g
    return None
