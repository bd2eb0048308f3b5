"""Published groups, worked through: RFC 5114 with and without its cofactors' factors.

The factor lists divide p-1 by the numbers of RFC 5114 and are proved by the claims made here. The
bit figures are those of Lim and Lee's attack with the optimal division between probing and search,
recomputed independently before this code was written; ours count (r-1)/2 trials for a factor r
rather than r/2, and round down.
"""

import secrets
from functools import cache
from math import prod

import pytest
from gmpy2 import next_prime

from auditor.claims.collection import Claims, check_all
from auditor.claims.composite import Composite
from auditor.claims.factorization import Factorization
from auditor.claims.standing import Standing
from auditor.declaration import Party
from auditor.facts import Established
from auditor.inquiry.answers import Answers
from auditor.intake.standard_groups import find
from auditor.questions import Asks
from auditor.run_values import RunValues
from tests.facts.knowledge import declare, known, reviewed, settled

QUICK = RunValues("2026-12-01", "quick")
GROUP_23 = (742327609, 5213881177, 112486462861, 3528910760717)
GROUP_24 = (3181327537,)


@cache
def claims(number: int, factors: tuple[int, ...]) -> Claims:
    """What a quick review of the group establishes, given these factors of its cofactor."""
    return settled(group(number, factors), QUICK)


def group(number: int, factors: tuple[int, ...] = (), **usage: object):  # type: ignore[no-untyped-def]
    """The RFC 5114 group of that IKE number, used for key agreement."""
    standard = find(f"group{number}")
    assert standard is not None
    return declare(
        standard.modulus,
        standard.generator,
        subgroup_order=standard.subgroup_order,
        known_factors=factors,
        purpose="key-agreement",
        **usage,
    )


def facts(number: int, factors: tuple[int, ...], **usage: object) -> Established:
    """The facts about the group under that usage."""
    return known(group(number, factors, **usage), claims(number, factors), QUICK)


STATIC_UNCHECKED = {"use": "static", "checks": ()}


def test_group_23_static_and_unchecked_falls_to_36_bits() -> None:
    """35.9 bits, with the optimum at factors of at most 2^40 trials: the 42-bit one is not used."""
    found = facts(23, GROUP_23, bits=224, **STATIC_UNCHECKED)
    confinement = next(work for work in found.routes if work.route == "confinement")

    assert found.facts["strength.confinement_bits_at_most"].value == pytest.approx(35.9, abs=0.02)
    assert dict(confinement.details)["largest prime probed"] == 112486462861
    assert found.facts["strength.work_bits_at_most"].value == pytest.approx(35.9, abs=0.02)
    assert found.facts["strength.sufficient"].value is False
    leak = found.facts["exponent.confinement_leak_bits_at_least"]
    assert leak.value == pytest.approx(161.63, abs=0.02)
    assert not leak.tight


def test_group_23_with_the_membership_check_meets_112_by_the_tables() -> None:
    """110.1 by the model, 112 by the tables, and the tables decide."""
    found = facts(23, (), bits=224, use="static", checks=("membership",))

    assert found.facts["strength.standard_bits"].value == 112
    assert found.facts["strength.work_bits"].value == pytest.approx(110.1, abs=0.05)
    assert found.facts["strength.sufficient"].value is True
    assert "strength.confinement_bits_at_most" not in found.facts


def test_group_24_falls_when_its_32_bit_factor_is_found() -> None:
    """From 111.03 to 95.25 bits at width 256; with a requirement of 100 nothing called it
    sufficient before."""
    usage = {"bits": 256, "required_strength": 100, **STATIC_UNCHECKED}
    declaration = group(24, GROUP_24, **usage)
    undeclared = group(24, (), **usage)
    before = known(undeclared, without(GROUP_24, declaration.modulus - 1), QUICK)
    after = known(declaration, claims(24, GROUP_24), QUICK)

    bits = "strength.confinement_bits_at_most"
    assert before.facts[bits].value == pytest.approx(111.03, abs=0.02)
    assert not before.facts[bits].tight
    assert before.absent["strength.sufficient"].reason == "unsettled"
    assert after.facts[bits].value == pytest.approx(95.25, abs=0.02)
    assert after.facts[bits].tight
    assert after.facts["strength.sufficient"].value is False


