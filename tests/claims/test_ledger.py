"""The ledger gives back what holds, and survives whatever happens to its file."""

import multiprocessing
import secrets
import sqlite3
from pathlib import Path

import pytest

from auditor.claims.base import Claim
from auditor.claims.composite import Composite
from auditor.claims.factorization import Factorization
from auditor.claims.ledger import Ledger
from auditor.claims.order import Membership
from auditor.claims.prime import Prime
from auditor.encoding import canonical_json

MERSENNE = 2**127 - 1


@pytest.fixture
def notices() -> list[str]:
    """What the ledger had to say."""
    return []


def ledger(path: Path, notices: list[str]) -> Ledger:
    """A ledger at that path."""
    return Ledger(path, secrets.randbelow, notices.append)


def kept(path: Path, notices: list[str], *claims: Claim) -> None:
    """Store claims and close."""
    store = ledger(path, notices)
    store.keep(claims)
    store.close()


def recalled(path: Path, notices: list[str], number: int, rounds: int = 64) -> list[Claim]:
    """What an other run finds about a number."""
    store = ledger(path, notices)
    try:
        return store.recall([number], rounds)
    finally:
        store.close()


TWO, THREE = Prime(2, "below-2^64"), Prime(3, "below-2^64")
SIX = Factorization(6, ((2, 1), (3, 1)), 1, tuple(sorted((TWO.id, THREE.id))))


def test_claims_come_back_with_what_they_rest_on(tmp_path: Path, notices: list[str]) -> None:
    """By integer, the used before the user."""
    kept(tmp_path / "l", notices, TWO, THREE, SIX, Membership(7, 2, 3, True))

    assert recalled(tmp_path / "l", notices, 6)[-1] == SIX
    assert set(recalled(tmp_path / "l", notices, 6)) == {TWO, THREE, SIX}
    assert recalled(tmp_path / "l", notices, 7) == [Membership(7, 2, 3, True)]
    assert recalled(tmp_path / "l", notices, 8) == []
    assert notices == []


def test_fewer_rounds_than_asked_for_are_not_enough(tmp_path: Path, notices: list[str]) -> None:
    """A quick review's probable prime is not one of a standard review."""
    kept(tmp_path / "l", notices, Prime(MERSENNE, "baillie-psw", rounds=16))

    assert recalled(tmp_path / "l", notices, MERSENNE, rounds=64) == []
    assert len(recalled(tmp_path / "l", notices, MERSENNE, rounds=16)) == 1


def test_planted_entries_are_left_out_with_a_notice(tmp_path: Path, notices: list[str]) -> None:
    """A composite called prime meets a fresh base; a wrong factor its check; what rests on a
    planted claim falls with it."""
    composite = (2**61 - 1) * (2**89 - 1)
    false = Prime(composite, "baillie-psw", rounds=64)
    user = Factorization(composite, ((composite, 1),), 1, (false.id,))
    kept(tmp_path / "l", notices, false, user, Composite(35, factor=6))

    assert recalled(tmp_path / "l", notices, composite) == []
    assert recalled(tmp_path / "l", notices, 35) == []
    assert len(notices) == 2


@pytest.mark.parametrize(
    "planted",
    [
        *(Prime(n, "baillie-psw", rounds=64) for n in (0, 1, 2, 3, 11, 2**70)),
        Prime(MERSENNE, "baillie-psw", rounds=10**6),
        Prime(MERSENNE, "n-1"),
        Prime(MERSENNE, "below-2^64"),
        Composite(MERSENNE, witness=2),
        Factorization(MERSENNE, ((2, 2**40),), 1, (TWO.id,)),
    ],
)
def test_what_could_not_be_said_is_not_believed(
    tmp_path: Path, notices: list[str], planted: Claim
) -> None:
    """Methods on numbers that they are not for, proofs of nothing, endless products."""
    kept(tmp_path / "l", notices, TWO, planted)

    number: int = vars(planted)["n"]
    assert planted not in recalled(tmp_path / "l", notices, number)
    assert len(notices) == 1


def test_damaged_entries_are_left_out_with_a_notice(tmp_path: Path, notices: list[str]) -> None:
    """Text that is no claim, or a claim under another's id."""
    kept(tmp_path / "l", notices, TWO, Composite(35, factor=5))
    connection = sqlite3.connect(tmp_path / "l")
    connection.execute("UPDATE claim SET body = '{' WHERE id = ?", (TWO.id,))
    other = canonical_json(Composite(35, factor=7).record())
    connection.execute("UPDATE claim SET body = ? WHERE id LIKE 'composite%'", (other,))
    connection.commit()
    connection.close()

    assert recalled(tmp_path / "l", notices, 2) == []
    assert recalled(tmp_path / "l", notices, 35) == []
    assert len(notices) == 2


@pytest.mark.parametrize("content", [b"not a database at all, but long enough" * 40, b"x" * 5000])
def test_a_file_that_is_no_ledger_is_set_aside(
    tmp_path: Path, notices: list[str], content: bytes
) -> None:
    """It is kept under another name, a new ledger is begun, and the review is told."""
    path = tmp_path / "l"
    path.write_bytes(content)
    kept(path, notices, TWO)

    assert (tmp_path / "l.damaged-1").read_bytes() == content
    assert recalled(path, notices, 2) == [TWO]
    assert len(notices) == 1
    assert "set aside" in notices[0]


def test_a_ledger_of_another_format_is_set_aside(tmp_path: Path, notices: list[str]) -> None:
    """Its entries could mean something else."""
    kept(tmp_path / "l", notices, TWO)
    connection = sqlite3.connect(tmp_path / "l")
    connection.execute("PRAGMA user_version=99")
    connection.commit()
    connection.close()

    assert recalled(tmp_path / "l", notices, 2) == []
    assert "format 99" in notices[0]


def test_a_place_that_cannot_be_used_stops_nothing(tmp_path: Path, notices: list[str]) -> None:
    """A directory instead of a file: a notice, and no claims."""
    (tmp_path / "l").mkdir()
    kept(tmp_path / "l", notices, TWO)

    assert recalled(tmp_path / "l", notices, 2) == []
    assert notices


def _write(path: str, first: int) -> None:
    store = Ledger(Path(path), secrets.randbelow, print)
    for number in range(first, first + 60):
        store.keep([Membership(number + 2, 1, 1, True)])
    store.close()


def test_several_writers_lose_nothing(tmp_path: Path, notices: list[str]) -> None:
    """Three processes at once."""
    context = multiprocessing.get_context("spawn")
    workers = [
        context.Process(target=_write, args=(str(tmp_path / "l"), 100 * index))
        for index in range(3)
    ]
    for worker in workers:
        worker.start()
    for worker in workers:
        worker.join()

    assert [worker.exitcode for worker in workers] == [0, 0, 0]
    store = ledger(tmp_path / "l", notices)
    numbers = [100 * index + offset for index in range(3) for offset in range(60)]
    assert all(len(store.recall([number + 2], 64)) == 1 for number in numbers)
    store.close()
