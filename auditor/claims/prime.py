"""The claim that a number is prime, by one of three methods.

``below-2^64``: decided by strong tests to twelve bases.
``n-1``: proved from prime factors of n-1 (Pocklington 1914; Brillhart, Lehmer, Selfridge,
"New primality criteria and factorizations of 2^m +- 1", Math. Comp. 29, 1975, Theorem 7 with
m = 1, clause numbers from memory). No stronger than the weakest prime it uses.
``baillie-psw``: probable, with so many further rounds to unpredictable bases.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from math import isqrt
from typing import Any, Literal

import gmpy2

from auditor.claims.base import (
    Claim,
    Draw,
    Factors,
    product,
    require,
    require_normal,
    require_primes,
)
from auditor.claims.primality_tests import (
    DETERMINISTIC_BELOW,
    is_prime_below_2_64,
    is_probable_prime,
    passes_strong_test,
)
from auditor.claims.reading import natural, only, pairs
from auditor.claims.standing import Standing

Method = Literal["below-2^64", "n-1", "baillie-psw"]
ROUNDS = (16, 64)
"""Rounds that a probable-prime claim may state: at quick effort, and otherwise."""


@dataclass(frozen=True)
class Prime(Claim):
    """``n`` is prime.

    ``factored`` are prime powers r^e exactly dividing n-1 and ``witnesses`` a base for each r, for
    the method ``n-1``; ``rounds`` counts strong tests, for the method ``baillie-psw``.
    """

    kind = "prime"

    n: int
    method: Method
    rounds: int = 0
    factored: Factors = ()
    witnesses: tuple[tuple[int, int], ...] = ()
    uses: tuple[str, ...] = ()

    @property
    def standing(self) -> Standing:
        return Standing.PROBABLE if self.method == "baillie-psw" else Standing.PROVEN

    def statement(self) -> dict[str, Any]:
        return {"n": self.n}

    def certificate(self) -> dict[str, Any]:
        if self.method == "baillie-psw":
            return {"method": self.method, "rounds": self.rounds, "error_bits": 2 * self.rounds}
        if self.method == "n-1":
            return {
                "method": self.method,
                "factored": self.factored,
                "witnesses": self.witnesses,
            }
        return {"method": self.method}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Prime":
        only(statement, "n")
        n, method = natural(statement["n"]), certificate["method"]
        if method == "baillie-psw":
            only(certificate, "method", "rounds", "error_bits")
            rounds = natural(certificate["rounds"])
            if certificate["error_bits"] != 2 * rounds:
                raise ValueError("the error bound does not follow from the rounds")
            return cls(n, method, rounds=rounds, uses=uses)
        if method == "n-1":
            only(certificate, "method", "factored", "witnesses")
            factored, witnesses = pairs(certificate["factored"]), pairs(certificate["witnesses"])
            return cls(n, method, factored=factored, witnesses=witnesses, uses=uses)
        if method == "below-2^64":
            only(certificate, "method")
            return cls(n, method, uses=uses)
        raise ValueError(f"no such method of proof: {method!r}")

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        self.check_form(used)
        if self.method == "below-2^64":
            require(is_prime_below_2_64(self.n), "composite")
        elif self.method == "baillie-psw":
            require(is_probable_prime(self.n, self.rounds, draw), "composite")
        else:
            for prime, base in self.witnesses:
                shown = is_witness(self.n, prime, base)
                require(shown, "a witness does not show its factor")

    def check_again(self, used: Mapping[str, Claim], draw: Draw) -> None:
        """What is asked of a claim that was checked before, by somebody who may be mistaken: the
        whole check, but of all rounds of a probable prime a single one, to a base from ``draw``."""
        if self.method != "baillie-psw":
            self.check(used, draw)
            return
        self.check_form(used)
        require(passes_strong_test(self.n, 2 + draw(self.n - 3)), "composite")

    def check_form(self, used: Mapping[str, Claim]) -> None:
        """The part of the check that takes no exponentiation. Raises :class:`Refuted`."""
        require(self.method == "n-1" or not self.uses, "this method uses no other claim")
        if self.method == "below-2^64":
            require(self.n < DETERMINISTIC_BELOW, "not below 2^64")
        elif self.method == "baillie-psw":
            require(self.n >= DETERMINISTIC_BELOW, "below 2^64 primality is decided, not probable")
            require(self.n % 2 == 1, "composite")
            require(self.rounds in ROUNDS, "an unknown number of rounds")
        else:
            self._check_factored_part(used)

    def _check_factored_part(self, used: Mapping[str, Claim]) -> None:
        n = self.n
        require(n > 2 and n % 2 == 1, "not an odd number above 2")
        require_normal(self.factored, n)
        primes = {prime for prime, _ in self.factored}
        require(dict(self.factored).keys() == dict(self.witnesses).keys(), "a witness is missing")
        require(len(self.witnesses) == len(primes), "a prime has two witnesses")
        require(all(1 < base < n for _, base in self.witnesses), "a witness is out of range")
        require_primes(primes, used)
        require(len(used) == len(primes), "a claim is used that says nothing")
        part = product(self.factored)
        require((n - 1) % part == 0, "the factors do not divide n-1")
        rest = (n - 1) // part
        require(gmpy2.gcd(part, rest) == 1, "a factor still divides the rest of n-1")
        require(factored_enough(n, part), "the factored part of n-1 is too small")


def is_witness(n: int, prime: int, base: int) -> bool:
    """base^(n-1) = 1 and gcd(base^((n-1)/prime) - 1, n) = 1: Pocklington's condition."""
    power = gmpy2.powmod(base, (n - 1) // prime, n)
    return bool(gmpy2.powmod(power, prime, n) == 1 and gmpy2.gcd(power - 1, n) == 1)


def factored_enough(n: int, part: int) -> bool:
    """Whether a factored part F of n-1, coprime to the rest, suffices for a proof.

    By Pocklington when (F+1)^2 > n; otherwise by Brillhart, Lehmer and Selfridge, which needs F
    even, R = (n-1)/F = 2Fs + r odd, n < (F+1)(2F^2 + (r-1)F + 1), and s = 0 or r^2 - 8s no square.
    """
    if (part + 1) ** 2 > n:
        return True
    rest = (n - 1) // part
    if part % 2 or rest % 2 == 0:
        return False
    s, r = divmod(rest, 2 * part)
    if n >= (part + 1) * (2 * part * part + (r - 1) * part + 1):
        return False
    discriminant = r * r - 8 * s
    return s == 0 or discriminant < 0 or isqrt(discriminant) ** 2 != discriminant
