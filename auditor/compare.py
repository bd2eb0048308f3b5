"""What a new report adds, settles and changes against an older one; a pure function of two records.

Nothing is judged again here: positions, findings and facts are taken as the reports state them. A
set is matched by its id; one that was moved or renamed by its digest, then by its integers, so
that a new name does not hide an old finding.

A finding that stays and whose values got worse is new too: an attack costs less, more leaks. Of a
set that was declared otherwise, so is one whose values differ where nobody knows which are worse,
unless others of them got better.

What the owner's word alone has improved is not settled but new: while modulus, generator and order
are the same, a finding that went because the usage, another declared value or a concession was
changed is listed as new, at the position that it led to, with the reason.
"""

from collections import deque
from collections.abc import Callable, Hashable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from auditor.concessions import FAIL_ON, is_conceded, leads_to, worsened
from auditor.encoding import shorten

POSITIONS = ("hold", "open", "conditions", "no objection")
"""Worst first."""

INTEGERS = ("modulus", "generator", "subgroup_order", "cofactor")
"""The numbers under review: while they are equal, an improvement comes from something else."""

EVIDENCE = ("name", "known_factors")
"""Declared keys that nothing is believed for: factors are checked, a name moves nothing."""

Kind = Literal["new", "settled", "changed"]
Record = Mapping[str, Any]
Pair = tuple[Record | None, Record | None]


@dataclass(frozen=True, slots=True)
class Change:
    """One difference, as a sentence.

    ``level`` is the position that a finding leads to by itself; it counts where ``kind`` is new.
    ``reason`` says which word of the owner bought an improvement, and is empty otherwise.
    """

    kind: Kind
    text: str
    level: str = POSITIONS[-1]
    reason: str = ""

    def counts(self, fail_on: str) -> bool:
        """Whether it is new, and at or above ``fail_on``."""
        counted = FAIL_ON[: FAIL_ON.index(fail_on) + 1] if fail_on in FAIL_ON else ()
        return self.kind == "new" and self.level in counted


@dataclass(frozen=True, slots=True)
class SetChanges:
    """The differences of one parameter set; a position is None where there is no such set."""

    identity: str
    before: str | None
    after: str | None
    changes: tuple[Change, ...]
    facts: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Comparison:
    """All differences; ``unchanged`` counts the sets without any."""

    run: tuple[Change, ...]
    sets: tuple[SetChanges, ...]
    unchanged: int

    @property
    def changes(self) -> tuple[Change, ...]:
        """Those of the run, then those of the sets."""
        return (*self.run, *(change for item in self.sets for change in item.changes))

    def fails(self, fail_on: str) -> bool:
        """Whether something at or above ``fail_on`` is new."""
        return any(change.counts(fail_on) for change in self.changes)


def compare(old: Record, new: Record) -> Comparison:
    """The differences from the record ``old`` to the record ``new``: sets in the order of ``new``,
    then those that are gone."""
    pairs = _matched(old["parameter_sets"], new["parameter_sets"])
    compared = [_set(before, after) for before, after in pairs]
    changed = tuple(item for item in compared if item.changes or item.facts)
    return Comparison(tuple(_run(old, new)), changed, len(compared) - len(changed))


@dataclass(slots=True)
class _Matching:
    """The sets of both reports that have no partner yet, and the partners found."""

    old: list[Record]
    new: list[Record]
    partner: dict[str, Record] = field(default_factory=dict)

    def by(self, key: Callable[[Record], Hashable]) -> None:
        """Make partners of sets with equal keys, in order."""
        waiting: dict[Hashable, deque[Record]] = {}
        for item in self.old:
            waiting.setdefault(key(item), deque()).append(item)
        single = []
        for item in self.new:
            if found := waiting.get(key(item)):
                self.partner[item["id"]] = found.popleft()
            else:
                single.append(item)
        self.old = [item for left in waiting.values() for item in left]
        self.new = single