def without(primes: tuple[int, ...], number: int) -> Claims:
    """The claims of group 24 as a search leaves them that has not split these primes from the
    largest factor of ``number``."""
    complete = claims(24, GROUP_24)
    whole = complete.factorization(number)
    assert whole is not None
    hidden = {*primes, whole.factors[-1][0]}
    rest = prod(hidden)
    kept = tuple(power for power in whole.factors if power[0] not in hidden)
    composite = Composite(rest, factor=primes[0])
    support = [claim for prime, _ in kept if (claim := complete.prime(prime)) is not None]
    uses = tuple(sorted(claim.id for claim in [*support, composite]))
    others = [claim for claim in complete if claim.id != whole.id]
    return Claims([*others, composite, Factorization(number, kept, rest, uses)])


def test_group_24_static_and_unchecked_fails_112_without_its_large_factors() -> None:
    """The factors up to 142031 suffice for that."""
    found = facts(24, (), bits=256, **STATIC_UNCHECKED)

    assert found.facts["strength.sufficient"].value is False


def test_group_22_is_too_short_whatever_is_checked() -> None:
    """1024 bits: 80 by the tables, 79.99 by the formula, rounded down."""
    found = facts(22, (), bits=160, use="single", checks=("membership",))

    assert found.facts["strength.standard_bits"].value == 80
    assert found.facts["strength.number_field_sieve_bits_at_most"].value == 79.99
    assert found.facts["strength.sufficient"].value is False


@pytest.mark.parametrize(("width", "expected"), [(160, 81.0), (224, 113.0), (225, 113.5)])
def test_short_exponents_in_a_standard_group(width: int, expected: float) -> None:
    """Kangaroos take 2 sqrt(2^w) steps."""
    standard = find("modp2048")
    assert standard is not None
    declaration = declare(
        standard.modulus,
        standard.generator,
        subgroup_order=standard.subgroup_order,
        purpose="key-agreement",
        bits=width,
        use="single",
        checks=("range",),
    )
    found = known(declaration, modp_claims(), QUICK)

    assert found.facts["strength.short_exponent_bits_at_most"].value == expected
    assert found.facts["strength.sufficient"].value is (width >= 224)


@cache
def modp_claims() -> Claims:
    """A quick review of the 2048-bit group of RFC 3526."""
    standard = find("modp2048")
    assert standard is not None
    declaration = declare(
        standard.modulus, standard.generator, subgroup_order=standard.subgroup_order
    )
    return settled(declaration, QUICK)


def test_a_standard_group_is_what_it_is_said_to_be() -> None:
    """Safe prime, generator of the prime-order subgroup, origin verified by its formula."""
    standard = find("modp2048")
    assert standard is not None
    declaration = declare(
        standard.modulus, standard.generator, subgroup_order=standard.subgroup_order
    )
    found = known(declaration, modp_claims(), QUICK)
    values = {name: fact.value for name, fact in found.facts.items()}

    assert values["modulus.safe_prime"] is True
    assert values["modulus.standard_match"] == "exact"
    assert values["provenance.verified"] is True
    assert values["generator.order_prime"] is True
    assert values["generator.order_is_declared"] is True
    assert values["modulus.special_form_seen"] is False
    assert "strength.hidden_form_bits_at_most" not in values


def test_a_declared_factor_counts_although_a_search_has_left_it() -> None:
    """Claims kept from an earlier run left 3181327537 unsplit; the owner declares it now."""
    declaration = group(24, GROUP_24, bits=256, **STATIC_UNCHECKED)
    kept = without(GROUP_24, declaration.modulus - 1)
    asked = known(declaration, kept, QUICK).absent["strength.confinement_bits_at_most"].questions
    assert [question.asks for question in asked] == [Asks.SMALL_FACTORS]

    answers = Answers(kept, QUICK, secrets.randbelow, lambda made: None)
    for question in asked:
        answers.answer(question)
    after = known(declaration, answers.claims, QUICK)
    assert after.facts["group.factored"].value is True


