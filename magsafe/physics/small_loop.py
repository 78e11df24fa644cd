"""Closed forms of the electrically small loop with one port, and the range in which they hold.

With x = pi times the perimeter over the wavelength, the current of a one-port loop rises as a cosine towards
the point opposite the port. All resistances are referred to the current at the port.
"""

from dataclasses import dataclass

import numpy as np
from scipy.constants import c, mu_0

from magsafe.physics.arrays import Array, Values
from magsafe.physics.ranges import Range

FREE_SPACE_IMPEDANCE = mu_0 * c

UNIFORM_CURRENT = Range("perimeter in wavelengths", 0.0, 0.1, "common practice: current taken as uniform")
TAPERED_CURRENT = Range(
    "perimeter in wavelengths",
    0.0,
    0.25,
    "two full-wave solutions and a Fourier series of the circular loop, computed",
)
TAPERED_THICKNESS = Range("conductor radius over loop radius", 0.0, 0.054, "the thickest loop those solutions covered")


@dataclass(frozen=True, slots=True)
class ClosedFormError:
    """What the closed forms of one shape leave open, relative, at a perimeter of 0.25 wavelengths.

    All grow as the square of the perimeter in wavelengths, except `corner`. Ends are "true value below or above the
    closed form". `least_shunt` is the least capacitance across the port (negative: the charge lies nearer to the
    middle), in units of x tan x; `corner` is the uncertainty of the inductance by sharp corners, in units of mu0 times
    the conductor radius.
    """

    voltage_below: float
    voltage_above: float
    quality_below: float
    quality_above: float
    efficiency_above: float
    least_shunt: float
    corner: float


# Differences between these closed forms and two full-wave solutions of our own: one with ports 0.02-0.3 loop radii
# wide, in the middle of a side or in a corner, and `thin_wire` with conductor radii of 0.00001-0.054 of the loop's;
# losses in radiation alone, in the conductor alone, and at the port.
STUDY = "full-wave study over port widths, thicknesses and kinds of loss (computed)"
_CIRCLE = ClosedFormError(0.010, 0.015, 0.021, 0.027, 0.030, -0.005, 0.0)
_TRIANGLE = ClosedFormError(0.100, 0.015, 0.190, 0.027, 0.235, -0.070, 1.35)
_SQUARE = ClosedFormError(0.040, 0.015, 0.080, 0.027, 0.092, -0.035, 0.85)
_MANY_SIDES = ClosedFormError(0.026, 0.015, 0.050, 0.027, 0.060, -0.025, 0.60)


def closed_form_error(sides: int | None) -> ClosedFormError:
    """Return what the closed forms leave open for a circle (None) or a regular polygon of so many sides.

    Source    full-wave study over port widths, thicknesses and kinds of loss (computed).
    """
    if sides is None:
        return _CIRCLE
    return {3: _TRIANGLE, 4: _SQUARE}.get(sides, _MANY_SIDES)


def radiation_resistance(area: Values, turns: int, wavelength: Values) -> Array:
    """Return the resistance that stands for radiated power, current uniform along the turn.

    Parameters
    ----------
    area : area of one turn [m2], shape (...)
    turns : number of turns, all in phase [1]
    wavelength : free-space wavelength [m], broadcast against `area`

    Returns
    -------
    resistance [ohm], broadcast shape

    Valid     one turn's perimeter up to 0.1 wavelengths (`UNIFORM_CURRENT`).
    Source    Foster, Proceedings of the IRE 32, 603 (1944); Balanis, Antenna Theory, 4th ed., eq. (5-24)
              (both memory).
    """
    return np.asarray(FREE_SPACE_IMPEDANCE * 8.0 / 3.0 * np.pi**3 * (turns * area / wavelength**2) ** 2)


