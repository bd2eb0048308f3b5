"""What the logarithm methods return and raise, and how they count their work."""

from dataclasses import dataclass

from gmpy2 import mpz, powmod


@dataclass(frozen=True, slots=True)
class Logarithm:
    """h = g^x where x is ``value`` modulo ``modulus``, and the group operations it took.

    They are counted, except where :mod:`auditor.search.log_small` says that it estimates them.
    Modulus 0 says that x is ``value`` itself, as congruence modulo 0 is equality.
    """

    value: int
    modulus: int
    operations: int


class LogarithmError(Exception):
    """No logarithm is returned; ``operations`` says how much work was done.

    - NotFound: there is none in what was searched; that is established.
    - OutOfBudget: the allowed work is done; nothing is established.
    """

    def __init__(self, message: str, operations: int) -> None:
        super().__init__(message, operations)
        self.operations = operations

    def __str__(self) -> str:
        return str(self.args[0])


class NotFound(LogarithmError):
    """No exponent in the searched range, or in the group generated, gives the element."""


class OutOfBudget(LogarithmError):
    """The allowed number of group operations was reached before an answer was."""


@dataclass(slots=True)
class Tally:
    """A count of group operations against an optional limit, handed from method to method.

    A multiplication modulo n is one operation, and so is a group element of which only the
    fingerprint is computed; an exponentiation counts as the binary method would make it.
    """

    budget: int | None = None
    operations: int = 0

    def spend(self, operations: int) -> None:
        """Add to the count; OutOfBudget when the limit is passed."""
        self.operations += operations
        if self.budget is not None and self.operations > self.budget:
            raise OutOfBudget("the allowed number of group operations is reached", self.operations)

    def power(self, a: int, exponent: int, n: int) -> mpz:
        """a^exponent modulo n, counted; a negative exponent inverts a, and a must be a unit."""
        e = abs(exponent)
        self.spend(max(0, e.bit_length() + e.bit_count() - 2))
        return powmod(a, exponent, n)

    def nothing(self, message: str) -> NotFound:
        """The error that says none exists, with the count so far."""
        return NotFound(message, self.operations)
