"""Loading rulebooks: what is refused, where, and what a house book may override."""

import hashlib
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.data_files import data
from auditor.rulebooks.examples import failures
from auditor.rulebooks.loading import RulebookError, available, load, load_all
from tests.vocabulary_of_the_contract import VOCABULARY

BOOK = """\
rulebook: 1
name: house
title: House rules
values: {least: 3072}
documents:
  policy: {title: House policy, date: 2026}
rules:
  - id: modulus-length
    title: The modulus is shorter than the house allows
    defect: modulus-too-short
    grade: minor
    applies: usage.purpose == 'key-agreement'
    requires: modulus.length >= values.least
    statement: "{modulus.length} bits, below {values.least}."
    why: One. Two.
    shows: [modulus.nature]
    criterion: {document: policy, clause: "4", word: shall, confidence: confirmed}
    remedy: Take a longer modulus.
    cautions: [A caution.]
    cwe: [326]
    references: [A reference.]
    examples:
      conforming: [{usage.purpose: key-agreement, modulus.length: 3072}]
      nonconforming: [{usage.purpose: key-agreement, modulus.length: 3071}]
      undetermined: [{modulus.length: 3071}]
      not_applicable: [{usage.purpose: signature, modulus.length: 3071}]
"""


@pytest.fixture
def write(tmp_path):
    """A function that writes a book and gives its path."""

    def write(text: str, name: str = "house.yaml") -> Path:
        path = tmp_path / name
        path.write_text(text, "utf-8")
        return path

    return write


def problems(source: str | Path) -> list[str]:
    """What is wrong with a book, without its directory."""
    with pytest.raises(RulebookError) as caught:
        load(source, VOCABULARY)
    return [
        str(problem).replace(f"{Path(source).parent}/", "") for problem in caught.value.problems
    ]


def test_a_book(write):
    """Everything that the file says is in the book, and its digest is that of its bytes."""
    book = load(write(BOOK), VOCABULARY)
    rule = book.rule("modulus-length")

    assert (book.name, book.title, dict(book.values)) == ("house", "House rules", {"least": 3072})
    assert book.sha256 == hashlib.sha256(BOOK.encode()).hexdigest()
    assert book.documents["policy"].date == "2026"
    assert (rule.grade, rule.cwe, rule.shows) == ("minor", (326,), ("modulus.nature",))
    assert rule.names == ("usage.purpose", "modulus.length")
    assert rule.criterion.document.title == "House policy"
    assert rule.computed_remedy is None
    assert (rule.place.line, len(rule.examples)) == (8, 4)
    assert failures(book, VOCABULARY) == ()
    assert load(str(write(BOOK)), VOCABULARY) == book


def test_a_computed_remedy_is_one_word(write):
    """A remedy without blanks names a computed one."""
    text = BOOK.replace("remedy: Take a longer modulus.", "remedy: standard-group")

    assert load(write(text), VOCABULARY).rules[0].computed_remedy == "standard-group"


