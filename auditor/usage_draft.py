"""A usage file to complete: what the sets of a tree leave open, one question for all alike.

The uses say nothing as they stand. Every open key is in a comment, with what may be said, an
example, and what the answer would change; so are the candidates that nobody has named. In a line
to lift ``#`` stands before a key, before the ``-`` of a use, or two blanks before a key of such a
use; in prose one blank or more than two follow it.
"""

import os
from collections.abc import Hashable, Iterable, Iterator, Mapping
from dataclasses import dataclass
from textwrap import wrap
from typing import Any

from auditor.advice.ask import SCHEMES_OF, Asked, needed_width
from auditor.advice.situations import Inquiry, Member, Situation, situation, usage_of
from auditor.declaration import EVERYBODY, Declaration, Party
from auditor.declare import flow, pointless, questions, scalar
from auditor.facts.usage import PURPOSES
from auditor.intake.candidates import Waiting
from auditor.intake.usage_file import USAGE, below
from auditor.intake.usage_patterns import ANY_NAME, MAX_PATH, NOT_LITERAL, Covered, fewest, labelled
from auditor.report import asking
from auditor.report.asking_record import situation_record
from auditor.report.text import clipped, visible
from auditor.report.words import listed

MOST_USES = 1_000
"""Uses that the format takes in one file."""

HEAD = """\
# How the groups that were found here are used: a draft to complete. Only the owner knows. Correct
# the example in a line such as '#peer_check: [range]', or '#- path: ...' with the lines below it,
# and take away the '#'; then review again. What stays in comments is not declared.
# Paths are relative to the directory of this file, and it says nothing of what lies elsewhere.
auditor-usage: 1
uses:
"""

_NOTHING = f'  - path: "**"\n    name: "{ANY_NAME}"\n'
_WIDTH, _LONGEST = 92, 600
_PLACES = 3


@dataclass(frozen=True, slots=True)
class Draft:
    """The text of a usage file; how many uses ask and candidates wait in it, and the sets and
    candidates that no use in it could name, each with the reason."""

    text: str
    uses: int
    candidates: int
    left_out: tuple[str, ...]

    @property
    def is_empty(self) -> bool:
        """Whether there is nothing to say."""
        return not (self.uses or self.candidates)


def draft(
    path: str, inquiry: Inquiry, waiting: Iterable[Waiting], documents: Iterable[str]
) -> Draft:
    """The usage file at ``path`` that asks what these sets leave open.

    ``waiting`` are the candidates that no set is made of. Sets of declaration ``documents`` are
    left to these. Answers that a usage file has given already are no longer open, and no use here
    covers a set that it would say something else of.
    """
    own = frozenset(documents)
    asked: dict[int, Asked] = {}
    sets: list[tuple[Declaration, Hashable]] = []
    for group in inquiry.situations:
        for member in group.members:
            for declaration in member.declarations:
                if declaration.place.path not in own:
                    asked[id(declaration)] = member.asked
                    sets.append((declaration, _label(member.asked, declaration)))
    found = list(labelled(path, sets))
    uses = [use for use in fewest(found) if _keys(asked[id(use.sets[0].declaration)])]
    shown = uses[:MOST_USES]
    named, unnamed = _candidates(path, waiting)
    reached = {id(item.declaration) for use in shown for item in use.sets}
    missed = [
        f"{declaration.identity}: no pattern of this file names it alone"
        if below(path, declaration.place.path) is not None
        else f"{declaration.identity}: not below {os.path.dirname(path) or '.'}"
        for declaration, _ in sets
        if _keys(asked[id(declaration)]) and id(declaration) not in reached
    ]
    entries = [*(_use(use, asked) for use in shown), *named]
    text = HEAD + ("" if shown else _NOTHING) + "".join(f"\n{entry}" for entry in entries)
    return Draft(text, len(shown), len(named), (*missed, *unnamed))


def _label(asked: Asked, declaration: Declaration) -> Hashable:
    """What sets of one use agree in; parties are said as a whole, so with their widths."""
    named = any(party.role != EVERYBODY for party in declaration.parties)
    return usage_of(asked), declaration.parties if named else ()


def _keys(asked: Asked) -> tuple[str, ...]:
    """The keys of a use that would answer what is open, in the order of the format.

    What belongs to a purpose can be said once there is one.
    """
    open_keys = {_key(key) for key in asked.open_keys}
    if asked.declaration.purpose is None:
        open_keys |= {"purpose"}
        open_keys -= {"scheme", "message_bits"}
    open_keys -= {*pointless(asked.declaration)}
    return tuple(key for key in USAGE if key in open_keys)


def _key(declared: str) -> str:
    """The key of a use for an open key: 'exponent' for 'exponent.bits'."""
    return declared.split(".", 1)[0]


def _use(use: Covered, asked: Mapping[int, Asked]) -> str:
    """One use: what it is about, what answers would change together, then key by key."""
    group = _situation(use, asked)
    record = situation_record(group)
    first = group.members[0].asked
    where = listed(asking.places(record), most=_PLACES)
    lines = [
        *_prose(2, f"{asking.heading(record)}: {asking.standing(record)}"),
        *(_prose(2, where) if len(use.sets) > 1 else ()),
        *_prose(2, f"used as: {'; '.join(record['usage'])}"),
        *(line for text in _together(record) for line in _prose(2, text)),
        f"  - path: {scalar(use.path)}",
        f"    name: {scalar(use.name)}",
        *_restated(first),
    ]
    for key in _keys(first):
        lines += _question(key, first, record)
    return "\n".join(lines) + "\n"


