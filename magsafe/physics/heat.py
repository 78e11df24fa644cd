"""The warmth at which a conductor loses what it takes up, and what it moves."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.constants import Stefan_Boltzmann

from magsafe.physics.arrays import Array, Values
from magsafe.physics.convection import AIR_TEMPERATURE, convected_heat

# K. A balance is searched up to here, short of where copper melts (1358 K); long before, nothing of a loop holds.
CEILING = 1300.0

_REFERENCE = 293.15  # K, 20 degC
_HALVINGS = 50  # of 1300 K: leaves less than the last digit


def _need(true: NDArray[np.bool_] | np.bool_, message: str) -> None:
    if not np.all(true):
        raise ValueError(message)


@dataclass(frozen=True, slots=True)
class Surface:
    """The outside of a conductor, floats or arrays that broadcast.

    `diameter` [m] of a round conductor, `equal_perimeter_diameter` of a strip; `facing` [m], the width that the sun can
    shine on (the diameter; of a strip at most the diagonal of its section); `emissivity` and `absorptivity` [1] for
    heat and for sunlight; `convection_share` [1] of what `convected_heat` gives (`UPRIGHT_SHARE` for upright parts).

    Raises
    ------
    ValueError : a length not above 0, an emissivity or absorptivity outside 0 to 1, a share not above 0
    """

    diameter: Values
    facing: Values
    emissivity: Values
    absorptivity: Values
    convection_share: Values = 1.0

    def __post_init__(self) -> None:
        """Refuse what no surface has."""
        _need(np.isfinite(self.diameter) & (np.asarray(self.diameter) > 0.0), "a diameter must be above 0")
        _need(np.isfinite(self.facing) & (np.asarray(self.facing) > 0.0), "a width must be above 0")
        for share in (self.emissivity, self.absorptivity):
            _need((np.asarray(share) >= 0.0) & (np.asarray(share) <= 1.0), "emissivity and absorptivity are 0 to 1")
        _need(np.asarray(self.convection_share) > 0.0, "a share of convection must be above 0")


@dataclass(frozen=True, slots=True)
class Surroundings:
    """Still air and sun: `temperature` [K], also of all that is seen around; `pressure` [Pa]; `sunshine` [W/m2].

    Raises
    ------
    ValueError : a temperature not between the low end of `AIR_TEMPERATURE` and `CEILING`, a pressure not above 0, a
        negative sunshine
    """

    temperature: Values
    pressure: Values
    sunshine: Values = 0.0

    def __post_init__(self) -> None:
        """Refuse what no place on earth has."""
        kelvin = np.asarray(self.temperature)
        lowest = AIR_TEMPERATURE.low
        _need((kelvin >= lowest) & (kelvin < CEILING), f"the air must be between {lowest:g} and {CEILING:g} K")
        _need(np.isfinite(self.pressure) & (np.asarray(self.pressure) > 0.0), "a pressure must be above 0")
        _need(np.isfinite(self.sunshine) & (np.asarray(self.sunshine) >= 0.0), "sunshine must not be negative")


@dataclass(frozen=True, slots=True)
class ElectricHeat:
    """Heat of a current in a conductor: `at_20` [W/m] at 20 degC, growing with the resistivity to the power `exponent`.

    `coefficient` [1/K] is that of the resistivity at 20 degC. The exponent is 0.5 where the skin is thin, 1 where the
    current fills the section; between them for walls of about a skin depth.

    Raises
    ------
    ValueError : a heat that is negative or not finite, a negative coefficient, an exponent outside 0 to 1
    """

    at_20: Values
    coefficient: Values
    exponent: Values = 0.5

    def __post_init__(self) -> None:
        """Refuse what no current makes."""
        _need(np.isfinite(self.at_20) & (np.asarray(self.at_20) >= 0.0), "heat must be finite and not negative")
        _need(np.isfinite(self.coefficient) & (np.asarray(self.coefficient) >= 0.0), "a coefficient must be 0 or more")
        _need((np.asarray(self.exponent) >= 0.0) & (np.asarray(self.exponent) <= 1.0), "an exponent must be 0 to 1")

    def growth(self, temperature: Values) -> Array:
        """Return the resistance at a temperature [K] over that at 20 degC [1]."""
        return np.asarray((1.0 + self.coefficient * (np.asarray(temperature) - _REFERENCE)) ** self.exponent)

    def at(self, temperature: Values) -> Array:
        """Return the heat at a temperature [K], in W/m."""
        return np.asarray(self.at_20 * self.growth(temperature))


def radiated_heat(temperature: Values, surface: Surface, surroundings: Surroundings) -> Array:
    """Return the heat that a conductor radiates to its surroundings.

    Parameters
    ----------
    temperature : temperature of the conductor [K], shape (...)
    surface : its outside [m, 1], broadcast
    surroundings : what it sees [K], broadcast

    Returns
    -------
    heat per metre [W/m], broadcast shape; negative where the surroundings are the warmer

    Valid     grey surface, convex section, no hot body near, all seen around as warm as the air: the sky is colder.
    Source    law of Stefan and Boltzmann.
    """
    fourth = np.asarray(temperature, dtype=np.float64) ** 4 - np.asarray(surroundings.temperature) ** 4
    return np.asarray(surface.emissivity * Stefan_Boltzmann * np.pi * surface.diameter * fourth)


def lost_heat(temperature: Values, surface: Surface, surroundings: Surroundings) -> Array:
    """Return the heat that a conductor loses to air and surroundings.

    Parameters
    ----------
    temperature : temperature of the conductor [K], shape (...)
    surface : its outside [m, 1], broadcast
    surroundings : air, and what it sees [K, Pa], broadcast

    Returns
    -------
    heat per metre [W/m], broadcast shape

    Valid     as `convected_heat` and `radiated_heat`; nothing flows along the conductor.
    Source    sum of both.
    """
    convected = convected_heat(surface.diameter, temperature, surroundings.temperature, surroundings.pressure)
    return np.asarray(surface.convection_share * convected + radiated_heat(temperature, surface, surroundings))


def absorbed_sunshine(surface: Surface, surroundings: Surroundings) -> Array:
    """Return the heat that a conductor takes from the sun.

    Parameters
    ----------
    surface : its outside [m, 1], shape (...)
    surroundings : with the sunshine [W/m2], broadcast

    Returns
    -------
    heat per metre [W/m], broadcast shape

    Valid     sun square to the conductor, the most that it can give; light from the ground not counted.
    Source    definition of absorptivity.
    """
    return np.asarray(np.asarray(surroundings.sunshine) * surface.absorptivity * surface.facing)


def steady_temperature(heat: ElectricHeat, surface: Surface, surroundings: Surroundings) -> Array:
    """Return the temperature at which a conductor loses what current and sun give it.

    Parameters
    ----------
    heat : heat of the current [W/m], shape (...)
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast

    Returns
    -------
    temperature [K], broadcast shape; inf where there is no balance up to `CEILING`

    Valid     as `lost_heat` and `absorbed_sunshine`; resistivity linear in temperature, which it is to about 470 K.
    Source    conservation of energy.
    """
    sun = absorbed_sunshine(surface, surroundings)

    def excess(temperature: Array) -> Array:
        return np.asarray(heat.at(temperature) + sun - lost_heat(temperature, surface, surroundings))

    start = np.asarray(surroundings.temperature, dtype=np.float64)
    shape = np.broadcast_shapes(start.shape, excess(start).shape)
    low = np.broadcast_to(start, shape)
    high = np.full(shape, CEILING)
    runs_away = excess(high) > 0.0
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        warms = excess(middle) > 0.0
        low, high = np.where(warms, middle, low), np.where(warms, high, middle)
    # The upper end: not below the balance.
    return np.asarray(np.where(runs_away, np.inf, high))


def heat_for_temperature(
    temperature: Values, coefficient: Values, exponent: Values, surface: Surface, surroundings: Surroundings
) -> Array:
    """Return the heat at 20 degC that keeps a conductor at a temperature for good.

    Parameters
    ----------
    temperature : steady temperature of the conductor [K], shape (...)
    coefficient : of the resistivity at 20 degC [1/K], broadcast
    exponent : as in `ElectricHeat` [1], broadcast
    surface : outside of the conductor [m, 1], broadcast
    surroundings : air and sun [K, Pa, W/m2], broadcast

    Returns
    -------
    heat per metre that its current would make at 20 degC [W/m], broadcast shape; negative where the sun alone
    makes it warmer

    Valid     as `steady_temperature`, of which it is the inverse.
    Source    conservation of energy.
    """
    spare = lost_heat(temperature, surface, surroundings) - absorbed_sunshine(surface, surroundings)
    return np.asarray(spare / ElectricHeat(1.0, coefficient, exponent).growth(temperature))


def frequency_drift(frequency: Values, expansion: Values, rise: Values) -> tuple[Array, Array]:
    """Return how far a loop's resonance moves as it grows with warmth.

    Parameters
    ----------
    frequency : resonant frequency [Hz], shape (...)
    expansion : linear expansion of the conductor [1/K], broadcast
    rise : of its temperature [K], broadcast

    Returns
    -------
    two shifts [Hz], broadcast shape: only the inductance grows; the capacitance grows in proportion too

    Valid     the whole conductor as warm; other parts of the capacitor (dielectric, supports) may move more.
    Source    inductance and capacitance go with size (dimensions); resonance with the root of both.
    """
    both = -np.asarray(frequency) * expansion * rise
    return np.asarray(0.5 * both), np.asarray(both)