@pytest.mark.parametrize(
    ("old", "new", "place", "message"),
    [
        ("rulebook: 1", "rulebook: 2", "1:11", "1, the version"),
        ("name: house", "name: House Book", "2:7", "lower-case"),
        ("title: House rules\n", "", "1:1", "missing key 'title'"),
        ("title: House rules", "titel: House rules", "3:1", "did you mean 'title'"),
        ("title: House rules", "title: A\ntitle: B", "4:1", "duplicate key"),
        ("values: {least: 3072}", "values: {least: 3072, most: 1}", "4:23", "used by no rule"),
        ("values: {least: 3072}", "values: {least: [1]}", "4:17", "a number within"),
        ("values: {least: 3072}", "values: {Least: 3072}", "4:", "a name of lower-case"),
        ("values: {least: 3072}", "values: {laest: 3072}", "13:15", "did you mean 'values.laest'"),
        ("date: 2026", "date: in May", "6:39", "YYYY"),
        ("    requires: modulus.length >= values.least\n", "", "8:5", "missing key 'requires'"),
        ("    criterion: {document: policy, clause: \"4\", word: shall, confidence: confirmed}\n",
         "", "8:5", "missing key 'criterion'"),
        ("grade: minor", "grade: severe", "11:12", "major, minor or observation"),
        ("grade: minor", "grade: mayor", "11:12", "did you mean 'major'"),
        ("id: modulus-length", "id: Modulus Length", "8:9", "lower-case"),
        ("modulus.length >= values", "modulus.lenght >= values", "13:15", "did you mean"),
        ("modulus.length >= values.least", "'true'", "13:15", "names no fact"),
        ("modulus.length >= values.least", "true", "13:15", "in quotes"),
        ("== 'key-agreement'", "== 'keyagreement'", "12:14", "did you mean 'key-agreement'"),
        ("== 'key-agreement'", "== ", "12:14", "found the end"),
        ("{modulus.length} bits", "{modulus.lenght} bits", "14:16", "did you mean"),
        ("below {values.least}", "below {values.lest}", "14:16", "did you mean 'least'"),
        ("below {values.least}", "below {least", "14:16", "a brace"),
        ("shows: [modulus.nature]", "shows: [modulus.natur]", "16:13", "did you mean"),
        ("document: policy, clause", "document: polcy, clause", "17:27", "did you mean 'policy'"),
        ("word: shall", "word: ought", "17:54", "requirement word"),
        ("confidence: confirmed", "confidence: sure", "17:73", "how the clause is known"),
        ("cwe: [326]", "cwe: [310]", "20:11", "categories"),
        ("cwe: [326]", "cwe: [CWE-326]", "20:11", "the number of a CWE"),
        ("conforming: [{usage.purpose: key-agreement, modulus.length: 3072}]\n      non",
         "non", "23:7", "missing key 'conforming'"),
        ("conforming: [{usage.purpose: key-agreement, modulus.length: 3072}]",
         "conforming: []", "23:19", "at least one example"),
        ("      undetermined: [{modulus.length: 3071}]\n", "", "23:7", "no undetermined example"),
        ("      undetermined: [{modulus.length: 3071}]", "      undecided: []", "25:7",
         "unknown key 'undecided'"),
        ("undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.lenght: 3071}]",
         "25:23", "did you mean"),
        ("undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.length: long}]",
         "25:39", "expected a value of kind int"),
        ("undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.length: true}]",
         "25:39", "expected a value of kind int"),
        ("undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.length: {loose: 1}}]",
         "25:39", "only a bound"),
        ("undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.length: {absent: no}}]",
         "25:39", "{absent: undefined"),
        ("[{usage.purpose: signature", "[{usage.purpose: signing", "26:40", "expected one of"),
        ("    examples:\n", "    example:\n", "8:5", "missing key 'examples'"),
        ("rules:\n", "notes: {}\nrules:\n", "7:8", "sentences about the book"),
        ("rules:\n", "grades: {modulus-length: major}\nrules:\n", "7:10", "extends none"),
        ("rules:\n", "applies: modulus.lenght > 1\nrules:\n", "7:10", "did you mean"),
        ("rules:\n", "extends: ../other.yaml\nrules:\n", "7:10", "beside this one"),
        ("rules:\n", "extends: strenght\nrules:\n", "7:10", "cannot be used"),
    ],
)  # fmt: skip
def test_refused_with_its_place(write, old, new, place, message):
    """Each thing that can be wrong with a book is told with its line, its column and a hint."""
    assert old in BOOK
    found = problems(write(BOOK.replace(old, new, 1)))

    assert any(f"house.yaml:{place}" in problem and message in problem for problem in found), found


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "house.yaml:1:1"),
        ("[]", "expected a rulebook"),
        ("rulebook: 1", "missing key 'name'"),
        ("rulebook: 1\nname: house\ntitle: T\n", "no rules"),
        ("a: [", "not YAML"),
        ("a: !!python/object:os.system {}", "tags are not allowed"),
        ("name: \x07", "not allowed in YAML"),
    ],
)
def test_not_a_book(write, text, message):
    """A file that is no book at all is refused, not read further."""
    assert any(message in problem for problem in problems(write(text)))


