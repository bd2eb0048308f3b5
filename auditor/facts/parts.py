"""What several facts build on: the shape of the modulus, the order of the unit group, ord(g).

These are not words of the vocabulary. Group theory: Cohen, "A Course in Computational Algebraic
Number Theory", 1993, section 1.4 (from memory).
"""

from dataclasses import dataclass
from math import gcd

import gmpy2

from auditor.claims.base import Factors, product
from auditor.facts.given import Given, Part
from auditor.questions import Asks, Question
from auditor.structure import FactoredModulus


def nature(given: Given) -> str:
    """``prime``, ``prime power`` (of an odd prime), ``power of two`` (from 4 up), ``composite``."""
    n = given.declaration.modulus
    if n < 2:
        given.undefined()
    if n > 2 and n & (n - 1) == 0:
        return "power of two"
    if given.is_prime(n):
        return "prime"
    if not gmpy2.is_power(n):
        return "composite"
    power = given.claims.perfect_power(n)
    if power is None:
        given.unsettled(Question(Asks.PRIMALITY, (n,)))
    given.cite(power)
    return "prime power" if given.is_prime(power.base) else "composite"


def modulus_factors(given: Given) -> Factors:
    """The complete factorization of the modulus."""
    n = given.declaration.modulus
    kind = given.see(nature)
    if kind == "prime":
        return ((n, 1),)
    if kind == "power of two":
        return ((2, n.bit_length() - 1),)
    factors, rest = given.see(known_modulus_factors)
    if rest > 1:
        given.unsettled(Question(Asks.MODULUS_FACTORS, (n, rest)))
    return factors


def known_modulus_factors(given: Given) -> tuple[Factors, int]:
    """The known prime factors of a modulus that is not a prime, and the unfactored rest."""
    claim = given.factorization(given.declaration.modulus, deeper=Asks.MODULUS_FACTORS)
    return claim.factors, claim.rest


def units(given: Given) -> FactoredModulus:
    """The unit group, as far as the factorization of the modulus settles it."""
    return FactoredModulus(given.see(modulus_factors))


def group_order(given: Given) -> int:
    """phi(n), exactly."""
    return given.see(units).order


def group_exponent(given: Given) -> int:
    """lambda(n), exactly: the least t with a^t = 1 for every unit a."""
    return given.see(units).exponent


def hints(given: Given) -> tuple[int, ...]:
    """Declared numbers that may divide the group order: checked by division, never trusted."""
    stated = given.declaration
    declared = {*stated.known_factors, stated.subgroup_order or 1, stated.cofactor or 1}
    primes = {prime for prime, _ in given.see(modulus_factors)}
    return tuple(sorted(number for number in declared | primes if number > 1))


@dataclass(frozen=True, slots=True)
class Factored:
    """A number as prime powers times an unfactored rest, which is 1 or composite."""

    factors: Factors
    rest: int


def exponent_factors(given: Given) -> Factored:
    """lambda(n), as far as it is factored; loose while a rest is left."""
    claim = given.factorization(given.see(group_exponent), given.see(hints))
    return Factored(claim.factors, claim.rest)


def order_factors(given: Given) -> Factored:
    """phi(n), as far as it is factored: the same primes as lambda(n), to higher powers."""
    order, known = given.see(group_order), given.see(exponent_factors)
    factors = []
    for prime, _ in known.factors:
        exponent = 0
        while order % prime == 0:
            order //= prime
            exponent += 1
        factors.append((prime, exponent))
    return Factored(tuple(factors), order)


def element(given: Given) -> int:
    """The generator reduced modulo the modulus, where it is a unit other than 0."""
    n, g = given.declaration.modulus, given.declaration.generator
    if n < 2 or gcd(g, n) != 1:
        given.undefined()
    return g % n


def order_by_declared_prime(given: Given) -> bool:
    """Whether the declared q is prime and g^q = 1: then ord(g) is q, or 1, without factoring."""
    q = given.declaration.subgroup_order
    if q is None or q < 2:
        return False
    return given.is_prime(q) and given.is_member(given.declaration.modulus, given.see(element), q)


def generator_order(given: Given) -> Factored:
    """ord(g): prime powers that divide it exactly, times a divisor above 1 of the rest if that is
    not 1; loose in that case."""
    n, g = given.declaration.modulus, given.see(element)
    claim = given.claims.order(n, g)
    if claim is not None and claim.rest == 1:
        given.cite(claim)
        return Factored(claim.known, 1)
    if given.see(order_by_declared_prime):
        given.unsettled(Question(Asks.ORDER, (n, g, given.declaration.subgroup_order or 1, 1)))
    exponent, known = given.see(group_exponent), given.see(exponent_factors)
    question = Question(Asks.ORDER, (n, g, exponent, known.rest))
    if claim is None:
        given.unsettled(question)
    given.cite(claim)
    if known.rest < claim.rest:
        given.loosen(question)
    return Factored(claim.known, claim.rest)


def complete_generator_order(given: Given) -> Factors:
    """ord(g), complete; otherwise absent with the question that is open."""
    order = given.see(generator_order)
    if order.rest > 1:
        _raise_open(given, generator_order)
    return order.factors


def _raise_open(given: Given, part: Part) -> None:
    questions = tuple(sorted(given.trace(part).questions))
    given.unsettled(*questions)


def generator_order_value(given: Given) -> int:
    """ord(g) as a number."""
    return product(given.see(complete_generator_order))
