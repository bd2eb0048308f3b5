"""Facts about where the numbers come from.

A modulus made from the digits of pi or e has a verified origin, whatever is declared: its maker
was free in an offset alone. Otherwise seeds and counters are replayed, and what they lead to is
compared; an account that nobody can replay verifies nothing.
"""

from auditor.claims.origin import Origin
from auditor.claims.origin_formula import (
    CONSTANTS,
    Constant,
    Formula,
    LeastOffset,
    has_shape,
)
from auditor.claims.origin_offsets import feasible
from auditor.claims.origin_recipe import FIPS186_2, HASHES, PROBABLE, PROVABLE, Recipe
from auditor.claims.origin_replay import Outcome
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question

METHODS = (PROBABLE, PROVABLE, FIPS186_2, "pi-formula", "e-formula", "other")
FORMULAS: dict[str, Constant] = {"pi-formula": "pi", "e-formula": "e"}
SEEDS = {
    PROBABLE: ("seed",),
    PROVABLE: ("first_seed", "p_seed", "q_seed"),
    FIPS186_2: ("seed",),
}
COUNTERS = {PROBABLE: ("counter",), PROVABLE: ("p_counter", "q_counter"), FIPS186_2: ("counter",)}
OTHER_DIGITS = "digits give another modulus"


@fact("provenance.method", "text", "how the owner says the numbers were made", METHODS)
def method(given: Given) -> str:
    if given.declaration.provenance is None:
        given.undeclared("provenance")
    given.rest_on("provenance")
    declared_method = given.declaration.provenance.method
    return declared_method if declared_method in METHODS else "other"


def replayable(given: Given) -> str:
    """The declared method, where it is one that works from seeds; undefined otherwise."""
    provenance = given.declaration.provenance
    if provenance is None or provenance.method not in SEEDS:
        given.undefined()
    return provenance.method


def declared(given: Given, *keys: str) -> tuple[int | str, ...]:
    """The declared values of these keys of the provenance."""
    provenance = given.declaration.provenance
    values = dict(provenance.values) if provenance else {}
    if missing := [f"provenance.{key}" for key in keys if key not in values]:
        given.undeclared(*missing)
    return tuple(values[key] for key in keys)


def hash_name(given: Given) -> str:
    """The declared hash function; one that is not known here counts as undeclared."""
    if given.see(replayable) == FIPS186_2:
        return "sha1"
    (name,) = declared(given, "hash")
    if name not in HASHES:
        given.undeclared("provenance.hash")
    return str(name)


def seeds(given: Given) -> tuple[bytes, ...]:
    """The declared seeds; hexadecimal digits that spell no bytes count as undeclared."""
    keys = SEEDS[given.see(replayable)]
    found = []
    for key, text in zip(keys, declared(given, *keys), strict=True):
        try:
            found.append(bytes.fromhex(str(text)))
        except ValueError:
            given.undeclared(f"provenance.{key}")
    return tuple(found)


def recipe(given: Given) -> Recipe:
    """What the owner says p and q were made from."""
    name = given.see(replayable)
    counters = declared(given, *COUNTERS[name])
    if any(not isinstance(counter, int) or counter < 0 for counter in counters):
        given.undeclared(*(f"provenance.{key}" for key in COUNTERS[name]))
    return Recipe(
        name, given.see(hash_name), given.see(seeds), tuple(int(counter) for counter in counters)
    )


def outcome(given: Given) -> Outcome:
    """Where the replay of the declared recipe ends."""
    n, q = given.declaration.modulus, given.declaration.subgroup_order
    made_from = given.see(recipe)
    if q is None:
        given.undeclared("subgroup_order")
    if n < 2 or q < 2:
        return Outcome.LENGTHS
    claim = given.claims.about(Origin, n, q=q, recipe=made_from)
    if claim is None:
        given.unsettled(Question(Asks.ORIGIN, (n, q, *made_from.integers())))
    given.cite(claim)
    return claim.outcome


@fact(
    "provenance.regenerated",
    "bool",
    "the declared seeds and counters lead to p and q, or the declared digits to the modulus",
)
def regenerated(given: Given) -> bool:
    if declared_constant(given) is not None:
        return bool(given.see(declared_formula_holds))
    end = given.see(outcome)
    if end is Outcome.SEED_CARRY:
        # The standard does not say how such a seed counts on: there is nothing to compare with.
        given.undefined()
    return end is Outcome.REGENERATED


@fact(
    "provenance.disagreement",
    "text",
    "the first step at which the declared origin and the numbers disagree",
    (*(end.value for end in Outcome if end is not Outcome.REGENERATED), OTHER_DIGITS),
)
def disagreement(given: Given) -> str:
    if declared_constant(given) is None:
        end = given.see(outcome)
        if end is Outcome.REGENERATED:
            given.undefined()
        return end.value
    if given.see(declared_formula_holds):
        given.undefined()
    return OTHER_DIGITS


def declared_constant(given: Given) -> Constant | None:
    """The constant that the declared method names."""
    provenance = given.declaration.provenance
    return FORMULAS.get(provenance.method) if provenance else None


def declared_formula_holds(given: Given) -> bool:
    """Whether the modulus follows from the constant that is declared."""
    found = given.see(formula)
    return found is not None and found.constant == declared_constant(given)


def formula(given: Given) -> Formula | None:
    """The claim that the modulus follows from the digits of pi or e; None where it does not."""
    n = given.declaration.modulus
    if not has_shape(n):
        return None
    claims = [given.claims.about(Formula, n, constant=constant) for constant in CONSTANTS]
    for claim in claims:
        if claim is not None and claim.offset is not None:
            given.cite(claim)
            return claim
    if open_ones := [i for i, claim in enumerate(claims) if claim is None]:
        given.unsettled(*(Question(Asks.FORMULA, (n, i)) for i in open_ones))
    for claim in claims:
        if claim is not None:
            given.cite(claim)
    return None


def by_formula(given: Given) -> Formula:
    """The same; undefined where the modulus follows from no digits."""
    found = given.see(formula)
    if found is None:
        given.undefined()
    return found


@fact("provenance.offset", "int", "the offset that follows the digits of pi or e in the modulus")
def offset(given: Given) -> int:
    return given.see(by_formula).offset or 0


@fact(
    "provenance.offset_least",
    "bool",
    "no smaller positive offset after the digits of pi or e gives a safe prime",
)
def offset_least(given: Given) -> bool:
    found = given.see(by_formula)
    n, size = found.n, found.offset or 0
    claim = given.claims.about(LeastOffset, n, constant=found.constant, offset=size)
    if claim is None:
        index = CONSTANTS.index(found.constant)
        question = Question(Asks.LEAST_OFFSET, (n, index, size))
        given.unsettled(*[question] * feasible(n.bit_length(), size))
    given.cite(claim)
    return claim.smaller is None


@fact(
    "provenance.verified",
    "bool",
    "the modulus follows from the digits of pi or e, or seeds and counters lead to p and q",
)
def verified(given: Given) -> bool:
    if given.see(formula) is not None:
        return True
    if given.declaration.provenance is None:
        given.undeclared("provenance")
    if given.declaration.provenance.method not in (*SEEDS, *FORMULAS):
        given.undeclared("provenance.seed")
    return bool(given.see(regenerated))
