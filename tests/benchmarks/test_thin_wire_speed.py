"""Time of the method of moments on one core: a loop of 80 segments over the plane.

Targets on an ordinary core, with OPENBLAS_NUM_THREADS=1: set-up of chain or image 20 ms, one more frequency 1 ms, 200
frequencies 0.3 s. Held to three times that, for a core that is shared or slow.
"""

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

from magsafe.physics import geometry, thin_wire
from magsafe.physics.geometry import Wire
from magsafe.physics.thin_wire import Potentials

HIGHEST = 30e6  # Hz
SLOW = 3.0  # times the target


def loop(segments: int = 79) -> Wire:
    """A ring of 80 segments with those added at its port."""
    path = geometry.wind(geometry.round_turn(0.5))
    return geometry.upright(geometry.cut(path, 5.5e-3, np.pi / segments, 0.0314), 1.5)


def parts_of(wire: Wire) -> tuple[Potentials, Potentials]:
    return thin_wire.potentials(wire, HIGHEST), thin_wire.potentials(wire, HIGHEST, image=True)


def least(benchmark: BenchmarkFixture) -> float:
    """Shortest round [s]; NaN with the clock off."""
    return float(benchmark.stats["min"]) if benchmark.stats else float("nan")


@pytest.mark.parametrize("image", [False, True], ids=["chain", "image"])
def test_set_up_of_eighty_segments(benchmark: BenchmarkFixture, image: bool) -> None:
    wire = loop()
    assert len(wire.nodes) == 80
    benchmark(thin_wire.potentials, wire, HIGHEST, image=image)
    assert not least(benchmark) > SLOW * 0.020


@pytest.mark.parametrize("count", [1, 2], ids=["free space", "plane"])
def test_one_more_frequency(benchmark: BenchmarkFixture, count: int) -> None:
    wire = loop()
    parts, frequency = parts_of(wire)[:count], np.array([14.2e6])
    benchmark(thin_wire.solve, wire, frequency, parts)
    assert not least(benchmark) > SLOW * 0.001


@pytest.mark.parametrize("count", [1, 2], ids=["free space", "plane"])
def test_two_hundred_frequencies(benchmark: BenchmarkFixture, count: int) -> None:
    wire = loop()
    parts, frequency = parts_of(wire)[:count], np.linspace(1.8e6, HIGHEST, 200)
    benchmark(thin_wire.solve, wire, frequency, parts)
    assert not least(benchmark) > SLOW * 0.3


def test_cutting_a_path(benchmark: BenchmarkFixture) -> None:
    benchmark(loop)


def test_set_up_of_eight_turns(benchmark: BenchmarkFixture) -> None:
    path = geometry.wind(geometry.round_turn(0.5), 8, 0.03)
    wire = geometry.upright(geometry.cut(path, 5.5e-3, np.pi / 24, 0.0314), 1.5)
    benchmark.pedantic(parts_of, args=(wire,), rounds=5, warmup_rounds=1)  # type: ignore[no-untyped-call]
