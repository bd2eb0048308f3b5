"""What the words of a record say in a sentence: positions, outcomes, usage, values.

One table for each closed list of words; a test holds them against the published schema.
"""

from collections.abc import Mapping, Sequence
from typing import Any

from auditor.declaration import DEFAULT_STRENGTH
from auditor.report.text import Number

POSITIONS = ("hold", "open", "conditions", "no objection")
"""Worst first."""

POSITION_MEANING: Mapping[str, str] = {
    "hold": "Do not release: a major requirement is not met.",
    "open": "Do not release yet: whether a major requirement is met is not established.",
    "conditions": "May be released once the minor points listed are settled or accepted.",
    "no objection": "No objection: no major or minor requirement is unmet or undecided.",
}

_VERDICTS: Mapping[str, tuple[str, str]] = {
    "hold": ("must not be released as declared", "must not be released as declared"),
    "open": ("is not decided yet", "are not decided yet"),
    "conditions": ("may be released with conditions", "may be released with conditions"),
    "no objection": ("raises no objection", "raise no objection"),
}
"""What is said of one set, and of several."""

GRADES = ("major", "minor", "observation")
"""Heaviest first."""

ATTACKERS = ("passive", "peer", "designer")
"""Each can do all that the one before can."""

ATTACKER_MEANING: Mapping[str, str] = {
    "passive": "sees public values",
    "peer": "also sends values",
    "designer": "chose the parameters",
}

STANDING_MEANING: Mapping[str, str] = {
    "proven": "proven",
    "probable": "probable, with an error bound",
    "attested": "attested: our own record of search effort, which nobody can check",
    "declared": "on the owner's word",
}

REASON_MEANING: Mapping[str, str] = {
    "undeclared": "not declared",
    "undefined": "not defined for this set",
    "unsettled": "not settled",
}

CONFIDENCE_MEANING: Mapping[str, str] = {
    "confirmed": "",
    "secondary": "cited as other documents restate it",
    "memory": "from memory, to be confirmed in the document",
}

CHECKS: Mapping[str, str] = {
    "range": "range",
    "membership": "subgroup membership",
    "cofactor": "multiplied by the cofactor",
    "certified": "certified values only",
}

USES: Mapping[str, str] = {
    "single": "used once",
    "reused": "reused",
    "static": "static",
}


def verdict(positions: Mapping[str, int]) -> str:
    """What so many sets of each position mean for release, in one sentence."""
    total = sum(positions.values())
    if total == 0:
        return "Nothing was reviewed."
    parts = [
        (count, _VERDICTS[position][count > 1]) for position, count in positions.items() if count
    ]
    if len(parts) == 1:
        count, text = parts[0]
        return f"The one parameter set {text}." if count == 1 else f"All {count:,} sets {text}."
    return f"Of {total:,} parameter sets, " + ", ".join(f"{n:,} {text}" for n, text in parts) + "."


def outcome(grade: str, result: str) -> str:
    """The audit words for a finding: 'major nonconformity', 'undetermined major', 'observation'."""
    if result == "undetermined":
        return f"undetermined {grade}"
    return grade if grade == "observation" else f"{grade} nonconformity"


def usage(declaration: Mapping[str, Any]) -> tuple[str, ...]:
    """How the owner uses the numbers: the purpose first, then a clause for each party."""
    purpose = [str(declaration.get("purpose", "purpose not declared")).replace("-", " ")]
    purpose += [str(declaration[key]) for key in ("scheme", "protocol") if key in declaration]
    if "message_bits" in declaration:
        purpose.append(f"messages of {declaration['message_bits']} bits")
    if "parties" in declaration:
        parties = tuple(f"{item['role']}: {_party(item)}" for item in declaration["parties"])
    else:
        parties = (_party(declaration),)
    return (", ".join(purpose), *parties, _requirement(declaration))


def _requirement(declaration: Mapping[str, Any]) -> str:
    """The strength that is asked for, and until when, where that is said."""
    bits = declaration.get("required_strength")
    required = f"{DEFAULT_STRENGTH} bits by default" if bits is None else f"{bits} bits as declared"
    until = declaration.get("protect_until")
    return f"required: {required}" + ("" if until is None else f", until {until}")


def _party(record: Mapping[str, Any]) -> str:
    exponent = record.get("exponent", {})
    width = exponent.get("bits")
    bits = "exponent of no stated width" if width is None else f"{width}-bit exponent"
    use = USES[exponent["use"]] if "use" in exponent else "use not declared"
    if "peer_check" not in record:
        checks = "no word on what is done to received values"
    elif record["peer_check"]:
        checks = "received values checked: " + ", ".join(CHECKS[c] for c in record["peer_check"])
    else:
        checks = "received values not checked"
    return f"{bits}, {use}; {checks}"


def route(name: str) -> str:
    """The name of an attack route as a practitioner writes it."""
    return "Pohlig-Hellman" if name == "pohlig_hellman" else name.replace("_", " ")


def plain_value(value: Any) -> str:
    """A value of a record in one line, long integers shortened."""
    match value:
        case bool():
            return "yes" if value else "no"
        case None:
            return "none"
        case int():
            return Number.read(value).short
        case float():
            return f"{value:.2f}"
        case str():
            return _number_or_text(value)
        case [[_, _], *_]:
            return listed([power(prime, exponent) for prime, exponent in value], " · ")
        case list():
            return listed([plain_value(item) for item in value]) or "none"
        case Mapping():
            return ", ".join(f"{key} {plain_value(item)}" for key, item in value.items())
    return str(value)


def listed(items: Sequence[str], between: str = ", ", most: int = 16) -> str:
    """The items in one line; of very many the first, and how many more there are."""
    if len(items) <= most:
        return between.join(items)
    return between.join([*items[:most], f"{len(items) - most:,} more"])


def power(prime: int | str, exponent: int) -> str:
    """A prime power, a long prime shortened."""
    shown = plain_value(prime)
    return shown if exponent == 1 else f"{shown}^{exponent}"


def _number_or_text(value: str) -> str:
    if not value.startswith(("0x", "-0x")):
        return value
    try:
        number = Number.read(value)
    except ValueError:
        return value
    return f"{number.short} ({number.length} bits)" if number.is_long else number.short


def plural(count: int, singular: str, several: str | None = None) -> str:
    """'1 set', '2 sets'."""
    return f"{count:,} {singular if count == 1 else several or singular + 's'}"
