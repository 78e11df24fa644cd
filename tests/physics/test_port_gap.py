"""The width of the port's gap: what it moves, and that the spread covers what a design leaves open."""

from math import pi

import numpy as np
import pytest
from scipy.constants import c

from magsafe.analysis.chain import GAP_CAPACITANCE
from magsafe.analysis.wires import GAP
from magsafe.physics import round_loop
from magsafe.physics.arrays import Array

LOOPS = [
    (radius, diameter)
    for radius in (0.25, 0.5, 0.85, 1.7, 5.0)
    for diameter in (1e-3, 6e-3, 22e-3, 54e-3)
    if diameter / 2.0 / radius <= 0.06
]


@pytest.mark.parametrize(("radius", "diameter"), LOOPS)
def test_terminals_of_20_to_100_mm_lie_within_the_spread(radius: float, diameter: float) -> None:
    """By the Fourier series of the circular loop (Storer, King: memory), the solver's own check."""
    thick = diameter / 2.0
    frequency = np.array([0.1, 0.2]) * c / (2.0 * pi * radius)

    def susceptance(width: float) -> Array:
        return 1.0 / round_loop.solve(radius, thick, frequency, width / radius).impedance.imag

    computed = susceptance(max(GAP[0] * thick, min(GAP[1] * 2.0 * pi * radius, GAP[2])))
    allowed = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * diameter
    least = max(0.02, 3.0 * thick, 0.0101 * radius)
    moved = [(susceptance(width) - computed) / (2.0 * pi * frequency) for width in np.linspace(least, 0.1, 6)]
    assert np.abs(moved).max() <= allowed
    # The spread is no wild guess: the widest and the narrowest gap use a quarter of it at least.
    assert np.abs(moved).max() >= 0.2 * allowed
