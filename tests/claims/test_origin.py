"""Claims about the origin of p and q: replays that end anywhere, and what is bounded in them."""

import secrets
from dataclasses import replace

import gmpy2
import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.claims.base import Claim, Refuted
from auditor.claims.collection import read_claim
from auditor.claims.composite import Composite
from auditor.claims.origin import Origin, regenerate
from auditor.claims.origin_generator import CanonicalGenerator, canonical_generator
from auditor.claims.origin_recipe import (
    FIPS186_2,
    HASH_LENGTHS,
    HASHES,
    PROBABLE,
    PROVABLE,
    Recipe,
    Seed,
    hash_bytes,
    seed_bytes,
    seed_integer,
)
from auditor.claims.origin_replay import Construction, Outcome, replay
from auditor.claims.prime import Prime
from auditor.claims.standing import Standing
from auditor.questions import Asks, Question
from tests.standards.vectors import OriginCase, origin_cases

CASES = origin_cases()
METHODS = (PROBABLE, PROVABLE, FIPS186_2)


def accepted(method: str) -> OriginCase:
    """A small set that its recipe regenerates."""
    return min(
        (c for c in CASES if c.recipe.method == method and c.expected is Outcome.REGENERATED),
        key=lambda case: (case.lengths, case.recipe.counters),
    )


def prime_claim(number: int) -> Prime:
    """What the numbers of the vectors are known to be."""
    return Prime(number, "baillie-psw", rounds=64)


def made(case: OriginCase) -> Origin:
    """The claim about a case whose numbers are primes."""
    return regenerate(case.p, case.q, case.recipe, prime_claim, secrets.randbelow)


def refutation(claim: Claim, *used: Claim) -> str:
    """The reason why the check fails; the test fails where it does not."""
    with pytest.raises(Refuted) as caught:
        claim.check({item.id: item for item in used}, secrets.randbelow)
    return str(caught.value)


def never(number: int) -> bool:
    """For replays that must end before primality matters."""
    raise AssertionError("primality was asked for")


# Recipes


@given(st.binary(max_size=40))
def test_seeds_keep_their_leading_zeros(seed: bytes) -> None:
    """The spelling as an integer is exact."""
    assert seed_bytes(seed_integer(seed)) == seed


@given(st.binary(min_size=1, max_size=30), st.integers(0, 2**250))
def test_seeds_count_modulo_their_length(seed: bytes, k: int) -> None:
    """seed + k keeps the number of bytes and wraps around."""
    total = (int.from_bytes(seed, "big") + k) % 256 ** len(seed)

    assert Seed(seed).plus(k) == total.to_bytes(len(seed), "big")


@pytest.mark.parametrize("method", METHODS)
def test_a_recipe_has_two_exact_spellings(method: str) -> None:
    """As integers in a question, and as a record in a claim."""
    recipe = accepted(method).recipe

    assert Recipe.from_integers(recipe.integers()) == recipe
    assert Recipe.read(recipe.record()) == recipe


@pytest.mark.parametrize("name", HASHES)
def test_hash_functions_have_their_length(name: str) -> None:
    """The table of FIPS 180-4 lengths is that of the functions."""
    assert 8 * len(hash_bytes(name, b"")) == HASH_LENGTHS[name]


def test_hash_functions_are_those_of_the_standard() -> None:
    """FIPS 180-4 example "abc": the first bytes of three digests."""
    assert hash_bytes("sha1", b"abc").hex().startswith("a9993e364706816aba3e")
    assert hash_bytes("sha256", b"abc").hex().startswith("ba7816bf8f01cfea4141")
    assert hash_bytes("sha512-256", b"abc").hex().startswith("53048e2681941ef99b2e")


@pytest.mark.parametrize(
    ("method", "name", "seeds", "counters"),
    [
        ("pi-formula", "sha1", (b"a",), (1,)),
        (PROBABLE, "md5", (b"a",), (1,)),
        (PROBABLE, "sha1", (b"a", b"b"), (1,)),
        (PROVABLE, "sha1", (b"a",), (1,)),
        (FIPS186_2, "sha256", (b"a",), (1,)),
        (PROBABLE, "sha1", (b"a",), (-1,)),
    ],
)
def test_recipes_of_no_method_are_refused(
    method: str, name: str, seeds: tuple[bytes, ...], counters: tuple[int, ...]
) -> None:
    """Unknown methods and hashes, and seeds and counters that a method does not have."""
    with pytest.raises(ValueError):  # noqa: PT011  (the message differs by case)
        Recipe(method, name, seeds, counters)


# Replays


