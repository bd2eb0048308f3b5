"""Every patch is put in and reviewed again: the finding is gone, and nothing major is new."""

import json
import secrets
from collections.abc import Iterable, Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import sympy
from hypothesis import given
from hypothesis import strategies as st

from auditor.advice.changes import groups_for
from auditor.advice.exposure import Exposures
from auditor.advice.remedies import Remedies, patched
from auditor.advice.trials import HELD, Moves, registry_claims
from auditor.claims.collection import check_all
from auditor.declaration import Declaration, Party, Place
from auditor.encoding import digest
from auditor.facts import establish, vocabulary
from auditor.facts.given import Given, Shared
from auditor.intake.record import declaration_from
from auditor.intake.standard_groups import standard_groups
from auditor.report.json_report import problems
from auditor.review import Surroundings, review
from auditor.rulebooks.judging import Judging, judge
from auditor.rulebooks.loading import DEFAULT_BOOKS, load_all
from auditor.rulebooks.rulebook import Rulebook
from auditor.run_values import RunValues
from auditor.verify import verify
from tests.facts.knowledge import settled

SAMPLES = Path(__file__).parents[1] / "samples"
QUICK = RunValues("2026-12-01", "quick")
Record = dict[str, Any]


def reviewed(path: Path, sets: Iterable[Mapping[str, Any]] | None = None) -> Record:
    """A review of a document; of one with these sets, where they are given."""
    if sets is not None:
        document = {"auditor": 1, "parameter_sets": list(sets)}
        path.write_text(json.dumps(document), encoding="utf-8")
    record = review([str(path)], QUICK, Surroundings(secrets.randbelow))
    assert not record["errors"]
    assert not problems(record)
    return record


@cache
def sample(name: str) -> Record:
    """The declaration of a sample with all numbers written out."""
    record = _samples()
    (found,) = (s["declaration"] for s in record["parameter_sets"] if s["name"] == name)
    return dict(found)


@cache
def _samples() -> Record:
    paths = sorted(str(path) for path in SAMPLES.glob("*.yaml"))
    return review(paths, QUICK, Surroundings(secrets.randbelow))


def usage(bits: int | None, use: str, *checks: str, **more: object) -> Record:
    """The keys of a usage for key agreement."""
    width = {} if bits is None else {"bits": bits}
    return {
        "purpose": "key-agreement",
        "exponent": {**width, "use": use},
        "peer_check": list(checks),
        **more,
    }


def weak() -> list[Record]:
    """Sets that need what no sample needs, made of their numbers and of published groups."""
    schnorr = {key: sample("crane enrolment")[key] for key in ("modulus", "subgroup_order")}
    safe = {"modulus": sample("tug dispatch")["modulus"]}
    raw = sample("manifest archive")
    short, wide = {"group": "modp1024"}, {"group": "ffdhe2048"}
    sets: dict[str, Record] = {
        "whole group of a Schnorr prime": {
            **schnorr,
            "generator": 2,
            **usage(256, "single", "range"),
        },
        "no generator at all": {**schnorr, "generator": 0, **usage(256, "single", "range")},
        "even order, reused": {**safe, "generator": 2, **usage(256, "static", "range")},
        "short for TLS": {"modulus": short, **usage(160, "single", "range", protocol="tls1.3")},
        "short for IKE": {"modulus": short, **usage(None, "single", "range", protocol="ikev2")},
        "short for SSH": {"modulus": short, **usage(256, "single", protocol="ssh")},
        "128 bits from 2048": {
            "modulus": wide,
            **usage(225, "single", "range", required_strength=128),
        },
        "beyond every group": {
            "modulus": wide,
            **usage(512, "single", "range", required_strength=256),
        },
        "reused in TLS 1.2": {
            "modulus": wide,
            **usage(225, "reused", "range", "membership", protocol="tls1.2"),
        },
        "unchecked": {"modulus": wide, **usage(225, "single")},
        "certified": {"modulus": wide, **usage(225, "single", "certified")},
        "not reduced": {
            "modulus": sample("tug dispatch")["modulus"],
            "generator": int(sample("tug dispatch")["modulus"], 16) + 4,
            **usage(225, "single", "range"),
        },
        "value 1": {"modulus": wide, "public_values": [1], **usage(225, "single", "range")},
        "two parties": {
            "modulus": {"group": "rfc5114-2048-224"},
            "purpose": "key-agreement",
            "parties": [
                {"role": "buoy", "exponent": {"bits": 224, "use": "static"}, "peer_check": []},
                {"role": "quay", "exponent": {"bits": 200, "use": "single"}, "peer_check": []},
            ],
        },
        "no order declared": {
            "modulus": sample("fish-market terminal")["modulus"],
            "generator": sample("fish-market terminal")["generator"],
            "known_factors": [sample("fish-market terminal")["subgroup_order"]],
            **usage(224, "static", "range"),
        },
        "raw messages in a short group": {**raw, "modulus": short, "message_bits": 40},
        "signature with a short nonce": {
            **sample("radar-feed signing"),
            "exponent": {"bits": 160, "use": "static"},
        },
        "signature in the whole group": {**sample("radar-feed signing"), "generator": 2},
    }
    return [{**values, "name": name} for name, values in sets.items()]


