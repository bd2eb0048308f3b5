"""The distinct moduli of a record and their picture."""

import math
from itertools import combinations

from auditor.report.moduli_view import LEFT, MOST_DOTS, RIGHT, moduli, moduli_picture
from auditor.report.view import view
from tests.report.records import fixture


def test_every_set_is_counted_with_its_modulus_once() -> None:
    """Uses add up to the declared sets; two places of one set count twice."""
    record = fixture("harbour")
    found = moduli(view(record).sheets)

    assert len(found) == len(record["overview"]["moduli"])
    assert sum(modulus.uses for modulus in found) == len(record["parameter_sets"])
    assert {modulus.number.digest for modulus in found} == {
        modulus["digest"] for modulus in record["overview"]["moduli"]
    }
    shared = next(modulus for modulus in found if modulus.uses == 2)
    assert shared.files == ("samples/cranes.yaml", "samples/depot/cranes.yaml")


def test_a_modulus_is_judged_by_its_worst_set() -> None:
    """Worst position first, then least strength; a table has the last word."""
    found = moduli(view(fixture("harbour")).sheets)

    assert [(modulus.position, modulus.bits) for modulus in found] == [
        ("hold", 0),
        ("hold", 35.93),
        ("open", 112),
        ("conditions", 80),
        ("no objection", 112),
    ]


def test_one_bad_use_marks_the_modulus() -> None:
    """A modulus on hold in one set is on hold, however well it does in another."""
    record = fixture("harbour")
    crane = next(s for s in record["parameter_sets"] if s["name"] == "crane telemetry")
    better = crane | {"digest": "0" * 64, "position": "no objection", "routes": []}
    record["parameter_sets"] = [better, crane]
    (modulus,) = moduli(view(record).sheets)

    assert [sheet.position for sheet in modulus.sheets] == ["hold", "no objection"]
    assert (modulus.position, modulus.bits) == ("hold", 35.93)


def test_dots_do_not_cover_each_other_and_stay_inside() -> None:
    """Also where thirty moduli have the same length and strength."""
    record = fixture("harbour")
    first = record["parameter_sets"][0]
    record["parameter_sets"] = [
        first
        | {
            "digest": f"{number:064x}",
            "declaration": first["declaration"] | {"modulus": hex(2**2047 + number)},
        }
        for number in range(30)
    ]
    picture = moduli_picture(moduli(view(record).sheets))
    assert picture is not None

    assert len(picture.dots) == 30
    for one, other in combinations(picture.dots, 2):
        assert math.dist((one.x, one.y), (other.x, other.y)) >= one.radius + other.radius
    for dot in picture.dots:
        assert dot.x - dot.radius >= LEFT
        assert dot.x + dot.radius <= RIGHT


def test_what_is_not_drawn_is_counted() -> None:
    """The picture holds so many dots, and says how many moduli it leaves out."""
    record = fixture("harbour")
    first = record["parameter_sets"][0]
    record["parameter_sets"] = [
        first
        | {
            "digest": f"{number:064x}",
            "declaration": first["declaration"] | {"modulus": hex(2**2047 + number)},
        }
        for number in range(MOST_DOTS + 5)
    ]
    picture = moduli_picture(moduli(view(record).sheets))
    assert picture is not None

    assert (len(picture.dots), picture.left_out) == (MOST_DOTS, 5)


def test_stronger_stands_higher_and_longer_further_right() -> None:
    """The axes are what they say."""
    found = moduli(view(fixture("harbour")).sheets)
    picture = moduli_picture(found)
    assert picture is not None

    assert [x for _, x in picture.lengths] == sorted(x for _, x in picture.lengths)
    heights = [y for _, y in picture.levels]
    assert heights == sorted(heights, reverse=True)
    assert {dot.position for dot in picture.dots} == {modulus.position for modulus in found}
    assert moduli_picture(found[:1]) is None
