"""Drawing in SVG, in millimetres: shapes, text, labels that keep clear of one another. Every text is escaped here."""

import re
from collections.abc import Iterable, Sequence
from math import hypot
from textwrap import wrap
from xml.sax.saxutils import escape, quoteattr

from magsafe.checks.sheet import Verdict
from magsafe.reports.marks import MARKS

FONTS = "Helvetica, Arial, Liberation Sans, DejaVu Sans, DejaVu Sans Mono, sans-serif"
WIDEST_LETTER = 0.61  # of its size, of the widest font above: text never takes more than is reserved for it
TEXT = 2.5  # mm, 7 points
_UNFIT = re.compile(r"[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")  # what XML 1.0 cannot hold

Point = tuple[float, float]
Box = tuple[float, float, float, float]  # left, top, right, bottom


def number(value: float) -> str:
    """Return a length to a hundredth of a millimetre, the same on every machine."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def plain(text: str) -> str:
    """Return a text with what XML cannot hold replaced."""
    return _UNFIT.sub("\ufffd", text)


def attributes(values: dict[str, str | float]) -> str:
    """Return attributes as they are written in a tag; `_` in a name stands for `-`."""
    made = ((k.replace("_", "-"), number(v) if isinstance(v, float) else plain(v)) for k, v in values.items())
    return "".join(f" {name}={quoteattr(value)}" for name, value in made)


def path_of(lines: Iterable[Sequence[Point]], *, closed: bool) -> str:
    """Return the data of a path along some lines."""
    parts = []
    for line in lines:
        drawn = " L".join(f"{number(x)} {number(y)}" for x, y in line)
        parts.append(f"M{drawn}{'Z' if closed else ''}")
    return " ".join(parts)


def width_of(text: str, size: float = TEXT) -> float:
    """Return the width that a text takes at the most [mm]."""
    return WIDEST_LETTER * size * len(text)


def wrapped(text: str, width: float, size: float = TEXT) -> list[str]:
    """Return the lines of a text that is `width` wide [mm]."""
    return wrap(plain(text), max(8, int(width / (WIDEST_LETTER * size))), break_on_hyphens=False) or [""]


class Drawing:
    """A picture that grows by what is drawn, later things over earlier ones."""

    def __init__(self, width: float) -> None:
        self.width = width
        self.parts: list[str] = []
        self.definitions: list[str] = []

    def add(self, tag: str, **values: str | float) -> None:
        """Draw one element."""
        self.parts.append(f"<{tag}{attributes(values)}/>")

    def open(self, **values: str | float) -> None:
        """Begin a group."""
        self.parts.append(f"<g{attributes(values)}>")

    def close(self) -> None:
        """End a group."""
        self.parts.append("</g>")

    def path(self, lines: Iterable[Sequence[Point]], *, closed: bool = False, **values: str | float) -> None:
        """Draw lines in one stroke."""
        data = path_of(lines, closed=closed)
        if data:
            self.add("path", d=data, **values)

    def text(self, at: Point, text: str, size: float = TEXT, **values: str | float) -> None:
        """Write a text, its baseline beginning at a point."""
        told = attributes({"x": at[0], "y": at[1], "font_size": size, "fill": "#000", **values})
        self.parts.append(f"<text{told}>{escape(plain(text))}</text>")

    def runs(self, at: Point, runs: Iterable[tuple[str, bool]], size: float = TEXT) -> None:
        """Write a line of texts, each bold or not, its baseline beginning at a point."""
        told = attributes({"x": at[0], "y": at[1], "font_size": size, "fill": "#000"})
        spans = (f'<tspan font-weight="{"bold" if bold else "normal"}">{escape(plain(t))}</tspan>' for t, bold in runs)
        self.parts.append(f"<text{told}>{''.join(spans)}</text>")

    def define(self, markup: str) -> None:
        """Keep something that is drawn only where it is named; of our own making, it is not escaped."""
        self.definitions.append(markup)

    def clip(self, name: str, box: Box) -> None:
        """Name a box outside which nothing is drawn."""
        left, top, right, bottom = box
        told = attributes({"x": left, "y": top, "width": right - left, "height": bottom - top})
        self.define(f'<clipPath id="{name}"><rect{told}/></clipPath>')

    def mark(self, verdict: Verdict, at: Point, size: float = TEXT, fill: str | None = None) -> None:
        """Draw a verdict's shape about a point, in its colour or in another."""
        x, y, r = *at, 0.5 * size
        told: dict[str, str | float] = {"fill": fill or MARKS[verdict].colour, "stroke": "#000", "stroke_width": 0.2}
        told["class"] = f"mark-{verdict}"
        if verdict == "clear":
            self.add("circle", cx=x, cy=y, r=0.9 * r, **told)
            return
        corners = {
            "stop": [(-0.85, -0.85), (0.85, -0.85), (0.85, 0.85), (-0.85, 0.85)],
            "unproven": [(0.0, -1.15), (1.15, 0.0), (0.0, 1.15), (-1.15, 0.0)],
            "narrow": [(0.0, -1.1), (1.1, 0.85), (-1.1, 0.85)],
        }[verdict]
        self.path([[(x + r * a, y + r * b) for a, b in corners]], closed=True, **told)

    def rendered(self, height: float, title: str, about: str) -> str:
        """Return the whole picture."""
        size = {"width": f"{number(self.width)}mm", "height": f"{number(height)}mm"}
        head = attributes(
            {
                "xmlns": "http://www.w3.org/2000/svg",
                **size,
                "viewBox": f"0 0 {number(self.width)} {number(height)}",
                "role": "img",
                "aria-label": title,
                "font-family": FONTS,
                "fill": "none",
                "stroke-linecap": "butt",
            }
        )
        return "\n".join(
            [
                '<?xml version="1.0" encoding="UTF-8"?>',
                f"<svg{head}>",
                f"<title>{escape(plain(title))}</title>",
                f"<desc>{escape(plain(about))}</desc>",
                f"<defs>{''.join(self.definitions)}</defs>",
                f'<rect width="{number(self.width)}" height="{number(height)}" fill="#fff"/>',
                *self.parts,
                "</svg>\n",
            ]
        )


