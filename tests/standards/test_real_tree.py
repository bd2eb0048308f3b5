"""A tree of real things: everything in it is found, nothing is invented, all of it is reviewed.

Twelve records of OpenSSH's file of primes, the files of cryptography-vectors and a dozen invented
configuration files; the oracles are in :mod:`tests.standards.real_tree`. The benchmark of the same
name does so with all of the primes.
"""

import secrets
from pathlib import Path
from typing import Any

import gmpy2
import pytest

from auditor.report import markdown
from auditor.report.shared_findings import shared_findings
from auditor.report.view import view
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from tests.standards import real_tree

RECORDS = real_tree.records_of(
    (Path(__file__).parent.parent / "data" / "moduli_records.txt").read_text("utf-8")
)
Tree = tuple[Path, dict[str, Any]]


@pytest.fixture(scope="module")
def tree(tmp_path_factory: pytest.TempPathFactory) -> Tree:
    """The directory, and the record of a quick review of it."""
    folder = tmp_path_factory.mktemp("tree")
    real_tree.build(folder, RECORDS)
    run = RunValues("2026-12-01", "quick")
    return folder, review([str(folder)], run, Surroundings(secrets.randbelow))


def test_everything_is_found_and_nothing_invented(tree: Tree, tmp_path: Path) -> None:
    """Set for set what the other readers find, and the four files that the library refuses."""
    folder, record = tree
    found = real_tree.reviewed(record, folder)
    refused = real_tree.in_refused_files(found)
    assert {name for name, _, _ in refused} == {
        f"vectors/{name}" for name in real_tree.REFUSED_BY_THE_LIBRARY
    }
    assert found == real_tree.build(tmp_path, RECORDS) + refused
    assert sum(name == "primes/moduli" for name, _, _ in found) == len(RECORDS) == 12


def test_all_are_reviewed(tree: Tree) -> None:
    """Every set has outcomes and a position, every modulus its nature, as GMP sees it."""
    _, record = tree
    positions = record["overview"]["positions"]
    assert sum(positions.values()) == len(record["parameter_sets"]) == record["overview"]["sets"]
    for item in record["parameter_sets"]:
        assert item["outcomes"]
        p = int(str(item["declaration"]["modulus"]), 0)
        assert item["facts"]["modulus.length"]["value"] == p.bit_length()
        nature = item["facts"]["modulus.nature"]["value"]
        assert (nature == "prime") == gmpy2.is_prime(p), item["id"]


def test_the_primes_are_safe_and_their_generators_of_order_2q(tree: Tree) -> None:
    """As moduli(5) has it; a generator g of a safe prime 2q + 1 has order 2q if g^q is not 1."""
    _, record = tree
    sets = [s for s in record["parameter_sets"] if s["source"]["path"].endswith("primes/moduli")]
    for item in sets:
        p, g = (int(str(item["declaration"][key]), 0) for key in ("modulus", "generator"))
        assert gmpy2.is_prime(p // 2)
        assert item["facts"]["modulus.safe_prime"]["value"] is True
        assert pow(g, p // 2, p) == p - 1
        assert item["outcomes"]["generator-order-even"] == "nonconforming"


def test_their_even_orders_are_one_observation_with_twelve_places(tree: Tree) -> None:
    """In the documents; the record has one finding for each set."""
    _, record = tree
    rule = "generator-order-even"
    shared = [
        finding
        for finding in shared_findings(view(record).sheets)
        if any(criterion.rule == rule for criterion in finding.criteria)
    ]
    (primes,) = [f for f in shared if any("primes/moduli" in at.path for at in f.places)]
    assert primes.first.grade == "observation"
    assert [at.text.rsplit("/", 1)[-1] for at in primes.places if "primes" in at.path] == [
        "moduli:2-13"
    ]
    text = markdown.render(record, limit=10**7)
    assert text.count(f"### F{primes.number}. observation, {len(primes.members)} sets") == 1


def test_only_what_is_damaged_makes_the_review_incomplete(tree: Tree) -> None:
    """Errors are in the two files that say so by their names; the rest that is not reviewed is
    named with the reason."""
    folder, record = tree
    wrong = {Path(error["path"]).relative_to(folder / "vectors") for error in record["errors"]}
    assert {path.as_posix() for path in wrong} == real_tree.DAMAGED
    assert record["complete"] is False
    assert all(item["reason"] for item in record["skipped"])
