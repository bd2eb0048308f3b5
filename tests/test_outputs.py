"""Files of reports are written whole or not at all."""

from pathlib import Path

import click
import pytest

from auditor.outputs import written


def test_pieces_become_one_file(tmp_path: Path) -> None:
    """What was there before stands until everything is written."""
    path = tmp_path / "r.json"
    path.write_text("before")
    with written(str(path)) as put:
        put(b"a")
        put("é\n".encode())
        assert path.read_text() == "before"

    assert path.read_bytes() == b"a\xc3\xa9\n"
    assert [*tmp_path.iterdir()] == [path]


@pytest.mark.parametrize("failure", [ValueError, KeyboardInterrupt])
def test_a_failure_leaves_nothing(tmp_path: Path, failure: type[BaseException]) -> None:
    """Neither half a file nor what stood beside it; the old file stays."""
    path = tmp_path / "r.json"
    path.write_text("before")

    def fail() -> None:
        with written(str(path)) as put:
            put(b"half")
            raise failure

    with pytest.raises(failure):
        fail()
    assert path.read_text() == "before"
    assert [*tmp_path.iterdir()] == [path]


def test_what_cannot_be_put_in_place_leaves_nothing(tmp_path: Path) -> None:
    """A directory stands where the file should go: a usage error, and nothing beside it."""
    path = tmp_path / "r.json"
    path.mkdir()
    with pytest.raises(click.FileError), written(str(path)) as put:
        put(b"whole")

    assert [*tmp_path.iterdir()] == [path]
