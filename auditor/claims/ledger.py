"""The local store of claims between runs: one SQLite file, one writer, believed by nobody.

What is read back is checked again: every certificate in full, except that a probable prime gets
one fresh strong test to an unpredictable base instead of all its rounds, so that a damaged or
planted entry does not survive many readings. A file that is no ledger is set aside with a notice.
"""

import json
import os
import sqlite3
import time
from collections.abc import Callable, Iterable, Mapping
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from pathlib import Path

import gmpy2

from auditor.claims.base import Claim, Draw
from auditor.claims.collection import Claims, read_claim, used_first
from auditor.claims.order import Membership, Order
from auditor.claims.prime import Prime
from auditor.encoding import canonical_json

FORMAT = 1
SCHEMA = """
CREATE TABLE IF NOT EXISTS claim (id TEXT PRIMARY KEY, body TEXT NOT NULL) WITHOUT ROWID;
CREATE TABLE IF NOT EXISTS about (number TEXT NOT NULL, claim TEXT NOT NULL,
                                  PRIMARY KEY (number, claim)) WITHOUT ROWID;
"""
Notify = Callable[[str], None]


class Ledger:
    """Claims kept in the file at ``path``. ``notify`` receives a sentence when something is wrong
    with it; a ledger that cannot be used never stops a review. What is recalled is checked by
    ``jobs`` threads."""

    def __init__(self, path: Path, draw: Draw, notify: Notify, jobs: int = 1) -> None:
        self._draw = draw
        self._notify = notify
        self._jobs = jobs
        self._connection = _open(path, notify)

    def close(self) -> None:
        """Fold the write-ahead log into the file, so that a copy of the file is complete."""
        if self._connection is not None:
            self._connection.close()
            self._connection = None

    def keep(self, claims: Iterable[Claim]) -> None:
        """Store claims, all of them or none; those already there are left as they are."""
        rows = [(claim.id, canonical_json(claim.record()), subjects(claim)) for claim in claims]
        if self._connection is None or not rows:
            return
        try:
            self._connection.execute("BEGIN IMMEDIATE")
            for claim_id, body, numbers in rows:
                self._connection.execute(
                    "INSERT OR IGNORE INTO claim VALUES (?, ?)", (claim_id, body)
                )
                self._connection.executemany(
                    "INSERT OR IGNORE INTO about VALUES (?, ?)",
                    [(hex(number), claim_id) for number in numbers],
                )
            self._connection.execute("COMMIT")
        except sqlite3.Error as error:
            self._give_up(error)

    def recall(
        self, numbers: Iterable[int], rounds: int, held: Claims | None = None
    ) -> list[Claim]:
        """The claims about these numbers with all that they rest on, as far as they still hold, but
        for those that are ``held`` already: they were checked, and nothing is checked twice.

        Probable primes with fewer than ``rounds`` rounds, and what rests on them, are left out.
        """
        held = Claims() if held is None else held
        if self._connection is None:
            return []
        wanted: list[str] = []
        try:
            for number in sorted(set(numbers)):
                rows = self._connection.execute(
                    "SELECT claim FROM about WHERE number = ? ORDER BY claim", (hex(number),)
                ).fetchall()
                wanted += [claim_id for (claim_id,) in rows]
            found = self._read(wanted, held)
        except sqlite3.Error as error:
            self._give_up(error)
            return []
        holding = self._holding(found, held)
        leant_on = {used for claim in found for used in claim.uses if used in held}
        together = Claims([*held.support(leant_on), *found])
        return [claim for claim in holding if _thorough(together, claim, rounds)]

    def _read(self, wanted: list[str], held: Claims) -> list[Claim]:
        assert self._connection is not None
        claims: dict[str, Claim] = {}
        while wanted:
            claim_id = wanted.pop()
            if claim_id in claims or claim_id in held:
                continue
            row = self._connection.execute(
                "SELECT body FROM claim WHERE id = ?", (claim_id,)
            ).fetchone()
            try:
                claim = read_claim(json.loads(row[0])) if row else None
            except ValueError:
                claim = None
            if claim is None or claim.id != claim_id:
                self._notify(f"The ledger's entry {claim_id} cannot be read; it is left out.")
                continue
            claims[claim_id] = claim
            wanted.extend(claim.uses)
        return [claims[claim_id] for claim_id in sorted(claims)]

    def _holding(self, found: list[Claim], held: Claims) -> list[Claim]:
        """The claims that hold, each after those it uses."""
        together = Claims(found)
        ordered = used_first(together)
        failures = dict(
            zip((claim.id for claim in ordered), self._failures(ordered, held), strict=True)
        )
        holding: dict[str, Claim] = {}
        for claim in ordered:
            if not all(used in holding or used in held for used in claim.uses):
                continue
            if failure := failures[claim.id]:
                self._notify(f"The ledger's entry {claim.id} does not hold ({failure}); left out.")
            else:
                holding[claim.id] = claim
        return list(holding.values())

    def _failures(self, claims: list[Claim], held: Claims) -> list[str]:
        """Why each of these does not hold, empty where it does, as far as it can be told without
        the others: checked side by side, since GMP needs no lock of the interpreter."""
        by_id = {claim.id: claim for claim in claims}
        known = by_id.keys() | {claim.id for claim in held}

        def failure(claim: Claim) -> str:
            used = {id_: by_id.get(id_) or held[id_] for id_ in claim.uses if id_ in known}
            if len(used) < len(claim.uses):
                return "it rests on a claim that is not here"
            try:
                self._check(claim, used)
            except (ValueError, ArithmeticError) as error:
                return str(error)
            return ""

        with ThreadPoolExecutor(self._jobs, initializer=_release_the_lock) as executor:
            return list(executor.map(failure, claims))

    def _check(self, claim: Claim, used: Mapping[str, Claim]) -> None:
        if isinstance(claim, Prime):
            claim.check_again(used, self._draw)
        else:
            claim.check(used, self._draw)

    def _give_up(self, error: sqlite3.Error) -> None:
        self._notify(f"The ledger cannot be used ({error}); the review goes on without it.")
        if self._connection is not None:
            self._connection.close()
        self._connection = None


