"""Ctrl-C at a chosen line of the program: what the interpreter may do between any two of them."""

import sys
from collections.abc import Callable
from types import FrameType
from typing import Any


class NotReached(Exception):
    """The work ended before that line."""


def interrupted(work: Callable[[], Any], at: int) -> None:
    """Do the work up to the ``at``-th line of the program that it runs, and interrupt it there;
    NotReached where it runs fewer. KeyboardInterrupt may pass, and does not reach the caller."""
    lines = 0

    def trace(frame: FrameType, event: str, _: Any) -> Any:
        nonlocal lines
        if "/auditor/" not in frame.f_code.co_filename:
            return None
        if event == "line":
            lines += 1
            if lines == at:
                raise KeyboardInterrupt
        return trace

    before = sys.gettrace()
    sys.settrace(trace)
    try:
        work()
    except KeyboardInterrupt:
        return
    finally:
        sys.settrace(before)
    if lines < at:
        raise NotReached
