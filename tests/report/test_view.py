"""What documents derive from a record."""

from copy import deepcopy
from hashlib import sha256

import pytest

from auditor.report.json_report import dumps
from auditor.report.sheet_view import Sheet
from auditor.report.view import view
from auditor.report.words import POSITIONS, usage, verdict
from tests.report.records import fixture, with_text


def sheet_named(name: str) -> Sheet:
    """The sheet of that set in the harbour fixture."""
    return next(sheet for sheet in view(fixture("harbour")).sheets if sheet.name == name)


def test_equal_sets_share_a_sheet_that_names_every_place() -> None:
    """Six declared sets, two of them equal: five sheets."""
    report = view(fixture("harbour"))

    assert len(report.record["parameter_sets"]) == 6
    assert len(report.sheets) == 5
    assert sheet_named("crane telemetry").places == (
        "samples/cranes.yaml:12",
        "samples/depot/cranes.yaml:4 (crane telemetry, depot)",
    )


def test_the_worst_sheet_comes_first() -> None:
    """By position, then by the least work of a passive attacker or peer."""
    sheets = view(fixture("harbour")).sheets
    order = [POSITIONS.index(sheet.position) for sheet in sheets]

    assert order == sorted(order)
    assert [sheet.number for sheet in sheets] == [1, 2, 3, 4, 5]
    holds = [sheet.strength.peer.bits for sheet in sheets if sheet.position == "hold"]
    assert holds == [19.82, 35.93]


def test_equal_findings_are_merged_with_all_criteria() -> None:
    """Two rules of one defect, outcome and grade become one finding with two criteria."""
    first, second = sheet_named("crane telemetry").findings

    assert [item.rule for item in first.criteria] == [
        "received-values-confined",
        "received-values-checked",
    ]
    assert len(first.statements) == 2
    assert len(first.remedies) == 1
    assert second.defect == "strength"


def test_findings_of_another_outcome_or_grade_stay_apart() -> None:
    """An undetermined finding is never merged with a nonconforming one of the same defect."""
    record = fixture("harbour")
    crane = next(s for s in record["parameter_sets"] if s["name"] == "crane telemetry")
    crane["findings"][1]["outcome"] = "undetermined"
    sheet = next(sheet for sheet in view(record).sheets if sheet.name == "crane telemetry")

    assert len(sheet.findings) == 3
    assert {(finding.defect, finding.outcome) for finding in sheet.findings} >= {
        ("confinement", "nonconforming"),
        ("confinement", "undetermined"),
    }


def test_the_deciding_finding_is_the_reason() -> None:
    """It stands first whatever its place in the record, and the remedy is its own."""
    sheet = sheet_named("pilot boarding archive")

    assert sheet.record["decided_by"] == "strength-sufficient"
    assert sheet.record["findings"][0]["rule"] != "strength-sufficient"
    assert sheet.findings[0].criteria[0].rule == "strength-sufficient"
    assert sheet.reason == sheet.findings[0].statements[0]
    assert sheet.reason.startswith("It is open whether this holds: “The parameters do not reach")
    assert sheet.remedy == sheet.findings[0].remedies[0]
    assert [finding.grade for finding in sheet.findings] == ["major"] * 3 + ["minor", "observation"]


def test_a_concession_stands_beside_the_reason_and_moves_no_position() -> None:
    """The decision sheet shows it; the position stays what the findings make it."""
    sheet = sheet_named("tide gauge log")

    assert sheet.position == "conditions"
    assert [concession.in_force for concession in sheet.concessions] == [True]
    assert "harbour security board" in sheet.concessions[0].text
    assert sheet_named("quay-link handshake").concessions == ()


def test_without_objection_the_reason_counts_what_was_met() -> None:
    """No claim of safety, a count of requirements."""
    sheet = sheet_named("quay-link handshake")

    assert sheet.deciding is None
    assert sheet.reason == "All of the 6 requirements that apply are met."


def test_an_observation_does_not_count_as_met() -> None:
    """With an observation standing, the count says so."""
    record = fixture("one-set")
    record["parameter_sets"][0]["outcomes"]["generator-order-even"] = "nonconforming"
    record["parameter_sets"][0]["outcomes"]["origin-recorded"] = "not applicable"
    (sheet,) = view(record).sheets

    assert sheet.reason == "4 of the 5 requirements that apply are met; the rest are observations."


