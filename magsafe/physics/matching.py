"""Matching a loop without a coupling loop: two capacitors, a quarter-wave section, a transformer; what mismatch costs.

The two-capacitor match has a capacitor Cp across the loop (R + jX) and another, Cs, between it and the feed. The loop's
conductance G = R/(R^2 + X^2) is far below that of the line; short of resonance, the capacitor across leaves the loop
inductive by so much that G appears in series as the line's impedance Z0, and Cs takes away the reactance that comes
with it. So nearly all of the loop's voltage stands across Cs as well, at no more than the line's current.
"""

from dataclasses import dataclass
from math import isfinite, pi, sqrt

import numpy as np
from scipy.constants import speed_of_light

from magsafe.physics.arrays import Array, ComplexArray, Values


@dataclass(frozen=True, slots=True)
class CapacitorMatch:
    """Two capacitors that match a loop to its line; the feed's return is at the loop's other end.

    Attributes
    ----------
    frequency : [Hz]
    loop : impedance of the loop at its port, without capacitors [ohm]
    line : impedance of the line [ohm]
    parallel : capacitance across the loop [F]
    series : capacitance between loop and feed [F]
    """

    frequency: float
    loop: complex
    line: float
    parallel: float
    series: float

    @property
    def series_reactance(self) -> float:
        """Magnitude of the series capacitor's reactance [ohm]."""
        return 1.0 / (2.0 * pi * self.frequency * self.series)

    @property
    def balanced_series(self) -> float:
        """Capacitance in each of both leads of the balanced form, which has the same match [F]."""
        return 2.0 * self.series

    def series_current(self, power: Values) -> Array:
        """Return the RMS current of the series capacitor, in either form [A], at a power in the loop [W].

        Source    definition of resistance.
        """
        return np.asarray(np.sqrt(np.asarray(power) / self.line))

    def series_voltage(self, power: Values) -> Array:
        """Return the crest of the voltage across the series capacitor [V], at a peak envelope power in the loop [W].

        Source    Ohm's law; square root of 2 for the crest.
        """
        return np.asarray(np.sqrt(2.0) * self.series_current(power) * self.series_reactance)

    def balanced_voltage(self, power: Values) -> Array:
        """Return the crest of the voltage across each of the balanced form's capacitors [V], as `series_voltage`.

        Source    the same current in twice the capacitance.
        """
        return 0.5 * self.series_voltage(power)

    def parallel_voltage(self, power: Values) -> Array:
        """Return the crest of the voltage across loop and parallel capacitor [V], as `series_voltage`.

        Source    power over the loop's conductance.
        """
        return np.asarray(np.sqrt(2.0 * np.asarray(power) / (1.0 / self.loop).real))

    def series_loss(self, quality: Values) -> Array:
        """Return the share of the line's power that the series capacitor, or a balanced form's both, turn to heat.

        Parameters
        ----------
        quality : Q of the capacitor: reactance over series resistance [1], shape (...), above 0

        Returns
        -------
        share [1], same shape

        Valid     any; the loss also raises the impedance to the line's over one less the share.
        Source    series resistances share power: circuit theory.
        """
        resistance = self.series_reactance / np.asarray(quality)
        return np.asarray(resistance / (resistance + self.line))


def capacitor_match(loop: complex, frequency: float, line: float) -> CapacitorMatch:
    """Return the two capacitors that match a loop.

    Parameters
    ----------
    loop : impedance of the loop at its port, R + jX [ohm]
    frequency : [Hz]
    line : impedance of the line [ohm]

    Returns
    -------
    both capacitors: Cp from B_p = X/(R^2 + X^2) - sqrt(G/Z0 - G^2), Cs from X_s = sqrt(G/Z0 - G^2) Z0/G

    Raises
    ------
    ValueError : a loop that is not inductive; one that no two capacitors match in this order: its resistance in series
        is not below the line's, or its resistance as seen across the port not above it

    Valid     capacitors without loss; any inductive loop.
    Source    admittance of loop and parallel capacitor set equal to that of line and series capacitor: circuit theory.
    """
    if not (isfinite(frequency) and frequency > 0.0 and isfinite(line) and line > 0.0):
        raise ValueError(f"frequency {frequency} Hz and line {line} ohm, expected numbers above zero")
    if not (np.isfinite(loop) and loop.real > 0.0 and loop.imag > 0.0):
        raise ValueError(f"the loop has {loop.real:.4g} + j {loop.imag:.4g} ohm, expected an inductive one with a loss")
    square = abs(loop) ** 2
    conductance = loop.real / square
    if conductance * line >= 1.0:
        raise ValueError(
            f"the loop has {1.0 / conductance:.4g} ohm across its port, no more than the line's {line:.4g} ohm: "
            "no capacitor in series matches it"
        )
    if loop.real >= line:
        raise ValueError(
            f"the loop's resistance of {loop.real:.4g} ohm is no less than the line's {line:.4g} ohm: "
            "it takes an inductor across it, not a capacitor"
        )
    rest = sqrt(conductance / line - conductance**2)
    across = loop.imag / square - rest
    omega = 2.0 * pi * frequency
    return CapacitorMatch(frequency, loop, line, across / omega, conductance / (omega * rest * line))


def retuned_standing_wave_ratio(loop: ComplexArray | complex, series_reactance: Values, line: float) -> Array:
    """Return the lowest SWR that a parallel capacitor reaches with a series capacitor that stays as it is.

    Parameters
    ----------
    loop : impedance of the loop at its port [ohm], shape (...)
    series_reactance : magnitude of the series capacitor's reactance [ohm], broadcast
    line : impedance of the line [ohm]

    Returns
    -------
    ratio [1], 1 or more, broadcast shape

    Valid     capacitors without loss, the parallel one wide enough (`retuned_parallel`).
    Source    a mismatch is the same on both sides of a network without loss: there, line and series capacitor are the
              conductance Z0/(Z0^2 + Xs^2), beside the loop's.
    """
    own = np.real(1.0 / np.asarray(loop))
    seen = line / (line**2 + np.asarray(series_reactance) ** 2)
    return np.asarray(np.maximum(own / seen, seen / own))


