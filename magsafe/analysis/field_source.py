"""The loop as a source of fields: its solved current on wires, and the strongest field that it may have at a point.

The field is that of the current solved in free space, and of the one solved over a perfect plane with its image, each
as large as the loop would draw there; the stronger counts, squared field strengths for each watt at the loop.
"""

from dataclasses import dataclass

import numpy as np

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.wires import extent
from magsafe.design.model import Design
from magsafe.physics import near_field
from magsafe.physics.arrays import Array
from magsafe.physics.near_field import SegmentCurrents

NEAR, FAR = near_field.NODES, 2  # quadrature nodes on a segment, for places and for distances a metre off and more


@dataclass(frozen=True, slots=True)
class Squares:
    """Squares of the RMS field strengths at points for each watt at the loop, shape (point,)."""

    electric: Array
    magnetic: Array


@dataclass(frozen=True, slots=True)
class FieldSource:
    """The current of one operating point on wires.

    `currents` are those of the point's ground cases, over a plane with their image, for 1 A into the conductor at the
    port. `wires` are the places where the conductor may be, one for each place where the capacitor may be.
    `bare_factor` is what the squares grow by without credit for typical losses, `likely_factor` the likely square over
    the dangerous one.
    """

    design: Design
    point: OperatingPoint
    currents: tuple[SegmentCurrents, ...]
    wires: tuple[SegmentCurrents, ...]
    nodes: int

    @property
    def height(self) -> float:
        """Height of the loop's centre [m]; 0 in free space where none is given."""
        return self.design.loop.centre_height or 0.0

    @property
    def reach(self) -> float:
        """How far the conductor reaches from the loop's centre [m]."""
        return extent(self.design)

    @property
    def grounded(self) -> bool:
        """Whether a plane may be under the loop: then nothing is below z = 0."""
        return any(case.flow.image for case in self.point.ground_cases)

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
        return np.stack([0.5 * (wire.start[0] + wire.end[0]) for wire in self.wires])

    def strongest(self, points: Array) -> Squares:
        """Return the strongest field at points outside the conductor [m], shape (point, 3), z >= 0 over a plane.

        Nothing tells which way round a winding is wound, so a point counts with its mirror image.
        """
        if self.design.loop.turns > 1:
            mirror = np.array([-1.0, 1.0, 1.0] if self.design.loop.plane == "vertical" else [1.0, -1.0, 1.0])
            one, other = self._strongest(points), self._strongest(points * mirror)
            return Squares(np.maximum(one.electric, other.electric), np.maximum(one.magnetic, other.magnetic))
        return self._strongest(points)

    def _strongest(self, points: Array) -> Squares:
        electric, magnetic = np.zeros(len(points)), np.zeros(len(points))
        frequency = self.point.transmission.frequency
        for case, currents in zip(self.point.ground_cases, self.currents, strict=True):
            both = near_field.fields(points, currents, frequency, self.nodes)
            for found, field in zip((electric, magnetic), both, strict=True):
                np.maximum(found, case.square * near_field.magnitude(field) ** 2, out=found)
        wider = (1.0 + self.point.field_error) ** 2
        return Squares(electric * wider, magnetic * wider)

    def clearance(self, points: Array) -> tuple[Array, Array]:
        """Return the distances [m] to the conductor's axis and to the capacitor, shape (point,) each."""
        axis = np.min([near_field.distance_to_axis(points, wire) for wire in self.wires], axis=0)
        apart = points[:, None, :] - self.ports[None, :, :]
        return np.asarray(axis), np.asarray(np.linalg.norm(apart, axis=2).min(axis=1))


def field_source(design: Design, point: OperatingPoint, nodes: int) -> FieldSource:
    """Return the source of an operating point that was computed, its segments integrated with `nodes` points."""
    alone = [case.flow.segments() for case in point.ground_cases]
    currents = [
        near_field.with_image(each) if case.flow.image else each
        for case, each in zip(point.ground_cases, alone, strict=True)
    ]
    wires = {
        (case.flow.shape.port_angle, case.flow.shape.side): each
        for case, each in zip(point.ground_cases, alone, strict=True)
    }
    return FieldSource(design, point, tuple(currents), tuple(wires.values()), nodes)


def touch_distance(design: Design) -> float:
    """Return the distance from the centre within which somebody could touch the loop [m]: its reach and 1 m."""
    return extent(design) + 1.0


def at_bearings(points: Array, bearings: Array) -> Array:
    """Return points turned about the upright axis through the loop's centre, shape (bearing * point, 3)."""
    cosine, sine = np.cos(bearings)[:, None], np.sin(bearings)[:, None]
    x, y = points[:, 0], points[:, 1]
    turned = np.stack(
        [cosine * x - sine * y, sine * x + cosine * y, np.broadcast_to(points[:, 2], (len(bearings), len(x)))]
    )
    return turned.transpose(1, 2, 0).reshape(-1, 3)
