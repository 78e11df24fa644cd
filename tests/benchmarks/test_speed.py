"""Whole commands and their parts, measured. Not in the default run: pytest tests/benchmarks --override-ini addopts="".

Targets on an ordinary 2-core machine: `magsafe --help` under 0.3 s, `magsafe check` of the four-transmission sample
with one rule, two places and keep-out under 1.5 s, each as a whole process.
"""

import subprocess
import sys
from pathlib import Path

import pytest
from pytest_benchmark.fixture import BenchmarkFixture

import magsafe
from magsafe.design.reading import parse_design
from magsafe.rules.limit import rule_names

SAMPLE = Path(__file__).parents[2] / "sample_designs" / "slipway_portable.toml"


@pytest.mark.parametrize(
    "arguments", [["--version"], ["--help"], ["check", str(SAMPLE)], ["check", str(SAMPLE), "--json"]],
    ids=["version", "help", "check", "check-json"],
)  # fmt: skip
def test_whole_process(benchmark: BenchmarkFixture, arguments: list[str]) -> None:
    def run() -> None:
        subprocess.run([sys.executable, "-m", "magsafe", *arguments], capture_output=True, check=False)

    benchmark.pedantic(run, rounds=9, warmup_rounds=1)  # type: ignore[no-untyped-call]


def test_whole_process_with_two_rules_and_three_places(benchmark: BenchmarkFixture, tmp_path: Path) -> None:
    text = SAMPLE.read_text(encoding="utf-8").replace('rules = ["us-fcc"]', 'rules = ["us-fcc", "icnirp-2020"]')
    text += '\n[[place]]\nname = "boat house"\nwho = "public"\nin_plane = "9 m"\nposture = "standing"\n'
    design = tmp_path / "slipway.toml"
    design.write_text(text, encoding="utf-8")

    def run() -> None:
        done = subprocess.run([sys.executable, "-m", "magsafe", "check", str(design)], capture_output=True, check=False)
        assert done.returncode == 0

    benchmark.pedantic(run, rounds=9, warmup_rounds=1)  # type: ignore[no-untyped-call]


def test_check_without_start_up(benchmark: BenchmarkFixture) -> None:
    design = magsafe.read_design(SAMPLE)
    benchmark(magsafe.check, design)


def test_reading_a_design(benchmark: BenchmarkFixture) -> None:
    benchmark(magsafe.read_design, SAMPLE)


def test_people_of_six_transmissions_under_every_rule(benchmark: BenchmarkFixture) -> None:
    """Places and keep-out of all rules that are there, after a first run: target 1.5 s."""
    text = SAMPLE.read_text(encoding="utf-8")
    listed = ", ".join(f'"{name}"' for name in rule_names())
    text = text.replace('rules = ["us-fcc"]', f"rules = [{listed}]")
    first = text.index("[[transmission]]")
    block = text[first : text.index("[[transmission]]", first + 1)]
    more = [block.replace("30 m telegraphy", f"{f} MHz").replace("10.12 MHz", f"{f} MHz") for f in ("18.08", "24.9")]
    text = text[:first] + "".join(more) + text[first:]
    design = parse_design(text.encode(), "six.toml")
    magsafe.check(design)
    sheet = benchmark.pedantic(magsafe.check, args=(design,), rounds=5)  # type: ignore[no-untyped-call]
    assert len(sheet.operating_points) == 6
    assert len({each.rule for each in sheet.operating_points[0].exposure}) == len(rule_names())
