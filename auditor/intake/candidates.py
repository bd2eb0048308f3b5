"""Big integers in programs and configuration that may belong to a group: candidates.

Read are the forms of :mod:`auditor.intake.candidates_forms` where the name says modulus, prime,
generator or subgroup order; and p, q and g without more where p is big and no big n or d is there,
as in keys of RSA. A name is no proof: the same words serve RSA, elliptic curves and test data, and
a false alarm about those would cost more than a candidate that waits. So no candidate is reviewed
until a usage file names it; until then each modulus is listed as passed over, with the names that
such a file would use.
"""

import re
from bisect import bisect_right
from collections import Counter
from collections.abc import Container, Iterable, Iterator
from dataclasses import dataclass

from auditor.intake.candidates_forms import LONG_DIGITS, assignments
from auditor.intake.names_statements import words_of
from auditor.intake.reading import CANDIDATE, WAITS, Number, Passed, Reading, Role
from auditor.intake.standard_groups import match
from auditor.schema_check import quoted

LEAST_BITS = 512
MAX_BITS = 65_536
MAX_CANDIDATES = 1_000

_WORDS = ("modul", "prime", "dh", "dsa", "modp", "elgamal", "schnorr", "hellman")
_BLOCK_COMMENT, _LINE_COMMENT = re.compile(r"/\*.*?\*/", re.DOTALL), re.compile(r"//[^\n]*")
_CAST = re.compile(r"\(\s*(?:unsigned\s+)?(?:byte|char|uint8_t|u8)\s*\)")

_MODULUS = frozenset({"modulus", "prime", "modulo"})
_GENERATOR = frozenset({"generator", "base"})
_ORDER = frozenset({"subgroup", "order"})
_GROUP = re.compile(r"dh|dsa|modp|elgamal|group|schnorr|hellman", re.IGNORECASE)
_LETTERS: dict[str, Role] = {"p": "modulus", "g": "generator", "q": "subgroup order"}
_BARE_MODULUS = re.compile(r"(?<![\w.\-])[pP](?:[\"']?[ \t]*[:=,\[]|[ \t]+[\"'(])")
_BARE_OF_RSA = frozenset({"n", "d"})


def read_candidates(text: str, path: str) -> Reading:
    """The candidates of ``text``, at most 1,000, in text order."""
    if not _worth_a_look(text):
        return Reading()
    plain = _without_comments(text)
    starts = [0, *(end.end() for end in re.finditer("\n", plain))]
    found: list[tuple[int, Number]] = []
    bare: list[tuple[int, Number]] = []
    of_rsa = False
    for at, name, value in assignments(plain):
        of_rsa |= name.lower() in _BARE_OF_RSA and value.bit_length() >= LEAST_BITS
        role, named = role_of(name), found
        if role is None and name.lower() in _LETTERS:
            role, named = _LETTERS[name.lower()], bare
        if role is not None and (role != "modulus" or value.bit_length() >= LEAST_BITS):
            line = bisect_right(starts, at)
            column = at - starts[line - 1] + 1
            named.append((at, Number(role, name, value, path, line, column)))
    if not of_rsa and any(number.role == "modulus" for _, number in bare):
        found += bare
    in_order = [number for _, number in sorted(found, key=lambda item: item[0])]
    return Reading(candidates=tuple(in_order[:MAX_CANDIDATES]))


def _worth_a_look(text: str) -> bool:
    """A quick look that spares most files the rest."""
    lower = text.lower()
    named = any(word in lower for word in _WORDS) or _BARE_MODULUS.search(text) is not None
    return named and any(digits.search(text) for digits in LONG_DIGITS)


def _without_comments(text: str) -> str:
    """``text`` with blanks for comments and casts, every character at its place.

    A comment that is never closed is none: other languages write /* for other things.
    """
    last = text.rfind("*/") + 2
    closed = _BLOCK_COMMENT.sub(_blanks, text[:last]) if last > 1 else ""
    return _CAST.sub(_blanks, _LINE_COMMENT.sub(_blanks, closed + text[len(closed) :]))


def role_of(name: str) -> Role | None:
    """What the name says that a number is; None where it says nothing of a group."""
    words = words_of(name)
    if any(word.startswith("rsa") for word in words):
        return None
    if _MODULUS & {*words}:
        return "modulus"
    if "generator" in words or (_GENERATOR & {*words} and _GROUP.search(name)):
        return "generator"
    if "order" in words and "subgroup" in words:
        return "subgroup order"
    return _LETTERS.get(words[-1]) if words and _GROUP.search(name) else None


@dataclass(frozen=True, slots=True)
class Waiting:
    """A modulus among the candidates that is not reviewed yet, and the names that go with it.

    ``unique`` says that its name stands once in its file: only then can a use name it.
    """

    modulus: Number
    generator: str | None
    subgroup_order: str | None
    unique: bool

    @property
    def group(self) -> str:
        """The standard group with that modulus, or ``none``."""
        return match(self.modulus.value, 2).name


def waiting(numbers: Iterable[Number], known: Container[int]) -> Iterator[Waiting]:
    """Each modulus among the candidates of one file that is not among the ``known`` ones."""
    listed = list(numbers)
    count = Counter(number.name for number in listed)

    def beside(modulus: Number, role: Role) -> str | None:
        names = (n.name for n in listed if n.role == role and count[n.name] == 1)
        return next((name for name in names if _stem(name) == _stem(modulus.name)), None)

    for number in listed:
        if number.role == "modulus" and number.value not in known:
            yield Waiting(
                number,
                beside(number, "generator"),
                beside(number, "subgroup order"),
                count[number.name] == 1,
            )


def passed_over(found: Waiting) -> Passed:
    """How a modulus that waits is listed."""
    number, group = found.modulus, found.group
    equal = f", the modulus of {group}" if group != "none" else ""
    return Passed(
        number.path,
        f"{CANDIDATE}{quoted(number.name)}: {number.value.bit_length()} bits{equal}{WAITS} "
        f"(modulus: {number.name}, generator: {found.generator or 'an integer'})",
        number.line,
    )


def _stem(name: str) -> str:
    """The name without what tells modulus, generator and order apart."""
    told = {*_MODULUS, *_GENERATOR, *_ORDER, "p", "g", "q"}
    return " ".join(word for word in words_of(name) if word not in told)


def _blanks(found: re.Match[str]) -> str:
    """As many characters, and the same line ends."""
    return re.sub(r"[^\n]", " ", found[0])
