"""What a new report adds, settles and changes against an older one; a pure function of two records.

Sets are matched by id (path and name). Nothing is judged again here: positions, findings and facts
are taken as the reports state them.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from auditor.encoding import shorten

POSITIONS = ("hold", "open", "conditions", "no objection")
"""Worst first."""


@dataclass(frozen=True, slots=True)
class Change:
    """One difference, as a sentence, and whether it is for the worse."""

    text: str
    worse: bool = False


@dataclass(frozen=True, slots=True)
class SetChanges:
    """The differences of one parameter set."""

    identity: str
    changes: tuple[Change, ...]


@dataclass(frozen=True, slots=True)
class Comparison:
    """All differences; ``unchanged`` counts the sets without any."""

    run: tuple[Change, ...]
    sets: tuple[SetChanges, ...]
    unchanged: int

    @property
    def worse(self) -> bool:
        """Whether anything changed for the worse."""
        return any(change.worse for item in self.sets for change in item.changes)


def compare(old: Mapping[str, Any], new: Mapping[str, Any]) -> Comparison:
    """The differences from the record ``old`` to the record ``new``, in the order of ``new``."""
    before = {item["id"]: item for item in old["parameter_sets"]}
    after = {item["id"]: item for item in new["parameter_sets"]}
    changed = []
    for identity in [*after, *(gone for gone in before if gone not in after)]:
        changes = tuple(_set(before.get(identity), after.get(identity)))
        if changes:
            changed.append(SetChanges(identity, changes))
    return Comparison(
        tuple(_run(old, new)), tuple(changed), len(after.keys() | before.keys()) - len(changed)
    )


def _run(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[Change]:
    if old["tool"]["version"] != new["tool"]["version"]:
        yield Change(f"version {old['tool']['version']} to {new['tool']['version']}")
    for key in ("as_of", "effort", "factor_digits", "engine"):
        if old["run"].get(key) != new["run"].get(key):
            yield Change(f"{key} {old['run'].get(key)} to {new['run'].get(key)}")
    then = {book["name"]: book["sha256"] for book in old["rulebooks"]}
    now = {book["name"]: book["sha256"] for book in new["rulebooks"]}
    for name in sorted(then.keys() | now.keys()):
        if then.get(name) != now.get(name):
            how = "added" if name not in then else "removed" if name not in now else "changed"
            yield Change(f"rulebook {name} {how}")


def _set(old: Mapping[str, Any] | None, new: Mapping[str, Any] | None) -> Iterator[Change]:
    if old is None:
        assert new is not None
        yield Change(f"new set, {new['position']}", new["position"] != POSITIONS[-1])
        return
    if new is None:
        yield Change(f"set gone, was {old['position']}")
        return
    if old["digest"] != new["digest"]:
        yield Change("declared otherwise: " + ", ".join(_declared(old, new)))
    if old["position"] != new["position"]:
        worse = POSITIONS.index(new["position"]) < POSITIONS.index(old["position"])
        yield Change(f"position {old['position']} to {new['position']}", worse)
    yield from _findings(old, new)
    yield from _facts(old, new)


def _declared(old: Mapping[str, Any], new: Mapping[str, Any]) -> list[str]:
    then, now = old["declaration"], new["declaration"]
    return sorted(key for key in then.keys() | now.keys() if then.get(key) != now.get(key))


def _findings(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[Change]:
    then = {finding["rule"]: finding for finding in old["findings"]}
    now = {finding["rule"]: finding for finding in new["findings"]}
    for rule in [*now, *(gone for gone in then if gone not in now)]:
        if rule not in then:
            finding = now[rule]
            serious = finding["grade"] != "observation"
            yield Change(f"new {_finding(finding)}", serious)
        elif rule not in now:
            outcome = new["outcomes"].get(rule, "no longer in force")
            yield Change(f"settled {_finding(then[rule])}: {outcome}")
        elif then[rule]["outcome"] != now[rule]["outcome"]:
            worse = now[rule]["outcome"] == "nonconforming"
            yield Change(f"{_finding(now[rule])}, was {then[rule]['outcome']}", worse)


def _finding(finding: Mapping[str, Any]) -> str:
    return f"{finding['grade']} {finding['outcome']}: {finding['title']} ({finding['rule']})"


def _facts(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[Change]:
    """Facts settled or changed; a declared or attested value that goes is named as well."""
    for name in sorted(old["facts"].keys() | new["facts"].keys()):
        then, now = old["facts"].get(name), new["facts"].get(name)
        if then is None:
            yield Change(f"{name} is now {_value(now)}")
        elif now is None:
            reason = new["absent"].get(name, {}).get("reason", "not in the vocabulary")
            yield Change(f"{name} is no longer established ({reason})")
        elif then["value"] != now["value"]:
            lower = name.startswith("strength.") and _is_lower(now["value"], then["value"])
            yield Change(f"{name} {_value(then)} to {_value(now)}", lower)


def _is_lower(now: Any, then: Any) -> bool:
    numbers = all(isinstance(value, int | float) for value in (now, then))
    return numbers and bool(now < then)


def _value(fact: Mapping[str, Any]) -> str:
    value = fact["value"]
    return shorten(value if isinstance(value, str | int) else str(value))
