"""Claims held together: looked up by integers, judged by what they rest on, checked as a whole."""

from collections.abc import Iterable, Iterator, Mapping
from typing import Any, TypeVar

from auditor.claims.base import Claim, Draw, Refuted
from auditor.claims.composite import Composite, PerfectPower
from auditor.claims.factorization import Factorization
from auditor.claims.forgery import ForgeryRelations
from auditor.claims.order import Membership, Order
from auditor.claims.origin import Origin
from auditor.claims.origin_formula import Formula, LeastOffset
from auditor.claims.origin_generator import CanonicalGenerator
from auditor.claims.prime import Prime
from auditor.claims.public_values import SharedExponents, VisibleExponents
from auditor.claims.searched import Searched
from auditor.claims.special_form import FormSearched, SpecialForm
from auditor.claims.standing import Standing, weakest
from auditor.claims.subgroup_generator import SubgroupGenerator

Kind = TypeVar("Kind", bound=Claim)

KINDS: Mapping[str, type[Claim]] = {
    kind.kind: kind
    for kind in (
        Prime,
        Composite,
        PerfectPower,
        Factorization,
        Order,
        Membership,
        Searched,
        SpecialForm,
        FormSearched,
        Origin,
        Formula,
        LeastOffset,
        CanonicalGenerator,
        SubgroupGenerator,
        SharedExponents,
        VisibleExponents,
        ForgeryRelations,
    )
}


class Claims:
    """A growing set of claims. More claims never make an answer weaker or less complete.

    Where several claims settle the same thing the most complete is preferred, then the one of the
    strongest standing, then the one with the least id: nothing depends on the order of arrival.
    """

    def __init__(self, claims: Iterable[Claim] = ()) -> None:
        self._by_id: dict[str, Claim] = {}
        self._by_subject: dict[tuple[Any, ...], list[Claim]] = {}
        self._standings: dict[str, Standing] = {}
        self.add(claims)

    def __iter__(self) -> Iterator[Claim]:
        return iter(self._by_id.values())

    def __getitem__(self, claim_id: str) -> Claim:
        return self._by_id[claim_id]

    def __contains__(self, claim_id: str) -> bool:
        return claim_id in self._by_id

    def __len__(self) -> int:
        return len(self._by_id)

    def add(self, claims: Iterable[Claim]) -> None:
        """Take in claims; those already here change nothing."""
        for claim in claims:
            if claim.id not in self._by_id:
                self._by_id[claim.id] = claim
                self._by_subject.setdefault(_subject(claim), []).append(claim)

    def prime(self, n: int) -> Prime | Composite | None:
        """What settles whether ``n`` is prime; a composite claim, being certain, comes first."""
        return self._best(Composite, n) or self._best(Prime, n)

    def perfect_power(self, n: int) -> PerfectPower | None:
        """The claim that ``n`` is a perfect power."""
        return self._best(PerfectPower, n)

    def factorization(self, n: int) -> Factorization | None:
        """The most complete factorization of ``n``."""
        return self._best(Factorization, n)

    def order(self, modulus: int, element: int) -> Order | None:
        """The most complete statement about the order of ``element``."""
        return self._best(Order, modulus, element)

    def membership(self, modulus: int, element: int, exponent: int) -> Membership | None:
        """Whether element^exponent = 1."""
        return self._best(Membership, modulus, element, exponent)

    def special_form(self, n: int) -> SpecialForm | None:
        """A pair that shows a special form of ``n``."""
        return self._best(SpecialForm, n)

    def form_searched(self, n: int) -> FormSearched | None:
        """The record of the widest search for a special form of ``n``."""
        found = self._by_subject.get((FormSearched.kind, n), [])
        records = (claim for claim in found if isinstance(claim, FormSearched))
        return max(records, key=lambda claim: (len(claim.tiers), claim.tiers), default=None)

    def searched(self, n: int) -> tuple[Searched, ...]:
        """All records of searches that left ``n``, by id."""
        found = self._by_subject.get(("searched", n), [])
        return tuple(sorted((c for c in found if isinstance(c, Searched)), key=lambda c: c.id))

    def about(self, kind: type[Kind], n: int, **values: object) -> Kind | None:
        """The claim of that kind about ``n`` whose fields have these values."""
        found = self._by_subject.get((kind.kind, n), [])
        return min(
            (
                claim
                for claim in found
                if isinstance(claim, kind)
                and all(getattr(claim, name) == value for name, value in values.items())
            ),
            key=self._preference,
            default=None,
        )

    def standing(self, claim_id: str) -> Standing:
        """The weakest standing among the claim and all that it rests on; claims only come, so it
        stays what it is."""
        if claim_id not in self._standings:
            self._standings[claim_id] = weakest(c.standing for c in self.support([claim_id]))
        return self._standings[claim_id]

    def support(self, ids: Iterable[str]) -> list[Claim]:
        """The named claims and all that they rest on, by id. KeyError when one is not here."""
        wanted, found = list(ids), {}
        while wanted:
            claim_id = wanted.pop()
            if claim_id not in found:
                found[claim_id] = self._by_id[claim_id]
                wanted.extend(found[claim_id].uses)
        return [found[claim_id] for claim_id in sorted(found)]

    def _best(self, kind: type[Kind], *subject: int) -> Kind | None:
        found = self._by_subject.get((kind.kind, *subject), [])
        return min(
            (claim for claim in found if isinstance(claim, kind)),
            key=self._preference,
            default=None,
        )

    def _preference(self, claim: Claim) -> tuple[int, int, str]:
        return getattr(claim, "rest", 0), self.standing(claim.id).weakness, claim.id


