"""Big integers as programs and configuration write them: a name, a sign, and digits.

Read are assignments, definitions of macros and keys with a value. The value is digits with or
without 0x, or in strings, which may go on in further strings; bytes in lists, as numbers or as
``\\x`` escapes; and words of the two libraries that are known to put the lowest first. Where two
readings are possible there is none: digits in a base that is not said, words in an order that is
not said, several names before one sign.
"""

import re
from collections.abc import Callable, Iterator

from auditor.core_scalars import bounded_integer

_NAME = r"(?<![\w.\-])(?P<name>[A-Za-z_][\w.\-]{0,80})[\"']?"
_DEFINED = r"^[ \t]*#[ \t]*define[ \t]+(?P<defined>[A-Za-z_]\w{0,80})[ \t]+"
_SIGN = (
    r"[ \t]*(?:\[[^\]\n]{0,60}\][ \t]*)?(?:,[ \t]*(?:_|ok|err)[ \t]*)?"
    r"(?:(?P<type>:[ \t]*(?:&(?:'\w{1,20})?)?[\w\[\];<>. ]{1,60}+=)|:=|=>|[:=])"
)
_ASSIGNED = rf"(?:{_NAME}{_SIGN}|{_DEFINED})[ \t]*(?:\\?\r?\n[ \t]*)?"
_CALLS = (
    r"(?:new[ \t]+)?(?:[\w.:]{1,40}+(?:\([\w.]{0,30}\)\.[\w.]{1,40}+)?!?\([ \t\r\n]*){0,3}"
    r"(?:\([ \t\r\n]*)?"
)
_JOINED = r"[\s+.\\]{0,80}"
_BYTE = r"(?:0[xX][0-9a-fA-F]{1,2}|[0-9]{1,3})(?:u8)?"
_WORD = r"0[xX][0-9a-fA-F]{1,16}[uUlL]{0,3}"

LONG_DIGITS = (
    re.compile(r"[0-9a-fA-F]{32}"),
    re.compile(rf"(?:{_BYTE}\s*,\s*){{16}}"),
    re.compile(rf"(?:{_WORD}\s*,\s*){{4}}"),
    re.compile(r"(?:[0-9a-fA-F]{2}:\s*){16}"),
    re.compile(r"(?:\\x[0-9a-fA-F]{2}){16}"),
)
"""One of these is in any text that holds a candidate."""

_SEVERAL_NAMES = re.compile(
    r"[ \t]*(?:(?:var|let|const|auto)[ \t]+)?\(?(?:[A-Za-z_][\w.]{0,80}[ \t]*,[ \t]*){1,20}"
)
_DECLARING = re.compile(
    r"[ \t]*(?:(?:const|constexpr|export|final|let|mut|private|pub|public|readonly|static|val|var)"
    r"[ \t]+){0,6}"
)
"""What stands before a name whose type follows it; elsewhere the colon means something else."""

_LONG = 40
"""Decimal digits from which on text without a letter is decimal: that hexadecimal digits have no
letter among 40 happens once in a hundred million times."""

_FEWEST_BYTES = 16
_LONGEST_BEFORE = 2_000


def assignments(text: str) -> Iterator[tuple[int, str, int]]:
    """The position, the name and the value of each big integer in ``text``, in no order.

    What an earlier form reads at a place, a later one does not read again.
    """
    taken: set[int] = set()
    for form, read in _FORMS:
        start = 0
        while found := form.search(text, start):
            group = "defined" if found.groupdict().get("defined") else "name"
            at = found.start(group)
            if found.groupdict().get("type") and not _DECLARING.fullmatch(_before(text, at)):
                start = found.end(group)
                continue
            start = found.end()
            if at not in taken:
                taken.add(at)
                value = None if _SEVERAL_NAMES.fullmatch(_before(text, at)) else read(found)
                if value is not None:
                    yield at, found[group], value


def _before(text: str, at: int) -> str:
    """What stands before ``at`` on its line, or the last of it."""
    reach = max(at - _LONGEST_BEFORE, 0)
    return text[text.rfind("\n", reach, at) + 1 or reach : at]


def _bytes(found: re.Match[str]) -> int | None:
    """Bytes, the highest first.

    Decimal ones have to look like bytes: one alone, or many of which not all are digits.
    """
    texts = [text.removesuffix("u8") for text in re.findall(_BYTE, found["digits"])]
    plain = [text for text in texts if text[:2].lower() != "0x"]
    if any(len(text) > 1 and text[0] == "0" for text in plain):
        return None
    values = [int(text, 0) for text in texts]
    many = len(values) >= _FEWEST_BYTES and max(values) > 9
    if max(values) > 255 or (plain and len(values) > 1 and not many):
        return None
    return _value(bytes(values).hex(), 16)


