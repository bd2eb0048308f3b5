"""How well something is established, strongest first."""

from collections.abc import Iterable
from enum import StrEnum


class Standing(StrEnum):
    """``proven``; ``probable`` (with an error bound); ``attested`` (our own record of search
    effort, which nobody can check); ``declared`` (the owner's word)."""

    PROVEN = "proven"
    PROBABLE = "probable"
    ATTESTED = "attested"
    DECLARED = "declared"

    @property
    def weakness(self) -> int:
        """0 for the strongest."""
        return _WEAKNESS[self]


_WEAKNESS = {standing: place for place, standing in enumerate(Standing)}


def weakest(standings: Iterable[Standing]) -> Standing:
    """The weakest of them; ``proven`` for none, since nothing is rested on."""
    return max(standings, key=lambda standing: standing.weakness, default=Standing.PROVEN)
