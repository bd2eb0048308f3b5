"""What is open about integers: the questions that facts raise and search answers.

A question names integers and nothing else, so the same question about two parameter sets is
asked once, may be answered on another machine, and its answer may be kept between runs. A fact
that cannot be established raises the question that would settle it; which questions are worth
asking is decided in :mod:`auditor.run`.
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


CHEAP = frozenset({Asks.PRIMALITY, Asks.SMALL_FACTORS, Asks.ORDER, Asks.MEMBERSHIP})
"""Kinds that cost at most a few exponentiations or primality tests."""


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
                size = self.integers[1].bit_length()
                return f"Which prime factors has the {size}-bit composite {others[0]}?"
            case Asks.ORDER:
                return f"What is the order of {others[0]} modulo {first}?"
            case Asks.MEMBERSHIP:
                return f"Is the power of {others[0]} with exponent {others[1]} equal to 1?"
            case Asks.SPECIAL_FORM:
                return f"Has {first} a form that the special number field sieve can use?"
