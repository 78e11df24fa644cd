"""How warm conductor and joints get: bounds, conservation, what must never cool them, drift, ceilings."""

from copy import deepcopy
from dataclasses import replace
from math import inf, pi, sqrt
from typing import Any

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given, settings
from hypothesis import strategies as st

import magsafe
from magsafe.analysis.exposure import use_of
from magsafe.analysis.losses import Corner
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.warmth import POORER, Warmth, expansion_of, joint_warmth, warmth
from magsafe.checks.sheet import Finding, Sheet
from magsafe.design.model import Design
from magsafe.physics.atmosphere import standard_pressure
from magsafe.physics.fin import fin_resistance, thermal_conductivity
from magsafe.physics.heat import ElectricHeat, Surface, Surroundings, lost_heat, steady_temperature
from magsafe.physics.warming import repeated_over_temperature, temperature_after
from magsafe.spread import Spread

TUBE = {"form": "tube", "outer_diameter": "22 mm", "wall": "1.0 mm", "material": "copper tube"}
JOINT = {"name": "lug", "count": 2, "kind": "bolted lug", "at": "capacitor"}
BASE: dict[str, Any] = {
    "loop__conductor": TUBE,
    "loop__supports": None,
    "site": {"ground": "none"},
    "transmission__0__mode": "FM",
}


def design_of(**changes: Any) -> Design:
    return plain_design(**deepcopy({**BASE, **changes}))


def point_of(design: Design) -> OperatingPoint:
    return operating_point(design, design.transmission[0])


def warm_of(**changes: Any) -> Warmth:
    found = point_of(design_of(**changes)).warmth
    assert found is not None
    return found


def finding_of(sheet: Sheet, name: str) -> Finding:
    return next(f for f in sheet.all_findings() if f.id == name)


# The fin ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("electric", "handbook"), [(58.0e6, 401.0), (37.7e6, 237.0), (61.6e6, 429.0)])
def test_what_conducts_current_conducts_heat(electric: float, handbook: float) -> None:
    """Copper, aluminium, silver at room temperature: CRC Handbook of Chemistry and Physics (memory)."""
    found = float(thermal_conductivity(electric, 300.0))
    assert found == pytest.approx(handbook, rel=0.17)
    assert POORER * found <= handbook


