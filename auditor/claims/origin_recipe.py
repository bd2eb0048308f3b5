"""What an owner says the numbers were made from, in a form that names integers and nothing else.

A question can carry only integers, so a recipe has a spelling as integers; a claim shows it as
text. Bytes of seeds become an integer behind a leading byte 1, which keeps leading zeros.
"""

import hashlib
from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

from auditor.claims.reading import natural, only

PROBABLE = "fips186-4-probable-primes"
PROVABLE = "fips186-4-provable-primes"
FIPS186_2 = "fips186-2"
METHODS = (PROBABLE, PROVABLE, FIPS186_2)
SEEDS_AND_COUNTERS = {PROBABLE: (1, 1), PROVABLE: (3, 2), FIPS186_2: (1, 1)}
"""How many of each: the seed and counter; the first seed, those of p and of q, and the counters
of p and of q."""

HASH_LENGTHS: Mapping[str, int] = MappingProxyType(
    {
        "sha1": 160,
        "sha224": 224,
        "sha256": 256,
        "sha384": 384,
        "sha512": 512,
        "sha512-224": 224,
        "sha512-256": 256,
    }
)
"""The hash functions of FIPS 180-4 with the lengths of their digests in bits."""
HASHES = tuple(HASH_LENGTHS)


def hash_bytes(name: str, data: bytes) -> bytes:
    """The digest of ``data``; ``name`` is one of :data:`HASHES`."""
    return hashlib.new(name.replace("-", "_"), data, usedforsecurity=False).digest()


def hash_number(name: str, data: bytes) -> int:
    """The digest of ``data`` as a big-endian integer."""
    return int.from_bytes(hash_bytes(name, data), "big")


@dataclass(frozen=True, slots=True)
class Seed:
    """A bit string of whole bytes that counts: seed + k is taken modulo 2^length and written with
    as many bytes again."""

    data: bytes

    @property
    def bits(self) -> int:
        """Its length."""
        return 8 * len(self.data)

    @property
    def value(self) -> int:
        """The big-endian integer."""
        return int.from_bytes(self.data, "big")

    def plus(self, k: int) -> bytes:
        """seed + k."""
        return ((self.value + k) % (1 << self.bits)).to_bytes(len(self.data), "big")

    def hashed(self, name: str, k: int) -> int:
        """Hash(seed + k) as an integer."""
        return hash_number(name, self.plus(k))

    def sum(self, name: str, k: int, count: int) -> int:
        """The sum over i < count of Hash(seed + k + i) 2^(i outlen)."""
        outlen = HASH_LENGTHS[name]
        return sum(self.hashed(name, k + i) << (i * outlen) for i in range(count))


@dataclass(frozen=True, slots=True)
class Recipe:
    """Method, hash, seeds and counters; ValueError for what no method has."""

    method: str
    hash: str
    seeds: tuple[bytes, ...]
    counters: tuple[int, ...]

    def __post_init__(self) -> None:
        if self.method not in METHODS or self.hash not in HASHES:
            raise ValueError("an unknown method or hash function")
        if SEEDS_AND_COUNTERS[self.method] != (len(self.seeds), len(self.counters)):
            raise ValueError("not the seeds and counters of the method")
        if self.method == FIPS186_2 and self.hash != "sha1":
            raise ValueError("FIPS 186-2 hashes with SHA-1")
        if any(counter < 0 for counter in self.counters):
            raise ValueError("a negative counter")

    @property
    def domain_seed(self) -> bytes:
        """domain_parameter_seed: the seed, or for provable primes the three seeds in a row."""
        return b"".join(self.seeds)

    def integers(self) -> tuple[int, ...]:
        """The spelling as integers."""
        first = METHODS.index(self.method), HASHES.index(self.hash)
        return (*first, *map(seed_integer, self.seeds), *self.counters)

    @classmethod
    def from_integers(cls, numbers: tuple[int, ...]) -> "Recipe":
        """The inverse of :meth:`integers`."""
        method = METHODS[numbers[0]]
        seeds, counters = SEEDS_AND_COUNTERS[method]
        return cls(
            method,
            HASHES[numbers[1]],
            tuple(map(seed_bytes, numbers[2 : 2 + seeds])),
            tuple(numbers[2 + seeds : 2 + seeds + counters]),
        )

    def record(self) -> dict[str, Any]:
        """As it stands in a claim."""
        return {
            "method": self.method,
            "hash": self.hash,
            "seeds": [seed.hex() for seed in self.seeds],
            "counters": list(self.counters),
        }

    @classmethod
    def read(cls, record: Mapping[str, Any]) -> "Recipe":
        """The inverse of :meth:`record`; ValueError for anything malformed."""
        only(record, "method", "hash", "seeds", "counters")
        if not isinstance(record["seeds"], list) or not isinstance(record["counters"], list):
            raise ValueError("expected lists of seeds and of counters")
        return cls(
            record["method"],
            record["hash"],
            tuple(map(bytes.fromhex, record["seeds"])),
            tuple(map(natural, record["counters"])),
        )


def seed_integer(seed: bytes) -> int:
    """The bytes behind a leading byte 1."""
    return int.from_bytes(b"\x01" + seed, "big")


def seed_bytes(number: int) -> bytes:
    """The inverse of :func:`seed_integer`."""
    return number.to_bytes((number.bit_length() + 7) // 8, "big")[1:]