def retuned_parallel(loop: ComplexArray | complex, series_reactance: Values, line: float, frequency: Values) -> Array:
    """Return the parallel capacitance at which the SWR of `retuned_standing_wave_ratio` is lowest.

    Parameters
    ----------
    loop : impedance of the loop at its port [ohm], shape (...)
    series_reactance : magnitude of the series capacitor's reactance [ohm], broadcast
    line : impedance of the line [ohm]
    frequency : [Hz], broadcast

    Returns
    -------
    capacitance [F], broadcast shape; below 0 it cannot be had

    Valid     capacitors without loss.
    Source    all susceptances across the loop sum to nothing: circuit theory.
    """
    series = np.asarray(series_reactance)
    susceptance = -np.imag(1.0 / np.asarray(loop)) - series / (line**2 + series**2)
    return np.asarray(susceptance / (2.0 * pi * np.asarray(frequency)))


def quarter_wave_impedance(load: Values, line: Values) -> Array:
    """Return the impedance of the quarter-wave section between a resistance and a line.

    Parameters
    ----------
    load : resistance [ohm], shape (...)
    line : impedance of the line [ohm], broadcast

    Returns
    -------
    impedance of the section [ohm], broadcast shape

    Valid     lines without loss.
    Source    sqrt(Z0 ZL): Ramo, Whinnery & Van Duzer, Fields and Waves in Communication Electronics (memory).
    """
    return np.asarray(np.sqrt(np.asarray(load) * line))


def quarter_wave_length(frequency: Values, velocity_factor: Values) -> Array:
    """Return the length of a quarter wave on a line.

    Parameters
    ----------
    frequency : [Hz], shape (...)
    velocity_factor : velocity on the line over that of light [1], broadcast

    Returns
    -------
    length [m], broadcast shape

    Valid     any.
    Source    definition.
    """
    return np.asarray(0.25 * speed_of_light * np.asarray(velocity_factor) / frequency)


def impedance_through_line(load: ComplexArray | complex, line: Values, quarters: Values) -> ComplexArray:
    """Return the impedance at the near end of a line without loss.

    Parameters
    ----------
    load : impedance at the far end [ohm], shape (...)
    line : impedance of the line [ohm], broadcast
    quarters : electrical length in quarter waves [1], broadcast: for a section cut for one frequency, the frequency
        over that one

    Returns
    -------
    impedance [ohm], broadcast shape

    Valid     lines without loss.
    Source    Ramo, Whinnery & Van Duzer, Fields and Waves in Communication Electronics (memory).
    """
    angle = 0.5 * pi * np.asarray(quarters)
    far = np.asarray(load, dtype=np.complex128)
    cosine, sine = np.cos(angle), 1j * np.sin(angle)
    return np.asarray(line * (far * cosine + line * sine) / (line * cosine + far * sine))


def impedance_through_transformer(load: ComplexArray | complex, ratio: Values) -> ComplexArray:
    """Return the impedance at the line's side of an ideal transformer.

    Parameters
    ----------
    load : impedance at the other side [ohm], shape (...)
    ratio : of impedances, the load's over the line's [1], broadcast: the square of the ratio of turns

    Returns
    -------
    impedance [ohm], broadcast shape

    Valid     no loss, no leakage, no magnetising current.
    Source    ideal transformer: any textbook.
    """
    return np.asarray(np.asarray(load, dtype=np.complex128) / ratio)


def mismatch_share(standing_wave_ratio: Values) -> Array:
    """Return the share of the power arriving at a mismatch that goes into it.

    Parameters
    ----------
    standing_wave_ratio : ratio [1], shape (...), 1 or more

    Returns
    -------
    share [1], same shape: 1 - |reflection|^2

    Valid     lines without loss.
    Source    definition by the reflection factor (S - 1)/(S + 1).
    """
    ratio = np.asarray(standing_wave_ratio)
    return np.asarray(4.0 * ratio / (1.0 + ratio) ** 2)


def share_through_line(matched_share: Values, reflection: Values, tuned: bool) -> Array:
    """Return the share of the transmitter's available power that a mismatched load takes at the end of a lossy line.

    Parameters
    ----------
    matched_share : what the line leaves of the power with a matched load [1], shape (...), 0 to 1
    reflection : magnitude of the reflection factor of the load on the line [1], broadcast, 0 to 1
    tuned : whether the transmitter's end is matched to what the line shows there [1], so that all the available power
        goes in (a tuner without loss); else what comes back is lost to the transmitter

    Returns
    -------
    share [1], broadcast shape

    Raises
    ------
    ValueError : a share or a reflection that is not from 0 to 1

    Valid     lines whose impedance is real: whose loss is small over a wavelength.
    Source    sum of the waves that go back and forth; form as in amateur handbooks, common practice (memory).
    """
    left, back = np.asarray(matched_share, dtype=np.float64), np.asarray(reflection, dtype=np.float64)
    for name, values in (("matched share", left), ("reflection", back)):
        if not bool(((values >= 0.0) & (values <= 1.0)).all()):
            raise ValueError(f"the {name} is {values}, expected 0 to 1")
    once = (1.0 - back**2) * left
    if not tuned:
        return np.asarray(once)
    lost = 1.0 - (back * left) ** 2
    # Nothing goes into a line without loss whose end reflects all.
    return np.asarray(np.divide(once, lost, out=np.zeros_like(once + lost), where=lost > 0.0))
