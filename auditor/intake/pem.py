"""Textual encodings (RFC 7468) wherever they stand in a text: in files of their own, indented in
configuration, behind comment marks, in string literals of one line or many.

Base64 is judged strictly; only what the surrounding text adds is taken away: the characters before
a BEGIN line on each of the following lines, quotes and escaped line ends.
"""

import re
from binascii import Error, a2b_base64
from collections.abc import Iterator
from dataclasses import dataclass

_WORD = r"[!-,.-~]{1,64}"
_MARKER = re.compile(rf"-----(BEGIN|END) ({_WORD}(?:[- ]{_WORD}){{0,7}})-----")
_ESCAPED_END = re.compile(r"\\+[nrt]|\\(?=\r?\n)")
_STARTS_LIKE_BASE64 = re.compile(r"\s*[A-Za-z0-9+/=]{16}")
_PLACEHOLDER = re.compile(r"^\s*(?:[{<\[($%].*|\.\.\.|…)\s*$", re.MULTILINE)
_QUOTES = ('"', "'", "`")
_LONGEST_BEFORE = 100


class PemError(ValueError):
    """A block cannot be decoded; the message says why and repeats nothing of it."""


class Placeholder(PemError):
    """A block is a template: something else stands where base64 text would."""


@dataclass(frozen=True, slots=True)
class Block:
    """One block: its label, the place of its BEGIN line, and the text up to its end.

    ``before`` is what stands before BEGIN on its line, at most 100 characters of it; ``end`` is the
    label of the END line, None where there is none.
    """

    label: str
    line: int
    column: int
    before: str
    text: str
    end: str | None

    @property
    def encrypted(self) -> bool:
        """Whether headers of RFC 1421, as in traditional key files, call it encrypted."""
        return "ENCRYPTED" in self._parts()[0]

    def data(self) -> bytes:
        """The bytes that the base64 text encodes; PemError with the reason otherwise."""
        if self.end is None:
            raise PemError("no END line follows")
        if self.end != self.label:
            raise PemError(f"the END line says {self.end!r}")
        text = "".join(self._parts()[1].split())
        if not text:
            raise PemError("nothing stands between the BEGIN and END lines")
        try:
            return a2b_base64(text.encode("ascii"), strict_mode=True)
        except (Error, UnicodeEncodeError) as error:
            if _PLACEHOLDER.search(self._parts()[1]):
                raise Placeholder("a placeholder stands where base64 text would") from None
            what = str(error) if isinstance(error, Error) else "a character is not ASCII"
            raise PemError(f"not base64 text: {what}") from None

    def _parts(self) -> tuple[str, str]:
        """Headers and base64 text, without what the surrounding text adds."""
        lines = _own_text(self.before, self.text).splitlines()
        while lines and not lines[0].strip():
            lines.pop(0)
        if not lines or ":" not in lines[0]:
            return "", "\n".join(lines)
        blank = next((at for at, line in enumerate(lines) if not line.strip()), len(lines))
        return "\n".join(lines[:blank]), "\n".join(lines[blank:])


@dataclass(frozen=True, slots=True)
class StrayEnd:
    """An END line that closes nothing."""

    label: str
    line: int
    column: int


def blocks(text: str) -> Iterator[Block | StrayEnd]:
    """Every block of ``text`` in order; a block that is not closed ends where the next begins.

    A marker inside other text, such as a program that looks for one, begins no block unless base64
    text follows.
    """
    markers = list(_MARKER.finditer(text))
    line, start, counted = 1, 0, 0
    closed = False
    for marker, after in zip(markers, [*markers, None][1:], strict=True):
        at = marker.start()
        line += text.count("\n", counted, at)
        start = text.rfind("\n", counted, at) + 1 or start
        counted = at
        kind, label = marker.groups()
        before = text[max(start, at - _LONGEST_BEFORE) : at]
        alone = not before.strip() and not _rest_of_line(text, marker.end()).strip()
        if kind == "END":
            if alone and not closed:
                yield StrayEnd(label, line, at - start + 1)
            closed = False
            continue
        body = text[marker.end() : after.start() if after else len(text)]
        closed = after is not None and after[1] == "END"
        if alone or _STARTS_LIKE_BASE64.match(_own_text(before, body[:4096])):
            end = after[2] if after and closed else None
            yield Block(label, line, at - start + 1, before, body, end)


def _rest_of_line(text: str, at: int) -> str:
    return text[at : at + _LONGEST_BEFORE].partition("\n")[0]


def _own_text(before: str, body: str) -> str:
    """``body`` without quotes, escapes and line beginnings that belong to the surrounding text."""
    body = _ESCAPED_END.sub("\n", body)
    mark = before.rstrip()
    if mark.endswith(_QUOTES):
        return "".join(body.split(mark[-1])[::2])
    return "\n".join(line.removeprefix(mark) for line in body.splitlines())
