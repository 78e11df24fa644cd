"""Time of the loop over soil on one core: a dipole's and a ring's integrals, and the pattern of 79 segments.

Targets on an ordinary core, for each soil and height: the dipole's resistance 0.1 ms, what reaches the sky and what the
soil takes 0.2 ms, an upright ring 2 ms; a grid of 1 by 15 degrees 20 ms. Held to five times that, and to a millisecond
for the dipole, for a core that is shared or slow. On a single soil the calls themselves cost as much as the sums.
"""

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray
from pytest_benchmark.fixture import BenchmarkFixture

from magsafe.physics import half_space, half_space_ring
from magsafe.physics.arrays import Array, ComplexArray
from magsafe.physics.ground_pattern import GroundPattern
from magsafe.physics.near_field import SegmentCurrents

SLOW = 5.0  # times the target
Form = Callable[[bool, ComplexArray, Array], Array]


def soils() -> ComplexArray:
    """Twenty from dry to sea, at 7.1 MHz."""
    er, conductivity = np.geomspace(3.0, 80.0, 20), np.geomspace(1e-4, 5.0, 20)
    return half_space.relative_permittivity(er, conductivity, 7.1e6)[:, None]


HEIGHTS: NDArray[np.float64] = 4.0 * np.pi * np.geomspace(0.005, 1.0, 5)


def least(benchmark: BenchmarkFixture) -> float:
    """Shortest round [s]; NaN with the clock off."""
    return float(benchmark.stats["min"]) if benchmark.stats else float("nan")


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
@pytest.mark.parametrize(
    ("form", "target"),
    [(half_space.resistance_ratio, 1e-4), (half_space.sky_ratio, 2e-4), (half_space.soil_ratio, 2e-4)],
    ids=["resistance", "sky", "soil"],
)
def test_a_hundred_soils_and_heights(benchmark: BenchmarkFixture, form: Form, target: float, vertical: bool) -> None:
    found = benchmark(form, vertical, soils(), HEIGHTS)
    assert found.shape == (20, 5)
    assert not least(benchmark) > SLOW * target * 100


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_one_soil_at_one_height(benchmark: BenchmarkFixture, vertical: bool) -> None:
    benchmark(half_space.resistance_ratio, vertical, soils()[12, 0], float(HEIGHTS[2]))
    assert not least(benchmark) > 1e-3


@pytest.mark.parametrize("vertical", [True, False], ids=["upright", "flat"])
def test_a_ring_over_twenty_soils(benchmark: BenchmarkFixture, vertical: bool) -> None:
    found = benchmark(half_space_ring.ring_resistance_ratio, vertical, soils()[:, 0], 0.3, 0.1)
    assert found.shape == (20,)
    assert not least(benchmark) > SLOW * 2e-3 * 20


def loop() -> SegmentCurrents:
    angle = np.arange(80) * 2.0 * np.pi / 79
    corners = 0.5 * np.column_stack([np.zeros(80), np.sin(angle), np.cos(angle)]) + np.array([0.0, 0.0, 1.5])
    current = np.cos(0.15 * (angle - np.pi)).astype(np.complex128)
    return SegmentCurrents(corners[:-1], corners[1:], current[:-1], current[1:], 0.011)


def test_a_grid_of_directions(benchmark: BenchmarkFixture) -> None:
    pattern = GroundPattern.of(loop(), 14.2e6, 13.0 - 6.3j)
    elevation, azimuth = (
        grid.ravel()
        for grid in np.meshgrid(np.radians(np.arange(91.0)), np.radians(np.arange(0.0, 360.0, 15.0)), indexing="ij")
    )
    found = benchmark(pattern.intensity, elevation, azimuth)
    assert found.shape == (91 * 24,)
    assert not least(benchmark) > SLOW * 0.02


def test_the_power_into_the_sky(benchmark: BenchmarkFixture) -> None:
    pattern = benchmark(GroundPattern.of, loop(), 14.2e6, 13.0 - 6.3j)
    assert pattern.sky_power > 0.0
    assert not least(benchmark) > SLOW * 0.02
