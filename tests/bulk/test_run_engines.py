"""GMP-ECM in place of the built-in curves: the same claims, and the engines that ran are named."""

import json
import random
import secrets
from collections.abc import Iterable
from dataclasses import replace
from pathlib import Path
from typing import Any

import gmpy2
import pytest
from click.testing import CliRunner

from auditor.claims.collection import Claims, read_claim
from auditor.claims.searched import Searched
from auditor.cli import main
from auditor.compare import compare
from auditor.declaration import Declaration
from auditor.inquiry.answers import Cores
from auditor.inquiry.pool import LocalPool
from auditor.search.curves import Engine, Outcome, Task
from auditor.search.gmp_ecm import GmpEcm
from auditor.search.plan import EcmLevel
from auditor.verify import verify
from tests.bulk.programs import INSTALLED, stand_in
from tests.bulk.reviews import STANDARD, declared, random_prime, reviewed, safe_prime

LEVELS = (EcmLevel(15, 300, 9_000, 12), EcmLevel(20, 600, 20_000, 10))
DEEP = replace(STANDARD, factor_digits=20)


@pytest.fixture
def short_levels(monkeypatch: pytest.MonkeyPatch) -> None:
    """Few curves with small bounds, in this process only."""
    monkeypatch.setattr("auditor.search.plan.LEVELS", LEVELS)


def with_hidden_factor(seed: int) -> Declaration:
    """A set whose group order has a prime factor for curves and two that no method finds."""
    rng = random.Random(seed)
    f, r, s = safe_prime(rng, 36), random_prime(rng, 110), random_prime(rng, 115)
    return declared(
        f"x{seed}", next(n for k in range(2, 10**6) if gmpy2.is_prime(n := k * f * r * s + 1))
    )


SETS = [with_hidden_factor(seed) for seed in range(2)]
NUMBERS = [item.modulus - 1 for item in SETS]


def without_names(claims: Iterable[Any]) -> set[str]:
    """The claims as text, all engines by one name."""
    return {
        json.dumps((replace(c, engine="x") if isinstance(c, Searched) else c).record())
        for c in claims
    }


def engines(claims: Claims) -> set[str]:
    """The engines that the records of searches with curves name."""
    records = [claim for claim in claims if isinstance(claim, Searched)]
    return {c.engine for c in records if "elliptic curves" in dict(c.runs)}


@pytest.fixture(params=["stand-in", "installed"] if INSTALLED else ["stand-in"])
def program(request: pytest.FixtureRequest, tmp_path: Path) -> GmpEcm:
    """A program called ecm, real where there is one."""
    if request.param == "installed":
        assert INSTALLED is not None
        return INSTALLED
    return stand_in(tmp_path, NUMBERS)


def known_factors(claims: Claims) -> int:
    """How many prime factors of the group orders are known."""
    found = [claims.factorization(number) for number in NUMBERS]
    return sum(len(claim.factors) for claim in found if claim is not None)


