"""Pollard's rho with distinguished points: memory for thousands of logarithms of steps only.

Walks start at g^a h^b for drawn a and b and multiply by one of ``BRANCHES`` fixed elements of the
same shape, chosen by the low bits of where they stand. A trail ends at a distinguished point; when
two trails end at the same one, their exponents give the logarithm. Trails are numbered, each is a
function of the seed and its number alone, and they are merged in the order of their numbers, so
the answer and the count of operations do not depend on who computed which.

Sources: Pollard, "Monte Carlo methods for index computation (mod p)", Math. Comp. 32 (1978);
Teske, "Speeding up Pollard's rho method" (1998), for walks that add r precomputed elements; van
Oorschot, Wiener, "Parallel collision search with cryptanalytic applications", J. Cryptology 12
(1999), for distinguished points (all from memory).
"""

from collections import deque
from collections.abc import Iterator
from concurrent.futures import Executor
from dataclasses import dataclass
from itertools import count

from gmpy2 import invert, mpz, powmod

from auditor.search.log_result import Logarithm, Tally
from auditor.search.log_seed import drawn

BRANCHES = 32
BRANCH_BITS = 5
"""32 branches cost 1/sqrt(1 - 1/32), that is 1.6 percent, more steps than a random map would."""

TRAILS_PER_UNIT = 4
UNITS_AHEAD = 8
"""Units handed to the executor before the first one is waited for."""

LONGEST = 32
"""A trail this many times its expected length is in a cycle and is given up."""


@dataclass(frozen=True, slots=True)
class Walk:
    """One problem and its fixed walk: everything a trail depends on."""

    n: mpz
    g: mpz
    h: mpz
    q: mpz
    seed: int
    distinguished_bits: int
    branches: tuple[tuple[int, int, mpz], ...]

    def start(self, trail: int) -> tuple[int, int, mpz]:
        """a, b and g^a h^b, for this trail."""
        a = drawn(self.q, self.seed, trail, "a")
        b = drawn(self.q, self.seed, trail, "b")
        return a, b, powmod(self.g, a, self.n) * powmod(self.h, b, self.n) % self.n


@dataclass(frozen=True, slots=True)
class Trail:
    """A finished trail: its number, the distinguished point or None, and its operations."""

    number: int
    end: mpz | None
    operations: int


def rho(
    n: int,
    g: int,
    h: int,
    q: int,
    *,
    seed: int = 0,
    executor: Executor | None = None,
    tally: Tally | None = None,
) -> Logarithm:
    """The logarithm of h to the base g modulo n, where g has prime order q.

    Expected work sqrt(pi q / 2) operations (the rho method with a random map), 2 percent more for
    the branches, and what is under way in trails. An ``executor`` shares out units of trails; it
    changes neither the answer nor the count. NotFound when h^q is not 1. Where n is not a prime
    power, an h of order q may still lie outside the group of g: then only the budget ends the
    search.
    """
    tally = tally or Tally()
    if tally.power(h, q, mpz(n)) != 1:
        raise tally.nothing("the element does not have the order of the group")
    walk = make_walk(n, g, h, q, seed)
    tally.spend(BRANCHES * 3 * walk.q.bit_length())
    ends: dict[mpz, int] = {}
    for trail in _trails(walk, executor):
        tally.spend(trail.operations)
        if trail.end is None:
            continue
        first = ends.setdefault(trail.end, trail.number)
        if first != trail.number:
            value = _solve(walk, first, trail.number)
            if value is not None:
                return Logarithm(value, int(q), tally.operations)
    raise AssertionError("trails do not end")


def make_walk(n: int, g: int, h: int, q: int, seed: int) -> Walk:
    """The walk for this problem and seed.

    A trail of L steps costs 3 lg q operations to start, and L are lost at the end, so that L near
    8 q^(1/4) is best; but not more than sqrt(q)/16, or walks would close before they end.
    """
    modulus, base, element = mpz(n), mpz(g) % n, mpz(h) % n
    branches = []
    for index in range(BRANCHES):
        a, b = drawn(q, seed, "branch", index, "a"), drawn(q, seed, "branch", index, "b")
        step = powmod(base, a, modulus) * powmod(element, b, modulus) % modulus
        branches.append((a, b, step))
    size = int(q).bit_length()
    bits = max(0, min(size // 4 + 3, size // 2 - 4))
    return Walk(modulus, base, element, mpz(q), seed, bits, tuple(branches))


def follow(walk: Walk, first: int, count: int) -> tuple[Trail, ...]:
    """The trails first, first + 1, ...: one unit of work, a function of its arguments alone."""
    return tuple(_follow_one(walk, number) for number in range(first, first + count))


def _follow_one(walk: Walk, number: int) -> Trail:
    *_, x = walk.start(number)
    n, steps = walk.n, [step for _, _, step in walk.branches]
    branch, low = BRANCHES - 1, (BRANCHES << walk.distinguished_bits) - 1
    longest = LONGEST << walk.distinguished_bits
    overhead = 3 * walk.q.bit_length()
    for made in range(longest):
        bits = int(x & low)
        if bits < BRANCHES:
            return Trail(number, x, made + overhead)
        x = x * steps[bits & branch] % n
    return Trail(number, None, longest + overhead)


def _trails(walk: Walk, executor: Executor | None) -> Iterator[Trail]:
    firsts = count(0, TRAILS_PER_UNIT)
    if executor is None:
        for first in firsts:
            yield from follow(walk, first, TRAILS_PER_UNIT)
        return
    waiting = deque(
        executor.submit(follow, walk, next(firsts), TRAILS_PER_UNIT) for _ in range(UNITS_AHEAD)
    )
    try:
        while True:
            yield from waiting.popleft().result()
            waiting.append(executor.submit(follow, walk, next(firsts), TRAILS_PER_UNIT))
    finally:
        for future in waiting:
            future.cancel()


def _solve(walk: Walk, one: int, other: int) -> int | None:
    """The logarithm from two trails with one end; None when they are the same walk in disguise."""
    (a, b), (c, d) = _exponents(walk, one), _exponents(walk, other)
    if (d - b) % walk.q == 0:
        return None
    return int((a - c) * invert(d - b, walk.q) % walk.q)


def _exponents(walk: Walk, number: int) -> tuple[int, int]:
    """The trail again, this time with the exponents of g and h at its end."""
    a, b, x = walk.start(number)
    low = (BRANCHES << walk.distinguished_bits) - 1
    while (bits := int(x & low)) >= BRANCHES:
        da, db, step = walk.branches[bits % BRANCHES]
        a, b, x = a + da, b + db, x * step % walk.n
    return a, b
