"""What is computed of a loop and what is not: sizes, places, the tuning limit, loops that are fed as they are."""

from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given, settings
from hypothesis import strategies as st
from points import RODS, STRIP, fed, likely, point, polygon, rectangle
from scipy.constants import c
from scipy.optimize import brentq

from magsafe import words
from magsafe.analysis.chain import GAP_CAPACITANCE, REACTANCE_ERROR, RESISTANCE_ERROR
from magsafe.analysis.figures import Figures
from magsafe.analysis.flow import flow
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.surroundings import surroundings
from magsafe.physics import conductor
from magsafe.physics.far_field import FarField

THIN_PLATED = {
    "form": "tube",
    "outer_diameter": "22 mm",
    "wall": "0.074 mm",
    "conductivity": "58 MS/m",
    "plating": {"material": "silver", "thickness": "5 um"},
}
# The innermost turn ends two and a half spacings inside the outermost one: a quarter of a metre from the centre.
RODS_30 = {**RODS, "outer_diameter": "30.2 mm"}
SPIRAL, NESTED = {"loop__turn_arrangement": "nested"}, {"turn_arrangement": "nested"}

OUT_OF_RANGE = [
    # what is changed, a word of the reason; the range on its other side is held below
    ({"transmission__0__frequency": "286.5 MHz", "capacitor": {"kind": "none"}}, "3 wavelengths long"),
    ({"transmission__0__frequency": "0.19 MHz", "loop__diameter": "0.5 m"}, "0.000996 wavelengths long"),
    ({"loop__conductor__outer_diameter": "60.2 mm"}, "0.0602 of the loop's"),
    ({"loop__turns": 2, "loop__turn_spacing": "22.4 mm"}, "1.02 diameters"),
    ({"loop__conductor": STRIP, "loop__turns": 2, "loop__turn_spacing": "80 mm"}, "turns of a strip"),
    ({"loop__conductor": THIN_PLATED}, "2.98 skin depths"),
    ({"loop__conductor": {**STRIP, "width": "60.5 mm"}}, "0.121 of the loop's radius wide"),
    ({"loop": {**rectangle(1.6, 0.5), "conductor": {**STRIP, "width": "82 mm"}}}, "0.123 of the loop's radius wide"),
    ({"loop__conductor": RODS_30, "loop__turns": 3, "loop__turn_spacing": "100 mm", **SPIRAL}, "0.0604 of the loop's"),
]
JUST_IN_RANGE: list[dict[str, Any]] = [
    {"transmission__0__frequency": "286 MHz", "capacitor": {"kind": "none"}},
    {"transmission__0__frequency": "0.192 MHz", "loop__diameter": "0.5 m"},
    {"loop__conductor__outer_diameter": "59.9 mm"},
    {"loop__turns": 2, "loop__turn_spacing": "22.5 mm", "transmission__0__frequency": "3.6 MHz"},
    {"loop__conductor": STRIP},
    {"loop__conductor": {**THIN_PLATED, "wall": "0.075 mm"}},
    {"loop__conductor": {**STRIP, "width": "59.5 mm"}},
    {
        "loop": {**rectangle(1.6, 0.5), "conductor": {**STRIP, "width": "79 mm"}},
        "transmission__0__frequency": "7.1 MHz",
    },
    {
        "loop__conductor": {**RODS_30, "outer_diameter": "29.8 mm"},
        "loop__turns": 3,
        "loop__turn_spacing": "100 mm",
        **SPIRAL,
        "transmission__0__frequency": "3.6 MHz",
    },
    {"loop__conductor": {"form": "tube", "outer_diameter": "22 mm", "wall": "0.06 mm", "conductivity": "58 MS/m"}},
]


def nothing_is_computed(found: OperatingPoint) -> bool:
    told = ("perimeter_in_wavelengths",)
    names = [each for each in Figures.__dataclass_fields__ if each not in told]
    known = [name for name in names if getattr(found.figures, name).spread.known]
    return not known and found.bare_voltage is None and found.bare_current is None and not found.ground_cases


