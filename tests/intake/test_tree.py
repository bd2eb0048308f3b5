"""From paths to declarations: order, uniqueness, what is skipped, and what must not be."""

import hashlib
import io
import os
import random
from pathlib import Path

import pytest

from auditor.intake import inputs
from auditor.intake.inputs import InputError, InputFile
from auditor.intake.tree import Candidate, Passed, collect, read_inputs


def _document(*names: str) -> str:
    sets = "".join(f"  - {{name: {name}, modulus: 23, generator: 5}}\n" for name in names)
    return f"auditor: 1\nparameter_sets:\n{sets}"


@pytest.fixture
def tree(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A directory to work in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def _write(files: dict[str, str | bytes]) -> None:
    for name, content in files.items():
        path = Path(name)
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content.encode() if isinstance(content, str) else content)


def test_directories_are_walked_in_sorted_order(tree: Path) -> None:
    """The order of creation does not matter; files come before the directories beside them."""
    names = ["t/b.yaml", "t/a.yml", "t/z.JSON", "t/c/a.yaml", "t/a/z.yaml", "t/.hidden/a.yaml"]
    random.Random(7).shuffle(names)
    _write({name: _document("x") for name in names} | {"t/.git/a.yaml": _document("x")})
    wanted = ["t/a.yml", "t/b.yaml", "t/z.JSON", "t/.hidden/a.yaml", "t/a/z.yaml", "t/c/a.yaml"]
    result = read_inputs(["t"])
    assert [item.place.path for item in result.declarations] == wanted
    assert [item.path for item in result.inputs] == sorted(wanted)
    assert result.errors == result.skipped == ()


def test_paths_are_those_the_user_gave(tree: Path) -> None:
    """Relative stays relative, absolute absolute; a leading ./ and a trailing / do not show."""
    _write({"t/a.yaml": _document("x")})
    for given, shown in (("t/", "t/a.yaml"), ("./t/a.yaml", "t/a.yaml"), (".", "t/a.yaml")):
        assert [item.identity for item in read_inputs([given]).declarations] == [f"{shown}#x"]
    absolute = (tree / "t").as_posix()
    assert read_inputs([absolute]).inputs[0].path == f"{absolute}/a.yaml"


def test_inputs_are_recorded_with_their_digests(tree: Path) -> None:
    """SHA-256 of the bytes, number files included."""
    text = "auditor: 1\nparameter_sets:\n  - {name: a, modulus: {file: n/p}, generator: 5}\n"
    _write({"a.yaml": text, "n/p": "23\n"})
    assert read_inputs(["."]).inputs == (
        InputFile("a.yaml", hashlib.sha256(text.encode()).hexdigest()),
        InputFile("n/p", hashlib.sha256(b"23\n").hexdigest()),
    )


def test_files_that_declare_nothing_are_skipped_in_directories(tree: Path) -> None:
    """Other YAML, templates that do not parse, other text: passed over, but named."""
    _write(
        {
            "a.yaml": _document("x"),
            "b.yaml": "services: [auditor]\n",
            "c.yaml": "{{ template }}: auditor: no\n",
            "d.yaml": "deep: {auditor: 1}\n",
            "e.json": '[{"auditor": 1}]',
            "f.yaml": b"\xff\xfeauditor: 1",
            "g.txt": _document("y"),
        }
    )
    result = read_inputs(["."])
    assert [item.identity for item in result.declarations] == ["a.yaml#x"]
    assert result.errors == ()
    assert result.skipped == ("b.yaml", "c.yaml", "d.yaml", "e.json", "f.yaml")
    assert str(result.passed[-1].reason) == "1 other file holds nothing that is read"


@pytest.mark.parametrize(
    ("content", "line", "fragment"),
    [
        ("x: [\nauditor: 1\n", 3, "not YAML"),
        (b"auditor: 1\nname: \xff\n", 2, "not UTF-8"),
        ('"auditor": 1\nparameter_sets: {}\n', 2, "expected a list"),
        ('{"auditor": 1}', 1, "missing key 'parameter_sets'"),
        ("auditor: 2\nparameter_sets: []\n", 1, "expected 1"),
    ],
)
def test_broken_documents_in_directories_are_errors(
    content: str | bytes, line: int, fragment: str, tree: Path
) -> None:
    """What calls itself a declaration document is never skipped."""
    _write({"t/a.yaml": content})
    result = read_inputs(["t"])
    (error,) = result.errors
    assert (error.path, error.line) == ("t/a.yaml", line)
    assert fragment in error.message
    assert result.skipped == ()


def test_named_files_must_be_documents(tree: Path) -> None:
    """What a directory passes over is an error when it is asked for by name."""
    _write({"a.yaml": "services: []\n", "b.txt": _document("x")})
    result = read_inputs(["a.yaml", "b.txt", "absent.yaml", ""])
    assert [item.identity for item in result.declarations] == ["b.txt#x"]
    assert [(error.path, error.message.split(";")[0]) for error in result.errors] == [
        (".", "cannot be read: Is a directory"),
        ("a.yaml", "missing key 'auditor'"),
        ("a.yaml", "missing key 'parameter_sets'"),
        ("a.yaml", "unknown key 'services'"),
        ("absent.yaml", "cannot be read: No such file or directory"),
    ]


def test_json_documents_are_read(tree: Path) -> None:
    """JSON is YAML, tabs for indentation included."""
    _write(
        {
            "a.json": '{\n\t"auditor": 1,\n\t"parameter_sets": [{"name": "x", "modulus": "0x17", '
            '"generator": 5}]\n}\n'
        }
    )
    (declaration,) = read_inputs(["."]).declarations
    assert declaration.modulus == 23