def _situation(use: Covered, asked: Mapping[int, Asked]) -> Situation:
    """The sets of a use as a situation of their own."""
    equal: dict[str, list[Declaration]] = {}
    for item in use.sets:
        equal.setdefault(item.declaration.digest(), []).append(item.declaration)
    return situation([Member(tuple(same), asked[id(same[0])]) for same in equal.values()])


def _together(record: Mapping[str, Any]) -> Iterator[str]:
    """What several answers together would change."""
    several = [each for each in record["effects"] if len(each["answers"]) > 1]
    for each in several[: asking.MOST_EFFECTS]:
        yield asking.effect(each, record)


def _restated(asked: Asked) -> Iterator[str]:
    """What has to stand beside a scheme or a message size, as it is known already."""
    declaration, keys = asked.declaration, _keys(asked)
    if not {"scheme", "message_bits"} & {*keys}:
        return
    for key in ("purpose", "scheme", "message_bits"):
        value = getattr(declaration, key)
        if value is not None:
            yield f"    {key}: {flow(value)}"


def _question(key: str, asked: Asked, record: Mapping[str, Any]) -> Iterator[str]:
    """A key in comments: what may be said, what single answers would change, an example."""
    example, meaning = _example(key, asked)
    yield from _prose(4, f"{key}: {meaning}")
    single = [
        each
        for each in record["effects"]
        if len(each["answers"]) == 1 and _key(each["keys"][0]) == key
    ]
    for each in single[: asking.MOST_EFFECTS]:
        yield from _prose(4, asking.effect(each, record))
    if not single:
        yield from _prose(4, "by itself no answer moves the position or the work")
    yield f"    #{key}: {example}"


def _example(key: str, asked: Asked) -> tuple[str, str]:
    """A value that may be written for a key, with what is known of it, and what it means."""
    declaration = asked.declaration
    proposed = {name: (example, meaning) for name, example, meaning in questions(declaration)}
    if key == "parties":
        parties = [_completed(party, asked) for party in declaration.parties]
        return flow(parties), f"each with exponent and peer_check; {proposed['exponent'][1]}"
    example, meaning = proposed[key]
    if key == "purpose":
        return example, f"{meaning}; the last two with a scheme"
    if key == "scheme":
        schemes = SCHEMES_OF[declaration.purpose or ""]
        return schemes[-1], ", ".join(schemes)
    if key == "exponent":
        return flow(_exponent(asked)), meaning
    return example, meaning


def _exponent(asked: Asked) -> dict[str, Any]:
    """Examples for what is open of an exponent, of any party."""
    example = {"bits": needed_width(asked.declaration), "use": "single"}
    return {part: value for part, value in example.items() if _is_open(f"exponent.{part}", asked)}


def _is_open(key: str, asked: Asked) -> bool:
    """Whether some party leaves the key open: the others that are silent are asked for it too,
    since facts over parties name the first that is."""
    return any(found == key or found.endswith(f".{key}") for found in asked.open_keys)


def _completed(party: Party, asked: Asked) -> dict[str, Any]:
    """A party as it is known, with examples for what is open."""
    known = {"bits": party.exponent_bits, "use": party.exponent_use}
    stated = {part: value for part, value in known.items() if value is not None}
    exponent = _exponent(asked) | stated
    checks = party.peer_check
    if checks is None and _is_open("peer_check", asked):
        checks = ("range",)
    record: dict[str, Any] = {"role": party.role}
    if exponent:
        record["exponent"] = exponent
    return record if checks is None else record | {"peer_check": list(checks)}


def _candidates(path: str, waiting: Iterable[Waiting]) -> tuple[list[str], list[str]]:
    """The uses that would take up candidates, and those that no use can name."""
    named, unnamed = [], []
    for item in waiting:
        number = item.modulus
        inside = below(path, number.path)
        where = f"{number.path}:{number.line}: candidate {number.name}"
        if inside is None:
            unnamed.append(f"{where}: not below {os.path.dirname(path) or '.'}")
        elif not item.unique:
            unnamed.append(f"{where}: the file has this name more than once")
        elif NOT_LITERAL.search(inside) or len(inside) > MAX_PATH:
            unnamed.append(f"{where}: no pattern names this file alone")
        else:
            named.append("\n".join(_candidate(item, inside)) + "\n")
    return named, unnamed


def _candidate(item: Waiting, inside: str) -> Iterator[str]:
    """One candidate, in comments as a whole."""
    number = item.modulus
    equal = "" if item.group == "none" else f", the modulus of {item.group}"
    where = f"{number.path}:{number.line}: {number.value.bit_length()} bits{equal}"
    yield from _prose(2, f"{where}; a candidate: only its name says that it is a modulus")
    yield f"  #- path: {scalar(inside)}"
    yield f"  #  modulus: {scalar(number.name)}"
    if item.generator is None:
        yield from _prose(2, "generator: an integer, or the name of a number in the same file")
        yield "  #  generator: 2"
    else:
        yield f"  #  generator: {scalar(item.generator)}"
    if item.subgroup_order is not None:
        yield f"  #  subgroup_order: {scalar(item.subgroup_order)}"
    yield from _prose(2, f"purpose: {', '.join(PURPOSES)}; the last two with a scheme")
    yield f"  #  purpose: {PURPOSES[0]}"


def _prose(indent: int, text: str) -> Iterator[str]:
    """Text, from outside too, as lines of comments that nobody would lift."""
    shown = " ".join(clipped(visible(text), _LONGEST).split())
    first, *more = wrap(shown, _WIDTH - indent, break_on_hyphens=False) or [""]
    yield f"{' ' * indent}# {first}"
    yield from (f"{' ' * indent}#    {line}" for line in more)
