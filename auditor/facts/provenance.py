"""Facts about where the numbers come from.

A modulus that is one of the published pi or e primes has a verified origin: its formula leaves
its maker one free number, the offset. Replay of seeds is not done yet: there the fact is absent.
"""

from auditor.facts import modulus
from auditor.facts.given import Given
from auditor.facts.registry import fact

METHODS = (
    "fips186-4-probable-primes",
    "fips186-4-provable-primes",
    "fips186-2",
    "pi-formula",
    "e-formula",
    "other",
)


@fact("provenance.method", "text", "how the owner says the numbers were made", METHODS)
def method(given: Given) -> str:
    if given.declaration.provenance is None:
        given.undeclared("provenance")
    given.rest_on("provenance")
    return given.declaration.provenance.method


@fact("provenance.verified", "bool", "the numbers were regenerated from what they are said to be")
def verified(given: Given) -> bool:
    if given.see(modulus.from_digits):
        return True
    if given.declaration.provenance is None:
        given.undeclared("provenance")
    given.unsettled()