def _matched(old: Iterable[Record], new: Iterable[Record]) -> list[Pair]:
    listed = list(new)
    matching = _Matching(list(old), list(listed))
    matching.by(lambda item: str(item["id"]))
    matching.by(lambda item: str(item["digest"]))
    matching.by(_integers)
    pairs: list[Pair] = [(matching.partner.get(item["id"]), item) for item in listed]
    return [*pairs, *((item, None) for item in matching.old)]


def _integers(item: Record) -> tuple[Any, ...]:
    return tuple(item["declaration"].get(key) for key in INTEGERS)


def _run(old: Record, new: Record) -> Iterator[Change]:
    if old["tool"]["version"] != new["tool"]["version"]:
        yield Change("changed", f"version {old['tool']['version']} to {new['tool']['version']}")
    for key in ("as_of", "effort", "factor_digits", "engine"):
        if old["run"].get(key) != new["run"].get(key):
            yield Change("changed", f"{key} {old['run'].get(key)} to {new['run'].get(key)}")
    then = {book["name"]: book["sha256"] for book in old["rulebooks"]}
    now = {book["name"]: book["sha256"] for book in new["rulebooks"]}
    for name in sorted(then.keys() | now.keys()):
        if then.get(name) != now.get(name):
            how = "added" if name not in then else "removed" if name not in now else "changed"
            yield Change("changed", f"rulebook {name} {how}")
    told = {(error["path"], error["message"]) for error in old["errors"]}
    for error in new["errors"]:
        if (error["path"], error["message"]) not in told:
            text = f"not read, so not judged: {error['path']}: {error['message']}"
            yield Change("new", text, "open")


def _set(old: Record | None, new: Record | None) -> SetChanges:
    if old is None:
        assert new is not None
        title = _deciding(new)
        text = f"new set, {new['position']}" + (f": {title}" if title else "")
        return SetChanges(new["id"], None, new["position"], (Change("new", text, new["position"]),))
    if new is None:
        gone = Change("changed", f"set gone, was {old['position']}")
        return SetChanges(old["id"], old["position"], None, (gone,))
    return SetChanges(
        new["id"],
        old["position"],
        new["position"],
        tuple(_changes(old, new)),
        tuple(_facts(old, new)),
    )


def _deciding(item: Record) -> str:
    return next((f["title"] for f in item["findings"] if f["rule"] == item["decided_by"]), "")


def _changes(old: Record, new: Record) -> Iterator[Change]:
    if old["id"] != new["id"]:
        yield Change("changed", f"was {old['id']}")
    declared = _declared(old, new)
    if declared:
        yield Change("changed", f"declared otherwise: {', '.join(declared)}")
    then = {finding["rule"]: finding for finding in old["findings"]}
    now = {finding["rule"]: finding for finding in new["findings"]}
    words = _words(declared, old, new)
    differs = bool(declared)
    for rule in [*now, *(gone for gone in then if gone not in now)]:
        outcome = new["outcomes"].get(rule)
        change = _finding(then.get(rule), now.get(rule), outcome, words, differs)
        if change is not None:
            yield change


def _declared(old: Record, new: Record) -> tuple[str, ...]:
    """The declared keys that differ; the name is none of them."""
    then, now = old["declaration"], new["declaration"]
    keys = (then.keys() | now.keys()) - {"name"}
    return tuple(sorted(key for key in keys if then.get(key) != now.get(key)))


def _words(declared: Iterable[str], old: Record, new: Record) -> tuple[str, ...]:
    """The changed keys that are the owner's word alone; none where the integers differ.

    Factors that the owner names are checked, and so is an origin that was regenerated.
    """
    if _integers(old) != _integers(new):
        return ()
    regenerated = new["facts"].get("provenance.verified", {}).get("value") is True
    checked = (*EVIDENCE, *(("provenance",) if regenerated else ()))
    return tuple(key for key in declared if key not in checked)


