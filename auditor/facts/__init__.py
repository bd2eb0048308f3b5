"""All facts, one file a family; importing this package registers the vocabulary."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType

from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import (  # noqa: F401  (imported to register their facts)
    exponent,
    generator,
    group,
    modulus,
    provenance,
    public_values,
    schemes,
    strength,
    subgroup,
    usage,
    witnesses,
)
from auditor.facts.base import Absent, Fact, FactType
from auditor.facts.given import Given, Shared
from auditor.facts.properties import Property, properties
from auditor.facts.registry import establish as fact_of
from auditor.facts.registry import registered
from auditor.facts.work import all_open
from auditor.routes.base import Work
from auditor.run_values import RunValues


@cache
def vocabulary() -> Mapping[str, FactType]:
    """Every fact by name."""
    return MappingProxyType(registered())


@dataclass(frozen=True, slots=True)
class Established:
    """What is known about one declaration: facts, absences, open routes, properties that are no
    amount of work, and the ids of all claims that were consulted on the way."""

    declaration: Declaration
    facts: Mapping[str, Fact]
    absent: Mapping[str, Absent]
    routes: tuple[Work, ...]
    properties: tuple[Property, ...]
    consulted: frozenset[str]


def establish(
    declaration: Declaration, claims: Claims, run: RunValues, shared: Shared | None = None
) -> Established:
    """All facts about one declaration, from the claims as they stand: a pure function.

    ``shared`` saves what declarations with the same claims and run values have in common.
    """
    return established(declaration, Given(declaration, claims, run, shared))


def established(declaration: Declaration, given: Given) -> Established:
    """All facts about the declaration that is given."""
    facts: dict[str, Fact] = {}
    absent: dict[str, Absent] = {}
    for name in vocabulary():
        outcome = fact_of(name, given)
        if isinstance(outcome, Fact):
            facts[name] = outcome
        else:
            absent[name] = outcome
    routes, others = all_open(given), properties(given)
    return Established(declaration, facts, absent, routes, others, frozenset(given.consulted))
