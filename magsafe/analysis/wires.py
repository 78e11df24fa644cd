"""A design's loop as wires, and the matrices solved on them, kept for the next frequency."""

from dataclasses import dataclass
from functools import lru_cache
from math import pi, sin

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c

from magsafe.design.model import Conductor, Design, Loop
from magsafe.design.shape import Outline, outline
from magsafe.physics import geometry, thin_wire
from magsafe.physics.arrays import Array
from magsafe.physics.geometry import LINK, Turn, Wire
from magsafe.physics.thin_wire import Potentials

PER_TURN = {1: 48, 2: 48}  # segments of one turn; doubling them moves no figure by 0.3 %
PER_TURN_OF_MANY = 24  # the same for three turns and more: 0.5 %
PER_WAVELENGTH = 20
LEAST_LENGTH = 3.0  # conductor radii
BEND = 12.0  # conductor radii of its way, within which a conductor may come near itself in a bend
GAP = (4.0, 0.01, 0.06)  # width of the port: so many conductor radii, or of perimeters up to so many metres
POSITIONS = ("top", "bottom", "side", "other side")
_ANGLES = {"top": pi / 2.0, "bottom": -pi / 2.0, "side": 0.0, "other side": pi}


@dataclass(frozen=True, slots=True)
class Shape:
    """A loop's wire by the numbers that make it, so that what was solved for it can be found again.

    `corners` is empty for a circle; `side` is the corner at which the port's side begins; `port_angle` turns the loop
    in its plane. Lengths in metres.
    """

    round_radius: float
    corners: tuple[tuple[float, float], ...]
    side: int
    port_angle: float
    turns: int
    spacing: float
    nested: bool
    upright: bool
    height: float
    radius: float
    longest: float
    gap: float

    @property
    def turn(self) -> Turn:
        """The turn (the outermost, where turns are nested) in its plane."""
        if self.corners:
            plain = geometry.cornered_turn(np.array(self.corners, dtype=np.float64), self.side)
        else:
            plain = geometry.round_turn(self.round_radius)
        return geometry.turned(plain, self.port_angle) if self.port_angle else plain


def electrical_radius(made_of: Conductor) -> float:
    """Return the radius of the round conductor of the same inductance and capacitance [m]."""
    if made_of.form == "strip":
        from magsafe.physics import strip  # noqa: PLC0415  (it brings a root finder, which is slow to import)

        return strip.equivalent_radius(made_of.width or 0.0, made_of.thickness or 0.0)
    return (made_of.outer_diameter or 0.0) / 2.0


def positions(design: Design) -> tuple[str | None, ...]:
    """Return where the capacitor may be: where it is stated, or at the top, the bottom or either side."""
    if design.loop.plane == "horizontal":
        return (None,)
    return (design.capacitor.position,) if design.capacitor.position else POSITIONS


def shape_of(loop: Loop, frequency: float, position: str | None) -> Shape:
    """Return the shape of a loop, fine enough for a frequency [Hz], with its port at a position (None: lying flat)."""
    line, radius = outline(loop), electrical_radius(loop.conductor)
    pieces = PER_TURN.get(loop.turns, PER_TURN_OF_MANY)
    longest = max(min(line.perimeter / pieces, c / frequency / PER_WAVELENGTH), LEAST_LENGTH * radius)
    gap = max(GAP[0] * radius, min(GAP[1] * line.perimeter, GAP[2]))
    corners, side, angle = _corners(loop, line, position)
    if corners:
        own = np.array(corners, dtype=np.float64)
        gap = min(gap, 0.5 * float(np.linalg.norm(own[(side + 1) % len(own)] - own[side])))
    spacing = (loop.turn_spacing or 0.0) if loop.turns > 1 else 0.0
    if loop.turns > 1:
        gap = min(gap, 0.5 * loop.turns * spacing)
    return Shape(
        round_radius=line.reach if loop.shape == "circle" else 0.0,
        corners=corners,
        side=side,
        port_angle=angle,
        turns=loop.turns,
        spacing=spacing,
        nested=loop.turns > 1 and loop.turn_arrangement == "nested",
        upright=loop.plane == "vertical",
        height=loop.centre_height or 0.0,
        radius=radius,
        longest=longest,
        gap=gap,
    )


def _corners(loop: Loop, line: Outline, position: str | None) -> tuple[tuple[tuple[float, float], ...], int, float]:
    """Return corners about the loop's centre, the corner at which the port's side begins, and how far it is turned."""
    if loop.shape in ("circle", "polygon"):
        turned = _ANGLES[position] if position else 0.0
        if loop.shape == "circle":
            return (), 0, turned
        corners = geometry.regular_corners(loop.sides or 3, line.reach)
        return _as_tuple(corners), 0, turned
    if loop.shape == "rectangle":
        width, height = loop.width or 0.0, loop.height or 0.0
        corners = np.array([[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]]) * np.array([width, height]) / 2.0
    else:
        corners = np.array(loop.points, dtype=np.float64)
        corners = corners - 0.5 * (corners.min(axis=0) + corners.max(axis=0))
    return _as_tuple(corners), _port_side(corners, position), 0.0


