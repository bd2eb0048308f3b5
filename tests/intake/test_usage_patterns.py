"""Patterns of usage files: few, none about sets that differ, each set once."""

from collections.abc import Mapping

import pytest
from hypothesis import given
from hypothesis import strategies as st

from auditor.declaration import Declaration, Place
from auditor.intake.usage_patterns import Covered, Labelled, fewest, labelled


def sets(**files: Mapping[str, str]) -> list[Labelled]:
    """Sets by path (with + for /) and name, with their labels."""
    return items({path.replace("+", "/"): names for path, names in files.items()})


def items(files: Mapping[str, Mapping[str, str]]) -> list[Labelled]:
    """Sets by path and name, with their labels."""
    return [
        Labelled(Declaration(name, Place(path, 1), 23, 5), path, label)
        for path, names in files.items()
        for name, label in names.items()
    ]


def patterns(files: Mapping[str, Mapping[str, str]]) -> list[tuple[str, str]]:
    """The patterns for these files."""
    return [(use.path, use.name) for use in fewest(items(files))]


DH, DSA = {"DH PARAMETERS 1": "dh"}, {"DSA PARAMETERS 1": "dsa"}
BOTH = {**DH, **DSA, "DH PARAMETERS 2": "dh"}


@pytest.mark.parametrize(
    ("files", "expected"),
    [
        ({"a.pem": DH}, [("a.pem", "*")]),
        ({"t/a.pem": DH, "t/b.pem": DH}, [("t/*.pem", "*")]),
        ({"t/a.pem": DH, "t/b.conf": DH}, [("t/a.pem", "*"), ("t/b.conf", "*")]),
        ({"t/x/a.pem": DH, "t/y/b.pem": DH}, [("t/**/*.pem", "*")]),
        ({"x/a.pem": DH, "y/b.pem": DH}, [("**/*.pem", "*")]),
        ({"x/moduli": DH, "y/moduli": DH}, [("**/moduli", "*")]),
        ({"x/.pem": DH, "x/a.pem": DH}, [("x/*.pem", "*")]),
        (
            {"x/a.pem": DH, "x/b.pem": DH, "y/c.pem": {"DH PARAMETERS 1": "other"}},
            [("x/*.pem", "*"), ("y/c.pem", "*")],
        ),
        ({"a.pem": BOTH}, [("a.pem", "DH PARAMETERS *"), ("a.pem", "DSA PARAMETERS *")]),
        (
            {f"s{n}/a.pem": BOTH for n in range(30)},
            [("**/*.pem", "DH PARAMETERS *"), ("**/*.pem", "DSA PARAMETERS *")],
        ),
        (
            {**{f"s{n}/a.pem": DH for n in range(30)}, "s1/b.pem": DSA},
            [("**/*.pem", "DH PARAMETERS *"), ("s1/b.pem", "*")],
        ),
        (
            {"a.conf": {"modp2048": "x", "modp3072": "y"}},
            [("a.conf", "modp2048"), ("a.conf", "modp3072")],
        ),
        ({"a\\b.pem": DH, "c.pem": DSA}, [("a?b.pem", "*"), ("c.pem", "*")]),
        ({"a?b.pem": DH, "axb.pem": {"DH PARAMETERS 1": "x"}}, [("axb.pem", "*")]),
    ],
)
def test_patterns(files: Mapping[str, Mapping[str, str]], expected: list[tuple[str, str]]) -> None:
    """The widest that mixes nothing, written as narrowly as it can be."""
    assert patterns(files) == expected


def test_what_cannot_be_told_apart_is_left_out() -> None:
    """The name of one set is a pattern that fits the other."""
    assert patterns({"a.conf": {"x*": "one", "xy": "two"}}) == [("a.conf", "xy")]


def test_paths_and_names_longer_than_the_format_takes_are_left_out() -> None:
    """The patterns around them still stand."""
    long = "/".join(["d" * 200] * 6) + "/a.pem"
    ((pattern, name),) = patterns({long: DH})
    assert (pattern.endswith("/**/*.pem"), len(pattern) <= 1_000, name) == (True, True, "*")
    assert patterns({"a.pem": {"n" * 300: "x", "other": "y"}}) == [("a.pem", "other")]


def test_only_what_lies_below_the_file_is_covered() -> None:
    """Paths are relative to the directory of the usage file."""
    here, there = (Declaration("a", Place(path, 1), 23, 5) for path in ("t/u/a.pem", "v/a.pem"))
    (found,) = labelled("t/usage.yaml", [(here, "x"), (there, "x")])

    assert (found.path, found.declaration.place.path) == ("u/a.pem", "t/u/a.pem")


TREES = st.dictionaries(
    st.lists(st.sampled_from(["a", "b", "c*", "d?"]), max_size=3).flatmap(
        lambda folders: st.sampled_from(
            ["x.pem", "y.pem", "z.conf", "moduli", "q\\r.pem", ".pem"]
        ).map(lambda name: "/".join([*folders, name]))
    ),
    st.dictionaries(
        st.sampled_from(["DH PARAMETERS 1", "DH PARAMETERS 2", "DSA PARAMETERS 1", "*", "x1", "1"]),
        st.sampled_from(["one", "two"]),
        min_size=1,
        max_size=4,
    ),
    max_size=8,
)


@given(TREES)
def test_no_use_mixes_and_no_set_is_in_two(files: Mapping[str, Mapping[str, str]]) -> None:
    """Whatever the tree: a use is about sets of one label alone; each set is asked about once; and
    a set that is left out could not be told apart by its own path and name."""
    listed = items(files)
    uses = fewest(listed)
    asked = [id(item) for use in uses for item in use.sets]

    assert len(asked) == len(set(asked))
    for use in uses:
        assert len({item.label for item in listed if use.covers(item)}) == 1
        assert all(use.covers(item) for item in use.sets)
    for item in listed:
        if id(item) not in asked:
            alone = Covered(item.path.replace("\\", "?"), item.declaration.name, ())
            assert len({other.label for other in listed if alone.covers(other)}) == 2
