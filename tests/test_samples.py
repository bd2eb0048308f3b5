"""The samples are what their text says: each planted failure is named, and no false one."""

import importlib.util
import json
import secrets
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

from auditor.report.json_report import dumps, problems
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.verify import verify

SAMPLES = Path(__file__).parents[1] / "samples"

EXPECTED: dict[str, tuple[str, str | None]] = {
    "quay-link handshake": ("no objection", None),
    "pilot-boat telemetry": ("no objection", None),
    "crane enrolment": ("no objection", None),
    "tug dispatch": ("no objection", None),
    "tide-gauge upload": ("hold", "modulus-composite"),
    "berth-ledger sync": ("hold", "declared-order-not-dividing"),
    "buoy beacon pairing": ("hold", "generator-trivial"),
    "weighbridge legacy link": ("hold", "modulus-too-short"),
    "dredger log": ("hold", "subgroup-too-small"),
    "fish-market terminal": ("hold", "confinement-work"),
    "fish-market terminal with membership check": ("no objection", None),
    "night-ferry relay": ("hold", "exponent-too-short"),
    "harbour-master console": ("no objection", None),
    "ferry timetable": ("open", "subgroup-too-small"),
    "customs gateway": ("hold", "confinement-work"),
    "cargo-manifest sealing": ("no objection", None),
    "manifest archive": ("hold", "raw-elgamal-even-order"),
    "passenger-list sealing": ("no objection", None),
    "lock-gate signing": ("no objection", None),
    "radar-feed signing": ("no objection", None),
    "dockside tunnel": ("hold", "confinement-leak"),
    "cargo library before": ("hold", "raw-elgamal-even-order"),
    "cargo library with the generator squared": ("conditions", "raw-message-visible"),
    "signal-lamp signing": ("no objection", None),
    "signal-lamp signing with another seed": ("conditions", "declared-origin-disagrees"),
}
"""Position and deciding rule of every set, as a reviewer would put them by hand."""


@pytest.fixture(scope="module")
def record() -> dict[str, Any]:
    """A review of all samples at standard effort."""
    paths = sorted(str(path) for path in SAMPLES.glob("*.yaml"))
    return review(paths, RunValues("2026-12-01"), Surroundings(secrets.randbelow))


def sets(record: dict[str, Any]) -> dict[str, dict[str, Any]]:
    """The sets by name."""
    return {item["name"]: item for item in record["parameter_sets"]}


def test_positions_and_what_decides_them(record: dict[str, Any]) -> None:
    """Every set has the position that its planted failure deserves, decided by that failure."""
    found = {name: (s["position"], s["decided_by"]) for name, s in sets(record).items()}

    assert found == EXPECTED


def test_sound_sets_have_no_major_or_minor_finding(record: dict[str, Any]) -> None:
    """What is not planted is not found."""
    for name, item in sets(record).items():
        if EXPECTED[name][0] == "no objection":
            assert {finding["grade"] for finding in item["findings"]} <= {"observation"}, name


def test_a_generator_of_the_full_group_is_named_in_both_uses(record: dict[str, Any]) -> None:
    """An observation in key agreement, a major in raw ElGamal."""
    dispatch = {f["rule"]: f["grade"] for f in sets(record)["tug dispatch"]["findings"]}
    archive = {f["rule"]: f["grade"] for f in sets(record)["manifest archive"]["findings"]}

    assert dispatch["generator-order-even"] == "observation"
    assert archive["raw-elgamal-even-order"] == "major"


def test_an_order_that_cannot_be_settled_is_said_to_be_open(record: dict[str, Any]) -> None:
    """The set is not 'no objection': its report names the open question and its cost."""
    item = sets(record)["ferry timetable"]
    absent = item["absent"]["generator.largest_prime_length"]
    questions = {question["id"]: question for question in item["questions"]}
    (open_question,) = absent["questions"]

    assert absent["reason"] == "unsettled"
    assert "Which prime factors has the composite" in questions[open_question]["about"]
    assert questions[open_question]["cost"] > 0
    assert "strength.sufficient" in questions[open_question]["settles"]


def test_the_worst_party_is_named(record: dict[str, Any]) -> None:
    """Where parties differ, the route says whose exponent falls."""
    routes = {route["name"]: route for route in sets(record)["customs gateway"]["routes"]}
    details = {item["label"]: item["value"] for item in routes["confinement"]["details"]}

    assert details["party"] == "gateway"


def test_the_record_is_valid_and_verifies(record: dict[str, Any]) -> None:
    """Against its schema, and by the verifier after a round trip through text."""
    assert problems(record) == []
    assert verify(json.loads(dumps(record)), secrets.randbelow).failures == ()


@pytest.fixture(scope="module")
def derive() -> ModuleType:
    """The script that the samples' numbers come from."""
    spec = importlib.util.spec_from_file_location("derive", SAMPLES / "derive.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_the_numbers_are_those_of_their_labels(record: dict[str, Any], derive: ModuleType) -> None:
    """A part of them made again."""
    declared = {name: item["declaration"] for name, item in sets(record).items()}
    q = derive.prime("crane enrolment q", 256)
    p = derive.with_subgroup("crane enrolment p", 2048, q)
    tide = derive.prime("tide gauge first", 1024) * derive.prime("tide gauge second", 1024)
    dredger, _ = derive.smooth_prime("dredger log p", 2048, 40)

    assert declared["crane enrolment"]["modulus"] == hex(p)
    assert declared["crane enrolment"]["subgroup_order"] == hex(q)
    assert declared["crane enrolment"]["generator"] == hex(derive.element_of_order(p, q))
    assert declared["tide-gauge upload"]["modulus"] == hex(tide)
    assert declared["dredger log"]["modulus"] == hex(dredger)
    assert declared["ferry timetable"]["modulus"] == hex(derive.prime("ferry timetable p", 2048))
