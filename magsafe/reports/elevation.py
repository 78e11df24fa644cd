"""The elevation pattern of one transmission as a picture: a half circle from one horizon over the zenith to the other.

Line style and words tell the cuts; colour only helps. Lengths are in millimetres from the top left, angles in degrees.
"""

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import ceil, cos, radians, sin
from string import ascii_uppercase
from typing import TYPE_CHECKING

from magsafe import words
from magsafe.checks.sheet import LobeRecord, PatternCut, PatternRecord, Sheet
from magsafe.reports import plotting, sky, telling
from magsafe.reports.svg import Box, Labels, Point, around

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

WIDTH = 120.0
EDGE = 6.0
RADIUS = 46.0  # of the outermost ring
TEXT = 3.3  # 7 points where the picture is printed 90 mm wide
TITLE = 4.4
_BAND = 2.2  # depth of the hatching that is the ground, with what is clear beneath
_TICK = 1.4  # length of a mark for ten degrees
_SAMPLE = 9.0  # length of a line that stands for a cut
_LETTER = 4.5  # for the letter of a lobe before what it stands for
_DOT = 0.9  # radius of a lobe's mark
_NEAR = 16  # places about a mark, those at no more than a letter's height from it
_INK, _GREY = "#000000", "#8c8c8c"
_MINUS = "\u2212"


@dataclass(frozen=True, slots=True)
class _Pen:
    """How a cut is drawn: dashes tell it without colour, and wide ones show where a thin line goes the same way."""

    colour: str
    width: float
    dashes: tuple[float, float] | None = None
    said: str = ""
    level: int = 3


@dataclass(frozen=True, slots=True)
class _Line:
    """A line of text, and where its baseline begins, has its middle or ends."""

    at: Point
    text: str
    size: float
    bold: bool = False
    side: str = "left"


_PENS = (
    _Pen(_INK, 0.45, None, "unbroken"),
    _Pen("#0072B2", 0.85, (2.4, 1.3), "broken"),
    _Pen("#D55E00", 0.7, (0.7, 1.1), "dotted"),
)
_FINE, _RIM, _SURFACE = (
    _Pen(_GREY, 0.18, level=1),
    _Pen(_INK, 0.25, level=1),
    _Pen(_INK, 0.4, level=2),
)
_TOP = 5


def elevation_figure(sheet: Sheet, index: int) -> str:
    """Return the elevation pattern of one transmission as SVG.

    Parameters
    ----------
    sheet : the whole result
    index : the transmission, from 0

    Raises
    ------
    ValueError : a transmission without a pattern
    """
    point = sheet.operating_points[index]
    about = sky.pattern_in_words(point)
    with plotting.own_settings():
        figure = _Picture(sheet, index).drawn()
        return plotting.as_svg(figure, f"{sky.PATTERN_HEADING}: {telling.use(point)}", about)


def elevation_dots(sheet: Sheet, index: int) -> bytes:
    """Return the same picture as PNG. Raises ValueError as `elevation_figure`."""
    with plotting.own_settings():
        return plotting.as_dots(_Picture(sheet, index).drawn())


def lacks_letters(sheet: Sheet, index: int) -> bool:
    """Return whether the picture as PNG has no letters for some of its words."""
    with plotting.own_settings():
        return plotting.lacks_letters("".join(line.text for line in _Picture(sheet, index).lines))


