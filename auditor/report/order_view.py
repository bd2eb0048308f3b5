"""The factored group order of a set, put together from the claims of the record."""

from collections.abc import Mapping
from dataclasses import dataclass
from math import gcd
from typing import Any

from auditor.report.pictures import OrderStrip, order_strip
from auditor.report.text import read_integer

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class GroupOrders:
    """The factorizations and orders that a record's claims state, by what they are about."""

    factorizations: Mapping[int, tuple[Mapping[int, int], int]]
    orders: Mapping[tuple[int, int], Mapping[int, int]]
    primes: frozenset[int]

    @classmethod
    def read(cls, claims: Mapping[str, Record]) -> "GroupOrders":
        """From the claims of a record; where several speak of one number, the most complete."""
        factorizations: dict[int, tuple[Mapping[int, int], int]] = {}
        orders: dict[tuple[int, int], tuple[Mapping[int, int], int]] = {}
        primes = set()
        for claim in claims.values():
            says = claim["statement"]
            if claim["kind"] == "prime":
                primes.add(read_integer(says["n"]))
            elif claim["kind"] == "factorization":
                _keep(factorizations, read_integer(says["n"]), says["factors"], says["rest"])
            elif claim["kind"] == "order":
                about = read_integer(says["modulus"]), read_integer(says["element"])
                _keep(orders, about, says["known"], says["rest"])
        known = {about: factors for about, (factors, _) in orders.items()}
        return cls(factorizations, known, frozenset(primes))

    def strip(self, declaration: Record) -> OrderStrip | None:
        """The strip of the unit group modulo the declared modulus; None where its order is not
        put together from claims."""
        n = read_integer(declaration["modulus"])
        order = self._order(n)
        if order is None or n < 2:
            return None
        factors, rest = order
        generator = read_integer(declaration["generator"]) % n
        return order_strip(factors, rest, self.orders.get((n, generator)))

    def _order(self, n: int) -> tuple[Mapping[int, int], int] | None:
        """phi(n) as known prime powers times a rest that is coprime to them."""
        if n in self.primes:
            return self.factorizations.get(n - 1)
        if n not in self.factorizations or self.factorizations[n][1] != 1:
            return None
        total: dict[int, int] = {}
        rest = 1
        for prime, exponent in self.factorizations[n][0].items():
            part = ({}, 1) if prime == 2 else self.factorizations.get(prime - 1)
            if part is None:
                return None
            for factor, count in [*part[0].items(), (prime, exponent - 1)]:
                total[factor] = total.get(factor, 0) + count
            rest *= part[1]
        known = {factor: count for factor, count in total.items() if count}
        return (known, rest) if all(gcd(rest, factor) == 1 for factor in known) else None


def _keep(
    found: dict[Any, tuple[Mapping[int, int], int]], about: Any, known: Any, rest: Any
) -> None:
    factors = {read_integer(prime): exponent for prime, exponent in known}
    left = read_integer(rest)
    if about not in found or left < found[about][1]:
        found[about] = factors, left