def _as_tuple(corners: Array) -> tuple[tuple[float, float], ...]:
    return tuple((float(across), float(up)) for across, up in corners)


def _port_side(corners: Array, position: str | None) -> int:
    """Return the side whose middle lies furthest towards the position; of equal ones the longest or rightmost."""
    following = np.roll(corners, -1, axis=0)
    middle, length = 0.5 * (corners + following), np.linalg.norm(following - corners, axis=1)
    known = {"top": middle[:, 1], "bottom": -middle[:, 1], "other side": -middle[:, 0]}
    towards = known.get(position or "side", middle[:, 0])
    size = float(length.sum())
    return int(np.argmax(np.round(towards / size, 6) + 1e-7 * length / size + 1e-9 * middle[:, 0] / size))


@lru_cache(maxsize=256)
def wire_of(shape: Shape) -> Wire:
    """Return the wire of a shape in its place."""
    path = geometry.wind(shape.turn, shape.turns, shape.spacing, shape.nested)
    made = geometry.cut(path, shape.radius, shape.longest, shape.gap)
    return geometry.upright(made, shape.height) if shape.upright else geometry.flat(made, shape.height)


@lru_cache(maxsize=96)
def potentials(shape: Shape, highest: float, *, image: bool) -> Potentials:
    """Return the matrices of a shape on itself, or of its image on it, for frequencies up to the highest [Hz]."""
    return thin_wire.potentials(wire_of(shape), highest, image, crowding(shape))


def crowding(shape: Shape) -> Array | None:
    """Return what crowding takes from the coefficients of potential of a shape's turns; None for a single one."""
    if shape.turns == 1:
        return None
    from magsafe.physics.proximity import crowded_coefficients  # noqa: PLC0415  (only for turns: slow to import)

    return crowded_coefficients(shape.turns, shape.spacing, 2.0 * shape.radius)


def extent(design: Design) -> float:
    """Return how far the conductor's axis reaches from the loop's centre [m], with all turns and their closing link.

    Of turns that find no room inside the outermost one, which nothing is computed of, how far that one reaches.
    """
    if design.loop.turns == 1:
        return outline(design.loop).reach
    centre = np.array([0.0, 0.0, design.loop.centre_height or 0.0])
    frequency = design.transmission[0].frequency
    try:
        reached = [
            float(np.linalg.norm(wire_of(shape_of(design.loop, frequency, position)).nodes - centre, axis=1).max())
            for position in positions(design)
        ]
    except ValueError:
        return outline(design.loop).reach
    return max(outline(design.loop).reach, *reached)


def clearance(wire: Wire) -> float:
    """Return how near a conductor comes to itself, axis to axis, in diameters; along its own way it may bend."""
    middle = np.cumsum(wire.length) - 0.5 * wire.length
    way = np.abs(middle[:, None] - middle)
    way = np.minimum(way, float(wire.length.sum()) - way) - 0.5 * (wire.length[:, None] + wire.length)
    # The link that closes a winding is nobody's measure.
    elsewhere = (way > BEND * wire.radius) & np.outer(wire.turn != LINK, wire.turn != LINK)
    first, second = np.nonzero(np.triu(elsewhere))
    return float(_apart(wire, first, second).min(initial=np.inf)) / (2.0 * wire.radius)


def _apart(wire: Wire, first: NDArray[np.intp], second: NDArray[np.intp]) -> Array:
    """Return the least distance of pairs of segments [m]: of an end from the other, or where they pass each other."""
    start, end = wire.nodes, wire.ends

    def off(points: Array, segment: NDArray[np.intp]) -> Array:
        offset = points - start[segment]
        along = np.clip(np.einsum("pi,pi->p", offset, wire.direction[segment]), 0.0, wire.length[segment])
        return np.asarray(np.linalg.norm(offset - along[:, None] * wire.direction[segment], axis=1))

    least = np.minimum.reduce(
        [off(start[first], second), off(end[first], second), off(start[second], first), off(end[second], first)]
    )
    u, v, between = wire.direction[first], wire.direction[second], start[second] - start[first]
    cosine = np.einsum("pi,pi->p", u, v)
    sine = np.maximum(1.0 - cosine**2, 1e-12)
    p, q = np.einsum("pi,pi->p", between, u), np.einsum("pi,pi->p", between, v)
    s, t = (p - cosine * q) / sine, (cosine * p - q) / sine
    passing = (s > 0.0) & (s < wire.length[first]) & (t > 0.0) & (t < wire.length[second])
    apart = np.linalg.norm(between + t[:, None] * v - s[:, None] * u, axis=1)
    return np.asarray(np.where(passing, np.minimum(least, apart), least))


def shortest_side(loop: Loop) -> float | None:
    """Return the length of the shortest straight side [m]; None for a circle."""
    line = outline(loop)
    if loop.shape == "circle":
        return None
    if loop.shape == "polygon":
        return 2.0 * line.reach * sin(pi / (loop.sides or 3))
    if loop.shape == "rectangle":
        return min(loop.width or 0.0, loop.height or 0.0)
    points = np.array(loop.points, dtype=np.float64)
    return float(np.linalg.norm(np.roll(points, -1, axis=0) - points, axis=1).min())
