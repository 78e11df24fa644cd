"""What a measured Q decides: the resistance, and with it volts, amps, fields, efficiency, heat and the ceiling.

Q by the slope of the reactance is Yaghjian & Best 2005 (memory); the rest is Ohm's law and the conservation of power,
worked by hand from figures that no measurement moves.
"""

from dataclasses import fields, replace
from functools import cache
from math import log, sqrt
from typing import Any

import pytest
from designs import measured_changes, plain_design
from hypothesis import given, settings
from hypothesis import strategies as st

from magsafe.analysis.capacitor_heat import heat_of
from magsafe.analysis.chain import CARRIED, VOLTAGE_ERROR, Chain, chain, least_quality
from magsafe.analysis.figures import figures_of
from magsafe.analysis.operating_point import OperatingPoint, operating_point, power_at_loop
from magsafe.analysis.placing import placings
from magsafe.analysis.sky import sky
from magsafe.checks.as_built import computed_quality
from magsafe.checks.assumptions import assumptions
from magsafe.checks.ground import ground
from magsafe.checks.loop import methods_agree
from magsafe.checks.run import check
from magsafe.design.as_built import NEAR
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.spread import Spread

Changes = dict[str, Any]

POWER = 100.0  # of the plain design [W]; its line loses nothing
UP: Changes = {"loop__centre_height": "1.5 m"}
STUB: Changes = {
    "kind": "coaxial stub", "dielectric": "polyethylene", "inner_diameter": "2 mm", "outer_diameter": "7 mm",
    "length": "2 m",
}  # fmt: skip
PADDED: Changes = {
    "capacitor__series_resistance": None,
    "capacitor__with": [
        {"connection": "parallel", "capacitance": "50 pF", "quality_factor": {"low": 500, "likely": 1000, "high": 2e3}},
        {"connection": "series", "capacitance": "500 pF"},
    ],
}
TURNS: Changes = {"loop__turns": 2, "loop__turn_spacing": "60 mm", "loop__diameter": "0.6 m"}
TYPICAL: Changes = {"capacitor__series_resistance": None}
CASES: dict[str, Changes] = {
    "free space": {},
    "typical losses": TYPICAL,
    "plane": {**UP, "site__ground": "perfect"},
    "soil": {**UP, "site__ground": "average"},
    "any ground": {**UP, "site__ground": None},
    "any height": {"site__ground": "average"},
    "nothing stated": {"site__ground": None},
    "turns": TURNS,
    "stub": {"capacitor": STUB},
    "padding": PADDED,
}
EACH = pytest.mark.parametrize("case", [case for case in CASES if case != "any ground"])  # slow, and near others


@cache
def plain(case: str) -> OperatingPoint:
    """Return a case as its parts make it."""
    return _point(CASES[case])


@cache
def measured(case: str, low: float, likely: float, high: float) -> OperatingPoint:
    """Return a case with a Q measured of it."""
    changes = measured_changes(likely, **CASES[case])
    changes["measured"][0]["unloaded_q"] = {"low": low, "likely": likely, "high": high}
    return _point(changes)


def _point(changes: Changes) -> OperatingPoint:
    design = plain_design(**changes)
    return operating_point(design, design.transmission[0])


def of(point: OperatingPoint) -> Chain:
    assert point.chain is not None
    return point.chain


def with_q(case: str, q: float) -> Chain:
    """Return a case's chain with a Q, all else as it was solved."""
    return replace(of(plain(case)), measured=Spread.exact(q))


def likely(point: OperatingPoint, name: str) -> float:
    value = getattr(point.figures, name).spread.likely
    assert isinstance(value, float)
    return value


def high(point: OperatingPoint, name: str) -> float:
    value = getattr(point.figures, name).spread.high
    assert isinstance(value, float)
    return value


def computed_q(case: str) -> float:
    return likely(plain(case), "unloaded_q")


# The resistance --------------------------------------------------------------------------------------------


