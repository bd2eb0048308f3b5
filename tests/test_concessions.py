"""Concessions move the exit status and nothing else, and only while nothing got worse."""

import copy
import io
import json
import re
import secrets
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from auditor.concessions import (
    Concession,
    Concessions,
    ConcessionsError,
    conceded,
    fails,
    is_conceded,
    leads_to,
    load,
    notices,
    parse,
    recorded,
    worse_when,
    worsened,
)
from auditor.declaration import Place
from auditor.facts import vocabulary
from auditor.intake.inputs import InputError
from auditor.report.json_report import problems
from auditor.report.sarif import render as sarif
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.verify import verify
from tests.test_cli import auditor, quick  # noqa: F401  (the fixture is used by its name)

WEAK = """\
auditor: 1
parameter_sets:
  - name: short
    purpose: key-agreement
    modulus: {group: modp768}
    exponent: {bits: 160, use: single}
    peer_check: [range]
  - name: sound
    purpose: key-agreement
    modulus: {group: ffdhe2048}
    exponent: {bits: 256, use: single}
    peer_check: [range]
"""
DAY, LAST_DAY, TOO_LATE = "2026-12-01", "2027-01-31", "2027-02-01"
RULE = "strength-insufficient"
MANUAL = Path(__file__).parents[1] / "reports" / "README.md"


@cache
def reviewed(as_of: str = DAY) -> dict[str, Any]:
    """A weak set, and one that needs no concession, without concessions."""
    return review(
        ["-"],
        RunValues(as_of, "quick"),
        Surroundings(secrets.randbelow),
        stdin=io.BytesIO(WEAK.encode()),
    )


def entries(record: dict[str, Any], until: str = LAST_DAY) -> list[dict[str, Any]]:
    """An entry for every finding of a report that is more than an observation."""
    rules = {id_: rule for book in record["rulebooks"] for id_, rule in book["rules"].items()}
    return [
        {
            "rule": finding["rule"],
            "set": item["digest"],
            "requirement": rules[finding["rule"]]["requirement"],
            "grade": finding["grade"],
            "outcome": finding["outcome"],
            "values": dict(finding["values"]),
            "reason": "Replaced in March.",
            "by": "head of systems",
            "until": until,
        }
        for item in record["parameter_sets"]
        for finding in item["findings"]
        if finding["grade"] != "observation"
    ]


def document(granted: list[dict[str, Any]]) -> str:
    """A file of these entries."""
    return yaml.safe_dump({"concessions": 1, "granted": granted}, sort_keys=False)


def read(granted: list[dict[str, Any]]) -> Concessions:
    """These entries as they are read."""
    return parse(document(granted).encode(), "policy.yaml", vocabulary())


def finding(record: dict[str, Any], rule: str = RULE) -> dict[str, Any]:
    """The finding of a rule about the weak set."""
    (found,) = [f for f in record["parameter_sets"][0]["findings"] if f["rule"] == rule]
    return found  # type: ignore[no-any-return]


def entry(**changed: Any) -> Concession:
    """The concession for one finding of the weak set, with something changed."""
    (found,) = [e for e in entries(reviewed()) if e["rule"] == RULE]
    return read([{**found, **changed}]).granted[0]


def weakened(**values: Any) -> dict[str, Any]:
    """The review with other values in that finding."""
    record = copy.deepcopy(reviewed())
    for name, value in values.items():
        name = name.replace("__", ".")
        if value is None:
            del finding(record)["values"][name]
        else:
            finding(record)["values"][name] = value
    return record