def test_a_fin_by_finite_differences() -> None:
    """A metre of tube in cells of a millimetre, one watt into its middle cell: heat in is heat lost along it."""
    cells, step, lost, conducted, section = 2001, 1e-3, 0.7, 343.0, 66e-6
    along = conducted * section / step
    matrix = np.zeros((cells, cells))
    each = np.arange(cells)
    matrix[each, each] = lost * step + 2.0 * along
    matrix[each[:-1], each[1:]] = matrix[each[1:], each[:-1]] = -along
    matrix[0, 0] = matrix[-1, -1] = lost * step + along
    heat = np.zeros(cells)
    heat[cells // 2] = 1.0
    rise = np.linalg.solve(matrix, heat)
    assert float(fin_resistance(lost, conducted, section, 2)) == pytest.approx(rise.max(), rel=2e-3)
    assert lost * step * rise.sum() == pytest.approx(1.0)
    assert float(fin_resistance(lost, conducted, section, 1)) == pytest.approx(2.0 * rise.max(), rel=2e-3)


# The end of an over ----------------------------------------------------------------------------------------


def body(
    heat: float,
    over: float,
    pause: float,
    emissivity: float = 0.5,
    sunshine: float = 0.0,
    tune: tuple[float, float] = (0.0, 0.0),
) -> Warmth:
    return Warmth(
        heat=Spread(heat, heat, heat),
        bare_heat=heat,
        surface=Surface(0.022, 0.022, emissivity, 0.5, 0.8),
        air=Surroundings(303.15, 9e4, sunshine),
        coefficient=0.0039,
        exponent=0.5,
        growth=1.0,
        capacity=227.0,
        most_capacity=227.0,
        duty=1.0,
        over=over,
        pause=pause,
        tune_share=tune[0],
        tune_time=tune[1],
        finish_stated=False,
    )


@pytest.mark.parametrize("heat", [2.0, 20.0, 60.0])
@pytest.mark.parametrize(("over", "pause"), [(30.0, 30.0), (180.0, 180.0), (600.0, 60.0), (60.0, 1200.0)])
@pytest.mark.parametrize("emissivity", [0.05, 0.7])
def test_no_row_of_overs_ends_warmer_than_the_bound(heat: float, over: float, pause: float, emissivity: float) -> None:
    """Against the warming followed in time to the state that repeats; the likely value is near it."""
    found = body(heat, over, pause, emissivity).temperature()
    exact = float(
        repeated_over_temperature(
            over,
            pause,
            ElectricHeat(heat, 0.0039),
            Surface(0.022, 0.022, emissivity, 0.5, 0.8),
            Surroundings(303.15, 9e4),
            227.0,
        )
    )
    assert (found.high or 0.0) >= exact - 1e-3
    assert found.likely == pytest.approx(exact, abs=0.05 * (exact - 303.15) + 0.3)
    assert (found.low or 0.0) <= exact + 1e-3


@pytest.mark.parametrize(("share", "time"), [(1.0, 20.0), (0.5, 120.0), (3.0, 300.0)])
def test_a_tune_up_after_an_over_ends_no_warmer_than_the_bound(share: float, time: float) -> None:
    """Against the warming followed in time: the row of overs, then the tune-up's carrier from where that ends."""
    surface, air = Surface(0.022, 0.022, 0.5, 0.5, 0.8), Surroundings(303.15, 9e4)
    end = repeated_over_temperature(180.0, 180.0, ElectricHeat(20.0, 0.0039), surface, air, 227.0)
    exact = float(temperature_after(time, end, ElectricHeat(20.0 * share, 0.0039), surface, air, 227.0))
    plain = body(20.0, 180.0, 180.0).temperature().high or 0.0
    found = body(20.0, 180.0, 180.0, tune=(share, time)).temperature().high or 0.0
    assert found >= max(exact, plain) - 1e-3
    assert found <= plain + 20.0 * share * time / 227.0 + 1e-9


def test_a_tune_up_counts_for_joints_as_long_as_it_may_last() -> None:
    """A joint warms in seconds: a full carrier for tuning is twice the mean of speech."""
    speech = {"transmission__0__mode": "SSB", "loop__joint": [JOINT], "transmission__0__power": "20 W"}
    tuned = {**speech, "transmission__0__tune_up": {"power": "20 W", "time": "1 s"}}
    plain, carrier = (finding_of(magsafe.check(design_of(**each)), "joint.heat.lug") for each in (speech, tuned))
    assert plain.value is not None
    assert carrier.value is not None
    rise = warm_of(**speech).temperature().high or 0.0
    own = (plain.value.high or 0.0) - (rise - 313.15)
    assert (carrier.value.high or 0.0) == pytest.approx((plain.value.high or 0.0) + own, abs=0.2)


def test_an_over_without_end_comes_to_the_steady_state() -> None:
    found = body(20.0, inf, 0.0).temperature()
    surface, air = Surface(0.022, 0.022, 0.5, 0.5, 0.8), Surroundings(303.15, 9e4)
    steady = float(steady_temperature(ElectricHeat(20.0, 0.0039), surface, air))
    assert (found.low, found.likely, found.high) == pytest.approx((steady, steady, steady))


@pytest.mark.parametrize("beside", [0.0, 25.0])
@pytest.mark.parametrize(("over", "pause"), [(180.0, 180.0), (inf, 0.0)])
def test_the_power_told_keeps_the_temperature_and_no_more(over: float, pause: float, beside: float) -> None:
    warm = body(10.0, over, pause)
    power = warm.power_to(370.0, beside)
    for share, kept in ((1.0, True), (1.001, False)):
        reached = float(warm.high_at(np.array([share * power]))[0]) + beside * share * power
        assert (reached <= 370.0) == kept


def test_where_the_sun_alone_is_too_much_no_power_is_left() -> None:
    assert body(10.0, inf, 0.0, 0.05, 1000.0).idle > 330.0
    assert body(10.0, inf, 0.0, 0.05, 1000.0).power_to(320.0) == 0.0


# Heat of the parts -----------------------------------------------------------------------------------------


def test_likely_heats_add_up_to_the_power_that_is_not_radiated() -> None:
    """Conservation: conductor, joints and capacitor take what radiation leaves. At 1 MHz the current is even."""
    design = design_of(
        loop__joint=[JOINT], transmission__0__frequency="1 MHz", capacitor__capacitance__max="5 nF",
        capacitor__series_resistance={"low": "1 mohm", "likely": "3 mohm", "high": "9 mohm"},
    )  # fmt: skip
    point = point_of(design)
    assert point.chain is not None
    assert point.warmth is not None
    (joint,) = joint_warmth(point.chain, design, point.warmth)
    along = (point.warmth.heat.likely or 0.0) * pi
    capacitor = point.figures.capacitor_dissipation.spread.likely or 0.0
    radiated = 100.0 * (point.figures.radiation_resistance.spread.likely or 0.0) / (
        point.figures.total_resistance.spread.likely or 1.0
    )  # fmt: skip
    assert along + 2.0 * (joint.heat.likely or 0.0) + capacitor + radiated == pytest.approx(100.0, rel=0.01)


def test_the_heat_of_a_metre_by_hand() -> None:
    """Current squared times resistance per metre, where the current is largest; key-down, its duty apart."""
    point = point_of(design_of())
    assert point.chain is not None
    assert point.warmth is not None
    current = point.figures.largest_current.spread.likely or 0.0
    assert point.warmth.heat.likely == pytest.approx(current**2 * point.chain.conductor.likely, rel=1e-6)


def test_one_bad_joint_is_worse_than_its_share_of_two() -> None:
    design = design_of(loop__joint=[JOINT])
    point = point_of(design)
    assert point.chain is not None
    assert point.warmth is not None
    (joint,) = joint_warmth(point.chain, design, point.warmth)
    part = point.chain.joints[0]
    both = max(point.chain.heat_in(part, "high", "low", each, 100.0) for each in point.chain.least)
    assert (joint.heat.high or 0.0) > 1.02 * both / 2.0
    assert joint.bare_spot > (joint.heat.high or 0.0)
    assert joint.poor_spot > 5.0 * joint.bare_spot


def spots(*joints: dict[str, Any]) -> list[tuple[float, float]]:
    """Return the heat of one joint and that of its spot, likely, for each group."""
    design = design_of(loop__joint=list(joints))
    point = point_of(design)
    assert point.chain is not None
    assert point.warmth is not None
    return [
        (each.heat.likely or 0.0, each.spot.likely or 0.0) for each in joint_warmth(point.chain, design, point.warmth)
    ]


def test_joints_at_one_spot_heat_it_together() -> None:
    """Half of those at the capacitor on each side of it, all of those opposite, whatever their groups."""
    lug = {"kind": "bolted lug", "at": "capacitor"}
    (one, two) = spots({**lug, "name": "a", "count": 2}, {**lug, "name": "b", "count": 5, "kind": "compression"})
    assert one[1] == two[1] == pytest.approx(one[0] + 3.0 * two[0])
    (far,) = spots({**lug, "name": "a", "count": 3, "at": "opposite"})
    assert far[1] == pytest.approx(3.0 * far[0])
    (alone,) = spots({**lug, "name": "a", "count": 6, "at": "spread"})
    assert alone[1] == pytest.approx(alone[0])


def test_joints_that_are_spread_warm_the_conductor() -> None:
    """Twelve of five milliohms on three metres: their heat for each metre is added to that of the conductor."""
    spread = {"name": "sleeves", "count": 12, "at": "spread",
              "resistance": {"low": "5 mohm", "likely": "5 mohm", "high": "5 mohm"}}  # fmt: skip
    with_them, point = warm_of(loop__joint=[spread]), point_of(design_of(loop__joint=[spread]))
    current = point.figures.capacitor_rms_current.spread.likely or 0.0
    assert point.chain is not None
    corner = point.chain.likely
    square = current**2 * corner.growth
    metre = square * point.chain.conductor.likely * corner.state.flow.largest**2
    wanted = 12 * 0.005 * square * corner.state.flow.mean_square / pi
    assert (with_them.heat.likely or 0.0) - metre == pytest.approx(wanted, rel=1e-3)


@pytest.mark.parametrize("count", [1, 4, 16])
def test_more_joints_at_the_capacitor_never_raise_the_ceiling(count: int) -> None:
    few, many = (
        finding_of(magsafe.check(design_of(loop__joint=[{**JOINT, "count": each}])), "joint.heat.lug").power_at_limit
        for each in (count, 2 * count + 1)
    )
    assert (many or 0.0) < (few or 0.0)


@settings(max_examples=15, deadline=None)
@given(st.floats(0.2, 5.0), st.floats(1.0, 4.0))
def test_a_part_s_heat_never_falls_when_its_own_spread_grows(likely: float, wider: float) -> None:
    def heat(high: float) -> float:
        spread = {"low": f"{likely / 2:.6f} mohm", "likely": f"{likely:.6f} mohm", "high": f"{high:.6f} mohm"}
        design = design_of(loop__joint=[{"name": "lug", "resistance": spread, "at": "opposite"}])
        point = point_of(design)
        assert point.chain is not None
        assert point.warmth is not None
        return joint_warmth(point.chain, design, point.warmth)[0].heat.high or 0.0

    assert heat(likely * wider) >= heat(likely) * (1.0 - 1e-9)


# What must never cool it -----------------------------------------------------------------------------------

HOTTER: list[tuple[dict[str, Any], dict[str, Any]]] = [
    ({"site__air_temperature": "20 degC"}, {"site__air_temperature": "35 degC"}),
    ({"site__altitude": "0 m"}, {"site__altitude": "3000 m"}),
    ({"loop__conductor__surface": "painted"}, {"loop__conductor__surface": "bright"}),
    ({"loop__conductor__in_sun": False}, {"loop__conductor__in_sun": True}),
    ({"loop__conductor__outer_diameter": "28 mm"}, {"loop__conductor__outer_diameter": "15 mm"}),
    ({"transmission__0__mode": "SSB"}, {"transmission__0__mode": "FM"}),
    (
        {"transmission__0__over": {"transmit": "1 min", "listen": "1 min"}},
        {"transmission__0__over": {"transmit": "5 min", "listen": "1 min"}},
    ),
    ({"transmission__0__power": "50 W"}, {"transmission__0__power": "100 W"}),
]


@pytest.mark.parametrize(("cooler", "hotter"), HOTTER, ids=[next(iter(c)).split("__")[-1] for c, _ in HOTTER])
def test_what_makes_it_hotter(cooler: dict[str, Any], hotter: dict[str, Any]) -> None:
    one, other = (warm_of(**each).temperature().high or 0.0 for each in (cooler, hotter))
    assert other > one + 0.1
    black, blacker = (float(warm_of(**each).bare.high_at(np.ones(1))[0]) for each in (cooler, hotter))
    assert blacker >= black - 1e-6


def test_hot_and_thin_air_is_taken_where_nothing_is_stated() -> None:
    unstated = warm_of().temperature().high
    assert unstated == warm_of(site__air_temperature="40 degC", site__altitude="2000 m").temperature().high


def test_without_a_known_section_an_over_warms_at_once() -> None:
    """A braid does not tell how much metal it has: the steady state of the keyed heat counts."""
    braid = {"form": "braid", "outer_diameter": "10 mm", "material": "copper"}
    over = {"transmit": "1 min", "listen": "9 min"}
    found = warm_of(loop__conductor=braid, transmission__0__over=over)
    assert found.capacity == 0.0
    steady = warm_of(loop__conductor=braid).temperature().high
    assert found.temperature().high == pytest.approx(steady)


# Findings --------------------------------------------------------------------------------------------------


def test_at_its_ceiling_the_conductor_keeps_the_margin_and_above_it_does_not() -> None:
    thin = {"form": "rod", "outer_diameter": "6 mm", "material": "copper"}
    changes = {"loop__conductor": thin, "loop__supports": [], "transmission__0__mode": "FM"}
    name = "conductor.temperature"
    found = finding_of(magsafe.check(design_of(**changes)), name)
    at_margin, at_limit = found.power_at_margin or 0.0, found.power_at_limit or 0.0
    assert 0.0 < at_margin < at_limit
    for power, verdict in ((at_margin, "clear"), (1.001 * at_margin, "narrow")):
        assert (
            finding_of(magsafe.check(design_of(**changes, transmission__0__power=f"{power:.9f} W")), name).verdict
            == verdict
        )
    again = finding_of(magsafe.check(design_of(**changes, transmission__0__power="40 W")), name)
    assert again.power_at_margin == pytest.approx(at_margin, rel=2e-3)


def test_supports_that_give_way_hold_the_power() -> None:
    name = "conductor.temperature"
    thin = {"form": "rod", "outer_diameter": "15 mm", "material": "copper"}
    changes: list[dict[str, Any]] = [{"loop__supports": []}, {}, {"loop__supports": ["PTFE", "PVC"]}]
    free, unknown, held = (finding_of(magsafe.check(design_of(loop__conductor=thin, **more)), name) for more in changes)
    assert (unknown.power_at_margin or 0.0) < (free.power_at_margin or 0.0)
    assert unknown.power_at_limit == free.power_at_limit
    assert (held.power_at_margin or 0.0) < 0.5 * (free.power_at_margin or 0.0)
    assert "PVC" in held.because
    assert "loop.supports" not in free.because
    assert unknown.value is not None
    assert (unknown.value.high or 0.0) > 30.0
    assert "loop.supports" in unknown.because
    assert unknown.verdict != "clear"


def test_solder_melts_before_copper_softens_only_if_there_is_some() -> None:
    joint = {"name": "corner", "kind": "soldered lap", "at": "spread"}
    plain = finding_of(magsafe.check(design_of()), "conductor.temperature")
    assert plain.limit is not None
    assert plain.limit.value == pytest.approx(150.0 - 40.0)
    soldered = finding_of(magsafe.check(design_of(loop__joint=[joint])), "joint.heat.corner")
    assert soldered.limit is not None
    assert soldered.limit.value == pytest.approx(183.0 - 40.0)


def test_a_joint_of_a_typical_kind_is_clear_only_if_one_ten_times_as_bad_would_be() -> None:
    weak = {"transmission__0__power": "2 W", "loop__joint": [JOINT]}
    strong = {"transmission__0__power": "30 W", "loop__joint": [JOINT]}
    found = [finding_of(magsafe.check(design_of(**each)), "joint.heat.lug") for each in (weak, strong)]
    assert found[0].verdict == "clear"
    assert found[1].verdict != "clear"
    assert "ten times as bad as is typical of a bolted lug" in found[1].because
    measured = {"low": "0.1 mohm", "likely": "0.1 mohm", "high": "0.2 mohm"}
    stated = {**strong, "loop__joint": [{**JOINT, "resistance": measured}]}
    assert finding_of(magsafe.check(design_of(**stated)), "joint.heat.lug").verdict == "clear"


def test_what_runs_away_is_a_stop() -> None:
    wire = {"form": "rod", "outer_diameter": "1 mm", "material": "copper"}
    sheet = magsafe.check(design_of(loop__conductor=wire, transmission__0__power="400 W", loop__joint=[JOINT]))
    for name in ("conductor.temperature", "joint.heat.lug"):
        found = finding_of(sheet, name)
        assert found.verdict == "stop"
        assert found.value is None or found.value.high is None
        assert "9727" not in found.because
        assert (found.power_at_margin or 0.0) > 0.0


def test_air_as_warm_as_the_limit_leaves_no_power() -> None:
    sheet = magsafe.check(design_of(loop__supports=["PVC"], site__air_temperature="75 degC"))
    assert finding_of(sheet, "conductor.temperature").verdict == "stop"
    assert sheet.power_ceiling.value == 0.0


@pytest.mark.parametrize(
    "changes",
    [{}, {"loop__supports": [], "loop__joint": [JOINT]}, {"loop__joint": [{**JOINT, "kind": "soldered lap"}]}],
    ids=["no supports", "typical lug", "solder"],
)
def test_up_to_the_power_told_warmth_is_clear_and_above_it_is_not(changes: dict[str, Any]) -> None:
    """Whatever power the design has: what nobody measured is not in the power that is called clear."""

    def warm(sheet: Sheet) -> list[Finding]:
        return [f for f in sheet.all_findings() if f.id.startswith(("conductor.temp", "joint.heat"))]

    told = [
        min(f.power_at_margin or 0.0 for f in warm(magsafe.check(design_of(**changes, transmission__0__power=watts))))
        for watts in ("2 W", "300 W")
    ]
    assert told[0] == pytest.approx(told[1], rel=1e-6)
    for factor, clear in ((0.9999, True), (1.001, False)):
        sheet = magsafe.check(design_of(**changes, transmission__0__power=f"{told[0] * factor:.9f} W"))
        assert all(f.verdict == "clear" for f in warm(sheet)) == clear


def test_the_drift_by_hand() -> None:
    """Resonance goes with one over the size: 17 ppm/K of copper times rise times frequency, half for L alone."""
    over = {"transmit": "3 min", "listen": "3 min"}
    design = design_of(transmission__0__over=over)
    sheet = magsafe.check(design)
    found = finding_of(sheet, "loop.drift")
    warm = warm_of(transmission__0__over=over)
    rise = (warm.temperature().high or 0.0) - warm.idle
    assert found.value is not None
    assert found.value.high == pytest.approx(7.1e6 * 16.8e-6 * rise, rel=0.03)
    likely = (warm.temperature().likely or 0.0) - warm.air_temperature
    assert found.value.likely == pytest.approx(0.5 * 7.1e6 * 16.8e-6 * likely, rel=0.03)
    width = sheet.operating_points[0].figures["swr2_bandwidth"].low or 0.0
    assert found.limit is not None
    assert found.limit.value == pytest.approx(width / 2.0)
    assert found.verdict in ("clear", "narrow")
    assert "after 3 min of transmitting" in found.because


def test_a_metal_that_is_not_stated_drifts_as_the_one_that_expands_most() -> None:
    """Zinc expands most of the table, 30.2 ppm/K; solder holds least of a volume, 8500 kg/m3 times 176 J/(kg K).

    Stainless steel holds most, 7930 times 500. Handbooks of physics and metals (memory).
    """
    over = {"transmit": "3 min", "listen": "3 min"}
    plain = {"form": "rod", "outer_diameter": "22 mm", "surface": "painted", "conductivity": "58 MS/m"}
    changes = {"loop__conductor": plain, "transmission__0__over": over}
    warm, sheet = warm_of(**changes), magsafe.check(design_of(**changes))
    section = pi * 0.011**2
    assert (warm.capacity, warm.most_capacity) == pytest.approx((1.496e6 * section, 3.965e6 * section), rel=1e-6)
    found = finding_of(sheet, "loop.drift")
    assert found.value is not None
    rise = (warm.temperature().high or 0.0) - warm.idle
    assert found.value.high == pytest.approx(7.1e6 * 30.2e-6 * rise, rel=1e-3)
    assert "no metal is stated" in found.because
    tube = {key: value for key, value in plain.items() if key != "conductivity"} | {"material": "copper tube"}
    stated = {**changes, "loop__conductor": tube}
    copper = warm_of(**stated)
    assert copper.capacity == copper.most_capacity == pytest.approx(8940.0 * 385.0 * section, rel=0.02)
    assert "no metal is stated" not in finding_of(magsafe.check(design_of(**stated)), "loop.drift").because
    assert expansion_of(design_of(**stated).loop.conductor) == pytest.approx(16.5e-6, rel=0.03)


def test_a_rise_is_heat_times_time_and_a_time_constant_that_of_small_steps() -> None:
    """Conservation of energy; the constant against what is lost at two temperatures of the likely end."""
    warm = body(20.0, 180.0, 180.0)
    assert float(warm.rise_of(10.0, 60.0)) == pytest.approx(10.0 * 60.0 / 227.0)
    assert np.isinf(replace(warm, capacity=0.0).rise_of(np.ones(2), 60.0)).all()
    assert np.isinf(warm.rise_of(10.0, inf))
    low, high = (float(lost_heat(330.0 + step, warm.surface, warm.air)) for step in (-2.0, 2.0))
    assert warm.time_constant(330.0) == pytest.approx(227.0 * 4.0 / (high - low), rel=1e-3)
    assert replace(warm, most_capacity=454.0).slowest.time_constant(330.0) == 2.0 * warm.time_constant(330.0)


@pytest.mark.parametrize("surface", ["bright", "oxidised", "painted"])
def test_what_the_sun_has_warmed_already_is_no_drift(surface: str) -> None:
    changes = {"loop__conductor__surface": surface, "loop__conductor__in_sun": True, "transmission__0__power": "0.01 W"}
    found = finding_of(magsafe.check(design_of(**changes)), "loop.drift")
    assert found.value is not None
    assert 0.0 < (found.value.likely or 0.0) <= (found.value.high or 0.0) < 20.0


def test_volts_do_not_know_of_warmth() -> None:
    """The same volts however long the over: only the conductor's stated temperature counts for them."""
    short, long = (
        magsafe.check(design_of(transmission__0__over={"transmit": t, "listen": "1 min"})).operating_points[0]
        for t in ("10 s", "20 min")
    )
    assert short.figures["capacitor_peak_voltage"] == long.figures["capacitor_peak_voltage"]
    rises = [each.figures["conductor_temperature_rise"].high or 0.0 for each in (short, long)]
    assert rises[1] > rises[0]


def test_use_is_that_of_the_transmission() -> None:
    design = design_of(transmission__0__mode="SSB", transmission__0__over={"transmit": "2 min", "listen": "1 min"})
    point = point_of(design)
    assert point.chain is not None
    found = warmth(point.chain, design, use_of(design.transmission[0]))
    assert (found.duty, found.over, found.pause) == (0.5, 120.0, 60.0)
    assert found.share == pytest.approx(2.0 / 3.0)


def test_the_conductor_is_hottest_where_the_capacitor_loses_least() -> None:
    """Its own resistance high and the capacitor's low: never the corner with every loss high, which takes heat away."""
    quality = {"low": 500, "likely": 1200, "high": 3000}
    point = point_of(design_of(capacitor__series_resistance=None, capacitor__quality_factor=quality))
    chain = point.chain
    assert chain is not None
    assert point.warmth is not None

    def heat(q: float, corner: Corner) -> float:
        own = chain.conductor.high * corner.weight("conductor", "high")
        total = corner.radiated + own + abs(corner.reactance) / q
        return 100.0 * chain.conductor.high * corner.growth * corner.state.flow.largest**2 / total

    hot, cold = (max(heat(q, corner) for corner in chain.least) for q in (3000.0, 500.0))
    assert point.warmth.heat.high == pytest.approx(1.01 * hot, rel=1e-6)
    assert hot > 1.3 * cold


@settings(max_examples=15, deadline=None)
@given(st.floats(200.0, 5000.0), st.floats(1.0, 5.0))
def test_a_better_capacitor_never_lowers_the_volts(quality: float, better: float) -> None:
    def volts(likely: float) -> float:
        spread = {"low": likely / 2.0, "likely": likely, "high": likely * 2.0}
        design = design_of(capacitor__series_resistance=None, capacitor__quality_factor=spread)
        return point_of(design).figures.capacitor_peak_voltage.spread.high or 0.0

    assert volts(quality * better) >= volts(quality) * (1.0 - 1e-12)


@pytest.mark.parametrize(("plane", "upright"), [("vertical", 0.8), ("horizontal", 1.0)])
def test_the_scatter_of_measured_convection_is_taken_off_the_hot_end(plane: str, upright: float) -> None:
    """A fifth either way (common practice: 10 to 20 %), upright parts a fifth less besides; nobody credits more."""
    found = warm_of(loop__plane=plane, loop__centre_height="3 m")
    shares = np.broadcast_to(found.surface.convection_share, 3)
    assert shares[2] == pytest.approx(0.8 * upright)
    assert shares[0] == pytest.approx(1.2)
    assert np.all(np.diff(shares) < 0.0)
    assert np.broadcast_to(found.bare.surface.convection_share, 3)[2] == shares[2]


def test_heat_told_at_the_start_of_an_over_is_brought_to_20_degrees() -> None:
    """A resistance that is a fifth higher there, at the conductor's own temperature, is that of a fifth less at 20."""
    warm, cold = replace(body(24.0, inf, 0.0), growth=1.2), body(20.0, inf, 0.0)
    assert warm.temperature() == cold.temperature()
    assert warm_of(loop__conductor__temperature="80 degC").growth == pytest.approx(
        (1.0 + 0.0033 * 60.0) ** 0.5, rel=0.01
    )


def test_what_a_joint_rises_for_each_watt_by_hand() -> None:
    """One over the root of (loss a kelvin, heat conducted, section); 49 MS/m less its scatter, 22 x 1 mm, one side."""
    design = design_of(loop__joint=[JOINT])
    point = point_of(design)
    assert point.chain is not None
    assert point.warmth is not None
    (joint,) = joint_warmth(point.chain, design, point.warmth)
    dull = Surface(0.022, 0.022, 0.0, 1.0, 0.8 * 0.8)
    lost = float(lost_heat(323.15, dull, Surroundings(313.15, float(standard_pressure(2000.0))))) / 10.0
    conducted = 0.8 * 2.44e-8 * 49.3e6 * 0.94 * 313.15
    assert joint.resistance == pytest.approx(1.0 / sqrt(lost * conducted * pi * 1e-3 * 21e-3), rel=0.01)
