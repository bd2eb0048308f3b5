"""What is open about integers: the questions that facts raise and search answers.

A question names integers and nothing else, so the same question about two parameter sets is
asked once, may be answered on another machine, and its answer may be kept between runs. A fact
that cannot be established raises the question that would settle it; which questions are worth
asking is decided in :mod:`auditor.inquiry.settle`.
"""

from dataclasses import dataclass
from enum import StrEnum

from auditor.encoding import identifier, shorten


class Asks(StrEnum):
    """The kinds of question, each with the integers it names."""

    PRIMALITY = "primality"
    """n: is it prime?"""
    SMALL_FACTORS = "small-factors"
    """m, and hints: the prime factors of m that cost next to nothing to find."""
    FACTORIZATION = "factorization"
    """m, and the composite rest of it that is still unfactored."""
    MODULUS_FACTORS = "modulus-factors"
    """n, a composite modulus, and the composite rest of it that is still unfactored."""
    ORDER = "order"
    """n, a, t, c: the order of a, where a^t = 1 and t is factored up to c."""
    MEMBERSHIP = "membership"
    """n, a, t: is a^t = 1 modulo n?"""
    SPECIAL_FORM = "special-form"
    """n: has it a form that the special number field sieve can use?"""
    ORIGIN = "origin"
    """n, q, and a recipe spelled in integers: does it lead to n and q?"""
    CANONICAL_GENERATOR = "canonical-generator"
    """n, q, g, hash, seed, index: does FIPS 186-4, A.2.3 make g?"""
    SUBGROUP_GENERATOR = "subgroup-generator"
    """n, q: which element has the prime order q modulo the prime n?"""
    FORMULA = "formula"
    """n, and 0 for pi or 1 for e: is n made from those digits?"""
    LEAST_OFFSET = "least-offset"
    """n, 0 or 1, x: gives no offset below x a safe prime?"""
    SHARED_EXPONENTS = "shared-exponents"
    """n, t, and values: which have equal powers with exponent t?"""
    VISIBLE_EXPONENTS = "visible-exponents"
    """n, g, k, and values: which are up to sign powers of g with exponents up to k?"""
    FORGERY_RELATIONS = "forgery-relations"
    """n, a: which relations between a and n-1 help to forge signatures?"""


CHEAP = frozenset(
    {
        Asks.PRIMALITY,
        Asks.SMALL_FACTORS,
        Asks.ORDER,
        Asks.MEMBERSHIP,
        Asks.ORIGIN,
        Asks.CANONICAL_GENERATOR,
        Asks.SUBGROUP_GENERATOR,
        Asks.FORMULA,
        Asks.SHARED_EXPONENTS,
        Asks.VISIBLE_EXPONENTS,
        Asks.FORGERY_RELATIONS,
    }
)
"""Kinds that cost a few exponentiations or, for an origin, a few hundred."""


@dataclass(frozen=True, slots=True, order=True)
class Question:
    """Something open: its kind, and the integers it is about."""

    asks: Asks
    integers: tuple[int, ...]

    @property
    def id(self) -> str:
        """Kind and 20 hex digits: equal questions, equal ids."""
        return identifier(self.asks, list(self.integers))

    @property
    def about(self) -> str:
        """One line for a reader, long numbers shortened."""
        first, *others = (shorten(number) for number in self.integers)
        match self.asks:
            case Asks.PRIMALITY:
                return f"Is {first} prime?"
            case Asks.SMALL_FACTORS:
                return f"Which small prime factors has {first}?"
            case Asks.FACTORIZATION | Asks.MODULUS_FACTORS:
                return f"Which prime factors has the composite {others[0]}?"
            case Asks.ORDER:
                return f"What is the order of {others[0]} modulo {first}?"
            case Asks.MEMBERSHIP:
                return f"Is the power of {others[0]} with exponent {others[1]} equal to 1?"
            case Asks.SPECIAL_FORM:
                return f"Has {first} a form that the special number field sieve can use?"
            case Asks.ORIGIN:
                return f"Do the declared seed and counter lead to {first} and {others[0]}?"
            case Asks.CANONICAL_GENERATOR:
                return f"Do the declared seed and index lead to the generator {others[1]}?"
            case Asks.SUBGROUP_GENERATOR:
                return f"Which element has the order {others[0]} modulo {first}?"
            case Asks.FORMULA:
                digits = "e" if self.integers[1] else "pi"
                return f"Is {first} made from the digits of {digits}?"
            case Asks.LEAST_OFFSET:
                return f"Gives an offset below {others[1]} a safe prime in the formula of {first}?"
            case Asks.SHARED_EXPONENTS:
                return "Which public values share their exponent modulo the order of the generator?"
            case Asks.VISIBLE_EXPONENTS:
                return f"Which public values are small powers of {others[0]}?"
            case Asks.FORGERY_RELATIONS:
                return f"Which relations to the order forge signatures with the base {others[0]}?"
