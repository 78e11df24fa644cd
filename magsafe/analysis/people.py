"""The strongest field where somebody can be: columns, points and fences."""

from dataclasses import dataclass, replace
from math import ceil, hypot, sqrt

import numpy as np

from magsafe.analysis.field_source import FAR, NEAR, FieldSource, at_bearings, field_source
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.model import Design, Place
from magsafe.physics.arrays import Array

HALF_WIDTH = 0.3  # m, of the column that a person takes up
POSTURES = {"standing": 2.0, "sitting": 1.4, "lying": 0.6}
ELECTRIC_NEAR_CONDUCTOR = 0.3  # m: nearer, the capacitor's and the conductor's own bodies rule the electric field
ELECTRIC_NEAR_CAPACITOR = 0.5
_ACROSS, _UP = 0.15, 0.2  # m, first steps of the search in a column
_REFINEMENTS = 2
_COARSE_FROM = 1.0  # m
_NEARBY = 2.0  # m: nearer, a rotating loop is tried at more bearings
_FENCE_STEPS = (1.0, 1.05, 1.12, 1.25, 1.5, 2.0, 3.0, 5.0)
_FENCE_PAD = 1.02**2  # on squares, for what lies between the points on a fence


@dataclass(frozen=True, slots=True)
class BodyMeans:
    """Means of the squares over a body's height for each watt at the loop, on the worst upright line of its column."""

    electric: float
    magnetic: float


@dataclass(frozen=True, slots=True)
class Strongest:
    """Squares of the strongest RMS fields at a place for each watt at the loop, and why one is not to be trusted.

    `means` are those of a posture, None for a point and for a fence. `nearest` is how near the place comes to the
    conductor's surface [m].
    """

    electric: float
    magnetic: float
    doubts: tuple[str, ...] = ()
    means: BodyMeans | None = None
    nearest: float = 0.0


@dataclass(frozen=True, slots=True)
class _Box:
    """An upright box: its lower and upper corner [m], each (3,)."""

    low: Array
    high: Array


def at_places(design: Design, point: OperatingPoint, places: tuple[Place, ...]) -> tuple[Strongest, ...]:
    """Return the strongest field at each place, in their order; fine pieces of the loop only for places near it."""
    coarse = field_source(design, point, FAR)
    far = {place.name for place in places if _is_far(coarse, place)}
    found: dict[str, Strongest] = {}
    for source, names in ((coarse, far), (None, {place.name for place in places} - far)):
        own = tuple(place for place in places if place.name in names)
        if own:
            used = source or field_source(design, point, NEAR)
            found |= dict(zip((place.name for place in own), search(used, own), strict=True))
    return tuple(found[place.name] for place in places)


def _is_far(source: FieldSource, place: Place) -> bool:
    """Return whether a place keeps so far from the loop that coarse pieces serve: a metre, as keep-out does."""
    if place.fence:
        return place.fence >= source.reach + _COARSE_FROM
    axis, _ = source.clearance(_grid(_boxes(source.design, place)))
    return bool(axis.min() >= _COARSE_FROM)


def search(source: FieldSource, places: tuple[Place, ...]) -> tuple[Strongest, ...]:
    """Return the strongest field of one source at each place, in their order.

    A column is searched on its surface, where a field without sources inside is strongest, first in steps of 0.15 m
    across and 0.2 m up, then about its best points in steps a quarter of that.
    """
    boxes = [_boxes(source.design, place) for place in places]
    grids = [_fence(source, place) if place.fence else _grid(own) for place, own in zip(places, boxes, strict=True)]
    owners = np.repeat(np.arange(len(places)), [len(grid) for grid in grids])
    found = _Search(source, len(places))
    squares = found.look(np.concatenate(grids), owners)
    means = [_means(own, squares[:, owners == index]) for index, own in enumerate(boxes)]
    step = np.array([_ACROSS, _ACROSS, _UP])
    for _ in range(_REFINEMENTS):
        step = step / 2.0
        found.look(*_about(found, boxes, step))
    return tuple(replace(found.result(index, place), means=means[index]) for index, place in enumerate(places))


