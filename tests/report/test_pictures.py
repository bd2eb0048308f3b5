"""The pictures: geometry, words, and contrast."""

import re
from itertools import pairwise
from math import gcd
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from sympy import factorint, n_order, totient

from auditor.data_files import data
from auditor.report.order_view import GroupOrders
from auditor.report.pictures import (
    LEFT,
    MOST_SEGMENTS,
    PARTS,
    RIGHT,
    order_strip,
    routes_picture,
)
from tests.report.records import fixture

FACTORS = st.dictionaries(
    st.sampled_from([2, 3, 5, 7, 11, 101, 2**61 - 1, 2**127 - 1]), st.integers(1, 9)
)


@given(FACTORS, st.sampled_from([1, 15, 2**1024 + 1]), st.booleans())
def test_pieces_fill_the_strip_without_gap_or_overlap(
    factors: dict[int, int], rest: int, known: bool
) -> None:
    """Left to right, each piece begins where the last one ends, and none is too thin to see."""
    strip = order_strip(factors, rest, {2: 1} if known else None)
    if strip is None:
        assert not factors
        assert rest == 1
        return

    assert strip.segments[0].x == LEFT
    for one, next_one in pairwise(strip.segments):
        assert one.x + one.width == pytest.approx(next_one.x, abs=0.05)
    last = strip.segments[-1]
    assert last.x + last.width == pytest.approx(RIGHT, abs=0.05)
    assert min(segment.width for segment in strip.segments) >= 4.9


def test_a_strip_marks_the_generator_and_leaves_the_unknown_unknown() -> None:
    """A power partly in the subgroup is drawn in two pieces; the rest is never given a part."""
    strip = order_strip({2: 3, 7: 1}, 2**300 + 1, {2: 1})
    assert strip is not None

    assert [(s.part, s.label) for s in strip.segments] == [
        ("inside", "2"),
        ("outside", "2^2"),
        ("outside", "7"),
        ("unfactored", "composite rest"),
    ]
    assert "not factored" in strip.description
    undecided = order_strip({2: 3, 7: 1}, 1, None)
    assert undecided is not None
    assert undecided.parts == ("undecided",)


def test_very_many_factors_are_gathered() -> None:
    """The smallest are drawn as one piece for each part, and counted."""
    primes = [p for p in range(2, 400) if factorint(p) == {p: 1}]
    strip = order_strip(dict.fromkeys(primes, 1), 1, dict.fromkeys(primes[::2], 1))
    assert strip is not None

    assert len(strip.segments) <= MOST_SEGMENTS
    assert "small prime powers" in strip.description


def claims_about(n: int, element: int) -> dict[str, Any]:
    """Complete claims about the group modulo ``n``, by a general-purpose library."""
    about = [n, *(p - 1 for p in factorint(n) if p > 2)]
    claims: dict[str, Any] = {
        f"factorization-{m}": {
            "kind": "factorization",
            "statement": {"n": m, "factors": [[p, e] for p, e in factorint(m).items()], "rest": 1},
        }
        for m in about
    }
    if factorint(n) == {n: 1}:
        claims["prime-1"] = {"kind": "prime", "statement": {"n": n}}
    order = [[p, e] for p, e in factorint(n_order(element, n)).items()]
    claims["order-1"] = {
        "kind": "order",
        "statement": {"modulus": n, "element": element, "known": order, "rest": 1},
    }
    return claims


@pytest.mark.parametrize("n", [5, 23, 10007, 9, 49, 2 * 49, 15, 1001, 2**5 * 9, 3**4 * 7**2 * 11])
def test_a_strip_from_claims_agrees_with_a_library(n: int) -> None:
    """Order of the group and of an element, for prime, prime-power and composite moduli (sympy)."""
    element = next(a for a in range(2, n) if gcd(a, n) == 1)
    strip = GroupOrders.read(claims_about(n, element)).strip({"modulus": n, "generator": element})
    assert strip is not None

    inside, whole = 1, 1
    for segment in strip.segments:
        prime, _, exponent = segment.label.partition("^")
        value = int(prime) ** int(exponent or 1)
        whole *= value
        inside *= value if segment.part == "inside" else 1
    assert whole == totient(n)
    assert inside == n_order(element, n)