@pytest.fixture(scope="module")
def before(tmp_path_factory: pytest.TempPathFactory) -> list[Record]:
    """The reviews of the samples and of the weak sets."""
    other = reviewed(tmp_path_factory.mktemp("weak") / "sets.yaml", weak())
    return [*_samples()["parameter_sets"], *other["parameter_sets"]]


@pytest.fixture(scope="module")
def after(before: list[Record], tmp_path_factory: pytest.TempPathFactory) -> dict[str, Record]:
    """The reviews of all sets with each of their patches put in, by what is declared then."""
    changed = {
        key: patched(item["declaration"], finding["remedy"]["patch"]) | {"name": key}
        for item in before
        for finding in item["findings"]
        if finding["remedy"]["patch"] is not None
        for key in [_key(item, finding)]
    }
    record = reviewed(tmp_path_factory.mktemp("patched") / "sets.yaml", changed.values())
    return {item["name"]: item for item in record["parameter_sets"]}


def _key(item: Record, finding: Record) -> str:
    patch = finding["remedy"]["patch"]
    return digest({**patched(item["declaration"], patch), "name": ""})


def test_each_patch_removes_its_finding_and_brings_no_new_major(
    before: list[Record], after: dict[str, Record]
) -> None:
    """Reviewed for real, with claims of its own; the position is the one that was foretold."""
    count = 0
    for item in before:
        majors = {f["rule"] for f in item["findings"] if f["grade"] == "major"}
        for finding in item["findings"]:
            if finding["remedy"]["patch"] is None:
                continue
            count += 1
            now, where = after[_key(item, finding)], (item["name"], finding["rule"])
            assert finding["rule"] not in {f["rule"] for f in now["findings"]}, where
            new = {f["rule"] for f in now["findings"] if f["grade"] == "major"} - majors
            assert not new, where
            foretold = f"the position becomes '{now['position']}'"
            text = finding["remedy"]["text"]
            assert (foretold in text) == (now["position"] != item["position"])
            assert (" or better." in text) == (
                foretold in text and now["position"] != "no objection"
            )
    assert count > 60


NARROW = {"bits": 224, "use": "single"}


def test_a_review_may_come_to_more_than_was_foretold(tmp_path: Path) -> None:
    """The remedy is judged by what is known of the old numbers; of the new ones more is found."""
    group = next(group for group in standard_groups() if group.name == "rfc5114-2048-256")
    declared = {
        "name": "wrong order",
        "modulus": hex(group.modulus),
        "generator": 2,
        "subgroup_order": hex(group.modulus - 1),
        "purpose": "key-agreement",
        "parties": [
            {"role": "server", "exponent": NARROW, "peer_check": ["membership"]},
            {"role": "client", "exponent": {"bits": 2047}, "peer_check": ["range"]},
            {"role": "relay", "exponent": NARROW | {"bits": 64}},
        ],
    }
    (before,) = reviewed(tmp_path / "a.yaml", [declared])["parameter_sets"]
    remedy = remedies([before], "wrong order")["strength-insufficient"]
    changed = patched(before["declaration"], remedy["patch"])
    (after,) = reviewed(tmp_path / "b.yaml", [changed])["parameter_sets"]

    assert (before["position"], remedy["position"], after["position"]) == (
        "hold",
        "open",
        "conditions",
    )
    assert remedy["text"].endswith("With this alone the position becomes 'open' or better.")


def remedies(before: list[Record], name: str) -> dict[str, Record]:
    """The remedies of a set by rule, without those that are the rule's own words."""
    (item,) = (item for item in before if item["name"] == name)
    found = {f["rule"]: f["remedy"] for f in item["findings"]}
    return {rule: remedy for rule, remedy in found.items() if remedy["patch"] is not None}