@EACH
def test_the_q_that_was_measured_is_the_figure_and_half_the_slope_over_it_the_resistance(case: str) -> None:
    """Q R is half of the slope, which no loss changes: so R goes as one over Q."""
    q = 0.9 * computed_q(case)
    found = measured(case, 0.9 * q, q, 1.2 * q)
    told, error = found.figures.unloaded_q.spread, of(found).quality_error
    assert of(found).measured == Spread(0.9 * q, q, 1.2 * q)
    assert told.likely == pytest.approx(q, rel=1e-12)
    assert told.low == pytest.approx(0.9 * q * (1.0 - error), rel=1e-9)
    assert told.high == pytest.approx(1.2 * q * (1.0 + error), rel=1e-9)
    half_slope = computed_q(case) * likely(plain(case), "total_resistance")
    assert likely(found, "total_resistance") == pytest.approx(half_slope / q, rel=1e-9)
    added = half_slope / q - likely(plain(case), "total_resistance")
    assert likely(found, "unexplained_resistance") == pytest.approx(added, rel=1e-9)


@pytest.mark.parametrize("case", ["free space", "soil", "turns"])
def test_half_of_the_slope_is_that_of_the_reactance_itself(case: str) -> None:
    """Solved at two frequencies a thousandth apart: (f dX/df + X)/2 over Q, for a capacitor without a steepness."""
    q = 1000.0
    found, frequency = measured(case, q, q, q), plain(case).transmission.frequency
    reactances = []
    for factor in (0.999, 1.001):
        moved = _point({**CASES[case], "transmission__0__frequency": f"{frequency * factor / 1e6:.9f} MHz"})
        reactances.append(likely(moved, "port_reactance"))
    slope = (reactances[1] - reactances[0]) / 0.002
    half = 0.5 * (slope + likely(plain(case), "port_reactance"))
    assert likely(found, "total_resistance") == pytest.approx(half / q, rel=2e-4)


def test_a_stub_adds_the_slope_of_its_own_reactance() -> None:
    """Of an open line half of its own slope counts instead of half of X: the lumped capacitor's Q times R is less."""
    lumped, line = plain("free space"), plain("stub")
    assert of(line).capacitor_steepness > 1.1
    more = 0.5 * (of(line).capacitor_steepness - 1.0) * likely(line, "port_reactance")
    q = 400.0
    both = [likely(measured(case, q, q, q), "total_resistance") for case in ("free space", "stub")]
    assert (both[1] - both[0]) * q == pytest.approx(more, rel=1e-9)
    assert likely(lumped, "port_reactance") == pytest.approx(likely(line, "port_reactance"))


@pytest.mark.parametrize("case", CASES)
def test_a_q_as_computed_changes_no_likely_figure(case: str) -> None:
    """But what is unexplained, which is nothing; over a plane the efficiency is of the image's current (1 in 8000)."""
    found = measured(case, 0.98 * computed_q(case), computed_q(case), 1.02 * computed_q(case))
    names = [field.name for field in fields(found.figures) if field.name != "unexplained_resistance"]
    both = {name: [getattr(each.figures, name).spread.likely for each in (plain(case), found)] for name in names}
    assert sum(values[0] is not None for values in both.values()) > 20
    for name, (before, after) in both.items():
        rough = 3e-4 if (case, name) == ("plane", "conductor_efficiency") else 1e-6
        assert (before is None) == (after is None), name
        assert after is None or after == pytest.approx(before, rel=rough), name
    assert likely(found, "unexplained_resistance") == pytest.approx(0.0, abs=1e-12)
    assert plain(case).figures.unexplained_resistance.spread.likely is None


# Volts, amps and fields ------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", ["free space", "typical losses", "turns", "stub"])
def test_volts_and_fields_are_those_of_the_upper_end_by_hand(case: str) -> None:
    """V = X sqrt(2 P Q / half slope), the square of the current for a watt Q / half slope, whatever the port's gap.

    A capacitance across the port raises X by a factor and half of the slope by its square; a stub's part by itself.
    """
    q, top = 0.9 * computed_q(case), 1.5 * computed_q(case)
    found = measured(case, 0.8 * q, q, top)
    half_slope = computed_q(case) * likely(plain(case), "total_resistance")
    reactance = likely(found, "port_reactance")
    volts = [reactance * sqrt(2.0 * POWER * each / half_slope) for each in (q, top)]
    assert likely(found, "capacitor_peak_voltage") == pytest.approx(volts[0], rel=1e-9)
    wide = 0.02 if case == "stub" else 1e-9
    error = 1.0 + of(found).voltage_error
    assert high(found, "capacitor_peak_voltage") == pytest.approx(volts[1] * error, rel=wide)
    assert found.bare_voltage == pytest.approx(volts[1] * error, rel=wide)
    assert likely(found, "capacitor_rms_current") == pytest.approx(sqrt(POWER * q / half_slope), rel=1e-9)
    for each in found.ground_cases:
        assert each.square == pytest.approx(top / half_slope, rel=wide)
        assert each.bare_square == pytest.approx(top / half_slope, rel=wide)
        assert each.likely_square == pytest.approx(q / half_slope, rel=1e-9)


