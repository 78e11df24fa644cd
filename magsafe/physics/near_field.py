"""Electric and magnetic field of given currents, at any point outside the conductor.

The source is a chain of straight segments. The current of a segment runs linearly from one
end to the other, and what the current loses on the way stays behind as charge:
charge per length = -(dI/ds) / (j omega), uniform along the segment. With

    R = point - source point,   g = exp(-jkR) / R,   h = -(dg/dR) / R = (1 + jkR) exp(-jkR) / R^3

and integrals along the conductor, the retarded potentials give

    H = 1/(4 pi) integral I h (dl x R)
    E = 1/(4 pi) [-j omega mu0 integral I g dl  +  j/(omega epsilon0) integral (dI/ds) h R ds]

exactly: no dipole, no far-field form. A pair of point and segment that lie apart is done by
Gauss-Legendre quadrature. For a close pair the terms of g and h that grow without bound are
integrated in closed form, and the quadrature has only the smooth rest to do.

Phasors turn as exp(+j omega t), amplitudes are RMS, arrays are ordered (point, component).
"""

from collections.abc import Iterator
from dataclasses import dataclass, replace
from math import isfinite, pi
from typing import Self

import numpy as np
from numpy.typing import NDArray
from scipy.constants import epsilon_0, mu_0, speed_of_light

from magsafe.physics.arrays import Array, ComplexArray

LONGEST_SEGMENT = 0.25  # wavelengths; a linear current says nothing sensible beyond it
NEAR = 3.0  # segment lengths from its middle, within which a point is treated as close
NODES = 4  # of the quadrature, for pairs apart and for the smooth rest of close ones
CHUNK = 15_000  # pairs of point and node at once: in the cache, and no fresh memory pages per array
SURFACE = 1.0 - 1e-9  # a point computed to lie on the surface may fall short by rounding


@dataclass(frozen=True, slots=True)
class SegmentCurrents:
    """Currents on straight segments of one round conductor, linear along each segment.

    Attributes
    ----------
    start : where each segment begins [m], shape (segment, 3)
    end : where each segment ends [m], shape (segment, 3)
    current_start : current at the start, flowing start to end [A], RMS phasor, shape (segment,)
    current_end : current at the end, flowing start to end [A], RMS phasor, shape (segment,)
    radius : conductor radius [m]

    Raises
    ------
    ValueError : shapes that do not fit, no segment, a value that is not finite, a segment
        without length, or a radius that is not positive
    """

    start: Array
    end: Array
    current_start: ComplexArray
    current_end: ComplexArray
    radius: float

    def __post_init__(self) -> None:
        count = len(self.start)
        expected = {
            "start": (count, 3),
            "end": (count, 3),
            "current_start": (count,),
            "current_end": (count,),
        }
        for name, shape in expected.items():
            values = getattr(self, name)
            if values.shape != shape:
                raise ValueError(f"{name} has shape {values.shape}, expected {shape}")
            if not np.isfinite(values).all():
                raise ValueError(f"{name} holds a value that is not finite")
        if count == 0:
            raise ValueError("no segment given, expected at least one")
        if not (isfinite(self.radius) and self.radius > 0.0):
            raise ValueError(f"radius is {self.radius} m, expected a positive length")
        empty = int(np.count_nonzero(self.length == 0.0))
        if empty:
            raise ValueError(f"{empty} of {count} segments have no length")

    @property
    def length(self) -> Array:
        """Length of each segment [m], shape (segment,)."""
        return np.asarray(np.linalg.norm(self.end - self.start, axis=1))

    @property
    def direction(self) -> Array:
        """Unit vector from start to end [1], shape (segment, 3)."""
        return (self.end - self.start) / self.length[:, None]

    @property
    def slope(self) -> ComplexArray:
        """Change of current per length, dI/ds [A/m], shape (segment,)."""
        change = self.current_end - self.current_start
        return np.asarray(change / self.length, dtype=np.complex128)


def with_image(currents: SegmentCurrents) -> SegmentCurrents:
    """The currents together with their image in a perfectly conducting plane at z = 0.

    Currents along the plane are reversed in the image, upright ones are not, charge is
    reversed: so the tangential electric and the normal magnetic field vanish on the plane.

    Parameters
    ----------
    currents : the currents above the plane; a segment may end on it

    Returns
    -------
    twice as many segments, the image after the original

    Raises
    ------
    ValueError : a segment that reaches below the plane, or that lies in it

    Valid     fields at z >= 0; what is computed below the plane has no meaning.
    Source    image theory: Balanis, Antenna Theory, section 4.7 (memory).
    """
    heights = np.stack([currents.start[:, 2], currents.end[:, 2]])
    below = int(np.count_nonzero((heights < 0.0).any(axis=0)))
    if below:
        raise ValueError(f"{below} of {heights.shape[1]} segments reach below the plane z = 0")
    flat = int(np.count_nonzero((heights == 0.0).all(axis=0)))
    if flat:
        raise ValueError(f"{flat} of {heights.shape[1]} segments lie in the plane z = 0")
    mirror = np.array([1.0, 1.0, -1.0])
    return SegmentCurrents(
        start=np.concatenate([currents.start, currents.start * mirror]),
        end=np.concatenate([currents.end, currents.end * mirror]),
        current_start=np.concatenate([currents.current_start, -currents.current_start]),
        current_end=np.concatenate([currents.current_end, -currents.current_end]),
        radius=currents.radius,
    )


