"""A page as HTML: one file, without script, that asks nothing of any other place and prints on A4 and Letter."""

from base64 import b64encode
from functools import cache
from importlib.resources import files
from typing import TYPE_CHECKING, Literal

from magsafe.reports.marks import MARKS
from magsafe.reports.page import Page

if TYPE_CHECKING:
    from jinja2 import Template

Paper = Literal["a4", "letter"]


def as_html(page: Page, paper: Paper | None = None) -> str:
    """Return a page as HTML; it is printed on `paper`, or on what the printer holds where that is None."""
    size = {"a4": "A4", "letter": "letter", None: ""}[paper]
    return _template().render(page=page, size=size, marks=MARKS)


def data_address(svg: str) -> str:
    """Return a picture as an address that holds the picture itself."""
    return f"data:image/svg+xml;base64,{b64encode(svg.encode('utf-8')).decode('ascii')}"


@cache
def _template() -> "Template":
    from jinja2 import Environment, StrictUndefined  # noqa: PLC0415  (only where a page is asked for)

    house = Environment(autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True)
    house.filters["address"] = data_address
    return house.from_string(files("magsafe.reports").joinpath("templates/sheet.html.jinja").read_text("utf-8"))