@EACH
def test_twice_the_upper_end_is_twice_the_power_in_volts_amps_and_fields(case: str) -> None:
    """Every dangerous end has the resistance of the upper end of Q; no likely value has."""
    q, all_of_it = 0.9 * computed_q(case), 1.1 * computed_q(case)
    once, twice = (measured(case, 0.9 * q, q, top) for top in (all_of_it, 2.0 * all_of_it))
    for name in ("capacitor_peak_voltage", "capacitor_rms_current", "largest_current"):
        assert high(twice, name) == pytest.approx(sqrt(2.0) * high(once, name), rel=1e-9)
        assert likely(twice, name) == pytest.approx(likely(once, name), rel=1e-12)
        least = [getattr(each.figures, name).spread.low for each in (once, twice)]
        assert least[0] == least[1]
    for found, factor in ((twice, 2.0), (once, 1.0)):
        assert found.bare_voltage == pytest.approx(sqrt(factor) * (once.bare_voltage or 0.0), rel=1e-9)
        assert found.bare_current == pytest.approx(sqrt(factor) * (once.bare_current or 0.0), rel=1e-9)
        for one, other in zip(once.ground_cases, found.ground_cases, strict=True):
            assert other.square == pytest.approx(factor * one.square, rel=1e-9)
            assert other.bare_square == pytest.approx(other.square, rel=1e-12)
            assert other.likely_square == pytest.approx(one.likely_square, rel=1e-12)


@EACH
def test_a_q_below_all_that_the_parts_make_takes_nothing_off_volts_amps_and_fields(case: str) -> None:
    """A line that was not unfolded or a bad calibration reads low as well, so the parts' own bare end stays."""
    before = plain(case)
    q = 0.3 * least_quality(of(before))
    found = measured(case, 0.9 * q, q, 1.1 * q)
    assert of(found).read == Spread(0.9 * q, q, 1.1 * q)
    assert likely(found, "unloaded_q") == pytest.approx(q, rel=1e-12)
    assert (found.bare_voltage or 0.0) >= (before.bare_voltage or 0.0) * (1.0 - 1e-9)
    assert (found.bare_current or 0.0) >= (before.bare_current or 0.0) * (1.0 - 1e-9)
    for name in ("capacitor_peak_voltage", "capacitor_rms_current", "largest_current"):
        assert high(found, name) >= high(before, name) * (1.0 - 1e-9)
    for one, other in zip(before.ground_cases, found.ground_cases, strict=True):
        assert other.bare_square >= one.bare_square * (1.0 - 1e-9)


def test_a_cold_day_counts_for_the_conductor_of_a_measured_loop() -> None:
    """Copper loses 0.39 % a kelvin (common practice): its loss goes as the root, and its share of Q with it."""
    warm = _point({**measured_changes(2900.0)})
    cold = _point({**measured_changes(2900.0, site__air_temperature="-20 degC")})
    assert warm.chain is not None
    assert cold.chain is not None
    made = warm.chain
    share = made.conductor.at("likely", made.likely) / made.resistance_of_parts("likely", made.likely)
    kept = sqrt(1.0 - 0.0039 * 40.0)
    ratio = (cold.chain.read or Spread.exact(0.0)).high / (made.read or Spread.exact(0.0)).high  # type: ignore[operator]
    assert ratio == pytest.approx(1.0 / (1.0 - share * (1.0 - kept)), rel=0.01)
    assert ratio > 1.01


@EACH
def test_a_dangerous_end_is_not_below_the_likely_value_times_the_root_of_the_upper_end(case: str) -> None:
    q = computed_q(case)
    found = measured(case, 0.9 * q, q, 1.1 * q)
    for name in ("capacitor_peak_voltage", "capacitor_rms_current", "largest_current"):
        assert high(found, name) >= sqrt(1.1) * likely(found, name) * (1.0 + VOLTAGE_ERROR) * (1.0 - 1e-9)