def test_all_problems_in_one_run(write):
    """A wrong rule does not hide the problems of the others."""
    rule = BOOK[BOOK.index("  - id") :]
    text = BOOK.replace("grade: minor", "grade: severe") + rule.replace(
        "modulus.length >= values", "modulus.size >= values"
    ).replace("id: modulus-length", "id: other").replace("document: policy", "document: law")
    found = problems(write(text))

    assert [problem.split(":")[1] for problem in found] == ["11", "32", "36"]


def test_ids_are_unique(write):
    """A second rule of the same id is refused in one book, and across books."""
    rule = BOOK[BOOK.index("  - id") :]
    found = problems(write(BOOK + rule))
    assert any("house.yaml:27:9: a second rule 'modulus-length'" in problem for problem in found)

    first = write(BOOK)
    second = write(BOOK.replace("name: house", "name: other"), "other.yaml")
    with pytest.raises(
        RulebookError, match=r"other\.yaml:8:5: rule 'modulus-length' is already in"
    ):
        load_all([first, second], VOCABULARY)
    with pytest.raises(RulebookError, match="a second book named 'house'"):
        load_all([first, write(BOOK + "# again\n", "again.yaml")], VOCABULARY)


def test_sources(tmp_path, write):
    """A name is a shipped book, a path is a file; anything else is told apart with a hint."""
    assert set(available()) >= {"group-structure", "strength"}
    assert load("strength", VOCABULARY).path == "strength.yaml"

    assert "did you mean 'strength'" in problems("strenght")[0]
    assert "shipped are " in problems("zzz")[0]
    assert "a path to a .yaml file" in problems(tmp_path / "book.txt")[0]
    assert "cannot be read" in problems(tmp_path / "none.yaml")[0]
    assert "cannot be read" in problems(tmp_path / "..yaml")[0]
    assert "larger than" in problems(write("#" * (2**20 + 1)))[0]
    (tmp_path / "latin.yaml").write_bytes(b"name: \xe9")
    assert "not UTF-8" in problems(tmp_path / "latin.yaml")[0]


HOUSE = """\
rulebook: 1
name: stricter
title: Stricter house rules
extends: house.yaml
values: {least: 4096}
grades: {modulus-length: major}
notes: [The house wants more.]
"""


def test_a_house_book_overrides_values_and_grades(write):
    """Thresholds and grades change in every inherited rule; the rest stays."""
    base = load(write(BOOK), VOCABULARY)
    book = load(write(HOUSE, "stricter.yaml"), VOCABULARY)

    assert book.extends == base
    assert book.rules[0].grade == "major"
    assert "4096" in book.rules[0].requires.text
    assert book.rules[0].values["least"] == 4096
    assert book.rules[0].criterion == base.rules[0].criterion
    assert book.sha256 != base.sha256
    assert failures(book, VOCABULARY) == ()


def test_a_house_book_takes_the_place_of_its_base(write):
    """Loaded beside the book it extends, a house book replaces it, in its own place."""
    write(BOOK)
    write(HOUSE, "stricter.yaml")
    directory = write("", "x").parent
    books = load_all(
        ["strength", directory / "house.yaml", directory / "stricter.yaml"], VOCABULARY
    )

    assert [book.name for book in books] == ["strength", "stricter"]


def test_a_house_book_of_a_shipped_one(write):
    """A shipped book is extended by name; its own rules stay and new ones may be added."""
    text = BOOK.replace("rules:\n", "extends: strength\nrules:\n", 1)
    text = text.replace("least: 3072", "least: 3072, widest_leak: 2")
    book = load(write(text), VOCABULARY)

    assert book.rules[-1].id == "modulus-length"
    assert book.rule("confinement-leak").values["widest_leak"] == 2.0
    assert "2.0" in book.rule("confinement-leak").requires.text
    assert len(book.rules) == len(load("strength", VOCABULARY).rules) + 1