GROUP = {"generator": None, "subgroup_order": None}
EXPECTED: list[tuple[str, str, Record]] = [
    ("night-ferry relay", "exponent-too-short", {"exponent": {"bits": 224, "use": "single"}}),
    ("fish-market terminal", "confinement-work", {"peer_check": ["range", "membership"]}),
    ("manifest archive", "raw-message-visible", {"scheme": "elgamal-hashed", "message_bits": None}),
    ("weighbridge legacy link", "ssh-group1", {"modulus": {"group": "modp2048"}, **GROUP}),
    (
        "short for TLS",
        "modulus-too-short",
        {
            "modulus": {"group": "ffdhe2048"},
            "exponent": {"bits": 225, "use": "single"},
            **GROUP,
        },
    ),
    (
        "short for IKE",
        "ike-group-too-short",
        {
            "modulus": {"group": "modp2048"},
            "exponent": {"bits": 224, "use": "single"},
            **GROUP,
        },
    ),
    (
        "128 bits from 2048",
        "modulus-too-short",
        {
            "modulus": {"group": "ffdhe3072"},
            "exponent": {"bits": 275, "use": "single"},
            **GROUP,
        },
    ),
    (
        "reused in TLS 1.2",
        "tls12-exponent-reused",
        {"exponent": {"bits": 225, "use": "single"}},
    ),
    ("unchecked", "peer-value-unchecked", {"peer_check": ["range"]}),
    ("not reduced", "generator-not-reduced", {"generator": 4}),
    ("certified", "peer-value-unchecked", {"peer_check": ["range", "certified"]}),
    (
        "signature with a short nonce",
        "exponent-too-short",
        {"exponent": {"bits": 256, "use": "static"}},
    ),
]


@pytest.mark.parametrize(("name", "rule", "patch"), EXPECTED)
def test_the_least_disruptive_remedy_is_taken(
    before: list[Record], name: str, rule: str, patch: Record
) -> None:
    """What a reviewer would advise: no more is changed than has to be."""
    assert remedies(before, name)[rule]["patch"] == patch


