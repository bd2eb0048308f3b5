"""The strict YAML reader: core scalars, positions, every refusal, and both parsers."""

import contextlib
import pickle
import subprocess
import sys
from typing import Any

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from auditor import strict_yaml
from auditor.strict_yaml import Loaded, Mark, YamlError, load, read, shown_path

LOADERS = [yaml.CBaseLoader, yaml.BaseLoader]


# YAML 1.2.2, 10.3.2 (core schema), its table of tag resolution.
CORE = {
    "null": None,
    "~": None,
    "": None,
    "True": True,
    "FALSE": False,
    "yes": "yes",
    "on": "on",
    "0": 0,
    "-19": -19,
    "+7": 7,
    "017": 17,
    "0o17": 15,
    "0x1F": 31,
    "-0x1F": "-0x1F",
    "1_000": "1_000",
    "10:20:30": "10:20:30",
    "190:20:30": "190:20:30",
    "F7:A2:0C": "F7:A2:0C",
    "2026-12-01": "2026-12-01",
    "0.": 0.0,
    "-0.0": 0.0,
    ".5": 0.5,
    "+12e03": 12000.0,
    "-2E+05": -200000.0,
    "1e3": 1000.0,
    "=": "=",
}


@pytest.mark.parametrize("loader", LOADERS)
@pytest.mark.parametrize(("text", "value"), CORE.items())
def test_plain_scalars_follow_the_core_schema(text: str, value: Any, loader: Any) -> None:
    """A plain scalar is what YAML 1.2.2, 10.3.2 says, in type and value."""
    got = read(f"key: {text}", loader=loader).value["key"]
    assert got == value
    assert type(got) is type(value)


@pytest.mark.parametrize("style", ['"{}"', "'{}'"])
@pytest.mark.parametrize("text", CORE)
def test_quoted_scalars_are_text(text: str, style: str) -> None:
    """Quotes make text of anything."""
    assert load(f"key: {style.format(text)}").value == {"key": text}


def test_floats_stay_text_where_they_are_not_wanted() -> None:
    """A document of integers sees no float, not even one with an integral value."""
    assert load("[2.0, 1e3, 7, .inf]", floats=False).value == ["2.0", "1e3", 7, ".inf"]


def test_places_count_from_one() -> None:
    """Values and keys have 1-based lines and columns."""
    loaded = load("a: 1\nb:\n  - c: [x, y]\n")
    assert loaded.marks[()] == Mark(1, 1)
    assert loaded.marks[("b", 0)] == Mark(3, 5)
    assert loaded.marks[("b", 0, "c", 1)] == Mark(3, 12)
    assert loaded.key_marks[("b", 0, "c")] == Mark(3, 5)


def test_aliases_are_written_out_and_keep_their_own_place() -> None:
    """An alias stands for its anchor's value; the place is where it is used."""
    loaded = load("a: &x {n: 5}\nb: *x\n")
    assert loaded.value == {"a": {"n": 5}, "b": {"n": 5}}
    assert loaded.marks[("b",)] == Mark(2, 4)


def test_an_anchor_may_be_set_again() -> None:
    """An alias means the anchor before it, also where it is written out later (YAML 1.2.2, 7.1)."""
    text = "[&a 1, &b [*a], &a 2, *b, *a]"
    assert load(text).value == [1, [1], 2, [1], 2]


@pytest.mark.parametrize("loader", LOADERS)
def test_all_problems_of_one_text_are_found_in_one_run(loader: Any) -> None:
    """What spoils one value does not hide the others."""
    text = (
        "a: 1\na: 2\nb: !!str 5\nc: *no\n<<: {d: 1}\n? [e]\n: 1\nf: .nan\n"
        f"g: 0x1{'0' * 16384}\nh: fine\ni: 1e999\n!!str j: 1\n"
    )
    loaded = read(text, loader=loader)
    assert [(item.line, item.column, item.path) for item in loaded.problems] == [
        (2, 1, ("a",)),
        (3, 4, ("b",)),
        (4, 4, ("c",)),
        (5, 1, ()),
        (6, 3, ()),
        (8, 4, ("f",)),
        (9, 4, ("g",)),
        (11, 4, ("i",)),
        (12, 1, ()),
    ]
    assert loaded.value["a"] == 1
    assert loaded.value["h"] == "fine"
    with pytest.raises(YamlError) as caught:
        load(text)
    assert caught.value.problems == read(text).problems


