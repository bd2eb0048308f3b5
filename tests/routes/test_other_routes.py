"""Raw messages, prime powers and composite moduli."""

import math
import random

import flint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.routes.base import Closed, Work, floor_bits
from auditor.routes.composite_modulus import (
    DEEPEST_SEARCH_BITS,
    Component,
    composite_modulus,
    composite_modulus_outsider,
    elliptic_curve_bits,
)
from auditor.routes.factors import Factors
from auditor.routes.pohlig_hellman import pohlig_hellman_bits
from auditor.routes.prime_power import prime_power
from auditor.routes.raw_message import SPLITTING_SHARES, raw_message
from auditor.routes.sieve_models import nist_bits
from auditor.search.plan import LEVELS

# A modulus made for the purpose: both p_i - 1 are 2^14-smooth. Factors computed with gmpy2.
SMOOTH_MODULUS = 0x626CB3DC708C74F7F155E6EAB3AEA85D048F669168EFD8C9DB85276CD7CC57F1C4D
SMOOTH_PRIMES = (0x59F31F8DF404EE97B20A3DEF28BBAB187EF, 0x1181EB2E4EAED7303335D8FD2A01D4383)

COMPOSITES = st.lists(st.integers(3, 60), min_size=2, max_size=5)


def test_raw_messages_cost_half_their_length() -> None:
    """A 64-bit session key in a large cofactor falls to two tables of 2^32 powers."""
    work = raw_message(64, 864.0)

    assert isinstance(work, Work)
    assert work.bits == 33
    assert dict(work.details)["share of messages that split in equal halves"] == 0.17


def test_a_small_cofactor_closes_the_raw_message_route() -> None:
    """With a safe prime only the Legendre symbol of the message shows."""
    assert isinstance(raw_message(128, 1.0), Closed)
    assert isinstance(raw_message(128, 127.9), Closed)
    assert isinstance(raw_message(128, 128.0), Work)


