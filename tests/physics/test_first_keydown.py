"""The first key-down, the power ladder and the curve of SWR, held against circuit theory, handbooks and hand counts."""

from dataclasses import replace
from itertools import pairwise
from math import ceil, inf, log, sqrt
from pathlib import Path

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given
from hypothesis import strategies as st

import magsafe
from magsafe.analysis import warmth
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.people import from_centre
from magsafe.checks import first_keydown as procedure
from magsafe.checks.cautions import cautions, hot_parts, joint_temperatures, told_hot
from magsafe.checks.ceiling import ceiling
from magsafe.checks.first_keydown import CARRIER, FIRST, cooling_time, first_keydown, settling_time, step_powers
from magsafe.checks.ladder import ladder
from magsafe.checks.sheet import (
    OperatingPointRecord,
    PlaceRecord,
    PowerCeiling,
    SessionExposure,
    SessionPlace,
    SessionRecord,
    Sheet,
    TimeRecord,
)
from magsafe.checks.swr_curve import REACH, swr_curve
from magsafe.design.model import Design, Place
from magsafe.design.reading import parse_design
from magsafe.physics import heat, warming
from magsafe.physics.heat import CEILING, ElectricHeat, absorbed_sunshine, lost_heat
from magsafe.physics.tuned_circuit import detuned_impedance, standing_wave_ratio
from magsafe.physics.warming import temperature_after
from magsafe.words import floor_two_digits

TOUCH = 43.0 + 273.15  # K, ISO 13732-1 (memory), however long a touch lasts
SAMPLES = Path(__file__).parents[2] / "sample_designs"


class Case:
    """A design with its sheet and its transmissions."""

    def __init__(self, design: Design) -> None:
        self.design = design
        self.sheet: Sheet = magsafe.check(design)
        self.points: tuple[OperatingPoint, ...] = tuple(operating_point(design, each) for each in design.transmission)
        self.found = first_keydown(design, self.sheet, self.points)


@pytest.fixture(scope="module")
def quay() -> Case:
    return Case(magsafe.read_design(SAMPLES / "quay_rail.toml"))


@pytest.fixture(scope="module")
def mast() -> Case:
    return Case(magsafe.read_design(SAMPLES / "breakwater_mast.toml"))


@pytest.fixture(scope="module")
def gallery() -> Case:
    return Case(magsafe.read_design(SAMPLES / "lighthouse_gallery.toml"))


def point_of(case: Case, **changes: object) -> OperatingPointRecord:
    return case.sheet.operating_points[0].model_copy(update=changes)


# Standing-wave ratio ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("q", [150.0, 800.0])
def test_the_curve_is_that_of_a_circuit_of_coil_capacitor_and_resistor(q: float) -> None:
    # Textbook circuit theory: the reflection of R + j omega L + 1 / (j omega C) on a line of R.
    frequency, resistance = 7.1e6, 0.1
    omega = 2.0 * np.pi * frequency
    coil = q * resistance / omega
    offset = np.linspace(-20e3, 20e3, 41)
    expected = []
    for each in 2.0 * np.pi * (frequency + offset):
        impedance = complex(resistance, each * coil - omega**2 * coil / each)
        expected.append(float(standing_wave_ratio(impedance, resistance)))
    assert standing_wave_ratio(detuned_impedance(offset, frequency, q), 1.0) == pytest.approx(expected, rel=1e-9)


def test_the_ratio_at_the_half_power_points_is_the_published_one() -> None:
    # Yaghjian & Best 2005 (memory): matched, the half-power points have a ratio of 3 + 2 sqrt 2 = 5.83.
    frequency, q = 7.1e6, 1000.0
    at = np.array([-1.0, 1.0]) * frequency / (q / 2.0) / 2.0
    assert standing_wave_ratio(detuned_impedance(at, frequency, q), 1.0) == pytest.approx(
        3.0 + 2.0 * sqrt(2.0), rel=5e-3
    )


