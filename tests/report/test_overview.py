"""The overview of a run: counts, who shares a modulus or a factor, and what stands there twice."""

import math
from dataclasses import replace
from itertools import combinations

from auditor.declaration import Declaration, Place
from auditor.report.overview import modulus_digest, overview

PRIMES = (2**61 - 1, 2**89 - 1, 2**107 - 1, 2**127 - 1)
P, Q, R, S = PRIMES


def _set(modulus: int, path: str = "a.yaml", name: str = "x", generator: int = 2) -> Declaration:
    return Declaration(name, Place(path, 1), modulus, generator)


def test_positions_are_counted() -> None:
    """Every position has its count, 0 included."""
    counts = overview(["hold", "open", "hold"], [_set(23)] * 3, ())["positions"]
    assert counts == {"hold": 2, "open": 1, "conditions": 0, "no objection": 0}


def test_a_modulus_is_named_once_with_all_its_sets_and_files() -> None:
    """Another generator makes another set, not another modulus."""
    sets = [_set(P, "a", "x"), _set(Q, "b"), _set(P, "a", "y", 3), _set(P, "c")]
    first, second = overview(["open"] * 4, sets, ())["moduli"]
    assert (first["sets"], first["paths"]) == (["a#x", "a#y", "c#x"], ["a", "c"])
    assert (first["digest"], first["length"]) == (modulus_digest(P), 61)
    assert (second["sets"], second["paths"]) == (["b#x"], ["b"])


def test_shared_factors_are_those_of_every_pair() -> None:
    """Every pair of moduli with a common divisor stands under one; nothing else does; the factors
    are coprime."""
    moduli = [P * Q, P * R, Q * R * S, S, P * P, 2**31 - 1, 1]
    found = overview(["hold"] * len(moduli), [_set(n) for n in moduli], ())["shared_factors"]
    by_digest = {modulus_digest(n): n for n in moduli}
    pairs = set()
    for entry in found:
        factor = int(str(entry["factor"]), 16)
        members = [by_digest[digest] for digest in entry["moduli"]]
        assert entry["length"] == factor.bit_length() > 1
        assert len(members) > 1
        assert members == [n for n in moduli if n % factor == 0]
        pairs |= {frozenset(pair) for pair in combinations(members, 2)}
    assert pairs == {frozenset(c) for c in combinations(moduli, 2) if math.gcd(*c) > 1}
    factors = [int(str(entry["factor"]), 16) for entry in found]
    assert factors == sorted(factors)
    assert all(math.gcd(*pair) == 1 for pair in combinations(factors, 2))


def test_one_modulus_in_many_sets_shares_no_factor() -> None:
    """Equal numbers are one modulus; nobody learns a factor from them."""
    record = overview(["open"] * 3, [_set(P * Q, str(n)) for n in range(3)], ())
    assert (len(record["moduli"]), record["shared_factors"]) == (1, [])


def test_copies_are_sets_of_one_digest() -> None:
    """Name and place do not matter, any value and the use do."""
    first = _set(P, "a")
    sets = [
        first,
        _set(P, "b", "y"),
        _set(P, "c", generator=3),
        replace(first, purpose="signature"),
    ]
    (copy,) = overview(["open"] * 4, sets, ())["copies"]
    assert copy == {"digest": first.digest(), "sets": ["a#x", "b#y"]}


def test_equal_files_are_told_and_policy_is_none_of_them() -> None:
    """By the digest of their bytes; a file of policy holds no parameters."""
    inputs = [
        {"path": "a", "sha256": "1" * 64},
        {"path": "b", "sha256": "2" * 64},
        {"path": "c", "sha256": "1" * 64},
        {"path": "d", "sha256": "2" * 64, "role": "usage"},
    ]
    (files,) = overview([], [], inputs)["equal_files"]
    assert files == {"sha256": "1" * 64, "paths": ["a", "c"]}
