"""A page as PDF, by the typesetter of the extra `magsafe[pdf]`: tagged, its text selectable, the same on every run.

The page goes in as data; no text of it is ever part of the template.
"""

import json
import re
from collections.abc import Iterator
from datetime import UTC, datetime
from importlib import import_module
from importlib.resources import files
from importlib.util import find_spec
from typing import Any, Literal
from unicodedata import category

from magsafe.errors import CommandError
from magsafe.reports import plotting
from magsafe.reports.marks import MARKS
from magsafe.reports.page import Page, tree

PAPERS = {"a4": "a4", "letter": "us-letter"}
_LONG = re.compile(r"\S{18,}")
_SIGN = re.compile(r"(?<=\w)[._/-](?=\w)")
_ANYWHERE = re.compile("[^\u200b]{12}(?=[^\u200b]{3})")
_BREAK = "\u200b"  # of no width
_AS_IT_IS = ("kind", "style", "verdict", "svg", "alt")


def require_pdf(option: str = "--output") -> None:
    """Raise CommandError, which names the option, where no PDF can be made."""
    if find_spec("typst") is None:
        raise CommandError(
            option,
            "a name that ends in .pdf",
            "the extra magsafe[pdf], which is not installed",
            "write .html instead, and print it from a browser",
        )


def as_pdf(page: Page, paper: Literal["a4", "letter"] = "a4") -> bytes:
    """Return a page as PDF, with the fonts that come along, alike on every machine."""
    typst: Any = import_module("typst")
    made = typst.compile(
        files("magsafe.reports").joinpath("templates/sheet.typ").read_bytes(),
        sys_inputs={"data": json.dumps(_data(page, paper), ensure_ascii=False)},
        format="pdf",
        font_paths=[_fonts()],
        ignore_system_fonts=True,
        timestamp=int(datetime.fromisoformat(page.date).replace(tzinfo=UTC).timestamp()),
        pdf_standards=["ua-1"],
    )
    return bytes(made)


def lacks_letters(page: Page) -> bool:
    """Return whether the font has no letter for something in a page; a box stands in its place."""
    said = "".join(_texts(tree(page.blocks)))
    return plotting.lacks_letters("".join(each for each in said if category(each) != "Cf"))


def _texts(value: Any) -> Iterator[str]:
    if isinstance(value, str):
        yield value
    elif isinstance(value, list):
        yield from (text for each in value for text in _texts(each))
    elif isinstance(value, dict):
        yield from (text for key, each in value.items() if key not in _AS_IT_IS for text in _texts(each))


def _soft(value: Any) -> Any:
    """Return a tree whose long words may break after a sign, or anywhere, so that none runs out of its column."""
    if isinstance(value, str):
        return _LONG.sub(_broken, value)
    if isinstance(value, list):
        return [_soft(each) for each in value]
    if isinstance(value, dict):
        return {key: each if key in _AS_IT_IS else _soft(each) for key, each in value.items()}
    return value


def _broken(word: re.Match[str]) -> str:
    return _ANYWHERE.sub(f"\\g<0>{_BREAK}", _SIGN.sub(f"\\g<0>{_BREAK}", word[0]))


def _data(page: Page, paper: Literal["a4", "letter"]) -> dict[str, Any]:
    return {
        "title": page.title,
        "footer": _soft(page.footer),
        "paper": PAPERS[paper],
        "marks": {verdict: [mark.shape, mark.colour] for verdict, mark in MARKS.items()},
        "blocks": _soft(tree(page.blocks)),
    }


def _fonts() -> str:
    """Return the folder of a font without serifs that the plotting library brings along."""
    from matplotlib import get_data_path  # noqa: PLC0415  (slow to import, and needed for few commands)

    return f"{get_data_path()}/fonts/ttf"