@pytest.mark.parametrize("method", METHODS)
def test_a_claim_is_read_back(method: str) -> None:
    """What is written is read, and another spelling is refused."""
    claim = made(accepted(method))

    assert read_claim(claim.record()) == claim
    record = claim.record()
    record["statement"]["recipe"]["seeds"][0] = record["statement"]["recipe"]["seeds"][0].upper()
    with pytest.raises(ValueError, match="spelling"):
        read_claim(record)


@pytest.mark.parametrize("method", METHODS)
def test_another_end_is_refuted(method: str) -> None:
    """A claim that ends otherwise, or hides what it rests on, does not pass."""
    case = accepted(method)
    claim, used = made(case), (prime_claim(case.p), prime_claim(case.q))
    claim.check({item.id: item for item in used}, secrets.randbelow)

    for outcome in set(Outcome) - {Outcome.REGENERATED}:
        refutation(replace(claim, outcome=outcome), *used)
    assert "not shown" in refutation(claim)
    assert "not shown" in refutation(claim, used[0])
    assert "says nothing" in refutation(claim, *used, prime_claim(2**127 - 1))


@pytest.mark.parametrize("method", METHODS)
def test_composite_numbers_never_pass(method: str) -> None:
    """With q or p composite the replay ends there, whatever the seeds lead to."""
    case = accepted(method)
    for bad, end in ((case.q, Outcome.Q_COMPOSITE), (case.p, Outcome.P_COMPOSITE)):
        outcome = replay(case.p, case.q, case.recipe, lambda n, bad=bad: n != bad, never)
        assert outcome is end


def test_the_first_prime_must_be_taken() -> None:
    """A counter whose candidate is a prime after an earlier one is refused, as probable."""
    later = next_prime_candidate(accepted(PROBABLE))
    claim = regenerate(later.p, later.q, later.recipe, prime_claim, secrets.randbelow)
    assert claim.outcome is Outcome.EARLIER_PRIME
    assert claim.standing is Standing.PROBABLE
    claim.check({c.id: c for c in (prime_claim(later.p), prime_claim(later.q))}, secrets.randbelow)