@pytest.mark.parametrize("loader", LOADERS)
@pytest.mark.parametrize(
    ("text", "line", "fragment"),
    [
        ("a: [1\n", 2, "not YAML"),
        ("a: b: c", 1, "not YAML"),
        ("a: 1\n--- \nb: 2", 2, "second document"),
        ("a: 1\nb: \x00", 2, "U+0000"),
        ("a: \x1b[2J", 1, "U+001B"),
        ("a: \ud800", 1, "U+D800"),
        ("a:\n\t b: 1", 2, "not with tabs"),
        ("[" * 41 + "]" * 41, 1, "too deep"),
        ("- &a [*a]", 1, "too deep"),
        ("- &a [*a, *a]", 1, "too deep"),
        ("[" * 100_000, 1, ""),
        ("- " * 100_000, 1, ""),
    ],
)
def test_what_cannot_be_read_at_all(text: str, line: int, fragment: str, loader: Any) -> None:
    """Text that does not parse, or is too deep or too large, ends in one positioned error."""
    with pytest.raises(YamlError) as caught:
        read(text, loader=loader)
    assert (caught.value.line, fragment in caught.value.message) == (line, True)


@pytest.mark.parametrize("loader", LOADERS)
def test_too_many_values(loader: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """The number of values is bounded, while parsing and after aliases are written out."""
    monkeypatch.setattr(strict_yaml, "MAX_NODES", 100)
    assert len(read(f"[{'1,' * 99}]", loader=loader).value) == 99
    for text in (f"[{'1,' * 100}]", f"[{'1,' * 1000}", f"[&a [{'1,' * 60}], *a]"):
        with pytest.raises(YamlError, match="too large"):
            read(text, loader=loader)


def test_aliases_that_multiply_are_refused() -> None:
    """Nine levels of ten aliases each would be a billion values."""
    levels = ["a0: &a0 [x]"]
    levels += [f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 10)}]" for i in range(1, 10)]
    with pytest.raises(YamlError, match="too large"):
        load("\n".join(levels))


def test_long_text_may_not_multiply_either() -> None:
    """The characters are bounded after aliases are written out."""
    text = f"- &a '{'x' * 1_000_000}'\n- [{', '.join(['*a'] * 100)}]"
    with pytest.raises(YamlError, match="too large"):
        load(text)


def test_too_many_characters(monkeypatch: pytest.MonkeyPatch) -> None:
    """The text is measured before it is parsed."""
    monkeypatch.setattr(strict_yaml, "MAX_CHARACTERS", 10)
    with pytest.raises(YamlError, match="11 characters"):
        load("a: 34567890")


@pytest.mark.parametrize("write", [hex, lambda n: str(n) if n < 10**4000 else _decimal(n)])
def test_integers_have_at_most_65536_bits(write: Any) -> None:
    """2^65536 - 1 is read and 2^65536 is not, in either notation."""
    largest = 2**65536 - 1
    assert load(f"n: {write(largest)}").value["n"] == largest
    with pytest.raises(YamlError, match="more than 65536 bits"):
        load(f"n: {write(largest + 1)}")


def _decimal(number: int) -> str:
    digits = ""
    while number:
        number, part = divmod(number, 10**1000)
        digits = f"{part:01000d}{digits}"
    return digits


@given(st.integers(min_value=-(10**30), max_value=10**30))
def test_decimal_integers_agree_with_python(number: int) -> None:
    """``int`` is the oracle within its digit limit."""
    assert load(f"[{number}]").value == [number]


@given(st.integers(min_value=0, max_value=2**20000))
def test_hexadecimal_and_decimal_agree(number: int) -> None:
    """Both notations of one integer are the same integer."""
    loaded = load(f"[{hex(number)}, {_decimal(number) or 0}, {oct(number)}]")
    assert loaded.value == [number] * 3


