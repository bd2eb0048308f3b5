"""What a person sees while questions are answered: a line that moves, or a line now and then."""

import time
from collections.abc import Callable, Mapping
from typing import TextIO

from auditor.questions import Question

EVERY_SECONDS = 30
"""Between plain lines: silence longer than minutes gets jobs killed."""


class Progress:
    """Tells ``stream`` which question is being answered; ``clock`` counts seconds."""

    def __init__(
        self, stream: TextIO, live: bool, clock: Callable[[], float] = time.monotonic
    ) -> None:
        self._stream = stream
        self._live = live
        self._clock = clock
        self._last = clock()
        self._asked = 0

    def __call__(self, question: Question) -> None:
        self._asked += 1
        text = f"question {self._asked}: {question.about}"
        if self._live:
            self._stream.write(f"\r\x1b[K{text[:78]}")
            self._stream.flush()
        elif self._clock() - self._last >= EVERY_SECONDS:
            self._last = self._clock()
            self._stream.write(text + "\n")
            self._stream.flush()

    def done(self) -> None:
        """Take the moving line away."""
        if self._live and self._asked:
            self._stream.write("\r\x1b[K")
            self._stream.flush()


def is_live(environment: Mapping[str, str], stream: TextIO) -> bool:
    """Whether a moving line is welcome: a terminal with a person before it."""
    return stream.isatty() and not environment.get("CI") and environment.get("TERM") != "dumb"