def test_the_curve_is_two_where_the_width_of_the_sheet_ends(quay: Case) -> None:
    for point in quay.sheet.operating_points:
        made = swr_curve(point)
        assert made is not None
        assert made.width == point.figures["swr2_bandwidth"].likely
        assert np.interp([-made.width / 2.0, made.width / 2.0], made.offset, made.likely) == pytest.approx(
            2.0, rel=2e-3
        )
        assert made.offset[[0, -1]] == pytest.approx([-REACH * made.width, REACH * made.width])
        assert made.likely.min() == pytest.approx(1.0, abs=1e-12)
        for narrow, wide in ((made.narrowest, made.likely), (made.likely, made.widest)):
            if narrow is not None and wide is not None:
                assert (narrow >= wide).all()


def test_without_a_q_there_is_no_curve(quay: Case) -> None:
    figures = quay.sheet.operating_points[0].figures
    blank = figures["unloaded_q"].model_copy(update={"low": None, "likely": None, "high": None})
    assert swr_curve(point_of(quay, figures={**figures, "unloaded_q": blank})) is None
    half = figures["unloaded_q"].model_copy(update={"low": None, "high": None})
    made = swr_curve(point_of(quay, figures={**figures, "unloaded_q": half}))
    assert made is not None
    assert (made.narrowest, made.widest) == (None, None)


# Ladder ----------------------------------------------------------------------------------------------------


def test_the_lowest_rung_is_the_ceiling(quay: Case, mast: Case) -> None:
    for case in (quay, mast):
        for index, point in enumerate(case.sheet.operating_points):
            made = ladder(case.sheet, index)
            powers = [each.at_margin for each in made.rungs]
            assert powers == sorted(powers)
            assert [each.id for each in made.rungs if each.lowest] == [point.power_ceiling.held_by]
            assert min(powers) == point.power_ceiling.value
            assert min(each.at_limit for each in made.rungs if each.at_limit) == point.power_ceiling.at_limit
            assert all(each.at_limit is None or each.at_limit >= each.at_margin for each in made.rungs)
            assert made.planned == point.power
            assert made.at_any_power == ()


def test_of_two_that_hold_the_same_power_the_one_is_marked_that_the_ceiling_names(quay: Case) -> None:
    point = quay.sheet.operating_points[0]
    lowest = min((f for f in point.findings if f.power_at_margin), key=lambda f: f.power_at_margin or 0.0)
    for other in ("a.before", "z.after"):
        twin = lowest.model_copy(update={"id": other})
        for order in ((lowest, twin), (twin, lowest)):
            made = ladder(quay.sheet.model_copy(update={"operating_points": (point_of(quay, findings=order),)}), 0)
            assert [each.id for each in made.rungs if each.lowest] == [ceiling(order, 0).held_by]


def test_what_no_power_helps_against_is_no_rung(quay: Case) -> None:
    point = quay.sheet.operating_points[0]
    stopped = point.findings[0].model_copy(
        update={"id": "capacitor.range", "verdict": "stop", "power_at_margin": None, "power_at_limit": None}
    )
    sheet = quay.sheet.model_copy(update={"operating_points": (point_of(quay, findings=(stopped, *point.findings)),)})
    made = ladder(sheet, 0)
    assert made.at_any_power == ("capacitor.range",)
    assert "capacitor.range" not in [each.id for each in made.rungs]


def test_a_rung_with_a_doubt_is_not_known(gallery: Case) -> None:
    made = ladder(gallery.sheet, 0)
    left_out = gallery.sheet.power_ceiling.left_out
    assert {each.id for each in made.rungs if not each.known} <= set(left_out)
    assert any(not each.known for each in made.rungs)


# Steps -----------------------------------------------------------------------------------------------------


@given(
    most=st.floats(1e-3, 5e3, allow_nan=False),
    planned=st.floats(1e-3, 1e4, allow_nan=False),
)
def test_steps_begin_low_and_never_go_beyond_the_ceiling_or_what_is_planned(most: float, planned: float) -> None:
    made = PowerCeiling(
        value=most, at_limit=most, transmission=0, held_by="capacitor.voltage", complete=True, left_out=()
    )
    point = OperatingPointRecord.model_construct(power=planned, power_ceiling=made, findings=(), duty=1.0)
    steps = step_powers(point, None)
    assert 0.0 < steps[0] <= FIRST
    assert max(steps) <= min(most, planned) * (1.0 + 1e-9)
    assert steps[-1] == float(floor_two_digits(min(most, planned)))
    assert all(low < high <= 2.0 * low * (1.0 + 1e-9) for low, high in pairwise(steps))
    # What is taken for the heat of all of them together is more than that.
    assert sum(steps) * CARRIER <= procedure._ALL * steps[-1]