class TestSemantics:
    """What a concession does and when it does nothing."""

    def test_a_set_whose_every_failing_finding_is_conceded_does_not_fail(self) -> None:
        """At every threshold; the position and the grading stay."""
        record = conceded(reviewed(), read(entries(reviewed())).granted)
        weak = record["parameter_sets"][0]

        assert weak["position"] == "hold"
        assert fails(reviewed()["parameter_sets"][0], "hold")
        assert not any(fails(weak, at) for at in ("hold", "open", "conditions"))
        assert {f["grade"] for f in weak["findings"] if is_conceded(f)} == {"major"}
        assert finding(record)["concession"] == {
            "reason": "Replaced in March.",
            "by": "head of systems",
            "until": LAST_DAY,
            "in_force": True,
            "grade": "major",
            "requirement": "strength.sufficient",
            "granted": finding(record)["values"],
        }

    def test_one_failing_finding_without_a_concession_fails_the_set(self) -> None:
        """Whichever it is."""
        every = read(entries(reviewed())).granted
        assert len(every) > 1
        for left_out in every:
            granted = [item for item in every if item is not left_out]
            assert fails(conceded(reviewed(), granted)["parameter_sets"][0], "hold")

    @pytest.mark.parametrize(
        ("grade", "outcome", "failing"),
        [
            ("major", "nonconforming", {"hold", "open", "conditions"}),
            ("major", "undetermined", {"open", "conditions"}),
            ("minor", "nonconforming", {"conditions"}),
            ("minor", "undetermined", {"conditions"}),
            ("observation", "nonconforming", set()),
        ],
    )
    def test_what_counts_at_which_threshold(
        self, grade: str, outcome: str, failing: set[str]
    ) -> None:
        """A finding counts at the position that it leads to, and at those below."""
        found = {"grade": grade, "outcome": outcome, "concession": None}
        item = {"position": leads_to(found), "decided_by": "r", "findings": [found]}

        assert {at for at in ("hold", "open", "conditions", "never") if fails(item, at)} == failing

    def test_a_set_that_nothing_was_said_of_counts_as_open(self) -> None:
        """There is no finding to concede."""
        item = {"position": "open", "decided_by": None, "findings": []}

        assert [fails(item, at) for at in ("hold", "open", "conditions", "never")] == [
            False,
            True,
            True,
            False,
        ]

    @pytest.mark.parametrize("fail_on", ["hold", "open", "conditions"])
    def test_without_concessions_the_position_decides(self, fail_on: str) -> None:
        """The exit status by findings is that by positions."""
        order = ("hold", "open", "conditions", "no objection")
        record = reviewed()
        for item in record["parameter_sets"]:
            expected = order.index(item["position"]) <= order.index(fail_on)
            assert fails(item, fail_on) is expected

    def test_the_last_day_counts(self) -> None:
        """In force on it; the day after the finding fails again, shows it, and a notice says so."""
        granted = [entry()]
        record = conceded({**reviewed(), "run": {"as_of": LAST_DAY}}, granted)
        late = conceded({**reviewed(), "run": {"as_of": TOO_LATE}}, granted)

        assert is_conceded(finding(record))
        assert not is_conceded(finding(late))
        assert finding(late)["concession"]["in_force"] is False
        assert fails(late["parameter_sets"][0], "hold")
        (told,) = notices(late, granted)
        assert re.match(r"policy.yaml:3:3: .*strength-insufficient has run out for short: ", told)
        assert not any("run out" in line for line in notices(record, granted))

    @pytest.mark.parametrize(
        ("values", "voided"),
        [
            ({"strength__work_bits_at_most": 70.0}, False),
            ({"strength__work_bits_at_most": 69.73}, True),
            ({"strength__required_bits": 111}, False),
            ({"strength__required_bits": 128}, True),
            ({"strength__sufficient": True}, True),
            ({"strength__work_bits": None}, True),
            ({"modulus__length": 768}, True),
            ({"run__year": 2027}, False),
        ],
    )
    def test_a_worse_value_voids_it(self, values: dict[str, Any], voided: bool) -> None:
        """Less work or a higher requirement; any change where no direction is known; a value that
        was not shown, or is not any more. What got better, and the year, do not."""
        record = conceded(weakened(**values), [entry()])
        told = notices(record, [entry()])

        assert (finding(record)["concession"] is None) is voided
        assert fails(record["parameter_sets"][0], "hold")
        name = next(iter(values)).replace("__", ".")
        assert any("does not cover short: " in line and name in line for line in told) is voided

    def test_another_outcome_is_another_matter(self) -> None:
        """Granted while it was undetermined, void once the rule is found broken."""
        record = conceded(reviewed(), [entry(outcome="undetermined")])
        (told,) = notices(record, [entry(outcome="undetermined")])

        assert finding(record)["concession"] is None
        assert "granted for undetermined, the rule is nonconforming" in told

    @pytest.mark.parametrize(
        ("changed", "told"),
        [
            ({"set": "0" * 64}, "is unused: no set has the digest 0000000000000000…"),
            ({"rule": "generator-trivial"}, "is unused for short: the rule is conforming"),
            ({"rule": "no-such-rule"}, "is unused for short: no rulebook in force has that rule"),
        ],
    )
    def test_what_fits_nothing_is_a_notice(self, changed: dict[str, Any], told: str) -> None:
        """A stale entry does not linger unseen."""
        granted = [entry(**changed)]
        record = conceded(reviewed(), granted)

        assert record == reviewed()
        assert [told in line for line in notices(record, granted)] == [True]

    @pytest.mark.parametrize(
        ("granted", "shown", "covered"),
        [
            ("minor", "major", False),
            ("major", "minor", True),
            ("minor", "observation", True),
            ("observation", "minor", False),
            ("minor", "minor", True),
        ],
    )
    def test_a_worse_grade_voids_it(self, granted: str, shown: str, covered: bool) -> None:
        """Who conceded a minor finding has not conceded a major one."""
        record = copy.deepcopy(reviewed())
        finding(record)["grade"] = shown
        item = entry(grade=granted)
        told = f"granted for a finding graded {granted}, this is graded {shown}"

        assert is_conceded(finding(conceded(record, [item]))) is covered
        assert any(told in line for line in notices(record, [item])) is not covered

    @pytest.mark.parametrize("grade", ["minor", "major"])
    @pytest.mark.parametrize("least", [1024, 4096])
    def test_a_house_that_raises_its_rule_has_not_conceded_it(
        self, tmp_path: Path, grade: str, least: int
    ) -> None:
        """The grade and the threshold of a house book, raised after the grant, in a whole review;
        the values of the finding are what they were."""
        book = tmp_path / "house.yaml"

        def run(grade: str, least: int, concessions: Concessions | None = None) -> dict[str, Any]:
            text = HOUSE.replace("Least LEAST", f"House\nvalues: {{least: {least}}}")
            text = text.replace(">= LEAST", ">= values.least")
            book.write_text(text.replace("grade: major", f"grade: {grade}"))
            return review(
                ["-"],
                RunValues(DAY, "quick"),
                Surroundings(secrets.randbelow),
                books=[book],
                stdin=io.BytesIO(WEAK.encode()),
                concessions=concessions,
            )

        granted = read(entries(run("minor", 1024)))
        record = run(grade, least, granted)
        (shown, *_) = record["parameter_sets"][0]["findings"]
        same = (grade, least) == ("minor", 1024)

        assert shown["values"] == {"modulus.length": 768}
        assert is_conceded(shown) is same
        assert fails(record["parameter_sets"][0], "conditions") is not same
        assert verify(record, secrets.randbelow, [str(book)]).status == 0

    def test_another_requirement_is_named(self) -> None:
        """What it was and what it is; line breaks in the file are none of it."""
        (told,) = notices(reviewed(), [entry(requirement="strength.work_bits\n  >= 80")])

        assert (
            "for the requirement strength.work_bits >= 80, which is strength.sufficient now" in told
        )
        assert is_conceded(
            finding(conceded(reviewed(), [entry(requirement=" strength.sufficient\n")]))
        )

    def test_equal_sets_share_it(self) -> None:
        """The digest covers all values, so a set under another name is conceded too."""
        record = copy.deepcopy(reviewed())
        record["parameter_sets"].append({**record["parameter_sets"][0], "name": "twin"})
        twin = conceded(record, [entry()])["parameter_sets"][-1]

        assert [f["rule"] for f in twin["findings"] if is_conceded(f)] == [RULE]


