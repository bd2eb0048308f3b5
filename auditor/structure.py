"""From the factorization of a modulus to its group of units: cycles, exponent, orders, generators.

Pure arithmetic on what is given. Nothing is searched for here and no primality is tested: a
number given as prime is taken to be prime, so a result stands as firmly as the factorization it
was made from. What is known decides the type, and a partial answer has another type and other
names than a complete one:

    known                                         type
    n and every p - 1 into primes                 UnitGroup
    n into primes, some p - 1 only in part        PartlyFactoredGroup
    n only in part                                UnsplitGroup

Source of the theory: Gauss, Disquisitiones arithmeticae, articles 52 to 92; Cohen, A Course in
Computational Algebraic Number Theory (1993), section 1.4 (from memory).
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import groupby, product
from math import gcd, lcm, prod

from gmpy2 import powmod

from auditor.element_orders import (
    Factors,
    WrongFactorization,
    generates,
    lift_primitive_root,
    lifted,
    order_by_stripping,
    part_of,
    product_of,
    split,
    unit,
)


@dataclass(frozen=True, slots=True)
class Cycle:
    """One cyclic direct factor of the unit group: its order, and the prime power it lives modulo.

    ``seed`` is a fixed generator where one is known without a search (-1 and 5 modulo 2^k).
    """

    order: int
    modulus: int
    seed: int | None = None


@dataclass(frozen=True, slots=True)
class PartialOrder:
    """The order of an element is ``known`` times an unknown divisor of ``unknown_divides``.

    The unknown divisor exceeds 1 unless ``unknown_divides`` is 1; it is coprime to ``known``.
    """

    known: int
    unknown_divides: int

    @property
    def exact(self) -> int | None:
        """The order, when nothing about it is unknown."""
        return self.known if self.unknown_divides == 1 else None


@dataclass(frozen=True, slots=True)
class FactoredModulus:
    """What the prime factorization of n alone settles; no p - 1 need be factored for it.

    The invariant factors come from greatest common divisors, since C_a x C_b is isomorphic to
    C_lcm(a,b) x C_gcd(a,b).
    """

    modulus_factors: Factors

    @property
    def modulus(self) -> int:
        """n."""
        return product_of(self.modulus_factors)

    @property
    def cycles(self) -> tuple[Cycle, ...]:
        """The cyclic factors by the Chinese remainder theorem, trivial ones left out."""
        cycles = [cycle for p, k in self.modulus_factors for cycle in _cycles(p, k)]
        return tuple(cycle for cycle in cycles if cycle.order > 1)

    @property
    def order(self) -> int:
        """phi(n), the number of units."""
        return prod(cycle.order for cycle in self.cycles)

    @property
    def exponent(self) -> int:
        """lambda(n), the largest order of an element."""
        return lcm(*(cycle.order for cycle in self.cycles))

    @property
    def invariant_factors(self) -> tuple[int, ...]:
        """Orders d_1, d_2, ... of cyclic factors with d_(j+1) | d_j; empty for a trivial group."""
        chain: list[int] = []
        for cycle in self.cycles:
            rest = cycle.order
            for index, order in enumerate(chain):
                chain[index], rest = lcm(order, rest), gcd(order, rest)
            chain.append(rest)
        return tuple(order for order in chain if order > 1)

    @property
    def cyclic(self) -> bool:
        """A primitive root exists, that is n is 1, 2, 4, p^k or 2 p^k."""
        return self.exponent == self.order

    def solutions(self, k: int) -> int:
        """The number of units a with a^k = 1, for k >= 1."""
        if k < 1:
            raise ValueError("the power must be positive")
        return prod(gcd(k, cycle.order) for cycle in self.cycles)

    def elements_of_factored_order(self, factors: Iterable[tuple[int, int]]) -> int:
        """The number of units whose order is exactly the product of these prime powers.

        The Moebius sum of solutions(k) over k | d, one prime at a time, since it is multiplicative.
        """
        return prod(self.solutions(r**e) - self.solutions(r ** (e - 1)) for r, e in factors if e)


@dataclass(frozen=True, slots=True)
class UnitGroup(FactoredModulus):
    """The unit group modulo n with n and its order factored: everything can be said.

    ``primes`` are all primes dividing phi(n), ascending. Made by :func:`unit_group`.
    """

    primes: tuple[int, ...]

    @property
    def order_factors(self) -> Factors:
        """phi(n) factored."""
        return split(self.order, self.primes)[0]

    @property
    def exponent_factors(self) -> Factors:
        """lambda(n) factored."""
        return split(self.exponent, self.primes)[0]

    @property
    def elementary_divisors(self) -> Factors:
        """The prime powers (r, e) whose cycles make up the group, ascending, with repetition."""
        parts = [part for cycle in self.cycles for part in split(cycle.order, self.primes)[0]]
        return tuple(sorted(parts))

    def elements_of_order(self, order: int) -> int:
        """The number of units of exactly that order; 0 when it does not divide lambda(n)."""
        if order < 1 or self.exponent % order:
            return 0
        return self.elements_of_factored_order(split(order, self.primes)[0])

    @property
    def share_of_maximal_order(self) -> Fraction:
        """The part of all units whose order is lambda(n)."""
        return Fraction(self.elements_of_order(self.exponent), self.order)

    def orders(self) -> Iterator[int]:
        """Every order an element can have (the divisors of lambda(n)), in no special sequence.

        There may be very many; nothing is stored.
        """
        powers = [[r**i for i in range(e + 1)] for r, e in self.exponent_factors]
        return (prod(choice) for choice in product(*powers))

    def order_of(self, a: int) -> int:
        """The order of a modulo n. NotAUnit for a non-unit; WrongFactorization as below."""
        return order_by_stripping(a, self.modulus, self.exponent_factors)

    def is_primitive_root(self, a: int) -> bool:
        """Every unit is a power of a."""
        return self.cyclic and self.order_of(a) == self.order

    def least_primitive_root(self) -> int | None:
        """The least non-negative primitive root; None says that none exists."""
        if not self.cyclic:
            return None
        n = self.modulus
        return next(a for a in range(n) if gcd(a, n) == 1 and generates(a, n, self.order_factors))

    def component_generators(self) -> tuple[tuple[int, int], ...]:
        """(order, generator modulo n) for each of ``cycles``; each generator is 1 elsewhere."""
        n = self.modulus
        return tuple(
            (cycle.order, lifted(self._generator(cycle), cycle.modulus, n)) for cycle in self.cycles
        )

    def invariant_generators(self) -> tuple[tuple[int, int], ...]:
        """(d_j, generator modulo n) for each of ``invariant_factors``: independent, spanning.

        The j-th one is the product, over primes r, of the generators of the j-th largest r-parts.
        """
        n, components = self.modulus, self.component_generators()
        result = [(1, 1)] * len(self.invariant_factors)
        for r in self.primes:
            parts = [(part_of(order, r), order, u) for order, u in components]
            parts = sorted((p for p in parts if p[0] > 1), key=lambda part: -part[0])
            for j, (part, order, u) in enumerate(parts):
                found = result[j][1] * int(powmod(u, order // part, n)) % n
                result[j] = (result[j][0] * part, found)
        return tuple(result)

    def _generator(self, cycle: Cycle) -> int:
        """A generator modulo the cycle's prime power: the least one of p, lifted."""
        if cycle.seed is not None:
            return cycle.seed
        p, k = next((p, k) for p, k in self.modulus_factors if p**k == cycle.modulus)
        factors, _ = split(p - 1, self.primes)
        least = next(a for a in range(1, p) if generates(a, p, factors))
        return lift_primitive_root(least, p, k)


