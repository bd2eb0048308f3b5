"""Many sets asked about together: each question once, with all its sets and places."""

import secrets
from dataclasses import replace

import pytest

from auditor.advice.ask import ORDER, Asker, seconds_per_curve
from auditor.advice.situations import Inquiry, inquire
from auditor.declaration import EVERYBODY, Declaration, Party, Place
from auditor.facts import vocabulary
from auditor.review import Surroundings, census, investigate
from auditor.rulebooks.loading import load_all
from auditor.run_values import RunValues
from auditor.search.plan import LEVELS
from tests.facts.test_worked_numbers import GROUP_23, GROUP_24, QUICK, claims, group
from tests.test_documents import ROOT

BOOKS = load_all(["group-structure", "strength"], vocabulary())
KNOWN = claims(23, GROUP_23)
for claim in claims(24, GROUP_24):
    KNOWN.add([claim])


def inquiry(*declarations: Declaration) -> Inquiry:
    """What is worth asking about these sets of RFC 5114 groups."""
    return inquire(declarations, Asker(KNOWN, QUICK, BOOKS))


def at(declaration: Declaration, path: str) -> Declaration:
    """The same set in another place."""
    return replace(declaration, name=f"set in {path}", place=Place(path, 1))


SILENT = group(24, GROUP_24, bits=256, use="static")
UNCHECKED = group(24, GROUP_24, bits=256, use="static", checks=())


def test_equal_sets_are_one_member_with_their_places() -> None:
    """Twelve files with the same numbers and usage: one member, asked about once."""
    (found,) = inquiry(*(at(UNCHECKED, f"{number}.pem") for number in range(12))).situations
    (member,) = found.members

    assert [item.place.path for item in member.declarations] == [f"{n}.pem" for n in range(12)]
    assert len(found.sets) == 12
    assert all(effect.members == (0,) for effect in found.effects)


def test_sets_that_are_used_alike_are_one_question() -> None:
    """Two groups, the same usage, the same key open; another usage is another question."""
    other = group(23, GROUP_23, bits=256, use="static")
    found = inquiry(SILENT, UNCHECKED, other).situations
    asked = next(item for item in found if len(item.members) == 2)

    assert len(found) == 2
    assert "peer_check" in asked.open_keys
    assert {m.declarations[0].modulus for m in asked.members} == {SILENT.modulus, other.modulus}


def test_the_width_that_a_file_states_makes_no_question_of_its_own() -> None:
    """Files state another one for each set."""
    sets = [group(24, GROUP_24, bits=bits, use="static") for bits in (225, 256)]
    (found,) = inquiry(*sets).situations

    assert len(found.members) == 2


def test_an_effect_is_told_once_for_all_it_is_about() -> None:
    """The same answers between the same positions: one effect, with those it concerns."""
    other = group(23, GROUP_23, bits=256, use="static")
    (found,) = inquiry(SILENT, other).situations
    keys = [
        (e.words, e.effects[0].before.position, e.effects[0].after.position) for e in found.effects
    ]

    assert len(keys) == len(set(keys))
    assert any(effect.members == (0, 1) for effect in found.effects)
    for effect in found.effects:
        for index, each in zip(effect.members, effect.effects, strict=True):
            assert each in found.members[index].asked.effects


def test_the_worst_position_comes_first() -> None:
    """On hold before open."""
    found = inquiry(SILENT, UNCHECKED).situations
    worst = [min(ORDER.index(m.asked.outlook.position) for m in item.members) for item in found]

    assert worst == sorted(worst)


def test_searches_of_one_level_are_one_with_every_number_once() -> None:
    """Sets with the same modulus wait for the same search."""
    unknown = claims(23, ())
    sets = [at(group(23, (), bits=224, use="static", checks=()), f"{n}.pem") for n in range(3)]
    reused = at(group(23, (), bits=224, use="reused", checks=()), "reused.pem")
    (search,) = inquire([*sets, reused], Asker(unknown, QUICK, BOOKS)).searches

    assert len(search.searches) == 1
    assert len(search.sets) == 4
    assert search.seconds == search.searches[0].seconds


def test_fewest_answers_for_each_better_position() -> None:
    """Nothing is declared of a safe prime: no single answer helps, two lead to no objection, and
    nobody is asked for three."""
    run = replace(RunValues("2026-12-01", "quick"), census=census([]))
    silent = Declaration("silent", Place("a.pem", 1), _modp2048(), 2, purpose="key-agreement")
    found, _ = investigate([silent], run, BOOKS, Surroundings(secrets.randbelow))
    effects = Asker(found, run, BOOKS).ask(silent).effects
    better = [e for e in effects if e.moves and e.after.position != "hold"]

    assert {len(e.answers) for e in better} == {2}
    assert better[0].after.position == "no objection"
    assert "exponent.bits" in Asker(found, run, BOOKS).ask(silent).open_keys


def _modp2048() -> int:
    from auditor.intake.standard_groups import find

    found = find("modp2048")
    assert found is not None
    return found.modulus


def test_what_a_set_is_for_is_asked_as_well() -> None:
    """Without a purpose each is tried; with one, its schemes; a protocol where none is said."""
    bare = Declaration("bare", Place("a.c", 1), UNCHECKED.modulus, UNCHECKED.generator)
    tried = Asker(KNOWN, QUICK, BOOKS).ask(bare).effects
    assert any("the purpose is" in words for effect in tried for words in effect.words)

    book = load_all(["schemes"], vocabulary())
    signing = replace(bare, purpose="signature", parties=(Party(EVERYBODY, 256),))
    asked = Asker(KNOWN, QUICK, book).ask(signing)
    assert "scheme" in asked.open_keys


@pytest.mark.parametrize("row", [0, 1, 2])
def test_the_rule_of_thumb_agrees_with_the_benchmarks(row: int) -> None:
    """Within a quarter of what is printed for one curve at 2048 bits; longer numbers cost more."""
    text = (ROOT / "tests" / "benchmarks" / "README.md").read_text(encoding="utf-8")
    table = text.split("## One curve")[1].split("\n\n## ")[0]
    rows = [line.split("|")[1:4] for line in table.splitlines() if line.startswith("| ")][2:]
    b1, b2, milliseconds = (int(cell.replace(",", "")) for cell in rows[row])
    level = replace(LEVELS[0], b1=b1, b2=b2)

    assert 0.8 < 1000 * seconds_per_curve(2048, level) / milliseconds < 1.25
    assert seconds_per_curve(4096, level) > 2 * seconds_per_curve(2048, level)