@given(st.data())
def test_a_concession_never_changes_anything_but_its_member(data: st.DataObject) -> None:
    """Any entries, matching or not, leave position, findings, facts and outcomes as they were."""
    record = reviewed()
    possible = [
        item
        for found in entries(record)
        for item in (found, {**found, "set": "1" * 64}, {**found, "until": "2020-01-01"})
    ]
    chosen = data.draw(st.lists(st.sampled_from(possible), max_size=6))
    unique = {(item["rule"], item["set"]): item for item in chosen}
    after = copy.deepcopy(conceded(record, read(list(unique.values())).granted))
    for item in after["parameter_sets"]:
        for shown in item["findings"]:
            shown["concession"] = None

    assert after == record


@given(st.data())
def test_a_mutated_value_voids_or_is_better(data: st.DataObject) -> None:
    """Whatever value of a finding moves, the concession stands only if it moved the good way."""
    values = finding(reviewed())["values"]
    name = data.draw(st.sampled_from(sorted(values)))
    before = values[name]
    others = {bool: st.booleans(), str: st.text()}
    now = data.draw(others.get(type(before), st.floats(-10, 10_000)))
    direction = worse_when(name)
    better = now == before if direction is None else now >= before
    better = now <= before if direction == "higher" else better
    record = conceded(weakened(**{name.replace(".", "__"): now}), [entry()])

    assert (finding(record)["concession"] is not None) is better