def _finding(
    then: Record | None,
    now: Record | None,
    outcome: str | None,
    words: tuple[str, ...],
    differs: bool,
) -> Change | None:
    """The change of one rule's finding; ``outcome`` is what the new report says of the rule, and
    ``differs`` whether the set was declared otherwise."""
    before, after = _level(then), _level(now)
    if now is not None and POSITIONS.index(after) < POSITIONS.index(before):
        return Change("new", f"{_words_of(now)}{_since(then)}", after, _concession(now))
    if now is not None and then is None:
        return Change("new", _words_of(now), after, _concession(now))
    assert then is not None
    result = outcome or "no longer judged"
    improved = now is None or POSITIONS.index(after) > POSITIONS.index(before)
    if improved and words:
        said = f"{', '.join(words)} changed, the integers did not"
        text = f"gone by the owner's word alone: {_words_of(then)}, now {result}"
        return Change("new", text, before, said)
    if now is None:
        kind: Kind = "changed" if outcome is None else "settled"
        return Change(kind, f"{_words_of(then)}, now {result}")
    if not improved and (worse := _worse(then, now, differs)):
        since = _since(then) if then["outcome"] != now["outcome"] else ""
        return Change("new", f"{_words_of(now)}{since}, {worse}", after, _concession(now))
    if then["outcome"] != now["outcome"] or then["grade"] != now["grade"]:
        return Change("changed", f"{_words_of(now)}{_since(then)}")
    return _conceded(then, now)


def _worse(then: Record, now: Record, differs: bool) -> str:
    """What is worse about a finding that stays, or may be; empty for nothing, and for what objects
    to nothing."""
    before, after = then["values"], now["values"]
    if _level(now) == POSITIONS[-1]:
        return ""
    if worse := worsened(before, after, certainly=True):
        return f"worse: {'; '.join(worse)}"
    better = worsened(after, before, certainly=True)
    other = worsened(before, after) if differs and not better else ()
    return f"on other values: {'; '.join(other)}" if other else ""


def _conceded(then: Record, now: Record) -> Change | None:
    """What differs in the concession of a finding that is otherwise as it was."""
    if is_conceded(now) and not is_conceded(then):
        return Change("new", _words_of(now), _level(now), _concession(now))
    if is_conceded(then) and not is_conceded(now):
        return Change("new", f"{_words_of(now)}, no longer conceded", _level(now))
    if then["concession"] != now["concession"] and now["concession"] is not None:
        return Change("changed", f"{_words_of(now)}: {_concession(now) or 'concession run out'}")
    return None


def _level(finding: Record | None) -> str:
    return POSITIONS[-1] if finding is None else leads_to(finding)


def _words_of(finding: Record) -> str:
    return f"{finding['grade']} {finding['outcome']}: {finding['title']} ({finding['rule']})"


def _since(then: Record | None) -> str:
    return "" if then is None else f", was {then['grade']} {then['outcome']}"


def _concession(finding: Record) -> str:
    """The concession in force, in words; empty for none."""
    if not is_conceded(finding):
        return ""
    member = finding["concession"]
    return f"conceded until {member['until']} by {member['by']}: {member['reason']}"


def _facts(old: Record, new: Record) -> Iterator[str]:
    """Facts settled or changed, and values that are no longer established; strengths first."""
    names = old["facts"].keys() | new["facts"].keys()
    for name in sorted(names, key=lambda name: (not name.startswith("strength."), name)):
        then, now = old["facts"].get(name), new["facts"].get(name)
        if then is None:
            yield f"{name} is now {_value(now)}"
        elif now is None:
            reason = new["absent"].get(name, {}).get("reason", "not in the vocabulary")
            yield f"{name} is no longer established ({reason})"
        elif then["value"] != now["value"]:
            yield f"{name} {_value(then)} to {_value(now)}"


def _value(fact: Record) -> str:
    value = fact["value"]
    if isinstance(value, bool):
        return "yes" if value else "no"
    return shorten(value if isinstance(value, str | int) else str(value))
