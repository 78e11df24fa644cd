"""Limits, scaling and range of the round conductor's internal impedance."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import mu_0

from magsafe.physics.conductor import (
    conductivity_at,
    plated_impedance,
    plated_surface_impedance,
    rod_impedance,
    skin_depth,
    tube_impedance,
)

COPPER, SILVER, TIN, BRASS = 58e6, 62e6, 8.7e6, 16.2e6


def test_a_rod_at_low_frequency_is_its_cross_section() -> None:
    thin = rod_impedance(1.0, COPPER, 1e-3)
    assert float(thin.real) == pytest.approx(1.0 / (COPPER * np.pi * 1e-6), rel=1e-6)
    assert float(thin.imag) / (2.0 * np.pi) == pytest.approx(mu_0 / (8.0 * np.pi), rel=1e-6)


def test_a_thick_rod_is_a_flat_conductor_with_the_first_terms_of_its_series() -> None:
    """Rs/(2 pi a) (1 + d/2a + 3 d^2/16 a^2): asymptotic series of the Bessel functions (memory)."""
    radius, frequency = 0.011, 7.1e6
    depth = float(skin_depth(frequency, COPPER))
    surface = 1.0 / (COPPER * depth)
    series = 1.0 + depth / (2.0 * radius) + 3.0 * depth**2 / (16.0 * radius**2)
    found = float(rod_impedance(frequency, COPPER, radius).real)
    assert found == pytest.approx(surface / (2.0 * np.pi * radius) * series, rel=1e-8)


def test_a_tube_with_hardly_a_bore_is_a_rod() -> None:
    for frequency in (1e3, 1e5, 1e6):
        tube = tube_impedance(frequency, COPPER, 1e-3, 1e-3 - 1e-9)
        rod = rod_impedance(frequency, COPPER, 1e-3)
        assert complex(tube) == pytest.approx(complex(rod), rel=1e-5)


def test_a_tube_at_low_frequency_is_its_cross_section() -> None:
    section = np.pi * (0.011**2 - 0.010**2)
    assert float(tube_impedance(1.0, COPPER, 0.011, 0.001).real) == pytest.approx(1.0 / (COPPER * section), rel=1e-4)


def test_a_wall_of_half_pi_skin_depths_loses_less_than_a_thick_one() -> None:
    """The dip to 0.917 at wall = pi/2 skin depths is physics: nothing may clamp it."""
    depth = float(skin_depth(7.1e6, COPPER))
    thin = float(tube_impedance(7.1e6, COPPER, 0.011, np.pi / 2.0 * depth).real)
    thick = float(tube_impedance(7.1e6, COPPER, 0.011, 0.003).real)
    assert thin / thick == pytest.approx(0.917, abs=0.002)


@given(
    radius=st.floats(1e-5, 1.0),
    wall_share=st.floats(1e-3, 0.999),
    frequency=st.floats(1e3, 1e9),
    conductivity=st.floats(1e4, 7e7),
)
def test_no_ratio_to_the_skin_depth_overflows(
    radius: float, wall_share: float, frequency: float, conductivity: float
) -> None:
    rod = rod_impedance(frequency, conductivity, radius)
    tube = tube_impedance(frequency, conductivity, radius, radius * wall_share)
    for impedance in (rod, tube):
        assert np.isfinite(impedance.real)
        assert impedance.real > 0.0
        assert impedance.imag > -1e-12 * impedance.real  # the last bit, far below the skin depth
    # Nothing carries the current better than the whole section at direct current.
    assert rod.real >= 1.0 / (conductivity * np.pi * radius**2) * (1.0 - 1e-9)


def test_scaling_lengths_and_skin_depth_together_scales_the_impedance() -> None:
    one = tube_impedance(7.1e6, COPPER, 0.011, 5e-5)
    other = tube_impedance(7.1e6 / 4.0, COPPER, 0.022, 1e-4)
    assert complex(other) == pytest.approx(complex(one) / 4.0, rel=1e-9)


def test_arrays_give_what_their_elements_give() -> None:
    frequencies = np.array([1.8e6, 7.1e6, 28.5e6])
    together = rod_impedance(frequencies, COPPER, 0.011)
    alone = [complex(rod_impedance(f, COPPER, 0.011)) for f in frequencies]
    np.testing.assert_allclose(together, alone, rtol=1e-12)


def test_sixty_kelvin_on_copper_is_eleven_percent_of_resistance() -> None:
    """Resistance goes with the root of resistivity where the skin is thin (reference notes, section 1)."""
    warm = float(conductivity_at(58e6, 0.00393, 353.15))
    ratio = float(rod_impedance(7.1e6, warm, 0.011).real / rod_impedance(7.1e6, 58e6, 0.011).real)
    assert ratio == pytest.approx(1.11, abs=0.005)


@pytest.mark.parametrize(
    ("layer", "thickness", "base", "frequency", "change", "within"),
    [
        (TIN, 5e-6, COPPER, 7.1e6, 0.011, 0.001),
        (TIN, 10e-6, COPPER, 28.5e6, 0.20, 0.005),
        (SILVER, 5e-6, BRASS, 14.2e6, -0.19, 0.005),
        (SILVER, 25e-6, BRASS, 14.2e6, -0.50, 0.02),
    ],
)
def test_what_plating_changes(
    layer: float, thickness: float, base: float, frequency: float, change: float, within: float
) -> None:
    """Worked cases of the reference notes, section 1 (two checkers)."""
    plated = float(plated_impedance(frequency, layer, thickness, base, 0.011).real)
    bare = float(plated_impedance(frequency, base, 0.0, base, 0.011).real)
    assert plated / bare - 1.0 == pytest.approx(change, abs=within)


def test_a_layer_against_its_differential_equation() -> None:
    """Maxwell's equations in the layer, stepped outwards from the base, without exponentials."""
    frequency, thickness = 14.2e6, 9e-6
    omega = 2.0 * np.pi * frequency
    # E/H looking inwards obeys dZ/dx = j omega mu0 - conductivity Z^2 from the base outwards.
    impedance = complex((1.0 + 1.0j) / (BRASS * skin_depth(frequency, BRASS)))
    steps = 2000
    step = thickness / steps

    def slope(z: complex) -> complex:
        return 1.0j * omega * mu_0 - SILVER * z * z

    for _ in range(steps):
        first = slope(impedance)
        second = slope(impedance + first * step / 2.0)
        third = slope(impedance + second * step / 2.0)
        fourth = slope(impedance + third * step)
        impedance += step / 6.0 * (first + 2.0 * second + 2.0 * third + fourth)
    found = complex(plated_surface_impedance(frequency, SILVER, thickness, BRASS))
    assert found == pytest.approx(impedance, rel=1e-9)