def magnitude(field: ComplexArray) -> Array:
    """RMS magnitude of a field: the root of the sum of its components' squares.

    It is what heats and what exposure limits name, whatever the polarisation; the crest of
    an elliptically polarised field lies between 1 and sqrt(2) times it.

    Parameters
    ----------
    field : RMS phasors of the components [V/m or A/m], shape (point, 3)

    Returns
    -------
    magnitude in the unit of the field, shape (point,)

    Valid     a single frequency.
    Source    definition of the effective field strength: common practice.
    """
    return np.asarray(np.linalg.norm(field, axis=1))


def distance_to_axis(points: Array, currents: SegmentCurrents) -> Array:
    """Distance from each point to the axis of the nearest segment.

    Parameters
    ----------
    points : where [m], shape (point, 3)
    currents : the segments; what flows in them does not matter

    Returns
    -------
    distance [m], shape (point,); less the radius, it is the distance to the surface

    Raises
    ------
    ValueError : points of another shape or not finite

    Valid     everywhere.
    Source    geometry.
    """
    _require_points(points)
    nearest = np.empty(len(points))
    for part in _chunks(len(points), len(currents.start)):
        apart = _distance(points[part][:, None], currents.start, currents.direction, currents.length)
        nearest[part] = apart.min(axis=1)
    return nearest


def unclosed_current(currents: SegmentCurrents) -> float:
    """Largest current that ends, or starts, in nothing where segments meet or stop.

    `fields` puts no point charge where a current ends, so its electric field is that of the
    real thing only while this is zero but for rounding. Whoever makes the currents asks once.

    Parameters
    ----------
    currents : the segments; ends closer together than the radius count as joined

    Returns
    -------
    magnitude of the net current into the worst place [A]

    Valid     turns and limbs whose surfaces do not touch, except where they join.
    Source    Kirchhoff's current law.
    """
    ends = np.concatenate([currents.start, currents.end])
    arriving = np.concatenate([-currents.current_start, currents.current_end])
    joined = np.linalg.norm(ends[:, None] - ends, axis=2) < currents.radius
    return float(np.abs(joined @ arriving).max())


def fields(
    points: Array, currents: SegmentCurrents, frequency: float, nodes: int = NODES
) -> tuple[ComplexArray, ComplexArray]:
    """Electric and magnetic field of the currents, near or far.

    Parameters
    ----------
    points : where [m], shape (point, 3)
    currents : the segments and what flows in them; with an image for a conducting plane
    frequency : of the currents [Hz]
    nodes : quadrature points on each segment [1], for pairs that lie apart

    Returns
    -------
    electric field [V/m] and magnetic field [A/m], RMS phasors, each of shape (point, 3)

    Raises
    ------
    ValueError : a point inside the conductor, points of another shape or not finite, a
        frequency that is not positive, a segment beyond a quarter of the wavelength

    Valid     from the conductor's surface outwards, thin conductors: the current flows on
              the axis. No charge is put where a current ends: neighbouring segments must
              agree in current and the loop must close through its port, or end at zero.
              Closer than half a segment's length the electric field shows the steps of
              charge from segment to segment: 1 % at the most, for a smooth current on 24.
              Integrals: 1e-4 of the field, 1e-6 if no segment exceeds a twentieth wavelength; with 2 nodes 1e-3.
    Source    retarded potentials: Jackson, Classical Electrodynamics, ch. 6 (memory).
    """
    _require_points(points)
    if not (isfinite(frequency) and frequency > 0.0):
        raise ValueError(f"frequency is {frequency} Hz, expected more than zero")
    omega = 2.0 * pi * frequency
    longest = float(currents.length.max()) * frequency / speed_of_light
    if longest > LONGEST_SEGMENT:
        raise ValueError(f"the longest segment is {longest:.3g} wavelengths, expected at most {LONGEST_SEGMENT}")
    origin = currents.start.mean(axis=0)  # products of coordinates lose digits far from zero
    points = points - origin
    currents = replace(currents, start=currents.start - origin, end=currents.end - origin)
    inside = _inside(points, currents)
    if inside:
        raise ValueError(
            f"{inside} of {len(points)} points lie inside the conductor, nearer to its axis "
            f"than its radius of {currents.radius} m"
        )
    flow, turn, push = _line_integrals(points, currents, omega / speed_of_light, nodes)
    electric = (-1j * omega * mu_0 * flow + 1j / (omega * epsilon_0) * push) / (4.0 * pi)
    return electric, turn / (4.0 * pi)