class _Search:
    """Keeps the best points so far, for the electric and the magnetic field of each place."""

    def __init__(self, source: FieldSource, count: int) -> None:
        self.source = source
        self.best = np.zeros((2, count))
        self.where = np.full((2, count, 3), np.nan)
        self.axis = np.full(count, np.inf)
        self.port = np.full(count, np.inf)
        self.buried = np.zeros(count, dtype=bool)
        self.radius = source.wires[0].radius

    def look(self, points: Array, owners: np.ndarray[tuple[int], np.dtype[np.intp]]) -> Array:
        """Evaluate points, each for the place that owns it; return the squares, shape (field, point), 0 if unknown."""
        seen = np.zeros((2, len(points)))
        axis, port = self.source.clearance(points)
        np.minimum.at(self.axis, owners, axis)
        np.minimum.at(self.port, owners, port)
        below = points[:, 2] < 0.0 if self.source.grounded else np.zeros(len(points), dtype=bool)
        np.logical_or.at(self.buried, owners, below)
        sound = (axis >= self.radius) & ~below
        points, owners, axis, port = points[sound], owners[sound], axis[sound], port[sound]
        if not len(points):
            return seen
        squares = self.source.strongest(points)
        trusted = (axis >= ELECTRIC_NEAR_CONDUCTOR) & (port >= ELECTRIC_NEAR_CAPACITOR)
        for kind, values in enumerate((np.where(trusted, squares.electric, 0.0), squares.magnetic)):
            seen[kind, sound] = values
            for owner in np.unique(owners):
                own = np.flatnonzero(owners == owner)
                top = own[np.argmax(values[own])]
                if values[top] > self.best[kind, owner]:
                    self.best[kind, owner] = values[top]
                    self.where[kind, owner] = points[top]
        return seen

    def result(self, index: int, place: Place) -> Strongest:
        """Return what was found for a place."""
        doubts = []
        if self.axis[index] < ELECTRIC_NEAR_CONDUCTOR or self.port[index] < ELECTRIC_NEAR_CAPACITOR:
            doubts.append(
                f"it comes within {ELECTRIC_NEAR_CONDUCTOR:g} m of the conductor or {ELECTRIC_NEAR_CAPACITOR:g} m of "
                "the capacitor, where the electric field is that of their bodies and is not computed"
            )
        if self.axis[index] < self.radius:
            doubts.append("the conductor runs through it")
        if self.buried[index]:
            doubts.append("part of it is below the ground")
        if place.fence and place.fence < self.source.reach:
            doubts.append("the fence is inside the loop's outline")
        pad = _FENCE_PAD if place.fence else 1.0
        return Strongest(
            float(self.best[0, index]) * pad,
            float(self.best[1, index]) * pad,
            tuple(doubts),
            nearest=max(0.0, float(self.axis[index]) - self.radius),
        )


def _boxes(design: Design, place: Place) -> list[_Box]:
    """Return the box of a place, or one for each bearing of a loop that rotates; none for a fence."""
    if place.fence:
        return []
    (x, y), half = _middle(design, place), _half_width(place)
    ((low, high),) = _heights(design, place)
    centres = np.array([[x, y, 0.0]])
    if design.loop.rotates:
        centres = at_bearings(
            np.array([[hypot(x, y), 0.0, 0.0]]),
            np.radians(np.arange(0.0, 360.0, 5.0 if hypot(x, y) < _NEARBY else 7.5)),
        )
    wide = np.array([half, half, 0.0])
    return [_Box(centre - wide + [0.0, 0.0, low], centre + wide + [0.0, 0.0, high]) for centre in centres]


def from_centre(design: Design, place: Place) -> float:
    """Return how near somebody at a place comes to the loop's centre [m]; without its height, as if at its height."""
    level = design.loop.centre_height
    level = _heights(design, place)[0][0] if level is None else level
    return nearest_to(np.array([[0.0, 0.0, level]]), design, place)


def nearest_to(parts: Array, design: Design, place: Place) -> float:
    """Return how near somebody at a place comes to the nearest of some parts of the loop [m], shape (part, 3).

    That is the nearest point of the column that they take up; of a rotating loop at its worst bearing.
    """
    x, y, z = parts.T
    from_axis = np.hypot(x, y)
    half, middle = _half_width(place), np.array(_middle(design, place))
    if place.fence:
        aside = np.maximum(0.0, place.fence - from_axis)
    elif design.loop.rotates:
        aside = np.maximum(0.0, np.abs(np.hypot(*middle) - from_axis) - sqrt(2.0) * half)
    else:
        aside = np.linalg.norm(np.maximum(0.0, np.abs(parts[:, :2] - middle) - half), axis=1)
    spans = _heights(design, place)
    above = np.min([np.maximum(0.0, np.maximum(low - z, z - high)) for low, high in spans], axis=0)
    return float(np.hypot(aside, above).min())


def _middle(design: Design, place: Place) -> tuple[float, float]:
    """Return where the middle of a place is on the ground, x and y [m]."""
    upright = design.loop.plane == "vertical"
    first, second = (place.along_axis, place.in_plane) if upright else (place.in_plane, place.across)
    return first or 0.0, second or 0.0