def test_every_figure_of_work_has_a_direction() -> None:
    """Less work is worse, more leaked is worse, for every such word of the vocabulary."""
    words = vocabulary()
    work = {
        name
        for name in words
        if name.startswith("strength.") and words[name].kind in ("int", "real")
    } - {"strength.required_bits"}
    leaks = {name for name in words if "leak" in name}

    assert len(work) > 8
    assert {worse_when(name) for name in work} == {"lower"}
    assert len(leaks) >= 3
    assert {worse_when(name) for name in leaks} == {"higher"}
    assert all(
        worse_when(name) == "higher"
        for name in words
        if words[name].kind == "bool" and words[name].bound == "seen"
    )
    assert worse_when("modulus.nature") is None
    assert worse_when("scheme.forgery_bits_at_most") == "lower"
    assert worse_when("modulus.occurrences") == "higher"


def test_types_are_part_of_a_value() -> None:
    """Neither yes for 1 nor another list passes for the same."""
    name = "generator.trivial"

    assert worsened({name: True}, {name: 1})
    assert worsened({"group.cycles": [[2, 1]]}, {"group.cycles": [[2, 2]]})
    assert not worsened({"group.cycles": [[2, 1]]}, {"group.cycles": [[2, 1]]})


class TestReading:
    """A file is used whole or not at all."""

    def test_every_problem_in_one_run(self) -> None:
        """Each with line and column, what was found, what was expected, a suggestion."""
        text = f"""\
concessions: 2
granted:
  - rule: X
    set: 12
    outcome: conforming
    values: {{strength.work_bit: 3, modulus.length: yes, usage.purpose: signing}}
    reason: ""
    until: 2027-02-30
  - {{rule: a, set: {"0" * 63}a, outcome: nonconforming, values: {{}}, reason: x, by: y,
     grade: minor, requirement: a, until: 2027-01-01}}
  - {{rule: a, set: {"0" * 63}a, outcome: undetermined, values: {{}}, reason: x, by: y,
     grade: minor, requirement: a, until: 2027-01-01, colour: red}}
"""
        with pytest.raises(ConcessionsError) as caught:
            parse(text.encode(), "c.yaml", vocabulary())

        expected = [
            ("1:14", "found 2; expected 1"),
            ("3:5", "missing key 'by'; expected the role that granted it"),
            ("3:5", "missing key 'grade'; expected major, minor or observation"),
            ("3:5", "missing key 'requirement'; expected what the rule required when"),
            ("3:11", "found 'X'"),
            ("4:10", "64 lower-case hex digits; put it in quotes"),
            ("5:14", "did you mean 'nonconforming'?"),
            ("6:14", "unknown fact 'strength.work_bit'; did you mean 'strength.work_bits'?"),
            ("6:36", "expected a value of kind int"),
            ("6:57", "usage.purpose: found 'signing'; expected one of"),
            ("7:13", "expected why it was granted"),
            ("8:12", "found '2027-02-30'; expected a day of the calendar"),
            ("11:5", "a second concession for 'a' and this set; expected one, the first is on"),
            ("12:55", "unknown key 'colour'"),
        ]
        told = [str(problem) for problem in caught.value.problems]
        assert len(told) == len(expected), told
        for line, (place, message) in zip(told, expected, strict=True):
            assert line.startswith(f"c.yaml:{place}: "), line
            assert message in line, line

    @pytest.mark.parametrize(
        "text", [b"", b"\xff", b"- 1", b"concessions: 1", b"a: [", b"granted: 3"]
    )
    def test_what_is_no_such_file_is_refused(self, text: bytes) -> None:
        """With a place, whatever it is."""
        with pytest.raises(ConcessionsError, match=r"^c.yaml:\d+:\d+: "):
            parse(text, "c.yaml", vocabulary())

    def test_a_missing_file_is_refused(self, tmp_path: Path) -> None:
        """As any other."""
        with pytest.raises(ConcessionsError, match="cannot be read"):
            load(tmp_path / "absent.yaml", vocabulary())

    @given(
        st.recursive(
            st.none() | st.booleans() | st.integers() | st.text(max_size=8) | st.just("2027-01-01"),
            lambda inner: (
                st.lists(inner, max_size=3)
                | st.dictionaries(
                    st.sampled_from(
                        ["concessions", "granted", "rule", "set", "values", "until", "x"]
                    ),
                    inner,
                    max_size=5,
                )
            ),
        )
    )
    def test_any_value_is_read_or_refused(self, value: Any) -> None:
        """No other exception, and every problem has a place in the text."""
        text = yaml.safe_dump(value, allow_unicode=False)
        found: tuple[InputError, ...] = ()
        try:
            granted = parse(text.encode(), "c.yaml", vocabulary()).granted
        except ConcessionsError as error:
            found, granted = error.problems, ()

        assert found or len(granted) == len(value["granted"])
        assert all(1 <= problem.line <= text.count("\n") + 1 for problem in found)

    def test_the_file_in_the_manual_is_one(self) -> None:
        """It is read, and covers the finding about the weak set."""
        (text,) = re.findall(r"```yaml\n(.*?)```", MANUAL.read_text("utf-8"), re.DOTALL)
        (shown,) = parse(text.encode(), "c.yaml", vocabulary()).granted

        assert (shown.rule, shown.outcome) == (entry().rule, entry().outcome)
        assert (shown.grade, shown.requirement) == (entry().grade, entry().requirement)
        assert shown.set_digest == entry().set_digest
        assert worsened(shown.values, finding(reviewed())["values"]) == ()

    def test_integers_beyond_json_are_compared_as_the_report_writes_them(self) -> None:
        """Hex digits with and without quotes are the same value."""
        written = entry(values={"group.cycles": [2**60]})
        quoted = entry(values={"group.cycles": [hex(2**60)]})

        assert written.values == quoted.values == {"group.cycles": [hex(2**60)]}