def _subject(claim: Claim) -> tuple[Any, ...]:
    if isinstance(claim, Order):
        return claim.kind, claim.modulus, claim.element
    if isinstance(claim, Membership):
        return claim.kind, claim.modulus, claim.element, claim.exponent
    return claim.kind, getattr(claim, "n", None)


def read_claim(record: Mapping[str, Any]) -> Claim:
    """The claim that :meth:`Claim.record` wrote; ValueError for anything else."""
    try:
        kind, uses = KINDS[record["kind"]], record["uses"]
        if set(record) != {"kind", "statement", "certificate", "uses"}:
            raise ValueError("a claim has a kind, a statement, a certificate and what it uses")
        if uses != sorted(set(uses)) or not all(isinstance(item, str) for item in uses):
            raise ValueError("the ids used are not in ascending order")
        claim = kind.read(record["statement"], record["certificate"], tuple(uses))
    except (KeyError, TypeError, AttributeError) as error:
        raise ValueError(f"not a claim: {error}") from error
    if claim.record() != record:
        raise ValueError("the claim has another spelling")
    return claim


def check_all(claims: Claims, draw: Draw) -> dict[str, str]:
    """Check every claim on its own; the reasons of those that fail, by id.

    A claim that rests on a failed, missing or circular one fails as well.
    """
    failed: dict[str, str] = {}
    checked: set[str] = set()
    for claim in used_first(claims):
        try:
            used = {claim_id: claims[claim_id] for claim_id in claim.uses}
            if weak := [claim_id for claim_id in claim.uses if claim_id not in checked]:
                raise Refuted(f"it rests on {weak[0]}, which does not hold")
            claim.check(used, draw)
            checked.add(claim.id)
        except KeyError as error:
            failed[claim.id] = f"it rests on {error.args[0]}, which is not here"
        except (ValueError, ArithmeticError) as error:
            failed[claim.id] = str(error)
    return dict(sorted(failed.items()))


def used_first(claims: Claims) -> list[Claim]:
    """Claims with the used before the user; an id is a digest, so a circle cannot be built, but a
    depth that Python cannot follow must not end in a traceback: this walk keeps its own stack."""
    order: list[Claim] = []
    done: set[str] = set()
    for start in sorted(claim.id for claim in claims):
        stack = [(start, False)]
        while stack:
            claim_id, expanded = stack.pop()
            if claim_id in done or claim_id not in claims:
                continue
            if expanded:
                done.add(claim_id)
                order.append(claims[claim_id])
                continue
            stack.append((claim_id, True))
            stack.extend((used, False) for used in claims[claim_id].uses)
    return order
