"""The views of a map: what each shows, to one scale, and where they stand on the sheet."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import floor, inf, log10

from magsafe.physics.arrays import Array
from magsafe.reports.svg import Box, Point, width_of

WIDTH = 148.0  # mm, of an A5 sheet upright
EDGE, LEFT = 7.0, 9.0  # mm, of the sheet, and beside a view for its measures
_TOP, _BOTTOM, _GAP = 5.0, 9.0, 3.0
HEIGHT = 122.0  # mm that the views may take together


@dataclass(frozen=True, slots=True)
class View:
    """One view: what it shows [m], where it stands [mm], and its scale [mm/m]."""

    name: str
    title: str
    axes: tuple[str, str]
    low: Point
    high: Point
    corner: Point = (0.0, 0.0)
    scale: float = 1.0

    @property
    def size(self) -> Point:
        """How wide and how tall what it shows is [m]."""
        return self.high[0] - self.low[0], self.high[1] - self.low[1]

    @property
    def box(self) -> Box:
        """Where it is on the sheet [mm]."""
        (x, y), (wide, tall) = self.corner, self.size
        return x, y, x + wide * self.scale, y + tall * self.scale

    def at(self, across: float, up: float) -> Point:
        """Return where a point of the view [m] is on the sheet [mm]."""
        return (
            self.corner[0] + (across - self.low[0]) * self.scale,
            self.corner[1] + (self.high[1] - up) * self.scale,
        )

    def line(self, points: Array) -> list[Point]:
        """Return a line of points [m], shape (point, 2), on the sheet [mm]."""
        return [self.at(float(x), float(y)) for x, y in points]


@dataclass(frozen=True, slots=True)
class Projection:
    """Which two coordinates of space a view shows."""

    first: int
    second: int

    def __call__(self, point: Array) -> Point:
        """Return the view's coordinates of a point in space [m]."""
        return float(point[self.first]), float(point[self.second])


def view_of(name: str, title: str, axes: tuple[str, str], low: Point, high: Point) -> View:
    """Return a view with a little air about what it shows."""
    pad = 0.05 * max(high[0] - low[0], high[1] - low[1])
    return View(name, title, axes, (low[0] - pad, low[1] - pad), (high[0] + pad, high[1] + pad))


def round_length(least: float) -> float:
    """Return 1, 2 or 5 times a power of ten, no less than `least`."""
    power = 10.0 ** floor(log10(least))
    return next(step * power for step in (1.0, 2.0, 5.0, 10.0) if step * power >= least * (1.0 - 1e-9))


def _scale_across(row: Sequence[View], wide: float) -> float:
    """Return the largest scale at which views beside each other fit [mm/m], each at least as wide as its title."""
    room, titled = wide - (len(row) - 1) * (LEFT + _GAP), [False] * len(row)
    while not all(titled):
        held = sum(width_of(view.title) for view, narrow in zip(row, titled, strict=True) if narrow)
        scale = (room - held) / sum(view.size[0] for view, narrow in zip(row, titled, strict=True) if not narrow)
        narrower = [width_of(view.title) > view.size[0] * scale for view in row]
        if not any(now and not before for now, before in zip(narrower, titled, strict=True)):
            return scale
        titled = [now or before for now, before in zip(narrower, titled, strict=True)]
    fits = sum(width_of(view.title) for view in row) <= room
    return min(width_of(view.title) / view.size[0] for view in row) if fits else -inf


def arranged(
    plan: View, sides: Sequence[View], top: float, room: float = WIDTH - 2.0 * EDGE, height: float = HEIGHT
) -> tuple[list[View], float, float]:
    """Return the views at the largest scale that holds them, that scale [mm/m], and where they end [mm].

    They take `room` across and `height` down together at the most [mm].

    Upright views stand under the plan, beside each other or not, or all views stand in one row: whichever leaves more
    room.
    """
    wide, best = room - LEFT, -inf
    places: list[list[int]] = []
    below = list(range(1, len(sides) + 1))
    everything = [plan, *sides]
    for rows in ([[0], below], [[i] for i in (0, *below)], [[0, *below]]):
        across = min(_scale_across([everything[i] for i in row], wide) for row in rows)
        rest = height - len(rows) * (_TOP + _BOTTOM)
        scale = min(across, rest / sum(max(everything[i].size[1] for i in row) for row in rows))
        if scale > best:
            best, places = scale, rows
    made, y = {}, top
    for row in places:
        y += _TOP
        tallest = max(everything[i].size[1] for i in row) * best
        x = EDGE + LEFT
        for i in row:
            view = everything[i]
            made[i] = replace(view, corner=(x, y + tallest - view.size[1] * best), scale=best)
            x += max(view.size[0] * best, width_of(view.title)) + LEFT + _GAP
        y += tallest + _BOTTOM
    return [made[i] for i in sorted(made)], best, y