def conceded_report(until: str = LAST_DAY) -> tuple[dict[str, Any], Concessions]:
    """A report with concessions as a review writes it, and the file."""
    concessions = read(entries(reviewed(), until))
    return copy.deepcopy(_conceded_report(until)), concessions


@cache
def _conceded_report(until: str) -> dict[str, Any]:
    return review(
        ["-"],
        RunValues(DAY, "quick"),
        Surroundings(secrets.randbelow),
        stdin=io.BytesIO(WEAK.encode()),
        concessions=read(entries(reviewed(), until)),
    )


class TestReport:
    """The record carries what a reader and the verifier need."""

    @pytest.mark.parametrize("until", [LAST_DAY, "2026-11-30"])
    def test_it_is_sound_and_verifies(self, until: str) -> None:
        """With the file and without, in force or run out."""
        record, concessions = conceded_report(until)

        assert problems(record) == []
        assert record["inputs"][-1] == {
            "path": "policy.yaml",
            "sha256": concessions.file.sha256,
            "role": "concessions",
        }
        assert verify(record, secrets.randbelow).status == 0
        assert verify(record, secrets.randbelow, concessions=concessions).status == 0

    def test_what_is_conceded_is_said(self) -> None:
        """A notice counts the findings, so that status 0 beside a position is no riddle."""
        record, concessions = conceded_report()
        count = len(concessions.granted)

        assert any(line.startswith(f"{count} findings are conceded") for line in record["notices"])

    @pytest.mark.parametrize(
        ("member", "value"),
        [
            ("in_force", False),
            ("until", "2026-11-30"),
            ("granted", {}),
            ("grade", "minor"),
            ("requirement", "strength.work_bits >= 80"),
        ],
    )
    def test_a_concession_that_does_not_follow_is_refused(self, member: str, value: Any) -> None:
        """Validity that is misstated, a grant that does not cover the finding."""
        record, _ = conceded_report()
        finding(record)["concession"][member] = value

        assert verify(record, secrets.randbelow).status == 1

    def test_a_grant_for_better_values_is_refused(self) -> None:
        """The finding is worse than what was granted."""
        record, _ = conceded_report()
        granted = finding(record)["concession"]["granted"]
        granted["strength.work_bits_at_most"] += 1
        result = verify(record, secrets.randbelow)

        assert result.status == 1
        assert "concession" in result.failures[0]

    def test_a_concession_out_of_nothing_is_refused(self) -> None:
        """Without a file among the inputs there is none."""
        record, _ = conceded_report()
        record["inputs"] = [item for item in record["inputs"] if "role" not in item]

        assert verify(record, secrets.randbelow).status == 1

    def test_with_the_file_every_word_is_checked(self) -> None:
        """A reason nobody gave, a concession left out, and another file."""
        record, concessions = conceded_report()
        other = copy.deepcopy(record)
        finding(other)["concession"]["reason"] = "None needed."
        without = copy.deepcopy(record)
        finding(without)["concession"] = None
        longer = read(entries(reviewed(), "2030-01-01"))

        assert verify(other, secrets.randbelow).status == 0
        assert verify(other, secrets.randbelow, concessions=concessions).status == 1
        assert verify(without, secrets.randbelow, concessions=concessions).status == 1
        assert verify(record, secrets.randbelow, concessions=longer).status == 1

    def test_the_recorded_ones_are_those_of_the_file(self) -> None:
        """What the verifier reads back from the findings is what was granted."""
        record, concessions = conceded_report()
        anywhere = Place("", 1)

        assert {(c.rule, c.until, *sorted(c.values)) for c in recorded(record)} == {
            (c.rule, c.until, *sorted(c.values)) for c in concessions.granted
        }
        assert all(c.place == anywhere for c in recorded(record))

    def test_sarif_suppresses_what_is_conceded(self) -> None:
        """Accepted for each conceded finding, none for others; run out, it is rejected."""
        every, _ = conceded_report()
        for until, status in ((LAST_DAY, "accepted"), ("2026-11-30", "rejected")):
            record = conceded(every, [entry(until=until)])
            results = json.loads(sarif(record))["runs"][0]["results"]
            suppressed = {r["ruleId"]: r["suppressions"] for r in results if "suppressions" in r}

            assert len(results) > 1
            assert list(suppressed) == [RULE]
            assert [each["status"] for each in suppressed[RULE]] == [status]