def test_no_strip_is_drawn_from_what_was_not_claimed() -> None:
    """Without a claim that the modulus is prime, n - 1 is not taken for the group order."""
    claims = claims_about(23, 5)
    del claims["prime-1"]
    assert GroupOrders.read(claims).strip({"modulus": 24, "generator": 5}) is None

    del claims["factorization-22"]
    assert GroupOrders.read(claims).strip({"modulus": 23, "generator": 5}) is None


def test_the_most_complete_claim_is_drawn() -> None:
    """A claim with a smaller rest replaces one that knew less, in whatever order they come."""
    less = {"kind": "factorization", "statement": {"n": 22, "factors": [], "rest": 22}}
    claims = claims_about(23, 5)
    for found in ({"a": less, **claims}, {**claims, "z": less}):
        strip = GroupOrders.read(found).strip({"modulus": 23, "generator": 5})
        assert strip is not None
        assert "unfactored" not in strip.parts


def test_routes_stand_where_their_figures_say() -> None:
    """Order on the scale is order of the figures; beyond the scale is said, not drawn."""
    crane = next(s for s in fixture("harbour")["parameter_sets"] if s["name"] == "crane telemetry")
    picture = routes_picture(crane["routes"], 112)
    assert picture is not None

    assert [mark.model_x for mark in picture.marks] == sorted(m.model_x for m in picture.marks)
    confined = picture.marks[0]
    assert confined.short
    assert confined.at_most
    assert confined.model_x < picture.required_x
    assert "112 by table" in picture.marks[2].figures
    assert not picture.marks[2].short
    for route in crane["routes"]:
        assert f"{route['bits']:.2f}" in picture.description


def test_a_figure_beyond_the_scale_has_an_arrow() -> None:
    """1023 bits are not drawn as if they were the end of the scale."""
    routes = fixture("one-set")["parameter_sets"][0]["routes"]
    picture = routes_picture(routes, 112)
    assert picture is not None

    assert [mark.beyond for mark in picture.marks] == [False, False, True]
    assert routes_picture([], 112) is None


def luminance(colour: str) -> float:
    """Relative luminance, WCAG 2.2, definition of that term."""
    digits = colour.lstrip("#")
    digits = "".join(2 * digit for digit in digits) if len(digits) == 3 else digits
    channels = [int(digits[i : i + 2], 16) / 255 for i in (0, 2, 4)]
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in channels]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: str, other: str) -> float:
    """Contrast ratio, WCAG 2.2, definition of that term."""
    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def palettes() -> list[dict[str, str]]:
    """The colours of light, dark and print, as the style sheet has them."""
    css = (data("reports") / "report.css").read_text(encoding="utf-8")
    blocks = re.findall(r":root \{([^}]*)\}", css)
    return [dict(re.findall(r"--(\w+): (#[0-9a-f]{3,6})", block)) for block in blocks]


def test_contrast_by_a_published_value() -> None:
    """Black on white is 21 to 1, by the definition (WCAG 2.2); equal colours are 1 to 1."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21)
    assert contrast("#abc", "#aabbcc") == 1


@pytest.mark.parametrize("palette", palettes(), ids=["light", "dark", "print"])
def test_text_and_marks_in_pictures_have_contrast(palette: dict[str, str]) -> None:
    """Text 4.5 to 1 on every ground it stands on (WCAG 2.2, 1.4.3), marks 3 to 1 (1.4.11)."""
    for ground in ("paper", "wash"):
        for text in ("ink", "quiet", "unmet", "unsettled"):
            assert contrast(palette[text], palette[ground]) >= 4.5, (text, ground)
    for mark in ("ink", "unmet", "unsettled"):
        assert contrast(palette[mark], palette["paper"]) >= 3


def test_three_palettes_are_checked() -> None:
    """Light, dark and print each name every colour that the pictures use."""
    assert [set(palette) >= {"paper", "ink", "quiet", "unmet"} for palette in palettes()] == [
        True
    ] * 3


def test_every_part_has_a_meaning_and_a_style() -> None:
    """No piece is drawn that the legend or the style sheet does not know."""
    css = (data("reports") / "report.css").read_text(encoding="utf-8")

    for part in PARTS:
        assert f".{part} " in css
