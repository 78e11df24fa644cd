"""The checks of the loop itself: its size, both methods, the signal's width, the bound on Q."""

from dataclasses import replace
from typing import Any

import pytest
from designs import plain_design
from points import fed, point

from magsafe.analysis.closed_form import Compared
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks import loop
from magsafe.checks.sheet import Finding


def size(found: OperatingPoint, **changes: Any) -> Finding:
    return loop.size(plain_design(**changes), found)


def transmitting(**keys: Any) -> OperatingPoint:
    return point(transmission__0={"frequency": "7.1 MHz", "power": "100 W", **keys})


def limit_of(finding: Finding) -> float:
    assert finding.limit is not None
    return finding.limit.value


@pytest.mark.parametrize(("width", "verdict"), [("1.6 kHz", "clear"), ("1.8 kHz", "narrow")])
def test_a_signal_must_fit_between_the_points_of_swr_2(width: str, verdict: str) -> None:
    """Matched at resonance: 1/sqrt(2) over the unloaded Q, and half power 2 over it (Yaghjian & Best 2005, memory)."""
    found = transmitting(signal_bandwidth=width)
    half = found.figures.half_power_bandwidth.spread
    between = (half.low or 0.0) / 8.0**0.5
    assert 1600.0 < between < 1800.0 < (half.low or 0.0)
    finding = loop.bandwidth(found)
    assert finding.verdict == verdict
    assert limit_of(finding) == pytest.approx(float(width.split(maxsplit=1)[0]) * 1e3)


def test_the_signal_s_own_width_comes_before_that_of_its_mode() -> None:
    stated = loop.bandwidth(transmitting(signal_bandwidth="1 kHz", mode="SSB"))
    assert limit_of(stated) == pytest.approx(1e3)
    by_mode = loop.bandwidth(transmitting(mode="SSB"))
    assert limit_of(by_mode) != pytest.approx(1e3)
    neither = loop.bandwidth(transmitting())
    assert neither.verdict == "narrow"
    assert "signal_bandwidth" in neither.because


def test_a_loop_that_is_not_computed_proves_neither_width_nor_bound() -> None:
    found = point(loop__conductor__outer_diameter="80 mm")
    for finding in (loop.bandwidth(found), loop.q_bound(found)):
        assert finding.verdict == "unproven"
        assert found.out_of_range[0] in finding.because


def test_a_loop_beyond_its_tuning_limit_is_stopped_and_one_out_of_range_unproven() -> None:
    beyond = size(point(transmission__0__frequency="60 MHz"))
    assert beyond.verdict == "stop"
    assert "anti-resonance" in beyond.because
    assert size(point(loop__conductor__outer_diameter="80 mm")).verdict == "unproven"


def test_a_full_wave_loop_is_held_against_what_the_solver_is_proved_for() -> None:
    """Three wavelengths of conductor; at its resonance there is nothing else to say."""
    finding = size(fed(100.4), capacitor={"kind": "none"})
    assert finding.verdict == "clear"
    assert limit_of(finding) == pytest.approx(3.0)
    assert "full-wave loop of 1.05 wavelengths" in finding.because


def test_only_a_medium_loop_is_told_what_the_plain_forms_would_give() -> None:
    small, medium = (size(point(transmission__0__frequency=each)) for each in ("3.5 MHz", "21 MHz"))
    assert "a small loop" in small.because
    assert "uniform" not in small.because
    assert "a medium loop" in medium.because
    found = point(transmission__0__frequency="21 MHz")
    assert found.opinion is not None
    volts, quality, efficiency = (f"{100.0 * (each - 1.0):+.1f} %" for each in found.opinion.plain)
    assert f"{volts} in volts, {quality} in Q and {efficiency} in efficiency" in medium.because


@pytest.mark.parametrize(("ratio", "verdict"), [(1.0199, "clear"), (1.0201, "unproven"), (0.9701, "clear")])
def test_methods_agree_up_to_what_is_allowed_and_no_further(ratio: float, verdict: str) -> None:
    found = point()
    assert found.opinion is not None
    compared = (Compared("Q", ratio, 0.97, 1.02), Compared("volts", 1.0, 0.99, 1.01))
    finding = loop.methods_agree(replace(found, opinion=replace(found.opinion, compared=compared)))
    assert finding is not None
    assert finding.verdict == verdict
    assert f"Q {100.0 * (ratio - 1.0):+.1f} % (-3.0 % to +2.0 % allowed)" in finding.because


def test_q_is_held_against_the_bound_itself() -> None:
    finding = loop.q_bound(point())
    assert finding.verdict == "clear"
    assert limit_of(finding) == pytest.approx(1.0)
