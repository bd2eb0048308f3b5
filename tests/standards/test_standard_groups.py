"""The registry of standard groups against the published formulas, digests and vector files."""

import hashlib
import re
from pathlib import Path
from typing import Any

import cryptography_vectors
import gmpy2
import mpmath
import pytest

from auditor.intake.standard_groups import StandardGroup, find, match, standard_groups, suggest
from auditor.strict_yaml import load

PUBLISHED = load(
    (Path(__file__).parent.parent / "data" / "standard_groups.yaml").read_text("utf-8")
).value
BY_NAME: dict[str, dict[str, Any]] = {record["name"]: record for record in PUBLISHED}


@pytest.fixture(params=standard_groups(), ids=lambda group: group.name)
def group(request: pytest.FixtureRequest) -> StandardGroup:
    """Each group of the registry in turn."""
    return request.param  # type: ignore[no-any-return]


def _by_formula(constant: str, bits: int, offset: int) -> int:
    """RFC 2409, 6.1 for pi, RFC 7919, A for e, term by term as printed; the digits are mpmath's."""
    with mpmath.workprec(bits + 64):
        digits = int(mpmath.floor(mpmath.ldexp(+getattr(mpmath, constant), bits - 130)))
    if constant == "pi":
        return 2**bits - 2 ** (bits - 64) - 1 + 2**64 * (digits + offset)
    return 2**bits - 2 ** (bits - 64) + (digits + offset) * 2**64 - 1


def _vectors(name: str) -> list[dict[str, int]]:
    """The P, Q, G records of a vector file of the PyPI package cryptography-vectors."""
    with cryptography_vectors.open_vector_file(f"asymmetric/DH/{name}", "r") as file:
        records = re.split(r"COUNT ?= ?\d+", file.read())[1:]
    pairs = [re.findall(r"^([PQG]) = ([0-9A-F]+)$", record, re.MULTILINE) for record in records]
    return [{key: int(value, 16) for key, value in found} for found in pairs]


def test_the_registry_holds_the_published_groups_and_no_others() -> None:
    """Thirteen safe-prime groups and the three of RFC 5114."""
    assert [item.name for item in standard_groups()] == sorted(
        BY_NAME, key=lambda name: (name.startswith("ffdhe"), name.startswith("rfc"), _bits(name))
    )


def _bits(name: str) -> list[int]:
    return [int(part) for part in re.findall(r"\d+", name.removeprefix("rfc5114"))]


def test_moduli_follow_from_pi_and_e(group: StandardGroup) -> None:
    """The stored modulus is the formula's value, with the constant's digits from mpmath."""
    record = BY_NAME[group.name]
    if group.formula is None:
        assert group.name.startswith("rfc5114")
        assert "constant" not in record
        return
    assert tuple(group.formula) == (record["constant"], record["offset"])
    assert group.modulus == _by_formula(record["constant"], record["bits"], record["offset"])


def test_values_agree_with_the_published_record(group: StandardGroup) -> None:
    """Lengths, digests, both ends of the modulus and registry numbers."""
    record = BY_NAME[group.name]
    octets = group.modulus.to_bytes(record["bits"] // 8, "big")
    printed = octets.hex().upper()
    assert hashlib.sha256(octets).hexdigest()[:32] == record["sha256"]
    assert printed.startswith(record.get("head", ""))
    assert printed.endswith(record.get("tail", ""))
    assert group.modulus.bit_length() == record["bits"]
    assert group.subgroup_order.bit_length() == record["order_bits"]
    assert group.modulus % 24 == record["mod_24"]
    assert (group.ike, group.tls) == (record.get("ike"), record.get("tls"))


def test_the_generator_has_the_prime_order_stated(group: StandardGroup) -> None:
    """p and q are prime (GMP's Baillie-PSW test), q divides p-1, g^q = 1 and g is not 1."""
    p, q, g = group.modulus, group.subgroup_order, group.generator
    assert gmpy2.is_strong_bpsw_prp(p)
    assert gmpy2.is_strong_bpsw_prp(q)
    assert (p - 1) % q == 0
    assert 1 < g < p
    assert gmpy2.powmod(g, q, p) == 1


def test_rfc_5114_agrees_with_the_vector_file() -> None:
    """p, q and g as the CAVS file RFC5114.txt of cryptography-vectors has them."""
    ours = [item for item in standard_groups() if item.name.startswith("rfc5114")]
    wanted = [(item["P"], item["Q"], item["G"]) for item in _vectors("RFC5114.txt")]
    assert set(wanted) == {(item.modulus, item.subgroup_order, item.generator) for item in ours}


def test_rfc_3526_agrees_with_the_vector_file() -> None:
    """p and g as the file rfc3526.txt of cryptography-vectors has them."""
    ours = [item for item in standard_groups() if item.source.startswith("RFC 3526")]
    wanted = [(item["P"], item["G"]) for item in _vectors("rfc3526.txt")]
    assert [(item.modulus, item.generator) for item in ours] == wanted


@pytest.mark.parametrize(
    ("spelling", "name"),
    [
        ("ffdhe2048", "ffdhe2048"),
        ("FFDHE-3072", "ffdhe3072"),
        ("MODP-2048", "modp2048"),
        ("modp_4096", "modp4096"),
        ("2048-bit MODP", "modp2048"),
        ("group14", "modp2048"),
        ("DH Group 5", "modp1536"),
        ("ike14", "modp2048"),
        ("diffie-hellman-group14", "modp2048"),
        ("diffie-hellman-group16-sha512", "modp4096"),
        ("group24", "rfc5114-2048-256"),
        ("RFC 5114 2.2", "rfc5114-2048-224"),
        ("oakley1", "modp768"),
        ("ike1", "modp768"),
        # RFC 4253, 8.1: the SSH method group1 uses Oakley's second group.
        ("diffie-hellman-group1-sha1", "modp1024"),
    ],
)
def test_groups_are_found_by_the_names_of_the_trade(spelling: str, name: str) -> None:
    """Case, blanks and punctuation do not matter."""
    found = find(spelling)
    assert found is not None
    assert found.name == name


def test_no_name_means_two_groups() -> None:
    """Every name and alias leads back to its own group."""
    for item in standard_groups():
        assert [find(name) for name in (item.name, *item.aliases)] == [item] * (
            1 + len(item.aliases)
        )


@pytest.mark.parametrize(
    ("spelling", "names"),
    [
        ("ffdhe2084", ("ffdhe2048",)),
        ("fdhe3072", ("ffdhe3072",)),
        ("group1", ("modp768", "modp1024")),
        ("secp256r1", ()),
        ("", ()),
    ],
)
def test_unknown_names_are_answered_with_a_suggestion(
    spelling: str, names: tuple[str, ...]
) -> None:
    """A near name, both meanings of a number with two, or nothing at all."""
    assert find(spelling) is None
    assert suggest(spelling) == names


def test_matches_tell_the_generator_apart(group: StandardGroup) -> None:
    """The generator counts modulo p; another one is a match of the modulus only."""
    p, g = group.modulus, group.generator
    assert match(p, g) == (group.name, "exact")
    assert match(p, g + p) == (group.name, "exact")
    assert match(p, g + 1) == (group.name, "modulus only")
    assert match(p + 2, g) == ("none", "none")