@pytest.mark.parametrize(
    "changes",
    [
        {"value": None, "at_limit": None},
        {"value": 0.0, "at_limit": 0.0},
        {"complete": False, "left_out": ("capacitor.current",)},
    ],
)
def test_no_step_is_told_where_no_power_is_proven(quay: Case, changes: dict[str, object]) -> None:
    held = quay.sheet.operating_points[0].power_ceiling.model_copy(update=changes)
    assert step_powers(point_of(quay, power_ceiling=held), quay.points[0].warmth) == ()


def test_what_each_step_carries_is_what_a_sheet_at_that_power_says() -> None:
    whole = Case(plain_design(capacitor__rated_voltage="30 kV"))
    step = _all_steps(whole)[1]
    less = magsafe.check(
        plain_design(
            capacitor__rated_voltage="30 kV",
            transmission=[{"frequency": "7.1 MHz", "power": f"{step.power} W", "signal_bandwidth": "0.5 kHz"}],
        )
    )
    figures = less.operating_points[0].figures
    assert step.volts == pytest.approx(figures["capacitor_peak_voltage"].high, rel=1e-9)
    assert step.amps == pytest.approx(figures["largest_current"].high, rel=1e-9)


def _all_steps(case: Case) -> tuple[procedure.Step, ...]:
    """Return the steps as they would be with nothing unproven and nothing left out of the ceiling."""
    point = case.sheet.operating_points[0]
    held = point.power_ceiling.model_copy(update={"complete": True, "left_out": ()})
    whole = point.model_copy(update={"power_ceiling": held, "findings": ()})
    sheet = case.sheet.model_copy(update={"operating_points": (whole,), "findings": (), "verdict": "clear"})
    return first_keydown(case.design, sheet, case.points)[0].steps


# Heat ------------------------------------------------------------------------------------------------------


def test_the_creep_of_a_carrier_is_that_of_its_heat_in_handbook_copper(quay: Case) -> None:
    # Copper, CRC Handbook (memory): 8960 kg/m3, 385 J/(kg K), 16.5e-6 1/K; tube of 22 mm and 1 mm wall.
    warm, step = quay.points[0].warmth, quay.found[0].steps[-1]
    assert warm is not None
    assert warm.heat.high is not None
    capacity = 8960.0 * 385.0 * np.pi * 1e-3 * 21e-3
    rise = warm.heat.high * step.power / 100.0 * CARRIER / capacity
    assert step.creep == pytest.approx(7.1e6 * 16.5e-6 * rise, rel=0.05)


def test_times_are_those_of_newtons_cooling_where_heat_is_lost_in_proportion(
    quay: Case, monkeypatch: pytest.MonkeyPatch
) -> None:
    # Newton's law of cooling: from one rise to another after the logarithm of their ratio, in time constants; a
    # twentieth is left after 3. ISO 13732-1 (memory): no burn below 43 degC, however long the touch.
    warm = quay.points[0].warmth
    assert warm is not None
    assert warm.idle < TOUCH
    loss, hottest = 0.7, 370.0  # W/(m K), K
    for module in (heat, warming, warmth):
        monkeypatch.setattr(module, "lost_heat", lambda temperature, *_: loss * (temperature - warm.idle))
    monkeypatch.setattr(warming, "absorbed_sunshine", lambda *_: 0.0)
    constant = warm.capacity / loss
    expected = constant * log((hottest - warm.idle) / (TOUCH - warm.idle))
    assert cooling_time(warm, hottest) == pytest.approx(expected, rel=1e-3)
    assert settling_time(warm) == pytest.approx(3.0 * constant, rel=1e-6)
    assert cooling_time(warm, TOUCH) == cooling_time(warm, warm.idle + 0.5 * (TOUCH - warm.idle)) == 0.0


