"""Braces and semicolons in configuration: the pieces of a line, and the blocks that stand open.

Many languages put several statements on a line, between ``{``, ``;`` and ``}``; others use the same
marks for something else: a semicolon begins a comment or joins algorithms. A piece is taken for a
statement only where the marks around it leave no doubt.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import count, pairwise

_MARK = re.compile(r"\\.|[\"'{};,]")
_BEFORE_A_KEY = re.compile(
    r",[ \t]{0,20}(?:\"[\w.\- ]{1,80}\"[ \t]{0,20}:|[A-Za-z][\w.\-]{0,80}:(?=[ \t\[]))"
)
_OF_A_VARIABLE = ("$", "%", "#", "@", "\\")
"""What stands before the brace of a variable, and not before that of a block."""

_MOST_BLOCKS = 100


@dataclass(frozen=True, slots=True)
class Scope:
    """A block, or a section that is told by indentation: a number of its own, and its heading."""

    number: int
    heading: str


@dataclass(frozen=True, slots=True)
class Piece:
    """A part of a line: its text, the column before it, and the marks around it.

    ``opened`` and ``closed`` are empty at the ends of the line. ``spaced`` says that a blank stands
    before the mark on the left, as before the semicolon of a comment.
    """

    text: str
    shift: int
    opened: str
    closed: str
    spaced: bool

    def is_statement(self, inside: bool) -> bool:
        """Whether the marks leave no doubt; ``inside`` says that a block stands open around it."""
        if not self.text.strip() or self.closed == "{" or not (self.opened or self.closed):
            return False
        ended = self.closed in (";", "}")
        match self.opened:
            case "":
                return ended
            case "{":
                return True
            case ",":
                return inside
            case _:
                return inside or (ended and not self.spaced)


def pieces(line: str) -> Iterator[Piece]:
    """The parts of ``line`` between braces, semicolons, and commas before a key with a colon.

    Marks in quotes are none; where a quote is never closed it is an apostrophe.
    """
    marks = [0, *_marks(line), len(line)]
    for number, (left, right) in enumerate(pairwise(marks)):
        first, last = number == 0, number == len(marks) - 2
        start = left if first else left + 1
        yield Piece(
            text=line[start:right],
            shift=start,
            opened="" if first else line[left],
            closed="" if last else line[right],
            spaced=not first and line[left - 1 : left].isspace(),
        )


def _marks(line: str) -> list[int]:
    """The positions of the marks."""
    found, closed = _marks_outside(line, "\"'")
    return found if closed else _marks_outside(line, "")[0]


def _marks_outside(line: str, quotes: str) -> tuple[list[int], bool]:
    """The positions of the marks that are not in ``quotes``, and whether these are all closed."""
    quote, variables, found = "", 0, []
    for mark in _MARK.finditer(line):
        text, at = mark[0], mark.start()
        if text in ("'", '"'):
            if text in quotes and quote in ("", text):
                quote = "" if quote else text
        elif quote or len(text) > 1 or (text == "," and not _BEFORE_A_KEY.match(line, at)):
            continue
        elif text == "{" and line.endswith(_OF_A_VARIABLE, 0, at):
            variables += 1
        elif text == "}" and variables:
            variables -= 1
        else:
            found.append(at)
    return found, not quote


@dataclass(slots=True)
class Blocks:
    """The blocks that stand open while the pieces of a text go by."""

    _open: list[Scope] = field(default_factory=list)
    _deeper: int = 0
    _heading: str = ""
    _numbers: Iterator[int] = field(default_factory=lambda: count(1))

    @property
    def scopes(self) -> tuple[Scope, ...]:
        """The open blocks, the outermost first."""
        return tuple(self._open)

    def after(self, piece: Piece) -> None:
        """Take note of ``piece`` and the mark behind it.

        The heading of a block may stand on a line of its own.
        """
        text = piece.text.strip()
        if piece.closed == "{":
            self._enter(text or self._heading)
        elif piece.closed == "}":
            self._leave()
        self._heading = "" if piece.closed else text or self._heading

    def _enter(self, heading: str) -> None:
        if len(self._open) < _MOST_BLOCKS:
            self._open.append(Scope(next(self._numbers), heading))
        else:
            self._deeper += 1

    def _leave(self) -> None:
        if self._deeper:
            self._deeper -= 1
        elif self._open:
            self._open.pop()