def test_each_usable_small_order_has_a_witness_that_is_claimed() -> None:
    """Group 24, static and unchecked: an element of every prime order up to 2^41, each a claim."""
    found = facts(24, GROUP_24, bits=256, **STATIC_UNCHECKED)
    witnesses = settled(group(24, GROUP_24, bits=256, **STATIC_UNCHECKED), QUICK)
    known_now = known(group(24, GROUP_24, bits=256, **STATIC_UNCHECKED), witnesses, QUICK)
    fact = known_now.facts["subgroup.small_order_elements_seen"]
    n = group(24).modulus

    assert found.absent["subgroup.small_order_elements_seen"].reason == "unsettled"
    assert [r for r, _ in fact.value] == [2, 7, 13, 2549, 142031, 3181327537]
    for r, element in fact.value:
        h = element if isinstance(element, int) else int(element, 16)
        assert h != 1
        assert pow(h, r, n) == 1
    assert check_all(witnesses, secrets.randbelow) == {}


def test_a_cofactor_belongs_to_its_modulus_and_order() -> None:
    """The j of RFC 5114 group 23 follows from n and q; another one is found out."""
    plain = group(23)
    assert plain.subgroup_order is not None
    j = (plain.modulus - 1) // plain.subgroup_order
    stated = {given: known(group(23, cofactor=given), Claims(), QUICK) for given in (j, j + 1)}

    assert stated[j].facts["subgroup.cofactor_agrees"].value is True
    assert stated[j + 1].facts["subgroup.cofactor_agrees"].value is False
    assert known(plain, Claims(), QUICK).absent["subgroup.cofactor_agrees"].reason == "undefined"
    alone = known(declare(plain.modulus, plain.generator, cofactor=j), Claims(), QUICK)
    assert alone.absent["subgroup.cofactor_agrees"].reason == "undeclared"


@pytest.mark.parametrize(
    ("uses", "reused"),
    [
        (("single", "static"), False),
        (("reused", "static"), True),
        (("reused", None), True),
        (("single", None), None),
    ],
)
def test_an_ephemeral_exponent_is_used_once(
    uses: tuple[str | None, ...], reused: bool | None
) -> None:
    """Static exponents are none, and who says nothing could use one again."""
    parties = tuple(Party(f"party {i}", exponent_use=use) for i, use in enumerate(uses))
    found = known(declare(23, 5, parties=parties), Claims(), QUICK)
    name = "usage.ephemeral_reused"

    if reused is None:
        assert found.absent[name].keys == ("parties.party 1.exponent.use",)
    else:
        assert found.facts[name].value is reused


def test_of_what_makes_it_insufficient_the_best_founded_decides() -> None:
    """The modulus is too short and only probably prime; that n - 1 has order 2 is proven."""
    standard = find("group22")
    assert standard is not None
    declaration = declare(standard.modulus, standard.modulus - 1, bits=16)
    found = known(declaration, settled(declaration, QUICK), QUICK)
    sufficient = found.facts["strength.sufficient"]

    assert found.facts["modulus.nature"].standing is Standing.PROBABLE
    assert (sufficient.value, sufficient.standing) == (False, Standing.PROVEN)
    assert sufficient.rests_on == ()


@pytest.mark.parametrize(
    ("required", "window"), [(1, None), (9, None), (10, (20, 20)), (56, (20, 112))]
)
def test_a_low_requirement_leaves_no_window_for_missed_factors(
    required: int, window: tuple[int, int] | None
) -> None:
    """What division has excluded cannot be missed."""
    n = int(next_prime(2**520 + 12345))
    found = reviewed(declare(n, 2, required_strength=required), QUICK)
    shown = found.facts.get("group.missed_factor_window")

    assert found.facts["group.unfactored_length_at_most"].value > 0
    assert (shown and tuple(shown.value)) == window
    assert (window is None) == ("group.missed_factor_risk" not in found.facts)


@pytest.mark.parametrize(
    ("bits", "checks", "sufficient"),
    [(256, ("range",), True), (222, ("range",), False), (256, (), None), (None, ("range",), None)],
)
def test_reuse_is_not_asked_for_where_it_makes_no_difference(
    bits: int | None, checks: tuple[str, ...], sufficient: bool | None
) -> None:
    """Over a safe prime a range check leaves one bit; without check or width it matters."""
    standard = find("modp2048")
    assert standard is not None
    declaration = declare(
        standard.modulus,
        2,
        subgroup_order=standard.subgroup_order,
        purpose="key-agreement",
        bits=bits,
        checks=checks,
    )
    found = reviewed(declaration, QUICK)

    if sufficient is None:
        assert found.absent["strength.sufficient"].reason == "undeclared"
    else:
        assert found.facts["strength.sufficient"].value is sufficient
