"""Text configuration as statements: a key and a list of words, each with its place.

Configuration languages differ in how they write ``key = a, b`` and hardly in what it means. Read
here are a key, a separator and a list of words on one line, and the lines that continue the list;
comments are not. A line may be a statement in more than one way (``dh group 14``); whoever asks
knows the keys.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass

_COMMENT_LINE = re.compile(r"\s*(?:#|//|/\*|\*|;|!|--)")
_COMMENT_END = re.compile(r"(?:^|\s)(?:#|//).*$")
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

    ``section`` is the last unindented line above an indented statement, empty elsewhere.
    """

    key: str
    value: str
    words: tuple[Word, ...]
    section: str

    @property
    def parts(self) -> frozenset[str]:
        """The words that the key is made of, in lower case."""
        return frozenset(words_of(self.key))


def words_of(name: str) -> list[str]:
    """The words that an identifier is made of, in lower case: by capitals and by punctuation."""
    return _BETWEEN_WORDS.sub(" ", name).lower().split()


def statements(text: str) -> Iterator[Statement]:
    """Every statement of ``text`` in line order."""
    lines = [_without_comment(line) for line in text.split("\n")]
    unindented = ""
    for index, line in enumerate(lines):
        indented = line[:1].isspace()
        if line and not indented:
            unindented = line
        for form in _FORMS if line else ():
            if found := form.match(line):
                words = _words(found["value"], index + 1, found.start("value"))
                more = _continued(found["value"], index + 1, lines)
                section = unindented if indented else ""
                yield Statement(found["key"], found["value"], (*words, *more), section)


def _without_comment(line: str) -> str:
    if len(line) > _LONGEST_LINE or _COMMENT_LINE.match(line):
        return ""
    return _COMMENT_END.sub("", line).rstrip()


def _continued(value: str, index: int, lines: list[str]) -> Iterator[Word]:
    """The words on the lines from ``index`` that belong to the value begun above them.

    They do as items of a block list, up to a closing bracket, or after a comma or a backslash, as
    long as a line is nothing but items.
    """
    bracketed = open_brackets = _balance(value)
    last = value
    for number, line in enumerate(lines[index : index + _MOST_LINES], index + 1):
        block_item = not value and line.lstrip().startswith("- ")
        after_comma = bracketed <= 0 and last.endswith((",", "\\"))
        goes_on = block_item or open_brackets > 0 or after_comma
        if not goes_on or not _ITEMS.fullmatch(line):
            break
        yield from _words(line, number, 0)
        open_brackets += _balance(line)
        last = line


def _balance(text: str) -> int:
    return len(_OPENING.findall(text)) - len(_CLOSING.findall(text))


def _words(text: str, line: int, shift: int) -> Iterator[Word]:
    for word in _WORD.finditer(text):
        if word[0].strip("-"):
            yield Word(word[0], line, word.start() + shift + 1)
