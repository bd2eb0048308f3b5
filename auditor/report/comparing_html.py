"""A comparison of two reports as one self-contained page, in the looks of the report."""

from collections.abc import Mapping
from typing import Any

from auditor.report.comparing import (
    by_urgency,
    is_weighty,
    label,
    sentence,
    sorted_changes,
    summary,
    verdict,
)
from auditor.report.templates import environment
from auditor.report.text import visible_record
from auditor.report.words import plural

MOST_SETS = 1_000
"""Sets written out; the JSON record has all."""


def render(comparison: Mapping[str, Any]) -> str:
    """The whole comparison as an HTML document."""
    shown = visible_record(comparison)
    sets = by_urgency(shown["sets"])
    template = environment().get_template("comparison.html.j2")
    return template.render(
        comparison=shown,
        verdict=verdict(shown),
        summary=summary(shown),
        weighty=[item for item in sets if is_weighty(item)],
        light=[item for item in sets if not is_weighty(item)],
        sorted_changes=sorted_changes,
        sentence=sentence,
        plural=plural,
        label=label,
        most_sets=MOST_SETS,
    )