@dataclass(frozen=True, slots=True)
class PartlyFactoredGroup(FactoredModulus):
    """The unit group modulo a factored n whose order is factored only in part.

    ``known_primes`` divide phi(n); its other prime factors are unknown. Cycles, order, exponent,
    invariant factors and solutions(k) are nevertheless final. There is no method here that gives
    an element's order as a number, and none that gives a generator.
    """

    known_primes: tuple[int, ...]

    @property
    def known_exponent_factors(self) -> Factors:
        """The known prime powers of lambda(n)."""
        return split(self.exponent, self.known_primes)[0]

    @property
    def unfactored_exponent(self) -> int:
        """What is left of lambda(n), coprime to the known primes; more than 1."""
        return split(self.exponent, self.known_primes)[1]

    def partial_order_of(self, a: int) -> PartialOrder:
        """What is known of the order of a.

        With lambda = F C, gcd(F, C) = 1: ord(a) = ord(a^C) ord(a^F). The first is found in a group
        of known exponent F; the second divides C, and is 1 exactly when a^F = 1.
        """
        n, factors, rest = self.modulus, self.known_exponent_factors, self.unfactored_exponent
        known = order_by_stripping(int(powmod(unit(a, n), rest, n)), n, factors)
        vanishes = powmod(a, product_of(factors), n) == 1 % n
        return PartialOrder(known, 1 if vanishes else rest)


