"""A small coupling loop beside a tuned loop: how strongly they couple, and the size that matches.

The tuned loop, with R + jX at its port (its capacitor counted in X), and a coupling loop of reactance Xc that feeds it
make the impedance

    Zin = j Xc + (omega M)^2 / (R + jX)

A coupling loop loses next to nothing. So whatever mismatch there is, is the same seen from the tuned loop: the line,
Z0, appears there as (omega M)^2 / (Z0 + j Xc), whose resistance is kappa R with

    kappa = (omega M)^2 / (R Z0 (1 + (Xc/Z0)^2))

Retuning takes its reactance away, at X = kappa R Xc/Z0, and what is left is a ratio of two resistances: the SWR is
kappa or 1/kappa. Matched, (omega M)^2 = Z0 R (1 + (Xc/Z0)^2) and X = R Xc/Z0: the best match lies a little above the
tuned loop's own resonance.

M is counted per ampere at the tuned loop's port, where R is, with the current that flows where the coupling loop is: by
reciprocity it is what the port sees as well.

Left out: the time that fields take, how unevenly the current runs round the coupling loop, and what charge couples
(`coefficient_ends` has all three); a shield, whose outside is the conductor then; and eddy currents in the tuned loop's
conductor close by, which take one or two hundredths from Xc at 10 mm from a 22 mm tube (by its image, estimated).
"""

from dataclasses import dataclass

import numpy as np
from scipy.constants import mu_0, speed_of_light
from scipy.optimize import brentq

from magsafe.physics.arrays import Array, ComplexArray, Values
from magsafe.physics.inductance import circle_inductance
from magsafe.physics.near_field import SegmentCurrents, distance_to_axis
from magsafe.physics.ranges import Range

SIZE = Range("coupling loop's circumference in wavelengths", 0.0, 0.1, "a full-wave solution of both loops, computed")
TUNED_LOOP = Range("tuned loop's perimeter in wavelengths", 0.0, 0.3, "a full-wave solution of both loops, computed")
THICKNESS = Range(
    "conductor radius over coupling loop radius", 0.0, 0.1, "form of the inductance: Rosa & Grover 1912 (memory)"
)

POINTS = 32  # round the circle, to begin with
MOST_POINTS = 8192
CONVERGED = 1e-6  # of one doubling; the error falls to its square with the next
NOTHING = 1e-6 * mu_0  # times the radius: less than that is no coupling [H/m]
CHUNK = 20_000  # pairs of point and segment at once
SIZES = 48  # coupling loops tried before the root is refined
STEPS = 1024  # along the way inwards


def mutual_inductance(currents: SegmentCurrents, centre: Array, normal: Array, radius: Values) -> Array:
    """Return the mutual inductance of a current on straight segments and circular filaments.

    Parameters
    ----------
    currents : what flows in the tuned loop for 1 A at its port; real parts count
    centre : centres of the circles [m], shape (..., 3)
    normal : axis of the circles, of any length [1], shape (3,): the sense of their current is right-handed about it
    radius : their radii [m], shape (...)

    Returns
    -------
    mutual inductance [H], broadcast shape

    Raises
    ------
    ValueError : a circle that enters the conductor or all but touches the axis of a very thin one, a radius that is not
        positive, an axis without length

    Valid     circles whose circumference is small against the wavelength (`SIZE`), tuned loops within `TUNED_LOOP`; the
              circle is the axis of its conductor. Static: the time that fields take is left out.
    Source    vector potential of a straight current, any textbook, in closed form; integrated round the circle by
              equal steps, doubled until nothing changes.
    """
    radii = np.asarray(radius, dtype=np.float64)
    centres = np.asarray(centre, dtype=np.float64)
    shape = np.broadcast_shapes(centres.shape[:-1], radii.shape)
    radii = np.broadcast_to(radii, shape).reshape(-1)
    centres = np.broadcast_to(centres, (*shape, 3)).reshape(-1, 3)
    if not bool((np.isfinite(radii) & (radii > 0.0)).all()):
        raise ValueError(f"radii of the circles are {radii}, expected lengths above zero")
    first, second = _plane(normal)
    total = _round(currents, centres, radii, (first, second), _turn(POINTS, 0.0))
    count, going = POINTS, np.arange(len(radii))
    while len(going) and count < MOST_POINTS:
        between = _round(currents, centres[going], radii[going], (first, second), _turn(count, 0.5))
        finer: Array = 0.5 * (total[going] + between)
        least = NOTHING * radii[going]
        moved = np.abs(finer - total[going]) > CONVERGED * np.maximum(np.abs(finer), least)
        total[going] = finer
        going, count = going[moved], 2 * count
    if len(going):
        raise ValueError(f"a circle of {radii[going[0]]:.4g} m is too near to the conductor's axis to be integrated")
    return total.reshape(shape)


