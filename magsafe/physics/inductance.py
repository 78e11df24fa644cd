"""Inductance of single turns and mutual inductance of circles, in closed form."""

import numpy as np
from scipy.constants import mu_0
from scipy.special import ellipe, ellipk

from magsafe.physics.arrays import Array, Values
from magsafe.physics.ranges import Range

POLYGON_THICKNESS = Range(
    "conductor radius over side length", 0.0, 0.05, "thin-wire form of Grover 1946, ch. 8 (memory)"
)


def circle_inductance(radius: Values, conductor_radius: Values) -> Array:
    """Return the external inductance of a circular turn with its current on the surface.

    Parameters
    ----------
    radius : loop radius to the conductor's axis [m], shape (...)
    conductor_radius : radius of the round conductor [m], broadcast

    Returns
    -------
    inductance without its internal part [H], broadcast shape

    Valid     conductor radius below a tenth of the loop radius, current uniform along the turn; the next order
              adds 0.02 % at a conductor radius of 0.022 loop radii and 0.12 % at 0.054.
    Source    Rosa & Grover, NBS Scientific Paper 169 (1912) (memory), high-frequency form.
    """
    return np.asarray(mu_0 * radius * (np.log(8.0 * radius / conductor_radius) - 2.0))


def polygon_constant(sides: int) -> float:
    """Return the shape constant of a regular polygon in `polygon_inductance`.

    Parameters
    ----------
    sides : number of sides [1], 3 or more

    Returns
    -------
    constant [1]: 2.853 for a square, towards 2 + ln(pi/2) for many sides

    Valid     any number of sides.
    Source    Neumann's double integral between straight filaments, summed over the pairs of sides (Grover,
              Inductance Calculations, 1946, ch. 7-8, memory).
    """
    # Side k is seen from side 0 under the outer angle 2 pi k / n. Both integrals are done exactly: the mutual
    # inductance of two straight filaments in one plane, in units of mu0/(4 pi) times the side length.
    angles = 2.0 * np.pi * np.arange(1, sides) / sides
    total = sum(float(np.cos(angle)) * _filament_pair(sides, k) for k, angle in enumerate(angles, 1))
    return 1.0 + float(np.log(sides)) - total / 2.0


def _filament_pair(sides: int, apart: int) -> float:
    """Return the double integral of 1/distance over two sides of unit length, `apart` corners away."""
    corners = np.exp(2.0j * np.pi * np.arange(sides + 1) / sides)
    corners = corners / abs(corners[1] - corners[0])
    first, second = (corners[0], corners[1]), (corners[apart], corners[(apart + 1) % sides])
    # The integrand is smooth except at a shared corner; a map that clusters the nodes at both ends of each
    # side (t = sin^2) takes that away and keeps Gauss-Legendre exact to the last digits.
    nodes, weights = np.polynomial.legendre.leggauss(80)
    phase = np.pi / 4.0 * (nodes + 1.0)
    t = np.sin(phase) ** 2
    w = weights * np.pi / 4.0 * np.sin(2.0 * phase)
    p = first[0] + t * (first[1] - first[0])
    q = second[0] + t * (second[1] - second[0])
    return float(w @ (1.0 / np.abs(p[:, None] - q[None, :])) @ w)


def polygon_inductance(perimeter: Values, sides: int, conductor_radius: Values) -> Array:
    """Return the external inductance of one turn in the shape of a regular polygon.

    Parameters
    ----------
    perimeter : length of the turn's centre line [m], shape (...)
    sides : number of sides [1], 3 or more
    conductor_radius : radius of the round conductor [m], broadcast

    Returns
    -------
    inductance without its internal part [H], broadcast shape

    Valid     conductor radius below 0.05 of a side (`POLYGON_THICKNESS`); current on the surface, uniform along
              the turn.
    Source    Grover, Inductance Calculations, 1946, ch. 8 (memory).
    """
    constant = polygon_constant(sides)
    return np.asarray(mu_0 * perimeter / (2.0 * np.pi) * (np.log(2.0 * perimeter / conductor_radius) - constant))


def coaxial_mutual_inductance(first: Values, second: Values, distance: Values) -> Array:
    """Return the mutual inductance of two circular filaments on one axis.

    Parameters
    ----------
    first, second : radii [m], shape (...)
    distance : distance of their planes [m], broadcast; not 0 for equal radii

    Returns
    -------
    mutual inductance [H], broadcast shape

    Valid     filaments, uniform current.
    Source    Maxwell, Treatise on Electricity and Magnetism, vol. II, art. 701 (memory).
    """
    parameter = 4.0 * first * second / ((first + second) ** 2 + distance**2)
    modulus = np.sqrt(parameter)
    bracket = (2.0 / modulus - modulus) * ellipk(parameter) - 2.0 / modulus * ellipe(parameter)
    return np.asarray(mu_0 * np.sqrt(first * second) * bracket)


def coplanar_mutual_inductance(large: float, small: float, offset: float) -> float:
    """Return the mutual inductance of two circular filaments in one plane, currents in the same sense.

    Parameters
    ----------
    large, small : radii [m]
    offset : distance of the centres [m]; the circles do not touch

    Returns
    -------
    mutual inductance [H]: positive with one circle inside the other, negative side by side

    Valid     filaments, uniform current.
    Source    vector potential of a circular filament in its plane (Smythe, Static and Dynamic Electricity,
              memory), integrated round the other circle.
    """
    angle = 2.0 * np.pi * (np.arange(512) + 0.5) / 512
    x, y = offset + small * np.cos(angle), small * np.sin(angle)
    rho = np.hypot(x, y)
    parameter = 4.0 * large * rho / (large + rho) ** 2
    kappa = np.sqrt(parameter)
    potential = (
        mu_0
        / (np.pi * kappa)
        * np.sqrt(large / rho)
        * ((1.0 - parameter / 2.0) * ellipk(parameter) - ellipe(parameter))
    )
    along = (x * np.cos(angle) + y * np.sin(angle)) / rho
    return float(np.mean(potential * along) * 2.0 * np.pi * small)
