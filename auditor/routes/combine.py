"""The least work over the routes that are open to an attacker."""

from collections.abc import Iterable
from dataclasses import dataclass

from auditor.routes.base import Attacker, Closed, Work
from auditor.routes.standard_tables import standard_bits, standard_figure

__all__ = ["Least", "least", "standard_bits", "standard_figure"]

_POWERS: dict[Attacker, tuple[Attacker, ...]] = {
    "passive": ("passive",),
    "peer": ("passive", "peer"),
    "designer": ("passive", "peer", "designer"),
}
"""Whose routes an attacker can take: a peer also listens, a designer is also a peer."""


@dataclass(frozen=True, slots=True)
class Least:
    """The route of least work, and whether nothing unknown about these routes could lower it."""

    work: Work
    tight: bool


def least(routes: Iterable[Work | Closed], attacker: Attacker) -> Least | None:
    """The least work over the open routes of ``attacker``; None when there is no route.

    Not tight as soon as one open route is only bounded from above: more knowledge may bring any
    such route below. The order of ``routes`` does not matter; of equal figures the first name
    in the alphabet is taken.
    """
    powers = _POWERS[attacker]
    routes_open = [r for r in routes if isinstance(r, Work) and r.attacker in powers]
    if not routes_open:
        return None
    work = min(routes_open, key=lambda route: (route.bits, route.route, route.attacker))
    return Least(work, all(route.bound == "exact" for route in routes_open))