def _turn(count: int, shift: float) -> Array:
    """Return equal steps of angle round a circle [rad], all shifted by a share of a step."""
    return np.asarray(2.0 * np.pi / count * (np.arange(count) + shift))


def _plane(normal: Array) -> tuple[Array, Array]:
    """Return two unit vectors across an axis, right-handed about it."""
    length = float(np.linalg.norm(normal))
    if not (np.isfinite(length) and length > 0.0):
        raise ValueError(f"the axis of the circles is {normal}, expected a direction")
    axis = np.asarray(normal) / length
    aside = np.eye(3)[int(np.argmin(np.abs(axis)))]
    first = np.cross(aside, axis)
    first = first / np.linalg.norm(first)
    return first, np.cross(axis, first)


def _round(currents: SegmentCurrents, centre: Array, radius: Array, plane: tuple[Array, Array], angle: Array) -> Array:
    """Return the integral of the vector potential round circles [Wb per ampere at the port], by equal steps."""
    outward = np.cos(angle)[:, None] * plane[0] + np.sin(angle)[:, None] * plane[1]
    along = np.cos(angle)[:, None] * plane[1] - np.sin(angle)[:, None] * plane[0]
    found = np.empty(len(radius))
    step = max(1, CHUNK // (len(angle) * len(currents.start)))
    for first in range(0, len(radius), step):
        part = slice(first, first + step)
        points = centre[part, None] + radius[part, None, None] * outward
        potential = _potential(points.reshape(-1, 3), currents).reshape(points.shape)
        found[part] = 2.0 * np.pi * radius[part] * np.einsum("cai,ai->c", potential, along) / len(angle)
    return found


def _potential(points: Array, currents: SegmentCurrents) -> Array:
    """Return the static vector potential of the currents' real part [Wb/m], shape (point, 3)."""
    length, direction = currents.length, currents.direction
    after = points[:, None] - currents.start
    foot = np.einsum("psi,si->ps", after, direction)
    aside = np.einsum("psi,psi->ps", after, after) - foot**2
    near, far = (np.sqrt(np.maximum(aside, 0.0) + place**2) for place in (foot, length - foot))
    beyond = np.maximum(np.maximum(-foot, foot - length), 0.0)
    if bool((aside + beyond**2 < currents.radius**2).any()):
        raise ValueError("a circle enters the conductor, expected its axis outside")
    slope = currents.slope.real
    # integral of ds/R and of (s - foot) ds/R; the current at the foot of the perpendicular may lie beyond the ends.
    whole = 2.0 * np.arctanh(length / (near + far))
    potential = (currents.current_start.real + slope * foot) * whole + slope * (far - near)
    return np.asarray(mu_0 / (4.0 * np.pi) * potential @ direction)


def own_reactance(frequency: Values, radius: Values, conductor_radius: Values) -> Array:
    """Return the reactance of the coupling loop alone.

    Parameters
    ----------
    frequency : [Hz], shape (...)
    radius : of the coupling loop, to the conductor's axis [m], broadcast
    conductor_radius : of its round conductor [m], broadcast

    Returns
    -------
    reactance [ohm], broadcast shape

    Raises
    ------
    ValueError : a conductor too thick for the form (`THICKNESS`)

    Valid     `SIZE` (it is up to 5.8 % more at the upper end) and `THICKNESS`.
    Source    Rosa & Grover, NBS Scientific Paper 169 (1912) (memory), high-frequency form.
    """
    THICKNESS.within(np.asarray(conductor_radius / radius))
    return np.asarray(2.0 * np.pi * frequency * circle_inductance(radius, conductor_radius))


def input_impedance(mutual_reactance: Values, reactance: Values, impedance: ComplexArray | complex) -> ComplexArray:
    """Return the impedance that the coupling loop shows to its line.

    Parameters
    ----------
    mutual_reactance : omega M [ohm], shape (...)
    reactance : of the coupling loop, Xc [ohm], broadcast
    impedance : R + jX of the tuned loop with its capacitor, at its port [ohm], broadcast

    Returns
    -------
    impedance [ohm], broadcast shape

    Valid     coupling loops without loss; `SIZE` and `TUNED_LOOP`.
    Source    two coupled circuits: any textbook.
    """
    return np.asarray(1j * reactance + mutual_reactance**2 / impedance, dtype=np.complex128)


def matching_mutual_reactance(resistance: Values, reactance: Values, line: float) -> Array:
    """Return the omega M that matches some tuning of the tuned loop to the line.

    Parameters
    ----------
    resistance : of the tuned loop at its port [ohm], shape (...)
    reactance : of the coupling loop, Xc [ohm], broadcast; 0 for one that is tuned out
    line : impedance of the line [ohm]

    Returns
    -------
    omega M [ohm], broadcast shape

    Valid     as `input_impedance`.
    Source    `input_impedance` set equal to the line's.
    """
    return np.asarray(np.sqrt(line * resistance * (1.0 + (reactance / line) ** 2)))


def coupling_coefficient(mutual_reactance: Values, reactance: Values, resistance: Values, line: float) -> Array:
    """Return kappa: what the tuned loop sees of the line over its own resistance.

    Parameters
    ----------
    mutual_reactance : omega M [ohm], shape (...)
    reactance : of the coupling loop, Xc [ohm], broadcast
    resistance : of the tuned loop at its port [ohm], broadcast
    line : impedance of the line [ohm]

    Returns
    -------
    kappa [1], broadcast shape: 1 matches, more is overcoupled, less undercoupled

    Valid     as `input_impedance`, with the ends of `coefficient_ends`.
    Source    two coupled circuits: any textbook.
    """
    return np.asarray(mutual_reactance**2 / (resistance * line * (1.0 + (reactance / line) ** 2)))


def coefficient_ends(perimeter: Values, size: Values) -> tuple[Array, Array]:
    """Return the factors between which the true kappa lies about that of `coupling_coefficient`.

    Charge couples as well as current: most with the coupling loop's port next to the conductor opposite the capacitor,
    least with it on the other side.

    Parameters
    ----------
    perimeter : of the tuned loop, in wavelengths [1], shape (...)
    size : the coupling loop's circumference in wavelengths [1], broadcast

    Returns
    -------
    lowest and highest factor [1], broadcast shape each

    Raises
    ------
    ValueError : beyond `TUNED_LOOP` or `SIZE`

    Valid     one round turn, a regular polygon or a rectangle of up to 2 to 1; coupling loops of up to half the tuned
              loop's diameter, centred or 10 to 100 mm clear of the conductor opposite the capacitor. Thin wires: what
              eddy currents in a close conductor do to Xc is not in it.
    Source    a full-wave solution of both loops, with the coupling loop's port on any side (computed).
    """
    whole, small = TUNED_LOOP.within(perimeter), SIZE.within(size)
    return np.asarray(1.0 - whole**2 + 0.0 * small), np.asarray(1.0 + 2.0 * whole**2 + 10.0 * whole * small)


def best_standing_wave_ratio(coefficient: Values) -> Array:
    """Return the lowest SWR that retuning the tuned loop reaches.

    Parameters
    ----------
    coefficient : kappa [1], shape (...)

    Returns
    -------
    ratio [1], 1 or more, same shape; infinite for none

    Valid     as `input_impedance`; a resistance that retuning does not change.
    Source    a mismatch is the same on both sides of a network without loss: any textbook.
    """
    with np.errstate(divide="ignore"):
        return np.asarray(np.maximum(coefficient, 1.0 / np.asarray(coefficient)))


def best_tuned_reactance(coefficient: Values, reactance: Values, resistance: Values, line: float) -> Array:
    """Return the reactance X of the tuned loop with its capacitor at which the SWR is lowest.

    Parameters
    ----------
    coefficient : kappa [1], shape (...)
    reactance : of the coupling loop, Xc [ohm], broadcast
    resistance : of the tuned loop at its port [ohm], broadcast
    line : impedance of the line [ohm]

    Returns
    -------
    reactance [ohm], broadcast shape: above 0, inductive

    Valid     as `input_impedance`.
    Source    the line seen from the tuned loop, its reactance taken away.
    """
    return np.asarray(coefficient * resistance * reactance / line)


def best_offset(frequency: Values, coefficient: Values, reactance: Values, line: float, unloaded_q: Values) -> Array:
    """Return how far the frequency of lowest SWR lies above the tuned loop's own resonance.

    Parameters
    ----------
    frequency : of lowest SWR [Hz], shape (...)
    coefficient : kappa [1], broadcast; 1 for a match
    reactance : of the coupling loop, Xc [ohm], broadcast
    line : impedance of the line [ohm]
    unloaded_q : of the tuned loop with its capacitor, without the line [1], broadcast

    Returns
    -------
    offset [Hz], broadcast shape

    Valid     as `input_impedance`; a single resonance.
    Source    X = R Q (f/f0 - f0/f): textbook circuit theory. To first order kappa f Xc / (2 Q Z0).
    """
    half = 0.5 * np.asarray(coefficient) * reactance / (line * unloaded_q)
    return np.asarray(frequency * (1.0 - (np.hypot(1.0, half) - half)))


@dataclass(frozen=True, slots=True)
class Place:
    """Where coupling loops of any size lie, in the plane of the tuned loop and inside it.

    Attributes
    ----------
    start : centre of the coupling loops, or the point of the conductor's axis beside which they lie [m], shape (3,)
    inward : unit vector from there into the loop [1], shape (3,); None for `start` as their centre
    normal : axis of the coupling loops [1], shape (3,)
    clearance : least distance between the surfaces of both conductors [m], 0 or more
    """

    start: Array
    inward: Array | None
    normal: Array
    clearance: float

    def __post_init__(self) -> None:
        if not (np.isfinite(self.clearance) and self.clearance >= 0.0):
            raise ValueError(f"the clearance is {self.clearance} m, expected 0 or more")

    def largest(self, currents: SegmentCurrents, conductor_radius: float) -> float:
        """Return the largest radius for which there is room [m]; not above 0 where there is none.

        Raises ValueError for a place that is not on the conductor, and a direction that leads out of the loop.

        Source    plane geometry.
        """
        room = float(self._way(currents)[1][-1])
        return room - (self.clearance + currents.radius + conductor_radius)

    def centres(self, currents: SegmentCurrents, conductor_radius: float, radius: Array) -> Array:
        """Return the centres of coupling loops as near to the conductor as the clearance lets them.

        Parameters
        ----------
        currents : the tuned loop
        conductor_radius : of the coupling loop's conductor [m]
        radius : of the coupling loops [m], shape (circle,), up to `largest`

        Returns
        -------
        centres [m], shape (circle, 3)

        Valid     coupling loops inside the tuned one.
        Source    plane geometry. In a corner they lie further in, where the sides are as far as the clearance asks.
        """
        if self.inward is None:
            return np.broadcast_to(self.start, (len(radius), 3))
        inwards, room = self._way(currents)
        needed = radius + self.clearance + currents.radius + conductor_radius
        return np.asarray(self.start + np.interp(needed, room, inwards)[:, None] * self.inward)

    def _way(self, currents: SegmentCurrents) -> tuple[Array, Array]:
        """Return places along the way inwards [m], and the distance of the nearest conductor's axis, not falling."""
        if self.inward is None:
            return np.zeros(1), distance_to_axis(self.start[None], currents)
        across = float(np.linalg.norm(np.ptp(currents.start, axis=0)))
        inwards = across * np.linspace(0.0, 1.0, STEPS)
        room = distance_to_axis(self.start + inwards[:, None] * self.inward, currents)
        if not room[0] <= currents.radius:
            raise ValueError(f"the place lies {room[0]:.4g} m from the conductor's axis, expected on it")
        # Up to the first crest: beyond it the other side is the nearer one.
        falling = np.flatnonzero((np.diff(room) <= 0.0) & (inwards[1:] > 2.0 * currents.radius))
        if not len(falling):
            raise ValueError(f"the direction {self.inward} leads out of the tuned loop, expected one into it")
        until = int(falling[0]) + 1
        return inwards[:until], np.maximum.accumulate(room[:until])


def centred(centre: Array, normal: Array, clearance: float = 0.0) -> Place:
    """Return the place of coupling loops about one centre [m], their axis along `normal`.

    Source    plane geometry.
    """
    return Place(np.asarray(centre, dtype=np.float64), None, np.asarray(normal, dtype=np.float64), clearance)


def beside(point: Array, inward: Array, normal: Array, clearance: float) -> Place:
    """Return the place of coupling loops inside the tuned loop, beside its conductor.

    Parameters
    ----------
    point : on the axis of the conductor, as its segments have it [m], shape (3,); usually opposite the capacitor
    inward : direction from there to the centre, of any length [1], shape (3,)
    normal : axis of the coupling loops [1], shape (3,)
    clearance : between the surfaces of both conductors [m], 0 or more

    Returns
    -------
    the place

    Raises
    ------
    ValueError : no direction, or a clearance that is not a length

    Valid     any loop in one plane.
    Source    plane geometry.
    """
    length = float(np.linalg.norm(inward))
    if not (np.isfinite(length) and length > 0.0):
        raise ValueError(f"inward is {inward}, expected a direction")
    way = np.asarray(inward, dtype=np.float64) / length
    return Place(np.asarray(point, dtype=np.float64), way, np.asarray(normal, dtype=np.float64), clearance)


@dataclass(frozen=True, slots=True)
class Coupled:
    """One coupling loop beside the tuned loop, at one frequency.

    Attributes
    ----------
    diameter : of the coupling loop, to the axis of its conductor [m]
    size : its circumference in wavelengths [1]: its numbers hold within `SIZE`
    centre : [m], shape (3,)
    mutual_inductance : referred to the current at the tuned loop's port [H], of either sign
    mutual_reactance : omega times its magnitude [ohm]
    reactance : of the coupling loop alone [ohm]
    coefficient : kappa [1]: 1 matches, more is overcoupled
    standing_wave_ratio : the lowest that retuning the tuned loop reaches [1]
    tuned_reactance : of the tuned loop with its capacitor there [ohm]
    """

    diameter: float
    size: float
    centre: Array
    mutual_inductance: float
    mutual_reactance: float
    reactance: float
    coefficient: float
    standing_wave_ratio: float
    tuned_reactance: float


@dataclass(frozen=True, slots=True)
class Sizing:
    """What size of coupling loop matches.

    Attributes
    ----------
    matched : the smallest that matches, None where none does
    largest : the largest for which there is room, None where there is none for any
    strongest : the one of all sizes tried that couples most, None as `largest`; below a coefficient of 1, nothing that
        fits inside the tuned loop there matches
    smallest_overcouples : whether nothing matches because the smallest that the form of the inductance allows, ten
        conductor radii, is overcoupled already [1]
    """

    matched: Coupled | None
    largest: Coupled | None
    strongest: Coupled | None
    smallest_overcouples: bool


@dataclass(frozen=True, slots=True)
class Circuit:
    """What the coupling loop works into and is fed from, at one frequency.

    Attributes
    ----------
    currents : what flows in the tuned loop for 1 A at its port
    frequency : [Hz]
    resistance : of the tuned loop at its port [ohm]
    line : impedance of the coupling loop's line [ohm]

    Raises
    ------
    ValueError : a number that is not above zero
    """

    currents: SegmentCurrents
    frequency: float
    resistance: float
    line: float

    def __post_init__(self) -> None:
        for name, unit in (("frequency", "Hz"), ("resistance", "ohm"), ("line", "ohm")):
            value = getattr(self, name)
            if not (np.isfinite(value) and value > 0.0):
                raise ValueError(f"{name} is {value} {unit}, expected a number above zero")


def coupled(circuit: Circuit, place: Place, conductor_radius: float, diameters: Array) -> list[Coupled]:
    """Return what coupling loops of given sizes do.

    Parameters
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where they lie [m, 1]
    conductor_radius : of their round conductor [m]
    diameters : to the axis of it [m], shape (circle,)

    Returns
    -------
    one for each

    Raises
    ------
    ValueError : a coupling loop for which there is no room, a conductor too thick for it

    Valid     `SIZE`, `TUNED_LOOP`, `THICKNESS`, with the ends of `coefficient_ends`. Not refused beyond
              `SIZE`: whoever prints it asks the range.
    Source    `mutual_inductance`, `own_reactance`, `coupling_coefficient`.
    """
    radii = 0.5 * np.asarray(diameters, dtype=np.float64)
    room = place.largest(circuit.currents, conductor_radius)
    if not bool((radii <= room * (1.0 + 1e-12)).all()):
        raise ValueError(f"a coupling loop of {2.0 * radii.max():.4g} m has no room: {2.0 * max(room, 0.0):.4g} m have")
    centres = place.centres(circuit.currents, conductor_radius, radii)
    mutual = mutual_inductance(circuit.currents, centres, place.normal, radii)
    omega = 2.0 * np.pi * circuit.frequency
    own = own_reactance(circuit.frequency, radii, conductor_radius)
    strength = coupling_coefficient(omega * mutual, own, circuit.resistance, circuit.line)
    ratio = best_standing_wave_ratio(strength)
    tuned = best_tuned_reactance(strength, own, circuit.resistance, circuit.line)
    rows = np.stack([mutual, omega * np.abs(mutual), own, strength, ratio, tuned], axis=1).tolist()
    return [
        Coupled(2.0 * float(radius), float(radius) * omega / speed_of_light, centre, *row)
        for radius, centre, row in zip(radii, centres, rows, strict=True)
    ]


def matching_size(circuit: Circuit, place: Place, conductor_radius: float) -> Sizing:
    """Return the smallest coupling loop that matches the line.

    Parameters
    ----------
    circuit : tuned loop and line [A, m, Hz, ohm]
    place : where the coupling loop lies [m, 1]
    conductor_radius : of its round conductor [m]

    Returns
    -------
    the coupling loop, and what the largest reaches

    Valid     as `coupled`; the diameter is too large by up to half of what kappa is too small.
    Source    (omega M)^2 = Z0 R (1 + (Xc/Z0)^2): the smallest root of kappa = 1, bracketed by sizes from ten conductor
              radii up, then Brent's method.
    """
    least = conductor_radius / THICKNESS.high * (1.0 + 1e-12)  # not refused by rounding
    most = place.largest(circuit.currents, conductor_radius)
    if most < least:
        return Sizing(None, None, None, False)
    tried = coupled(circuit, place, conductor_radius, 2.0 * np.geomspace(least, most, SIZES))
    strength = np.array([each.coefficient for each in tried])
    strongest = tried[int(np.argmax(strength))]
    enough = np.flatnonzero(strength >= 1.0)
    if not len(enough) or enough[0] == 0:
        return Sizing(None, tried[-1], strongest, bool(len(enough)))

    def beyond(diameter: float) -> float:
        return coupled(circuit, place, conductor_radius, np.array([diameter]))[0].coefficient - 1.0

    first = int(enough[0])
    found = float(brentq(beyond, tried[first - 1].diameter, tried[first].diameter, rtol=1e-10))
    return Sizing(coupled(circuit, place, conductor_radius, np.array([found]))[0], tried[-1], strongest, False)