class _Picture:
    """Lays out one picture from the top down, then draws it."""

    def __init__(self, sheet: Sheet, index: int) -> None:
        self.sheet, self.name, self.point = sheet, f"pattern-{index + 1}", sheet.operating_points[index]
        if self.point.pattern is None:
            raise ValueError(f"the transmission {self.point.name!r} has no pattern")
        self.pattern: PatternRecord = self.point.pattern
        self.top = sky.rim(self.pattern)
        self.pens = (_PENS * ceil(len(self.pattern.cuts) / len(_PENS)))[: len(self.pattern.cuts)]
        self.lines: list[_Line] = []
        self.samples: list[tuple[Point, _Pen]] = []
        self.beside: list[tuple[Box, str]] = []
        self.taken = Labels()
        self.y = EDGE - 0.3 * TITLE
        self._head()
        self.middle = (0.5 * WIDTH, self.y + 8.5 + RADIUS)
        self.y = self.middle[1] + _BAND + 1.3 * TEXT
        self.lobes = sky.lobes(self.pattern)
        self.spots = [self._spots(group) for group, _ in self.lobes]
        self._scale()
        lettered = self._lobes()
        self._cuts()
        self._foot(lettered)
        self.height = self.y + EDGE

    # Layout ------------------------------------------------------------------------------------------------

    def _say(self, text: str, size: float = TEXT, *, bold: bool = False, indent: float = 0.0) -> None:
        for line in plotting.lines_of(text, WIDTH - 2.0 * EDGE - indent, size, bold=bold):
            self.y += 1.4 * size
            self.lines.append(_Line((EDGE + indent, self.y), line, size, bold))

    def _head(self) -> None:
        self._say(sky.PATTERN_HEADING, TITLE, bold=True)
        self._say(telling.use(self.point), bold=True)
        placing = sky.designed(self.point)
        how = "Loop"
        if placing is not None:
            how = f"Loop {sky.plane(placing)}, its centre {words.amount(placing.centre_height, 'm')} up,"
        self._say(f"{how} over {sky.whole(self.pattern.ground)}")
        self._say("Likely gain, losses counted; 0 dBi is the same power sent out evenly in all directions.")

    def _scale(self) -> None:
        for angle in range(0, 181, 30):
            x, y = self._polar(float(angle), RADIUS + 2.2 + 1.8 * abs(cos(radians(angle))))
            lower = 0.0 if angle % 180 == 0 else 0.35 * TEXT * (1.0 - sin(radians(angle)))
            side = "center" if angle == 90 else "left" if angle < 90 else "right"
            self._write((x, y + lower), f"{min(angle, 180 - angle)}°", side)
        for ring, radius in self._rings():
            shown = _typeset(f"{ring:.0f}{' dBi' if ring == self.top else ''}")
            for x in sorted({self.middle[0] - radius, self.middle[0] + radius}):
                self._write((x, self.y), shown)

    def _write(self, at: Point, text: str, side: str = "center") -> None:
        """Write something into the picture, and keep its place."""
        wide = plotting.measured(text, TEXT)
        left = at[0] - {"left": 0.0, "center": 0.5, "right": 1.0}[side] * wide
        self.taken.keep((left, at[1] - 0.8 * TEXT, left + wide, at[1] + 0.3 * TEXT))
        self.lines.append(_Line(at, text, TEXT, side=side))

    def _lobes(self) -> tuple[str, ...]:
        """Write level and elevation beside the lobes; without room, letters, and return what these stand for."""
        for cut in self.pattern.cuts:
            for start, end in pairwise(self._curve(cut)):
                for part in (0.25, 0.75):
                    x, y = start[0] + part * (end[0] - start[0]), start[1] + part * (end[1] - start[1])
                    self.taken.keep((x - 0.5, y - 0.5, x + 0.5, y + 0.5))
        for x, y in (spot for spots in self.spots for spot in spots):
            self.taken.keep((x - _DOT, y - _DOT, x + _DOT, y + _DOT))
        told = self.lobes[: sky.MOST_LOBES]
        before = list(self.taken.taken)
        for (group, _), spots in zip(told, self.spots, strict=False):
            text = f"{_typeset(sky.signed(group[0].gain))} dBi at {group[0].elevation:.0f}°"
            # Of two that are alike, the one to the right has the figures.
            if not self._beside(spots[-1], text):
                break
        else:
            return ()
        self.taken.taken, self.beside = before, []
        for letter, spots in zip(ascii_uppercase, self.spots[: sky.MOST_LOBES], strict=False):
            for spot in spots:
                self._beside(spot, letter)
        return tuple(_typeset(text) for _, text in told)

    def _beside(self, spot: Point, text: str) -> bool:
        """Write something next to a lobe's mark, if there is room."""
        x, y = spot
        within = (EDGE, self.middle[1] - RADIUS, WIDTH - EDGE, self.middle[1] - 0.6)
        wide = plotting.measured(text, TEXT) + 0.8
        near = around((x - _DOT, y - _DOT, x + _DOT, y + _DOT), wide, 1.2 * TEXT)[:_NEAR]
        box = self.taken.first_free(near, within)
        if box is not None:
            self.beside.append((box, text))
        return box is not None

    def _cuts(self) -> None:
        """Say for each cut what its line looks like, and what lies to the left and to the right."""
        self.y += 1.5
        for cut, pen in zip(self.pattern.cuts, self.pens, strict=True):
            self.y += 1.0
            self.samples.append(((EDGE, self.y + 1.05 * TEXT), pen))
            self._say(f"{_begun(cut.name)} ({pen.said} line)", bold=True, indent=_SAMPLE + 1.6)
            self._say(f"left: {cut.away}; right: {cut.towards}", indent=_SAMPLE + 1.6)

    def _foot(self, lettered: Sequence[str]) -> None:
        self.y += 2.0
        for letter, told in zip(ascii_uppercase, lettered, strict=False):
            self.lines.append(_Line((EDGE, self.y + 1.4 * TEXT), letter, TEXT, bold=True))
            self._say(f"{told}.", indent=_LETTER)
        self.y += 1.2 if lettered else 0.0
        for told in (sky.weaker(len(self.lobes)), _typeset(sky.sky_shares(self.point))):
            if told:
                self._say(told)
        self._say(_typeset(f"Dots are lobes. The middle is {self.top - sky.DEPTH:.0f} dBi or less."))
        self._say(f"Method: {sky.whole(self.pattern.method)}")
        self._say(f"{words.short(self.sheet.design.name)}, {self.sheet.date}, magsafe {self.sheet.magsafe}")

    # Places ------------------------------------------------------------------------------------------------

    def _rings(self) -> Iterator[tuple[float, float]]:
        """Yield level and radius of each ring, from the outermost to the middle."""
        for number in range(int(sky.DEPTH / sky.RING) + 1):
            below = sky.RING * number
            yield self.top - below, RADIUS * (1.0 - below / sky.DEPTH)

    def _polar(self, angle: float, radius: float) -> Point:
        return self.middle[0] + radius * cos(radians(angle)), self.middle[1] - radius * sin(radians(angle))

    def _radius(self, gain: float) -> float:
        made = sky.level(gain)
        return 0.0 if made is None else RADIUS * max(0.0, 1.0 - (self.top - made) / sky.DEPTH)

    def _curve(self, cut: PatternCut) -> list[Point]:
        return [self._polar(a, self._radius(g)) for a, g in zip(cut.angle, cut.gain, strict=True)]

    def _spots(self, group: Sequence[LobeRecord]) -> list[Point]:
        """Return where lobes that count as one are, from left to right."""
        marked = group[:1] if group[0].elevation >= sky.UP else group
        return sorted(
            self._polar(angle, self._radius(lobe.gain))
            for lobe in marked
            for angle in sky.lobe_angles(self.pattern, lobe)
        )

    # Drawing -----------------------------------------------------------------------------------------------

    def drawn(self) -> "Figure":
        """Return the picture as a figure."""
        figure, axes = plotting.picture_of(WIDTH, self.height)
        self._grid(axes)
        self._ground(axes)
        for number, (cut, pen) in reversed(list(enumerate(zip(self.pattern.cuts, self.pens, strict=True), 1))):
            _stroke(axes, self._curve(cut), pen, f"{self.name}-cut-{number}")
        for (x, y), pen in self.samples:
            _stroke(axes, [(x, y), (x + _SAMPLE, y)], pen)
        self._marks(axes)
        for line in (*self.lines, *(_in_box(box, text) for box, text in self.beside)):
            axes.text(
                *line.at,
                line.text,
                fontproperties=plotting.letters(line.size, bold=line.bold),
                horizontalalignment=line.side,
                verticalalignment="baseline",
                color=_INK,
                parse_math=False,
                zorder=_TOP,
            )
        return figure

    def _grid(self, axes: "Axes") -> None:
        arcs = [[self._polar(float(angle), radius) for angle in range(181)] for _, radius in self._rings()]
        spokes = [[self.middle, self._polar(float(angle), RADIUS)] for angle in range(30, 180, 30)]
        ticks = [[self._polar(float(a), RADIUS - _TICK), self._polar(float(a), RADIUS)] for a in range(10, 180, 10)]
        _strokes(axes, [*arcs[1:-1], *spokes, *ticks], _FINE)
        _strokes(axes, arcs[:1], _RIM)

    def _ground(self, axes: "Axes") -> None:
        (x, y), reach = self.middle, RADIUS + 3.0
        starts = [x - reach + 2.0 * number + 1.5 for number in range(int(reach))]
        _strokes(axes, [[(start, y), (start - 1.5, y + 1.5)] for start in starts], _FINE)
        _strokes(axes, [[(x - reach, y), (x + reach, y)]], _SURFACE)

    def _marks(self, axes: "Axes") -> None:
        from matplotlib.patches import Circle, Rectangle  # noqa: PLC0415  (only where a picture is asked for)

        for (left, top, right, bottom), _ in self.beside:
            behind = Rectangle((left, top), right - left, bottom - top, facecolor="white", linewidth=0.0, zorder=2)
            behind.set_clip_on(False)
            axes.add_patch(behind)
        for number, spot in enumerate((spot for spots in self.spots for spot in spots), 1):
            edge = 0.25 * plotting.POINT
            made = Circle(spot, _DOT, facecolor=_INK, edgecolor="white", linewidth=edge, zorder=_TOP)
            made.set_clip_on(False)
            made.set_gid(f"{self.name}-lobe-{number}")
            axes.add_patch(made)


