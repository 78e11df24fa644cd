"""The field on the conductor's surface from its charge, and whether the air round it glows."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design
from scipy.constants import epsilon_0

import magsafe
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.surface_field import sharpest_radius, surface_field
from magsafe.checks.sheet import Finding
from magsafe.physics import near_field

STRIP = {"form": "strip", "width": "30 mm", "thickness": "0.5 mm", "conductivity": "58 MS/m"}
WIRE = {"form": "rod", "outer_diameter": "2 mm", "conductivity": "58 MS/m"}


def point_of(**changes: Any) -> OperatingPoint:
    design = plain_design(**changes)
    return operating_point(design, design.transmission[0])


def field_of(**changes: Any) -> float:
    design = plain_design(**changes)
    point = operating_point(design, design.transmission[0])
    assert point.chain is not None
    return surface_field(point.chain, sharpest_radius(design.loop.conductor))[0].likely or 0.0


def finding_of(**changes: Any) -> Finding:
    sheet = magsafe.check(plain_design(**changes))
    return next(f for f in sheet.all_findings() if f.id == "conductor.corona")


def test_it_is_the_field_that_the_solved_current_has_beside_the_wire() -> None:
    """The near field, computed on its own, six radii off a thin wire: charge over 2 pi epsilon r (Gauss's law)."""
    point = point_of(loop__conductor=WIRE, transmission__0__frequency="14.2 MHz")
    chain = point.chain
    assert chain is not None
    segments = chain.likely.state.flow.segments()
    middle = 0.5 * (segments.start + segments.end)
    length = np.linalg.norm(segments.end - segments.start, axis=1)
    charge = np.abs(segments.current_end - segments.current_start) / length
    densest = 1 + int(np.argmax(charge[1:]))
    outwards = middle[densest] - np.array([0.0, 0.0, middle[:, 2].mean()])
    off = 6e-3
    there = middle[densest] + off * outwards / np.linalg.norm(outwards)
    electric, _ = near_field.fields(there[None, :], segments, 14.2e6)
    crest = np.sqrt(2.0) * chain.current("likely", chain.likely, 100.0) * float(near_field.magnitude(electric)[0])
    assert field_of(loop__conductor=WIRE, transmission__0__frequency="14.2 MHz") * 1e-3 / off == pytest.approx(
        crest, rel=0.15
    )


def test_the_charge_of_one_half_is_the_current_that_is_lost_on_it() -> None:
    """Continuity: what the current falls by from opposite the port to the port is its charge, times the frequency."""
    point = point_of(loop__conductor=WIRE, transmission__0__frequency="14.2 MHz")
    assert point.chain is not None
    flow = point.chain.likely.state.flow
    segments = flow.segments()
    change = np.abs(segments.current_end - segments.current_start)
    assert change.sum() / 2.0 == pytest.approx(flow.largest - 1.0, rel=0.02)


def test_it_grows_as_the_root_of_the_power_and_as_the_frequency_s_charge() -> None:
    assert field_of(transmission__0__power="400 W") == pytest.approx(2.0 * field_of(), rel=1e-9)
    assert field_of(margins={"overshoot": "6 dB"}) == pytest.approx(10.0**0.3 * field_of(), rel=1e-9)


def test_by_hand_a_metre_loop_is_far_from_glowing() -> None:
    """Some 10 pF a metre to 4 kV of each half (order of magnitude): tens of kV/m on 22 mm, of 4000 that glow."""
    found = field_of()
    rough = 10e-12 * 4e3 / (2.0 * np.pi * epsilon_0 * 0.011)
    assert 0.2 * rough < found < 5.0 * rough
    assert finding_of().verdict == "clear"


def test_a_strip_is_as_sharp_as_its_edge() -> None:
    assert sharpest_radius(plain_design(loop__conductor=STRIP).loop.conductor) == pytest.approx(0.25e-3)


def test_thin_wire_and_much_power_glow() -> None:
    hair = {**WIRE, "outer_diameter": "0.5 mm"}
    found = finding_of(loop__conductor=hair, transmission__0__power="9 kW", capacitor__rated_voltage="90 kV")
    assert found.verdict == "stop"
    assert found.power_at_margin is not None
    there = finding_of(loop__conductor=hair, transmission__0__power=f"{found.power_at_margin * 1.001:.6f} W")
    assert there.verdict == "narrow"
    assert (there.margin_found or 0.0) < 1.5**2


def test_higher_up_it_glows_earlier() -> None:
    low, high = (
        finding_of(site={"ground": "none", "altitude": each}).margin_found or 0.0 for each in ("0 m", "3000 m")
    )
    assert high < low


def test_up_to_the_power_told_it_is_clear() -> None:
    """The margin twice over, because nobody measured the onset: that is in the power, whatever power is asked at."""
    hair = {**WIRE, "outer_diameter": "0.5 mm"}
    told = finding_of(loop__conductor=hair, transmission__0__power="1 W").power_at_margin or 0.0
    for factor, verdict in ((0.999, "clear"), (1.001, "narrow")):
        found = finding_of(loop__conductor=hair, transmission__0__power=f"{told * factor:.6f} W")
        assert found.verdict == verdict
        assert found.power_at_margin == pytest.approx(told, rel=1e-6)
