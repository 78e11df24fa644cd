"""Internal impedance and equivalent radius of a flat strip."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.optimize import brentq
from scipy.special import ellipe, ellipk, ellipkm1, elliprd

from magsafe.physics.arrays import Array
from magsafe.physics.conductor import skin_depth
from magsafe.physics.ranges import Range

ASPECT = Range("width over thickness", 1.0, 2e4, "precision of the conformal map; beyond it a foil is nearly a plane")

# Thickness over skin depth up to which the fields in the section are solved, and from which the thin-skin form is
# used alone; between them one goes over into the other.
_SOLVED_TO, _THIN_SKIN_FROM = 6.0, 10.0

# Relative errors. The solution in the section changes by less than 0.4 % on a much finer mesh; sharp
# edges, as against rolled ones, are the rest. From 10 skin depths such solutions lie between 2.5 % below the thin-skin
# form (wide strips, 10 to 40 skin depths) and 3 % above it (square bar, 10 skin depths).
_SOLVED_ERROR, _THIN_SKIN_ERROR = 0.02, 0.04


@dataclass(frozen=True, slots=True)
class StripImpedance:
    """Internal impedance per metre [ohm/m] and how far it may lie off, as shares of itself [1].

    The true resistance is between `impedance.real * (1 - below)` and `impedance.real * (1 + above)`.
    """

    impedance: complex
    below: float
    above: float


def crowding_factor(width: float, thickness: float) -> float:
    """Return how much more a strip loses than if its current spread evenly over its surface, skin thin.

    Parameters
    ----------
    width : longer side of the section [m]
    thickness : shorter side [m]

    Returns
    -------
    factor [1]: surface resistance times it over the perimeter of the section is the resistance per metre; 4/pi for a
    square bar, growing with the logarithm of width/thickness

    Raises
    ------
    ValueError : width/thickness outside `ASPECT`

    Valid     skin depth much smaller than the thickness, no other conductor near, sharp edges.
    Source    conformal map of the outside of a rectangle; the limit studied by Cockcroft, Proc. R. Soc. A 122, 533
              (1929) (abstract seen).
    """
    parameter = _parameter(_aspect(width, thickness))
    wide, narrow = _half_sides(parameter)
    return float(4.0 / np.pi**2 * (wide + narrow) * (ellipk(parameter) + ellipkm1(parameter)))


def equivalent_radius(width: float, thickness: float) -> float:
    """Return the radius of the round conductor that has the external inductance of a strip, skin thin.

    Parameters
    ----------
    width : longer side of the section [m]
    thickness : shorter side [m]

    Returns
    -------
    radius [m]: width/4 for a thin strip, 0.5902 of the side for a square bar

    Raises
    ------
    ValueError : width/thickness outside `ASPECT`

    Valid     as `crowding_factor`, and width much smaller than the loop. For inductance only, never for resistance.
    Source    the same conformal map; its two limits in Grover, Inductance Calculations, 1946 (memory).
    """
    wide, _ = _half_sides(_parameter(_aspect(width, thickness)))
    return float(width / (4.0 * wide))


def strip_impedance(frequency: float, conductivity: float, width: float, thickness: float) -> StripImpedance:
    """Return the internal impedance per metre of a flat strip, return current far away.

    Parameters
    ----------
    frequency : frequency [Hz]
    conductivity : conductivity of a non-magnetic metal [S/m]
    width : longer side of the section [m]
    thickness : shorter side [m]

    Returns
    -------
    StripImpedance: the reactance is the one to be added to the external inductance with `equivalent_radius`

    Raises
    ------
    ValueError : width/thickness outside `ASPECT`

    Valid     any ratio of thickness to skin depth; width much smaller than the loop, no other conductor near. From 10
              skin depths the even slab's impedance times `crowding_factor`, where the reactance is that of the
              surface impedance, equal to the resistance; up to 6 the fields in the section are solved. The errors are
              those of the resistance; the solved reactance is good to 1 %, or to omega mu0/(2 pi) times 2.5e-5
              in wide foils, where that is more.
    Source    thick: as `crowding_factor`, with the impedance of a slab between two equal fields (Ramo, Whinnery & Van
              Duzer, memory). Thin: integral equation of the current in the section, as Silvester, Proc. IEEE 54,
              1147 (1966) (memory), solved in pieces of constant current density.
    """
    aspect = _aspect(width, thickness)
    depths = thickness / float(skin_depth(frequency, conductivity))
    share = float(np.clip((depths - _SOLVED_TO) / (_THIN_SKIN_FROM - _SOLVED_TO), 0.0, 1.0))
    # Both in units of the resistance to direct current.
    relative = 0.0j
    if share > 0.0:
        slab = (1.0 + 1.0j) * depths / 2.0
        even = slab * (1.0 + np.exp(-2.0 * slab)) / -np.expm1(-2.0 * slab)
        relative += share * crowding_factor(width, thickness) * aspect / (1.0 + aspect) * even
    if share < 1.0:
        relative += (1.0 - share) * _solved(aspect, depths)
    error = share * _THIN_SKIN_ERROR + (1.0 - share) * _SOLVED_ERROR
    return StripImpedance(complex(relative / (conductivity * width * thickness)), error, error)


def _aspect(width: float, thickness: float) -> float:
    if not (thickness > 0.0 and ASPECT.holds(width / thickness)):
        raise ValueError(
            f"a strip of {width:g} m by {thickness:g} m: width over thickness must be between {ASPECT.low:g} and "
            f"{ASPECT.high:g}"
        )
    return width / thickness


def _half_sides(parameter: float) -> tuple[float, float]:
    """Return width and thickness of the section over four times the radius of the circle it is mapped to."""
    rest = 1.0 - parameter
    wide = ellipe(rest) - parameter * ellipkm1(parameter)
    # E(m) - (1 - m) K(m) without the difference of nearly equal numbers that a wide strip makes of it.
    narrow = parameter * (ellipk(parameter) - elliprd(0.0, rest, 1.0) / 3.0)
    return float(wide), float(narrow)


def _parameter(aspect: float) -> float:
    """Return the parameter m of the map whose rectangle has this width over thickness."""

    def miss(logarithm: float) -> float:
        wide, narrow = _half_sides(float(np.exp(logarithm)))
        return float(np.log(wide / narrow) - np.log(aspect))

    # A square bar has m = 1/2, a wide strip 4/(pi width/thickness): this bracket holds both.
    return float(np.exp(brentq(miss, np.log(0.5 / aspect), np.log(0.6), xtol=1e-14, rtol=1e-14)))


def _solved(aspect: float, depths: float) -> complex:
    """Return the internal impedance over the resistance to direct current from the fields in the section.

    In each piece J / conductivity + j omega A is the same. With lengths in thicknesses t, A = -(mu0/2 pi) t^2 sum of
    J times the integral of ln(distance/t) over the pieces, and omega mu0 conductivity = 2 / (skin depth)^2.
    """
    areas, logarithms = _section(aspect)
    weight = depths**2 / np.pi
    system = np.eye(len(areas)) - 1.0j * weight * logarithms
    density = np.linalg.solve(system, np.ones(len(areas)))
    total = aspect / (areas @ density)
    # The potential was counted from the distance t: take away what is outside, ln(t / equivalent radius).
    outside = -np.log(equivalent_radius(aspect, 1.0))
    return complex(total - 1.0j * weight * aspect * outside)


@lru_cache(maxsize=16)
def _section(aspect: float) -> tuple[Array, Array]:
    """Return areas of all pieces (four mirror images each), and integrals of ln(distance), lengths in thicknesses."""
    across, through = _edges(aspect / 2.0), _edges(0.5)
    left, low = (e.ravel() for e in np.meshgrid(across[:-1], through[:-1], indexing="ij"))
    right, high = (e.ravel() for e in np.meshgrid(across[1:], through[1:], indexing="ij"))
    x, y = (left + right) / 2.0, (low + high) / 2.0
    logarithms = np.zeros((len(x), len(x)))
    for side in (1.0, -1.0):
        for face in (1.0, -1.0):
            first, last = side * x[:, None] - right, side * x[:, None] - left
            under, over = face * y[:, None] - high, face * y[:, None] - low
            logarithms += _primitive(last, over) - _primitive(first, over)
            logarithms += _primitive(first, under) - _primitive(last, under)
    return 4.0 * (right - left) * (high - low), logarithms


def _edges(half: float) -> Array:
    """Return the bounds of the pieces from the middle to a face, fine enough there for 10 skin depths in 1."""
    steps = [0.012]
    while sum(steps) < half:
        steps.append(min(steps[-1] * 1.35, half / 4.0 if half < 1.0 else half / 8.0))
    found = np.concatenate([[0.0], np.cumsum(steps[::-1])])
    return np.asarray(found * (half / found[-1]))


def _primitive(x: Array, y: Array) -> Array:
    """Return a function whose mixed derivative d2/dx dy is ln(hypot(x, y)); no piece's middle lies on an edge."""
    area = x * y * (np.log(np.hypot(x, y)) - 1.5)
    return np.asarray(area + 0.5 * x**2 * np.arctan(y / x) + 0.5 * y**2 * np.arctan(x / y))
