"""One sheet: everything that documents say about one modulus, generator and usage."""

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from auditor.report import words
from auditor.report.findings_view import Concession, MergedFinding, Merging, Remedy
from auditor.report.strength_view import Strength, strength
from auditor.report.text import Number

Record = Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class FactRow:
    """A fact with its value, or why it has none."""

    name: str
    value: str
    standing: str
    bound: str
    claims: tuple[str, ...]
    rests_on: tuple[str, ...]


@dataclass(frozen=True)
class Sheet:
    """Everything about one modulus, generator and usage: the sets of equal digest."""

    number: int
    record: Record
    places: tuple[str, ...]
    modulus: Number
    generator: Number
    subgroup_order: Number | None
    usage: tuple[str, ...]
    strength: Strength
    findings: tuple[MergedFinding, ...]
    titles: Mapping[str, str]

    @property
    def name(self) -> str:
        """The name of the first set of this digest."""
        return str(self.record["name"])

    @property
    def group(self) -> str | None:
        """The published group that has this modulus, whatever the generator."""
        fact = self.record["facts"].get("modulus.standard_group")
        return str(fact["value"]) if fact and fact["value"] != "none" else None

    @property
    def digest(self) -> str:
        """Over all values, usage included."""
        return str(self.record["digest"])

    @property
    def position(self) -> str:
        """`hold`, `open`, `conditions` or `no objection`."""
        return str(self.record["position"])

    @property
    def meaning(self) -> str:
        """The position as advice."""
        return words.POSITION_MEANING[self.position]

    @property
    def deciding(self) -> MergedFinding | None:
        """The finding that decides the position: the first one, when one decides."""
        return self.findings[0] if self.findings and self.record["decided_by"] else None

    @cached_property
    def reason(self) -> str:
        """The one sentence that decides the position."""
        if self.deciding is not None:
            return self.deciding.statements[0]
        applicable = len(self.record["outcomes"]) - len(self.not_applicable)
        met = len(self.with_outcome("conforming"))
        if not applicable:
            return "No requirement of the rulebooks in use applies, so nothing was judged."
        count = words.plural(applicable, "requirement")
        if met == applicable:
            return f"All of the {count} that apply are met."
        return f"{met} of the {count} that apply are met; the rest are observations."

    @property
    def remedy(self) -> Remedy | None:
        """What brings the set furthest among the remedies of findings that keep it from release;
        that of the deciding finding where none brings it further."""
        if self.deciding is None:
            return None
        weighty = (item for item in self.findings if item.grade != "observation")
        found = [remedy for finding in weighty for remedy in finding.remedies]
        return max(found, key=_reach, default=None)

    @property
    def concessions(self) -> tuple[Concession, ...]:
        """The concessions for the deciding finding; they permit a release, they change nothing."""
        return self.deciding.concessions if self.deciding else ()

    def remedies(self, number: int) -> tuple[tuple[Remedy, int], ...]:
        """The remedies of the finding of that number, each with the number that first names it."""
        first: dict[Remedy, int] = {}
        for place, finding in enumerate(self.findings, 1):
            for remedy in finding.remedies:
                first.setdefault(remedy, place)
        return tuple((remedy, first[remedy]) for remedy in self.findings[number - 1].remedies)

    @property
    def further_remedies(self) -> int:
        """How many other remedies the sheet names."""
        known = {remedy for finding in self.findings for remedy in finding.remedies}
        return len(known - {self.remedy})

    @cached_property
    def owners_word(self) -> tuple[str, ...]:
        """The declared keys that any value of this set believes."""
        facts = self.record["facts"].values()
        return tuple(sorted({key for fact in facts for key in fact["rests_on"]}))

    @cached_property
    def standings(self) -> tuple[tuple[str, int], ...]:
        """How many facts have each standing, strongest first."""
        counts = Counter(fact["standing"] for fact in self.record["facts"].values())
        return tuple((name, counts[name]) for name in words.STANDING_MEANING if counts[name])

    @property
    def facts(self) -> Iterator[FactRow]:
        """Facts with a value, by name."""
        for name, fact in self.record["facts"].items():
            yield FactRow(
                name,
                words.plain_value(fact["value"]),
                fact["standing"],
                "" if fact["tight"] else "may still move",
                tuple(fact["claims"]),
                tuple(fact["rests_on"]),
            )

    @property
    def absences(self) -> Iterator[tuple[str, str]]:
        """Facts without a value, and why."""
        for name, record in self.record["absent"].items():
            keys = ", ".join(record["keys"])
            reason = words.REASON_MEANING[record["reason"]]
            yield name, f"{reason} ({keys})" if keys else reason

    def with_outcome(self, outcome: str) -> tuple[str, ...]:
        """Titles of the rules with that outcome, in the order of books and rules."""
        outcomes = self.record["outcomes"].items()
        return tuple(self.titles.get(rule, rule) for rule, result in outcomes if result == outcome)

    @property
    def not_applicable(self) -> tuple[str, ...]:
        """Titles of the rules that do not apply."""
        return self.with_outcome("not applicable")

    @cached_property
    def limits(self) -> tuple[str, ...]:
        """What was not examined or not settled for this set, a sentence each."""
        return tuple(_limits(self.record))


def sheet(number: int, group: list[Record], merging: Merging) -> Sheet:
    """The sheet of sets of equal digest."""
    first = group[0]
    declaration = first["declaration"]
    places = [place for parameter_set in group for place in parameter_set["places"]]
    order = declaration.get("subgroup_order")
    return Sheet(
        number=number,
        record=first,
        places=tuple(dict.fromkeys(_place(place, first["name"]) for place in places)),
        modulus=Number.read(declaration["modulus"]),
        generator=Number.read(declaration["generator"]),
        subgroup_order=None if order is None else Number.read(order),
        usage=words.usage(declaration),
        strength=strength(first),
        findings=merging.findings(first),
        titles=merging.titles,
    )


def _reach(remedy: Remedy) -> int:
    """How far a remedy brings a set; one that was not judged is no worse than staying."""
    return words.POSITIONS.index(remedy.position) if remedy.position else -1


def _place(place: Record, name: str) -> str:
    text = f"{place['path']}:{place['line']}"
    return f"{text} ({place['name']})" if place.get("name", name) != name else text


def _limits(record: Record) -> Iterator[str]:
    facts, absent = record["facts"], record["absent"]
    for book in record["books_left_out"]:
        yield f"Rulebook {book['name']} was not applied: {book['why']}"
    rest = facts.get("group.unfactored_length_at_most", {}).get("value", 0)
    if rest:
        yield f"A composite factor of the group order, of at most {rest} bits, is not factored."
    if digits := facts.get("group.searched_digits_at_least"):
        yield (
            f"Prime factors of up to {digits['value']} decimal digits were searched for; larger "
            "ones may exist."
        )
    if risk := facts.get("group.missed_factor_risk"):
        yield (
            "By the model of the search the chance that it missed a factor that would lower a "
            f"figure further is at most {risk['value']:.2g}: an upper bound, no estimate, and only "
            "if the number was not chosen to hide one."
        )
    undeclared = {key for a in absent.values() if a["reason"] == "undeclared" for key in a["keys"]}
    if undeclared:
        yield f"Not declared, so not judged: {', '.join(sorted(undeclared))}."
