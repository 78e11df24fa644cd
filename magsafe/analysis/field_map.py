"""Shares of the limits about a loop on grids, and their contours: what a map of the keep-out draws.

All grids are polar about the loop's centre, from the touch distance outwards: within it nobody may be, whatever the
field. A share is that of the limit less the exposure margin, without credit for typical losses, with the weights of
`keepout`; a contour is its crossing through 1, and 2 % of distance are added as there. Symmetries are those of
`keepout`: an upright loop mirrors in its own plane, a flat one in the line through its capacitor.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import ceil, inf, log, pi
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c

from magsafe.analysis.exposure import bases, use_of, weights
from magsafe.analysis.field_source import FAR, FieldSource, field_source, touch_distance
from magsafe.analysis.keepout import FARTHEST
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.model import Design
from magsafe.physics.arrays import Array
from magsafe.rules.limit import WHO, Who, load_rule

PAD = 1.02  # on distances, as keep-out has it
PEOPLE = (0.0, 0.5, 1.0, 1.5, 2.0)  # m above a floor
HEIGHTS = (0.0, 0.1, 0.2, 0.35, 0.5, 0.75, 1.0, 1.5, 2.5)  # of the distance, above and below the centre
_TURN = 5  # degrees from one angle to the next; a divisor of 90
_BEARINGS = 15  # degrees between the bearings of a loop that rotates; a divisor of 90
_STEP = 0.07  # of distance, from one ring to the next
_BEYOND = 1.15  # how much further than the contours a grid reaches
_BLOCK = 4000  # points at once, so that progress can be told
_LEAST = 1e-300  # of a share: its logarithm is taken

Progress = Callable[[int, int], None]
Degrees = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Layer:
    """One rule's limits for one tier, as weights of the electric and magnetic squares for each watt at the loop."""

    rule: str
    who: Who
    weighed: tuple[tuple[float, float], ...]


@dataclass(frozen=True, slots=True)
class Grid:
    """Strongest squares for each watt at the loop, about a centre in one view.

    Attributes
    ----------
    name : what the view shows
    centre : the loop's centre in the view's two coordinates [m]
    distances : rings [m], shape (distance,), the first at the touch distance
    angles : from the view's first axis [rad], shape (angle,), a whole turn with both ends
    electric, magnetic : shape (angle, distance)
    lowest : the ground in an upright view [m], below which nobody is; minus infinity where there is none
    """

    name: str
    centre: tuple[float, float]
    distances: Array
    angles: Array
    electric: Array
    magnetic: Array
    lowest: float = -inf

    @property
    def last(self) -> Array:
        """How far there is anything at each angle [m], shape (angle,): to the ground or to the last ring."""
        with np.errstate(divide="ignore"):
            down = np.where(np.sin(self.angles) < 0.0, (self.lowest - self.centre[1]) / np.sin(self.angles), inf)
        return np.asarray(np.minimum(np.maximum(down, self.distances[0]), self.distances[-1]))

    def bounded(self, layers: Sequence[Layer]) -> bool:
        """Return whether every contour closes before the last ring."""
        outer = self.share(layers)[self.last == self.distances[-1], -1]
        return bool((outer < 1.0).all())

    def share(self, layers: Sequence[Layer]) -> Array:
        """Return the largest share of the limits less their margin, of power, shape (angle, distance)."""
        found = np.zeros_like(self.electric)
        for layer in layers:
            for electric, magnetic in layer.weighed:
                np.maximum(found, np.maximum(self.electric * electric, self.magnetic * magnetic), out=found)
        return found

    def outermost(self, layers: Sequence[Layer]) -> Array:
        """Return how far out the share last comes to 1, at each angle [m], shape (angle,); never less than touch."""
        level = np.log(np.maximum(self.share(layers), _LEAST))
        found = np.full(len(self.angles), self.distances[0])
        for index, own in enumerate(level):
            reached = np.flatnonzero(own >= 0.0)
            if not len(reached):
                continue
            last = int(reached[-1])
            if last == len(own) - 1:
                found[index] = self.distances[-1]
                continue
            part = own[last] / (own[last] - own[last + 1])
            found[index] = PAD * self.distances[last] * (self.distances[last + 1] / self.distances[last]) ** part
        return np.asarray(np.minimum(found, self.last))

    def lines(self, layers: Sequence[Layer]) -> tuple[Array, ...]:
        """Return the contours outside the touch distance [m], each of shape (point, 2); open where they meet it."""
        from contourpy import contour_generator  # noqa: PLC0415  (only for pictures)

        made = contour_generator(np.log(self.distances), self.angles, self._level(layers), name="serial")
        lines: Any = made.lines(0.0)  # its type tells all that other settings would return
        return tuple(self.put(PAD * np.exp(line[:, 0]), line[:, 1]) for line in lines)

    def areas(self, layers: Sequence[Layer]) -> tuple[tuple[Array, ...], ...]:
        """Return the areas that contours enclose outside the touch distance: each its outline and its holes [m]."""
        from contourpy import FillType, contour_generator  # noqa: PLC0415  (only for pictures)

        made = contour_generator(
            np.log(self.distances), self.angles, self._level(layers), name="serial", fill_type=FillType.OuterOffset
        )
        filled: Any = made.filled(0.0, 1e9)
        found = []
        for polygon, starts in zip(*filled, strict=True):
            away = np.exp(polygon[:, 0])
            away = np.where(away <= self.distances[0] * (1.0 + 1e-9), self.distances[0], PAD * away)
            placed = self.put(away, polygon[:, 1])
            found.append(tuple(placed[i:j] for i, j in pairwise(starts)))
        return tuple(found)

    def put(self, distances: Array, angles: Array) -> Array:
        """Return the view's coordinates of points [m], shape (point, 2)."""
        across, up = self.centre
        return np.stack([across + distances * np.cos(angles), up + distances * np.sin(angles)], axis=1)

    def _level(self, layers: Sequence[Layer]) -> Array:
        return np.asarray(np.log(np.maximum(self.share(layers), _LEAST)))


