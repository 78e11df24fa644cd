"""Whole commands and their parts, measured. Not in the default run: pytest tests/benchmarks --override-ini addopts="".

Targets on an ordinary 2-core machine: `magsafe --help` under 0.3 s, `magsafe check` of the four-transmission sample
under 1.0 s, each as a whole process.
"""

import subprocess
import sys
from pathlib import Path

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import magsafe

SAMPLE = Path(__file__).parents[2] / "sample_designs" / "slipway_portable.toml"


@pytest.mark.parametrize(
    "arguments", [["--version"], ["--help"], ["check", str(SAMPLE)], ["check", str(SAMPLE), "--json"]],
    ids=["version", "help", "check", "check-json"],
)  # fmt: skip
def test_whole_process(benchmark: BenchmarkFixture, arguments: list[str]) -> None:
    def run() -> None:
        subprocess.run([sys.executable, "-m", "magsafe", *arguments], capture_output=True, check=False)

    benchmark.pedantic(run, rounds=9, warmup_rounds=1)  # type: ignore[no-untyped-call]


def test_check_without_start_up(benchmark: BenchmarkFixture) -> None:
    design = magsafe.read_design(SAMPLE)
    benchmark(magsafe.check, design)


def test_reading_a_design(benchmark: BenchmarkFixture) -> None:
    benchmark(magsafe.read_design, SAMPLE)