def _escaped(found: re.Match[str]) -> int | None:
    return _value("".join(re.findall(r"\\x([0-9a-fA-F]{2})", found["digits"])), 16)


def _words(found: re.Match[str]) -> int | None:
    """Words of a big number as the library keeps it, the lowest first."""
    words = [int(text.rstrip("uUlL"), 16) for text in re.findall(_WORD, found["digits"])]
    width = 64 if max(words) >= 2**32 else 32
    return _value("".join(f"{word:0{width // 4}x}" for word in reversed(words)), 16)


def _marked(found: re.Match[str]) -> int | None:
    return _value(found["digits"], 16)


def _colons(found: re.Match[str]) -> int | None:
    return _value(re.sub(r"[^0-9a-fA-F]", "", found["digits"]), 16)


def _digits(found: re.Match[str]) -> int | None:
    """Digits whose base is said behind them or is plain from them."""
    text = found["digits"]
    base = found.groupdict().get("base")
    marked = re.search(r"0[xX]|:", text) is not None
    digits = re.sub(r"0[xX]", "", text, count=1) if marked else text
    digits = re.sub(r"[^0-9a-fA-F]", "", digits)
    said = int(base) if base and 2 <= int(base) <= 36 else None
    if said not in (None, 10, 16) or not digits:
        return None
    if marked or re.search("[a-fA-F]", digits):
        return None if said == 10 else _value(digits, 16)
    if said is None and 1 < len(digits) < _LONG:
        return None
    return _value(digits, said or 10)


def _value(digits: str, base: int) -> int | None:
    try:
        return bounded_integer(digits, base)
    except ValueError:
        return None


def _form(pattern: str) -> re.Pattern[str]:
    return re.compile(pattern, re.MULTILINE)


_FORMS: tuple[tuple[re.Pattern[str], Callable[[re.Match[str]], int | None]], ...] = (
    (
        _form(
            rf"(?:BN_ULONG|mp_limb_t)[ \t]+{_NAME}[ \t]*\[[^\]\n]{{0,60}}\][ \t]*=\s{{0,80}}"
            rf"\{{\s*(?P<digits>{_WORD}(?:\s*,\s*{_WORD})*)\s*,?\s*\}}"
        ),
        _words,
    ),
    (
        _form(
            rf"{_ASSIGNED}[^=;{{}}\n\"']{{0,60}}?[{{\[]\s*"
            rf"(?P<digits>{_BYTE}(?:\s*,\s*{_BYTE})*)\s*,?\s*[}}\]]"
        ),
        _bytes,
    ),
    *(
        (
            _form(
                rf"{_ASSIGNED}{_CALLS}[bBuUL]?(?P<digits>{quote}(?:\\x[0-9a-fA-F]{{2}})+{quote}"
                rf"(?:{_JOINED}[bBuUL]?{quote}(?:\\x[0-9a-fA-F]{{2}})+{quote})*)"
            ),
            _escaped,
        )
        for quote in ('"', "'")
    ),
    *(
        (
            _form(
                rf"{_ASSIGNED}{_CALLS}[bBrRuUL]?(?P<digits>{quote}(?:0[xX])?[0-9a-fA-F:\s]+{quote}"
                rf"(?:{_JOINED}[bBrRuUL]?{quote}[0-9a-fA-F:\s]+{quote})*)"
                r"(?:[ \t\r\n]{0,80},[ \t\r\n]{0,80}(?P<base>[0-9]{1,3})\b)?"
            ),
            _digits,
        )
        for quote in ('"', "'")
    ),
    (
        _form(
            rf"(?:{_NAME}{_SIGN}|{_DEFINED})[^=;\n0\[{{]{{0,40}}?0[xX](?P<digits>[0-9a-fA-F]+)"
            r"(?![0-9a-fA-F])(?![\"'][\s+.\\]{1,80}[\"'])"
        ),
        _marked,
    ),
    (
        _form(
            rf"(?:{_NAME}{_SIGN}|{_DEFINED})[ \t]*(?P<digits>[0-9a-fA-F]{{128,}})[nL]?(?![\w:.])"
        ),
        _digits,
    ),
    (
        _form(
            rf"{_NAME}[ \t]*[:=][ \t]*(?:[|>][ \t]*)?\r?\n?[ \t]*"
            r"(?P<digits>[0-9a-fA-F]{2}(?::\s{0,200}[0-9a-fA-F]{2})+)"
        ),
        _colons,
    ),
)