def test_cooling_in_still_air_is_slower_than_its_start_suggests(quay: Case) -> None:
    warm, hottest = quay.points[0].warmth, quay.found[0].hottest
    assert warm is not None
    assert hottest is not None
    lost = float(np.broadcast_to(lost_heat(hottest, warm.surface, warm.air), 3)[2])
    lost -= float(np.broadcast_to(absorbed_sunshine(warm.surface, warm.air), 3)[2])
    start = warm.capacity * (hottest - warm.idle) / lost
    found = cooling_time(warm, hottest)
    assert found is not None
    assert found > start * log((hottest - warm.idle) / (TOUCH - warm.idle))
    assert quay.found[0].cooling == found


@pytest.mark.parametrize("shone", [False, True])
def test_after_the_time_told_the_end_that_loses_least_has_just_cooled_so_far(shone: bool) -> None:
    """Against the cooling followed in time, of a metal that holds most where none is stated: stainless steel (memory).

    In winter air, so that the sun alone does not burn. 7930 kg/m3 and 500 J/(kg K); a rod of 22 mm.
    """
    design = plain_design(loop__conductor__in_sun=shone, site__air_temperature="-5 degC")
    warm = operating_point(design, design.transmission[0]).warmth
    assert warm is not None
    assert (warm.idle > warm.air_temperature + 5.0) == shone
    taken = cooling_time(warm, 380.0)
    assert taken is not None
    capacity = 7930.0 * 500.0 * np.pi * 0.011**2
    ends = temperature_after(taken, 380.0, ElectricHeat(0.0, 0.0), warm.surface, warm.air, capacity)
    assert float(ends[2]) == pytest.approx(TOUCH, abs=0.02)
    assert float(ends.max()) == float(ends[2])
    assert float(ends.min()) < TOUCH - 1.0


def test_of_a_section_that_is_not_known_no_time_is_told(quay: Case) -> None:
    warm = quay.points[0].warmth
    assert warm is not None
    unknown = replace(warm, capacity=0.0, most_capacity=0.0)
    assert cooling_time(unknown, 370.0) is None
    # Nor of a conductor that has melted.
    assert cooling_time(warm, CEILING - 1.0) is not None
    assert cooling_time(warm, CEILING + 1.0) is None
    assert settling_time(unknown) is None


def test_a_loop_without_a_capacitor_is_not_tuned_where_nothing_is_known_of_it(quay: Case) -> None:
    whole = Case(magsafe.read_design(SAMPLES / "pier_head_square.toml"))
    point = whole.sheet.operating_points[0]
    figures = {
        name: each.model_copy(update={"low": None, "likely": None, "high": None})
        for name, each in point.figures.items()
    }
    sheet = whole.sheet.model_copy(update={"operating_points": (point.model_copy(update={"figures": figures}),)})
    unknown = replace(whole.points[0], chain=None, warmth=None)
    for made in (whole.found[0], first_keydown(whole.design, sheet, (unknown,))[0]):
        assert not made.tuned
    assert quay.found[0].tuned


def test_over_and_pause_are_those_of_the_design(quay: Case) -> None:
    assert (quay.found[0].over, quay.found[0].pause) == (180.0, 180.0)
    assert Case(plain_design()).found[0].over == inf


# People, and what comes first ------------------------------------------------------------------------------


def test_distances_are_those_of_an_unbroken_carrier(mast: Case, quay: Case) -> None:
    pairs = [*zip(mast.found, mast.sheet.operating_points, strict=True)]
    for found, point in [*pairs, *zip(quay.found, quay.sheet.operating_points, strict=True)]:
        for who, far in found.keep_off:
            known = [e.keepout.key_down.any_direction.distance for e in point.exposure if e.who == who and e.keepout]
            assert far == max(each for each in known if each is not None)


def place(carrier: float, verdict: str = "clear") -> PlaceRecord:
    times = (TimeRecord(averaging_time=360.0, keyed=360.0, carrier=carrier),)
    return PlaceRecord.model_validate({"name": "desk", "verdict": verdict, "when": "always", "times": times})


