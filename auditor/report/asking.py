"""What is worth asking, in words that every document shares, and as text."""

import re
from collections.abc import Iterator, Mapping
from typing import Any

from auditor.report.text import visible_record
from auditor.report.words import POSITIONS, listed, plural

Record = Mapping[str, Any]

MOST_EFFECTS = 8
"""Effects of a situation that text and tickets list; page and record have all."""

MOST_PLACES = 4

NO_ANSWER = "No answer of the owner would change these:"

_SUBJECT = re.compile(r"(?:every party|the .+) (?=(?:checks|uses) )")


def render(asking: Record) -> str:
    """A paragraph for each situation, then the searches, then what was not asked about."""
    shown = visible_record(asking)
    parts = [*map(_situation, worth_asking(shown))]
    if idle := settled(shown):
        parts.append([NO_ANSWER, *map(_settled, idle)])
    if shown["searches"]:
        parts.append([f"{search(item)}\n    for {sets_of(item)}" for item in shown["searches"]])
    if shown["candidates"]:
        parts.append([f"{candidates(shown)}; --draft-usage FILE writes how to name them"])
    return "\n".join("\n".join([*part, ""]) for part in parts)


def _situation(item: Record) -> list[str]:
    lines = [f"{heading(item)}: {standing(item)}"]
    if item["open"]:
        lines.append(f"  not declared: {', '.join(item['open'])}")
    lines.append(f"  used as: {'; '.join(item['usage'])}")
    if item["sets"] > 1:
        lines.append(f"  where: {listed(places(item), most=MOST_PLACES)}")
    lines += [f"  {effect(each, item)}" for each in item["effects"][:MOST_EFFECTS]]
    if len(item["effects"]) > MOST_EFFECTS:
        lines.append(f"  and {plural(len(item['effects']) - MOST_EFFECTS, 'more answer')}")
    return lines


def _settled(item: Record) -> str:
    which = examples(item)
    return f"  {heading(item)}: {standing(item)}" + (f" ({which})" if which else "")


def examples(item: Record) -> str:
    """Two of several sets, and how many more; nothing for a single one, whose heading names it."""
    return listed(places(item), most=2) if item["sets"] > 1 else ""


def worth_asking(asking: Record) -> list[Record]:
    """The situations in which some answer changes something; first where it moves a position."""
    found = [item for item in asking["situations"] if item["effects"]]
    return sorted(found, key=lambda item: not _moves_any(item))


def _moves_any(item: Record) -> bool:
    return any(each["position"]["before"] != each["position"]["after"] for each in item["effects"])


def settled(asking: Record) -> list[Record]:
    """The other situations."""
    return [item for item in asking["situations"] if not item["effects"]]


def heading(item: Record) -> str:
    """The one set by path and name, or how many there are."""
    if item["sets"] > 1:
        different = len(item["members"])
        more = "" if different == item["sets"] else f" ({different:,} different)"
        return f"{item['sets']:,} sets used alike{more}"
    place = item["members"][0]["places"][0]
    return f"{place['path']}#{place['name']}"


def standing(item: Record) -> str:
    """The positions, and the least work known."""
    positions = [(name, item["positions"][name]) for name in POSITIONS]
    present = [(name, count) for name, count in positions if count]
    text = (
        present[0][0] if len(present) == 1 else ", ".join(f"{count:,} {n}" for n, count in present)
    )
    known = [member for member in item["members"] if member["bits"] is not None]
    if len(known) < len(item["members"]):
        return f"{text}, work unknown" if not known else f"{text}, work partly unknown"
    figures = {
        "least": min(member["bits"] for member in known),
        "most": max(member["bits"] for member in known),
        "loose": any(member["loose"] for member in known),
    }
    return f"{text}, {bits(figures)} bits"


def places(item: Record) -> list[str]:
    """Where its sets stand, with line and name."""
    return [
        f"{place['path']}:{place['line']} ({place['name']})"
        for member in item["members"]
        for place in member["places"]
    ]


def effect(each: Record, situation: Record) -> str:
    """What some answers would change, and for which sets where not for all."""
    whom = for_whom(each, situation)
    return f"{condition(each)}: {moves(each)}{f' (for {whom})' if whom else ''}"