@dataclass(frozen=True, slots=True)
class FieldMap:
    """What is about a loop in one transmission.

    `plan` holds the strongest field at any height, `floors` that for people on all floors (None where heights are not
    known), `sides` the upright views. `wire` is the conductor without its port, shape (segment, 2, 3), `ports` where
    the capacitor may be, shape (port, 3) [m].
    """

    layers: tuple[Layer, ...]
    touch: float
    wire: Array
    ports: Array
    plan: Grid
    floors: Grid | None
    sides: tuple[Grid, ...]

    @property
    def bounded(self) -> bool:
        """Whether every contour closes within what was computed."""
        return all(grid.bounded(self.layers) for grid in (self.plan, *self.sides))


def field_map(design: Design, point: OperatingPoint, farthest: float, progress: Progress | None = None) -> FieldMap:
    """Return the shares about the loop of an operating point that was computed.

    Parameters
    ----------
    design : the design
    point : one of its operating points, within the range of the methods
    farthest : how far the keep-out is known to reach [m]; where it reaches further the grids grow to 150 m at the most
    progress : is told how many points are done, and of how many
    """
    source = field_source(design, point, FAR)
    touch = touch_distance(design)
    found = layers_of(design, source)
    reach = min(max(farthest, touch) * _BEYOND, FARTHEST)
    while True:
        made = _map(source, found, np.geomspace(touch, reach, ceil(log(reach / touch) / _STEP) + 2), progress)
        if made.bounded or reach >= FARTHEST:
            return made
        reach = min(1.4 * reach, FARTHEST)


def layers_of(design: Design, source: FieldSource) -> tuple[Layer, ...]:
    """Return the layers of the design's rules that have limits at the source's frequency, with the margin counted."""
    point = source.point
    at_loop = (point.power_at_loop.high or 0.0) / point.power * design.margins.exposure_ratio**2 * source.bare_factor
    found = []
    for name in design.site.rules:
        for who in WHO:
            own = bases(load_rule(name), who, point.transmission.frequency)
            weighed = tuple((e, h) for _, e, h in weights(own, use_of(point.transmission), at_loop))
            if weighed:
                found.append(Layer(name, who, weighed))
    return tuple(found)


