"""What a plotted picture rests on: settings and letters alike on every machine, SVG with words for who cannot see it.

The axes of a picture fill it and count millimetres from the top left.
"""

import logging
import os
import re
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache
from io import BytesIO
from pathlib import Path
from typing import TYPE_CHECKING, Any
from unicodedata import east_asian_width
from xml.sax.saxutils import escape

from magsafe.reports.svg import attributes, plain

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.font_manager import FontProperties

INCH = 25.4
POINT = 72.0 / INCH  # points in a millimetre
_DOTS = 300  # an inch, of a PNG
_SETTINGS: dict[str, Any] = {
    "svg.fonttype": "none",  # letters stay letters: they can be searched, read aloud and drawn in any script
    "svg.hashsalt": "magsafe",
    "text.parse_math": False,  # a name with two dollar signs is a name
    "path.simplify": False,
    "font.sans-serif": ["DejaVu Sans"],
}
# The last but one is measured, and is the widest: text never takes more than is reserved for it.
_FAMILIES = ["Helvetica", "Arial", "Liberation Sans", "DejaVu Sans", "sans-serif"]
_WIDE = 1.1  # of its size, the width of a letter that is measured as a box and drawn in another font
# A number stays on the line of its unit.
_WORD = re.compile(r"\S*\d (?:dBi|dB|m|MHz|W|%)(?![^\s,.;:)])\S*|\S+")
_ROOT = re.compile(r"<svg\b[^>]*>")
_STYLE = re.compile(r"\s*<defs>\s*<style\b[^>]*>[^<]*</style>\s*</defs>")
_OWN_ID = re.compile(r'(<g) id="(?:figure|axes|patch|line2d|text|LineCollection)_\d+"')


@contextmanager
def own_settings() -> Iterator[None]:
    """Draw by these settings alone, whatever a file on this machine says; a letter that is missing is no warning."""
    log = logging.getLogger("matplotlib")
    level = log.level
    log.setLevel(logging.ERROR)  # it tells of its own cache, and of the settings that count for nothing here
    try:
        with _settings():
            yield
    finally:
        log.setLevel(level)


@contextmanager
def _without(name: str) -> Iterator[None]:
    """Leave a variable out of the environment for a while."""
    value = os.environ.pop(name, None)
    try:
        yield
    finally:
        if value is not None:
            os.environ[name] = value


@contextmanager
def _settings() -> Iterator[None]:
    with _without("MPLBACKEND"):  # one that it does not know would stop its import, and none is asked for here
        import matplotlib  # noqa: PLC0415  (slow to import, and needed for few commands)

    with matplotlib.rc_context(), warnings.catch_warnings():
        matplotlib.rcdefaults()
        settings: Any = matplotlib.rcParams  # its type knows each name by heart, and names differ by version
        settings.update(_SETTINGS)
        warnings.filterwarnings("ignore", message="Glyph .* missing from", category=UserWarning)
        yield


def picture_of(width: float, height: float) -> "tuple[Figure, Axes]":
    """Return an empty picture of a size [mm], and its axes."""
    from matplotlib.figure import Figure  # noqa: PLC0415

    figure = Figure(figsize=(width / INCH, height / INCH), facecolor="white")
    axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    axes.set_xlim(0.0, width)
    axes.set_ylim(height, 0.0)
    axes.set_axis_off()
    return figure, axes


def letters(size: float, *, bold: bool = False) -> "FontProperties":
    """Return letters of a size [mm], measured and dotted in the font that the library brings along."""
    from matplotlib.font_manager import FontProperties  # noqa: PLC0415

    weight = "bold" if bold else "normal"
    return FontProperties(family=_FAMILIES, weight=weight, size=size * POINT, fname=str(_font_file(bold)))


def measured(text: str, size: float, *, bold: bool = False) -> float:
    """Return the width of a text [mm], letter by letter."""
    return size * sum(_width(letter, bold) for letter in text)


@cache
def _width(letter: str, bold: bool) -> float:
    """Return the width of a letter, of its size."""
    if east_asian_width(letter) in "WF":
        return _WIDE
    # Between two bars, since a space by itself has no ink to measure.
    return _ink(f"|{letter}|", bold) - _ink("||", bold)


def _ink(text: str, bold: bool) -> float:
    from matplotlib.textpath import text_to_path  # noqa: PLC0415  (only where a picture is asked for)

    width, _, _ = text_to_path.get_text_width_height_descent(text, letters(100.0, bold=bold), ismath=False)
    return float(width) / (100.0 * POINT)


def lines_of(text: str, width: float, size: float, *, bold: bool = False) -> list[str]:
    """Return a text in lines that are no wider than `width` [mm]; a word that is wider is broken."""
    made: list[str] = []
    line = ""
    for whole in _WORD.findall(plain(text)):
        word = " ".join(whole.split())
        if line and measured(f"{line} {word}", size, bold=bold) > width:
            made.append(line)
            line = ""
        while len(word) > 1 and measured(word, size, bold=bold) > width:
            tries = range(len(word) - 1, 1, -1)
            fits = next((n for n in tries if measured(word[:n], size, bold=bold) <= width), 1)
            made.append(word[:fits])
            word = word[fits:]
        line = f"{line} {word}".strip()
    return [*made, line]


def lacks_letters(text: str) -> bool:
    """Return whether the font that dots are drawn with has no letter for something in a text."""
    from matplotlib.font_manager import get_font  # noqa: PLC0415

    known = get_font(str(_font_file(False))).get_charmap()
    return any(not each.isspace() and ord(each) not in known for each in text)


def as_svg(figure: "Figure", title: str, about: str) -> str:
    """Return a picture as SVG with its title and a text alternative, the same to the byte each time.

    The library's head goes: it names a document type elsewhere, and its style would reach the page around the picture.
    """
    file = BytesIO()
    figure.savefig(file, format="svg", metadata=dict.fromkeys(("Creator", "Date", "Format", "Type")))
    drawn = file.getvalue().decode("utf-8")
    root = _ROOT.search(drawn)
    if root is None:
        raise ValueError("the drawing has no root")
    wide, tall = (float(size) for size in figure.get_size_inches())
    head = attributes(
        {
            "xmlns": "http://www.w3.org/2000/svg",
            "xmlns:xlink": "http://www.w3.org/1999/xlink",
            "width": f"{wide * INCH:.2f}mm",
            "height": f"{tall * INCH:.2f}mm",
            "viewBox": f"0 0 {wide * 72.0:.6f} {tall * 72.0:.6f}",
            "role": "img",
            "aria-label": title,
            "stroke-linejoin": "round",
        }
    )
    told = f"<title>{escape(plain(title))}</title>\n<desc>{escape(plain(about))}</desc>"
    body = _OWN_ID.sub(r"\1", _STYLE.sub("", drawn[root.end() :]))
    return f'<?xml version="1.0" encoding="UTF-8"?>\n<svg{head}>\n{told}{body}'


def as_dots(figure: "Figure") -> bytes:
    """Return a picture as PNG, 300 dots an inch."""
    file = BytesIO()
    figure.savefig(file, format="png", dpi=_DOTS, metadata={"Software": None})
    return file.getvalue()


@cache
def _font_file(bold: bool) -> Path:
    from matplotlib import get_data_path  # noqa: PLC0415

    return Path(get_data_path(), "fonts", "ttf", f"DejaVuSans{'-Bold' if bold else ''}.ttf")
