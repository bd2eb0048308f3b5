"""Elements of small order: what a peer would send, shown so that anybody can check that it exists.

For each prime r that a peer can use against a reused exponent, the element of order r made from the
least base; a claim whose check needs no search.
"""

from auditor.claims.subgroup_generator import SubgroupGenerator
from auditor.facts import exponent, parts
from auditor.facts.given import Given
from auditor.facts.registry import fact
from auditor.questions import Asks, Question
from auditor.routes.leaks import CHEAP_BITS
from auditor.routes.searches import trial_bits


@fact(
    "subgroup.small_order_elements_seen",
    "exhibit",
    "[r, h]: for each prime r that a peer can use against a reused exponent at a cost of at most "
    "2^40 trials, an element h of order r",
)
def small_order_elements(given: Given) -> list[tuple[int, int]]:
    n = given.declaration.modulus
    given.see(exponent.exposed_parties)
    if given.see(parts.nature) != "prime":
        given.undefined()
    primes = [r for r, _ in given.see(parts.exponent_factors).factors if _is_usable(r)]
    claims = {r: given.claims.about(SubgroupGenerator, n, q=r) for r in primes}
    missing = [r for r, claim in claims.items() if claim is None]
    if missing:
        given.unsettled(*(Question(Asks.SUBGROUP_GENERATOR, (n, r)) for r in missing))
    found = []
    for r, claim in claims.items():
        if claim is not None:
            given.cite(claim)
            found.append((r, claim.g))
    return found


def _is_usable(r: int) -> bool:
    return trial_bits(r) <= CHEAP_BITS