def _map(source: FieldSource, layers: tuple[Layer, ...], distances: Array, progress: Progress | None) -> FieldMap:
    design = source.design
    floors = np.array(design.site.floors or [0.0]) if design.loop.centre_height is not None else np.empty(0)
    heights = np.unique(np.round((floors[:, None] + np.array(PEOPLE)).ravel(), 6))
    asked = {"any height": _plan_points(source, distances, _any_height(source, distances))}
    if len(heights):
        asked["floors"] = _plan_points(source, distances, np.broadcast_to(heights, (len(distances), len(heights))))
    asked |= {name: _side_points(source, distances, turns) for name, turns in _planes(source).items()}
    total, done = sum(each.points.size // 3 for each in asked.values()), 0
    grids = {}
    for name, each in asked.items():

        def told(count: int, before: int = done) -> None:
            if progress is not None:
                progress(before + count, total)

        centre = (0.0, source.height) if each.upright else (0.0, 0.0)
        electric, magnetic = (each.spread(found) for found in _strongest(source, each.points, told))
        lowest = 0.0 if each.upright and source.grounded else -inf
        grids[name] = Grid(name, centre, distances, np.radians(each.degrees), electric, magnetic, lowest)
        done += each.points.size // 3
    wire = source.wires[0]
    return FieldMap(
        layers=layers,
        touch=float(distances[0]),
        wire=np.stack([wire.start[1:], wire.end[1:]], axis=1),
        ports=source.ports,
        plan=grids.pop("any height"),
        floors=grids.pop("floors", None),
        sides=tuple(grids.values()),
    )


@dataclass(frozen=True, slots=True)
class _Asked:
    """Points of one view: those of the angles that differ, shape (angle, distance, point, 3).

    `of` is the angle to which each of the whole turn's `degrees` is folded.
    """

    points: Array
    degrees: Degrees
    of: NDArray[np.intp]
    upright: bool
    every_bearing: bool

    def spread(self, values: Array) -> Array:
        """Return the largest value at each distance, over the whole turn: shape (angle, distance)."""
        top = values.reshape(self.points.shape[:3]).max(axis=2)
        if self.every_bearing:
            top = np.broadcast_to(top.max(axis=0), top.shape)
        return np.asarray(top[self.of])


def _strongest(source: FieldSource, points: Array, told: Callable[[int], None]) -> tuple[Array, Array]:
    flat = points.reshape(-1, 3)
    electric, magnetic = np.empty(len(flat)), np.empty(len(flat))
    for first in range(0, len(flat), _BLOCK):
        part = slice(first, first + _BLOCK)
        squares = source.strongest(flat[part])
        electric[part], magnetic[part] = squares.electric, squares.magnetic
        told(min(first + _BLOCK, len(flat)))
    return electric, magnetic


def _any_height(source: FieldSource, distances: Array) -> Array:
    """Return the heights that are looked at above each distance [m], shape (distance, height)."""
    lobes = 2.0 * pi * source.point.transmission.frequency / c * source.height if source.grounded else 0.0
    steps = np.union1d(HEIGHTS, np.linspace(0.0, HEIGHTS[-1], ceil(6.0 * lobes) + 1))
    own = source.height + distances[:, None] * np.concatenate([-steps[:0:-1], steps])
    if not source.grounded:
        return np.asarray(own)
    low = np.broadcast_to(np.linspace(0.0, source.height, 5)[:-1], (len(distances), 4))
    return np.concatenate([np.maximum(own, 0.0), low], axis=1)


def _folded(source: FieldSource, degrees: Degrees) -> Degrees:
    """Return for each bearing the one that it mirrors.

    A winding counts with its mirror image, whichever way round it is wound; its link leaves it no second plane.
    """
    loop = source.design.loop
    plain = loop.turns == 1 and loop.shape != "outline"
    if loop.plane == "horizontal":
        return np.abs(degrees) if plain or loop.turns > 1 else degrees
    beyond = np.abs(degrees) > 90
    front = np.where(beyond, np.sign(degrees) * 180 - degrees, degrees)
    return np.abs(front) if plain and source.mirrors else front


def _plan_points(source: FieldSource, distances: Array, heights: Array) -> _Asked:
    """Return points over the plan, at the heights that belong to each distance, shape (distance, height)."""
    whole = np.arange(-180, 181, _TURN)
    own, of = np.unique(_folded(source, whole), return_inverse=True)
    if source.design.loop.rotates:  # the strongest of its bearings counts at each
        own, of = np.unique(_folded(source, np.arange(-180, 181, _BEARINGS))), np.zeros_like(of)
    turns = np.radians(own)[:, None, None]
    x, y = (np.broadcast_to(distances[:, None] * f(turns), (len(own), *heights.shape)) for f in (np.cos, np.sin))
    points = np.stack([x, y, np.broadcast_to(heights, x.shape)], axis=3)
    return _Asked(points, whole, of, upright=False, every_bearing=source.design.loop.rotates)


def _planes(source: FieldSource) -> dict[str, Degrees]:
    """Return the upright views through the centre, with the bearings that each looks at."""
    if source.design.loop.rotates:
        every = np.unique(_folded(source, np.arange(-180, 181, _BEARINGS)))
        return {"at any bearing": every}
    first, second = ("along the axis", "in the plane") if source.design.loop.plane == "vertical" else SIDES_OF_FLAT
    return {first: np.array([0]), second: np.array([90])}


SIDES_OF_FLAT = ("in the plane", "across")


def _side_points(source: FieldSource, distances: Array, bearings: Degrees) -> _Asked:
    """Return points of an upright plane through the centre, those below a ground moved up to it."""
    whole = np.arange(-180, 181, _TURN)
    # With all bearings taken together left and right are alike.
    beyond = np.abs(whole) > 90
    folded = np.where(beyond, np.sign(whole) * 180 - whole, whole) if source.design.loop.rotates else whole
    own, of = np.unique(folded, return_inverse=True)
    up = np.radians(own)[:, None, None]
    turns = np.radians(bearings)
    away = distances[:, None] * np.cos(up)
    height = np.broadcast_to(source.height + distances[:, None] * np.sin(up), (len(own), len(distances), len(turns)))
    if source.grounded:
        height = np.maximum(height, 0.0)
    points = np.stack([away * np.cos(turns), away * np.sin(turns), height], axis=3)
    return _Asked(points, whole, of, upright=True, every_bearing=False)