def next_prime_candidate(case: OriginCase) -> OriginCase:
    """The next prime after p among the candidates of its seed, step by step as A.1.1.2 prints."""
    (seed,), (counter,) = case.recipe.seeds, case.recipe.counters
    length, outlen = case.p.bit_length(), HASH_LENGTHS[case.recipe.hash]
    n = -(-length // outlen) - 1
    b = length - 1 - n * outlen
    value, size = int.from_bytes(seed, "big"), len(seed)
    offset = 1
    for i in range(4 * length):
        v = [
            int.from_bytes(
                hash_bytes(
                    case.recipe.hash,
                    ((value + offset + j) % 2 ** (8 * size)).to_bytes(size, "big"),
                ),
                "big",
            )
            for j in range(n + 1)
        ]
        w = sum(v[j] * 2 ** (j * outlen) for j in range(n)) + (v[n] % 2**b) * 2 ** (n * outlen)
        x = w + 2 ** (length - 1)
        p = x - (x % (2 * case.q) - 1)
        if i > counter and p >= 2 ** (length - 1) and gmpy2.powmod(2, p - 1, p) == 1:
            recipe = replace(case.recipe, counters=(i,))
            return case._replace(p=p, recipe=recipe)
        offset += n + 1
    raise AssertionError("no further prime")


def test_claims_without_primality_are_proven() -> None:
    """That a seed gives another q rests on nothing but hashing."""
    case = accepted(PROBABLE)
    recipe = replace(case.recipe, seeds=(b"\x00" * 20,))
    claim = regenerate(case.p, case.q, recipe, prime_claim, secrets.randbelow)

    assert (claim.outcome, claim.uses, claim.standing) == (Outcome.OTHER_Q, (), Standing.PROVEN)
    claim.check({}, secrets.randbelow)


def test_a_composite_q_is_used_as_a_claim() -> None:
    """The end at a composite number rests on the claim that it is composite."""
    case = accepted(PROVABLE)
    witness = Composite(case.q, witness=2)

    def settled(number: int) -> Prime | Composite:
        return witness if number == case.q else prime_claim(number)

    claim = regenerate(case.p, case.q, case.recipe, settled, secrets.randbelow)
    assert (claim.outcome, claim.uses) == (Outcome.Q_COMPOSITE, (witness.id,))
    claim.check({witness.id: witness}, secrets.randbelow)


# What strangers may declare


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("counter", [12288, 2**32 - 1, 2**300])
def test_huge_counters_end_at_once(method: str, counter: int) -> None:
    """A counter beyond its limit is refused before anything is hashed; a construction, which
    counts by itself, comes to its own end."""
    case = accepted(method)
    counters = tuple(counter for _ in case.recipe.counters)
    recipe = replace(case.recipe, counters=counters)
    expected = Outcome.OTHER_Q if method == PROVABLE else Outcome.COUNTER

    asked = (lambda n: True) if method == PROVABLE else never
    assert replay(case.p, case.q, recipe, asked, never) is expected


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("seed", [b"", b"\xff", b"\xff" * 19])
def test_short_seeds_end_at_once(method: str, seed: bytes) -> None:
    """Fewer bits than q has are no seed."""
    case = accepted(method)
    recipe = replace(case.recipe, seeds=tuple(seed for _ in case.recipe.seeds))

    assert replay(case.p, case.q, recipe, never, never) is Outcome.SEED_LENGTH


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(("p", "q"), [(2, 2), (23, 11), (2**1024 + 1, 2**159 + 1), (7, 2**160)])
def test_other_lengths_end_at_once(method: str, p: int, q: int) -> None:
    """Lengths that the method does not have, q above p included."""
    assert replay(p, q, accepted(method).recipe, never, never) is Outcome.LENGTHS


def test_a_hash_shorter_than_q_is_refused() -> None:
    """A.1.1.2 asks for a hash as long as q at least; shorter ones leave q hardly any choice."""
    case = next(c for c in CASES if c.lengths == (2048, 256) and c.recipe.method == PROBABLE)
    recipe = replace(case.recipe, hash="sha224")

    assert replay(case.p, case.q, recipe, never, never) is Outcome.HASH_LENGTH


@pytest.mark.parametrize("method", [PROBABLE, FIPS186_2])
def test_long_seeds_are_hashed_as_they_are(method: str) -> None:
    """A seed of 32 KiB leads somewhere else and to an end."""
    case = accepted(method)
    recipe = replace(case.recipe, seeds=(b"\xff" * 2**15,))

    assert replay(case.p, case.q, recipe, never, never) is Outcome.OTHER_Q


def test_a_seed_that_counts_past_its_length_is_reported() -> None:
    """The standard does not say what a carry does in Shawe-Taylor: nothing is guessed."""
    case = accepted(PROVABLE)
    full = b"\xff" * len(case.recipe.seeds[0])
    recipe = replace(case.recipe, seeds=(full, full, full))

    assert replay(case.p, case.q, recipe, lambda n: True, never) is Outcome.SEED_CARRY


@pytest.mark.parametrize("length", [2, 3, 16, 32, 33, 34, 64, 65, 100])
@pytest.mark.parametrize("name", ["sha1", "sha512"])
def test_constructed_primes_are_primes_of_their_length(length: int, name: str) -> None:
    """Shawe-Taylor at sizes where a deterministic test is at hand; no seed among 40 gives a
    composite."""
    for start in range(40):
        construction = Construction(name, Seed(bytes((1, *[start] * 19))))
        prime = construction.prime(length)
        assert sympy.isprime(prime)
        assert prime.bit_length() == length


# Generators


P, Q = 1000003 * 36 + 1, 1000003  # both prime (sympy 1.14)


def canonical(**changes: object) -> CanonicalGenerator:
    """A claim in a small group, true as it stands."""
    values = {"n": P, "q": Q, "hash": "sha1", "seed": b"seed", "index": 1} | changes
    g = canonical_generator(
        values["n"], values["q"], values["hash"], values["seed"], values["index"]
    )
    return CanonicalGenerator(g=g or 0, canonical=g is not None, **values)  # type: ignore[arg-type]


def test_canonical_generator_claims() -> None:
    """True and false statements hold, their opposites are refuted, and both are read back."""
    claim = canonical()
    other = replace(claim, g=claim.g + 1, canonical=False)
    for holds in (claim, other):
        holds.check({}, secrets.randbelow)
        assert read_claim(holds.record()) == holds
        assert "otherwise" in refutation(replace(holds, canonical=not holds.canonical))
    assert "divide" in refutation(replace(claim, q=5))
    assert "byte" in refutation(replace(claim, index=256))
    assert "group" in refutation(replace(claim, n=1))


def test_a_hopeless_count_is_bounded() -> None:
    """Where every power is 1 the count stops, and nothing is canonical."""
    claim = canonical(q=1)

    assert not claim.canonical
    claim.check({}, secrets.randbelow)


def test_questions_about_origins_have_words() -> None:
    """Each names what it asks for, with long numbers shortened."""
    case = accepted(PROBABLE)
    question = Question(Asks.ORIGIN, (case.p, case.q, *case.recipe.integers()))

    assert "seed and counter" in question.about
    assert len(question.about) < 200