def _release_the_lock() -> None:
    gmpy2.get_context().allow_release_gil = True


def subjects(claim: Claim) -> tuple[int, ...]:
    """The integers under which a claim is looked up."""
    if isinstance(claim, Order | Membership):
        return (claim.modulus,)
    # Every kind but the two above is about one number, its field n.
    n: int = claim.n  # type: ignore[attr-defined]
    return (n,)


def _thorough(found: Claims, claim: Claim, rounds: int) -> bool:
    primes = (item for item in found.support([claim.id]) if isinstance(item, Prime))
    return all(item.rounds >= rounds for item in primes if item.method == "baillie-psw")


def _open(path: Path, notify: Notify) -> sqlite3.Connection | None:
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        return _connect(path)
    except sqlite3.DatabaseError as error:
        if isinstance(error, sqlite3.OperationalError):
            notify(f"The ledger {path.name} cannot be opened ({error}); going on without it.")
            return None
        return _set_aside(path, error, notify)
    except OSError as error:
        notify(f"The ledger {path.name} cannot be opened ({error.strerror}); going on without it.")
        return None


def _set_aside(path: Path, error: sqlite3.Error, notify: Notify) -> sqlite3.Connection | None:
    """Rename a file that is no ledger, and start a new one."""
    number = 1
    while (aside := path.with_name(f"{path.name}.damaged-{number}")).exists():
        number += 1
    try:
        os.replace(path, aside)
        connection = _connect(path)
    except (OSError, sqlite3.Error):
        notify(f"The ledger {path.name} is damaged ({error}); the review goes on without it.")
        return None
    notify(f"The ledger {path.name} is damaged ({error}); it was set aside as {aside.name}.")
    return connection


def _connect(path: Path) -> sqlite3.Connection:
    connection = sqlite3.connect(path, timeout=30, isolation_level=None)
    try:
        _enter_write_ahead(connection)
        connection.execute("PRAGMA synchronous=NORMAL")
        with closing(connection.execute("PRAGMA user_version")) as cursor:
            version = cursor.fetchone()[0]
        if version not in (0, FORMAT):
            raise sqlite3.DatabaseError(f"it has format {version}")
        connection.executescript(SCHEMA)
        connection.execute(f"PRAGMA user_version={FORMAT}")
    except sqlite3.Error:
        connection.close()
        raise
    return connection


def _enter_write_ahead(connection: sqlite3.Connection) -> None:
    """Entering write-ahead mode ignores the busy timeout, so another process's opening at the same
    moment is waited for here."""
    for attempt in range(50):
        try:
            connection.execute("PRAGMA journal_mode=WAL").close()
            return
        except sqlite3.OperationalError:
            time.sleep(0.02 * (attempt + 1))
    connection.execute("PRAGMA journal_mode=WAL").close()
