"""How a voltage divides: between sections in series, and between air and solid sheets in one gap."""

import numpy as np

from magsafe.physics.arrays import Array, Values


def section_shares(capacitances: Array) -> Array:
    """Return how a voltage divides between sections in series.

    Parameters
    ----------
    capacitances : of the sections [F], shape (..., n), all above 0

    Returns
    -------
    share of the voltage on each [1], same shape, summing to 1

    Raises
    ------
    ValueError : a capacitance that is not above 0

    Valid     nothing else joined to the electrodes between them: a rotor that floats, its capacitance to the
              surroundings small. Halves share evenly only where that is symmetric too.
    Source    the same charge on all sections.
    """
    given = np.asarray(capacitances, dtype=np.float64)
    if not np.all(given > 0.0):
        raise ValueError("each capacitance must be above 0")
    return np.asarray((1.0 / given) / np.sum(1.0 / given, axis=-1, keepdims=True))


def series_voltage(stood: Array, capacitances: Array) -> Array:
    """Return the voltage across sections in series at which the first of them has all that it stands.

    Parameters
    ----------
    stood : by each section alone [V], shape (..., n) or (n,)
    capacitances : of the sections [F], shape (..., n), all above 0

    Returns
    -------
    voltage across all [V], shape (...): for equal sections n times that of one, for others less

    Raises
    ------
    ValueError : as `section_shares`

    Valid     as `section_shares`.
    Source    as `section_shares`.
    """
    return np.asarray(np.min(np.asarray(stood) / section_shares(capacitances), axis=-1))


def air_field(voltage: Values, air: Values, sheets: Array, permittivities: Array) -> Array:
    """Return the field in the air of a gap that is partly filled with solid sheets.

    Parameters
    ----------
    voltage : across the gap [V], shape (...)
    air : thickness of the air [m], broadcast
    sheets : thicknesses of the sheets [m], shape (..., n)
    permittivities : relative, of the sheets [1], same shape, 1 or more

    Returns
    -------
    field [V/m], shape (...): times the thickness of the air, its share of the voltage

    Raises
    ------
    ValueError : a thickness below 0, no thickness at all, or a permittivity below 1

    Valid     flat sheets as wide as the plates, no edge near. A sheet put into a gap strengthens the field in what air
              is left and can start corona.
    Source    the same displacement in all layers.
    """
    solid, relative = np.asarray(sheets, dtype=np.float64), np.asarray(permittivities, dtype=np.float64)
    if not (np.all(np.asarray(air) >= 0.0) and np.all(solid >= 0.0) and np.all(relative >= 1.0)):
        raise ValueError("thicknesses are 0 or more and relative permittivities 1 or more")
    length = air + np.sum(solid / relative, axis=-1)
    if not np.all(length > 0.0):
        raise ValueError("a gap needs some thickness")
    return np.asarray(voltage / length)
