"""A weak route carried out, on an exponent that the program itself has drawn.

Nothing here ever touches a declared public value: the exponent is drawn from a seed that is shown,
its public value is made here, and what is recovered is compared with what was drawn. This is to
let an owner see that a work factor is meant, not to recover anybody's key.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial
from math import log2, prod

from auditor.claims.base import Factors
from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import exponent, parts, usage
from auditor.facts.base import Absent
from auditor.facts.given import Given
from auditor.run_values import RunValues
from auditor.search.log_confinement import Check
from auditor.search.log_demonstration import (
    Demonstration,
    run_confinement,
    run_pohlig_hellman,
    run_short_exponent,
)
from auditor.search.log_result import LogarithmError, OutOfBudget
from auditor.search.log_seed import drawn

DEFAULT_BUDGET_BITS = 26
"""About a minute of one core at 2048 bits."""


@dataclass(frozen=True, slots=True)
class Shown:
    """What came of one set: a demonstration, or the reason why there was none."""

    declaration: Declaration
    demonstration: Demonstration | None
    reason: str = ""

    def text(self) -> str:
        """A paragraph for a person."""
        name = self.declaration.identity
        shown = self.demonstration
        if shown is None:
            return f"{name}: no demonstration: {self.reason}"
        verdict = "recovered" if shown.agrees else "NOT recovered"
        modulus = shown.recovered.modulus
        extent = "whole" if modulus == 0 else f"modulo a number of {log2(modulus):.2f} bits"
        queries = f", {shown.queries} queries" if shown.queries else ""
        return (
            f"{name}: {shown.route}: an exponent of {shown.drawn.bit_length()} bits drawn here was "
            f"{verdict} ({extent}) with 2^{log2(max(1, shown.recovered.operations)):.2f} group "
            f"operations{queries}; promised were 2^{log2(max(1, shown.promised)):.2f}"
        )


def demonstrate(
    declaration: Declaration,
    claims: Claims,
    run: RunValues,
    seed: int,
    budget_bits: int = DEFAULT_BUDGET_BITS,
) -> Shown:
    """Carry out the first route that the parameters offer within 2^budget_bits operations.

    The exponent depends on the seed and the set's digest alone, so that a run can be repeated.
    """
    given = Given(declaration, claims, run)
    reasons: list[str] = []
    for attempt in _attempts(given, seed, 1 << budget_bits):
        try:
            return Shown(declaration, attempt())
        except OutOfBudget:
            reasons.append(
                f"a logarithm takes more than 2^{budget_bits} operations, and routes that need "
                "none are not demonstrated"
            )
        except (LogarithmError, ValueError) as error:
            reasons.append(str(error))
    why = "no weak route is known to be open" if not reasons else "; ".join(dict.fromkeys(reasons))
    return Shown(declaration, None, why)


Attempt = Callable[[], Demonstration]


def _attempts(given: Given, seed: int, budget: int) -> Iterator[Attempt]:
    n, g = given.declaration.modulus, given.declaration.generator
    label = given.declaration.digest()
    order = given.peek(parts.generator_order)
    if isinstance(order, Absent) or n % 2 == 0:
        return
    width = given.peek(usage.exponent_width)
    exposed = given.peek(exponent.exposed_parties)
    whole = prod(p**e for p, e in order.factors) * order.rest

    if order.rest == 1:
        x = drawn(whole, seed, label, "pohlig-hellman")
        yield partial(run_pohlig_hellman, n, g, order.factors, x, seed=seed, budget=budget)
    if not isinstance(width, Absent) and 1 << width <= whole:
        y = drawn(1 << width, seed, label, "short exponent")
        run = partial(run_short_exponent, n, g, order.factors, width, y, rest=order.rest)
        yield partial(run, seed=seed, budget=budget)
    if isinstance(exposed, Absent) or order.rest != 1 or len(order.factors) != 1:
        return
    cofactor = given.peek(parts.exponent_factors)
    if isinstance(cofactor, Absent):
        return
    q = order.factors[0][0]
    factors: Factors = tuple(power for power in cofactor.factors if power[0] != q)
    for party, check in exposed:
        bits = party.exponent_bits or q.bit_length()
        z = drawn(min(1 << bits, q), seed, label, "confinement", party.role)
        checks: frozenset[Check] = frozenset({"range"} if check == "range" else ())
        usable = (n, g, q, factors, bits, checks, z)
        yield partial(run_confinement, *usable, seed=seed, budget=budget)
