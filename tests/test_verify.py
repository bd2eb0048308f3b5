"""The verifier holds what holds, and lets pass only what nobody else could vouch for."""

import copy
import json
import secrets
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from auditor.intake.reading import Notice
from auditor.intake.tree import InputResult, read_inputs
from auditor.report.json_report import dumps
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.search import factoring, primality
from auditor.verify import differences, verify
from tests.robustness.edits import DOCUMENT, explained, report, seal, survivors
from tests.test_documents import blocks


@cache
def original() -> dict[str, Any]:
    """A sound report."""
    return report()


def test_a_report_verifies_and_sealing_it_changes_nothing() -> None:
    """The harness itself moves nothing: ids and digests come out as they were."""
    record = original()

    assert verify(record, secrets.randbelow).status == 0
    assert differences(record, seal(copy.deepcopy(record))) == []


def test_single_edits_are_refused_but_for_what_only_the_owner_could_say() -> None:
    """A few hundred random edits, sealed again; the script tries thousands."""
    passed = list(survivors(250, seed=20261201))

    assert [place for place in passed if explained(place) is None] == []


def broken(path: list[Any], value: Any) -> dict[str, Any]:
    """The report with one value replaced, sealed again."""
    record = copy.deepcopy(original())
    holder: Any = record
    for step in path[:-1]:
        holder = holder[step]
    holder[path[-1]] = value
    return seal(record)


EDITS: list[tuple[list[Any], Any]] = [
    (["parameter_sets", 0, "position"], "no objection"),
    (["parameter_sets", 0, "facts", "modulus.length", "value"], 2048),
    (["parameter_sets", 0, "declaration", "modulus"], "0x" + "f" * 64),
    (["parameter_sets", 0, "declaration", "exponent", "bits"], 256),
    (["parameter_sets", 1, "facts", "generator.order_prime", "standing"], "proven"),
    (["parameter_sets", 3, "findings"], []),
    (["parameter_sets", 3, "facts", "modulus.nature", "value"], "prime"),
    (["run", "effort"], "thorough"),
    (["rulebooks", 0, "rules"], {}),
    (["cautions", 0], "This is a certificate."),
    (["claims"], {}),
]


@pytest.mark.parametrize(("path", "value"), EDITS)
def test_an_edit_that_would_mislead_is_refused(path: list[Any], value: Any) -> None:
    """Each with the place where it departs from what follows."""
    result = verify(broken(path, value), secrets.randbelow)

    assert result.status == 1
    assert result.failures


def test_another_version_or_book_is_no_verdict() -> None:
    """Claims are checked; whether the rest follows cannot be told."""
    older = copy.deepcopy(original())
    older["tool"]["version"] = "0.0.1"
    other = copy.deepcopy(original())
    other["rulebooks"][0]["sha256"] = "0" * 64

    assert verify(older, secrets.randbelow).status == 2
    assert verify(other, secrets.randbelow).status == 2
    older["claims"] = {}
    assert verify(older, secrets.randbelow).status == 2


def stronger() -> dict[str, Any]:
    """The report as if it had been made with more effort, everything that follows changed too."""
    record = copy.deepcopy(original())
    record["run"] |= {"effort": "thorough", "rounds": 64}
    return record


def test_primes_tested_less_than_the_run_says_are_refused() -> None:
    """The effort and the rounds that follow from it, changed together: every claim says fewer."""
    result = verify(stronger(), secrets.randbelow)
    probable = [
        claim_id
        for claim_id, claim in original()["claims"].items()
        if claim["certificate"].get("method") == "baillie-psw"
    ]

    assert result.status == 1
    assert probable
    for claim_id in probable:
        assert f"claims.{claim_id}: 16 rounds, and the run says 64" in result.failures


def test_primes_tested_more_than_the_run_says_are_none_the_worse() -> None:
    """Claims recalled from a longer run."""
    longer = copy.deepcopy(original())
    probable = [c["certificate"] for c in longer["claims"].values() if "rounds" in c["certificate"]]
    for certificate in probable:
        certificate |= {"rounds": 64, "error_bits": 128}
    result = verify(seal(longer), secrets.randbelow)

    assert probable
    assert (longer["run"]["rounds"], result.failures, result.status) == (16, (), 0)


@cache
def searched() -> dict[str, Any]:
    """A report of standard effort with questions that search has left open."""
    run = RunValues("2026-12-01", "standard")
    return review([str(DOCUMENT)], run, Surroundings(secrets.randbelow))


@pytest.mark.parametrize("digits", [20, 30])
def test_searches_that_went_less_far_than_the_run_says_are_refused(digits: int) -> None:
    """Another depth stated, of which no fact follows: the records of the searches fall short."""
    deeper = copy.deepcopy(searched())
    deeper["run"]["factor_digits"] = digits
    result = verify(deeper, secrets.randbelow)

    assert verify(searched(), secrets.randbelow).failures == ()
    assert result.status == 1
    assert all(line.startswith("run.effort: is standard, but: Which ") for line in result.failures)


