"""Facts about schemes, and the properties that reports list apart from work."""

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor.claims.origin_recipe import PROBABLE
from auditor.claims.origin_replay import Outcome
from auditor.declaration import Provenance
from auditor.facts import Established, vocabulary
from auditor.intake.standard_groups import find
from auditor.rulebooks.judging import judge
from auditor.rulebooks.loading import load_all
from auditor.run_values import RunValues
from tests.facts.knowledge import declare, known, reviewed, settled, some
from tests.facts.test_provenance import CASES, case_of, generator_case, with_generator

QUICK = RunValues("2026-12-01", "quick")
P, Q = 1000667, 500333  # a safe prime that is 3 modulo 8: 2 generates all, 4 the squares
SMOOTH = 1000117  # 6 divides p - 1 (Bleichenbacher's condition holds)
TRAPDOOR = 10000079, 5019758  # no small relation, by construction


def used(modulus: int, generator: int, purpose: str, scheme: str | None, **more: object):
    """A review of the group in that use."""
    return reviewed(declare(modulus, generator, purpose=purpose, scheme=scheme, **more), QUICK)


def standard(name: str, purpose: str, scheme: str | None) -> Established:
    """A registered group in that use."""
    group = find(name)
    assert group is not None
    return used(group.modulus, group.generator, purpose, scheme)


def names(facts: Established) -> list[str]:
    """The names of the properties."""
    return [found.name for found in facts.properties]


# Classical ElGamal signatures


@pytest.mark.parametrize("name", ["modp1536", "modp2048", "ffdhe2048"])
def test_generator_two_forges_classical_signatures(name: str) -> None:
    """In every safe-prime group of the registries, at no cost."""
    facts = standard(name, "signature", "elgamal")

    assert facts.facts["scheme.forgery_seen"].value is True
    assert facts.facts["scheme.forgery_bits_at_most"].value == 0
    assert names(facts)[0] == "signatures can be forged"


@pytest.mark.parametrize(
    ("purpose", "scheme"),
    [
        ("key-agreement", None),
        ("signature", "dsa"),
        ("signature", "schnorr"),
        ("encryption", "elgamal-hashed"),
    ],
)
def test_generator_two_is_not_condemned_elsewhere(purpose: str, scheme: str | None) -> None:
    """No forgery is spoken of, and no rule of the books on schemes and origin objects."""
    facts = standard("modp2048", purpose, scheme)
    books = load_all(["provenance", "schemes", "group-structure"], vocabulary())
    judged = judge(books, facts.facts, facts.absent, vocabulary())

    assert facts.absent["scheme.forgery_seen"].reason == "undefined"
    found = {f.rule for f in judged.findings if f.outcome == "nonconforming"}
    assert found <= {"dsa-no-longer-approved"}
    assert "signatures can be forged" not in names(facts)


def test_a_divisor_of_the_order_forges() -> None:
    """alpha = 6 divides p - 1; with a required strength below the cost it would not be seen."""
    facts = used(SMOOTH, 6, "signature", "elgamal")

    assert facts.facts["scheme.forgery_seen"].value is True
    assert facts.facts["scheme.forgery_bits_at_most"].value < 3


def test_no_relation_is_no_proof() -> None:
    """A base with a secret relation: nothing is seen, and its open origin is listed."""
    p, alpha = TRAPDOOR
    facts = used(p, alpha, "signature", "elgamal", required_strength=7)

    assert facts.facts["scheme.forgery_seen"].value is False
    assert facts.facts["scheme.forgery_bits_at_most"].value > 7
    assert names(facts) == ["origin of the base is open", "range of r"]


def test_a_canonical_base_has_no_open_origin() -> None:
    """A base made from a seed and an index leaves only the check that verifiers owe."""
    block = generator_case("P")
    signing = replace(with_generator(block), purpose="signature", scheme="elgamal")
    facts = reviewed(signing, QUICK)

    assert facts.facts["generator.canonical"].value is True
    assert facts.facts["scheme.forgery_seen"].value is False
    assert names(facts) == ["range of r"]


@pytest.mark.parametrize("generator", [0, 1, P - 1])
def test_trivial_bases_are_judged_elsewhere(generator: int) -> None:
    """No relation is looked for where there is no base."""
    facts = used(P, generator, "signature", "elgamal")

    assert facts.absent["scheme.forgery_seen"].reason == "undefined"


@settings(max_examples=25)
@given(st.sampled_from([P, SMOOTH, 10000079, 2**61 - 1]), st.integers(2, 10**6), st.randoms())
def test_more_factors_only_lower_the_cost(p: int, alpha: int, rng) -> None:
    """With part of the claims the cost is no lower, and what is seen stays seen."""
    declaration = declare(p, alpha, purpose="signature", scheme="elgamal", required_strength=12)
    everything = settled(declaration, QUICK)
    before, after = known(declaration, some(everything, rng)), known(declaration, everything)

    if "scheme.forgery_seen" in before.facts:
        bits = "scheme.forgery_bits_at_most"
        assert after.facts[bits].value <= before.facts[bits].value
        seen = "scheme.forgery_seen"
        assert after.facts[seen].value or not before.facts[seen].value