# Where the power goes --------------------------------------------------------------------------------------


@pytest.mark.parametrize("case", ["free space", "typical losses", "plane", "soil", "turns", "stub", "padding"])
@pytest.mark.parametrize("factor", [0.5, 0.9])
def test_what_goes_in_is_radiated_given_to_the_ground_or_lost(case: str, factor: float) -> None:
    """The conductor's efficiency by hand: radiation over that and what the total leaves of radiation and ground."""
    q = factor * computed_q(case)
    found = measured(case, q, q, q)
    total, radiated = likely(found, "total_resistance"), likely(found, "radiation_resistance")
    above = likely(found, "ground_resistance")
    lost = total - radiated - above
    rough = 1e-3 if case == "plane" else 1e-6
    assert likely(found, "conductor_efficiency") == pytest.approx(radiated / (radiated + lost), rel=rough)
    assert likely(found, "capacitor_rms_current") ** 2 * total == pytest.approx(POWER, rel=1e-9)
    sky_power = likely(found, "overall_efficiency") / likely(plain(case), "overall_efficiency")
    if "site__ground" in CASES[case]:
        # The same current sends the same into the sky; the loop takes what the resistance says.
        assert sky_power == pytest.approx(factor, rel=1e-6)
    else:
        assert likely(found, "overall_efficiency") == pytest.approx(likely(found, "conductor_efficiency"), rel=1e-12)


@EACH
@pytest.mark.parametrize("factor", [1.0, 0.5])
def test_likely_heat_and_radiation_are_the_power_less_what_no_part_explains(case: str, factor: float) -> None:
    made = with_q(case, factor * computed_q(case))
    heat = sum(made.heat_spread(part).likely or 0.0 for part in made.losses)
    away = made.current("likely", made.likely, POWER) ** 2 * made.likely.radiated
    share = made.unexplained("likely", made.likely) / made.resistance("likely", made.likely)
    assert share == pytest.approx(1.0 - factor, abs=1e-9)
    assert heat + away == pytest.approx(POWER * (1.0 - share), rel=1e-9)


@EACH
@pytest.mark.parametrize("q", [50.0, 900.0, 20e3])
def test_no_part_takes_more_than_the_power(case: str, q: float) -> None:
    """Even where the Q is higher than the parts allow."""
    made = with_q(case, q)
    most = POWER * (1.0 + 2.0 * VOLTAGE_ERROR) * (1.0 + 1e-9)
    capacitor = [made.capacitor, *made.padding]
    for found in (*(made.heat_spread(part) for part in made.losses), heat_of(made, capacitor)):
        assert 0.0 <= (found.low or 0.0) <= (found.likely or 0.0) <= (found.high or 0.0) <= most


@pytest.mark.parametrize("case", ["plane", "soil"])
def test_at_another_height_the_loop_keeps_its_losses_and_not_its_q(case: str) -> None:
    """With the Q that is computed other heights and planes come out as without; with a poorer one none sends more.

    The losses by hand: what half of the Q adds to the resistance, it adds at every height.
    """
    design = plain_design(**CASES[case])
    before, same, poorer = (
        placings(design, each)
        for each in (of(plain(case)), with_q(case, computed_q(case)), with_q(case, 0.5 * computed_q(case)))
    )
    assert len(before) > 3
    added = likely(plain(case), "total_resistance")
    for one, two, three in zip(before, same, poorer, strict=True):
        assert two.efficiency == pytest.approx(one.efficiency, rel=5e-3)
        assert (two.voltage or 0.0) == pytest.approx(one.voltage or 0.0, rel=5e-3)
        resistance = 2.0 * POWER * (likely(plain(case), "port_reactance") / (one.voltage or 1.0)) ** 2
        assert three.efficiency == pytest.approx(one.efficiency * resistance / (resistance + added), rel=2e-2)
        assert three.efficiency < one.efficiency