@pytest.mark.parametrize(
    ("carrier", "verdict", "empty", "wait"),
    [
        (360.0, "clear", (), 0.0),  # an unbroken carrier has no limit of time
        (4.94, "clear", (), 360.0),  # 494 J of a carrier at 100 W, and the four steps are 493 J
        (4.92, "clear", ("desk",), 0.0),
        (360.0, "stop", ("desk",), 0.0),
        (360.0, "unproven", ("desk",), 0.0),
        (360.0, "narrow", (), 0.0),
    ],
)
def test_places_that_the_carriers_would_fill_are_left_empty(
    quay: Case, carrier: float, verdict: str, empty: tuple[str, ...], wait: float
) -> None:
    exposed = quay.sheet.operating_points[0].exposure[0].model_copy(update={"places": (place(carrier, verdict),)})
    held = quay.sheet.operating_points[0].power_ceiling.model_copy(update={"value": 23.9, "complete": True})
    point = point_of(quay, exposure=(exposed,), power_ceiling=held)
    point = point.model_copy(update={"findings": ()})
    found = first_keydown(quay.design, quay.sheet.model_copy(update={"operating_points": (point,)}), quay.points[:1])[0]
    assert [each.power for each in found.steps] == [5.0, 8.3, 13.0, 23.0]
    assert found.empty == empty
    assert found.wait == wait


def test_what_stops_and_what_is_unproven_comes_first(mast: Case, gallery: Case, quay: Case) -> None:
    assert {f.verdict for f in mast.found[0].before} == {"stop"}
    assert {f.verdict for f in gallery.found[0].before} == {"unproven"}
    assert quay.found[0].before == ()
    assert not quay.found[0].others


def test_with_a_stop_no_step_is_told(mast: Case, gallery: Case, quay: Case) -> None:
    assert all(each.steps == () for case in (mast, gallery) for each in case.found)
    assert all(point.power_ceiling.value for point in mast.sheet.operating_points)
    assert all(each.steps for each in quay.found)
    # A stop of one transmission leaves none to the others.
    sheet = quay.sheet.model_copy(update={"verdict": "stop"})
    for each in first_keydown(quay.design, sheet, quay.points):
        assert each.others
        assert (each.steps, each.keyed) == ((), ())


# Unbroken carriers -----------------------------------------------------------------------------------------


def beacon_in(mode: str) -> Case:
    """Return the beacon of the samples in another mode, with its wiper the hottest part."""
    text = (SAMPLES / "breakwater_beacon.toml").read_text(encoding="utf-8").replace('"data"', f'"{mode}"')
    return Case(parse_design(text.encode(), "beacon.toml"))


@pytest.fixture(scope="module")
def beacon() -> Case:
    return beacon_in("SSB unprocessed")


def test_carriers_heat_no_joint_more_than_the_mode_may(beacon: Case) -> None:
    # A joint that bears 88 W with a fifth of it as the mean bears an unbroken carrier of a fifth of 88 W.
    steady = beacon_in("data").sheet.operating_points[0]
    wiper = next(f for f in steady.findings if f.id.startswith("joint.heat."))
    assert wiper.power_at_margin is not None
    found = beacon.found[0]
    assert [each.power for each in found.steps] == [5.0, 9.2, 17.0]
    assert found.steps[-1].power <= wiper.power_at_margin
    assert found.keyed[-1] == 60.0
    chain = [found.steps[-1].power, *found.keyed]
    assert all(low < high <= 2.0 * low for low, high in pairwise(chain))


@pytest.mark.parametrize(
    ("name", "held"),
    [
        ("capacitor.heat", True),
        ("capacitor.padding.330-pf.heat", True),
        ("joint.heat.lugs", True),
        ("capacitor.voltage", False),
    ],
)
def test_what_warms_in_seconds_holds_the_carriers_by_the_share_of_the_mode(beacon: Case, name: str, held: bool) -> None:
    point = beacon.sheet.operating_points[0]
    finding = point.findings[0].model_copy(update={"id": name, "power_at_margin": 65.0})
    made = step_powers(point.model_copy(update={"findings": (finding,)}), beacon.points[0].warmth)
    assert made[-1] == (13.0 if held else 60.0)