def _strokes(axes: "Axes", lines: Sequence[Sequence[Point]], pen: _Pen) -> None:
    """Draw lines that are all alike."""
    from matplotlib.collections import LineCollection  # noqa: PLC0415  (only where a picture is asked for)

    made = LineCollection(lines, colors=pen.colour, linewidths=pen.width * plotting.POINT, zorder=pen.level)
    made.set_clip_on(False)
    axes.add_collection(made, autolim=False)


def _stroke(axes: "Axes", points: Sequence[Point], pen: _Pen, name: str | None = None) -> None:
    """Draw a line; its dashes are as long as they say, whatever its width."""
    across, down = zip(*points, strict=True)
    (made,) = axes.plot(across, down, color=pen.colour, linewidth=pen.width * plotting.POINT, clip_on=False)
    made.set_zorder(pen.level)
    if pen.dashes is not None:
        made.set_dashes([each / pen.width for each in pen.dashes])
        made.set_dash_capstyle("butt")
        made.set_dash_joinstyle("bevel")
    if name is not None:
        made.set_gid(name)


def _in_box(box: Box, text: str) -> _Line:
    return _Line((0.5 * (box[0] + box[2]), box[3] - 0.28 * TEXT), text, TEXT, side="center")


def _typeset(text: str) -> str:
    """Return a text of ours as it is printed: a true minus sign, and the sign for degrees."""
    return re.sub(r"(?<![\w-])-(?=\d)", _MINUS, text).replace(" deg", "°")


def _begun(text: str) -> str:
    """Return a text with a capital at its beginning."""
    return f"{text[:1].upper()}{text[1:]}"
