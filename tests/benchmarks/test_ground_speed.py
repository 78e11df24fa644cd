"""Time of what the ground adds to one transmission: plane waves, the figures of the sky, the other heights.

Targets on an ordinary core: the plane waves of a ring of 48 segments 20 ms, its power or sky power over 37 soils 1 ms,
the figures of the sky 50 ms, its cuts and lobes 70 ms, the other heights and the other plane 30 ms once their currents
are solved. Held to five times that, for a core that is shared or slow.
"""

import numpy as np
import pytest
from designs import plain_design
from pytest_benchmark.fixture import BenchmarkFixture
from scipy.constants import c

from magsafe.analysis.chain import Chain, chain
from magsafe.analysis.placing import placings
from magsafe.analysis.sky import pattern, sky
from magsafe.analysis.soil import permittivities
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.physics.near_field import SegmentCurrents
from magsafe.physics.wave_spectrum import WaveSpectrum
from magsafe.spread import Spread

SLOW = 5.0  # times the target
FREQUENCY = 7.1e6


def least(benchmark: BenchmarkFixture) -> float:
    """Shortest round [s]; NaN with the clock off."""
    return float(benchmark.stats["min"]) if benchmark.stats else float("nan")


def design() -> Design:
    return plain_design(loop__centre_height="2 m", site__ground="average", capacitor__position="top")


def over_soil() -> tuple[Design, Chain]:
    made = design()
    return made, chain(made, FREQUENCY, outline(made.loop), Spread.exact(100.0))


def ring() -> SegmentCurrents:
    angle = 2.0 * np.pi * np.arange(49) / 48
    corners = 0.5 * np.column_stack([np.zeros(49), np.sin(angle), np.cos(angle)]) + np.array([0.0, 0.0, 2.0])
    current = np.cos(np.pi / c * FREQUENCY * (angle - np.pi)).astype(np.complex128)
    return SegmentCurrents(corners[:-1], corners[1:], current[:-1], current[1:], 0.011)


def test_the_plane_waves_of_a_ring(benchmark: BenchmarkFixture) -> None:
    soils = permittivities(design(), FREQUENCY)
    spectrum = benchmark(WaveSpectrum.of, ring(), FREQUENCY, soils)
    assert spectrum.free_power > 0.0
    assert not least(benchmark) > SLOW * 20e-3


@pytest.mark.parametrize("what", ["power", "sky_power"])
def test_a_ring_over_all_soils_of_a_span(benchmark: BenchmarkFixture, what: str) -> None:
    soils = permittivities(design(), FREQUENCY)
    spectrum = WaveSpectrum.of(ring(), FREQUENCY, soils)
    found = benchmark(getattr(spectrum, what), soils, np.zeros(1))
    assert found.shape[:2] == (37, 1)
    assert not least(benchmark) > SLOW * 1e-3


def test_the_figures_of_the_sky(benchmark: BenchmarkFixture) -> None:
    found = benchmark(sky, over_soil()[1])
    assert found is not None
    assert not least(benchmark) > SLOW * 50e-3


def test_the_pattern_and_its_lobes(benchmark: BenchmarkFixture) -> None:
    found = benchmark(pattern, over_soil()[1])
    assert found is not None
    assert not least(benchmark) > SLOW * 70e-3


def test_the_other_heights_and_the_other_plane(benchmark: BenchmarkFixture) -> None:
    found = benchmark(placings, *over_soil())
    assert len(found) == 6
    assert not least(benchmark) > SLOW * 30e-3
