"""The map of a keep-out, measured. Not in the default run: pytest tests/benchmarks --override-ini addopts="".

Targets on an ordinary 2-core machine: 40 000 points of fields within 2 s, the samples' maps with drawing within 4 s.
"""

from pathlib import Path

import numpy as np
import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import magsafe
from magsafe.analysis.field_map import field_map
from magsafe.analysis.field_source import FAR, field_source
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.keepout import keepout
from magsafe.reports.map_words import farthest_of, shown_transmission
from magsafe.reports.pictures import keepout_map

SAMPLES = Path(__file__).parents[2] / "sample_designs"


def test_forty_thousand_points(benchmark: BenchmarkFixture) -> None:
    design = magsafe.read_design(SAMPLES / "quay_rail.toml")
    source = field_source(design, operating_point(design, design.transmission[0]), FAR)
    rng = np.random.default_rng(3)
    unit = rng.normal(size=(40_000, 3))
    points = unit / np.linalg.norm(unit, axis=1)[:, None] * rng.uniform(2.0, 9.0, (40_000, 1)) + [0.0, 0.0, 12.0]
    benchmark.pedantic(source.strongest, (points,), rounds=3)  # type: ignore[no-untyped-call]


@pytest.mark.parametrize("sample", ["quay_rail", "breakwater_mast", "lighthouse_gallery", "net_loft_balcony"])
def test_a_map_with_its_drawing(benchmark: BenchmarkFixture, sample: str) -> None:
    design = magsafe.read_design(SAMPLES / f"{sample}.toml")
    sheet = keepout(magsafe.check(design))
    index = shown_transmission(sheet)
    point = operating_point(design, design.transmission[index])

    def draw() -> None:
        made = field_map(design, point, farthest_of(sheet.operating_points[index]))
        keepout_map(sheet, design, index, made)

    benchmark.pedantic(draw, rounds=3)  # type: ignore[no-untyped-call]