@dataclass(frozen=True, slots=True)
class UnsplitGroup:
    """The unit group modulo n = m c, with c > 1 unfactored and coprime to m.

    It is the direct product of the units modulo m, which ``part`` describes, and of the units
    modulo c, of which next to nothing can be said before c is factored.
    """

    part: UnitGroup | PartlyFactoredGroup
    unfactored: int

    @property
    def modulus(self) -> int:
        """n."""
        return self.part.modulus * self.unfactored

    @property
    def order_multiple_of(self) -> int:
        """A divisor of phi(n)."""
        return self.part.order

    @property
    def order_at_most(self) -> int:
        """An upper bound of phi(n), reached when c is prime."""
        return self.part.order * (self.unfactored - 1)

    @property
    def known_not_cyclic(self) -> bool:
        """Two factors of even order exclude a primitive root; False says that nothing is known."""
        return self.part.order > 1 and self.unfactored > 2

    def divisor_of_order_of(self, a: int) -> int:
        """A divisor of the order of a modulo n: what is known of its order modulo m."""
        unit(a, self.modulus)
        if isinstance(self.part, UnitGroup):
            return self.part.order_of(a)
        return self.part.partial_order_of(a).known


def unit_group(
    modulus_factors: Mapping[int, int], predecessors: Mapping[int, Mapping[int, int]]
) -> UnitGroup:
    """The units modulo the product of ``modulus_factors`` (prime: exponent; empty for n = 1).

    ``predecessors`` maps each odd prime p among them to the factorization of p - 1.
    WrongFactorization when one is missing, incomplete or does not divide p - 1.
    """
    group = known_structure(modulus_factors, predecessors)
    if not isinstance(group, UnitGroup):
        raise WrongFactorization("the group order is factored only in part")
    return group


def known_structure(
    modulus_factors: Mapping[int, int],
    predecessors: Mapping[int, Mapping[int, int]],
    unfactored: int = 1,
) -> UnitGroup | PartlyFactoredGroup | UnsplitGroup:
    """The most complete description that the given factors allow; the type says how complete.

    n is the product of ``modulus_factors`` times ``unfactored``; factors of p - 1 may be missing.
    """
    powers = _plain(modulus_factors)
    known = [powers, *(_plain(factors) for factors in predecessors.values())]
    if unfactored < 1 or any(p < 2 or k < 1 for factors in known for p, k in factors):
        raise WrongFactorization("a factorization consists of positive powers of primes")
    for p, factors in predecessors.items():
        if p not in modulus_factors or (p - 1) % product_of(factors.items()):
            raise WrongFactorization("factors that do not belong to a prime of the modulus")
    if gcd(unfactored, product_of(powers)) > 1:
        raise WrongFactorization("the unfactored part shares a factor with the known primes")
    given = {p for factors in known for p, _ in factors} | {2}
    factored = FactoredModulus(powers)
    order_factors, rest = split(factored.order, sorted(given))
    primes = tuple(r for r, _ in order_factors)
    part = UnitGroup(powers, primes) if rest == 1 else PartlyFactoredGroup(powers, primes)
    return part if unfactored == 1 else UnsplitGroup(part, unfactored)


def isomorphism_classes(
    groups: Iterable[FactoredModulus],
) -> tuple[tuple[FactoredModulus, ...], ...]:
    """The groups sorted into classes of isomorphic ones: equal invariant factors."""
    ordered = sorted(groups, key=lambda group: (group.invariant_factors, group.modulus))
    classes = groupby(ordered, key=lambda group: group.invariant_factors)
    return tuple(tuple(members) for _, members in classes)


def _cycles(p: int, k: int) -> tuple[Cycle, ...]:
    q = p**k
    if p > 2:
        return (Cycle(q - q // p, q),)
    if k < 3:
        return (Cycle(k, q, q - 1),)
    return (Cycle(2, q, q - 1), Cycle(q // 4, q, 5))


def _plain(factors: Mapping[int, int]) -> Factors:
    """Sorted and in plain integers, whichever library they come from."""
    return tuple(sorted((int(p), int(e)) for p, e in factors.items()))
