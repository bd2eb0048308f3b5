"""All facts, one file a family; importing this package registers the vocabulary."""

from collections.abc import Mapping

from auditor.claims.collection import Claims
from auditor.declaration import Declaration
from auditor.facts import (  # noqa: F401  (imported to register their facts)
    exponent,
    generator,
    group,
    modulus,
    provenance,
    public_values,
    strength,
    subgroup,
    usage,
)
from auditor.facts.base import Absent, Fact, FactType
from auditor.facts.given import Given
from auditor.facts.registry import establish, registered
from auditor.run_values import RunValues


def vocabulary() -> Mapping[str, FactType]:
    """Every fact by name."""
    return registered()


def establish_all(
    declaration: Declaration, claims: Claims, run: RunValues
) -> tuple[dict[str, Fact], dict[str, Absent], frozenset[str]]:
    """The facts that have a value, the absences of those that have none, and the ids of all
    claims that were consulted on the way."""
    given = Given(declaration, claims, run)
    facts: dict[str, Fact] = {}
    absent: dict[str, Absent] = {}
    for name in registered():
        outcome = establish(name, given)
        if isinstance(outcome, Fact):
            facts[name] = outcome
        else:
            absent[name] = outcome
    return facts, absent, frozenset(given.consulted)
