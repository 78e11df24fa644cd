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

import numpy as np
from scipy.constants import mu_0

from magsafe.physics.arrays import Array, ComplexArray, Values
from magsafe.physics.inductance import circle_inductance
from magsafe.physics.near_field import SegmentCurrents
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
