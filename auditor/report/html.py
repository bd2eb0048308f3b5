"""The report as one self-contained HTML file that opens offline and prints well.

No script, no request: the content policy of the page refuses both. All text passes through the
templates' escaping, which is always on; a name that a template asks for and does not find is an
error and never an empty place.
"""

from collections.abc import Mapping
from functools import cache
from typing import TYPE_CHECKING, Any

from auditor.data_files import data
from auditor.report import words
from auditor.report.order_view import GroupOrders
from auditor.report.pictures import PART_MEANING, routes_picture
from auditor.report.view import view

if TYPE_CHECKING:
    from jinja2 import Environment


def render(record: Mapping[str, Any]) -> str:
    """The whole report as an HTML document."""
    report = view(record)
    orders = GroupOrders.read(report.record["claims"])
    template = _environment().get_template("report.html.j2")
    return template.render(
        report=report,
        words=words,
        part_meaning=PART_MEANING,
        strip=lambda sheet: orders.strip(sheet.record["declaration"]),
        routes_picture=lambda sheet: routes_picture(
            sheet.record["routes"], sheet.strength.required
        ),
    )


@cache
def _environment() -> "Environment":
    from jinja2 import Environment, FunctionLoader, StrictUndefined
    from markupsafe import Markup

    folder = data("reports")

    def source(name: str) -> str:
        return (folder / name).read_text(encoding="utf-8")

    environment = Environment(
        loader=FunctionLoader(source),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.globals["style"] = Markup(source("report.css"))
    return environment
