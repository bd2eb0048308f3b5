"""Text configuration as statements: a key and a list of words, each with its place.

Configuration languages differ in how they write ``key = a, b`` and hardly in what it means. Read
here are a key, a separator and a list of words on one line, or on a piece of it between braces and
semicolons, and the lines that continue the list; comments are not. A line may be a statement in
more than one way (``dh group 14``); whoever asks knows the keys.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache

from auditor.intake.names_blocks import Blocks, Scope, pieces

_COMMENT_LINE = re.compile(r"\s*(?:#|//|/\*|\*|;|!|--)")
_COMMENT_END = re.compile(r"(?:^|(?<=[\s;}]))(?:#|//).*$")
_COMMENT_INSIDE = re.compile(r"(?:^|(?<=[\s;{}]))/\*.*?\*/")
_LEAD = r"^[\s\-\"'{\[,(]*(?:(?:set|export|option)\s+)?"
_NAME = r"[A-Za-z][\w.\-]{0,80}"
_FORMS = (
    re.compile(
        rf"{_LEAD}(?P<key>{_NAME}(?:[ ][\w.\-]{{1,40}}){{0,3}})[\"']?"
        r"\s*(?:\+=|:=|=>|[:=])\s*(?P<value>.*)$"
    ),
    re.compile(rf"{_LEAD}(?P<key>{_NAME})\s+(?P<value>\S.*)$"),
    re.compile(rf"{_LEAD}(?P<key>{_NAME}\s+{_NAME})\s+(?P<value>\S.*)$"),
    re.compile(r"^.*\s-o\s*[\"']?(?P<key>[A-Za-z]\w{0,80})(?:=|\s+)(?P<value>\S+)"),
)
_WORD = re.compile(r"[^\s,:;\"'\[\](){}=<>\\]+(?:==?(?=[\s,:;\"'\])}]|$))?")
_ITEMS = re.compile(r"(?:[\w@.+/\-^!?*\"',;\s\\\])}]|=(?=[\"',=]|\s*$))*")
"""A line that is nothing but items of a list, or the end of one."""

_BETWEEN_WORDS = re.compile(r"(?<=[a-z0-9])(?=[A-Z])|(?<=[A-Z])(?=[A-Z][a-z])|[^A-Za-z0-9]+")
_OPENING, _CLOSING = re.compile(r"[\[({]"), re.compile(r"[\])}]")

_LONGEST_LINE = 4_000
_MOST_LINES = 100


@dataclass(frozen=True, slots=True)
class Word:
    """One word of a value, as written, and its place."""

    text: str
    line: int
    column: int


@dataclass(frozen=True, slots=True)
class Statement:
    """A key and its value: the text on its first line, and the words on all its lines.

    The value begins on ``line`` behind column ``shift``; ``rest`` are the lines below, which may go
    on with it. ``scopes`` are what it stands in, the outermost first: the section that the last
    unindented line above an indented statement begins, and the blocks in braces.
    """

    key: str
    value: str
    line: int
    shift: int
    rest: Sequence[str]
    scopes: tuple[Scope, ...]

    @property
    def words(self) -> tuple[Word, ...]:
        """The words of the value on all its lines; most statements are never asked for them."""
        first = words_in(self.value, self.line, self.shift)
        return (*first, *_continued(self.value, self.line, self.rest))

    @property
    def parts(self) -> frozenset[str]:
        """The words that the key is made of, in lower case."""
        return _parts(self.key)


@lru_cache(maxsize=4096)
def _parts(key: str) -> frozenset[str]:
    return frozenset(words_of(key))


def words_of(name: str) -> list[str]:
    """The words that an identifier is made of, in lower case: by capitals and by punctuation."""
    return _BETWEEN_WORDS.sub(" ", name).lower().split()


def statements(text: str) -> Iterator[Statement]:
    """Every statement of ``text`` in line order; on a line those of its pieces come first.

    A whole line is read without regard to the marks in it, which mean something else in some
    languages.
    """
    lines = [without_comment(line) for line in text.split("\n")]
    section: tuple[Scope, ...] = ()
    blocks = Blocks()
    for index, line in enumerate(lines):
        if not line:
            continue
        indented = line[:1].isspace()
        if not indented:
            section = (Scope(-index - 1, line),)
        around = section if indented else ()
        outside = (*around, *blocks.scopes)
        for piece in pieces(line):
            if piece.is_statement(inside=bool(blocks.scopes)):
                rest = () if piece.closed else lines[index + 1 : index + 1 + _MOST_LINES]
                scopes = (*around, *blocks.scopes)
                yield from _read(piece.text, piece.shift, index + 1, rest, scopes)
            blocks.after(piece)
        yield from _read(line, 0, index + 1, lines[index + 1 : index + 1 + _MOST_LINES], outside)


def _read(
    text: str, shift: int, line: int, rest: Sequence[str], scopes: tuple[Scope, ...]
) -> Iterator[Statement]:
    """The statements that ``text`` is, from column ``shift`` of ``line``; ``rest`` may go on."""
    for form in _FORMS:
        if found := form.match(text):
            start = shift + found.start("value")
            yield Statement(found["key"], found["value"], line, start, rest, scopes)


def without_comment(line: str) -> str:
    """``line`` without its comment, every other character at its place; empty if too long."""
    if len(line) > _LONGEST_LINE or _COMMENT_LINE.match(line):
        return ""
    closed = line.rfind("*/") + 2
    if closed > 1:
        inside = _COMMENT_INSIDE.sub(lambda found: " " * len(found[0]), line[:closed])
        line = inside + line[closed:]
    return _COMMENT_END.sub("", line).rstrip()


def _continued(value: str, line: int, rest: Sequence[str]) -> Iterator[Word]:
    """The words on the lines after ``line`` that belong to the value begun there.

    They do as items of a block list, up to a closing bracket, or after a comma or a backslash, as
    long as a line is nothing but items.
    """
    bracketed = open_brackets = _balance(value)
    last = value
    for number, text in enumerate(rest, line + 1):
        block_item = not value and text.lstrip().startswith("- ")
        after_comma = bracketed <= 0 and last.endswith((",", "\\"))
        goes_on = block_item or open_brackets > 0 or after_comma
        if not goes_on or not _ITEMS.fullmatch(text):
            break
        yield from words_in(text, number, 0)
        open_brackets += _balance(text)
        last = text


def _balance(text: str) -> int:
    return len(_OPENING.findall(text)) - len(_CLOSING.findall(text))


def words_in(text: str, line: int, shift: int) -> Iterator[Word]:
    """The words of ``text``, which begins behind column ``shift`` of ``line``."""
    for word in _WORD.finditer(text):
        if word[0].strip("-"):
            yield Word(word[0], line, word.start() + shift + 1)