def test_every_finding_that_is_judged_at_a_mean_power_holds_the_carriers(beacon: Case) -> None:
    """One design with every rating at two duties: where the power moves with the duty, a mean is judged.

    Exposure is not among them: who is near keeps off or leaves.
    """
    part = {
        "capacitance": "1000 pF", "connection": "series", "rated_voltage": "20 kV", "rated_voltage_kind": "peak RF",
        "rated_current": "50 A", "rated_reactive_power": "500 kVA", "rated_dissipation": "50 W",
        "quality_factor": {"low": 500.0, "likely": 1000.0, "high": 2000.0},
    }  # fmt: skip
    lug = {"name": "lug", "count": 2, "kind": "bolted lug", "resistance": "0.5 mohm", "at": "capacitor"}
    rated = {
        "capacitor__rated_dissipation": "60 W", "capacitor__with": [part, part], "loop__joint": [lug],
        "capacitor__series_resistance": None, "capacitor__quality_factor": part["quality_factor"],
    }  # fmt: skip
    tube = {"form": "tube", "outer_diameter": "22 mm", "wall": "1 mm", "material": "copper tube"}
    powers = [
        {f.id: f.power_at_margin for f in sheet.operating_points[0].findings if f.power_at_margin is not None}
        for sheet in (
            magsafe.check(plain_design(**rated, loop__conductor=tube, transmission__0__duty=duty))
            for duty in ("100 %", "20 %")
        )
    ]
    assert powers[0].keys() == powers[1].keys()
    mean = {name for name, power in powers[0].items() if powers[1][name] > 1.01 * power}
    assert mean == {
        "capacitor.heat",
        "capacitor.padding.1000-pf.heat",
        "capacitor.padding.1000-pf-no-2.heat",
        "conductor.temperature",
        "joint.heat.lug",
    }
    point, warm = beacon.sheet.operating_points[0], beacon.points[0].warmth
    assert warm is not None
    thin = replace(warm, capacity=warm.capacity / 1e4)
    for name in powers[0]:
        finding = point.findings[0].model_copy(update={"id": name, "power_at_margin": 65.0})
        made = step_powers(point.model_copy(update={"findings": (finding,)}), thin)
        assert (made[-1] < 15.0) == (name in mean), name


def test_a_tune_up_stronger_than_the_mode_counts_as_its_share(beacon: Case) -> None:
    point, warm = beacon.sheet.operating_points[0], beacon.points[0].warmth
    assert warm is not None
    finding = point.findings[0].model_copy(update={"id": "capacitor.heat", "power_at_margin": 65.0})
    tuned = replace(warm, tune_share=0.5, tune_time=20.0)
    assert step_powers(point.model_copy(update={"findings": (finding,)}), tuned)[-1] == 32.0


def test_carriers_warm_a_thin_conductor_no_more_than_the_mode_may(beacon: Case) -> None:
    point, warm = beacon.sheet.operating_points[0], beacon.points[0].warmth
    assert warm is not None
    finding = point.findings[0].model_copy(update={"id": "conductor.temperature", "power_at_margin": 65.0})
    point = point.model_copy(update={"findings": (finding,)})
    thick, thin = warm, replace(warm, capacity=warm.capacity / 1e4)
    assert step_powers(point, thick)[-1] == 60.0
    # What holds next to no heat is as warm at once as a carrier without end makes it: 65 W of a fifth.
    assert step_powers(point, thin)[-1] == pytest.approx(13.0, abs=1.0)


def test_no_step_is_more_than_doubled_and_they_are_even() -> None:
    made = PowerCeiling(value=98.0, at_limit=98.0, transmission=0, held_by=None, complete=True, left_out=())
    point = OperatingPointRecord.model_construct(power=98.0, power_ceiling=made, findings=(), duty=1.0)
    ratios = [high / low for low, high in pairwise(step_powers(point, None))]
    assert max(ratios) <= 2.0
    assert max(ratios) / min(ratios) < 1.1


def test_an_am_carrier_is_a_quarter_of_the_crest(quay: Case) -> None:
    # Textbook: at full modulation the crest of the volts is twice the carrier's, that of the power four times.
    sheet = quay.sheet.model_copy(update={"operating_points": (point_of(quay, mode="AM"),)})
    found = first_keydown(quay.design, sheet, quay.points[:1])[0]
    assert found.am_carrier == pytest.approx(found.keyed[-1] / (1.0 + 1.0) ** 2)
    assert quay.found[0].am_carrier is None