def test_each_question_stands_once_with_all_that_waits_for_it() -> None:
    """Search's question first, with both findings; what the owner could say after it, as one
    question where the same sheets wait for it."""
    questions = view(fixture("harbour")).questions
    about_factors = questions[0]

    assert not about_factors.is_owners
    assert len(about_factors.waiting) == 1
    assert len(about_factors.waiting[0][2]) == 2
    assert [question.key for question in questions[1:]] == [
        "key:exponent.bits, peer_check, provenance.method, subgroup_order"
    ]
    assert len({question.key for question in questions}) == len(questions)


def test_a_nonconforming_finding_waits_for_nothing() -> None:
    """Facts it would have liked to show do not make it open."""
    for finding in sheet_named("crane telemetry").findings:
        assert finding.waits_for == ()


def test_a_finding_waits_for_what_would_move_a_loose_fact() -> None:
    """A fact that is there but may still move waits for the question that settles it."""
    record = fixture("harbour")
    archive = next(s for s in record["parameter_sets"] if s["position"] == "open")
    archive["findings"][0]["missing"] = ["strength.work_bits_at_most"]
    archive["questions"][0]["settles"].append("strength.work_bits_at_most")
    sheet = next(sheet for sheet in view(record).sheets if sheet.position == "open")
    waiting = next(f for f in sheet.findings if f.defect == "order-unknown")

    assert waiting.missing == (("strength.work_bits_at_most", "110.12, and may still move"),)
    assert waiting.waits_for == (archive["questions"][0]["id"],)


def test_limits_say_what_was_not_settled() -> None:
    """The unfactored rest, the depth of search, the risk, the books left out, the undeclared."""
    limits = " ".join(sheet_named("pilot boarding archive").limits)

    assert "approved-groups was not applied" in limits
    assert "2025 bits, is not factored" in limits
    assert "15 decimal digits" in limits
    assert "0.21" in limits
    assert "exponent.bits, peer_check, provenance.method, subgroup_order" in limits


def test_the_record_is_named_by_its_digest() -> None:
    """Every document names the JSON report that it renders."""
    record = fixture("harbour")

    assert view(record).record_digest == sha256(dumps(record).encode()).hexdigest()


def test_the_view_does_not_change_the_record() -> None:
    """A renderer may be called before another on the same record."""
    record = fixture("harbour")
    before = dumps(record)
    view(record)

    assert dumps(record) == before


@pytest.mark.parametrize(
    ("positions", "sentence"),
    [
        ({}, "Nothing was reviewed."),
        ({"hold": 1, "open": 0}, "The one parameter set must not be released as declared."),
        ({"hold": 0, "no objection": 3}, "All 3 sets raise no objection."),
        (
            {"hold": 1, "open": 2, "conditions": 1, "no objection": 1},
            "Of 5 parameter sets, 1 must not be released as declared, 2 are not decided yet, "
            "1 may be released with conditions, 1 raises no objection.",
        ),
    ],
)
def test_the_verdict_is_one_sentence(positions: dict[str, int], sentence: str) -> None:
    """Every position that occurs is named with its number."""
    assert verdict(positions) == sentence


def test_usage_tells_silence_from_nothing() -> None:
    """No word on received values is not the same as a word that nothing is done."""
    silent = usage({"purpose": "key-agreement"})
    nothing = usage({"purpose": "key-agreement", "peer_check": []})

    assert "no word on what is done to received values" in silent[1]
    assert "received values not checked" in nothing[1]


def test_a_set_that_was_interrupted_is_announced() -> None:
    """An incomplete review says so first."""
    assert view(fixture("nothing-read")).notices[0].startswith("This report is incomplete")


def test_the_json_report_is_given_out_on_the_way() -> None:
    """What carries the digest is the report itself, as it was before its text was made visible."""
    record = with_text("\u202e")
    pieces: list[bytes] = []
    shown = view(record, pieces.append)

    assert b"".join(pieces) == dumps(record).encode()
    assert shown.record_digest == sha256(b"".join(pieces)).hexdigest()


def test_sets_that_share_a_remedy_share_its_words() -> None:
    """Equal remedies, whether the very same or not, are equal words."""
    record = fixture("harbour")
    crane = next(s for s in record["parameter_sets"] if s["name"] == "crane telemetry")
    again = crane | {"digest": 64 * "0"}
    copied = deepcopy(crane) | {"digest": 64 * "1"}
    record["parameter_sets"] = [crane, again, copied]
    one, same, equal = (sheet.findings for sheet in view(record).sheets)

    assert one == same == equal
    assert any(finding.remedies for finding in one)