def test_the_claims_are_those_of_the_built_in_engine_up_to_its_name(
    program: GmpEcm, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Factors that only curves find among them; here and through a pool of workers."""
    claims, record = reviewed(SETS, STANDARD)
    easy = reviewed(SETS, replace(STANDARD, factor_digits=0))[0]
    named = replace(STANDARD, engine=program.name)
    others, other = reviewed(SETS, named, cores=Cores(engine=program))
    monkeypatch.setattr("auditor.inquiry.question_round.STARTING_PAYS", 0.0)
    with LocalPool(2) as pool:
        pooled = reviewed(SETS, named, cores=Cores(pool, 2, program))[1]
        assert pool.started

    assert known_factors(easy) < known_factors(claims)
    assert without_names(others) == without_names(claims)
    assert (engines(claims), engines(others)) == ({"built-in"}, {program.name})
    assert pooled == other
    mine, theirs = json.loads(record), json.loads(other)
    for a, b in zip(mine["parameter_sets"], theirs["parameter_sets"], strict=True):
        assert (a["position"], a["outcomes"]) == (b["position"], b["outcomes"])
        assert {name: fact["value"] for name, fact in a["facts"].items()} == {
            name: fact["value"] for name, fact in b["facts"].items()
        }
    changes = [change.text for change in compare(mine, theirs).run]
    assert changes == [f"engine built-in to {program.name}"]
    assert compare(mine, theirs).sets == ()
    assert verify(theirs, secrets.randbelow).failures == ()


class Idle:
    """An engine that must not be asked."""

    def unit(self, b1: int) -> int:
        """One."""
        return 1

    def run(self, task: Task) -> Outcome:
        """Fails the test."""
        raise AssertionError(f"{task} was run before")


@pytest.mark.usefixtures("short_levels")
def test_what_one_engine_has_searched_the_other_does_not_search_again(
    tmp_path: Path, program: GmpEcm
) -> None:
    """The curves are the same, so the record of them counts; it still names who ran them."""
    engines_used: list[Engine] = [program, Idle()]
    records = [
        reviewed(SETS, DEEP, cores=Cores(engine=engine), ledger=tmp_path / "l")[1]
        for engine in engines_used
    ]

    assert records[0] == records[1]
    claims = json.loads(records[0])["claims"].values()
    assert engines(Claims(map(read_claim, claims))) == {program.name}


@pytest.mark.usefixtures("short_levels")
@pytest.mark.parametrize(
    ("behaviour", "names"),
    [
        (None, "built-in"),
        ({"greeting": "other"}, "built-in"),
        ({"fails_with": "600"}, "GMP-ECM 9.9 and built-in"),
    ],
    ids=["missing", "something else", "at one level"],
)
def test_where_the_program_fails_the_engines_that_ran_are_named(
    tmp_path: Path, behaviour: dict[str, Any] | None, names: str
) -> None:
    """As on a worker where it is not installed; the claims are the same."""
    program = stand_in(tmp_path, NUMBERS, **(behaviour or {}))
    if behaviour is None:
        (tmp_path / "ecm").unlink()
    claims, record = reviewed(SETS, DEEP, cores=Cores(engine=program))

    assert without_names(claims) == without_names(reviewed(SETS, DEEP)[0])
    assert engines(claims) == {names}
    assert verify(json.loads(record), secrets.randbelow).failures == ()


DOCUMENT = f"""\
auditor: 1
parameter_sets:
  - name: x
    modulus: {SETS[0].modulus}
    generator: 2
"""


def named_by(tmp_path: Path, *words: str) -> tuple[int, str | None, str]:
    """Exit status, the engine in the report, and what is said, of a review with these options."""
    (tmp_path / "x.yaml").write_text(DOCUMENT)
    report = tmp_path / "r.json"
    report.unlink(missing_ok=True)
    options = ["--fail-on", "never", "--no-ledger", "--jobs", "1", "--json", str(report)]
    result = CliRunner().invoke(main, ["review", str(tmp_path / "x.yaml"), *options, *words])
    engine = json.loads(report.read_text())["run"]["engine"] if report.exists() else None
    return result.exit_code, engine, result.output


@pytest.mark.usefixtures("short_levels")
def test_the_engine_is_that_of_the_machine_unless_it_is_named(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """GMP-ECM where it is installed and curves are run; asked for and missing, wrong usage."""
    quick = ("--effort", "quick")
    monkeypatch.setenv("PATH", str(tmp_path))
    assert named_by(tmp_path)[1] == "built-in"
    status, engine, said = named_by(tmp_path, "--engine", "gmp-ecm")
    assert (status, engine) == (2, None)
    assert "no program 'ecm'" in said
    stand_in(tmp_path, NUMBERS)
    monkeypatch.setenv("PATH", f"{tmp_path}:/usr/bin:/bin")
    assert named_by(tmp_path)[1] == "GMP-ECM 9.9"
    assert named_by(tmp_path, "--engine", "built-in")[1] == "built-in"
    assert named_by(tmp_path, *quick)[1] == "built-in"
    assert named_by(tmp_path, *quick, "--factor-digits", "15")[1] == "GMP-ECM 9.9"
