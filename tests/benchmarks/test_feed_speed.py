"""How long the coupling loop of a transmission takes, and the fit of a sweep."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from pytest_benchmark.fixture import BenchmarkFixture
from synthetic_sweeps import KnownLoop

from magsafe.analysis.operating_point import operating_points
from magsafe.analysis.small_loop_feed import one_for_all, sizing
from magsafe.design.reading import read_design
from magsafe.physics.resonance_fit import fit_resonance

SAMPLE = Path(__file__).parents[2] / "sample_designs" / "slipway_portable.toml"


def test_the_size_of_a_coupling_loop(benchmark: BenchmarkFixture) -> None:
    design = read_design(SAMPLE)
    made = operating_points(design)[0].chain
    assert made is not None
    found, _ = benchmark(sizing, design, made)
    assert found.likely is not None


def test_one_coupling_loop_for_four_transmissions(benchmark: BenchmarkFixture) -> None:
    design = read_design(SAMPLE)
    points = operating_points(design)
    chains = [each.chain for each in points if each.chain is not None]
    sizes = [each.figures.coupling_loop_diameter.spread.likely or 0.0 for each in points]
    ask: Callable[..., Any] = one_for_all
    assert benchmark(ask, design, chains, sizes) > 0.0


@pytest.mark.parametrize("points", [401, 1_000_000])
def test_the_fit_of_a_sweep(benchmark: BenchmarkFixture, points: int) -> None:
    frequency, reflection = KnownLoop(points=points, span=16.0, noise=0.005).sweep()
    found = benchmark(fit_resonance, frequency, reflection, 0.02)
    assert found.unloaded_q.value == pytest.approx(1000.0, rel=0.02)