@pytest.mark.parametrize(("changes", "word"), OUT_OF_RANGE, ids=[word for _, word in OUT_OF_RANGE])
def test_beyond_every_method_nothing_is_stretched(changes: dict[str, Any], word: str) -> None:
    found = point(**changes)
    assert len(found.out_of_range) == 1
    assert word in found.out_of_range[0]
    assert nothing_is_computed(found)
    assert word in found.figures.capacitor_peak_voltage.why
    assert found.figures.perimeter_in_wavelengths.spread.known
    assert not found.beyond_tuning


@pytest.mark.parametrize("changes", JUST_IN_RANGE)
def test_just_within_its_range_a_loop_is_computed(changes: dict[str, Any]) -> None:
    found = point(**changes)
    assert not found.out_of_range
    assert found.figures.radiation_resistance.spread.known


def test_the_length_of_all_turns_counts() -> None:
    """Six turns of 0.524 wavelengths are 3.1 long; five are 2.6."""
    turns = {"loop__turn_spacing": "100 mm", "transmission__0__frequency": "50 MHz", "capacitor": {"kind": "none"}}
    assert "3.14 wavelengths" in point(loop__turns=6, **turns).out_of_range[0]
    assert not point(loop__turns=5, **turns).out_of_range


def test_two_reasons_are_both_told() -> None:
    found = point(
        transmission__0__frequency="0.19 MHz", loop__diameter="0.5 m", loop__conductor__outer_diameter="80 mm"
    )
    assert len(found.out_of_range) == 2
    assert all(reason in found.figures.unloaded_q.why for reason in found.out_of_range)


@settings(max_examples=30, deadline=None)
@given(diameter=st.floats(0.3, 3.0), share=st.floats(0.01, 0.25), thick=st.floats(0.001, 0.05))
def test_every_spread_is_in_order_over_the_whole_range(diameter: float, share: float, thick: float) -> None:
    frequency = share * 299.792458 / (3.14159265 * diameter)
    if not 0.1 < frequency < 300.0:
        return
    found = point(
        loop__diameter=f"{diameter:.6f} m",
        loop__conductor__outer_diameter=f"{max(diameter * thick * 1000.0, 0.1):.4f} mm",
        transmission__0__frequency=f"{frequency:.6f} MHz",
    )
    assert not [reason for reason in found.out_of_range if "wavelengths" not in reason]