def _require_points(points: Array) -> None:
    if points.ndim != 2 or points.shape[1] != 3:
        raise ValueError(f"points have shape {points.shape}, expected (point, 3)")
    if not np.isfinite(points).all():
        raise ValueError("points hold a value that is not finite")


def _chunks(count: int, width: int) -> Iterator[slice]:
    """Slices over `count` rows of `width` values that keep the working arrays in the cache."""
    step = max(1, CHUNK // width)
    return (slice(first, first + step) for first in range(0, count, step))


def _distance(points: Array, start: Array, direction: Array, length: Array) -> Array:
    """Distance from points to segments [m]; the arguments broadcast, components last."""
    offset = points - start
    along = np.clip(np.einsum("...i,...i", offset, direction), 0.0, length)
    offset = offset - along[..., None] * direction
    squared: Array = np.einsum("...i,...i", offset, offset)
    return np.sqrt(squared)


def _inside(points: Array, currents: SegmentCurrents) -> int:
    """Number of points inside the conductor; only what may be inside is looked at closely."""
    start, direction, length = currents.start, currents.direction, currents.length
    middle = 0.5 * (start + currents.end)
    reach = length + currents.radius  # half the length would do, but for rounding
    count = 0
    for part in _chunks(len(points), len(start)):
        candidate = _squared_distance(points[part], middle) < reach * reach
        point, segment = np.nonzero(candidate)
        distance = _distance(points[part][point], start[segment], direction[segment], length[segment])
        count += len(np.unique(point[distance < currents.radius * SURFACE]))
    return count


def _line_integrals(points: Array, currents: SegmentCurrents, wavenumber: float, count: int) -> ComplexArray:
    """Integrals of I g dl, I h dl x R and (dI/ds) h R ds, shape (3, point, 3)."""
    nodes = _Nodes.of(currents, count)
    middle = 0.5 * (currents.start + currents.end)
    reach = NEAR * currents.length + currents.radius
    integrals = np.empty((3, len(points), 3), dtype=np.complex128)
    pairs = [np.empty((2, 0), dtype=np.intp)]
    for part in _chunks(len(points), len(nodes.position)):
        near = _squared_distance(points[part], middle) < reach * reach
        integrals[:, part] = _apart(points[part], nodes, near, wavenumber)
        pairs.append(np.stack(np.nonzero(near)))
        pairs[-1][0] += part.start
    point, segment = np.hstack(pairs)
    for part in _chunks(len(point), 2 * NODES):
        close = _close(points[point[part]], currents, segment[part], wavenumber)
        touched, first = np.unique(point[part], return_index=True)
        integrals[:, touched] += np.add.reduceat(close, first, axis=1)
    return integrals


def _squared_distance(points: Array, places: Array) -> Array:
    """Squared distance [m2], shape (point, place); one matrix product, for pairs apart."""
    ones = np.ones((len(points), 1))
    left = np.hstack([points, (points * points).sum(axis=1, keepdims=True), ones])
    right = np.vstack([-2.0 * places.T, np.ones(len(places)), (places * places).sum(axis=1)])
    squared: Array = left @ right
    return squared


@dataclass(frozen=True, slots=True)
class _Nodes:
    """The source as quadrature nodes: positions (node, 3), complex weights (node, column)."""

    position: Array
    flow: ComplexArray  # I dl
    rest: ComplexArray  # I dl, I dl x position, dI, dI position

    @classmethod
    def of(cls, currents: SegmentCurrents, count: int) -> Self:
        fraction, weight = _gauss(count)
        length, direction = currents.length[:, None], currents.direction[:, None]
        along = (length * fraction)[:, :, None]
        slope = currents.slope[:, None, None]
        step = (length * weight)[:, :, None]
        position = currents.start[:, None] + along * direction
        flow = step * (currents.current_start[:, None, None] + slope * along) * direction
        lost = step * slope
        rest = np.concatenate([flow, np.cross(flow, position), lost, lost * position], axis=2)
        return cls(position.reshape(-1, 3), flow.reshape(-1, 3), rest.reshape(-1, 10))


def _gauss(count: int) -> tuple[Array, Array]:
    """Gauss-Legendre nodes and weights on the interval from 0 to 1."""
    node, weight = np.polynomial.legendre.leggauss(count)
    return 0.5 + 0.5 * node, 0.5 * weight


def _apart(points: Array, nodes: _Nodes, near: NDArray[np.bool_], wavenumber: float) -> ComplexArray:
    """The line integrals by quadrature, over all pairs but the close ones, shape (3, point, 3)."""
    by_segment = (len(points), near.shape[1], -1)
    distance = _squared_distance(points, nodes.position)
    distance.reshape(by_segment)[near] = 1.0  # anything positive: its weight is taken away below
    np.sqrt(distance, out=distance)
    inverse = 1.0 / distance
    inverse.reshape(by_segment)[near] = 0.0
    phase = wavenumber * distance
    half = np.tan(0.5 * phase)  # one tangent costs half of a sine and a cosine
    scale = 1.0 / (1.0 + half * half)
    sine = 2.0 * half * scale
    cosine = 2.0 * scale - 1.0
    flow = _weighted(cosine * inverse, -sine * inverse, nodes.flow)
    cube = inverse * inverse * inverse
    rest = _weighted((cosine + phase * sine) * cube, (phase * cosine - sine) * cube, nodes.rest)
    turn = np.cross(rest[:, 0:3], points) - rest[:, 3:6]
    push = rest[:, 6:7] * points - rest[:, 7:10]
    return np.stack([flow, turn, push])


def _weighted(real: Array, imaginary: Array, weights: ComplexArray) -> ComplexArray:
    """Product (real + j imaginary) @ weights, without making the large factor complex."""
    columns = weights.view(np.float64)
    first: ComplexArray = (real @ columns).view(np.complex128)
    second: ComplexArray = (imaginary @ columns).view(np.complex128)
    return first + 1j * second


def _close(points: Array, currents: SegmentCurrents, segment: NDArray[np.intp], wavenumber: float) -> ComplexArray:
    """The line integrals of single pairs, points (pair, 3) with segment (pair,): (3, pair, 3).

    With t counted along the segment from the foot of the perpendicular, integral t g dt and
    integral t h dt are known exactly from R at both ends; only g and h alone need quadrature.
    """
    direction, length = currents.direction[segment], currents.length[segment]
    slope = currents.slope[segment]
    offset = points - currents.start[segment]
    along = (offset * direction).sum(axis=1)
    aside = offset - along[:, None] * direction
    whole_g, whole_h, first_g, first_h = _close_integrals(along, (aside * aside).sum(axis=1), length, wavenumber)
    foot = currents.current_start[segment] + slope * along
    flow = (foot * whole_g + slope * first_g)[:, None] * direction
    turn = (foot * whole_h + slope * first_h)[:, None] * np.cross(direction, aside)
    push = slope[:, None] * (whole_h[:, None] * aside - first_h[:, None] * direction)
    return np.stack([flow, turn, push])


def _close_integrals(
    along: Array, aside_squared: Array, length: Array, wavenumber: float
) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
    """Integrals of g, h, t g and t h over a segment seen from close by, shape (pair,) each.

    Source    static part of h: Hanson & Hirshman, Physics of Plasmas 9, 4410 (2002) (memory);
              the others are elementary.
    """
    after = length - along
    at_start = np.sqrt(along**2 + aside_squared)
    at_end = np.sqrt(after**2 + aside_squared)
    ends = at_start + at_end
    excess = _less(at_start, along, aside_squared) + _less(at_end, after, aside_squared)
    inverse = np.log1p(2.0 * length / excess)
    inverse_cube = 2.0 * length * ends / (at_start * at_end * excess * (ends + length))
    linear = 0.5 * (after * at_end + along * at_start + aside_squared * inverse)
    fraction, weight = _gauss(NODES)
    place = length[:, None] * fraction - along[:, None]
    distance = np.sqrt(place**2 + aside_squared[:, None])
    phase = wavenumber * distance
    wave = _wave(phase)
    half_square = 0.5 * phase**2
    rest_g: ComplexArray = ((wave - 1.0 + half_square) / distance) @ weight
    rest_h: ComplexArray = (((1.0 + 1j * phase) * wave - 1.0 - half_square) / distance**3) @ weight
    half = 0.5 * wavenumber**2
    longer = length * (after - along) / ends  # at_end - at_start, without the cancellation
    first_g = _wave(0.5 * wavenumber * ends) * longer * np.sinc(0.5 * wavenumber * longer / pi)
    first_h = _wave(wavenumber * at_start) / at_start - _wave(wavenumber * at_end) / at_end
    return (
        inverse - half * linear + length * rest_g,
        inverse_cube + half * inverse + length * rest_h,
        first_g,
        first_h,
    )


def _wave(phase: Array) -> ComplexArray:
    return np.asarray(np.exp(-1j * phase), dtype=np.complex128)


def _less(distance: Array, leg: Array, aside_squared: Array) -> Array:
    """Distance less its leg along the segment, without the cancellation close to the axis."""
    return np.where(leg > 0.0, aside_squared / (distance + np.abs(leg)), distance - leg)