class TestCommands:
    """Concessions and policy from elsewhere as a person meets them."""

    @pytest.fixture
    def weak(self, auditor: Any) -> Any:  # noqa: F811
        """A weak set, and the concessions for it."""
        Path("weak.yaml").write_text(WEAK)
        assert auditor(*quick("weak.yaml"), "--json", "r.json").status == 1
        record = json.loads(Path("r.json").read_text())
        Path("granted.yaml").write_text(document(entries(record)))
        return auditor

    def test_the_exit_status_moves_and_the_documents_do_not_hide_it(self, weak: Any) -> None:
        """Status 0, position hold, in every document; the report verifies."""
        formats = ("--html", "r.html", "--markdown", "r.md", "--json", "r.json")
        result = weak(*quick("weak.yaml"), *formats, "--concessions", "granted.yaml")

        assert result.status == 0
        assert "hold 1" in result.out
        for name in ("r.html", "r.md"):
            text = Path(name).read_text()
            assert "hold" in text
            assert "granted by head of systems" in text
            assert "in force" in text
        words = ("verify", "r.json", "--against", "weak.yaml", "--concessions", "granted.yaml")
        assert weak(*words).status == 0

    def test_afterwards_it_fails_again(self, weak: Any) -> None:
        """The day after the last one."""
        words = ("review", "weak.yaml", "--effort", "quick", "--concessions", "granted.yaml")

        assert weak(*words, "--as-of", LAST_DAY).status == 0
        late = weak(*words, "--as-of", TOO_LATE)
        assert late.status == 1
        assert "has run out" in " ".join(late.out.split())

    def test_a_broken_file_is_status_2(self, weak: Any) -> None:
        """All its problems, before anything is computed."""
        Path("granted.yaml").write_text("concessions: 1\ngranted: [{}]\n")
        result = weak(*quick("weak.yaml"), "--concessions", "granted.yaml")

        assert result.status == 2
        assert len(re.findall(r"^granted.yaml:2:11: ", result.err, re.MULTILINE)) == 9
        assert result.out == ""
        assert weak(*quick("weak.yaml"), "--concessions", "absent.yaml").status == 2

    def test_a_change_cannot_excuse_itself(self, weak: Any) -> None:
        """Concessions are taken from elsewhere, and those beside the parameters are named."""
        Path("base").mkdir()
        Path("head").mkdir()
        Path("head/weak.yaml").write_text(WEAK)
        Path("head/concessions.yaml").write_text(Path("granted.yaml").read_text())
        policy = ("--policy-from", "base", "--json", "r.json")
        alone = weak(*quick("head"), *policy)

        assert alone.status == 1
        (told,) = json.loads(Path("r.json").read_text())["notices"]
        assert told == "head/concessions.yaml: concessions, not used: policy is taken from base."

        Path("base/concessions.yaml").write_text(Path("granted.yaml").read_text())
        assert weak(*quick("head"), *policy).status == 0
        verified = ("verify", "r.json", "--against", "head", "--policy-from", "base")
        assert weak(*verified).status == 0

    def test_policy_inside_the_tree_is_not_told_as_unused(self, weak: Any) -> None:
        """What is in use is not named among what is not."""
        Path("tree/base").mkdir(parents=True)
        Path("tree/weak.yaml").write_text(WEAK)
        Path("tree/base/concessions.yaml").write_text(Path("granted.yaml").read_text())
        words = (*quick("tree"), "--policy-from", "tree/base", "--json", "r.json")

        assert weak(*words).status == 0
        notes = json.loads(Path("r.json").read_text())["notices"]
        assert not any("not used" in line for line in notes)

    def test_a_broken_link_is_no_absence(self, weak: Any) -> None:
        """Concessions that cannot be reached are refused, not passed over."""
        Path("base").mkdir()
        Path("base/concessions.yaml").symlink_to("absent.yaml")

        assert weak(*quick("weak.yaml"), "--policy-from", "base").status == 2

    def test_files_of_policy_lie_where_policy_is(self, weak: Any) -> None:
        """A named file is looked for there; one outside is refused, whatever way leads out."""
        Path("base").mkdir()
        Path("base/moved.yaml").write_text(Path("granted.yaml").read_text())
        Path("base/link.yaml").symlink_to(Path("granted.yaml").resolve())
        policy = (*quick("weak.yaml"), "--policy-from", "base")

        assert weak(*policy, "--concessions", "moved.yaml").status == 0
        outside = ("granted.yaml", "../granted.yaml", str(Path("granted.yaml").resolve()))
        for name in (*outside, "link.yaml"):
            result = weak(*policy, "--concessions", name)
            assert (result.status, name in result.err) == (2, True)
        assert weak(*policy, "--rulebook", "../house.yaml").status == 2

    def test_rulebooks_come_from_there(self, weak: Any) -> None:
        """A house book of the same path is read from the base, not from the change."""
        lax = {"base": 768, "head": 1}
        for folder, least in lax.items():
            Path(folder).mkdir()
            Path(folder, "house.yaml").write_text(HOUSE.replace("LEAST", str(least)))
        Path("head/weak.yaml").write_text(WEAK)
        words = (*quick("head"), "--policy-from", "base", "--rulebook", "house.yaml")
        result = weak(*words, "--json", "r.json")
        record = json.loads(Path("r.json").read_text())

        assert result.status == 0
        assert "Least 768" in Path("r.json").read_text()
        assert record["notices"] == [
            "head/house.yaml: a rulebook, not used: policy is taken from base."
        ]

    @pytest.fixture
    def branches(self, weak: Any) -> Any:
        """Two trees that say different things of the use of the same group."""
        for folder, strength in (("base", 200), ("head", 40)):
            Path(folder, "net").mkdir(parents=True)
            Path(folder, "auditor-usage.yaml").write_text(
                "auditor-usage: 1\nuses:\n"
                f"  - {{path: net/*, required_strength: {strength}}}\n"
                "  - {path: gone/*, required_strength: 100}\n"
            )
        Path("head/net/gate.conf").write_text("crypto ikev1 policy 10\n group 5\n")
        return weak

    @pytest.mark.parametrize(
        ("start", "path", "policy", "checkouts"),
        [
            (".", "head", "base", False),
            ("head", "net", "../base", False),
            (".", "head/net/gate.conf", "base", True),
        ],
    )
    def test_usage_comes_from_there(
        self,
        branches: Any,
        monkeypatch: pytest.MonkeyPatch,
        start: str,
        path: str,
        policy: str,
        checkouts: bool,
    ) -> None:
        """By paths in the tree that the directory stands for; a use that fits nothing is told."""
        for folder in ("base", "head") if checkouts else ():
            Path(folder, ".git").mkdir()
        monkeypatch.chdir(start)
        branches(*quick(path), "--policy-from", policy, "--json", "r.json")
        record = json.loads(Path("r.json").read_text())
        (item,) = record["parameter_sets"]

        assert item["declaration"]["required_strength"] == 200
        assert record["inputs"][-1]["role"] == "usage"
        assert any("'gone/*': matches nothing" in line for line in record["notices"])
        assert not any("'net/*': matches nothing" in line for line in record["notices"])

    def test_usage_beside_the_parameters_is_not_used(self, branches: Any) -> None:
        """Nothing of it reaches the set; it is named in a notice."""
        Path("base/auditor-usage.yaml").unlink()
        branches(*quick("head"), "--policy-from", "base", "--json", "r.json")
        record = json.loads(Path("r.json").read_text())

        assert "required_strength" not in record["parameter_sets"][0]["declaration"]
        assert record["notices"] == [
            "head/auditor-usage.yaml: a usage file, not used: policy is taken from base."
        ]

    def test_what_is_asked_follows_the_policy(self, branches: Any) -> None:
        """The same usage files and the same notices as in a review."""
        words = ("ask", "head", "--effort", "quick", "--as-of", "2026-12-01", "--json", "a.json")
        found = {}
        for policy in ("base", "head"):
            result = branches(*words, "--policy-from", policy)
            asked = json.loads(Path("a.json").read_text())
            found[policy] = asked["situations"][0]["usage"]
            assert all(line in result.err.splitlines() for line in asked["notices"])

        assert any("200" in part for part in found["base"])
        assert any("40" in part for part in found["head"])

    def test_a_broken_usage_file_there_is_an_error(self, branches: Any) -> None:
        """With its own place."""
        Path("base/auditor-usage.yaml").write_text("auditor-usage: 1\nuses: [{path: 7}]\n")
        result = branches(*quick("head"), "--policy-from", "base")

        assert result.status == 2
        assert re.search(r"^base/auditor-usage.yaml:2:\d+: .*path", result.err, re.MULTILINE)


HOUSE = """\
rulebook: 1
name: house
title: Least LEAST
documents:
  policy: {title: House policy, date: 2026}
rules:
  - id: house-length
    title: The modulus is short
    defect: modulus-too-short
    grade: major
    requires: modulus.length >= LEAST
    statement: The modulus has {modulus.length} bits.
    why: Long ones cost more to attack.
    criterion: {document: policy, clause: "1", word: shall, confidence: confirmed}
    remedy: Take a longer one.
    examples:
      conforming: [{modulus.length: 4096}]
      nonconforming: [{modulus.length: 0}]
"""
