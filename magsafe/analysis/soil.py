"""The soil under a loop: the constants that it may have, sampled over their span."""

from math import pi, sqrt

import numpy as np
from scipy.constants import c

from magsafe.design import tables
from magsafe.design.model import Design, Loop, SoilConstants
from magsafe.design.shape import drop, outline
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.half_space import relative_permittivity, resistance_ratio
from magsafe.physics.half_space_ring import ring_resistance_ratio
from magsafe.physics.small_loop import UNIFORM_CURRENT

PERFECT = 1.0 - 1e24j  # relative permittivity that stands for sheet metal where only its reflection is asked
NEARLY_PERFECT = 1.0 - 1e12j  # the same where power is integrated, with fewer samples near the horizon
CONDUCTIVITIES, PERMITTIVITIES = 9, 4  # samples between the ends of a span: see BETWEEN_SOILS
ANY_CONDUCTIVITY = np.geomspace(1e-5, 10.0, 37)  # S/m: from dry ice and sand to brine (common practice)
ANY_PERMITTIVITY = np.array([1.0, 2.0, 3.0, 5.0, 10.0, 20.0, 40.0, 90.0])
LOWEST = 1.2  # radii: from there up the current over soil keeps between those of free space and image (computed)
BETWEEN_SOILS = 0.01  # of a resistance, for what lies between the samples (computed)
BETWEEN_LOSSES = 0.04  # of what soil adds, for the same at its low end (computed)


def permittivities(design: Design, frequency: float) -> ComplexArray:
    """Return complex relative permittivities that the soil may have at a frequency [Hz], shape (soil,).

    The likely one comes first, then samples of the span; where no ground is stated, samples of any soil there is and no
    likely one. Empty for free space and a perfect plane.
    """
    name, stated = design.ground_name, design.site.ground
    if name in ("none", "perfect"):
        return np.zeros(0, dtype=np.complex128)
    if name is None:
        return _grid(ANY_CONDUCTIVITY, ANY_PERMITTIVITY, frequency)
    if isinstance(stated, SoilConstants):
        first, second = ((each.low, each.likely, each.high) for each in (stated.conductivity, stated.permittivity))
    else:
        row = tables.soils()[name]
        first, second = (
            (each.low or 0.0, each.likely or 0.0, each.high or 0.0) for each in (row.conductivity, row.permittivity)
        )
    likely = relative_permittivity(second[1], first[1], frequency)
    if first[0] == first[2] and second[0] == second[2]:
        return likely[None]
    spanned = _grid(_between(first, CONDUCTIVITIES), _between(second, PERMITTIVITIES), frequency)
    return np.concatenate([likely[None], spanned])


def radii_up(loop: Loop, height: float) -> float:
    """Return how high a loop is by its size [1], with its centre at a height [m].

    An upright one over how far it reaches down, the lowest turn of a flat one over its radius.
    """
    if loop.plane == "vertical":
        return height / drop(loop)
    return (height - drop(loop)) / outline(loop).mean_radius


def least_height(loop: Loop) -> float:
    """Return the height of the centre [m] from which what soil takes is computed."""
    if loop.plane == "vertical":
        return LOWEST * drop(loop)
    return LOWEST * outline(loop).mean_radius + drop(loop)


def is_too_low(design: Design) -> bool:
    """Return whether a loop is so near to soil that what that does to its current is not computed."""
    height = design.loop.centre_height
    if height is None or design.ground_name in ("none", "perfect"):
        return False
    return radii_up(design.loop, height) < LOWEST


def size_factor(design: Design, frequency: float) -> float | None:
    """Return what the ground adds to the resistance of a ring, over what it adds to a dipole there [1].

    Of a ring of the loop's area; None where no soil or height is stated, where the ring would touch, or where its
    current is not uniform.
    """
    loop, soils = design.loop, permittivities(design, frequency)
    line, height, vertical = outline(loop), loop.centre_height, loop.plane == "vertical"
    radius, wavenumber = sqrt(line.area / pi), 2.0 * pi * frequency / c
    if height is None or design.ground_name is None or not len(soils) or (vertical and height <= radius):
        return None
    if not UNIFORM_CURRENT.holds(line.perimeter * frequency / c):
        return None
    up = 2.0 * wavenumber * height
    dipole = float(resistance_ratio(vertical, soils[0], up)) - 1.0
    ring = float(ring_resistance_ratio(vertical, soils[0], up, wavenumber * radius)) - 1.0
    return ring / dipole if dipole else None


def _between(ends: tuple[float, float, float], count: int) -> Array:
    low, _, high = ends
    return np.array([low]) if low == high else np.geomspace(low, high, count)


def _grid(conductivity: Array, permittivity: Array, frequency: float) -> ComplexArray:
    return relative_permittivity(permittivity, conductivity[:, None], frequency).ravel()
