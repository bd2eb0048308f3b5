"""The values of one run that may move an answer and are recorded in its report."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

Effort = Literal["quick", "standard", "thorough"]
EFFORTS: tuple[Effort, ...] = ("quick", "standard", "thorough")


@dataclass(frozen=True, slots=True)
class RunValues:
    """``as_of`` is an ISO date; ``factor_digits`` overrides the depth of the factor search that
    ``effort`` implies. A review fills in the rest: ``engine`` is what was to run elliptic curves,
    program and version (a search names what did run them); ``census`` counts the parameter sets of
    this run by modulus."""

    as_of: str
    effort: Effort = "standard"
    factor_digits: int | None = None
    engine: str = "built-in"
    census: Mapping[int, int] = field(default_factory=lambda: MappingProxyType({}))

    @property
    def year(self) -> int:
        """The year of ``as_of``."""
        return int(self.as_of[:4])

    @property
    def rounds(self) -> int:
        """Strong tests to unpredictable bases for each probable prime."""
        return 16 if self.effort == "quick" else 64
