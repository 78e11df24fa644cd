"""Shapes as wires: a turn's outline in its plane, wound into one or more turns, cut into straight segments.

A turn lies in a plane (first axis, second axis) with its port facing somewhere; winding adds the third axis, along the
loop's axis. A wire is a closed chain of segments in space whose first segment is the port.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from magsafe.physics.arrays import Array

LINK = -1  # label of segments that belong to no turn: the link that closes a winding
ROUND_POINTS = 720  # of a circle before it is cut into segments
GROWTH = 0.35  # of segments with their distance from the port
LEAST_SIDE = 2.0  # conductor radii: shorter sides than that cannot be told from one bent piece


@dataclass(frozen=True, slots=True)
class Turn:
    """One turn's centre line in its plane, against the clock from the middle of its port.

    Attributes
    ----------
    points : points of the closed line [m], shape (point, 2), each once
    corner : whether the line has a corner at a point, shape (point,)
    """

    points: Array
    corner: NDArray[np.bool_]

    @property
    def inward(self) -> Array:
        """How a point moves for each metre that the line is set inwards [1], shape (point, 2)."""
        after = np.roll(self.points, -1, axis=0) - self.points
        after /= np.linalg.norm(after, axis=1)[:, None]
        normal = np.stack([-after[:, 1], after[:, 0]], axis=1)
        before = np.roll(normal, 1, axis=0)
        return np.asarray((normal + before) / (1.0 + (normal * before).sum(axis=1))[:, None])


@dataclass(frozen=True, slots=True)
class Path:
    """A closed line in space before it is cut, from the middle of its port.

    Attributes
    ----------
    points : points [m], shape (point, 3): in the plane of the turns, and along their axis
    measure : where each point lies along the line [m], shape (point,), and last the whole, shape (point + 1,): its
        length; within a winding, the same for every turn, so that the segments of neighbours line up
    hard : whether a segment must end at a point, shape (point,)
    turn : turn to which the piece after each point belongs, `LINK` for none, shape (point,)
    smooth : whether the line is round, so that chords enclose less than it does
    """

    points: Array
    measure: Array
    hard: NDArray[np.bool_]
    turn: NDArray[np.intp]
    smooth: bool


@dataclass(frozen=True, slots=True)
class Wire:
    """A closed chain of straight round segments with one port.

    Attributes
    ----------
    nodes : where segments begin [m], shape (segment, 3): segment m runs from node m to node m + 1, the last one back to
        node 0, and segment 0 is the port
    turn : turn to which each segment belongs, `LINK` for none, shape (segment,)
    radius : conductor radius [m]
    """

    nodes: Array
    turn: NDArray[np.intp]
    radius: float

    @property
    def ends(self) -> Array:
        """Where segments end [m], shape (segment, 3)."""
        return np.roll(self.nodes, -1, axis=0)

    @property
    def length(self) -> Array:
        """Length of each segment [m], shape (segment,)."""
        return np.asarray(np.linalg.norm(self.ends - self.nodes, axis=1))

    @property
    def direction(self) -> Array:
        """Unit vector along each segment [1], shape (segment, 3)."""
        return (self.ends - self.nodes) / self.length[:, None]


def round_turn(radius: float) -> Turn:
    """Return a circular turn with its port on the first axis.

    Parameters
    ----------
    radius : radius of the circle [m]

    Returns
    -------
    the turn; the many-sided polygon that stands for it has the circle's area

    Valid     any radius.
    Source    plane geometry.
    """
    step = 2.0 * np.pi / ROUND_POINTS
    angles = step * np.arange(ROUND_POINTS)
    corner_radius = radius * np.sqrt(step / np.sin(step))
    points = corner_radius * np.stack([np.cos(angles), np.sin(angles)], axis=1)
    return Turn(points, np.zeros(ROUND_POINTS, dtype=np.bool_))


def cornered_turn(corners: Array, side: int) -> Turn:
    """Return a turn with straight sides, its port in the middle of one of them.

    Parameters
    ----------
    corners : corners in either sense [m], shape (corner, 2)
    side : index of the corner at which the port's side begins, in the order given [1]

    Returns
    -------
    the turn, against the clock

    Valid     outlines that do not cross themselves.
    Source    plane geometry.
    """
    following = np.roll(corners, -1, axis=0)
    middle = 0.5 * (corners[side] + following[side])
    after = np.roll(corners, -(side + 1), axis=0)
    if float((corners[:, 0] * following[:, 1] - following[:, 0] * corners[:, 1]).sum()) < 0.0:
        after = after[::-1]
    points = np.concatenate([middle[None], after])
    return Turn(points, np.arange(len(points)) > 0)


def regular_corners(sides: int, corner_radius: float) -> Array:
    """Return the corners of a regular polygon, the middle of its first side on the first axis.

    Parameters
    ----------
    sides : number of sides [1], 3 or more
    corner_radius : distance from the centre to a corner [m]

    Returns
    -------
    corners in the plane [m], shape (sides, 2), against the clock

    Valid     3 sides or more.
    Source    plane geometry.
    """
    angles = np.pi / sides * (2.0 * np.arange(sides) - 1.0)
    return np.asarray(corner_radius * np.stack([np.cos(angles), np.sin(angles)], axis=1))


def turned(turn: Turn, angle: float) -> Turn:
    """Return a turn rotated in its plane against the clock by an angle [rad].

    Source    plane geometry.
    """
    cosine, sine = np.cos(angle), np.sin(angle)
    return Turn(turn.points @ np.array([[cosine, sine], [-sine, cosine]]), turn.corner)


def wind(turn: Turn, turns: int = 1, spacing: float = 0.0, nested: bool = False) -> Path:
    """Return a winding of equal turns side by side (a helix), or nested in one plane (a spiral).

    The winding is closed by a link with the port in its middle, one spacing outside the turns (side by side) or beside
    their plane (nested).

    Parameters
    ----------
    turn : the turn [m]; of nested ones the outermost
    turns : number of turns [1]
    spacing : distance of neighbouring turns, centre to centre [m]; nothing with one turn
    nested : whether the turns lie in one plane [1]

    Returns
    -------
    the closed line

    Raises
    ------
    ValueError : nested turns for which there is no room inside the outermost one

    Valid     the helix advances evenly, half a spacing at the port on either side of where turn i of n would lie flat,
              at (i - (n - 1)/2) spacings; the spiral likewise.
    Source    geometry.
    """
    smooth = not turn.corner.any()
    sides = np.linalg.norm(np.roll(turn.points, -1, axis=0) - turn.points, axis=1)
    along = np.concatenate([[0.0], np.cumsum(sides)])
    if turns == 1:
        level = np.concatenate([turn.points, np.zeros((len(turn.points), 1))], axis=1)
        return Path(level, along, turn.corner, np.zeros(len(level), dtype=np.intp), smooth)
    share = along[:-1] / along[-1]
    advance = np.concatenate([[*(number + share)] for number in range(turns)] + [[float(turns)]]) * spacing
    plane = np.concatenate([np.tile(turn.points, (turns, 1)), turn.points[:1]])
    first_of_turn = np.arange(len(turn.points)) == 0
    hard = np.concatenate([np.tile(turn.corner | first_of_turn, turns), [True]])
    label = np.concatenate([np.repeat(np.arange(turns), len(turn.points)), [LINK]])
    if nested:
        _require_room(turn, spacing * (turns - 0.5))
        inward = np.concatenate([np.tile(turn.inward, (turns, 1)), turn.inward[:1]])
        plane = plane + inward * (advance - 0.5 * spacing)[:, None]
        line = np.concatenate([plane, np.zeros((len(plane), 1))], axis=1)
        aside = np.array([0.0, 0.0, spacing])
    else:
        line = np.concatenate([plane, (advance - 0.5 * turns * spacing)[:, None]], axis=1)
        aside = np.append(-turn.inward[0] * spacing, 0.0)
    first, last = line[0] + aside, line[-1] + aside
    points = np.concatenate([[0.5 * (first + last), first], line, [last]])
    half, stub = 0.5 * float(np.linalg.norm(last - first)), float(np.linalg.norm(aside))
    wound = (half + stub) + along[-1] * np.concatenate([*(number + share for number in range(turns)), [float(turns)]])
    measure = np.concatenate([[0.0, half], wound, [wound[-1] + stub, wound[-1] + stub + half]])
    hard = np.concatenate([[False, True], hard, [True]])
    return Path(points, measure, hard, np.concatenate([[LINK, LINK], label, [LINK]]), smooth)


def _require_room(turn: Turn, depth: float) -> None:
    inner = turn.points + turn.inward * depth
    outer, kept = np.roll(turn.points, -1, axis=0) - turn.points, np.roll(inner, -1, axis=0) - inner
    if float((outer * kept).sum(axis=1).min()) <= 0.0:
        raise ValueError(f"no room for turns {depth:.3g} m inside the outermost one")


def cut(path: Path, radius: float, longest: float, gap: float) -> Wire:
    """Return a path as a chain of segments: short at the port, growing with the distance from it.

    A round path keeps the area that it encloses, seen along its axis.

    Parameters
    ----------
    path : the line [m]
    radius : conductor radius [m]
    longest : largest length of a segment [m]
    gap : width of the port, the length of the first segment [m]

    Returns
    -------
    the wire

    Raises
    ------
    ValueError : a port that reaches round the next corner

    Valid     a corner nearer to the one before than two conductor radii is left out.
    Source    plane geometry: equal area. An inscribed polygon of 16 sides radiates 5 % too little.
    """
    whole, ends = float(path.measure[-1]), path.measure[:-1][path.hard]
    if len(ends) and gap >= 2.0 * min(float(ends[0]), whole - float(ends[-1])):
        raise ValueError(f"a port of {gap:.3g} m reaches round the next corner")
    least = LEAST_SIDE * radius
    kept = [whole - 0.5 * gap]
    for first, last in pairwise(_far_apart([0.5 * gap, *ends, whole - 0.5 * gap], least)):
        here = path.turn[np.searchsorted(path.measure, 0.5 * (first + last), side="right") - 1]
        even = here != LINK and LINK in path.turn
        kept.extend(_pieces(first, last, whole, longest, longest if even else gap, least))
    nodes_at = np.array(kept)
    closed = np.concatenate([path.points, path.points[:1]])
    nodes = np.stack([np.interp(nodes_at, path.measure, closed[:, i]) for i in range(3)], axis=1)
    if path.smooth:
        nodes[:, :2] *= np.sqrt(_area(path.points) / _area(nodes))
    middles = 0.5 * (nodes_at + np.append(nodes_at[1:], whole - 0.5 * gap))
    middles[0] = 0.0
    label = path.turn[np.searchsorted(path.measure, middles, side="right") - 1]
    return Wire(nodes, np.asarray(label, dtype=np.intp), radius)


def _far_apart(places: list[float], least: float) -> list[float]:
    """Return the sorted places without those closer than `least` to the one before; both ends stay."""
    kept = [places[0]]
    for place in places[1:-1]:
        if place - kept[-1] >= least and places[-1] - place >= least:
            kept.append(place)
    return [*kept, places[-1]]


def _pieces(first: float, last: float, whole: float, longest: float, shortest: float, least: float) -> Array:
    """Return where the segments between two places begin, the second place left out.

    They grow from `shortest` at the port, where none of them is shorter than `least` by the rounding of their number.
    """
    along = np.linspace(first, last, 65)
    off = np.minimum(along, whole - along) - 0.5 * shortest
    density = 1.0 / np.minimum(longest, shortest + GROWTH * np.maximum(off, 0.0))
    counted = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]) * np.diff(along))])
    count = max(1, min(int(np.ceil(counted[-1] - 1e-9)), int((last - first) / least)))
    return np.asarray(np.interp(np.arange(count) / count * counted[-1], counted, along))


def _area(points: Array) -> float:
    x, y = points[:, 0], points[:, 1]
    return abs(0.5 * float((x * np.roll(y, -1) - y * np.roll(x, -1)).sum()))


def upright(wire: Wire, height: float) -> Wire:
    """Return a wire with its turns in vertical planes, its axis along x, its centre at a height [m].

    Source    convention of the house (DEVELOPERS.md).
    """
    across, up, along = wire.nodes.T
    return Wire(np.stack([along, across, up + height], axis=1), wire.turn, wire.radius)


def flat(wire: Wire, height: float) -> Wire:
    """Return a wire with its turns in horizontal planes, its axis along z, its centre at a height [m].

    Source    convention of the house (DEVELOPERS.md).
    """
    return Wire(wire.nodes + np.array([0.0, 0.0, height]), wire.turn, wire.radius)
