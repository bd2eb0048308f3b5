"""The overview of a run: how the sets stand, and what they share with each other.

A pure function of the sets, the declarations and the digests of the files. Common factors come from
greatest common divisors (:mod:`auditor.search.batch_gcd`), which is arithmetic and no search: who
checks a report computes them again.
"""

import hashlib
import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from auditor.declaration import Declaration
from auditor.encoding import plain
from auditor.search.batch_gcd import batch_gcd

POSITIONS = ("hold", "open", "conditions", "no objection")

Record = dict[str, Any]


def overview(
    positions: Sequence[str],
    declarations: Sequence[Declaration],
    inputs: Iterable[Mapping[str, Any]],
) -> Record:
    """Counts over all sets, and what several of them have in common.

    ``positions`` are those of the sets of ``declarations``; ``inputs`` the files that were read, of
    which those with a role hold policy and no parameters.
    """
    users: dict[int, list[Declaration]] = {}
    for declaration in declarations:
        users.setdefault(declaration.modulus, []).append(declaration)
    return {
        "sets": len(positions),
        "positions": {position: positions.count(position) for position in POSITIONS},
        "moduli": [_modulus(n, sets) for n, sets in users.items()],
        "shared_factors": _shared_factors(list(users)),
        "copies": _copies(declarations),
        "equal_files": _equal_files(inputs),
    }


def modulus_digest(modulus: int) -> str:
    """SHA-256 of the modulus written in lower-case hex, 0x included."""
    return hashlib.sha256(hex(modulus).encode()).hexdigest()


def _modulus(modulus: int, sets: Sequence[Declaration]) -> Record:
    return {
        "digest": modulus_digest(modulus),
        "length": modulus.bit_length(),
        "sets": [declaration.identity for declaration in sets],
        "paths": list(dict.fromkeys(declaration.place.path for declaration in sets)),
    }


def _shared_factors(moduli: Sequence[int]) -> list[Record]:
    """What different moduli have in common, smallest first, with all moduli that it divides.

    The factors are coprime, and two moduli with a common divisor both stand under one of them.
    """
    common = dict(zip(moduli, batch_gcd(moduli), strict=True))
    sharing = [n for n in moduli if common[n] > 1]
    return [
        {
            "factor": plain(factor),
            "length": factor.bit_length(),
            "moduli": [modulus_digest(n) for n in sharing if n % factor == 0],
        }
        for factor in sorted(_coprime(common.values()))
    ]


def _coprime(numbers: Iterable[int]) -> list[int]:
    """Coprime numbers of whose powers all these are products (Bernstein, "Factoring into coprimes
    in essentially linear time", 2005, does it faster; from memory)."""
    base: list[int] = []
    pending = sorted({*numbers} - {1})
    while pending:
        number = pending.pop()
        other = next((b for b in base if math.gcd(b, number) > 1), None)
        if other is None:
            base.append(number)
        else:
            base.remove(other)
            shared = math.gcd(other, number)
            parts = {shared, other // shared, number // shared}
            pending += sorted(parts - {1})
    return base


def _copies(declarations: Iterable[Declaration]) -> list[Record]:
    """The sets that are equal in all values and in their use, wherever they stand."""
    groups: dict[str, list[str]] = {}
    for declaration in declarations:
        groups.setdefault(declaration.digest(), []).append(declaration.identity)
    return [
        {"digest": digest, "sets": identities}
        for digest, identities in groups.items()
        if len(identities) > 1
    ]


def _equal_files(inputs: Iterable[Mapping[str, Any]]) -> list[Record]:
    """The files that are equal byte for byte."""
    groups: dict[str, list[str]] = {}
    for item in inputs:
        if "role" not in item:
            groups.setdefault(item["sha256"], []).append(item["path"])
    return [
        {"sha256": digest, "paths": paths} for digest, paths in groups.items() if len(paths) > 1
    ]