def test_the_share_of_messages_that_split() -> None:
    """Factoring random numbers confirms the shares, to four standard deviations."""
    for length, share in SPLITTING_SHARES[:2]:
        generator = random.Random(length)
        sample = [generator.randrange(1, 2**length) for _ in range(4000)]
        found = sum(halves(m, length // 2) is not None for m in sample) / len(sample)
        assert found == pytest.approx(share, abs=4 * math.sqrt(share / len(sample)))


def test_a_message_is_read_without_a_key() -> None:
    """In a toy group a message that splits is found from its ciphertext alone."""
    q, message_bits = 1073741827, 20
    p = next(p for k in range(2**34, 2**35) if flint.fmpz(p := k * q + 1).is_probable_prime())
    generator = random.Random(7)
    g = next(g for a in range(2, 99) if (g := pow(a, (p - 1) // q, p)) != 1)
    m = 997 * 1013
    y = pow(g, generator.randrange(1, q), p)
    ciphertext = m * pow(y, generator.randrange(1, q), p) % p

    unmasked = pow(ciphertext, q, p)
    table = {pow(m1, q, p): m1 for m1 in range(1, 2 ** (message_bits // 2))}
    met = [
        table[image] * m2
        for m2 in range(1, 2 ** (message_bits // 2))
        if (image := unmasked * pow(m2, -q, p) % p) in table
    ]

    assert set(met) == {m}


def halves(m: int, length: int) -> int | None:
    """A divisor d <= 2^length of m with m / d <= 2^length, if any."""
    divisors = [1]
    for prime, exponent in flint.fmpz(m).factor():
        powers = [int(prime) ** e for e in range(exponent + 1)]
        divisors = [d * power for d in divisors for power in powers if d * power <= 2**length]
    return next((d for d in divisors if m // d <= 2**length), None)


@given(st.integers(1, 64), st.integers(1, 64), st.floats(0, 70))
def test_longer_messages_cost_more(one: int, other: int, cofactor: float) -> None:
    """A longer message never makes the route cheaper, and may close it."""
    figures = [
        work.bits if isinstance(work, Work) else math.inf
        for work in (raw_message(bits, cofactor) for bits in sorted((one, other)))
    ]

    assert figures[0] <= figures[1]


def test_a_prime_power_is_worth_its_prime() -> None:
    """A 2048-bit power of a 512-bit prime has 57 bits, not 110."""
    work = prime_power(2**512 - 569, 4)

    assert work.bits == nist_bits(512) < nist_bits(2048)
    assert dict(work.details) == {"prime length": 512, "power": 4}


def test_a_power_of_two_is_worth_nothing() -> None:
    """Logarithms modulo 2^k take polynomial time."""
    work = prime_power(2, 2048)

    assert (work.bits, work.model.certainty) == (0.0, "exact")


def test_a_modulus_with_smooth_factors_is_a_trapdoor() -> None:
    """Its holder needs about the square root of the largest prime, an outsider the p - 1 method."""
    assert math.prod(SMOOTH_PRIMES) == SMOOTH_MODULUS
    components = []
    for prime in SMOOTH_PRIMES:
        factored = [(int(r), e) for r, e in flint.fmpz(prime - 1).factor()]
        order = Factors(tuple(factored))
        largest = max(order.primes)
        assert largest < 2**14
        assert math.prod(order.primes) == prime - 1
        components.append(Component(prime.bit_length(), pohlig_hellman_bits(order), largest))
    length = SMOOTH_MODULUS.bit_length()

    maker = composite_modulus(length, tuple(components), 0)
    outsider = composite_modulus_outsider(length, tuple(components), 0)

    assert (maker.attacker, outsider.attacker) == ("designer", "passive")
    assert maker.bits < 11
    assert math.log2(1.44 * 2**13) < outsider.bits < math.log2(1.44 * 2**14)
    assert (maker.bound, outsider.bound) == ("exact", "exact")


def test_an_outsider_takes_out_the_primes_that_are_cheap_to_find() -> None:
    """Curves find a 128-bit factor; what remains of two 960-bit primes needs the sieve."""
    three = (Component(128), Component(960), Component(960))
    outsider = composite_modulus_outsider(2048, three, 0)

    assert elliptic_curve_bits(128) < nist_bits(1920)
    assert outsider.bits == pytest.approx(nist_bits(1921), abs=1e-9)
    assert composite_modulus_outsider(2048, (), 2048).bits == nist_bits(2048)
    assert composite_modulus(2048, (), 2048).bits == nist_bits(2047)


def test_taking_out_all_primes_but_one_factors_the_modulus() -> None:
    """Of two primes only the smaller must be found; no sieve is left to run."""
    two = dict(composite_modulus_outsider(2048, (Component(128), Component(1920)), 0).details)
    three = (Component(128), Component(960), Component(960))

    assert two["factoring"] == floor_bits(elliptic_curve_bits(128))
    assert dict(composite_modulus_outsider(2048, three, 0).details)["factoring"] > 100


def test_what_a_search_found_is_found_again() -> None:
    """Two known primes of 1024 bits cost what the search cost, not what the sieve would."""
    hidden = (Component(1024), Component(1024))
    found = tuple(Component(1024, discovered=True) for _ in hidden)
    smooth = tuple(Component(1024, logarithm_bits=20.0, discovered=True) for _ in hidden)

    assert composite_modulus_outsider(2048, hidden, 0).bits == nist_bits(2048)
    assert composite_modulus_outsider(2048, found, 0).bits == nist_bits(1024)
    assert composite_modulus_outsider(2048, found, 0).bound == "exact"
    assert composite_modulus_outsider(2048, smooth, 0).bits == DEEPEST_SEARCH_BITS
    assert composite_modulus_outsider(2048, smooth, 0).bound == "at most"


def test_the_deepest_search_costs_that_much() -> None:
    """About thirteen multiplications for each unit of the first bounds, second stages included."""
    steps = sum(level.curves * level.b1 for level in LEVELS)

    assert 0 < DEEPEST_SEARCH_BITS - math.log2(13 * steps) < 1


def test_an_outsider_is_not_spared_the_logarithms() -> None:
    """When a small factor is found at once, the logarithm modulo the large one is what costs."""
    outsider = composite_modulus_outsider(1100, (Component(77), Component(1024)), 0)

    assert outsider.bits == nist_bits(1024)


@given(COMPOSITES, st.data())
def test_more_factors_never_raise_the_figures(lengths: list[int], data: st.DataObject) -> None:
    """Splitting primes off the modulus one by one lowers or keeps both figures."""
    generator = random.Random(repr(lengths))
    primes = sorted({int(random_prime(generator, length * 8)) for length in lengths})
    if len(primes) < 2:
        return
    revealed = data.draw(st.permutations(primes))
    whole = math.prod(primes).bit_length()
    makers, outsiders = [], []
    for count in [*range(len(primes) - 1), len(primes)]:
        known = tuple(Component(prime.bit_length()) for prime in revealed[:count])
        rest = math.prod(revealed[count:])
        length = rest.bit_length() if count < len(primes) else 0
        makers.append(composite_modulus(whole, known, length).bits)
        outsiders.append(composite_modulus_outsider(whole, known, length).bits)

    assert makers == sorted(makers, reverse=True)
    assert outsiders == sorted(outsiders, reverse=True)
    assert all(maker <= outsider for maker, outsider in zip(makers, outsiders, strict=True))


def random_prime(generator: random.Random, length: int) -> flint.fmpz:
    """The first probable prime from a random number of that length on."""
    candidate = flint.fmpz(generator.getrandbits(length) | 1 << (length - 1) | 1)
    while not candidate.is_probable_prime():
        candidate += 2
    return candidate