def test_a_quick_report_is_no_standard_one() -> None:
    """Not even with as many tests for each prime."""
    record = copy.deepcopy(original())
    record["run"] |= {"effort": "standard", "rounds": 64}
    for claim in record["claims"].values():
        if "rounds" in claim["certificate"]:
            claim["certificate"] |= {"rounds": 64, "error_bits": 128}
    result = verify(seal(record), secrets.randbelow)

    assert result.status == 1
    assert all("searched less" in line for line in result.failures)


def test_a_question_whose_answer_was_refused_needs_no_deeper_search() -> None:
    """The notice of the run says so, for everybody to see."""
    record = copy.deepcopy(searched())
    record["run"]["factor_digits"] = 20
    told = verify(record, secrets.randbelow).failures
    questions = [line.split("but: ")[1].split("? ")[0] + "?" for line in told]
    record["notices"] = [
        f"{about} An answer was found and refused: composite." for about in questions
    ]

    assert questions
    assert verify(record, secrets.randbelow).status == 0


TREE = {
    "good.yaml": """\
auditor: 1
parameter_sets:
  - name: a
    purpose: key-agreement
    modulus: {group: ffdhe2048}
    exponent: {bits: 225, use: single}
    peer_check: [range]
""",
    "bad.yaml": "auditor: 1\nparameter_sets:\n  - {name: b, modulus: 17, generatr: 3}\n",
    "worse.yaml": "auditor: 1\n" + " " * 9 + "parameter_sets: []\n",
    "dh.pem": "-----BEGIN DH PARAMETERS-----\n",
    "numbers.py": f"dh_prime = {hex(2**512 + 75)}\n",
}
"""A set, sets that cannot be read, half a file of parameters, a number that is no set."""


class TestAgainst:
    """A report beside the inputs that it is about."""

    @pytest.fixture
    def tree(self, tmp_path: Path) -> tuple[dict[str, Any], InputResult]:
        """A report of a tree that was not read whole, and what is in the tree."""
        for name, text in TREE.items():
            (tmp_path / name).write_text(text)
        run = RunValues("2026-12-01", "quick")
        record = review([str(tmp_path)], run, Surroundings(secrets.randbelow))
        inputs = read_inputs([str(tmp_path)])
        record = json.loads(json.dumps(record, sort_keys=True))
        assert verify(record, secrets.randbelow, against=inputs).status == 0
        return record, inputs

    def test_a_report_may_lie_beside_what_it_is_about(self, tree: Any) -> None:
        """So does whatever else was put there and holds nothing that is read."""
        record, inputs = tree
        (folder,) = {Path(item.path).parent for item in inputs.inputs}
        (folder / "report.json").write_text(dumps({"report": record["report"], **record}))
        (folder / "report.html").write_text("<p>")

        now = read_inputs([str(folder)])
        assert verify(record, secrets.randbelow, against=now).failures == ()

    def test_what_was_not_read_cannot_be_left_out(self, tree: Any) -> None:
        """Without its errors a report would call itself complete."""
        record, inputs = tree
        record = {**record, "errors": [], "complete": True}
        result = verify(record, secrets.randbelow, against=inputs)

        assert len(tree[0]["errors"]) > 1
        assert verify(record, secrets.randbelow).status == 0
        assert (result.status, result.failures[0][:8]) == (1, "errors: ")

    @pytest.mark.parametrize(
        ("member", "key", "value"),
        [
            ("errors", "path", "elsewhere.yaml"),
            ("errors", "line", 7),
            ("errors", "column", 7),
            ("errors", "message", "harmless"),
            ("skipped", "reason", "harmless"),
            ("skipped", "path", "elsewhere.yaml"),
        ],
    )
    def test_what_was_not_reviewed_is_told_as_it_is(
        self, tree: Any, member: str, key: str, value: Any
    ) -> None:
        """Every word of an error and of what was passed over follows from the inputs."""
        record, inputs = tree
        (first, *others) = record[member]
        changed = {**record, member: [{**first, key: value}, *others]}
        fewer = {**record, member: others}
        more = {**record, member: [*others, first, {**first, key: value}]}

        for edited in (changed, fewer, more):
            edited = {**edited, "complete": not edited["errors"]}
            assert verify(edited, secrets.randbelow, against=inputs).status == 1
        turned = {**record, member: [*others, first]}
        assert verify(turned, secrets.randbelow, against=inputs).status == 0

    def test_a_notice_about_the_inputs_cannot_be_left_out(self, tree: Any) -> None:
        """Those of the run itself may come on top."""
        record, inputs = tree
        inputs = replace(inputs, notices=(Notice("good.yaml", 4, "take care"),))
        told = {**record, "notices": ["a claim was dropped.", "good.yaml:4: take care"]}
        result = verify(record, secrets.randbelow, against=inputs)

        assert result.failures == ("notices: good.yaml:4: take care is missing",)
        assert verify(told, secrets.randbelow, against=inputs).status == 0

    def test_a_set_stands_where_it_was_declared(self, tree: Any) -> None:
        """Its line is checked as well as its words."""
        record, inputs = copy.deepcopy(tree[0]), tree[1]
        record["parameter_sets"][0]["source"]["line"] = 7
        record["parameter_sets"][0]["places"][0]["line"] = 7

        assert verify(record, secrets.randbelow).status == 0
        assert verify(record, secrets.randbelow, against=inputs).status == 1


