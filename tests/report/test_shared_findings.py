"""Findings of several sets: each told once with all its places, and nothing lost by that."""

import re
from typing import Any

import pytest

from auditor.report import html, markdown
from auditor.report.markdown_text import LEAST, span
from auditor.report.shared_findings import FEWEST, by_sheet, ranges, shared_findings
from auditor.report.view import view
from tests.report.pages import Page
from tests.report.records import fixture


def alike(count: int, *, others: bool = False) -> dict[str, Any]:
    """A record with so many sets that differ in modulus and line alone, and quite other ones."""
    record = fixture("harbour")
    sets = record["parameter_sets"]
    first = next(s for s in sets if "observation" in {f["grade"] for f in s["findings"]})
    copies = [
        first
        | {
            "id": f"primes#prime {line}",
            "name": f"prime {line}",
            "digest": f"{line:064x}",
            "source": {"path": "primes", "line": line},
            "places": [{"path": "primes", "line": line, "column": 1, "name": f"prime {line}"}],
            "declaration": first["declaration"] | {"modulus": hex(2**2047 + 2 * line + 1)},
        }
        for line in range(1, count + 1)
    ]
    record["parameter_sets"] = [*copies, *(s for s in sets if others and s is not first)]
    return record


def test_what_is_equal_is_one_and_what_differs_is_not() -> None:
    """The members of a group agree in defect, outcome, grade and usage; no two groups do, and
    nothing outside of the groups agrees with anything."""
    sheets = view(alike(7, others=True)).sheets
    shared = shared_findings(sheets)
    member = by_sheet(shared)
    keys: dict[tuple[Any, ...], set[int]] = {}
    for sheet in sheets:
        for place, finding in enumerate(sheet.findings, 1):
            key = finding.defect, finding.outcome, finding.grade, sheet.usage
            group = member.get((sheet.number, place))
            keys.setdefault(key, set()).add(group.number if group else 0)

    assert all(len(numbers) == 1 for numbers in keys.values())
    told = [number for numbers in keys.values() for number in numbers if number]
    assert sorted(told) == [finding.number for finding in shared] != []
    assert all(len(finding.members) == 7 for finding in shared)
    assert [finding.number for finding in shared] == list(range(1, len(shared) + 1))


def test_places_are_told_a_file_at_a_time() -> None:
    """All lines of all sets, neighbours as a range."""
    for finding in shared_findings(view(alike(30)).sheets):
        assert [place.text for place in finding.places] == ["primes:1-30"]
        assert finding.numbers.count("-") == 1


@pytest.mark.parametrize(
    ("numbers", "text"),
    [((), ""), ((4,), "4"), ((5, 4), "4, 5"), ((1, 3, 2, 9, 2), "1-3, 9"), ((7, 9), "7, 9")],
)
def test_ranges(numbers: tuple[int, ...], text: str) -> None:
    """In rising order, each number once, two neighbours not yet a range."""
    assert ranges(numbers) == text


def test_the_ticket_tells_a_criterion_of_many_sets_once() -> None:
    """Also where the sets are many; every sheet refers to what it shares."""
    record = alike(12)
    shared = shared_findings(view(record).sheets)
    text = markdown.render(record, limit=10**6)
    for finding in shared:
        assert text.count(f"\n### F{finding.number}. {finding.first.words}, 12 sets\n") == 1
        assert len(re.findall(rf"^\d+\. .* See F{finding.number}\.$", text, re.MULTILINE)) == 12
        for criterion in finding.criteria:
            assert text.count(f"({span(criterion.rule)})") == 1


def test_what_is_not_told_together_is_told_on_each_sheet() -> None:
    """A ticket too short for the common part refers to nothing that is not in it."""
    record = alike(12)
    for limit in range(LEAST, 16_000, 500):
        text = markdown.render(record, limit=limit)
        headed = set(re.findall(r"^### (F\d+)\.", text, re.MULTILINE))
        assert set(re.findall(r" See (F\d+)\.$", text, re.MULTILINE)) <= headed


def test_what_differs_stays_on_its_sheet() -> None:
    """A statement, a remedy and a concession of one set are told with that set."""
    record = alike(5)
    for item in record["parameter_sets"][:5]:
        item["findings"] = [
            finding
            | {
                "statement": f"This is said of {item['name']}.",
                "remedy": {"text": f"Mend {item['name']}.", "breaks": [], "patch": None},
                "grade": "minor",
                "outcome": "nonconforming",
            }
            for finding in item["findings"]
        ]
    text, page = markdown.render(record, limit=10**6), Page.read(html.render(record)).words()
    for number in range(1, 6):
        for sentence in (f"This is said of prime {number}.", f"Mend prime {number}."):
            assert sentence in text
            assert sentence in page


def test_the_page_tells_an_observation_of_many_sets_once() -> None:
    """With all its places; each sheet links to it and keeps its own statement."""
    record = alike(12)
    shared = shared_findings(view(record).sheets)
    observations = [item for item in shared if item.first.grade == "observation"]
    source = html.render(record)
    page = Page.read(source)
    assert observations
    for finding in observations:
        assert source.count(f'href="#shared-{finding.number}"') == 12
        assert f"shared-{finding.number}" in page.attributes("id")
        for criterion in finding.criteria:
            assert source.count(f"(rule <code>{criterion.rule}</code>)") == 1
    assert "primes:1-12" in page.words()
    assert all(item["name"] in page.words() for item in record["parameter_sets"])


def test_what_few_sets_have_in_common_stays_on_their_sheets() -> None:
    """Below the least number nothing is told apart."""
    assert shared_findings(view(alike(FEWEST - 1)).sheets) == ()
    assert shared_findings(view(alike(FEWEST)).sheets) != ()


def test_sets_without_anything_in_common_share_nothing() -> None:
    """No section, no reference."""
    record = fixture("one-set")
    assert shared_findings(view(record).sheets) == ()
    assert "Findings of several sets" not in markdown.render(record) + html.render(record)