# Encryption and key agreement


@pytest.mark.parametrize(
    ("generator", "scheme", "leaks", "distinguished"),
    [
        (2, "elgamal-raw", True, True),
        (4, "elgamal-raw", True, True),
        (2, "elgamal-encoded", True, True),
        (4, "elgamal-encoded", False, False),
        (2, "elgamal-hashed", False, None),
    ],
)
def test_what_ciphertexts_show(
    generator: int, scheme: str, leaks: bool, distinguished: bool | None
) -> None:
    """Raw messages keep their symbol, encoded ones where ord(g) is even; a hash hides it."""
    big = find("modp2048")
    assert big is not None
    p = big.modulus if generator == 4 else P
    facts = used(p, generator, "encryption", scheme)
    name = "scheme.distinguisher_seen"

    assert facts.facts["scheme.message_symbol_leaks"].value is leaks
    assert ("symbol of the message" in names(facts)) is leaks
    if distinguished is None:
        assert facts.absent[name].reason == "undefined"
    else:
        assert facts.facts[name].value is distinguished
        assert ("distinguishable" in names(facts)) is distinguished


@given(st.integers(1, P - 1), st.integers(1, P - 2), st.integers(1, P - 2))
def test_the_symbol_of_a_raw_message_is_public(m: int, x: int, k: int) -> None:
    """From y, g^k and m y^k alone, for a generator of either order: the oracle for the fact."""

    def symbol(a: int) -> int:
        return 1 if pow(a, (P - 1) // 2, P) == 1 else -1

    for g in (2, 4):
        y, first, second = pow(g, x, P), pow(g, k, P), m * pow(g, x * k, P) % P
        mask = -1 if symbol(y) == symbol(first) == -1 else 1
        assert symbol(second) * mask == symbol(m)


def test_shared_secrets_of_a_primitive_root_are_told_apart() -> None:
    """Key agreement with a generator of even order; not with one of large prime order."""
    assert used(P, 2, "key-agreement", None).facts["scheme.distinguisher_seen"].value is True
    facts = standard("ffdhe2048", "key-agreement", None)
    assert facts.facts["scheme.distinguisher_seen"].value is False
    assert facts.facts["scheme.distinguisher_seen"].tight


def test_signatures_have_no_messages_to_hide() -> None:
    """Facts on encryption are undefined for other purposes, and undeclared without one."""
    signing = used(P, 4, "signature", "dsa")
    silent = reviewed(declare(P, 4), QUICK)

    for name in ("scheme.message_symbol_leaks", "scheme.distinguisher_seen"):
        assert signing.absent[name].reason == "undefined"
        assert silent.absent[name].reason == "undeclared"


def test_composite_moduli_have_no_legendre_symbol() -> None:
    """The facts that speak of it are undefined there."""
    facts = used(15 * 1009, 2, "encryption", "elgamal-raw")

    assert facts.absent["scheme.message_symbol_leaks"].reason == "undefined"


# DSA


@pytest.mark.parametrize(
    ("lengths", "expected"),
    [((1024, 160), "1024/160"), ((2048, 224), "2048/224"), ((3072, 256), "3072/256")],
)
def test_sizes_of_dsa(lengths: tuple[int, int], expected: str) -> None:
    """The pairs of FIPS 186-4, 4.2, by the lengths that are declared."""
    case = next(c for c in CASES if c.lengths == lengths)
    facts = known(
        declare(case.p, 2, subgroup_order=case.q, purpose="signature", scheme="dsa"),
        settled(declare(23, 2)),
    )

    assert facts.facts["scheme.dsa_sizes"].value == expected


def test_other_sizes_of_dsa() -> None:
    """Other lengths are named so; without q they are undeclared; other schemes have none."""
    assert (
        used(P, 4, "signature", "dsa", subgroup_order=Q).facts["scheme.dsa_sizes"].value == "other"
    )
    assert used(P, 4, "signature", "dsa").absent["scheme.dsa_sizes"].reason == "undeclared"
    assert used(P, 4, "signature", "schnorr").absent["scheme.dsa_sizes"].reason == "undefined"


def test_hidden_collisions_are_excluded_by_a_seed() -> None:
    """Whoever chose q may know colliding messages, except where p and q regenerate."""
    case = case_of(PROBABLE, Outcome.REGENERATED)
    values = {
        "hash": case.recipe.hash,
        "seed": case.recipe.seeds[0].hex(),
        "counter": case.recipe.counters[0],
    }
    origin = Provenance(PROBABLE, tuple(values.items()))
    sound = used(case.p, 2, "signature", "dsa", subgroup_order=case.q, provenance=origin)
    silent = used(P, 4, "signature", "dsa", subgroup_order=Q)

    assert names(sound) == []
    assert names(silent) == ["hidden collisions"]