@pytest.mark.parametrize("case", ["plane", "soil", "free space"])
def test_a_q_higher_than_the_loop_can_have_sends_no_more_than_all(case: str) -> None:
    """Such a reading is a stop; until then no figure may break down. Volts and amps are told by it all the same."""
    found = measured(case, 20e3, 20e3, 20e3)
    assert likely(found, "total_resistance") < of(found).likely.radiated or case == "free space"
    assert likely(found, "overall_efficiency") <= 1.0
    assert high(found, "overall_efficiency") <= 1.0
    assert all(each.efficiency <= 1.01 for each in placings(plain_design(**CASES[case]), of(found)))
    assert likely(found, "unloaded_q") == pytest.approx(20e3)
    both = [sky(with_q(case, q)) for q in (20e3, 100e3)]
    if both[0] is not None and both[1] is not None:
        assert both[0].gain.high == pytest.approx(both[1].gain.high)


# What a measurement is worth -------------------------------------------------------------------------------


def test_a_narrow_measurement_raises_the_ceiling_and_never_above_its_upper_end() -> None:
    """Volts at the ceiling, by hand from the upper end of Q, keep the margin; without a record typical losses do not.

    The rated 15 kV peak is divided by the margin of 1.5; volts go as the root of the power.
    """
    q = computed_q("typical losses")
    without = check(plain_design(**TYPICAL)).power_ceiling.value
    half_slope = q * likely(plain("typical losses"), "total_resistance")
    reactance = likely(plain("typical losses"), "port_reactance")
    for spread in (0.01, 0.05, 0.2):
        changes = measured_changes(q, spread, **TYPICAL)
        found = check(plain_design(**changes)).power_ceiling
        assert found.value is not None
        volts = reactance * sqrt(2.0 * found.value * q * (1.0 + spread) / half_slope)
        assert volts <= 15e3 / 1.5
        assert without is not None
        assert found.value > without


def test_the_second_opinion_and_the_height_do_not_ask_what_was_measured() -> None:
    """The closed forms judge the parts; whether soil is computed so low does not hang on a Q."""
    for case, q in (("free space", 700.0), ("soil", 700.0), ("turns", 9000.0)):
        found = measured(case, q, q, q)
        assert found.opinion == plain(case).opinion
        assert methods_agree(found) == methods_agree(plain(case))
    changes = {**CASES["soil"], "loop__centre_height": "0.6 m"}
    for given_changes in (CASES["soil"], changes):
        plain_one, design = _point(given_changes), plain_design(**given_changes)
        with_q = measured_changes(700.0, **given_changes)
        before, after = ground(design, plain_one), ground(plain_design(**with_q), _point(with_q))
        assert before is not None
        assert after is not None
        assert after.verdict == before.verdict
        assert after.value == before.value


def test_the_computed_q_is_that_of_the_parts_whatever_was_measured() -> None:
    for case in ("free space", "soil", "stub"):
        before = plain(case).figures.unloaded_q.spread
        again = computed_quality(of(measured(case, 100.0, 200.0, 300.0)))
        assert (again.low, again.likely, again.high) == pytest.approx((before.low, before.likely, before.high))


@pytest.mark.parametrize("case", ["typical losses", "soil", "nothing stated", "stub", "padding"])
@settings(max_examples=10, deadline=None)
@given(ends=st.tuples(*[st.floats(log(50.0), log(20e3)) for _ in range(3)]))
def test_any_measured_q_keeps_every_figure_in_order(case: str, ends: tuple[float, float, float]) -> None:
    """A Spread out of order raises; so each that is made is in order."""
    low, middle, top = (2.718281828459045**each for each in sorted(ends))
    made = replace(of(plain(case)), measured=Spread(low, middle, top))
    found = figures_of(made, plain_design(**CASES[case]))
    assert found.unloaded_q.spread.likely == pytest.approx(middle)
    assert (found.conductor_efficiency.spread.low or 0.0) > 0.0
    assert (found.conductor_efficiency.spread.high or 0.0) <= 1.0
    cases = made.ground_cases()
    assert max(each.square for each in cases) >= max(each.likely_square for each in cases) * (1.0 - 1e-9)
    for part in made.losses:
        made.heat_spread(part)
    reached = sky(made)
    if reached is not None:
        assert (reached.efficiency.low or 0.0) > 0.0
        assert (reached.efficiency.high or 0.0) <= 1.0


@pytest.mark.parametrize("ends", [(50.0, 50.0, 50.0), (20e3, 20e3, 20e3), (50.0, 1000.0, 20e3), (5.0, 5.0, 1e5)])
@pytest.mark.parametrize("case", ["typical losses", "soil", "nothing stated"])
def test_a_whole_check_stands_any_measured_q(case: str, ends: tuple[float, float, float]) -> None:
    found = measured(case, *ends)
    assert found.out_of_range == ()
    assert (found.bare_voltage or 0.0) > 0.0


