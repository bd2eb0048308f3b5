"""What a person sees while questions are answered."""

import io

import pytest

from auditor.inquiry.question_round import Status
from auditor.progress import EVERY_SECONDS, Progress, is_live
from auditor.questions import Asks, Question

PRIME = Question(Asks.PRIMALITY, (11,))


class Clock:
    """Seconds that pass when told to."""

    def __init__(self) -> None:
        self.now = 0.0

    def __call__(self) -> float:
        return self.now


def shown(live: bool, *steps: tuple[float, int, float]) -> str:
    """What is written at (seconds, answered, share) of a round of ten questions."""
    stream, clock = io.StringIO(), Clock()
    progress = Progress(stream, live, clock)
    for clock.now, answered, share in steps:
        progress(Status(PRIME, answered, 10, share))
    progress.done()
    return stream.getvalue()


def test_the_estimate_is_that_of_the_pace() -> None:
    """A quarter of the work in 20 seconds leaves 60; no estimate before anything is known."""
    text = shown(True, (0, 0, 0.0), (1, 1, 0.01), (20, 5, 0.25), (200, 9, 0.5))

    assert text.split("\r\x1b[K")[1:] == [
        "0 of 10 open questions answered: Is 11 prime?",
        "1 of 10 open questions answered: Is 11 prime?",
        "5 of 10 open questions answered, about 60 s left: Is 11 prime?",
        "9 of 10 open questions answered, about 3 min left: Is 11 prime?",
        "",
    ]


def test_a_new_round_has_an_estimate_of_its_own() -> None:
    """What the last one took says nothing about it."""
    text = shown(True, (0, 0, 0.0), (1000, 9, 0.9), (1000, 0, 0.0), (1010, 5, 0.5))

    assert "5 of 10 open questions answered, about 10 s left" in text


def test_plain_lines_are_sparse() -> None:
    """One in so many seconds, none in a short run, and nothing is taken away."""
    moments = [(float(second), second % 10, 0.0) for second in range(3 * EVERY_SECONDS + 1)]

    assert shown(False, *moments).count("\n") == 3
    assert shown(False, *moments[:EVERY_SECONDS]) == ""


@pytest.mark.parametrize("environment", [{"CI": "true"}, {"TERM": "dumb"}])
def test_no_line_moves_where_nobody_watches(environment: dict[str, str]) -> None:
    """Not in a job, not on a dumb terminal, not in a file."""

    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    assert is_live({}, Terminal())
    assert not is_live(environment, Terminal())
    assert not is_live({}, io.StringIO())
