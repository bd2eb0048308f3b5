"""Reviews of declared sets without files: the claims, and the record as bytes."""

import random
import secrets
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import gmpy2

from auditor.claims.collection import Claims
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.encoding import canonical_json
from auditor.facts import vocabulary
from auditor.inquiry.answers import ALONE, Cores
from auditor.inquiry.question_round import Progress
from auditor.report.record import Reading, build
from auditor.review import Surroundings, census, investigate
from auditor.rulebooks.loading import load_all
from auditor.run_values import RunValues

BOOKS = load_all(("group-structure", "strength"), vocabulary())
QUICK = RunValues("2026-12-01", "quick")
STANDARD = RunValues("2026-12-01", "standard")


def silent(status: object) -> None:
    """Progress that nobody watches."""


def declared(name: str, modulus: int, generator: int = 2, **values: object) -> Declaration:
    """A set for key agreement; every party uses one exponent of 160 bits and checks the range."""
    party = Party(EVERYBODY, int(str(values.pop("width", 160))), "static", ("range",))
    return Declaration(
        name,
        Place("invented.yaml", 1),
        modulus,
        generator,
        purpose="key-agreement",
        parties=(party,),
        **values,  # type: ignore[arg-type]
    )


def random_prime(rng: random.Random, bits: int) -> int:
    """A prime of that length."""
    return int(gmpy2.next_prime(rng.getrandbits(bits) | 1 << (bits - 1)))


def safe_prime(rng: random.Random, bits: int) -> int:
    """A prime p of that length for which (p-1)/2 is one."""
    while True:
        half = random_prime(rng, bits - 1)
        if gmpy2.is_prime(2 * half + 1):
            return 2 * half + 1


def mixed_sets(seed: int) -> list[Declaration]:
    """Sets that share moduli, subgroups and factors, over primes and composites."""
    rng = random.Random(seed)
    safe, q = safe_prime(rng, 140), random_prime(rng, 80)
    schnorr = [k * q + 1 for k in range(2**70, 2**70 + 20_000, 2) if gmpy2.is_prime(k * q + 1)]
    r, s = random_prime(rng, 90), random_prime(rng, 100)
    product = next(n for k in range(1, 10**6) if gmpy2.is_prime(n := 2 * k * r * s + 1))
    return [
        declared("a", safe),
        declared("b", safe, 3, width=130),
        declared("half is the subgroup", safe, 4, subgroup_order=safe // 2),
        declared("half is a modulus", safe // 2, 5),
        *(
            declared(f"one subgroup {place}", p, pow(3, (p - 1) // q, p), subgroup_order=q)
            for place, p in enumerate(schnorr[:3])
        ),
        declared("one factor known", product, 7, known_factors=(r,)),
        declared("the other known", product, 7, known_factors=(s,)),
        declared("composite", random_prime(rng, 60) * random_prime(rng, 70)),
        declared("power", random_prime(rng, 50) ** 2),
        declared("random", random_prime(rng, 128)),
    ]


def reviewed(
    sets: Sequence[Declaration],
    run: RunValues = QUICK,
    *,
    cores: Cores = ALONE,
    ledger: Path | None = None,
    progress: Progress = silent,
) -> tuple[Claims, str]:
    """The claims of a review, and its record as text."""
    run = replace(run, census=census(sets))
    surroundings = Surroundings(secrets.randbelow, progress, ledger, cores)
    claims, notices = investigate(sets, run, BOOKS, surroundings)
    reading = Reading(tuple(sets), notices=notices)
    return claims, canonical_json(build(reading, claims, run, BOOKS, "conditions"))
