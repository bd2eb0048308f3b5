"""Outside text made visible, and long numbers made short."""

import re
import sys
import unicodedata
from hashlib import sha256

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.report.text import HIDDEN, Number, clipped, visible, visible_record

HIDING = {"Cc", "Cf", "Cs", "Zl", "Zp"}


def test_every_character_that_controls_or_hides_is_known() -> None:
    """The pattern covers the Unicode categories it names, by Python's own Unicode tables."""
    hiding = [chr(c) for c in range(sys.maxunicode + 1) if unicodedata.category(chr(c)) in HIDING]

    assert len(hiding) > 2000
    assert [hex(ord(c)) for c in hiding if not re.fullmatch(HIDDEN, c)] == []


def test_no_character_that_shows_is_taken_for_a_hidden_one() -> None:
    """Letters, digits, punctuation and symbols stay, but for the fillers that draw nothing."""
    taken = {
        chr(c)
        for c in range(sys.maxunicode + 1)
        if re.fullmatch(HIDDEN, chr(c)) and unicodedata.category(chr(c))[0] in "LNPS"
    }

    assert taken == set("\u115f\u1160\u3164\uffa0")


@given(st.text())
def test_visible_text_has_nothing_hidden(text: str) -> None:
    """Whatever goes in, one line without hidden characters comes out, and stays as it is."""
    shown = visible(text)

    assert not re.search(HIDDEN, shown)
    assert visible(shown) == shown
    assert len(shown.splitlines()) <= 1


@given(st.text(st.characters(categories=["L", "N", "P", "S", "Zs"], exclude_characters="ㅤᅟᅠﾠ")))
def test_text_that_shows_is_not_changed(text: str) -> None:
    """Names in any script are left alone."""
    assert visible(text) == text


def test_what_was_hidden_is_written_out() -> None:
    """A reader sees which character it was, and where."""
    assert visible("gpj.\u202eexe") == "gpj.⟨U+202E⟩exe"
    assert visible("\x1b[31m") == "⟨U+001B⟩[31m"
    assert visible("one\r\n  two") == "one two"


def test_keys_and_values_of_a_record_become_visible() -> None:
    """Nothing in a record escapes, at whatever depth, and numbers are untouched."""
    assert visible_record({"a\x00": ["b\x01", 2, None, True, 1.5]}) == {
        "a⟨U+0000⟩": ["b⟨U+0001⟩", 2, None, True, 1.5]
    }


def test_what_a_record_shares_stays_shared() -> None:
    """A change is made once for all places, and what needs none is not copied."""
    same, other = {"c": "d"}, ["a\x00"]
    shown = visible_record({"x": [same, other], "y": [other, same]})

    assert shown == {"x": [{"c": "d"}, ["a⟨U+0000⟩"]], "y": [["a⟨U+0000⟩"], {"c": "d"}]}
    assert shown["x"][0] is shown["y"][1] is same
    assert shown["x"][1] is shown["y"][0]
    assert other == ["a\x00"]


@given(st.integers(0, 2**3000))
def test_a_number_is_named_by_length_and_digest(value: int) -> None:
    """Short or long, the digest is over the hex text, so that anybody can recompute it."""
    number = Number.read(value if value <= 2**53 else hex(value))

    assert number.length == value.bit_length()
    assert number.digest == sha256(hex(value).encode()).hexdigest()
    assert int(number.full, 0) == value
    assert len(number.short) <= 26
    assert number.is_long or number.short == number.full


def test_a_number_of_65536_bits_is_read() -> None:
    """The longest integer of the format has more digits than Python prints in decimal."""
    number = Number.read(hex(2**65536 - 1))

    assert number.length == 65536
    assert number.short == "0xffffffffff…ffffffff"


def test_other_text_is_no_number() -> None:
    """Only hex text is a number."""
    with pytest.raises(ValueError, match="invalid literal"):
        Number.read("0xnone")


def test_clipping_says_that_it_clipped() -> None:
    """An ellipsis stands for what is gone."""
    assert clipped("abcdef", 6) == "abcdef"
    assert clipped("abcdef", 4) == "abc…"
