"""The claim about relations through which classical ElGamal signatures are forged.

Bleichenbacher, EUROCRYPT 1996: a first half r with a known relation to the base alpha, and a large
factor in common with p - 1, gives signatures after a logarithm in the subgroup of order
(p - 1) / gcd(r, p - 1). What that costs is judged elsewhere; here relations are found and shown.
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from math import gcd
from typing import Any, Literal

import gmpy2

from auditor.claims.base import Claim, Draw, require
from auditor.claims.reading import natural, only, truth
from auditor.claims.small_primes import odd_primes
from auditor.encoding import integer

LARGEST_DIVISOR = 2**20
MOST_DIVISORS = 4096
HIGHEST_POWER = 64

Form = Literal["root", "power"]


@dataclass(frozen=True, slots=True, order=True)
class Relation:
    """alpha = +-r^power modulo p, with r = (p - 1) / a for a divisor a, for the form ``root``;
    r = +-alpha^power for the form ``power``. The sign is minus where ``negative``."""

    form: Form
    r: int
    power: int
    negative: bool

    def record(self) -> dict[str, Any]:
        """As it stands in a claim."""
        return {"form": self.form, "r": self.r, "power": self.power, "negative": self.negative}

    @classmethod
    def read(cls, record: Any) -> "Relation":
        """The inverse of :meth:`record`."""
        only(record, "form", "r", "power", "negative")
        if record["form"] not in ("root", "power"):
            raise ValueError("no such relation")
        return cls(
            record["form"],
            natural(record["r"]),
            integer(record["power"]),
            truth(record["negative"]),
        )


@dataclass(frozen=True)
class ForgeryRelations(Claim):
    """All ``relations`` between the base ``alpha`` and p - 1, for the prime ``n`` = p, among those
    looked for: alpha = +-a^(+-k) for the 4096 least divisors a of p - 1 from 2 to 2^20, and
    r = +-alpha^(+-k) of which no other shares more of p - 1; k from 1 to 64."""

    kind = "forgery-relations"

    n: int
    alpha: int
    relations: tuple[Relation, ...]

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "alpha": self.alpha,
            "relations": [relation.record() for relation in self.relations],
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "ForgeryRelations":
        only(statement, "n", "alpha", "relations")
        only(certificate)
        if uses or not isinstance(statement["relations"], list):
            raise ValueError("expected a list of relations, and no claim used")
        relations = tuple(map(Relation.read, statement["relations"]))
        return cls(natural(statement["n"]), natural(statement["alpha"]), relations)

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n > 3 and self.n % 2 == 1, "no odd prime above 3")
        require(1 < self.alpha < self.n - 1, "a trivial base")
        require(gcd(self.alpha, self.n) == 1, "the base is no unit")
        require(self.relations == relations(self.n, self.alpha), "other relations hold")


def forgery_relations(p: int, alpha: int) -> ForgeryRelations:
    """The claim about a prime and a base that is neither 1 nor -1."""
    return ForgeryRelations(p, alpha, relations(p, alpha))


def relations(p: int, alpha: int) -> tuple[Relation, ...]:
    """The relations that hold, sorted."""
    return tuple(sorted((*_roots(p, alpha), *_powers(p, alpha))))


def _roots(p: int, alpha: int) -> Iterator[Relation]:
    """alpha = s a^k with a | p - 1: then r = (p - 1) / a = -1/a and alpha = s (-1)^k r^-k."""
    inverse = int(gmpy2.invert(alpha, p))
    targets = {alpha: (1, 1), p - alpha: (1, -1), inverse: (-1, 1), p - inverse: (-1, -1)}
    for divisor in _divisors(p - 1):
        power = 1
        for k in range(1, HIGHEST_POWER + 1):
            power = power * divisor % p
            if power in targets:
                direction, sign = targets[power]
                negative = sign * (-1) ** k < 0
                yield Relation("root", (p - 1) // divisor, -direction * k, negative)
                break


def _powers(p: int, alpha: int) -> Iterator[Relation]:
    """The least powers of alpha, of either sign, whose shared factor with p - 1 divides that of no
    other."""
    shared: dict[int, Relation] = {}
    inverse = int(gmpy2.invert(alpha, p))
    forward = backward = 1
    for k in range(1, HIGHEST_POWER + 1):
        forward, backward = forward * alpha % p, backward * inverse % p
        for power, value in ((k, forward), (-k, backward)):
            for r, negative in ((value, False), (p - value, True)):
                if r not in (1, p - 1):
                    shared.setdefault(gcd(r, p - 1), Relation("power", r, power, negative))
    for factor in _maximal(shared):
        yield shared[factor]


def _maximal(numbers: Iterable[int]) -> list[int]:
    """Those that divide no other."""
    kept: list[int] = []
    for number in sorted(numbers, reverse=True):
        if all(other % number for other in kept):
            kept.append(number)
    return kept


def _divisors(number: int) -> list[int]:
    """The least divisors from 2 to 2^20, at most 4096, ascending."""
    divisors = [1]
    for prime, exponent in _small_factors(number):
        powers = [prime**e for e in range(exponent + 1) if prime**e <= LARGEST_DIVISOR]
        products = sorted(d * power for d in divisors for power in powers)
        divisors = [d for d in products if d <= LARGEST_DIVISOR][: MOST_DIVISORS + 1]
    return divisors[1:]


def _small_factors(number: int) -> Iterator[tuple[int, int]]:
    """The primes up to 2^20 that divide ``number``, with their multiplicities."""
    left = gmpy2.mpz(number)
    for prime in (2, *odd_primes(LARGEST_DIVISOR)):
        exponent = 0
        while left % prime == 0:
            left //= prime
            exponent += 1
        if exponent:
            yield prime, exponent
