"""The verifier holds what holds, and lets pass only what nobody else could vouch for."""

import copy
import secrets
from functools import cache
from pathlib import Path
from typing import Any

import pytest

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
