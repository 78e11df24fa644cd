"""A reading beside closed forms: the field of a ring on its axis with the current that its own resistance lets flow."""

from math import exp, pi, sqrt
from typing import Any

import pytest
from designs import plain_design
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import mu_0

import magsafe
from magsafe.checks.sheet import Finding

FREQUENCY, SIGMA, RADIUS, WIRE = 0.2e6, 58e6, 0.5, 0.011


def finding(power: float, reading: str, away: float = 2.0, uncertainty: str = "1 dB", **changes: Any) -> Finding:
    """Return what is said of a probe on the axis of the plain ring, whose capacitor loses nothing."""
    probe = {
        "along_axis": f"{away:.6f} m",
        "height": "5 m",
        "power": f"{power:.9f} W",
        "magnetic": reading,
        "uncertainty": uncertainty,
    }
    low = {"transmission__0__frequency": "0.2 MHz", "loop__centre_height": "5 m", "capacitor__position": "top"}
    sheet = magsafe.check(plain_design(**{**low, "probe": [probe], **changes}))
    (found,) = (f for f in sheet.all_findings() if f.id == "exposure.probe.probe-1")
    return found


def ring(power: float, away: float) -> float:
    """Return H on the axis [A/m]: I a^2 / 2 (a^2 + z^2)^1.5 (Biot-Savart, any textbook), I^2 = power / R.

    R is that of a layer one skin depth thick, length over conductivity and the layer's section (any textbook; common
    practice); radiation, 31171 (area over wavelength squared)^2 ohm, is less than a millionth of it here.
    """
    depth = sqrt(1.0 / (pi * FREQUENCY * mu_0 * SIGMA))
    resistance = 2.0 * pi * RADIUS / (SIGMA * pi * (2.0 * WIRE - depth) * depth)
    return float(sqrt(power / resistance) * RADIUS**2 / (2.0 * (RADIUS**2 + away**2) ** 1.5))


@pytest.mark.parametrize(("power", "away"), [(10.0, 2.0), (100.0, 0.5), (0.5, 1.0)])
def test_on_the_axis_of_a_ring_a_reading_of_the_closed_form_agrees(power: float, away: float) -> None:
    """What is computed lies 0.5 to 1.5 % above: the field's stated error and the scatter of the conductivity."""
    told = ring(power, away)
    found = finding(power, f"{told:.12f} A/m", away)
    assert found.limit is not None
    assert 1.005 < found.limit.value / told < 1.015
    assert found.verdict == "clear"
    assert finding(power, f"{1.02 * told:.12f} A/m", away).verdict == "narrow"
    assert finding(power, f"{1.02 * 10.0**0.05 * told:.12f} A/m", away).verdict == "stop"


@settings(max_examples=12, deadline=None)
@given(st.floats(-4.0, 6.0))
def test_what_is_computed_goes_as_the_root_of_the_power(decades: float) -> None:
    power = max(1e-3, exp(decades))
    one, other = finding(1.0, "0.01 A/m"), finding(power, "0.01 A/m")
    assert one.limit is not None
    assert other.limit is not None
    assert other.limit.value / one.limit.value == pytest.approx(sqrt(power), rel=1e-6)


@settings(max_examples=12, deadline=None)
@given(st.floats(0.1, 10.0), st.floats(0.01, 100.0))
def test_a_stop_is_a_reading_beyond_its_uncertainty_and_nothing_else(decibels: float, share: float) -> None:
    at_most = finding(10.0, "0.01 A/m").limit
    assert at_most is not None
    found = finding(10.0, f"{share * at_most.value:.12f} A/m", uncertainty=f"{decibels:.6f} dB")
    ratio = 10.0 ** (decibels / 20.0)
    expected = "stop" if share > ratio else "narrow" if share > 1.0 or share < 0.1 else "clear"
    assert found.verdict == expected
    assert found.margin_found == pytest.approx(ratio / share, rel=1e-5)


def test_the_planned_power_changes_nothing_of_a_reading() -> None:
    """The field was that of the power while reading, whatever the transmission is planned with."""
    one, other = finding(10.0, "0.5 A/m"), finding(10.0, "0.5 A/m", transmission__0__power="5 W")
    assert one.limit == other.limit
    assert one.verdict == other.verdict