def test_a_metal_that_is_not_stated_moves_by_the_most_of_the_table() -> None:
    # Copper, zinc and aluminium, handbooks (memory): linear expansion, density, specific heat.
    rows = ((16.5e-6, 8940.0 * 385.0), (30.2e-6, 7140.0 * 388.0), (23.4e-6, 2700.0 * 897.0))
    case = Case(plain_design(capacitor__rated_voltage="30 kV"))
    warm, step = case.points[0].warmth, _all_steps(case)[-1]
    assert warm is not None
    assert warm.heat.high is not None
    assert step.creep is not None
    held = warm.heat.high * step.power / 100.0 * CARRIER / (np.pi * 0.011**2)
    assert all(step.creep >= 7.1e6 * expansion * held / capacity for expansion, capacity in rows)


# Hot parts -------------------------------------------------------------------------------------------------


def test_hands_wait_for_the_hottest_part(quay: Case) -> None:
    for found, point, made in zip(quay.found, quay.sheet.operating_points, quay.points, strict=True):
        warm = made.warmth
        assert warm is not None
        assert found.hottest is not None
        clamps = next(f for f in point.findings if f.id == "joint.heat.capacitor-clamps")
        assert clamps.value is not None
        assert found.hot[0].name == "joint capacitor-clamps"
        assert found.hot[0].temperature >= warm.air_temperature + (clamps.value.high or 0.0)
        assert found.hot[0].temperature > found.hottest >= (warm.temperature().high or 0.0)


def test_a_joint_that_carriers_heat_more_than_the_plan_is_told_hotter(beacon: Case) -> None:
    point, warm = beacon.sheet.operating_points[0], beacon.points[0].warmth
    assert warm is not None
    wiper = next(f for f in point.findings if f.id.startswith("joint.heat."))
    assert wiper.value is not None
    # 17 W unbroken over a fifth of 60 W.
    expected = warm.air_temperature + (wiper.value.high or 0.0) * 17.0 / 12.0
    assert beacon.found[0].hot[0].temperature >= expected


def test_where_the_sun_alone_burns_no_time_is_told(quay: Case) -> None:
    warm = quay.points[0].warmth
    assert warm is not None
    hot = replace(warm, air=replace(warm.air, temperature=318.15))
    assert hot.idle >= TOUCH
    assert cooling_time(hot, 350.0) is None


def test_the_caution_names_what_is_hot(quay: Case) -> None:
    findings = quay.sheet.all_findings()
    told = next(each for each in cautions(quay.points, tuned=True, findings=findings) if each.startswith("Hot parts"))
    air = max(point.warmth.air_temperature for point in quay.points if point.warmth is not None)
    rises = [f.value.high or 0.0 for f in findings if f.id == "joint.heat.capacitor-clamps" and f.value is not None]
    assert f"joint capacitor-clamps {ceil(air + max(rises) - 273.15)} degC" in told
    assert "measure before a hand touches it" in told
    conductor = hot_parts(TOUCH + 1.0, [("joint wiper", TOUCH - 1.0)])
    assert [each.name for each in conductor] == ["conductor"]
    clamps = next(f for f in findings if f.id == "joint.heat.capacitor-clamps")
    assert list(joint_temperatures([clamps.model_copy(update={"value": None})], 300.0)) == [
        ("joint capacitor-clamps", inf)
    ]
    twice = hot_parts(TOUCH - 1.0, [("joint wiper", TOUCH + 9.0), ("joint wiper", TOUCH + 1.0)])
    assert [each.temperature for each in twice] == [TOUCH + 9.0]
    unknown = hot_parts(TOUCH - 1.0, [("joint wiper", inf)])
    assert told_hot(unknown) == "joint wiper a temperature that is not known"


# Places ----------------------------------------------------------------------------------------------------