SHORT_SIDES = [
    # loop, its shortest side in conductor radii
    (polygon(12, 3.1416, 0.0880), 5.95),
    (rectangle(1.5, 0.0655), 5.95),
    (
        {
            "shape": "outline",
            "points": [["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "1 m"], ["0.0655 m", "1 m"], ["0 m", "1 m"]],
            "conductor": RODS,
        },
        5.95,
    ),
]


@pytest.mark.parametrize(("loop", "radii"), SHORT_SIDES)
def test_a_side_that_a_corner_fills_is_named_and_nothing_is_guessed(loop: dict[str, Any], radii: float) -> None:
    found = point(loop=loop)
    assert any(f"a side is {radii:.3g} times as long" in reason for reason in found.out_of_range)
    assert nothing_is_computed(found)


@pytest.mark.parametrize(
    "loop", [polygon(12, 3.1416, 0.0590), rectangle(1.5, 0.0665), rectangle(0.9, 0.7), polygon(3, 3.0, 0.02)]
)
def test_a_side_just_long_enough_is_computed(loop: dict[str, Any]) -> None:
    found = point(loop=loop)
    assert not found.out_of_range
    assert found.bare_voltage is not None


def test_no_series_capacitor_tunes_above_the_anti_resonance() -> None:
    """A line of half the perimeter, short-circuited, is open at a quarter wavelength: 0.5 round, less by the gap."""
    plain = point()
    limit = plain.tuning_limit
    assert limit is not None
    assert 0.42 < np.pi * limit / c < 0.5
    at = f"{words.amount(limit, 'Hz', 'MHz')}"
    above = point(transmission__0__frequency=f"{limit * 1.001 / 1e6:.6f} MHz")
    assert above.beyond_tuning
    assert above.tuning_limit == pytest.approx(limit, rel=1e-3)
    assert nothing_is_computed(above)
    assert above.out_of_range == (f"no series capacitor tunes this loop above its anti-resonance at {at}",)
    assert "anti-resonance" in above.figures.capacitor_peak_voltage.why
    near = point(transmission__0__frequency=f"{limit * 0.99 / 1e6:.6f} MHz")
    assert not near.beyond_tuning
    assert nothing_is_computed(near)
    assert f"anti-resonance at {at}" in near.out_of_range[0]
    assert "gap decides" in near.out_of_range[0]
    below = point(transmission__0__frequency=f"{limit * 0.85 / 1e6:.6f} MHz")
    assert not below.out_of_range
    assert below.bare_voltage is not None
    again = point(transmission__0__frequency="110 MHz")  # above its first resonance it is inductive once more
    assert again.beyond_tuning
    assert nothing_is_computed(again)


@pytest.mark.parametrize(("share", "computed"), [(0.48, True), (0.52, False)])
def test_the_port_s_gap_may_hold_half_of_what_tunes_the_loop(share: float, computed: bool) -> None:
    """Of the susceptance that cancels the reactance; beyond it no excess stands for the gap's capacitance."""
    gap = GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 0.022

    def held(frequency: float) -> float:
        design = plain_design(transmission__0__frequency=f"{frequency} Hz")
        return flow(design, frequency, "top", image=False).reactance * 2.0 * np.pi * frequency * gap - share

    frequency = float(brentq(held, 20e6, 43e6, xtol=1e3))
    found = point(transmission__0__frequency=f"{frequency} Hz")
    assert (not found.out_of_range) == computed
    assert computed or "gap decides" in found.out_of_range[0]


def test_a_plane_that_moves_the_anti_resonance_below_the_frequency_stops_the_figures() -> None:
    """Close below its capacitor a plane loads the port: capacitive there, and inductive yet in free space."""
    changes = {
        "loop__conductor__outer_diameter": "5 mm",
        "transmission__0__frequency": "40 MHz",
        "capacitor__position": "bottom",
    }
    over = {"site__ground": "perfect", "loop__centre_height": "0.506 m"}
    design = plain_design(**changes, **over)
    assert flow(design, 40e6, "bottom", image=False).reactance > 2000.0
    assert flow(design, 40e6, "bottom", image=True).reactance < -2000.0
    assert point(**changes).bare_voltage is not None
    found = point(**changes, **over)
    assert not found.beyond_tuning
    assert "gap decides" in found.out_of_range[0]
    assert nothing_is_computed(found)


@pytest.mark.parametrize(("height", "computed"), [("0.521 m", False), ("0.523 m", True)])
def test_a_conductor_nearer_to_the_ground_than_its_diameter_is_not_computed(height: str, computed: bool) -> None:
    found = point(loop__centre_height=height, site__ground="average")
    assert (not found.out_of_range) == computed
    assert computed or "nearer to the ground than its own diameter" in found.out_of_range[0]
    assert computed or nothing_is_computed(found)
    assert not point(loop__centre_height=height).out_of_range


def test_the_lowest_conductor_of_all_places_of_the_capacitor_decides() -> None:
    """A hexagon with its port at the bottom stands on a side, with its port at the side on a corner."""
    hexagon = {"shape": "polygon", "sides": 6, "across_flats": "1 m", "centre_height": "0.59 m", "conductor": RODS}
    over = {"loop": hexagon, "site__ground": "perfect"}
    assert "nearer to the ground" in point(**over).out_of_range[0]
    assert not point(**over, capacitor__position="bottom").out_of_range


def test_where_no_anti_resonance_is_found_a_loop_is_computed_as_far_as_it_was_looked_for() -> None:
    """Fed in the middle of its long side, a flat rectangle is two shorted lines, each a quarter of its length."""
    thin = {"form": "rod", "outer_diameter": "8 mm", "conductivity": "58 MS/m"}
    flat = {"loop": {**rectangle(6.0, 0.06), "conductor": thin}, "capacitor__position": "top"}
    perimeter = 12.12
    for size, computed in ((0.5, True), (0.7, False)):
        found = point(**flat, transmission__0__frequency=f"{size * c / perimeter / 1e6:.6f} MHz")
        assert found.tuning_limit is None
        assert not found.beyond_tuning
        assert (not found.out_of_range) == computed, found.out_of_range
    assert found.out_of_range == ("the conductor is 0.7 wavelengths long; what a capacitor tunes is computed to 0.62",)
    assert nothing_is_computed(found)


def test_a_spiral_without_room_for_its_innermost_turn_says_so() -> None:
    corners = [["0 m", "0 m"], ["1 m", "0 m"], ["1 m", "1 m"], ["0 m", "1 m"]]
    thin = {"form": "rod", "outer_diameter": "4 mm", "conductivity": "58 MS/m"}
    spiral = {"shape": "outline", "points": corners, "turn_spacing": "100 mm", "conductor": thin, **NESTED}
    found = point(loop={**spiral, "turns": 8}, transmission__0__frequency="1 MHz")
    assert found.out_of_range == ("there is no room for the innermost turn",)


@pytest.mark.parametrize(
    ("ground", "height", "left_out"),
    [
        ("none", "3 m", False),
        ("none", None, False),
        ("perfect", "3 m", False),
        ("average", "3 m", False),
        ({"conductivity": "5 mS/m", "permittivity": 13}, "3 m", False),
        (None, "3 m", True),
        ("average", None, True),
        ("perfect", None, True),
    ],
)
def test_only_a_ground_or_a_height_that_nobody_stated_is_left_out(
    ground: Any, height: str | None, left_out: bool
) -> None:
    assert point(site__ground=ground, loop__centre_height=height).ground_left_out == left_out


@pytest.mark.parametrize("megahertz", [1.0, 7.1, 21.0, 40.0])
def test_the_tuning_limit_is_the_loop_s_and_not_the_frequency_s(megahertz: float) -> None:
    """At the limit the reactance jumps from above to below zero."""
    found = point(transmission__0__frequency=f"{megahertz} MHz").tuning_limit
    assert found is not None
    design = plain_design(transmission__0__frequency="46 MHz")
    below, above = (flow(design, share * found, "top", image=False).reactance for share in (0.998, 1.002))
    assert below > 3000.0
    assert above < -3000.0


def test_close_turns_have_a_tuning_limit_too() -> None:
    """Two turns 1.2 diameters apart are a line of their own: the reactance jumps between 9 and 9.5 MHz."""
    changes = {"loop__turns": 2, "loop__turn_spacing": "12 mm", "loop__conductor__outer_diameter": "10 mm"}
    found = point(transmission__0__frequency="12 MHz", **changes)
    assert found.tuning_limit is not None
    assert found.beyond_tuning


def test_a_loop_without_a_capacitor_has_the_figures_of_its_terminals() -> None:
    """A wavelength round: some 100 to 150 ohm and resonant at 1.03 to 1.1 wavelengths (common practice)."""
    found = fed(95.4)
    resonance = likely(found, "nearest_resonance")
    assert 1.03 < np.pi * resonance / c < 1.10
    told = found.figures.nearest_resonance.spread
    for end, sign in ((told.low, -1.0), (told.high, 1.0)):
        assert end == pytest.approx(resonance * (1.0 + sign * REACTANCE_ERROR), rel=1e-6)
    there = fed(resonance / 1e6)
    assert likely(there, "nearest_resonance") == pytest.approx(resonance, rel=1e-4)
    assert abs(likely(there, "terminal_reactance")) < 3.0
    ohms = likely(there, "terminal_resistance")
    assert 100.0 < ohms < 150.0
    assert likely(there, "swr_at_50_ohm") == pytest.approx(ohms / 50.0, rel=0.01)
    assert ohms == pytest.approx(likely(there, "total_resistance"))
    assert likely(there, "terminal_reactance") == likely(there, "port_reactance")
    assert likely(there, "conductor_efficiency") > 0.99
    for name in ("capacitor_peak_voltage", "capacitor_rms_current", "unloaded_q", "tuning_capacitance"):
        figure = getattr(found.figures, name)
        assert not figure.spread.known
        assert "no capacitor" in figure.why
    assert found.bare_voltage is None
    assert found.bare_current == pytest.approx((100.0 / likely(found, "total_resistance")) ** 0.5, rel=0.02)
    assert not found.beyond_tuning
    assert found.opinion is None
    assert not found.bound_ratio.known


@pytest.mark.parametrize("megahertz", [60.0, 95.4, 110.0])
def test_the_swr_is_that_of_the_terminals(megahertz: float) -> None:
    """(|Z + Z0| + |Z - Z0|) / (|Z + Z0| - |Z - Z0|): any textbook; its ends over those of the losses."""
    found = fed(megahertz)
    z = complex(likely(found, "terminal_resistance"), likely(found, "terminal_reactance"))
    total, less = abs(z + 50.0), abs(z - 50.0)
    swr = found.figures.swr_at_50_ohm.spread
    assert swr.likely == pytest.approx((total + less) / (total - less), rel=1e-9)
    assert (swr.low or 0.0) <= (swr.likely or 0.0) <= (swr.high or 0.0)


@pytest.mark.parametrize("megahertz", [60.0, 95.4, 200.0])
def test_the_ends_of_the_terminals_are_the_extremes_of_the_circuit(megahertz: float) -> None:
    """The solved impedance with its errors, in level and in frequency, and a capacitance more or less across the port.

    Losses as at their ends: 1.1 for roughness and oxide (common practice), at least no conductor in the port.
    """
    frequency = megahertz * 1e6
    sleeves = {"low": "0 ohm", "likely": "2 ohm", "high": "7.5 ohm"}
    found = fed(megahertz, loop__joint=[{"name": "sleeves", "at": "spread", "count": 4, "resistance": sleeves}])
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    design = plain_design(
        capacitor={"kind": "none"}, loop__conductor=wire, transmission__0__frequency=f"{megahertz} MHz"
    )
    below, here, above = (flow(design, share * frequency, "top", image=False) for share in (0.995, 1.0, 1.005))
    inside = complex(conductor.rod_impedance(frequency, 58e6, 1.6e-3))
    across = 2.0 * np.pi * frequency * (GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 3.2e-3)
    every = []
    for rough, joints, error in ((0.99, 0.0, -RESISTANCE_ERROR), (1.1, 30.0, RESISTANCE_ERROR)):
        lost = inside.real * rough * here.conductor_length + joints * here.mean_square
        resistance = (here.radiation + lost) * (1.0 + error)
        for moved in (below, here, above):
            for level in (1.0 - REACTANCE_ERROR, 1.0, 1.0 + REACTANCE_ERROR):
                bare = complex(resistance, level * (moved.reactance + inside.imag * here.internal_length))
                every += [bare / (1.0 + 1j * sign * across * bare) for sign in (-1.0, 0.0, 1.0)]
    swr = [(abs(z + 50.0) + abs(z - 50.0)) / (abs(z + 50.0) - abs(z - 50.0)) for z in every]
    figures = found.figures
    for spread, values, share in (
        (figures.terminal_resistance.spread, [z.real for z in every], 0.01),
        (figures.terminal_reactance.spread, [z.imag for z in every], 0.03),
        (figures.swr_at_50_ohm.spread, swr, 0.03),
    ):
        near = share * (max(values) - min(values))
        assert spread.low == pytest.approx(min(values), abs=near)
        assert spread.high == pytest.approx(max(values), abs=near)


def test_a_fed_loop_over_soil_has_both_ends_and_without_a_height_none() -> None:
    found = fed(100.0, site__ground="average", loop__centre_height="3 m").figures
    free = fed(100.0).figures
    design = plain_design(
        capacitor={"kind": "none"},
        loop__conductor={"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"},
        transmission__0__frequency="100 MHz",
        site__ground="average",
        loop__centre_height="3 m",
    )
    added = surroundings(design, 100e6).likely.radiated - flow(design, 100e6, "top", image=False).radiation
    ohms = found.terminal_resistance.spread
    assert ohms.likely == pytest.approx((free.terminal_resistance.spread.likely or 0.0) + added, rel=1e-6)
    assert (ohms.low or 0.0) < (ohms.likely or 0.0) < (ohms.high or 0.0)
    assert found.terminal_resistance.why == found.swr_at_50_ohm.why == ""
    swr = found.swr_at_50_ohm.spread
    assert (swr.low or 0.0) < (swr.likely or 0.0) < (swr.high or 0.0)
    anywhere = fed(100.0, site__ground="average").figures
    assert anywhere.terminal_reactance.spread.low is None
    assert anywhere.terminal_reactance.spread.high is None
    assert anywhere.terminal_resistance.spread.high is None
    assert anywhere.swr_at_50_ohm.spread.low is None
    assert anywhere.swr_at_50_ohm.spread.high is None
    for figure in (anywhere.terminal_reactance, anywhere.terminal_resistance, anywhere.swr_at_50_ohm):
        assert "centre_height" in figure.why
    tall = fed(100.0, site__ground="perfect", loop__centre_height="3 m").figures
    assert tall.terminal_resistance.spread.high is not None
    assert tall.swr_at_50_ohm.spread.high is not None
    tuned = point().figures
    for name in ("terminal_resistance", "terminal_reactance", "swr_at_50_ohm", "nearest_resonance"):
        assert not getattr(tuned, name).spread.known
        assert "full-wave" in getattr(tuned, name).why


def test_far_from_any_resonance_none_is_told() -> None:
    found = fed(30.0).figures.nearest_resonance
    assert not found.spread.known
    assert "half the frequency" in found.why


def test_directivities_of_small_and_large_loops() -> None:
    """A small loop's 1.5 in its plane and nothing along its axis; a wavelength round some 2.2 along it (Kraus; memory).

    Up to a third of a decibel for the feed: a loop of one wavelength, Balanis, Antenna Theory, chapter 5 (memory).
    """
    small = point(transmission__0__frequency="1 MHz")
    assert likely(small, "directivity_in_plane") == pytest.approx(1.5, rel=0.02)
    assert likely(small, "directivity_along_axis") < 0.01
    large = fed(95.4)
    assert likely(large, "directivity_along_axis") == pytest.approx(2.2, rel=0.1)
    assert likely(large, "directivity_in_plane") < likely(large, "directivity_along_axis")


def test_a_flat_loop_has_its_axis_upright() -> None:
    """A small loop sends nothing along its axis and 1.5 in its plane, however it lies (Balanis, memory)."""
    flat = point(loop__plane="horizontal", transmission__0__frequency="1 MHz")
    assert likely(flat, "directivity_along_axis") < 0.01
    assert likely(flat, "directivity_in_plane") == pytest.approx(1.5, rel=0.02)


@pytest.mark.parametrize(("spacing", "megahertz", "larger"), [(300.0, 60.0, 1.0), (200.0, 120.0, -1.0)])
def test_of_a_spiral_the_larger_side_is_told(spacing: float, megahertz: float, larger: float) -> None:
    """Its closing link lies beside the plane of its turns, and a loop that large sends more to one side of it."""
    changes = {
        "capacitor": {"kind": "none"},
        "loop__turns": 2,
        "loop__turn_spacing": f"{spacing} mm",
        "loop__conductor__outer_diameter": "3 mm",
        "loop__turn_arrangement": "nested",
        "transmission__0__frequency": f"{megahertz} MHz",
    }
    frequency = megahertz * 1e6
    far = FarField.of(flow(plain_design(**changes), frequency, "top", image=False).segments(), frequency)
    there, behind = (far.directivity_along(np.array([way, 0.0, 0.0])) for way in (larger, -larger))
    assert there > 1.04 * behind
    assert likely(point(**changes), "directivity_along_axis") == pytest.approx(there, rel=1e-6)


def test_no_efficiency_is_more_than_all() -> None:
    spread = fed(95.4).figures.conductor_efficiency.spread
    assert spread.likely is not None
    assert 0.996 < spread.likely < 1.0
    assert spread.high == 1.0