def test_a_generator_of_the_declared_prime_order_is_computed(before: list[Record]) -> None:
    """For a prime with a Schnorr subgroup the new generator has that order: shown by its power."""
    for name in ("whole group of a Schnorr prime", "no generator at all"):
        (item,) = (item for item in before if item["name"] == name)
        n, q = (int(item["declaration"][key], 16) for key in ("modulus", "subgroup_order"))
        rule = "declared-order-not-of-generator" if "whole" in name else "generator-not-a-unit"
        patch = remedies(before, name)[rule]["patch"]
        g = int(patch["generator"], 16)
        assert patch.keys() == {"generator"}
        assert g == pow(2, (n - 1) // q, n) != 1
        assert pow(g, q, n) == 1


def test_the_square_generates_half_of_the_group_of_a_safe_prime(before: list[Record]) -> None:
    """4 has the order (n-1)/2, which is declared with it; peers and keys are named as broken."""
    remedy = remedies(before, "tug dispatch")["generator-order-even"]
    n = int(sample("tug dispatch")["modulus"], 16)

    assert remedy["patch"] == {"generator": 4, "subgroup_order": hex((n - 1) // 2)}
    assert any("All parties" in line for line in remedy["breaks"])
    assert any("keys" in line for line in remedy["breaks"])


def test_only_the_party_that_is_exposed_changes(before: list[Record]) -> None:
    """The other keeps its check and its width."""
    patch = remedies(before, "two parties")["confinement-work"]["patch"]
    checks = {party["role"]: party["peer_check"] for party in patch["parties"]}

    assert checks == {"buoy": ["range", "membership"], "quay": []}


def test_membership_comes_with_the_order_it_needs(before: list[Record]) -> None:
    """Without a declared order the check could not be made."""
    patch = remedies(before, "no order declared")["confinement-work"]["patch"]

    assert patch["subgroup_order"] == sample("fish-market terminal")["subgroup_order"]
    assert "membership" in patch["peer_check"]


def test_another_group_mends_no_public_value(before: list[Record]) -> None:
    """The rule says to refuse it."""
    (item,) = (item for item in before if item["name"] == "value 1")

    assert "public-value-out-of-range" in {f["rule"] for f in item["findings"]}
    assert remedies(before, "value 1") == {}


def test_where_nothing_helps_the_rule_speaks(before: list[Record]) -> None:
    """No group reaches 256 bits; an undetermined finding has no computed remedy either."""
    assert "modulus-too-short" not in remedies(before, "beyond every group")
    for item in before:
        for finding in item["findings"]:
            assert finding["remedy"]["text"]
            if finding["outcome"] == "undetermined":
                assert finding["remedy"]["patch"] is None


def test_what_encrypts_names_stored_data(before: list[Record]) -> None:
    """A new group or encoding leaves old ciphertexts behind."""
    remedy = remedies(before, "raw messages in a short group")["modulus-too-short"]

    assert any("stored" in line for line in remedy["breaks"])


def test_the_verifier_draws_the_same_remedies(tmp_path: Path) -> None:
    """And refuses a report whose patch was edited."""
    record = reviewed(tmp_path / "sets.yaml", weak()[:3])
    assert verify(record, secrets.randbelow).status == 0

    finding = next(f for f in record["parameter_sets"][0]["findings"] if f["remedy"]["patch"])
    finding["remedy"]["patch"]["generator"] = 3
    assert verify(record, secrets.randbelow).status == 1


@pytest.mark.parametrize("name", ["ffdhe2048", "modp2048"])
def test_what_is_assumed_of_the_registry_holds(name: str) -> None:
    """Each claim that is believed for a trial passes its check."""
    assert check_all(registry_claims(name), secrets.randbelow) == {}


@pytest.mark.parametrize(
    ("protocol", "required", "names"),
    [
        ("tls1.2", 112, ["ffdhe2048", "ffdhe3072"]),
        ("ssh", 128, ["modp3072", "modp4096"]),
        ("ikev2", 176, ["modp6144", "modp8192"]),
        (None, 200, ["ffdhe8192"]),
        ("custom", 201, []),
    ],
)
def test_the_groups_are_those_of_the_protocol(
    protocol: str | None, required: int, names: list[str]
) -> None:
    """Smallest first; none of fewer than 2048 bits, whatever is required."""
    declared = Declaration(
        "set", Place("p", 1), 23, 2, protocol=protocol, required_strength=required
    )

    assert [group.name for group in groups_for(declared)][:2] == names


def test_signatures_move_to_no_group() -> None:
    """Keys for signatures carry their own parameters."""
    assert groups_for(Declaration("set", Place("p", 1), 23, 2, purpose="signature")) == ()


def test_a_patch_takes_out_what_it_sets_to_null() -> None:
    """And leaves alone what it does not name."""
    document = {"name": "set", "modulus": "0x17", "generator": 2}
    patch = {"modulus": {"group": "modp2048"}, "generator": None}

    assert patched(document, patch) == {"name": "set", "modulus": {"group": "modp2048"}}


@cache
def default_books() -> Sequence[Rulebook]:
    """The books in force by default."""
    return load_all(DEFAULT_BOOKS, vocabulary())


SMALL_PRIMES = st.integers(3, 2000).map(sympy.nextprime)
PARTIES = st.lists(
    st.builds(
        Party,
        st.sampled_from(["server", "client"]),
        st.none() | st.integers(1, 16),
        st.none() | st.sampled_from(["single", "reused", "static"]),
        st.none() | st.sampled_from([(), ("range",), ("range", "membership"), ("cofactor",)]),
    ),
    max_size=2,
    unique_by=lambda party: party.role,
).map(tuple)


@given(
    st.builds(
        Declaration,
        name=st.just("set"),
        place=st.just(Place("p", 1)),
        modulus=SMALL_PRIMES | st.integers(1, 500),
        generator=st.integers(0, 3000),
        purpose=st.none() | st.sampled_from(["key-agreement", "encryption", "signature"]),
        scheme=st.none() | st.sampled_from(["elgamal-raw", "elgamal-hashed", "schnorr"]),
        protocol=st.none() | st.sampled_from(["tls1.2", "ssh", "ikev2", "custom"]),
        subgroup_order=st.none() | st.integers(0, 1000),
        parties=PARTIES,
        message_bits=st.none() | st.integers(0, 8),
        required_strength=st.integers(0, 5) | st.just(300),
    )
)
def test_for_any_numbers_a_patch_of_the_usage_or_the_generator_holds(declared: Declaration) -> None:
    """Small groups of every kind: judged again on claims of its own, the finding is gone."""
    books = default_books()
    claims = settled(declared, QUICK)
    known = establish(declared, claims, QUICK)
    judgement = judge(books, known.facts, known.absent, vocabulary())
    judging, shared = Judging(books, vocabulary()), Shared(QUICK)
    Exposures(Given(declared, claims, QUICK, shared)).of(declared)
    remedies = Remedies(claims, judging, [known], shared, Moves(QUICK, judging))

    for rule, remedy in remedies.of(known, judgement).items():
        if remedy.patch is None or "modulus" in remedy.patch:
            continue
        document = patched(declared.document(), remedy.record()["patch"])
        changed = declaration_from(document, declared.place)
        now = establish(changed, settled(changed, QUICK), QUICK)
        assert judge(books, now.facts, now.absent, vocabulary()).outcomes[rule] in HELD
