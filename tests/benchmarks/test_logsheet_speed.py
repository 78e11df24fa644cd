"""The sheet for the station log, measured. Not in the default run: pytest tests/benchmarks --override-ini addopts="".

Targets on an ordinary 2-core machine, whole process, four transmissions: HTML within 4 s, PDF within 6 s.
"""

import os
import subprocess
import sys
from pathlib import Path

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import magsafe

SAMPLES = Path(__file__).parents[2] / "sample_designs"


@pytest.mark.parametrize(("ending", "within"), [("html", 4.0), ("pdf", 6.0)])
def test_a_sheet_of_four_transmissions(benchmark: BenchmarkFixture, tmp_path: Path, ending: str, within: float) -> None:
    sample, file = SAMPLES / "slipway_portable.toml", tmp_path / f"sheet.{ending}"
    env = {**os.environ, "PYTHONPATH": str(Path(magsafe.__file__).parents[1])}
    command = [sys.executable, "-m", "magsafe", "logsheet", str(sample), "-o", str(file), "--replace"]

    def make() -> None:
        subprocess.run(command, check=True, capture_output=True, env=env)

    benchmark.pedantic(make, rounds=3, warmup_rounds=1)  # type: ignore[no-untyped-call]
    assert benchmark.stats is not None
    assert benchmark.stats.stats.min <= within
