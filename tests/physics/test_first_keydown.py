"""The first key-down, the power ladder and the curve of SWR, held against circuit theory, handbooks and hand counts."""

from dataclasses import replace
from itertools import pairwise
from math import inf, log, sqrt
from pathlib import Path

import numpy as np
import pytest
from designs import plain_design
from hypothesis import given
from hypothesis import strategies as st

import magsafe
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.checks import first_keydown as procedure
from magsafe.checks.ceiling import ceiling
from magsafe.checks.first_keydown import CARRIER, FIRST, cooling_time, first_keydown, settling_time, step_powers
from magsafe.checks.ladder import ladder
from magsafe.checks.sheet import OperatingPointRecord, PlaceRecord, PowerCeiling, Sheet, TimeRecord
from magsafe.checks.swr_curve import REACH, series_swr, swr_curve
from magsafe.design.model import Design
from magsafe.physics.heat import absorbed_sunshine, lost_heat
from magsafe.physics.tuned_circuit import standing_wave_ratio
from magsafe.words import floor_two_digits

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
        expected.append(standing_wave_ratio(impedance, resistance))
    assert series_swr(offset, frequency, q) == pytest.approx(expected, rel=1e-9)


def test_the_ratio_at_the_half_power_points_is_the_published_one() -> None:
    # Yaghjian & Best 2005 (memory): matched, the half-power points have a ratio of 3 + 2 sqrt 2 = 5.83.
    frequency, q = 7.1e6, 1000.0
    at = np.array([-1.0, 1.0]) * frequency / (q / 2.0) / 2.0
    assert series_swr(at, frequency, q) == pytest.approx(3.0 + 2.0 * sqrt(2.0), rel=5e-3)


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
    point = OperatingPointRecord.model_construct(power=planned, power_ceiling=made)
    steps = step_powers(point)
    assert 0.0 < steps[0] <= FIRST
    assert max(steps) <= min(most, planned) * (1.0 + 1e-9)
    assert steps[-1] == float(floor_two_digits(min(most, planned)))
    assert all(low < high <= 2.5 * low for low, high in pairwise(steps))


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
    assert step_powers(point_of(quay, power_ceiling=held)) == ()


def test_what_each_step_carries_is_what_a_sheet_at_that_power_says() -> None:
    whole = Case(plain_design(capacitor__rated_voltage="30 kV"))
    step = next(each for each in whole.found[0].steps or _all_steps(whole) if each.power == 10.0)
    less = magsafe.check(
        plain_design(
            capacitor__rated_voltage="30 kV",
            transmission=[{"frequency": "7.1 MHz", "power": "10 W", "signal_bandwidth": "0.5 kHz"}],
        )
    )
    figures = less.operating_points[0].figures
    assert step.volts == pytest.approx(figures["capacitor_peak_voltage"].high, rel=1e-9)
    assert step.amps == pytest.approx(figures["largest_current"].high, rel=1e-9)


def _all_steps(case: Case) -> tuple[procedure.Step, ...]:
    """Return the steps as they would be with nothing left out of the ceiling."""
    point = case.sheet.operating_points[0]
    whole = point.model_copy(update={"power_ceiling": point.power_ceiling.model_copy(update={"complete": True})})
    sheet = case.sheet.model_copy(update={"operating_points": (whole,)})
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
    # Newton's law of cooling: a tenth of the rise is left after ln 10 time constants, a twentieth after 3.
    warm = quay.points[0].warmth
    assert warm is not None
    loss = 0.7  # W/(m K)
    monkeypatch.setattr(procedure, "lost_heat", lambda temperature, *_: loss * (temperature - warm.idle))
    monkeypatch.setattr(procedure, "absorbed_sunshine", lambda *_: 0.0)
    assert cooling_time(warm) == pytest.approx(log(10.0) * warm.capacity / loss, rel=1e-3)
    assert settling_time(warm) == pytest.approx(3.0 * warm.capacity / loss, rel=1e-6)


def test_cooling_in_still_air_is_slower_than_its_start_suggests(quay: Case) -> None:
    warm = quay.points[0].warmth
    assert warm is not None
    hottest = warm.temperature().high
    assert hottest is not None
    start = warm.capacity * (hottest - warm.idle) / float(procedure._lost_at_worst(warm, np.array([hottest]))[0])
    found = cooling_time(warm)
    assert found is not None
    assert found > log(10.0) * start


def test_cooling_takes_the_end_that_loses_least_and_the_sun(quay: Case) -> None:
    warm = quay.points[0].warmth
    assert warm is not None
    ends = np.broadcast_to(lost_heat(warm.idle + 30.0, warm.surface, warm.air), 3)
    assert ends.min() < 0.95 * ends.max()
    assert procedure._lost_at_worst(warm, np.array([warm.idle + 30.0]))[0] == pytest.approx(ends.min(), rel=1e-9)
    design = plain_design(loop__conductor__in_sun=True)
    sunny = operating_point(design, design.transmission[0]).warmth
    assert sunny is not None
    assert sunny.idle > sunny.air_temperature + 5.0
    brought = absorbed_sunshine(sunny.surface, sunny.air)
    # Before the first over the sun brings what the conductor loses.
    assert abs(procedure._lost_at_worst(sunny, np.array([sunny.idle]))[0]) < 0.01 * float(np.max(brought))


def test_of_a_section_that_is_not_known_no_time_is_told(quay: Case) -> None:
    warm = quay.points[0].warmth
    assert warm is not None
    unknown = replace(warm, capacity=0.0)
    assert cooling_time(unknown) is None
    assert settling_time(unknown) is None


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
        (3.81, "clear", (), 360.0),  # 381 J of a carrier at 100 W, and the three steps are 380 J
        (3.79, "clear", ("desk",), 0.0),
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
    found = first_keydown(quay.design, quay.sheet.model_copy(update={"operating_points": (point,)}), quay.points[:1])[0]
    assert [each.power for each in found.steps] == [5.0, 10.0, 23.0]
    assert found.empty == empty
    assert found.wait == wait


def test_what_stops_and_what_is_unproven_comes_first(mast: Case, gallery: Case, quay: Case) -> None:
    stopped = mast.found[0]
    assert {f.verdict for f in stopped.before} == {"stop"}
    assert stopped.steps[-1].power <= (mast.sheet.operating_points[0].power_ceiling.value or 0.0)
    assert {f.verdict for f in gallery.found[0].before} == {"unproven"}
    assert gallery.found[0].steps == ()
    assert quay.found[0].before == ()
    assert not quay.found[0].others


def test_a_stop_elsewhere_is_told_too(quay: Case) -> None:
    sheet = quay.sheet.model_copy(update={"verdict": "stop"})
    assert all(each.others for each in first_keydown(quay.design, sheet, quay.points))