def test_a_place_nearer_than_the_distance_told_is_left_empty(quay: Case) -> None:
    widened = []
    for exposed in quay.sheet.operating_points[0].exposure:
        assert exposed.keepout is not None
        key_down = exposed.keepout.key_down
        further = key_down.any_direction.model_copy(update={"distance": 500.0})
        keepout = exposed.keepout.model_copy(
            update={"key_down": key_down.model_copy(update={"any_direction": further})}
        )
        widened.append(exposed.model_copy(update={"keepout": keepout}))
    sheet = quay.sheet.model_copy(update={"operating_points": (point_of(quay, exposure=tuple(widened)),)})
    found = first_keydown(quay.design, sheet, quay.points[:1])[0]
    assert {each.name for each in quay.design.place} <= set(found.empty)


def test_places_while_tuning_and_of_a_session_are_left_empty(quay: Case) -> None:
    tuning = place(360.0).model_copy(update={"name": "tuner", "when": "tuning"})
    exposed = quay.sheet.operating_points[0].exposure[0].model_copy(update={"places": (tuning,)})
    point = point_of(quay, exposure=(exposed,))
    places = tuple(SessionPlace(name=name, verdict=name) for name in ("narrow", "clear"))
    worked = SessionExposure(rule="us-fcc", edition="", who="public", keepout=None, places=places)
    session = SessionRecord(number=1, name="both", transmissions=(0,), exposure=(worked,))
    sheet = quay.sheet.model_copy(update={"operating_points": (point,), "sessions": (session,)})
    assert set(first_keydown(quay.design, sheet, quay.points[:1])[0].empty) == {"tuner", "narrow"}
    elsewhere = session.model_copy(update={"transmissions": (1,)})
    sheet = sheet.model_copy(update={"sessions": (elsewhere,)})
    assert set(first_keydown(quay.design, sheet, quay.points[:1])[0].empty) == {"tuner"}


def test_a_place_is_as_far_as_the_nearest_of_who_is_there() -> None:
    design = plain_design(loop__centre_height="3 m")
    seat = Place.model_construct(name="seat", who="public", along_axis=4.3, in_plane=3.3)
    # Column of 0.6 m a side and 2 m tall, beside a centre 1 m above its top: sides of 4, 3 and 1 m.
    assert from_centre(design, seat) == pytest.approx(sqrt(26.0))
    assert from_centre(design, seat.model_copy(update={"height": 3.0})) == pytest.approx(sqrt(4.3**2 + 3.3**2))
    fence = Place.model_construct(name="fence", who="public", fence=5.0)
    assert from_centre(design, fence) == pytest.approx(sqrt(26.0))


@pytest.mark.parametrize(("carrier", "share", "again"), [(9.8, 0.0, 360.0), (9.9, 0.0, 0.0), (98.0, 0.46, 360.0)])
def test_steps_that_fill_half_of_the_window_are_waited_for(
    quay: Case, carrier: float, share: float, again: float
) -> None:
    # Four steps of 493 J together; 9.86 s of a carrier at 100 W hold twice that, 98 s twenty times.
    judged = place(carrier).model_copy(update={"share_of_limit": share})
    exposed = quay.sheet.operating_points[0].exposure[0].model_copy(update={"places": (judged,)})
    held = quay.sheet.operating_points[0].power_ceiling.model_copy(update={"value": 23.9, "complete": True})
    point = point_of(quay, exposure=(exposed,), power_ceiling=held, findings=())
    sheet = quay.sheet.model_copy(update={"operating_points": (point,)})
    assert first_keydown(quay.design, sheet, quay.points[:1])[0].again == again


def test_more_procedures_in_a_row_leave_less_to_each(quay: Case) -> None:
    judged = place(14.0)  # 493 J of 1400 J: a third and a bit more
    exposed = quay.sheet.operating_points[0].exposure[0].model_copy(update={"places": (judged,)})
    held = quay.sheet.operating_points[0].power_ceiling.model_copy(update={"value": 23.9, "complete": True})
    point = point_of(quay, exposure=(exposed,), power_ceiling=held, findings=())
    for count, again in ((1, 0.0), (2, 0.0), (3, 360.0)):
        sheet = quay.sheet.model_copy(update={"operating_points": (point,) * count})
        assert first_keydown(quay.design, sheet, (quay.points[0],) * count)[0].again == again