def radiation_taper(x: Values) -> Array:
    """Return the factor on the radiation resistance by the current's taper.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1], shape (...)

    Returns
    -------
    factor [1], same shape

    Valid     one turn, perimeter up to 0.25 wavelengths (`TAPERED_CURRENT`).
    Source    short-circuited line of the loop's half perimeter; held against the Fourier-series loop of Storer,
              Transactions of the AIEE 75, 606 (1956) (memory).
    """
    return np.asarray(1.0 / np.cos(x) ** 2)


def loss_taper(x: Values) -> Array:
    """Return the factor on a resistance spread evenly along the turn: the mean square of the current.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1], shape (...)

    Returns
    -------
    factor [1], same shape

    Valid     as `radiation_taper`.
    Source    mean of cos^2 along the line, over its value at the port.
    """
    return np.asarray((1.0 + np.sinc(2.0 * x / np.pi)) / (2.0 * np.cos(x) ** 2))


def opposite_taper(x: Values) -> Array:
    """Return the current opposite the port over the current at the port.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1], shape (...)

    Returns
    -------
    factor [1], same shape

    Valid     as `radiation_taper`.
    Source    cosine current of the short-circuited line.
    """
    return np.asarray(1.0 / np.cos(x))


def reactance_taper(x: Values) -> Array:
    """Return the port reactance over omega L.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1], shape (...), not 0

    Returns
    -------
    factor [1], same shape

    Valid     as `radiation_taper`.
    Source    tan(x)/x of the short-circuited line.
    """
    return np.asarray(np.tan(x) / x)


def slope_taper(x: Values) -> Array:
    """Return (omega dX/domega + |X|) / 2|X| of the loop with its series capacitor at resonance.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1], shape (...)

    Returns
    -------
    factor [1], same shape: 1 for a lumped loop, 1.29 at a quarter wavelength

    Valid     as `radiation_taper`.
    Source    derivative of tan(x): (1 + 2x / sin 2x) / 2.
    """
    return np.asarray((1.0 + 1.0 / np.sinc(2.0 * x / np.pi)) / 2.0)


def shunt_excess(x: float, shunt: float) -> float:
    """Return by how much a capacitance across the port raises the port reactance, as a share of it.

    With an excess d: reactance times (1 + d), spread resistances and the sum of the reactance slopes times
    (1 + d)^2, and the current into the conductor is (1 + d) times the port's; losses at the port stay as they are.

    Parameters
    ----------
    x : pi times the perimeter over the wavelength [1]
    shunt : capacitance across the port, in units of x tan x of the normalised susceptance [1]

    Returns
    -------
    excess d [1]

    Valid     as `radiation_taper`.
    Source    parallel connection of the loop and a small capacitance.
    """
    taken = shunt * x * float(np.tan(x))
    return taken / (1.0 - taken)


def largest_shunt(thickness: float) -> float:
    """Return the largest capacitance across the port that a loop's own charge and the port's width can make.

    Parameters
    ----------
    thickness : conductor radius over loop radius [1]

    Returns
    -------
    capacitance for `shunt_excess`, in units of x tan x [1]

    Valid     `TAPERED_CURRENT` and `TAPERED_THICKNESS`; a port in the middle of a side, no narrower than 0.02 loop
              radii and three conductor radii: a narrower gap's end faces belong to the capacitor.
    Source    full-wave study over port widths and thicknesses (computed).
    """
    return 0.035 + 0.75 * float(np.sqrt(thickness))


def thickness_parameter(perimeter: Values, conductor_radius: Values) -> Array:
    """Return the thickness parameter of a loop, 2 ln(perimeter / conductor radius).

    Parameters
    ----------
    perimeter : length of the turn's centre line [m], shape (...)
    conductor_radius : radius of the round conductor [m], broadcast

    Returns
    -------
    parameter [1], broadcast shape: large for thin loops

    Valid     any loop; defined for circles.
    Source    Storer, Transactions of the AIEE 75, 606 (1956) (memory).
    """
    return np.asarray(2.0 * np.log(perimeter / conductor_radius))
