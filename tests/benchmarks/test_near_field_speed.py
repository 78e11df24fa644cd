"""Time and memory of the near field: 10 000 points by 80 segments, one core.

The target is 0.4 s on an ordinary core. Memory is held to its bound, because that does not depend on the machine.
"""

import tracemalloc
from collections.abc import Callable
from math import pi

import numpy as np
import pytest
from numpy.typing import NDArray
from pytest_benchmark.fixture import BenchmarkFixture

from magsafe.physics.near_field import SegmentCurrents, fields

Array = NDArray[np.float64]

POINTS = 10_000
BYTES = 16 * 2**20  # ten thousand points by 320 nodes, held at once, would take 25 MB an array


def tapered_ring(count: int = 80, radius: float = 0.5) -> SegmentCurrents:
    angle = np.arange(count + 1) * 2.0 * pi / count
    corners = radius * np.column_stack([np.cos(angle), np.sin(angle), np.zeros(count + 1)])
    current = np.cos(0.3 * (angle - pi)).astype(np.complex128)
    return SegmentCurrents(corners[:-1], corners[1:], current[:-1], current[1:], 0.011)


def in_a_room() -> Array:
    return np.random.default_rng(1).uniform([-4.0, -4.0, 1.0], [4.0, 4.0, 9.0], (POINTS, 3))


def picture_plane() -> Array:
    axis = np.linspace(-1.0, 1.0, 100)
    across, along = (grid.ravel() for grid in np.meshgrid(axis, axis))
    return np.column_stack([across, along, np.full(POINTS, 0.02)])


def along_the_conductor() -> Array:
    angle = np.linspace(0.0, 2.0 * pi, POINTS)
    return np.column_stack([0.5 * np.cos(angle), 0.5 * np.sin(angle), np.full(POINTS, 0.012)])


@pytest.mark.parametrize("points", [in_a_room, picture_plane, along_the_conductor])
def test_ten_thousand_points_by_eighty_segments(benchmark: BenchmarkFixture, points: Callable[[], Array]) -> None:
    places, currents = points(), tapered_ring()
    electric, _ = benchmark(fields, places, currents, 7.1e6)
    assert electric.shape == (POINTS, 3)


def test_memory_does_not_grow_with_the_pairs() -> None:
    places, currents = picture_plane(), tapered_ring()
    tracemalloc.start()
    try:
        fields(places, currents, 7.1e6)
        _, peak = tracemalloc.get_traced_memory()
    finally:
        tracemalloc.stop()
    assert peak < BYTES