def test_no_set_hides_behind_the_id_of_another(tmp_path: Path) -> None:
    """Two sets under one id, both sound, one of them nowhere in the inputs."""
    path = tmp_path / "good.yaml"
    head, entry = TREE["good.yaml"].split("  - name: a\n")
    second = entry.replace("ffdhe2048", "modp1024")
    path.write_text(f"{head}  - name: b\n{second}  - name: a\n{entry}")
    run = RunValues("2026-12-01", "quick")
    record = review([str(path)], run, Surroundings(secrets.randbelow))
    path.write_text(head + "\n" * second.count("\n") + f"\n  - name: a\n{entry}")
    forged = json.loads(
        json.dumps(record).replace('#b"', '#a"').replace('"name": "b"', '"name": "a"')
    )
    inputs = read_inputs([str(path)])
    forged["inputs"] = [{"path": file.path, "sha256": file.sha256} for file in inputs.inputs]
    result = verify(forged, secrets.randbelow, against=inputs)

    assert [item["position"] for item in forged["parameter_sets"]] == ["hold", "no objection"]
    assert result.failures == (f"parameter_sets: {path}#a stands 2 times",)


@pytest.mark.parametrize("member", ["inputs", "rulebooks"])
def test_no_file_hides_behind_another_of_its_name(member: str) -> None:
    """Files that were read, and books, stand once."""
    record = copy.deepcopy(original())
    record[member].insert(0, {**record[member][0], "sha256": "0" * 64})
    result = verify(record, secrets.randbelow)

    assert result.status == 1
    assert "stands 2 times" in result.failures[0]


class TestBrokenSearch:
    """Whatever search gets wrong, no report that verifies says it."""

    def test_composites_called_prime(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Search takes every odd number for a prime; the checks do not."""
        monkeypatch.setattr(primality, "candidate", lambda n: primality.Candidate(n, prime=n > 1))
        monkeypatch.setattr(primality, "is_likely_prime", lambda n: n > 1)
        self.nothing_false_is_said()

    def test_primes_called_composite(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Search gives every number a wrong factor."""
        monkeypatch.setattr(
            primality,
            "candidate",
            lambda n: primality.Candidate(n, prime=False, factor=7, witness=2),
        )
        self.nothing_false_is_said()

    def test_wrong_factors(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Search returns a factorization of another number."""
        right = factoring.search

        def wrong(m: int, *args: Any, **options: Any) -> Any:
            return right(m + 2, *args, **options)

        monkeypatch.setattr("auditor.inquiry.answers.search", wrong)
        self.nothing_false_is_said()

    def test_no_witness(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Search gives wrong witnesses for proofs and for composites."""
        monkeypatch.setattr(primality, "least_witness", lambda n: 2)
        monkeypatch.setattr(
            primality,
            "n_minus_1_proof",
            lambda n, primes: primality.Proof(n, ((2, 1),), ((2, 2),)),
        )
        self.nothing_false_is_said()

    def nothing_false_is_said(self) -> None:
        """The report of a broken search verifies, and each of its facts agrees with the sound
        report's or is absent there."""
        record = report()
        assert verify(record, secrets.randbelow).status == 0
        for sound, other in zip(
            original()["parameter_sets"], record["parameter_sets"], strict=True
        ):
            for name, fact in other["facts"].items():
                if not name.endswith(("_at_most", "_at_least", "_seen")):
                    assert sound["facts"][name]["value"] == fact["value"], name


def test_a_report_that_claims_what_broken_search_said_is_refused() -> None:
    """The verifier alone, without the check at the time of making, rejects false claims."""
    composite = original()["parameter_sets"][3]["declaration"]["modulus"]
    record = copy.deepcopy(original())
    record["claims"]["prime-00000000000000000000"] = {
        "kind": "prime",
        "statement": {"n": composite},
        "certificate": {"method": "baillie-psw", "rounds": 64, "error_bits": 128},
        "uses": [],
    }
    result = verify(seal(record), secrets.randbelow)

    assert result.status == 1
    assert any("composite" in line for line in result.failures)


def test_a_house_book_is_needed_to_verify_what_it_judged(tmp_path: Path) -> None:
    """With the book all holds; without it, or with another one, that cannot be told."""
    house = tmp_path / "house.yaml"
    house.write_text(blocks("rules/README.md", "yaml")[0])
    record = review(
        [str(DOCUMENT)],
        RunValues("2026-12-01", "quick"),
        Surroundings(secrets.randbelow),
        books=["group-structure", str(house)],
    )

    assert verify(record, secrets.randbelow, [str(house)]).status == 0
    assert verify(record, secrets.randbelow).status == 2
    house.write_text(house.read_text() + "\n# another\n")
    assert verify(record, secrets.randbelow, [str(house)]).status == 2
