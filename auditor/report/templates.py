"""The template engine for pages: escaping always on, a missing name an error, no file but ours."""

from functools import cache
from typing import TYPE_CHECKING

from auditor.data_files import data

if TYPE_CHECKING:
    from jinja2 import Environment


@cache
def environment() -> "Environment":
    """Templates of ``reports/``, with the style sheet as ``style``."""
    from jinja2 import Environment, FunctionLoader, StrictUndefined
    from markupsafe import Markup

    folder = data("reports")

    def source(name: str) -> str:
        return (folder / name).read_text(encoding="utf-8")

    made = Environment(
        loader=FunctionLoader(source),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    made.globals["style"] = Markup(source("report.css"))
    return made
