"""What an exemption from evaluation looks at: effective radiated power, how near people come, the field on the axis.

All of it is for information. The thresholds are those of a far field, which near a loop, and on its axis, is no guide.
"""

from math import sqrt

import numpy as np

from magsafe.analysis.flow import Flow
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.people import nearest_to
from magsafe.analysis.sky import HALF_WAVE_DIPOLE
from magsafe.design.model import Design, Place
from magsafe.physics import near_field
from magsafe.physics.arrays import Array
from magsafe.physics.far_field import FarField
from magsafe.physics.near_field import SegmentCurrents
from magsafe.rules.exemption import Exemption

_PIECES = np.linspace(0.0, 1.0, 9)  # of a segment, for distances


def most_eirp(point: OperatingPoint, power: float) -> float | None:
    """Return the most equivalent isotropically radiated power [W] for a power at the transmitter [W].

    Least line loss, highest efficiency, greater directivity: in free space, or over the ground if that sends more into
    one direction. None where one of them is not known.
    """
    arriving = point.power_at_loop.high
    efficiency = point.figures.conductor_efficiency.spread.high
    gains = (point.figures.directivity_along_axis.spread.high, point.figures.directivity_in_plane.spread.high)
    known = [gain for gain in gains if gain is not None]
    if arriving is None or efficiency is None or len(known) < len(gains):
        return None
    over_ground = point.figures.effective_isotropic_radiated_power.spread.high
    if over_ground is None:
        return None
    return power / point.power * max(arriving * efficiency * max(known), over_ground)


def threshold_power(exemption: Exemption, distances: Array, frequency: float) -> Array:
    """Return the threshold [W] at distances [m], shape (distance,); NaN nearer than it holds, and where there is none.

    Raises
    ------
    ValueError : a distance below zero or none at all, or a frequency [Hz] that is none
    """
    found = (exemption.threshold_at(float(each), frequency) for each in distances)
    return np.array([np.nan if each is None else each for each in found])


def nearest_part(design: Design, point: OperatingPoint, place: Place) -> float | None:
    """Return how near somebody at a place comes to the conductor's surface [m]; None where it is not known.

    That is the nearest point of the column that they take up; of a rotating loop at its worst bearing.
    """
    if not point.ground_cases or design.loop.centre_height is None:
        return None
    nearest = nearest_to(_parts(design, point), design, place)
    return max(0.0, nearest - point.ground_cases[0].flow.shape.radius)


def axis_field(point: OperatingPoint, erp: float, distance: float) -> float | None:
    """Return the magnetic field on the loop's own axis, so far from the nearest part of it [m], RMS [A/m].

    In free space, by the solved current, at a given effective radiated power [W]; the strongest of the places where the
    capacitor may be, and of the two sides. None where no current is known.
    """
    alone = [case.flow for case in point.ground_cases if not case.flow.image]
    found = [_on_axis(each, point.transmission.frequency, distance) for each in alone]
    return max(found) * sqrt(erp) if found else None


def _on_axis(flow: Flow, frequency: float, distance: float) -> float:
    """Return the field for 1 W of effective radiated power [A/m]."""
    currents = flow.segments()
    far = FarField.of(currents, frequency)
    axis = np.array([1.0, 0.0, 0.0] if flow.shape.upright else [0.0, 0.0, 1.0])
    gains = (far.directivity_along(axis), far.directivity_along(-axis), far.largest_directivity_across(axis)[0])
    erp = far.power * max(gains) / HALF_WAVE_DIPOLE
    centre = np.array([0.0, 0.0, flow.shape.height])
    points = np.stack([centre + _out(currents, centre, each, distance) * each for each in (axis, -axis)])
    _, magnetic = near_field.fields(points, currents, frequency)
    return float(near_field.magnitude(magnetic).max()) / sqrt(erp)


def _out(currents: SegmentCurrents, centre: Array, axis: Array, distance: float) -> float:
    """Return how far out along an axis [m] the conductor's surface is so far away; 0 where it is at the centre too."""

    def missing(out: float) -> float:
        apart = near_field.distance_to_axis((centre + out * axis)[None], currents)
        return float(apart[0]) - currents.radius - distance

    from scipy.optimize import brentq  # noqa: PLC0415  (slow to import)

    return 0.0 if missing(0.0) >= 0.0 else float(brentq(missing, 0.0, distance + 2.0 * _reach(currents, centre)))


def _reach(currents: SegmentCurrents, centre: Array) -> float:
    return float(np.linalg.norm(currents.start - centre, axis=1).max()) + currents.radius


def _parts(design: Design, point: OperatingPoint) -> Array:
    """Return points on the conductor's axis [m], shape (point, 3), wherever the capacitor may be.

    Nothing tells which way round a winding is wound, so it counts with its mirror image.
    """
    wires = [case.flow.segments() for case in point.ground_cases]
    along = [wire.start[:, None] + (wire.end - wire.start)[:, None] * _PIECES[:, None] for wire in wires]
    parts = np.concatenate([each.reshape(-1, 3) for each in along])
    if design.loop.turns == 1:
        return parts
    mirror = np.array([-1.0, 1.0, 1.0] if design.loop.plane == "vertical" else [1.0, -1.0, 1.0])
    return np.concatenate([parts, parts * mirror])
