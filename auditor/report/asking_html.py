"""What is worth asking, as one self-contained page in the looks of the report."""

from collections.abc import Mapping
from typing import Any

from auditor.report import asking as words
from auditor.report.templates import environment
from auditor.report.text import visible_record

MOST = 1_000
"""Entries of a list that are written out; the JSON record has all."""


def render(asking: Mapping[str, Any]) -> str:
    """All the questions as an HTML document."""
    template = environment().get_template("asking.html.j2")
    return template.render(asking=visible_record(asking), words=words, most=MOST)
