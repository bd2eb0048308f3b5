"""Claims about where p and q come from: a recipe replayed, with the step where it disagrees."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.claims.base import Claim, Draw, require
from auditor.claims.composite import Composite
from auditor.claims.origin_recipe import Recipe
from auditor.claims.origin_replay import Outcome, replay
from auditor.claims.primality_tests import is_probable_prime
from auditor.claims.prime import Prime
from auditor.claims.reading import natural, only
from auditor.claims.standing import Standing

ROUNDS = 64
"""Strong tests to unpredictable bases for a candidate that ought to have been taken; FIPS 186-4,
C.3, Table C.1 asks for at most 64."""


@dataclass(frozen=True)
class Origin(Claim):
    """The replay of ``recipe`` for the prime ``n`` and the order ``q`` ends with ``outcome``.

    ``regenerated`` says that the seeds lead to q and to n and that every candidate for n before
    it is composite; every other outcome names the first step that disagrees. Where the outcome
    depends on whether n or q is prime, the claims about that are used, and it is no stronger.
    """

    kind = "origin"

    n: int
    q: int
    recipe: Recipe
    outcome: Outcome
    uses: tuple[str, ...] = ()

    @property
    def standing(self) -> Standing:
        """That an earlier candidate is prime is shown by tests alone."""
        earlier = self.outcome is Outcome.EARLIER_PRIME
        return Standing.PROBABLE if earlier else Standing.PROVEN

    def statement(self) -> dict[str, Any]:
        return {
            "n": self.n,
            "q": self.q,
            "recipe": self.recipe.record(),
            "outcome": self.outcome.value,
        }

    def certificate(self) -> dict[str, Any]:
        return {}

    @classmethod
    def read(
        cls, statement: Mapping[str, Any], certificate: Mapping[str, Any], uses: tuple[str, ...]
    ) -> "Origin":
        only(statement, "n", "q", "recipe", "outcome")
        only(certificate)
        return cls(
            natural(statement["n"]),
            natural(statement["q"]),
            Recipe.read(statement["recipe"]),
            Outcome(statement["outcome"]),
            uses,
        )

    def check(self, used: Mapping[str, Claim], draw: Draw) -> None:
        require(self.n > 1 and self.q > 1, "the numbers are below 2")
        about = {claim.n: claim for claim in used.values() if isinstance(claim, Prime | Composite)}
        asked: set[int] = set()

        def settled(number: int) -> Prime | Composite:
            require(number in about, "whether p or q is prime is not shown")
            asked.add(number)
            return about[number]

        found = regenerate(self.n, self.q, self.recipe, settled, draw)
        require(found.outcome is self.outcome, f"the replay ends otherwise: {found.outcome.value}")
        require(len(used) == len(asked), "a claim is used that says nothing")


def regenerate(
    n: int, q: int, recipe: Recipe, settled: Callable[[int], Prime | Composite], draw: Draw
) -> Origin:
    """The claim about where the replay ends; ``settled`` gives the claim about n or q."""
    used: set[str] = set()

    def is_prime(number: int) -> bool:
        claim = settled(number)
        used.add(claim.id)
        return isinstance(claim, Prime)

    def may_be_prime(number: int) -> bool:
        return is_probable_prime(number, ROUNDS, draw)

    outcome = replay(n, q, recipe, is_prime, may_be_prime)
    return Origin(n, q, recipe, outcome, tuple(sorted(used)))
