"""Internal impedance of round conductors, plated surfaces, and conductivity against temperature."""

import numpy as np
from scipy.constants import mu_0
from scipy.special import ive, kve

from magsafe.physics.arrays import Array, ComplexArray, Values


def skin_depth(frequency: Values, conductivity: Values) -> Array:
    """Return the depth at which the current density of a thick flat conductor has fallen to 1/e.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    conductivity : conductivity of a non-magnetic metal [S/m], broadcast against `frequency`

    Returns
    -------
    skin depth [m], broadcast shape

    Valid     good conductors with relative permeability 1, below optical frequencies.
    Source    Ramo, Whinnery & Van Duzer, Fields and Waves in Communication Electronics (memory).
    """
    return np.asarray(1.0 / np.sqrt(np.pi * frequency * mu_0 * conductivity))


def rod_impedance(frequency: Values, conductivity: Values, radius: Values) -> ComplexArray:
    """Return the internal impedance per metre of a solid round conductor, return current outside.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    conductivity : conductivity [S/m], broadcast
    radius : outer radius [m], broadcast

    Returns
    -------
    impedance [ohm/m], broadcast shape: resistance, and omega times the internal inductance

    Valid     any ratio of radius to skin depth (scaled Bessel functions do not overflow); current the same
              all round, so radius much smaller than the loop's.
    Source    Schelkunoff, Bell System Technical Journal 13, 532 (1934) (memory).
    """
    propagation = (1.0 + 1.0j) / skin_depth(frequency, conductivity)
    argument = propagation * radius
    ratio = ive(0, argument) / ive(1, argument)
    return np.asarray(propagation / (2.0 * np.pi * radius * conductivity) * ratio)


def tube_impedance(frequency: Values, conductivity: Values, radius: Values, wall: Values) -> ComplexArray:
    """Return the internal impedance per metre of a round tube, no field in its bore, return outside.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    conductivity : conductivity [S/m], broadcast
    radius : outer radius [m], broadcast
    wall : wall thickness [m], 0 < wall < radius, broadcast

    Returns
    -------
    impedance [ohm/m], broadcast shape

    Valid     any ratio of wall to skin depth; a thin wall may lie up to 8.3 % below a thick one (wall near
              pi/2 skin depths), which is physics and not an error.
    Source    Schelkunoff, Bell System Technical Journal 13, 532 (1934) (memory).
    """
    propagation = (1.0 + 1.0j) / skin_depth(frequency, conductivity)
    outer = propagation * radius
    inner = propagation * (radius - wall)
    # With I = ive exp(|Re z|) and K = kve exp(-z) the larger exponentials are divided out of numerator and
    # denominator; what is left of them on the second terms is this decaying factor.
    decay = np.exp(-(outer - inner) - (outer - inner).real)
    numerator = ive(0, outer) * kve(1, inner) + kve(0, outer) * ive(1, inner) * decay
    denominator = ive(1, outer) * kve(1, inner) - kve(1, outer) * ive(1, inner) * decay
    scale = propagation / (2.0 * np.pi * radius * conductivity)
    return np.asarray(scale * numerator / denominator)


def plated_surface_impedance(
    frequency: Values, layer_conductivity: Values, layer_thickness: Values, base_conductivity: Values
) -> ComplexArray:
    """Return the surface impedance of a flat thick metal under a layer of another.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    layer_conductivity : conductivity of the layer outside [S/m], broadcast
    layer_thickness : thickness of the layer [m], 0 or more, broadcast
    base_conductivity : conductivity of the metal under it [S/m], broadcast

    Returns
    -------
    impedance [ohm]: tangential E over tangential H at the surface, broadcast shape

    Valid     any ratio of layer to skin depth, base much thicker than its own; relative permeability 1 (not nickel).
    Source    line analogue of a wave going through layers (Ramo, Whinnery & Van Duzer, memory).
    """
    propagation = (1.0 + 1.0j) / skin_depth(frequency, layer_conductivity)
    layer = propagation / layer_conductivity
    base = (1.0 + 1.0j) / (base_conductivity * skin_depth(frequency, base_conductivity))
    # tanh written with a decaying exponential, which a thick layer turns into 0 and not into overflow.
    through = -2.0 * propagation * layer_thickness
    tanh = -np.expm1(through) / (1.0 + np.exp(through))
    return np.asarray(layer * (base + layer * tanh) / (layer + base * tanh))


def plated_impedance(
    frequency: Values,
    layer_conductivity: Values,
    layer_thickness: Values,
    base_conductivity: Values,
    radius: Values,
) -> ComplexArray:
    """Return the internal impedance per metre of a plated round conductor, return current outside.

    Parameters
    ----------
    frequency : frequency [Hz], shape (...)
    layer_conductivity : conductivity of the layer outside [S/m], broadcast
    layer_thickness : thickness of the layer [m], 0 or more, broadcast
    base_conductivity : conductivity of the rod or thick-walled tube under it [S/m], broadcast
    radius : outer radius with the layer [m], broadcast

    Returns
    -------
    impedance [ohm/m], broadcast shape

    Valid     layer and both skin depths much smaller than the radius: the surface is taken as flat, which leaves the
              resistance low by about skin depth/(2 radius), 0.1 % for 22 mm of copper at 7 MHz.
    Source    as `plated_surface_impedance`.
    """
    surface = plated_surface_impedance(frequency, layer_conductivity, layer_thickness, base_conductivity)
    return np.asarray(surface / (2.0 * np.pi * radius))


def conductivity_at(conductivity_20: Values, coefficient_20: Values, temperature: Values) -> Array:
    """Return the conductivity of a metal at a temperature.

    Parameters
    ----------
    conductivity_20 : conductivity at 20 degC [S/m], shape (...)
    coefficient_20 : temperature coefficient of resistivity at 20 degC [1/K], broadcast
    temperature : temperature [K], broadcast

    Returns
    -------
    conductivity [S/m], broadcast shape

    Valid     about -60 to 200 degC, where the resistivity of the usual metals is linear.
    Source    Dellinger, Bulletin of the Bureau of Standards 7, 71 (1911) (memory).
    """
    return np.asarray(conductivity_20 / (1.0 + coefficient_20 * (temperature - 293.15)))
