"""Reports with one thing changed and everything sealed again, to see what the verifier lets pass.

``python -m tests.robustness.edits 5000`` tries that many edits and prints what survived, by kind.
"""

import copy
import random
import re
import secrets
import sys
from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from auditor.concessions import Concession, conceded
from auditor.declaration import Place
from auditor.encoding import identifier
from auditor.intake.record import declaration_from
from auditor.review import Surroundings, review
from auditor.run_values import RunValues
from auditor.verify import verify

DOCUMENT = Path(__file__).parent / "edits.yaml"

SURVIVORS = {
    r"^inputs(\[\d+\]|$)": "what was read: only the inputs themselves could show more (--against)",
    r"^parameter_sets\[\d+\]\.declaration": "the owner's word, where nothing follows from the "
    "difference",
    r"^parameter_sets\[\d+\]\.findings\[\d+\]\.concession\.(reason|by|until|grade|granted)": "the "
    "word of whoever granted it, while it covers its finding: only the file could show more",
    r"^run\.as_of$": "the day taken as today, which whoever ran the review chose",
    r"^run\.fail_on$": "when the exit status is 1, which moves no finding",
    r"^run\.engine$": "the record of what ran the search: attested",
    r"^run\.factor_digits$": "how deep the search was asked to go: attested",
    r"^claims\.(form-)?searched-": "the record of our own search: attested",
    r"^claims\.prime-[0-9a-f]+\.certificate\.witnesses\[\d+\]\[1\]$": "another base that shows "
    "the same: the proof is one as well",
    r"^(notices|skipped|errors)": "what was told about the run",
}
"""Edits that pass, by the place of the edit, with the reason why nobody could object."""


def report() -> dict[str, Any]:
    """A review of 256-bit sets of several kinds, where every second finding is conceded."""
    record = review(
        [str(DOCUMENT)],
        RunValues("2026-12-01", "quick"),
        Surroundings(secrets.randbelow),
        stdin=None,
    )
    file = {"path": "concessions.yaml", "sha256": "0" * 64, "role": "concessions"}
    return {**conceded(record, list(_granted(record))), "inputs": [*record["inputs"], file]}


def _granted(record: dict[str, Any]) -> Iterator[Concession]:
    """Concessions for a report, one in force, the next one not."""
    required = {
        rule: each["requirement"]
        for book in record["rulebooks"]
        for rule, each in book["rules"].items()
    }
    for item in record["parameter_sets"]:
        for number, finding in enumerate(item["findings"][::2]):
            yield Concession(
                rule=finding["rule"],
                set_digest=item["digest"],
                requirement=required[finding["rule"]],
                grade=finding["grade"],
                outcome=finding["outcome"],
                values=finding["values"],
                reason="Replaced in March.",
                by="head of systems",
                until=("2027-03-31", "2026-11-30")[number % 2],
                place=Place("concessions.yaml", 1),
            )


Path_ = tuple[str | int, ...]


def places(value: Any, path: Path_ = ()) -> Iterator[Path_]:
    """Every place in a record, containers included."""
    yield path
    if isinstance(value, dict):
        for key in value:
            yield from places(value[key], (*path, key))
    elif isinstance(value, list):
        for index, item in enumerate(value):
            yield from places(item, (*path, index))


def shown(path: Path_) -> str:
    """A place in the notation of the verifier."""
    text = "".join(f"[{step}]" if isinstance(step, int) else f".{step}" for step in path)
    return text.lstrip(".")


def edit(record: dict[str, Any], rng: random.Random) -> Path_:
    """Change one thing in place; where."""
    while True:
        path = rng.choice([path for path in places(record) if path])
        holder: Any = record
        for step in path[:-1]:
            holder = holder[step]
        changed = _changed(holder[path[-1]], rng)
        if changed is not None and changed != holder[path[-1]]:
            holder[path[-1]] = changed
            return path


def _changed(value: Any, rng: random.Random) -> Any:
    if isinstance(value, bool):
        return not value
    if isinstance(value, int):
        return max(0, value + rng.choice((-2, -1, 1, 2, value)))
    if isinstance(value, float):
        return round(value + rng.choice((-1.0, -0.01, 0.01, 1.0)), 2)
    if isinstance(value, str) and re.fullmatch(r"0x[0-9a-f]+", value):
        return hex(int(value, 16) + rng.choice((-2, -1, 1, 2)))
    if isinstance(value, str) and value:
        at = rng.randrange(len(value))
        return value[:at] + rng.choice("abcdef0123456789") + value[at + 1 :]
    if isinstance(value, list) and value:
        at = rng.randrange(len(value))
        kinds = (value[:at] + value[at + 1 :], [*value, value[at]], value[::-1])
        return copy.deepcopy(rng.choice(kinds))
    if isinstance(value, dict) and value:
        gone = rng.choice(list(value))
        return {key: item for key, item in value.items() if key != gone}
    return None


def seal(record: dict[str, Any]) -> dict[str, Any]:
    """The record with ids of claims and digests of sets as its content now calls for."""
    renamed: dict[str, str] = {}
    claims = dict(record.get("claims", {}))
    waiting = sorted(claims)
    while waiting:
        ready = [c for c in waiting if not set(_uses(claims[c])) & set(waiting) - {c}] or waiting
        for claim_id in ready:
            waiting.remove(claim_id)
            claim = claims.pop(claim_id)
            if isinstance(claim, dict) and isinstance(claim.get("uses"), list):
                claim["uses"] = sorted(renamed.get(str(used), used) for used in claim["uses"])
            new = identifier(str(claim.get("kind", "")), claim)
            renamed[claim_id] = new
            claims[new] = claim
    record = _renamed({**record, "claims": {}}, renamed)
    record["claims"] = dict(sorted(claims.items()))
    for item in record.get("parameter_sets", []):
        try:
            digest = declaration_from(item["declaration"], Place("", 1)).digest()
        except (ValueError, KeyError, TypeError):
            continue
        item["digest"] = digest
    return record


def _uses(claim: Any) -> list[str]:
    return [str(used) for used in claim.get("uses", [])] if isinstance(claim, dict) else []


def _renamed(value: Any, names: dict[str, str]) -> Any:
    if isinstance(value, dict):
        return {key: _renamed(item, names) for key, item in value.items()}
    if isinstance(value, list):
        items = [_renamed(item, names) for item in value]
        texts = all(isinstance(item, str) and item in names.values() for item in items)
        return sorted(items) if items and texts else items
    return names.get(value, value) if isinstance(value, str) else value


def survivors(count: int, seed: int) -> Iterator[str]:
    """The places of those edits, out of ``count``, that the verifier lets pass."""
    rng = random.Random(seed)
    original = report()
    assert verify(original, secrets.randbelow).status == 0
    for _ in range(count):
        record = copy.deepcopy(original)
        path = edit(record, rng)
        sealed = seal(record)
        if sealed != original and verify(sealed, secrets.randbelow).status == 0:
            yield shown(path)


def explained(place: str) -> str | None:
    """Why an edit at that place may pass."""
    return next((why for where, why in SURVIVORS.items() if re.match(where, place)), None)


if __name__ == "__main__":
    tried = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    counts = Counter(
        explained(place) or f"UNEXPLAINED: {place}"
        for place in survivors(tried, secrets.randbits(32))
    )
    print(f"{tried} edits, {sum(counts.values())} passed")
    for why, number in counts.most_common():
        print(f"{number:6} {why}")