# Carried over to another frequency -------------------------------------------------------------------------

JOINTS: list[Changes] = [
    {"name": at, "resistance": {"low": "300 mohm", "likely": "400 mohm", "high": "500 mohm"}, "at": at}
    for at in ("capacitor", "opposite", "spread")
]
# With how far the carried Q may lie off what is solved at both frequencies, 1.9 % apart (computed).
AWAY: dict[str, tuple[Changes, float]] = {
    "free space": ({}, 0.001),
    "typical losses": (TYPICAL, 0.001),
    "joints": ({"loop__joint": JOINTS, "transmission__0__frequency": "21 MHz"}, 0.003),
    "turns": (TURNS, 0.001),
    "20 MHz": ({"transmission__0__frequency": "21 MHz"}, 0.002),
    "0.6 of the anti-resonance": ({"transmission__0__frequency": "28 MHz"}, 0.002),
    "0.8 of it": ({"transmission__0__frequency": "36 MHz"}, 0.022),
    "plane": (CASES["plane"], 0.002),
    "soil": (CASES["soil"], 0.004),
    "sea": ({**UP, "loop__centre_height": "0.8 m", "site__ground": "sea water"}, 0.02),
    "stub": (CASES["stub"], 0.019),
}


def _chain(design: Design, frequency: float) -> Chain:
    return chain(design, frequency, outline(design.loop), power_at_loop(design, POWER))


@pytest.mark.parametrize("case", AWAY)
@pytest.mark.parametrize("ratio", [0.981, 1.019])
def test_a_q_is_carried_over_as_the_same_parts_solve_it_there(case: str, ratio: float) -> None:
    changes, rough = AWAY[case]
    design = plain_design(**changes)
    frequency = design.transmission[0].frequency
    here, there = _chain(design, frequency), _chain(design, frequency * ratio)
    q = here.quality("likely", here.likely)
    solved = there.quality("likely", there.likely)
    carried = _chain(plain_design(**measured_changes(q, 0.0, **changes)), frequency * ratio).measured
    assert carried is not None
    assert carried.likely is not None
    assert carried.likely == pytest.approx(solved, rel=rough)
    assert (carried.low or 0.0) < solved < (carried.high or 0.0)
    away = max(ratio, 1.0 / ratio) ** CARRIED
    assert carried.high == pytest.approx(carried.likely * away, rel=1e-9)
    assert carried.low == pytest.approx(carried.likely / away, rel=1e-9)


def test_a_q_of_a_lossless_coil_goes_by_the_laws_of_its_parts() -> None:
    """Over 2 %, small loop: radiation f^4, copper f^0.5, so Q by f over both shares' mean power (Wheeler; memory)."""
    changes: Changes = {"loop__diameter": "0.4 m"}
    design = plain_design(**changes)
    made = _chain(design, 7.1e6)
    share = made.likely.radiated / made.resistance_of_parts("likely", made.likely)
    carried = _chain(plain_design(**measured_changes(1000.0, 0.0, **changes)), 7.1e6 * 1.019).measured
    assert carried is not None
    power = log((carried.likely or 0.0) / 1000.0) / log(1.019)
    assert power == pytest.approx(1.0 - 4.0 * share - 0.5 * (1.0 - share), abs=0.02)


@pytest.mark.parametrize(("ratio", "used"), [(1.0 + 0.99 * NEAR, True), (1.0 + 1.02 * NEAR, False)])
def test_beyond_two_per_cent_it_is_not_used_and_the_sheet_says_so(ratio: float, used: bool) -> None:
    changes = measured_changes(1000.0)
    changes["measured"][0]["frequency"] = f"{7.1 * ratio:.6f} MHz"
    design = plain_design(**changes)
    found = operating_point(design, design.transmission[0])
    assert (of(found).measured is not None) is used
    told = [text for text in assumptions(design, [found]) if "counts for nothing" in text]
    assert bool(told) is not used
    if not used:
        assert "7.24484 MHz" in told[0] or "7.245 MHz" in told[0] or "7.24 MHz" in told[0]
        assert found.figures == plain("free space").figures
