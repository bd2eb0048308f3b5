"""The public surface is what it says, and works as a program would use it."""

import secrets
from pathlib import Path

from auditor import api


def test_the_surface_is_complete() -> None:
    """Every public name is listed, and each has its documentation."""
    public = {name for name in vars(api) if not name.startswith("_")}

    assert public == set(api.__all__)
    assert all(getattr(api, name).__doc__ for name in api.__all__)


def test_review_and_verify(tmp_path: Path) -> None:
    """A document in, a record out, which verifies."""
    document = tmp_path / "d.yaml"
    document.write_text(
        "auditor: 1\nparameter_sets:\n  - {name: short, modulus: {group: modp768}}\n"
    )
    record = api.review(
        [str(document)],
        api.RunValues("2026-12-01", "quick"),
        api.Surroundings(secrets.randbelow),
    )

    assert record["parameter_sets"][0]["position"] == "hold"
    assert api.verify(record, secrets.randbelow).status == 0


def test_the_engine_that_runs_is_the_one_that_is_reported(tmp_path: Path) -> None:
    """There is one place to say it."""
    document = tmp_path / "d.yaml"
    document.write_text("auditor: 1\nparameter_sets: [{name: x, modulus: 23}]\n")
    engine = api.GmpEcm("/nowhere/ecm", "7.0.5")
    surroundings = api.Surroundings(secrets.randbelow, cores=api.Cores(engine=engine))
    record = api.review([str(document)], api.RunValues("2026-12-01", engine="other"), surroundings)

    assert record["run"]["engine"] == "GMP-ECM 7.0.5"


def test_structure() -> None:
    """A number in, its unit group out."""
    run = api.RunValues("2026-12-01")
    answers = api.Answers(api.Claims(), run, secrets.randbelow, lambda claims: None)
    found = api.structure(3600, answers)

    assert isinstance(found.group, api.UnitGroup)
    assert found.group.invariant_factors == (60, 4, 2, 2)
    assert api.order_of(7, found) == api.ElementOrder(7, 12)