def condition(each: Record) -> str:
    """The answers as one condition."""
    parts: list[str] = []
    last = ""
    for answer in each["answers"]:
        clause = answer.removeprefix("if ")
        subject = _SUBJECT.match(clause)
        who = subject[0] if subject else ""
        parts.append(clause.removeprefix(who) if who == last else clause)
        last = who
    return f"if {' and '.join(parts)}"


def moves(each: Record) -> str:
    """Where the position moves, and the work."""
    before, after = each["position"]["before"], each["position"]["after"]
    parts = [] if before == after else [f"{before} to {after}"]
    then, now = each["bits"]["before"], each["bits"]["after"]
    if _figures(then) == _figures(now):
        if then != now:
            parts.append(f"{bits(now)} bits, " + ("may fall" if now["loose"] else "cannot fall"))
    else:
        parts.append(f"{bits(then)} to {bits(now)} bits")
    return ", ".join(parts)


def _figures(figure: Record | None) -> tuple[Any, ...]:
    return () if figure is None else (figure["least"], figure["most"])


def for_whom(each: Record, situation: Record) -> str:
    """The sets that an effect is about; empty where it is about all."""
    if len(each["members"]) == len(situation["members"]):
        return ""
    found = [situation["members"][index]["places"][0] for index in each["members"]]
    return listed([f"{place['path']}#{place['name']}" for place in found], most=MOST_PLACES)


def count(each: Record, situation: Record) -> int:
    """How many sets an effect is about."""
    return sum(len(situation["members"][index]["places"]) for index in each["members"])


def bits(figure: Record | None) -> str:
    """Work in bits: one figure or a range, 'at most' where it may still fall."""
    if figure is None:
        return "unknown"
    least, most = f"{figure['least']:.2f}", f"{figure['most']:.2f}"
    text = least if least == most else f"{least}–{most}"
    return f"at most {text}" if figure["loose"] else text


def search(item: Record) -> str:
    """The next step of searches: what it costs and what it would tell."""
    low, high = item["window"]
    risk = item["risk"]
    numbers = len(item["questions"])
    each = "" if numbers == 1 else f" for each of {numbers:,} numbers"
    return (
        f"about {duration(item['core_seconds'])} of elliptic curves ({item['curves']:,} with "
        f"B1 = {item['b1']:,}{each}): the risk of a missed factor of {low} to {high} bits falls "
        f"from {_percent(risk['before'])} to {_percent(risk['after'])}"
    )


def _percent(risk: Record) -> str:
    least, most = f"{100 * risk['least']:.0f}", f"{100 * risk['most']:.0f}"
    return f"{least} %" if least == most else f"{least}–{most} %"


def sets_of(item: Record) -> str:
    """The sets that wait for searches."""
    return listed(item["sets"], most=MOST_PLACES)


def candidates(asking: Record) -> str:
    """How many numbers were found and are no sets yet."""
    count = len(asking["candidates"])
    return f"{plural(count, 'candidate')} not reviewed: no usage file names what belongs together"


def duration(seconds: float) -> str:
    """Of work on one core, to one or two figures: the model behind it is no better than that."""
    for size, unit in ((3600, "core-hours"), (60, "core-minutes")):
        if seconds >= 2 * size:
            return f"{seconds / size:.0f} {unit}"
    return f"{max(1, seconds):.0f} core-seconds"


def summary(asking: Record) -> str:
    """What there is to ask, in one sentence."""
    asked = worth_asking(asking)
    if not asking["situations"]:
        return "Nothing was asked about."
    about = plural(asking["sets"], "parameter set")
    if not asked:
        return f"No answer of the owner would change anything about {about}."
    sets = sum(item["sets"] for item in asked)
    questions = plural(len(asked), "question")
    return f"{questions} to the owner, about {sets:,} of {about}."


def lines_of_errors(asking: Record) -> Iterator[str]:
    """What could not be read, with its place."""
    for error in asking["errors"]:
        yield f"{error['path']}:{error['line']}:{error['column']}: {error['message']}"
