"""Two reports compared: what is new, what is settled, what got worse."""

import copy
import secrets
from functools import cache
from typing import Any

from auditor.compare import compare
from auditor.report.comparing import render
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from tests.robustness.edits import DOCUMENT


@cache
def original() -> dict[str, Any]:
    """A review of 256-bit sets."""
    run = RunValues("2026-12-01", "quick")
    return review([str(DOCUMENT)], run, Surroundings(secrets.randbelow))


def changed() -> dict[str, Any]:
    """A copy to change."""
    return copy.deepcopy(original())


def test_equal_reports_differ_in_nothing() -> None:
    """All sets are unchanged and nothing is worse."""
    found = compare(original(), changed())

    assert (found.run, found.sets, found.unchanged) == ((), (), 5)
    assert render(found) == "5 sets unchanged\n"


def test_positions_findings_and_facts() -> None:
    """A finding that goes is settled; one that comes is worse, and the way back is the reverse."""
    better = changed()
    first = better["parameter_sets"][0]
    gone = next(finding for finding in first["findings"] if finding["grade"] == "major")
    first["findings"].remove(gone)
    first["outcomes"][gone["rule"]] = "conforming"
    first["position"] = "no objection"
    first["facts"]["strength.work_bits_at_most"]["value"] += 10

    there, back = compare(original(), better), compare(better, original())
    texts = [change.text for change in there.sets[0].changes]
    assert not there.worse
    assert "position hold to no objection" in texts
    assert any(text.startswith("settled") and gone["rule"] in text for text in texts)
    assert any("strength.work_bits_at_most" in text for text in texts)
    assert back.worse
    assert sum(change.worse for change in back.sets[0].changes) == 3


def test_sets_come_and_go() -> None:
    """By their ids."""
    fewer = changed()
    removed = fewer["parameter_sets"].pop()

    assert compare(original(), fewer).sets[0].changes[0].text.startswith("set gone")
    added = compare(fewer, original())
    assert added.sets[0].identity == removed["id"]
    assert added.sets[0].changes[0].text == f"new set, {removed['position']}"


def test_run_and_books() -> None:
    """What else may explain a difference is said first."""
    other = changed()
    other["run"]["effort"] = "standard"
    other["rulebooks"][0]["sha256"] = "0" * 64
    other["rulebooks"].pop()
    texts = [change.text for change in compare(original(), other).run]

    assert texts[0] == "effort quick to standard"
    assert any(text.endswith("changed") for text in texts)
    assert any(text.endswith("removed") for text in texts)