class Labels:
    """Where labels are, so that the next one keeps clear of them."""

    def __init__(self) -> None:
        self.taken: list[Box] = []

    def keep(self, box: Box) -> None:
        """Take a box, whatever is there."""
        self.taken.append(box)

    def is_free(self, box: Box) -> bool:
        """Return whether a box meets no other."""
        return not any(
            box[0] < other[2] and other[0] < box[2] and box[1] < other[3] and other[1] < box[3] for other in self.taken
        )

    def first_free(self, boxes: Sequence[Box], within: Box) -> Box | None:
        """Take and return the first box that is free and within another; None if none is."""
        for box in boxes:
            inside = box[0] >= within[0] and box[1] >= within[1] and box[2] <= within[2] and box[3] <= within[3]
            if inside and self.is_free(box):
                self.keep(box)
                return box
        return None


def around(box: Box, width: float, height: float) -> list[Box]:
    """Return boxes of a size beside, over and under another, the nearest first."""
    left, top, right, bottom = box
    x, y, found = 0.5 * (left + right), 0.5 * (top + bottom), []
    for gap in (0.6, 2.5, 5.0, 8.0, 12.0):
        found += [
            (right + gap, y - height / 2, right + gap + width, y + height / 2),
            (left - gap - width, y - height / 2, left - gap, y + height / 2),
            (x - width / 2, top - gap - height, x + width / 2, top - gap),
            (x - width / 2, bottom + gap, x + width / 2, bottom + gap + height),
            (right + gap, top - gap - height, right + gap + width, top - gap),
            (right + gap, bottom + gap, right + gap + width, bottom + gap + height),
            (left - gap - width, top - gap - height, left - gap, top - gap),
            (left - gap - width, bottom + gap, left - gap, bottom + gap + height),
        ]
    return found


def everywhere(box: Box, width: float, height: float, within: Box) -> list[Box]:
    """Return boxes of a size all over another, those nearest to a box first."""
    middle = 0.5 * (box[0] + box[2]), 0.5 * (box[1] + box[3])
    across, down = (
        int(max(0.0, room) / 2.0) + 1 for room in (within[2] - within[0] - width, within[3] - within[1] - height)
    )
    corners = [(within[0] + 2.0 * i, within[1] + 2.0 * j) for i in range(across) for j in range(down)]
    corners.sort(key=lambda at: hypot(at[0] + 0.5 * width - middle[0], at[1] + 0.5 * height - middle[1]))
    return [(x, y, x + width, y + height) for x, y in corners]


def nearest(one: Box, other: Box) -> tuple[Point, Point]:
    """Return the points of two boxes that are nearest to each other."""
    here, there = [0.0, 0.0], [0.0, 0.0]
    for axis in (0, 1):
        low, high = max(one[axis], other[axis]), min(one[axis + 2], other[axis + 2])
        if low <= high:
            here[axis] = there[axis] = 0.5 * (low + high)
        else:
            here[axis], there[axis] = (high, low) if one[axis] < other[axis] else (low, high)
    return (here[0], here[1]), (there[0], there[1])
