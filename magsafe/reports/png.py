"""Pictures as PNG, by the typesetter of the extra `magsafe[png]`."""

from importlib import import_module
from importlib.util import find_spec
from math import ceil
from typing import Any
from unicodedata import name

from magsafe.errors import CommandError

_PNG = b"""#set page(width: auto, height: auto, margin: 0pt)
#image(bytes(sys.inputs.svg), format: "svg", width: float(sys.inputs.wide) * 1pt, height: float(sys.inputs.tall) * 1pt,
  fit: "stretch")"""
_DOTS = 150  # an inch
_SCRIPTS = (
    "LATIN",
    "GREEK",
    "CYRILLIC",
    "ARMENIAN",
    "GEORGIAN",
    "ARABIC",
    "LAO",
    "MICRO",
    "MASCULINE",
    "FEMININE",
    "OHM",
)


def as_png(svg: str) -> bytes:
    """Return a picture as PNG, 150 dots an inch; the fonts are those of the typesetter, alike on every machine."""
    typst: Any = import_module("typst")
    wide, tall = (float(each) for each in svg.split('viewBox="0 0 ', 1)[1].split('"', 1)[0].split())
    # A whole number of dots each way: else a row or a column of them is lost in letters.
    across = ceil(wide / 25.4 * _DOTS)
    points = [72.0 / _DOTS * dots for dots in (across, round(across * tall / wide))]
    inputs = {"svg": svg, "wide": repr(points[0]), "tall": repr(points[1])}
    made = typst.compile(_PNG, sys_inputs=inputs, format="png", ppi=_DOTS, ignore_system_fonts=True)
    return bytes(made)


def lacks_letters(text: str) -> bool:
    """Return whether a text has letters of scripts that the typesetter's own fonts do not have."""
    return any(each.isalpha() and not name(each, "").startswith(_SCRIPTS) for each in text)


def require_png(option: str = "--map") -> None:
    """Raise CommandError, which names the option, where no PNG can be made."""
    if find_spec("typst") is None:
        raise CommandError(
            option, "a name that ends in .png", "the extra magsafe[png], which is not installed", "write .svg instead"
        )
