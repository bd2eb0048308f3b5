"""Where the rulebooks, templates and schemas lie: inside the installed package or beside it."""

from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Literal


def data(kind: Literal["rules", "reports"]) -> Traversable:
    """The directory of that kind, in a wheel or in a checkout."""
    inside = files("auditor") / kind
    return inside if inside.is_dir() else Path(__file__).resolve().parent.parent / kind