def _half_width(place: Place) -> float:
    """Return how far a place reaches either way of its middle [m]; a stated height makes it a point."""
    return HALF_WIDTH if place.height is None else 0.0


def _heights(design: Design, place: Place) -> list[tuple[float, float]]:
    """Return from which height to which a place reaches [m], of a fence on every floor."""
    if place.height is not None:
        return [(place.height, place.height)]
    floors = (design.site.floors or [0.0]) if place.fence else [place.floor or 0.0]
    tall = POSTURES["standing" if place.fence else place.posture or "standing"]
    return [(floor, floor + tall) for floor in floors]


def _grid(boxes: list[_Box]) -> Array:
    return np.concatenate([_surface(box) for box in boxes])


def _means(boxes: list[_Box], squares: Array) -> BodyMeans | None:
    """Return the means over the height on the worst upright line of the boxes' sides; None where there is no height.

    `squares` are those of the boxes' surfaces, shape (field, point). A field without sources inside is strongest on
    the surface, and so is its mean over the height but for what the two ends do.
    """
    if not boxes or boxes[0].high[2] == boxes[0].low[2]:
        return None
    steps = len(_steps_up(boxes[0]))
    own = squares.reshape(2, len(boxes), -1)
    sides = int(_grid_across(boxes[0])[1].sum())
    lines = own[:, :, : sides * steps].reshape(2, -1, steps)
    means = (lines.sum(axis=2) - 0.5 * (lines[:, :, 0] + lines[:, :, -1])) / (steps - 1)
    return BodyMeans(*(float(each) for each in means.max(axis=1)))


def _steps_up(box: _Box) -> Array:
    height = box.high[2] - box.low[2]
    return np.linspace(box.low[2], box.high[2], max(1, ceil(height / _UP)) + 1) if height > 0.0 else box.low[2:3]


def _grid_across(box: _Box) -> tuple[Array, np.ndarray[tuple[int, int], np.dtype[np.bool_]]]:
    """Return horizontal positions, shape (x, y, 2), and which of them lie on the rim."""
    size = box.high - box.low
    side = np.linspace(0.0, 1.0, round(size[0] / _ACROSS) + 1)
    x, y = np.meshgrid(side, side)
    rim = (x == 0.0) | (x == 1.0) | (y == 0.0) | (y == 1.0)
    return np.stack([x, y], axis=2) * size[:2] + box.low[:2], rim


def _surface(box: _Box) -> Array:
    """Return points on all faces of a box, its sides first, and on its one upright line where it has no width."""
    size, up = box.high - box.low, _steps_up(box)
    if size[0] == 0.0:
        return _stacked(box.low[None, :2], up)
    across, rim = _grid_across(box)
    return np.concatenate([_stacked(across[rim], up), _stacked(across[~rim], up[[0, -1]])])


def _stacked(across: Array, up: Array) -> Array:
    """Return every horizontal position at every height, shape (point, 3)."""
    return np.concatenate([np.repeat(across, len(up), axis=0), np.tile(up, len(across))[:, None]], axis=1)


def _about(
    found: _Search, boxes: list[list[_Box]], step: Array
) -> tuple[Array, np.ndarray[tuple[int], np.dtype[np.intp]]]:
    """Return points a step about the best ones, kept in their boxes."""
    offsets = np.stack(np.meshgrid(*[[-1.0, 0.0, 1.0]] * 3), axis=-1).reshape(-1, 3) * step
    points, owners = [np.empty((0, 3))], [np.empty(0, dtype=np.intp)]
    for owner, own in enumerate(boxes):
        for best in found.where[:, owner]:
            for box in own:
                if np.all(best >= box.low - 1e-9) and np.all(best <= box.high + 1e-9):
                    near = np.clip(best + offsets, box.low, box.high)
                    points.append(near)
                    owners.append(np.full(len(near), owner, dtype=np.intp))
                    break
    return np.concatenate(points), np.concatenate(owners)


def _fence(source: FieldSource, place: Place) -> Array:
    """Return points on and outside a fence, at every bearing, at the heights of people on each floor.

    The fence itself is looked at in steps of 5 degrees and 0.1 m, what lies outside it more coarsely.
    """
    floors = source.design.site.floors or [0.0]
    radius, made = place.fence or 0.0, []
    for further, up, turn in ((_FENCE_STEPS[:1], 0.1, 5.0), (_FENCE_STEPS[1:], 0.5, 10.0)):
        heights = [floor + step for floor in floors for step in np.linspace(0.0, 2.0, round(2.0 / up) + 1)]
        ring = np.array([[radius * each, 0.0, z] for each in further for z in heights])
        made.append(at_bearings(ring, np.radians(np.arange(0.0, 360.0, turn))))
    return np.concatenate(made)