def test_without_a_layer_or_with_a_thick_one_only_one_metal_is_seen() -> None:
    frequencies = np.array([1.8e6, 28.5e6])
    surface = (1.0 + 1.0j) / (BRASS * skin_depth(frequencies, BRASS))
    np.testing.assert_allclose(plated_surface_impedance(frequencies, SILVER, 0.0, BRASS), surface, rtol=1e-12)
    thick = (1.0 + 1.0j) / (SILVER * skin_depth(frequencies, SILVER))
    for thickness in (1e-3, 1.0, 1e6):
        np.testing.assert_allclose(plated_surface_impedance(frequencies, SILVER, thickness, BRASS), thick, rtol=1e-12)
    same = plated_surface_impedance(frequencies, BRASS, np.array([3e-6, 7e-6]), BRASS)
    np.testing.assert_allclose(same, surface, rtol=1e-12)


def test_a_plated_rod_is_a_rod_but_for_its_curvature() -> None:
    """A layer of the same metal: the flat form is low by skin depth/(2 radius), as its docstring says."""
    plated = float(plated_impedance(7.1e6, COPPER, 1e-5, COPPER, 0.011).real)
    rod = float(rod_impedance(7.1e6, COPPER, 0.011).real)
    assert rod / plated - 1.0 == pytest.approx(float(skin_depth(7.1e6, COPPER)) / 0.022, rel=0.01)


@given(
    layer=st.floats(1e5, 7e7), base=st.floats(1e5, 7e7), thickness=st.floats(0.0, 1.0), frequency=st.floats(1e3, 1e9)
)
def test_no_layer_overflows_or_gives_power(layer: float, base: float, thickness: float, frequency: float) -> None:
    found = complex(plated_surface_impedance(frequency, layer, thickness, base))
    assert np.isfinite(found)
    assert found.real > 0.0
    assert found.imag > 0.0
