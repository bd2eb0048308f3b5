"""What the attested records of our own searches amount to, as work of the success model."""

from auditor.claims.collection import Claims
from auditor.claims.searched import Searched
from auditor.search.work import Work


def furthest(claims: Claims, rest: int) -> tuple[Searched, Work] | None:
    """The record of the deepest search that left ``rest``, and its work; None without one.

    A record that this version does not understand is passed over.
    """
    found = []
    for claim in claims.searched(rest):
        try:
            work = Work.from_runs(claim.runs, tuple(claim.engine.split(" and ")))
        except ValueError:
            continue
        found.append((claim, work))
    return max(found, key=lambda pair: _depth(pair[1]), default=None)


def _depth(work: Work) -> tuple[object, ...]:
    curves = sorted(((done.b1, done.b2, done.count) for done in work.curves), reverse=True)
    return tuple(curves), work.p_minus_1, work.p_plus_1, work.rho_iterations, work.trial_bound
