"""Capacitors made of line: an open-ended coaxial section, the sleeves of a trombone, plates with a dielectric."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import epsilon_0, mu_0
from scipy.special import kve

from magsafe.physics.arrays import Array, ComplexArray, Values
from magsafe.physics.conductor import rod_impedance, skin_depth


@dataclass(frozen=True, slots=True)
class Line:
    """A uniform line at one frequency: `series_impedance` [ohm/m] and `shunt_admittance` [S/m], one shape."""

    series_impedance: ComplexArray
    shunt_admittance: ComplexArray

    @property
    def propagation(self) -> ComplexArray:
        """Propagation constant [1/m], its real part not negative."""
        return np.asarray(np.sqrt(self.series_impedance * self.shunt_admittance))

    @property
    def characteristic_impedance(self) -> ComplexArray:
        """Characteristic impedance [ohm]; its phase must not be left out where the line is short."""
        return np.asarray(np.sqrt(self.series_impedance / self.shunt_admittance))


def coaxial_capacitance(inner_radius: Values, outer_radius: Values, permittivity: Values) -> Array:
    """Return the capacitance per metre of a coaxial line or sleeve.

    Parameters
    ----------
    inner_radius : outer radius of the inner conductor [m], shape (...)
    outer_radius : inner radius of the outer conductor [m], broadcast
    permittivity : relative permittivity of what fills the space between [1], broadcast

    Returns
    -------
    capacitance [F/m], broadcast shape

    Raises
    ------
    ValueError : the inner radius not above 0 or not smaller than the outer one

    Valid     conductors on one axis, which is the least that a sleeve can have; ends, and air left between, apart.
    Source    any textbook.
    """
    return np.asarray(2.0 * np.pi * epsilon_0 * permittivity / _logarithm(inner_radius, outer_radius))


def coaxial_field(voltage: Values, inner_radius: Values, outer_radius: Values) -> Array:
    """Return the strongest electric field in a coaxial line: that on the inner conductor.

    Parameters
    ----------
    voltage : between the conductors, peak [V], shape (...)
    inner_radius : outer radius of the inner conductor [m], broadcast
    outer_radius : inner radius of the outer conductor [m], broadcast

    Returns
    -------
    field, peak [V/m], broadcast shape

    Raises
    ------
    ValueError : as `coaxial_capacitance`

    Valid     one dielectric, smooth conductors on one axis; strands raise it, and so does the edge of an open end.
    Source    any textbook.
    """
    return np.asarray(np.asarray(voltage) / (inner_radius * _logarithm(inner_radius, outer_radius)))


def coaxial_line(
    frequency: Values,
    inner_radius: Values,
    outer_radius: Values,
    permittivity: Values,
    loss_tangent: Values,
    inner_conductivity: Values,
    outer_conductivity: Values,
) -> Line:
    """Return the constants of a coaxial line at high frequency.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    inner_radius : outer radius of the inner conductor [m], broadcast
    outer_radius : inner radius of the outer conductor [m], broadcast
    permittivity : relative permittivity of the dielectric [1], broadcast
    loss_tangent : its loss tangent [1], broadcast
    inner_conductivity : of the inner conductor [S/m], broadcast
    outer_conductivity : of the outer one [S/m], broadcast; a braid that loses n times as much has 1/n^2 of its metal's

    Returns
    -------
    Line [ohm/m, S/m], broadcast shape; the reactance has the inductance inside the conductors

    Raises
    ------
    ValueError : as `coaxial_capacitance`

    Valid     inner conductor solid or its wall, and the outer one, more than three skin depths thick; an n so stated
              for a braid raises the internal inductance n times too, which is about 0.1 % of the whole.
    Source    round conductor and thick bore: Schelkunoff, Bell System Technical Journal 13, 532 (1934) (memory).
    """
    logarithm = _logarithm(inner_radius, outer_radius)
    bore = (1.0 + 1.0j) / skin_depth(frequency, outer_conductivity)
    argument = bore * outer_radius
    outside = bore / (2.0 * np.pi * outer_radius * outer_conductivity) * kve(0, argument) / kve(1, argument)
    inside = rod_impedance(frequency, inner_conductivity, inner_radius)
    omega = 2.0 * np.pi * np.asarray(frequency)
    series = inside + outside + 1.0j * omega * mu_0 / (2.0 * np.pi) * logarithm
    shunt = omega * coaxial_capacitance(inner_radius, outer_radius, permittivity) * (loss_tangent + 1.0j)
    return Line(*np.broadcast_arrays(series, shunt))


def open_impedance(line: Line, length: Values) -> ComplexArray:
    """Return the impedance of a line whose far end is open.

    Parameters
    ----------
    line : its constants at the frequency [ohm/m, S/m], shape (...)
    length : length [m], above 0, broadcast

    Returns
    -------
    impedance [ohm], broadcast shape: its real part is the equivalent series resistance of the capacitor

    Valid     any length against the wavelength; charge on the open edge apart, which acts as a little more length. One
              sleeve of a trombone is such a line, seen from the mouth of the outer tube; the loop current on the
              outside of that tube belongs to the loop.
    Source    equations of the uniform line (any textbook). A real characteristic impedance here would be wrong many
              times over.
    """
    return np.asarray(line.characteristic_impedance / np.tanh(line.propagation * length))


def trombone_impedance(line: Line, overlap: Values) -> ComplexArray:
    """Return the impedance of two equal sleeves in series, joined by the part that slides.

    Parameters
    ----------
    line : constants of one sleeve at the frequency [ohm/m, S/m], shape (...)
    overlap : length of each sleeve [m], above 0, broadcast

    Returns
    -------
    impedance [ohm], broadcast shape; each sleeve stands half of the voltage

    Valid     as `open_impedance`; the conductor between the sleeves apart.
    Source    connection in series.
    """
    return np.asarray(2.0 * open_impedance(line, overlap))


def effective_capacitance(frequency: Values, impedance: ComplexArray) -> Array:
    """Return the capacitance that has the reactance of an impedance.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    impedance : of the capacitor [ohm], broadcast

    Returns
    -------
    capacitance [F], broadcast shape; of an open line more than its length alone would give

    Raises
    ------
    ValueError : an impedance that is inductive, as of a line longer than a quarter of its wavelength

    Valid     at this frequency alone.
    Source    definition.
    """
    reactance = np.imag(impedance)
    if not np.all(reactance < 0.0):
        raise ValueError("inductive: longer than a quarter of the wavelength on it")
    return np.asarray(-1.0 / (2.0 * np.pi * np.asarray(frequency) * reactance))


def voltage_along(line: Line, length: Values, distance: Values) -> ComplexArray:
    """Return the voltage along an open line, over that at its input.

    Parameters
    ----------
    line : its constants at the frequency [ohm/m, S/m], shape (...)
    length : length [m], broadcast
    distance : from the input [m], 0 to `length`, broadcast

    Returns
    -------
    ratio [1], broadcast shape

    Valid     as `open_impedance`.
    Source    equations of the uniform line (any textbook).
    """
    rest = np.asarray(length) - distance
    return np.asarray(np.cosh(line.propagation * rest) / np.cosh(line.propagation * length))


def current_along(line: Line, length: Values, distance: Values) -> ComplexArray:
    """Return the current along an open line, over that at its input.

    Parameters
    ----------
    line : its constants at the frequency [ohm/m, S/m], shape (...)
    length : length [m], above 0, broadcast
    distance : from the input [m], 0 to `length`, broadcast

    Returns
    -------
    ratio [1], broadcast shape

    Valid     as `open_impedance`.
    Source    equations of the uniform line (any textbook).
    """
    rest = np.asarray(length) - distance
    return np.asarray(np.sinh(line.propagation * rest) / np.sinh(line.propagation * length))


def largest_voltage_ratio(line: Line, length: Values) -> Array:
    """Return the highest voltage on an open line over that at its input.

    Parameters
    ----------
    line : its constants at the frequency [ohm/m, S/m], shape (...)
    length : length [m], above 0, broadcast

    Returns
    -------
    ratio [1], broadcast shape, 1 or more: that at the open end

    Raises
    ------
    ValueError : a line longer than half its wavelength, which may have its crest in between

    Valid     as `open_impedance`.
    Source    equations of the uniform line: up to half a wavelength the amplitude has no crest between the ends.
    """
    if not np.all(np.imag(line.propagation) * length <= np.pi):
        raise ValueError("longer than half the wavelength on it")
    return np.asarray(np.maximum(1.0, np.abs(voltage_along(line, length, length))))


def plate_capacitance(area: Values, gap: Values, permittivity: Values) -> Array:
    """Return the capacitance between parallel plates with a dielectric that fills the gap.

    Parameters
    ----------
    area : of one face of one plate [m2], shape (...)
    gap : distance of the plates [m], broadcast
    permittivity : relative permittivity of the dielectric [1], broadcast

    Returns
    -------
    capacitance [F], broadcast shape

    Valid     gap much smaller than the plates, no air left between. The field at the edges is not counted: it adds to
              round plates of radius r in air gap/(pi r) (ln(16 pi r/gap) - 1) of this (Kirchhoff, memory), less with a
              dielectric that ends at the edge.
    Source    any textbook.
    """
    return np.asarray(epsilon_0 * permittivity * np.asarray(area) / gap)


def _logarithm(inner_radius: Values, outer_radius: Values) -> Array:
    inner, outer = np.asarray(inner_radius, dtype=np.float64), np.asarray(outer_radius, dtype=np.float64)
    if not np.all((inner > 0.0) & (outer > inner)):
        raise ValueError("an inner radius must be above 0 and smaller than the outer one")
    return np.asarray(np.log(outer / inner))
