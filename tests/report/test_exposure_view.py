"""The table of other usages."""

from math import floor
from typing import Any

from hypothesis import given
from hypothesis import strategies as st

from auditor.report.exposure_view import exposure_table
from auditor.report.words import USES
from tests.report.records import fixture


@st.composite
def exposures(draw: st.DrawFn) -> list[dict[str, Any]]:
    """Entries in the shape of the record, of few different figures, one usage declared."""
    usages = draw(
        st.lists(
            st.tuples(
                st.sampled_from(["none", "range", "membership", "cofactor"]),
                st.sampled_from(sorted(USES)),
                st.sampled_from([160, 224, 256]),
                st.sampled_from(["passive", "peer", "designer"]),
            ),
            unique=True,
            max_size=20,
        )
    )
    return [
        {
            "check": check,
            "use": use,
            "width": width,
            "attacker": attacker,
            "bits": draw(st.sampled_from([35.93, 110.12])),
            "bound": "exact",
            "route": "confinement",
            "declared": (check, use, width) == usages[0][:3],
        }
        for check, use, width, attacker in usages
    ]


@given(exposures())
def test_sharing_a_line_loses_nothing(entries: list[dict[str, Any]]) -> None:
    """Every usage is in exactly one row, with the least figure of a passive attacker or peer."""
    table = exposure_table(entries)
    counted = [entry for entry in entries if entry["attacker"] != "designer"]
    if table is None:
        assert counted == []
        return
    pairs = [(use, check) for row in table.rows for use in row.uses for check in row.checks]
    assert len(pairs) == len(set(pairs))
    assert set(pairs) == {(entry["use"], entry["check"]) for entry in counted}
    for use, check in pairs:
        (row,) = [row for row in table.rows if use in row.uses and check in row.checks]
        for width, cell in zip(table.widths, row.cells, strict=True):
            figures = [
                entry["bits"]
                for entry in counted
                if (entry["use"], entry["check"], entry["width"]) == (use, check, width)
            ]
            assert (cell and cell.bits) == min(figures, default=None)


def test_the_declared_usage_is_marked_once_and_rounded_down() -> None:
    """The crane's own line has the frame; 35.93 bits are at most 35."""
    crane = next(s for s in fixture("harbour")["parameter_sets"] if s["name"] == "crane telemetry")
    table = exposure_table(crane["exposure"])
    assert table is not None

    (row,) = [row for row in table.rows if row.declared is not None]
    assert (row.declared, row.exponent, row.check) == (224, "static", "nothing, range")
    (cell,) = row.cells
    assert cell is not None
    assert cell.text == f"≤ {floor(35.93)}"
    assert len(table.rows) < len({(e["use"], e["check"]) for e in crane["exposure"]})