_SCALARS = st.one_of(
    st.none(), st.booleans(), st.integers(), st.text("abc :#&*!|>-'\"[]{},?\n\t0x1.e", max_size=12)
)
_VALUES = st.recursive(
    _SCALARS,
    lambda inner: st.one_of(
        st.lists(inner, max_size=4), st.dictionaries(st.text("abn<", max_size=3), inner, max_size=4)
    ),
    max_leaves=12,
)


@given(_VALUES)
def test_written_values_are_read_back(value: Any) -> None:
    """A value dumped as quoted YAML by PyYAML comes back, under both parsers."""
    text = yaml.dump(value, Dumper=_Quoting)
    for loader in LOADERS:
        loaded = read(text, loader=loader)
        assert (loaded.value, loaded.problems) == (value, ())


class _Quoting(yaml.SafeDumper):
    """Quotes every text, so that its type is never in doubt."""

    def ignore_aliases(self, data: Any) -> bool:
        return True


_Quoting.add_representer(
    str, lambda dumper, text: dumper.represent_scalar("tag:yaml.org,2002:str", text, style='"')
)


@given(st.text("a1:-[]{},&*!|>'\"%#?<\n \t\x00é0xEF~.", max_size=40))
def test_any_text_is_read_or_refused(text: str) -> None:
    """Nothing but a value with places, or YamlError with places inside the text."""
    lines = text.count("\n") + 2
    try:
        result: Loaded | YamlError = read(text)
    except YamlError as error:
        result = error
    assert all(1 <= item.line <= lines and item.column >= 1 for item in result.problems)
    if isinstance(result, Loaded):
        assert () in result.marks


@given(st.lists(st.sampled_from([*"ab1:-[]{},&*!|>'\"%#?<\n ~.", "\n  ", "- ", ": "]), max_size=9))
@settings(max_examples=1000)
def test_both_parsers_give_the_same_value(parts: list[str]) -> None:
    """They differ in what malformed text they refuse, never in what a text means."""
    values = []
    for loader in LOADERS:
        with contextlib.suppress(YamlError):
            values.append(read("".join(parts), loader=loader).value)
    assert values == values[:1] * len(values)


def test_errors_travel_between_processes() -> None:
    """The error survives pickling with its problems, and prints them one a line."""
    with pytest.raises(YamlError) as caught:
        load("a: 1\na: 2\na: 3\n")
    copy = pickle.loads(pickle.dumps(caught.value))
    assert copy.problems == caught.value.problems
    assert str(copy).splitlines()[0] == "2:1: a: duplicate key 'a' (first on line 1)"
    assert (copy.line, copy.column, copy.message) == (2, 1, copy.problems[0].message)


def test_what_reading_imports() -> None:
    """The registry of groups costs no parser, and reading text no cryptographic library."""
    light = "auditor.intake.standard_groups", {"yaml", "jsonschema_rs", "cryptography"}
    whole = "auditor.intake.tree", {"cryptography", "gmpy2", "sympy", "rich", "jinja2"}
    for module, heavy in (light, whole):
        code = f"import sys, {module}; print(sorted({heavy} & set(sys.modules)))"
        done = subprocess.run([sys.executable, "-c", code], capture_output=True, check=True)
        assert done.stdout == b"[]\n"


@pytest.mark.parametrize(
    "text", ['"a\\nb": .inf', '{"\\u202e": 1, "\\u202e": 2}', "!<%0A> 5", "*\u2066é"]
)
def test_messages_escape_what_cannot_be_printed(text: str) -> None:
    """Keys, tags and anchors come from strangers."""
    with pytest.raises(YamlError) as caught:
        load(text)
    assert caught.value.message.isprintable()


def test_paths_are_shown_as_they_are_written() -> None:
    """Keys with dots between, indexes in brackets."""
    assert shown_path(("parameter_sets", 0, "parties", 1, "role")) == (
        "parameter_sets[0].parties[1].role"
    )
