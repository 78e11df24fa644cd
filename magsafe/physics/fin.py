"""How a long conductor leads the heat of one spot away: the infinite fin."""

import numpy as np

from magsafe.physics.arrays import Array, Values

LORENZ = 2.44e-8  # W ohm/K2, of free electrons (Sommerfeld)


def thermal_conductivity(conductivity: Values, temperature: Values) -> Array:
    """Return what a metal conducts of heat, from what it conducts of current.

    Parameters
    ----------
    conductivity : electric [S/m], shape (...)
    temperature : of the metal [K], broadcast

    Returns
    -------
    thermal conductivity [W/(m K)], broadcast shape

    Valid     metals near and above room temperature: 5 % for copper, silver and brass; aluminium conducts 14 % less,
              steels up to a third more by their lattice (handbook values, memory).
    Source    Wiedemann-Franz law with Sommerfeld's number (any textbook of solid-state physics).
    """
    return np.asarray(LORENZ * np.asarray(conductivity) * temperature)


def fin_resistance(lost: Values, conductivity: Values, section: Values, sides: Values) -> Array:
    """Return the rise of one spot of a long conductor for each watt that enters there.

    Parameters
    ----------
    lost : heat that a metre loses for each kelvin above the air [W/(m K)], shape (...)
    conductivity : thermal [W/(m K)], broadcast
    section : area of metal in the cross-section [m2], broadcast
    sides : conductors that lead away from the spot, 1 or 2 [1], broadcast

    Returns
    -------
    rise at the spot over that of the conductor far away [K/W], broadcast shape

    Valid     conductors longer than about twice sqrt(conductivity section / lost), 0.2 m for a copper tube of 22 x
              1 mm; the narrow way through the contact itself is not in it.
    Source    fin of infinite length: Incropera & DeWitt, Fundamentals of Heat and Mass Transfer, ch. 3 (memory).
    """
    return np.asarray(1.0 / (np.asarray(sides) * np.sqrt(np.asarray(lost) * conductivity * section)))
