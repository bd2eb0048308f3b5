"""An element of a prime order: made from the least base, and refuted for every other statement."""

import secrets
from dataclasses import replace
from itertools import count

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.base import Refuted
from auditor.claims.collection import read_claim
from auditor.claims.prime import Prime
from auditor.claims.subgroup_generator import SubgroupGenerator, subgroup_generator


def made(n: int, q: int) -> tuple[SubgroupGenerator, dict[str, Prime]]:
    """The claim about primes below 2^64 and the claims it uses."""
    used = {claim.id: claim for claim in (Prime(n, "below-2^64"), Prime(q, "below-2^64"))}
    claim = subgroup_generator(n, q, tuple(sorted(used)))
    assert claim is not None
    return claim, used


@given(st.integers(3, 2**40).map(sympy.nextprime), st.data())
def test_the_element_has_the_order_and_comes_from_the_least_base(
    n: int, data: st.DataObject
) -> None:
    """Order by sympy; no smaller base gives anything but 1."""
    q = data.draw(st.sampled_from(sorted(sympy.factorint(n - 1))))
    claim, used = made(n, q)
    claim.check(used, secrets.randbelow)

    assert sympy.n_order(claim.g, n) == q
    powers = ((base, pow(base, (n - 1) // q, n)) for base in count(2))
    assert next((base, g) for base, g in powers if g > 1) == (claim.base, claim.g)
    assert read_claim(claim.record()) == claim


@pytest.mark.parametrize(
    ("changed", "reason"),
    [
        ({"g": 9}, "the construction says otherwise"),
        ({"g": 1}, "the construction says otherwise"),
        ({"base": 3, "g": 9}, "the construction says otherwise"),
        ({"base": 1}, "the base is out of range"),
        ({"base": 64}, "the base is out of range"),
        ({"q": 7}, "the prime claims used are not one for each prime factor"),
        ({"n": 29}, "the prime claims used are not one for each prime factor"),
    ],
)
def test_a_changed_statement_is_refuted(changed: dict[str, int], reason: str) -> None:
    """4 = 2^2 has order 11 modulo 23; 9 has it too, but does not come from the least base."""
    claim, used = made(23, 11)
    assert (claim.base, claim.g) == (2, 4)

    with pytest.raises(Refuted, match=reason):
        replace(claim, **changed).check(used, secrets.randbelow)


def test_an_order_that_does_not_divide_is_refuted() -> None:
    """Even where both numbers are shown to be prime."""
    used = {claim.id: claim for claim in (Prime(23, "below-2^64"), Prime(7, "below-2^64"))}
    claim = SubgroupGenerator(23, 7, 2, 8, tuple(sorted(used)))

    with pytest.raises(Refuted, match="does not divide"):
        claim.check(used, secrets.randbelow)


@pytest.mark.parametrize("key", ["n", "q", "base", "g"])
def test_a_statement_without_one_of_its_integers_is_no_claim(key: str) -> None:
    """Nothing is read into a statement that is not complete."""
    record = made(23, 11)[0].record()
    del record["statement"][key]

    with pytest.raises(ValueError, match="expected the keys base, g, n, q"):
        read_claim(record)