@pytest.mark.parametrize(
    ("old", "new", "place", "message"),
    [
        ("{least: 4096}", "{laest: 4096}", "5:10", "did you mean 'least'"),
        ("{least: 4096}", "{least: many}", "5:17", "expected a number"),
        ("{modulus-length: major}", "{modulus-lenght: major}", "6:10", "did you mean"),
        ("{modulus-length: major}", "{modulus-length: grave}", "6:26", "major, minor"),
        ("house.yaml", "none.yaml", "4:10", "cannot be used"),
        ("house.yaml", "stricter.yaml", "4:10", "cannot be used"),
    ],
)
def test_a_house_book_overrides_only_what_is_there(write, old, new, place, message):
    """An override of nothing, or by another kind, is refused, and so is a circle."""
    write(BOOK)
    found = problems(write(HOUSE.replace(old, new), "stricter.yaml"))

    assert any(f"stricter.yaml:{place}" in problem and message in problem for problem in found), (
        found
    )


def test_an_override_that_breaks_a_condition_is_told(write):
    """A threshold that turns a bound the wrong way round is refused in the house book."""
    base = BOOK.replace("values: {least: 3072}", "values: {least: 3072, factor: 1}").replace(
        "modulus.length >= values.least\n",
        "modulus.length * values.factor >= values.least && values.factor"
        " * group.unfactored_length_at_most >= values.least\n",
    )
    write(base)
    found = problems(write(HOUSE.replace("least: 4096", "factor: -1"), "stricter.yaml"))

    assert any("stricter.yaml:5:1: rule modulus-length does not hold" in each for each in found)


def test_extends_stays_in_the_directory(tmp_path, write):
    """A link beside the book that leads elsewhere is not followed."""
    outside = tmp_path / "outside"
    inside = tmp_path / "inside"
    outside.mkdir()
    inside.mkdir()
    (outside / "house.yaml").write_text(BOOK)
    (inside / "house.yaml").symlink_to(outside / "house.yaml")
    (inside / "stricter.yaml").write_text(HOUSE)

    assert any(
        "in the directory of this book" in each for each in problems(inside / "stricter.yaml")
    )


def test_examples_that_do_not_behave(write):
    """Each failing example is told with its place, what it was and what it leaves out."""
    text = BOOK.replace("key-agreement, modulus.length: 3072", "key-agreement, modulus.length: 9")
    text = text.replace(
        "undetermined: [{modulus.length: 3071}]", "undetermined: [{modulus.length: 4000}]"
    )
    text = text.replace("{usage.purpose: signature, ", "{generator.unit: true, ")
    found = [
        str(each).rpartition("/")[2] for each in failures(load(write(text), VOCABULARY), VOCABULARY)
    ]

    assert found == [
        "house.yaml:23:20: example of modulus-length: expected conforming, but it is nonconforming",
        "house.yaml:25:22: example of modulus-length: expected undetermined, but it is conforming"
        " (it leaves out usage.purpose)",
        "house.yaml:26:24: example of modulus-length: expected not applicable, but it is "
        "undetermined, waiting for usage.purpose (it leaves out usage.purpose; the rule does not "
        "name generator.unit)",
    ]


def test_examples_of_the_base_run_with_the_base(write):
    """A house book's thresholds do not make the examples of the book it extends fail."""
    write(BOOK)
    book = load(write(HOUSE, "stricter.yaml"), VOCABULARY)
    broken = BOOK.replace("modulus.length: 3072", "modulus.length: 9")
    assert failures(book, VOCABULARY) == ()

    write(broken)
    book = load(write(HOUSE, "stricter.yaml"), VOCABULARY)
    assert len(failures(book, VOCABULARY)) == 1


@given(st.data())
def test_a_mutated_book_is_loaded_or_refused(tmp_path_factory, data):
    """A book with a part cut out or put in twice loads or is refused, and never fails otherwise."""
    start = data.draw(st.integers(0, len(BOOK)))
    end = data.draw(st.integers(start, min(len(BOOK), start + 60)))
    text = BOOK[:start] + data.draw(st.sampled_from(("", BOOK[start:end] * 2, "{", "[", "'", ": ")))
    path = tmp_path_factory.mktemp("book") / "house.yaml"
    path.write_text(text + BOOK[end:], "utf-8")
    try:
        outcome = load(path, VOCABULARY).rules
    except RulebookError as error:
        outcome = error.problems
    assert outcome


def test_the_schema_is_shipped():
    """Editors find the schema that the program enforces beside the templates."""
    assert '"http://json-schema.org/draft-07/schema#"' in (
        data("reports") / "rulebook.schema.json"
    ).read_text("utf-8")
