"""The loop as a source of fields: its current on wires, and the strongest field that it may have at a point.

The field is that of the tapered current on the real outline, in free space and with its image in a perfect plane, each
with the current that the loop would draw there; the stronger of them counts, squared field strengths for each watt
that arrives at the loop.
"""

from dataclasses import dataclass
from math import ceil, pi

import numpy as np
from scipy.constants import c

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.model import Design, Loop
from magsafe.design.shape import Outline, outline
from magsafe.physics import geometry, near_field
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.near_field import SegmentCurrents

NEAR_PIECE = 0.15  # m: pieces for places, whose electric field is judged from 0.3 m outwards
FAR_PIECE = 0.4  # m: pieces for distances, searched from 1 m off the outline outwards
_LEAST_PIECES = {NEAR_PIECE: 48, FAR_PIECE: 24}
_NODES = {NEAR_PIECE: near_field.NODES, FAR_PIECE: 2}
_PORT_ANGLES = {"side": 0.0, "top": pi / 2.0, "bottom": -pi / 2.0}


@dataclass(frozen=True, slots=True)
class Squares:
    """Squares of the RMS field strengths at points for each watt at the loop, shape (point,)."""

    electric: Array
    magnetic: Array


@dataclass(frozen=True, slots=True)
class FieldSource:
    """The current of one operating point on wires.

    `wires` holds one current for each place where the capacitor may be: one where it is stated. All carry 1 A into the
    conductor at the port. `bare_factor` is what the squares grow by without credit for typical losses, `likely_factor`
    the likely square over the dangerous one.
    """

    design: Design
    point: OperatingPoint
    line: Outline
    wires: tuple[SegmentCurrents, ...]
    nodes: int

    @property
    def height(self) -> float:
        """Height of the loop's centre [m]; 0 in free space where none is given."""
        return self.design.loop.centre_height or 0.0

    @property
    def grounded(self) -> bool:
        """Whether a plane may be under the loop: then nothing is below z = 0."""
        return any(case.image for case in self.point.ground_cases)

    @property
    def bare_factor(self) -> float:
        """Squares without credit for typical losses over those with it."""
        return max(case.bare_square / case.square for case in self.point.ground_cases)

    @property
    def likely_factor(self) -> float:
        """Likely squares over dangerous ones."""
        return min(case.likely_square / case.square for case in self.point.ground_cases)

    @property
    def mirrors(self) -> bool:
        """Whether the two halves on either side of the loop's axis mirror each other."""
        return self.design.loop.plane == "vertical" and self.design.capacitor.position in ("top", "bottom")

    @property
    def ports(self) -> Array:
        """Where the capacitor may be [m], shape (port, 3)."""
        return np.stack([wire.start[0] for wire in self.wires])

    def strongest(self, points: Array) -> Squares:
        """Return the strongest field at points outside the conductor [m], shape (point, 3), z >= 0 over a plane."""
        electric, magnetic = np.zeros(len(points)), np.zeros(len(points))
        frequency = self.point.transmission.frequency
        images = any(case.image for case in self.point.ground_cases)
        for wire in self.wires:
            own = near_field.fields(points, wire, frequency, self.nodes)
            below = near_field.fields(points, _image(wire), frequency, self.nodes) if images else own
            for case in self.point.ground_cases:
                for found, field, mirrored in zip((electric, magnetic), own, below, strict=True):
                    total: ComplexArray = field + mirrored if case.image else field
                    np.maximum(found, case.square * near_field.magnitude(total) ** 2, out=found)
        wider = (1.0 + self.point.field_error) ** 2
        return Squares(electric * wider, magnetic * wider)

    def clearance(self, points: Array) -> tuple[Array, Array]:
        """Return the distances [m] to the conductor's axis and to the capacitor, shape (point,) each."""
        axis = np.min([near_field.distance_to_axis(points, wire) for wire in self.wires], axis=0)
        apart = points[:, None, :] - self.ports[None, :, :]
        return np.asarray(axis), np.asarray(np.linalg.norm(apart, axis=2).min(axis=1))


def _image(wire: SegmentCurrents) -> SegmentCurrents:
    """Return the mirrored half alone: the other half's field is known already."""
    both, count = near_field.with_image(wire), len(wire.start)
    return SegmentCurrents(
        both.start[count:], both.end[count:], both.current_start[count:], both.current_end[count:], both.radius
    )


def field_source(design: Design, point: OperatingPoint, piece: float) -> FieldSource:
    """Return the source of an operating point that the closed forms reach, in pieces no longer than `piece` [m]."""
    line = outline(design.loop)
    count = max(_LEAST_PIECES[piece], ceil(line.perimeter / piece))
    frequency = point.transmission.frequency
    chains = _chains(design.loop, line, count, design.capacitor.position)
    wires = tuple(_tapered(chain, design, line, frequency) for chain in chains)
    return FieldSource(design, point, line, wires, _NODES[piece])


def _chains(loop: Loop, line: Outline, count: int, position: str | None) -> list[Array]:
    if loop.shape == "circle":
        plane = geometry.circle_corners(line.reach, count)
    else:
        sides = loop.sides or 3
        plane = geometry.regular_corners(sides, line.reach, 2 * ceil(count / sides / 2.0))
    height = loop.centre_height or 0.0
    if loop.plane == "horizontal":
        return [geometry.flat(plane, height)]
    angles = [_PORT_ANGLES[position]] if position else list(_PORT_ANGLES.values())
    return [geometry.upright(plane, angle, height) for angle in angles]


def _tapered(chain: Array, design: Design, line: Outline, frequency: float) -> SegmentCurrents:
    """Return 1 A into the port, rising as a cosine towards the point opposite."""
    share = np.arange(len(chain) + 1) / len(chain)
    wavenumber = 2.0 * pi * frequency / c
    along = wavenumber * line.perimeter * (share - 0.5)
    current = (np.cos(along) / np.cos(wavenumber * line.perimeter / 2.0)).astype(np.complex128)
    radius = (design.loop.conductor.outer_diameter or 0.0) / 2.0
    return SegmentCurrents(chain, np.roll(chain, -1, axis=0), current[:-1], current[1:], radius)


def touch_distance(line: Outline) -> float:
    """Return the distance from the centre within which somebody could touch the loop [m]: its outline and 1 m."""
    return line.reach + 1.0


def at_bearings(points: Array, bearings: Array) -> Array:
    """Return points turned about the upright axis through the loop's centre, shape (bearing * point, 3)."""
    cosine, sine = np.cos(bearings)[:, None], np.sin(bearings)[:, None]
    x, y = points[:, 0], points[:, 1]
    turned = np.stack(
        [cosine * x - sine * y, sine * x + cosine * y, np.broadcast_to(points[:, 2], (len(bearings), len(x)))]
    )
    return turned.transpose(1, 2, 0).reshape(-1, 3)
