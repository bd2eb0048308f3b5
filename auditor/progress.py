"""What a person sees while questions are answered: a line that moves, or a line now and then."""

import time
from collections.abc import Callable, Mapping
from typing import TextIO

from auditor.inquiry.question_round import Status

EVERY_SECONDS = 30
"""Between plain lines: silence longer than minutes gets jobs killed."""
KNOWN_FROM = 0.05
"""The share of a round that must be done before its end is estimated."""


class Progress:
    """Tells ``stream`` where a round of questions stands; ``clock`` counts seconds.

    The time that is left is estimated from the share of the round that is done, and only for this
    round: its answers may raise further questions, whose number nobody knows.
    """

    def __init__(
        self, stream: TextIO, live: bool, clock: Callable[[], float] = time.monotonic
    ) -> None:
        self._stream = stream
        self._live = live
        self._clock = clock
        self._last = clock()
        self._begun = clock()
        self._share = 0.0
        self._shown = False

    def __call__(self, status: Status) -> None:
        now = self._clock()
        if status.share < self._share or status.answered == 0:
            self._begun = now
        self._share = status.share
        text = (
            f"{status.answered} of {status.questions} open questions answered"
            f"{self._left(now)}: {status.question.about}"
        )
        if self._live:
            self._shown = True
            self._stream.write(f"\r\x1b[K{text[:78]}")
            self._stream.flush()
        elif now - self._last >= EVERY_SECONDS:
            self._last = now
            self._stream.write(text + "\n")
            self._stream.flush()

    def _left(self, now: float) -> str:
        """The time that the rest of the round takes at the pace so far, where there is one."""
        spent = now - self._begun
        if not KNOWN_FROM <= self._share < 1 or spent <= 0:
            return ""
        return f", {_about(spent * (1 - self._share) / self._share)} left"

    def done(self) -> None:
        """Take the moving line away."""
        if self._shown:
            self._stream.write("\r\x1b[K")
            self._stream.flush()


def _about(seconds: float) -> str:
    """A duration to one unit."""
    for unit, length in (("h", 3600), ("min", 60)):
        if seconds >= 1.5 * length:
            return f"about {seconds / length:.0f} {unit}"
    return f"about {max(1, round(seconds))} s"


def is_live(environment: Mapping[str, str], stream: TextIO) -> bool:
    """Whether a moving line is welcome: a terminal with a person before it."""
    return stream.isatty() and not environment.get("CI") and environment.get("TERM") != "dumb"
