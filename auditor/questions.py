"""What is open about integers: the questions that facts raise and search answers.

A question names integers and nothing else, so the same question about two parameter sets is
asked once, may be answered on another machine, and its answer may be kept between runs.
"""

from dataclasses import dataclass
from enum import StrEnum

from auditor.encoding import identifier


class Asks(StrEnum):
    """The kinds of question, each with the integers it names."""

    PRIMALITY = "primality"  # n
    FACTORIZATION = "factorization"  # m, and a depth: bits of the factors worth finding
    ORDER = "order"  # n, a
    MEMBERSHIP = "membership"  # n, a, q: is a^q = 1 modulo n
    SPECIAL_FORM = "special-form"  # n


@dataclass(frozen=True, slots=True, order=True)
class Question:
    """Something open: its kind, and the integers it is about."""

    asks: Asks
    integers: tuple[int, ...]

    @property
    def id(self) -> str:
        """Kind and 20 hex digits: equal questions, equal ids."""
        return identifier(self.asks, list(self.integers))
