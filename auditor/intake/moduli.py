"""The file of primes for SSH group exchange (RFC 4419), as the manual page moduli(5) describes it.

One record a line, seven fields: time, type, tests, trials, size, generator, modulus. What a record
says about itself is not believed: each record is a set to be reviewed, and where its own fields
disagree with its modulus, or keep a server from using it, a notice says so.
"""

import re
from collections.abc import Iterator

from auditor.core_scalars import bounded_integer
from auditor.declaration import Declaration, Place
from auditor.encoding import shorten
from auditor.intake.inputs import InputError
from auditor.intake.reading import Notice, Reading
from auditor.schema_check import quoted

FIELDS = ("time", "type", "tests", "trials", "size", "generator", "modulus")

SAFE_PRIME = 2
TYPES = {0: "unknown, not tested", SAFE_PRIME: "safe prime", 4: "Sophie Germain prime"}
COMPOSITE, SIEVE, MILLER_RABIN = 1, 2, 4
"""Types and bits of the field tests, by the manual page."""

_MAX_COUNT = 2**32 - 1
_FIRST_RECORD = re.compile(
    r"(?:[ \t]*(?:#[^\n]*)?\r?\n)*+"
    r"[ \t]*[0-9]{14}(?:[ \t]+[0-9]{1,10}){4}[ \t]+[0-9a-fA-F]{1,16}[ \t]+[0-9a-fA-F]{32}"
)
_WORD = re.compile(r"\S+")


def is_moduli(text: str) -> bool:
    """Whether the first line of ``text`` that is no comment has the form of a record."""
    return _FIRST_RECORD.match(text) is not None


def read_moduli(text: str, path: str) -> Reading:
    """Every record of ``text`` as a set for key agreement in SSH, named by its line and size."""
    declarations: list[Declaration] = []
    errors: list[InputError] = []
    notices: list[Notice] = []
    for number, line in enumerate(text.split("\n"), 1):
        if not line.strip() or line.lstrip().startswith("#"):
            continue
        try:
            record = _Record(line)
        except _BadField as bad:
            errors.append(InputError(path, number, bad.column, str(bad)))
            continue
        declarations.append(record.declaration(Place(path, number, record.columns[0])))
        notices += [Notice(path, number, remark) for remark in record.remarks()]
    return Reading(tuple(declarations), tuple(errors), notices=tuple(notices))


class _BadField(ValueError):
    """A field is not what it has to be."""

    def __init__(self, column: int, message: str) -> None:
        super().__init__(message)
        self.column = column


class _Record:
    """The fields of one line; _BadField for the first that cannot be read."""

    def __init__(self, line: str) -> None:
        words = list(_WORD.finditer(line))
        self.columns = [word.start() + 1 for word in words]
        if len(words) != len(FIELDS):
            column = self.columns[min(len(words), len(FIELDS) + 1) - 1]
            what = f"found {len(words)} fields; expected 7: {', '.join(FIELDS)}"
            raise _BadField(column, what)
        texts = dict(zip(FIELDS, (word[0] for word in words), strict=True))
        columns = dict(zip(FIELDS, self.columns, strict=True))
        if not re.fullmatch(r"[0-9]{14}", texts["time"]):
            raise _BadField(
                columns["time"], f"time: found {quoted(texts['time'])}; expected YYYYMMDDHHMMSS"
            )
        self.type, self.tests, self.trials, self.size = (
            _count(key, texts[key], columns[key]) for key in FIELDS[1:5]
        )
        self.generator = _hexadecimal("generator", texts["generator"], columns["generator"])
        self.modulus = _hexadecimal("modulus", texts["modulus"], columns["modulus"])
        if self.modulus < 1:
            raise _BadField(columns["modulus"], "modulus: found 0; expected at least 1")

    def declaration(self, place: Place) -> Declaration:
        return Declaration(
            name=f"moduli line {place.line} ({self.size})",
            place=place,
            modulus=self.modulus,
            generator=self.generator,
            purpose="key-agreement",
            protocol="ssh",
        )

    def remarks(self) -> Iterator[str]:
        """Where the record's own fields disagree, and why a server would not use it."""
        length = self.modulus.bit_length()
        if self.size != length - 1:
            yield (
                f"size is {self.size}; expected {length - 1}, one less than the "
                f"{length} bits of the modulus"
            )
        if self.type != SAFE_PRIME:
            meaning = TYPES.get(self.type, "not a type of the manual page")
            yield (
                f"type is {self.type} ({meaning}); servers use only type {SAFE_PRIME}, safe primes"
            )
        if self.tests & COMPOSITE:
            yield f"tests is {self.tests}, which says that the modulus was found composite"
        if not self.tests & MILLER_RABIN:
            yield f"tests is {self.tests}, which does not say that Miller-Rabin tests were done"
        if self.tests & MILLER_RABIN and self.trials == 0:
            yield "trials is 0, although tests says that Miller-Rabin tests were done"
        if self.tests > COMPOSITE | SIEVE | MILLER_RABIN:
            yield f"tests is {self.tests}, which has bits that the manual page does not know"


def _count(key: str, text: str, column: int) -> int:
    if not re.fullmatch(r"[0-9]{1,10}", text) or int(text) > _MAX_COUNT:
        raise _BadField(
            column, f"{key}: found {quoted(text)}; expected a decimal integer up to {_MAX_COUNT}"
        )
    return int(text)


def _hexadecimal(key: str, text: str, column: int) -> int:
    if not re.fullmatch(r"[0-9a-fA-F]+", text):
        raise _BadField(column, f"{key}: found {quoted(text)}; expected hexadecimal digits")
    try:
        return bounded_integer(text, 16)
    except ValueError as error:
        raise _BadField(column, f"{key}: {shorten(str(error), 200)}") from None