def test_a_file_is_read_once(tree: Path) -> None:
    """However often and by whatever path it is named; the first path stays."""
    _write({"t/a.yaml": _document("x")})
    (tree / "t" / "b.yaml").symlink_to("a.yaml")
    paths = ["t/a.yaml", "t", "./t/../t/a.yaml", (tree / "t").as_posix()]
    result = read_inputs(paths)
    assert [item.identity for item in result.declarations] == ["t/a.yaml#x"]
    assert (result.errors, len(result.inputs)) == ((), 1)


def test_links_out_of_the_tree_are_not_followed(tree: Path) -> None:
    """They are named among the skipped; links inside the tree are read where they stand."""
    _write({"out/a.yaml": _document("x"), "t/b/c.txt": _document("y")})
    (tree / "t" / "file.yaml").symlink_to(tree / "out" / "a.yaml")
    (tree / "t" / "dir").symlink_to(tree / "out")
    (tree / "t" / "inside.yaml").symlink_to("b/c.txt")
    (tree / "t" / "same").symlink_to("b")
    (tree / "t" / "loop.yaml").symlink_to("loop.yaml")
    result = read_inputs(["t"])
    assert [item.identity for item in result.declarations] == ["t/inside.yaml#y"]
    assert result.skipped == ("t/dir", "t/file.yaml")
    assert [error.path for error in result.errors] == ["t/loop.yaml"]


def test_only_regular_files_are_opened_in_directories(tree: Path) -> None:
    """A pipe would wait for ever."""
    (tree / "t").mkdir()
    os.mkfifo(tree / "t" / "pipe.yaml")
    (error,) = read_inputs(["t"]).errors
    assert (error.path, error.message) == ("t/pipe.yaml", "not a regular file")


def test_standard_input(tree: Path) -> None:
    """``-`` is read once, as a document, and cannot name files."""
    result = read_inputs(["-", "-"], io.BytesIO(_document("x").encode()))
    assert [item.identity for item in result.declarations] == ["-#x"]
    assert [item.path for item in result.inputs] == ["-"]
    assert read_inputs(["-"]).errors == (InputError("-", 1, 1, "there is no standard input"),)


def test_identities_are_unique_in_a_run(tree: Path) -> None:
    """Two files may use one name; two ways to write one identity may not both stand."""
    _write({"a.yaml": _document("x"), "b.yaml": _document("x")})
    assert len(read_inputs(["."]).declarations) == 2
    _write({"c": _document('"d#x"'), "c#d": _document("x")})
    result = read_inputs(["c", "c#d"])
    assert [item.identity for item in result.declarations] == ["c#d#x"]
    (error,) = result.errors
    assert (error.path, error.line, error.column) == ("c#d", 3, 5)
    assert "already" in error.message


def test_files_of_too_many_bytes(tree: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """An error when named, or when its beginning claims to be a document; else skipped."""
    limit = inputs.MAX_BYTES
    padding = b"#" * limit
    _write({"a.yaml": _document("x").encode() + padding, "b.yaml": padding + b"##"})
    result = read_inputs(["."])
    assert [
        (error.path, "more than 16777216 bytes" in error.message) for error in result.errors
    ] == [("a.yaml", True)]
    assert result.skipped == ("b.yaml",)
    assert [error.path for error in read_inputs(["b.yaml"]).errors] == ["b.yaml"]
    stream = io.BytesIO(padding + b"##")
    assert [error.path for error in read_inputs(["-"], stream).errors] == ["-"]


def test_file_names_that_are_no_text(tree: Path) -> None:
    """A name that could not stand in a report is an error, not a crash."""
    with open(b"\xff.yaml", "w") as file:
        file.write(_document("x"))
    (error,) = read_inputs(["."]).errors
    assert error == InputError("\\udcff.yaml", 1, 1, "the file name is not UTF-8 text")


def test_directories_that_cannot_be_listed(tree: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A directory that was not looked into is an error, so that nothing passes unseen."""
    _write({"t/a.yaml": _document("x"), "t/closed/b.yaml": _document("y")})
    listing = os.scandir

    def refuse(path: str) -> object:
        if str(path).endswith("closed"):
            raise PermissionError(13, "Permission denied", path)
        return listing(path)

    monkeypatch.setattr(os, "scandir", refuse)
    result = read_inputs(["t"])
    assert [item.identity for item in result.declarations] == ["t/a.yaml#x"]
    assert result.errors == (
        InputError("t/closed", 1, 1, "the directory cannot be read: Permission denied"),
    )


def test_errors_of_a_run_are_sorted_by_place(tree: Path) -> None:
    """By path, line and column, in whatever order the paths were given."""
    _write({"a.yaml": "auditor: 1\nx: 1\n", "b.yaml": "auditor: 1\ny: 1\n"})
    one, two = read_inputs(["b.yaml", "a.yaml"]), read_inputs(["a.yaml", "b.yaml"])
    assert one.errors == two.errors == tuple(sorted(one.errors))
    assert str(one.errors[0]).startswith("a.yaml:1:1: missing key 'parameter_sets'")


def test_collect_names_the_tree_of_each_file(tree: Path) -> None:
    """What a document may refer to is bounded by what was given, or by the root that was set."""
    _write({"t/a/b.yaml": "", "c.yaml": ""})
    (tree / "t" / "out.yaml").symlink_to(tree / "c.yaml")
    assert list(collect(["t", "c.yaml", "-"])) == [
        Passed("t/out.yaml"),
        Candidate("t/a/b.yaml", Path("t"), named=False, top="t"),
        Candidate("c.yaml", Path(), named=True),
        Candidate("-", None, named=True),
    ]
    assert list(collect(["t/a"], Path())) == [
        Candidate("t/a/b.yaml", Path(), named=False, top="t/a")
    ]
