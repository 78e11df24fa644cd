"""Where the air beside a smooth round conductor begins to glow: Peek's law held against the field on its surface."""

import numpy as np
from scipy.constants import epsilon_0

from magsafe.physics.arrays import Array, Values
from magsafe.physics.deratings import RADIO_FREQUENCY, ROUGH_SURFACE, Derating, product

_THICK = 3.0e6  # V/m, crest: 30 kV/cm
_DEPTH = 0.0301  # 0.301 with the radius in cm, here in m

ONSET_DERATINGS: tuple[Derating, ...] = (RADIO_FREQUENCY, ROUGH_SURFACE)


def onset_field(radius: Values, density: Values) -> Array:
    """Return the field on a smooth round conductor at which corona begins.

    Parameters
    ----------
    radius : of the conductor, or of its rounded edge [m], shape (...), above 0
    density : relative air density [1], broadcast, above 0

    Returns
    -------
    field, crest [V/m], broadcast shape

    Raises
    ------
    ValueError : a radius or density that is not above 0

    Valid     parallel smooth cylinders at 50 to 60 Hz, radii about 0.1 mm to 1 cm; beyond them extrapolated. The zone
              of the law, 0.3 sqrt(radius in cm) cm deep, must end in the gap: in a short one hold it against the
              uniform field too. A rod's round end is nearer to a sphere, whose law (27.2 and 0.54, memory) lies higher
              up to a radius of 4 cm.
    Source    Peek, Dielectric Phenomena in High Voltage Engineering, 1929 (constants seen on public pages).
    """
    _refuse_unless_positive(radius=radius, density=density)
    return np.asarray(_THICK * density * (1.0 + _DEPTH / np.sqrt(np.asarray(density) * radius)))


def line_charge_field(charge: Values, radius: Values) -> Array:
    """Return the field on a long straight cylinder from the charge that it carries.

    Parameters
    ----------
    charge : per metre [C/m], shape (...), crest if the crest of the field is wanted
    radius : of the cylinder [m], broadcast, above 0

    Returns
    -------
    magnitude of the field at the surface [V/m], broadcast shape

    Raises
    ------
    ValueError : a radius that is not above 0

    Valid     other conductors many radii away, so that the charge lies evenly round it; no end near.
    Source    Gauss's law.
    """
    _refuse_unless_positive(radius=radius)
    return np.asarray(np.abs(charge) / (2.0 * np.pi * epsilon_0 * np.asarray(radius)))


def derated_onset_field(radius: Values, density: Values, deratings: tuple[Derating, ...] = ONSET_DERATINGS) -> Array:
    """Return the field on a conductor at which corona begins, with what lowers it taken off.

    Parameters
    ----------
    radius : of the conductor [m], shape (...), above 0
    density : relative air density [1], broadcast, above 0
    deratings : rows that lower the onset [1]; as they stand, radio frequency and roughness

    Returns
    -------
    field, crest [V/m], broadcast shape

    Raises
    ------
    ValueError : a radius or density that is not above 0

    Valid     as `onset_field`. Wet, dusty or pointed parts glow earlier, at no known field.
    Source    as `onset_field`; roughness and the reduction at radio frequency as their rows say.
    """
    return onset_field(radius, density) * product(deratings)


def _refuse_unless_positive(**given: Values) -> None:
    for name, values in given.items():
        if not np.all(np.asarray(values) > 0.0):
            raise ValueError(f"{name} must be above 0")
