"""The loop with its capacitor at resonance: Q, bandwidth, current, voltage, and the lower bound on Q."""

import numpy as np

from magsafe.physics.arrays import Array, ComplexArray, Values


def port_current(power: Values, resistance: Values) -> Array:
    """Return the RMS current at the port.

    Parameters
    ----------
    power : power delivered to the loop [W], shape (...)
    resistance : total resistance referred to the port [ohm], broadcast

    Returns
    -------
    current, RMS [A], broadcast shape

    Valid     at resonance.
    Source    definition of resistance.
    """
    return np.asarray(np.sqrt(power / resistance))


def peak_voltage(power: Values, resistance: Values, reactance: Values) -> Array:
    """Return the crest of the RF voltage across the port.

    Parameters
    ----------
    power : peak envelope power delivered to the loop [W], shape (...)
    resistance : total resistance referred to the port [ohm], broadcast
    reactance : reactance of the loop at the port [ohm], broadcast

    Returns
    -------
    voltage, peak [V], broadcast shape

    Valid     at resonance, |reactance| much larger than resistance.
    Source    Ohm's law; square root of 2 for the crest.
    """
    return np.asarray(np.sqrt(2.0) * port_current(power, resistance) * np.abs(reactance))


def unloaded_q(resistance: Values, reactance: Values, slope_factor: Values) -> Array:
    """Return Q from the slope of the reactance of loop and series capacitor at resonance.

    Parameters
    ----------
    resistance : total resistance referred to the port [ohm], shape (...)
    reactance : reactance of the loop at the port [ohm], broadcast
    slope_factor : (omega dX/domega + |X|) / 2|X| [1], broadcast; 1 for a lumped loop

    Returns
    -------
    Q [1], broadcast shape

    Valid     Q much larger than 1.
    Source    Yaghjian & Best, IEEE Transactions AP-53, 1298 (2005) (memory).
    """
    return np.asarray(np.abs(reactance) / resistance * slope_factor)


def standing_wave_ratio(impedance: ComplexArray | complex, line: float) -> Array:
    """Return the standing-wave ratio of an impedance at the end of a line.

    Parameters
    ----------
    impedance : at the end [ohm], resistance above 0, shape (...)
    line : impedance of the lossless line [ohm]

    Returns
    -------
    ratio [1], 1 or more, same shape

    Valid     any.
    Source    definition by the reflection factor.
    """
    reflected = np.abs((impedance - line) / (impedance + line))
    return np.asarray((1.0 + reflected) / (1.0 - reflected))


def detuned_impedance(offset: Values, frequency: Values, unloaded_q: Values) -> ComplexArray:
    """Return the impedance of a series resonance beside its resonance, over its resistance there.

    Parameters
    ----------
    offset : from resonance [Hz], shape (...), above -frequency
    frequency : of the resonance [Hz], broadcast
    unloaded_q : reactance of coil or capacitor over the resistance, at resonance [1], broadcast

    Returns
    -------
    impedance over the resistance [1], broadcast shape: 1 at resonance

    Valid     a single resonance, its resistance the same over the offsets.
    Source    1 + j Q (f/f0 - f0/f): textbook circuit theory.
    """
    tuned = 1.0 + np.asarray(offset) / frequency
    return np.asarray(1.0 + 1j * unloaded_q * (tuned - 1.0 / tuned))


def swr_bandwidth_factor(swr: Values) -> Array:
    """Return the bandwidth between two points of one SWR, times Q over frequency.

    Parameters
    ----------
    swr : standing-wave ratio [1], shape (...), above 1; the loop is matched at resonance

    Returns
    -------
    factor [1], same shape, on frequency over *unloaded* Q: 0.7071 for SWR 2, 2 for the half-power points

    Valid     single resonance, Q much larger than 1.
    Source    Yaghjian & Best, IEEE Transactions AP-53, 1298 (2005) (memory).
    """
    return np.asarray((swr - 1.0) / np.sqrt(swr))


def chu_bound(size: Values) -> Array:
    """Return the least Q of a lossless antenna that radiates one mode.

    Parameters
    ----------
    size : wavenumber times the radius of the smallest sphere round the antenna [1], shape (...)

    Returns
    -------
    bound [1], same shape; an antenna with losses has at least its efficiency times this

    Valid     single mode.
    Source    McLean, IEEE Transactions AP-44, 672 (1996) (title and abstract read, formula from memory);
              Chu, Journal of Applied Physics 19, 1163 (1948) (memory).
    """
    return np.asarray(1.0 / size**3 + 1.0 / size)
