"""The air a gap stands in: pressure of the standard atmosphere, and air density relative to the laboratory's."""

import numpy as np
from scipy.constants import atm

from magsafe.physics.arrays import Array, Values
from magsafe.physics.ranges import Range

ALTITUDE = Range(
    "altitude [m]", -500.0, 11_000.0, "lowest land; the layer in which the standard atmosphere cools evenly"
)
TEMPERATURE = Range("air temperature [K]", 203.15, 423.15, "-70 to 150 degC: weather, and a hot box")

_REFERENCE_TEMPERATURE = 293.15  # K, of the standards on high-voltage tests


def standard_pressure(altitude: Values) -> Array:
    """Return the pressure of the standard atmosphere.

    Parameters
    ----------
    altitude : height above mean sea level [m], shape (...)

    Returns
    -------
    pressure [Pa], same shape

    Raises
    ------
    ValueError : an altitude outside `ALTITUDE`

    Valid     the mean of the year; weather moves it by 3 %, rarely 5 %, either way.
    Source    U.S. Standard Atmosphere 1976, from the library fluids.
    """
    # The library takes a quarter of a second to load, and most commands never ask for the air.
    from fluids.atmosphere import ATMOSPHERE_1976  # noqa: PLC0415

    given = ALTITUDE.within(altitude)
    pressures = [ATMOSPHERE_1976(float(height)).P for height in given.ravel()]
    return np.asarray(pressures, dtype=np.float64).reshape(given.shape)


def relative_air_density(altitude: Values, temperature: Values) -> Array:
    """Return the density of air over that at 101.325 kPa and 20 degC.

    Parameters
    ----------
    altitude : height above mean sea level [m], shape (...)
    temperature : of the air in the gap [K], inside a hot box that of the box, broadcast

    Returns
    -------
    relative density [1], broadcast shape

    Raises
    ------
    ValueError : an altitude outside `ALTITUDE` or a temperature outside `TEMPERATURE`

    Valid     as `standard_pressure`. Humidity is left out: what it adds at 50 Hz it takes away at tens of kHz.
    Source    definition of relative air density in IEC 60060-1 (memory).
    """
    warmth = TEMPERATURE.within(temperature)
    return np.asarray(standard_pressure(altitude) / atm * (_REFERENCE_TEMPERATURE / warmth))
