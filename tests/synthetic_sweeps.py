"""Sweeps of a known tuned loop, made from its circuit and not from the curve that is fitted."""

from dataclasses import dataclass

import numpy as np
from scipy.constants import c

from magsafe.physics.arrays import Array, ComplexArray


@dataclass(frozen=True, slots=True)
class KnownLoop:
    """A loop behind a coupling loop and a line, and how it is swept.

    `resonance` [Hz] and `unloaded_q` are the loop's own, a series circuit; `coupling` is what the line takes out of it
    over what it uses up, at resonance. `coupling_reactance` [ohm] is that of the coupling loop there. The line has
    `reference` [ohm], `line_length` [m] at the speed of light and `line_loss` [dB] one way. `span` is in half-power
    widths of the loaded resonance, `centre` the middle of the sweep in such widths off the loop's own resonance.
    `noise` is the standard deviation of each point over full scale, real and imaginary part together.
    """

    resonance: float = 7.1e6
    unloaded_q: float = 1000.0
    coupling: float = 1.0
    coupling_reactance: float = 0.0
    reference: float = 50.0
    line_length: float = 0.0
    line_loss: float = 0.0
    points: int = 401
    span: float = 8.0
    centre: float = 0.0
    noise: float = 0.0

    @property
    def loaded_q(self) -> float:
        """Q with the line."""
        return self.unloaded_q / (1.0 + self.coupling)

    @property
    def loaded_resonance(self) -> float:
        """Resonance with what the coupling loop's reactance brings into the loop [Hz], to the first order."""
        shift = 0.5 * self.coupling * self.coupling_reactance / self.reference / self.unloaded_q
        return self.resonance * (1.0 + shift)

    def frequencies(self) -> Array:
        """Return the frequencies of the sweep [Hz], shape (points,)."""
        width = self.resonance / self.loaded_q
        middle = self.resonance + self.centre * width
        return middle + width * self.span * np.linspace(-0.5, 0.5, self.points)

    def at_terminals(self, frequency: Array) -> ComplexArray:
        """Return the reflection at the coupling loop [1]: Zin = jXc + (omega M)^2 / Zloop."""
        tuned = frequency / self.resonance
        loop = 1.0 + 1j * self.unloaded_q * (tuned - 1.0 / tuned)
        # Coupling: the line and the reactance in series, as the loop sees them, over the loop's resistance.
        square = self.coupling * (self.reference**2 + self.coupling_reactance**2) / self.reference
        impedance = 1j * self.coupling_reactance * tuned + square * tuned**2 / loop
        return np.asarray((impedance - self.reference) / (impedance + self.reference))

    def through_line(self, frequency: Array, reflection: ComplexArray) -> ComplexArray:
        """Return a reflection as the analyser reads it at the other end of the line [1]."""
        turn = 4.0 * np.pi * frequency / c * self.line_length
        return np.asarray(reflection * 10.0 ** (-self.line_loss / 10.0) * np.exp(-1j * turn))

    def sweep(self, seed: int = 0) -> tuple[Array, ComplexArray]:
        """Return frequency [Hz] and reflection [1], shapes (points,)."""
        frequency = self.frequencies()
        scatter = np.random.default_rng(seed).standard_normal((2, self.points)) / np.sqrt(2.0)
        clean = self.through_line(frequency, self.at_terminals(frequency))
        return frequency, clean + self.noise * (scatter[0] + 1j * scatter[1])
