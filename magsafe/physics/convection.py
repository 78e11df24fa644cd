"""Dry air, and the heat that it takes from a conductor by rising along it."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import cast

import numpy as np
from scipy.constants import g, gas_constant

from magsafe.physics.arrays import Array, Values
from magsafe.physics.ranges import Range

RAYLEIGH = Range("Rayleigh number", 1e-5, 1e12, "Churchill & Chu 1975, as the ht library quotes it")
AIR_TEMPERATURE = Range("air temperature [K]", 220.0, 1500.0, "fits of viscosity, conductivity and heat capacity")

# Of an upright cylinder over a horizontal one, mean over its height: common practice has 0.8 to 1. Popiel's fit to the
# slender upright cylinder lies between 0.83 and 1.02 for 3 to 50 mm and 0.5 to 3 m (computed), so this is the safe end.
UPRIGHT_SHARE = 0.8

_MOLAR_MASS = 28.9644e-3  # kg/mol, U.S. Standard Atmosphere 1976

Correlation = Callable[[Array, Array], Array]


@dataclass(frozen=True, slots=True)
class Air:
    """Dry air: density [kg/m3], viscosity [Pa s], conductivity [W/(m K)] and heat capacity [J/(kg K)], one shape."""

    density: Array
    viscosity: Array
    conductivity: Array
    heat_capacity: Array

    @property
    def prandtl(self) -> Array:
        """Prandtl number [1]."""
        return self.viscosity * self.heat_capacity / self.conductivity

    @property
    def kinematic_viscosity(self) -> Array:
        """Viscosity over density [m2/s]."""
        return self.viscosity / self.density


def dry_air(temperature: Values, pressure: Values) -> Air:
    """Return the properties of dry air.

    Parameters
    ----------
    temperature : temperature [K], shape (...)
    pressure : pressure [Pa], broadcast

    Returns
    -------
    Air [kg/m3, Pa s, W/(m K), J/(kg K)], broadcast shape

    Valid     `AIR_TEMPERATURE`, pressures of the lower atmosphere. Moisture is left out.
    Source    viscosity and conductivity: U.S. Standard Atmosphere 1976 (its formulas as in the fluids library);
              heat capacity: Irvine & Liley, Steam and Gas Tables with Computer Equations, 1984 (memory); ideal gas.
    """
    kelvin = np.asarray(temperature, dtype=np.float64)
    density = pressure * _MOLAR_MASS / (gas_constant * kelvin)
    viscosity = 1.458e-6 * kelvin**1.5 / (kelvin + 110.4)
    conductivity = 2.64638e-3 * kelvin**1.5 / (kelvin + 245.4 * 10.0 ** (-12.0 / kelvin))
    heat_capacity = 1e3 * np.polyval([0.1077024e-12, -0.4970786e-9, 0.7816818e-6, -0.284887e-3, 1.03409], kelvin)
    return Air(*np.broadcast_arrays(density, viscosity, conductivity, heat_capacity))


def rayleigh_number(diameter: Values, surface: Values, air: Values, pressure: Values) -> Array:
    """Return the Rayleigh number of a cylinder in still air.

    Parameters
    ----------
    diameter : outer diameter [m], shape (...)
    surface : temperature of the surface [K], broadcast
    air : temperature of the air [K], broadcast
    pressure : pressure of the air [Pa], broadcast

    Returns
    -------
    number [1], broadcast shape, 0 or more

    Valid     `dry_air` at the mean of both temperatures, whose inverse is the expansion of an ideal gas.
    Source    definition.
    """
    film = 0.5 * (np.asarray(surface, dtype=np.float64) + air)
    made_of = dry_air(film, pressure)
    return np.asarray(_grashof_number(diameter, surface, film, made_of) * made_of.prandtl)


def convected_heat(diameter: Values, surface: Values, air: Values, pressure: Values) -> Array:
    """Return the heat that still air takes from a long horizontal cylinder.

    Parameters
    ----------
    diameter : outer diameter [m], shape (...); of a strip, `equal_perimeter_diameter`
    surface : temperature of the surface, the same all round [K], broadcast
    air : temperature of the air far away [K], broadcast
    pressure : pressure of the air [Pa], broadcast

    Returns
    -------
    heat per metre [W/m], broadcast shape; negative where the air is the warmer

    Valid     `RAYLEIGH`, no wind, no wall within a few diameters. Measurements scatter by some 10 to 20 % about such
              correlations (common practice); wind always takes more. Upright: times `UPRIGHT_SHARE` at the least.
    Source    Churchill & Chu, Int. J. Heat Mass Transfer 18, 1049 (1975) (memory), by the ht library.
    """
    from ht.conv_free_immersed import Nu_horizontal_cylinder_Churchill_Chu  # noqa: PLC0415 (slow to load)

    # Written for floats, it is plain arithmetic and takes arrays.
    correlation = cast("Correlation", Nu_horizontal_cylinder_Churchill_Chu)
    film = 0.5 * (np.asarray(surface, dtype=np.float64) + air)
    made_of = dry_air(film, pressure)
    # The library asks for Grashof's number, not Rayleigh's.
    nusselt = correlation(made_of.prandtl, _grashof_number(diameter, surface, film, made_of))
    return np.asarray(np.pi * nusselt * made_of.conductivity * (np.asarray(surface) - air))


def equal_perimeter_diameter(width: Values, thickness: Values) -> Array:
    """Return the diameter of the cylinder that stands for a strip in heat.

    Parameters
    ----------
    width : longer side of the section [m], shape (...)
    thickness : shorter side [m], broadcast

    Returns
    -------
    diameter [m], broadcast shape: that of the circle with the strip's perimeter

    Valid     a long strip whose length lies level: correlations for plates give more heat on edge, and flat the same
              within 7 % from 30 mm of width (computed); exact for radiation.
    Source    equal length of flow along the body: Lienhard, Int. J. Heat Mass Transfer 16, 2121 (1973) (memory).
    """
    return np.asarray(2.0 * (np.asarray(width) + thickness) / np.pi)


def _grashof_number(diameter: Values, surface: Values, film: Array, made_of: Air) -> Array:
    """Return the Grashof number, with the mean temperature of surface and air, and the air at it."""
    difference = 2.0 * np.abs(surface - film)
    return np.asarray(g / film * difference * np.asarray(diameter) ** 3 / made_of.kinematic_viscosity**2)
