"""What a sheet says of the match: its SWR, the parts in it, the coupling loop for all bands; keys that do not fit."""

from datetime import date
from functools import cache
from math import pi, sqrt
from typing import Any

import pytest
from designs import file_of, plain_design, plain_tree
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from points import point

import magsafe
from magsafe.analysis.operating_point import OperatingPoint, operating_points
from magsafe.checks.feeding import MOST_SWR, coupling_loop, feeding
from magsafe.checks.sheet import CouplingLoopRecord, Finding, Sheet
from magsafe.design.model import Design
from magsafe.design.reading import parse_design
from magsafe.errors import DesignError, Problem
from magsafe.spread import Spread

MATCH = "feed.match"
VOLTS, AMPS = "feed.series_capacitor.voltage", "feed.series_capacitor.current"
REACTIVE, WARM = "feed.series_capacitor.reactive_power", "feed.series_capacitor.heat"
# What the plain loop asks of it: 8.04 kV, 1.42 A, 11.4 kVA, and 8.1 W of a Q of 1000.
RATED = {
    "rated_voltage": "15 kV",
    "rated_voltage_kind": "peak RF",
    "capacitance": "5.638 pF",
    "rated_current": "3 A",
    "rated_current_at": "7.1 MHz",
    "quality_factor": {"low": 1000, "likely": 2000, "high": 3000},
}


def sheet_of(**changes: Any) -> Sheet:
    return magsafe.check(plain_design(**changes), date(2026, 5, 4))


def found_of(**changes: Any) -> dict[str, Finding]:
    """Return the findings about the feed of the plain design with changes, by their ids."""
    design = plain_design(**changes)
    every = [finding for each in operating_points(design) for finding in feeding(design, each)]
    assert len({each.id for each in every}) == len(every)
    return {each.id: each for each in every}


def series(**keys: Any) -> dict[str, Any]:
    """Return a feed by two capacitors whose series capacitor is rated for what it sees, with changes."""
    part = {name: value for name, value in {**RATED, **keys}.items() if value is not None}
    return {"coupling": "capacitors", "series_capacitor": part}


def small(**keys: Any) -> dict[str, Any]:
    return {"coupling": "small loop", "small_loop": keys}


def high(found: Finding) -> float:
    assert found.value is not None
    assert found.value.high is not None
    return found.value.high


def limit(found: Finding) -> float:
    assert found.limit is not None
    return found.limit.value


# The SWR ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("diameter", "verdict"), [("0.182 m", "clear"), ("0.195 m", "clear"), ("0.35 m", "narrow")])
def test_a_mismatch_is_narrow_at_worst(diameter: str, verdict: str) -> None:
    found = found_of(feed=small(diameter=diameter))
    assert list(found) == [MATCH]
    assert found[MATCH].verdict == verdict
    assert limit(found[MATCH]) == MOST_SWR == 2.0
    assert (high(found[MATCH]) > 2.0) == (verdict == "narrow")
    assert found[MATCH].power_at_margin is None
    assert (found[MATCH].do == "nothing") == (verdict == "clear")


def test_a_terrible_mismatch_is_no_more_than_narrow() -> None:
    found = found_of(feed=small(diameter="45 mm"))[MATCH]
    assert high(found) > 100.0
    assert found.verdict == "narrow"


SIZES: dict[str, dict[str, Any]] = {
    "nothing": {},
    "a coupling loop of no size": {"feed": small(wire="3 mm")},
    "capacitors of no size": {"feed": {"coupling": "capacitors"}},
    "direct": {"feed": {"coupling": "direct"}},
    "a full-wave loop": {"capacitor": {"kind": "none"}, "transmission__0__frequency": "95 MHz"},
}


@pytest.mark.parametrize("name", SIZES)
def test_no_size_no_match(name: str) -> None:
    assert MATCH not in found_of(**SIZES[name])


def test_every_kind_of_size_is_asked_about() -> None:
    assert MATCH in found_of(feed=small(diameter="0.2 m"))
    assert MATCH in found_of(feed=series(capacitance="8 pF"))
    through = {"capacitor": {"kind": "none"}, "transmission__0__frequency": "95 MHz"}
    for match in ("none", "quarter-wave section", "2:1 transformer", "4:1 transformer"):
        assert MATCH in found_of(feed={"match": match}, **through)


def test_a_size_that_cannot_be_is_told_with_why() -> None:
    found = found_of(feed=small(diameter="1.3 m"))[MATCH]
    assert found.verdict == "narrow"
    assert "no room" in found.because
    assert found.value is None
    assert "change the match" in found.do


@pytest.mark.parametrize(
    "changes",
    [
        {"feed": small(diameter="0.2 m")},
        {"feed": series(capacitance="8 pF")},
        {"feed": {"match": "2:1 transformer"}, "capacitor": {"kind": "none"}, "transmission__0__frequency": "95 MHz"},
    ],
    ids=["coupling loop", "capacitors", "transformer"],
)
def test_without_a_height_the_worst_match_is_not_known(changes: dict[str, Any]) -> None:
    """It harms nobody, so that is no lack of proof; the likely value is told."""
    found = found_of(site__ground="average", **changes)[MATCH]
    assert found.verdict == "narrow"
    assert "loop.centre_height is not given" in found.because
    assert found.do == "state loop.centre_height"
    assert found.value is not None
    assert found.value.likely is not None
    assert found.value.high is None


def test_a_loop_out_of_range_says_nothing_of_its_match_and_proves_no_part() -> None:
    thick = {"loop__conductor__outer_diameter": "80 mm"}
    assert found_of(feed=small(diameter="0.2 m"), **thick) == {}
    found = found_of(feed=series(capacitance="8 pF"), **thick)
    assert list(found) == [VOLTS, AMPS, WARM]
    assert {each.verdict for each in found.values()} == {"unproven"}
    assert all("solver is proved to" in each.because for each in found.values())


# The series capacitor --------------------------------------------------------------------------------------


def test_a_coupling_loop_has_no_part_that_is_rated() -> None:
    assert found_of(feed=small()) == {}
    assert found_of() == {}


def test_a_part_that_is_rated_for_what_it_sees_is_within() -> None:
    found = found_of(feed=series())
    assert list(found) == [MATCH, VOLTS, AMPS, WARM]
    assert {name: each.verdict for name, each in found.items()} == dict.fromkeys((MATCH, VOLTS, AMPS, WARM), "clear")
    assert (limit(found[VOLTS]), limit(found[AMPS])) == (15e3, 3.0)
    assert (found[VOLTS].margin_asked, found[AMPS].margin_asked) == (1.5, 1.25)
    assert found[VOLTS].margin_found == pytest.approx(15e3 / high(found[VOLTS]))
    assert found[VOLTS].provenance == "stated in the design"
    whole = point().figures.capacitor_peak_voltage.spread.high or 0.0
    # A stated size need not match, so all of the loop's volts stand across it.
    assert high(found[VOLTS]) == pytest.approx(whole)
    assert high(found[AMPS]) == pytest.approx(sqrt(100.0 / 50.0), rel=0.02)


def test_a_part_of_no_size_is_judged_by_its_volts_alone() -> None:
    """It serves every transmission and matches none but one, so what it carries hangs on its size."""
    found = found_of(feed=series(capacitance=None, rated_reactive_power="20 kVA"))
    assert list(found) == [VOLTS, AMPS, REACTIVE, WARM]
    assert found[VOLTS].verdict == "clear"
    for name in (AMPS, REACTIVE, WARM):
        assert found[name].verdict == "unproven"
        assert "capacitance is not given" in found[name].because
        assert "state its capacitance" in found[name].do


def test_the_range_counts_what_a_series_capacitor_tunes_already() -> None:
    """Across the loop stands what the figure tells: less than without it by nearly all of the series capacitor."""
    plain = sheet_of().operating_points[0]
    fed = sheet_of(feed=series()).operating_points[0]
    before, now = (next(f.value for f in each.findings if f.id == "capacitor.range") for each in (plain, fed))
    assert before is not None
    assert now is not None
    parallel = fed.figures["match_parallel_capacitance"]
    assert (now.low or 0.0) <= (parallel.low or 0.0) < (before.low or 0.0)
    assert now.likely == pytest.approx(parallel.likely, rel=2e-3)
    assert now.high == before.high


def test_a_rating_below_the_volts_stops_it() -> None:
    found = found_of(feed=series(rated_voltage="6 kV"))[VOLTS]
    assert found.verdict == "stop"
    assert "this exceeds the limit" in found.because
    assert "lower the power to" in found.do
    assert found_of(feed=series(rated_voltage="10 kV"))[VOLTS].verdict == "narrow"


def test_an_rms_rating_counts_at_its_crest() -> None:
    found = found_of(feed=series(rated_voltage="9 kV", rated_voltage_kind="RMS RF"))[VOLTS]
    assert limit(found) == pytest.approx(9e3 * sqrt(2.0))
    assert found.verdict == "clear"


@pytest.mark.parametrize("kind", ["DC working", "DC test"])
def test_a_direct_voltage_tells_nothing_of_a_part_of_unknown_kind(kind: str) -> None:
    found = found_of(feed=series(rated_voltage="50 kV", rated_voltage_kind=kind))[VOLTS]
    assert found.verdict == "unproven"
    assert f"the rating is a {kind} voltage" in found.because
    assert "at radio frequency" in found.do


@pytest.mark.parametrize(("key", "name"), [("rated_voltage", VOLTS), ("rated_current", AMPS)])
def test_a_rating_that_is_not_given_proves_nothing(key: str, name: str) -> None:
    companion = {"rated_voltage": "rated_voltage_kind", "rated_current": "rated_current_at"}[key]
    found = found_of(feed=series(**{key: None, companion: None}))[name]
    assert found.verdict == "unproven"
    assert f"{key} of the series capacitor is not given" in found.because
    assert found.power_at_margin is None


def test_a_kind_of_volts_that_is_not_given_proves_nothing() -> None:
    found = found_of(feed=series(rated_voltage_kind=None))[VOLTS]
    assert found.verdict == "unproven"
    assert f"{15e3 / high(found):.3g} times the volts at worst" in found.because


def test_thin_air_takes_from_the_rated_volts() -> None:
    low, far_up = (
        found_of(feed=series(rated_voltage="12.5 kV"), site__altitude=each)[VOLTS] for each in ("500 m", "3000 m")
    )
    assert (low.verdict, limit(low)) == ("clear", 12.5e3)
    assert far_up.verdict == "narrow"
    # International standard atmosphere (ISO 2533, memory): 701.1 hPa at 3000 m, 898.7 hPa at 1000 m.
    assert limit(far_up) == pytest.approx(12.5e3 * 701.1 / 898.7, rel=1e-3)


@pytest.mark.parametrize(("amps", "verdict"), [("1.2 A", "stop"), ("1.6 A", "narrow"), ("2 A", "clear")])
def test_the_current_is_held_against_its_own_rating(amps: str, verdict: str) -> None:
    found = found_of(feed=series(rated_current=amps))[AMPS]
    assert found.verdict == verdict
    assert "into heat, key-down" in found.because


def test_above_the_frequency_of_its_rating_less_current_is_allowed() -> None:
    """By the fourth root of the frequencies' ratio (common practice)."""
    found = found_of(feed=series(rated_current_at="3 MHz"))[AMPS]
    assert limit(found) == pytest.approx(3.0 * (3.0 / 7.1) ** 0.25)
    assert found.verdict == "narrow"


def test_heat_is_held_against_watts_where_they_are_stated() -> None:
    found = found_of(feed=series(rated_dissipation="5 W"))[WARM]
    # By hand: 2 A2 through sqrt(8.04 kV^2 / 2 / 2 A2), some 4 kohm, of Q 1000.
    assert high(found) == pytest.approx(1.42**2 * 8040.0 / (sqrt(2.0) * 1.42) / 1000.0, rel=0.02)
    assert found.verdict == "stop"
    assert found_of(feed=series(rated_dissipation="9 W"))[WARM].verdict == "narrow"
    assert found_of(feed=series(rated_dissipation="12 W"))[WARM].verdict == "clear"


def test_heat_that_rests_on_what_is_usual_is_narrow_at_best() -> None:
    found = found_of(feed=series(rated_dissipation="500 W", quality_factor=None))[WARM]
    assert found.verdict == "narrow"
    assert "taken as is usual" in found.because


def test_heat_is_averaged_over_the_mode() -> None:
    feed = series(rated_dissipation="500 W")
    keyed, spoken = (found_of(feed=feed, transmission__0__mode=each)[WARM] for each in ("FM", "SSB"))
    assert 0.1 * high(keyed) < high(spoken) < 0.9 * high(keyed)
    assert "key-down" in spoken.because


def test_another_rating_of_its_own_counts_its_heat() -> None:
    by_amps = found_of(feed=series())[WARM]
    assert (by_amps.verdict, by_amps.limit, by_amps.power_at_margin) == ("clear", None, None)
    assert AMPS in by_amps.because
    below = found_of(feed=series(rated_current_at="14 MHz"))[WARM]
    assert below.verdict == "unproven"
    assert "the same heat allows less" in below.because
    at_any = found_of(feed=series(rated_current_at=None))[WARM]
    assert at_any.verdict == "unproven"
    by_power = found_of(feed=series(rated_current_at=None, rated_reactive_power="20 kVA"))[WARM]
    assert by_power.verdict == "clear"
    assert REACTIVE in by_power.because


def test_reactive_power_is_rms_volts_times_rms_amps() -> None:
    found = found_of(feed=series(rated_reactive_power="20 kVA"))
    assert list(found) == [MATCH, VOLTS, AMPS, REACTIVE, WARM]
    assert high(found[REACTIVE]) == pytest.approx(high(found[VOLTS]) / sqrt(2.0) * high(found[AMPS]))
    assert found[REACTIVE].verdict == "clear"
    assert found_of(feed=series(rated_reactive_power="9 kVA"))[REACTIVE].verdict == "narrow"
    assert found_of(feed=series(rated_reactive_power="5 kVA"))[REACTIVE].verdict == "stop"
    loud = found_of(feed=series(rated_reactive_power="20 kVA"), margins__overshoot="3 dB")
    assert high(loud[REACTIVE]) == pytest.approx(high(found[REACTIVE]))
    assert high(loud[VOLTS]) == pytest.approx(10.0**0.15 * high(found[VOLTS]))


def test_each_of_two_balanced_capacitors_sees_half() -> None:
    one, two = (
        found_of(feed=series(balanced=each, capacitance=size, rated_reactive_power="20 kVA", rated_dissipation="50 W"))
        for each, size in ((False, "5.638 pF"), (True, "11.276 pF"))
    )
    for name, share in ((VOLTS, 0.5), (AMPS, 1.0), (REACTIVE, 0.5), (WARM, 0.5)):
        assert high(two[name]) == pytest.approx(share * high(one[name])), name


def test_what_only_typical_losses_keep_within_is_not_clear() -> None:
    """Without credit for a capacitor of usual Q the volts are higher, and the margin is gone."""
    usual = {"capacitor__series_resistance": None}
    first = found_of(feed=series(), **usual)[VOLTS]
    kept = found_of(feed=series(rated_voltage=f"{high(first) * 1.5 * 1.001 / 1e3:.6f} kV"), **usual)[VOLTS]
    assert (kept.margin_found or 0.0) > 1.5
    assert kept.verdict == "narrow"
    assert "typical" in kept.because


HELD: dict[str, tuple[str, dict[str, Any]]] = {
    "volts": (VOLTS, series(rated_voltage="10 kV")),
    "volts of a stated capacitance": (VOLTS, series(rated_voltage="7 kV", capacitance="9 pF")),
    "volts of each half": (VOLTS, series(rated_voltage="5 kV", balanced=True)),
    "amps": (AMPS, series(rated_current="1.6 A")),
    "reactive power": (REACTIVE, series(rated_reactive_power="9 kVA")),
    "watts": (WARM, series(rated_dissipation="6 W")),
}


@pytest.mark.parametrize("name", HELD)
def test_at_the_power_told_the_margin_is_kept_and_above_it_not(name: str) -> None:
    key, feed = HELD[name]
    found = found_of(feed=feed)[key]
    assert found.verdict in {"narrow", "stop"}
    assert found.power_at_margin is not None
    assert found.power_at_limit is not None
    assert found.power_at_margin < found.power_at_limit

    def again(watts: float) -> Finding:
        return found_of(feed=feed, transmission__0__power=f"{watts:.9f} W")[key]

    kept = again(found.power_at_margin * (1.0 - 1e-8))
    assert kept.verdict == "clear"
    assert kept.margin_found == pytest.approx(kept.margin_asked, rel=1e-6)
    assert again(found.power_at_margin * 1.01).verdict != "clear"
    assert again(found.power_at_limit * 0.99).verdict == "narrow"
    assert again(found.power_at_limit * 1.01).verdict == "stop"


def test_what_two_capacitors_do_not_match_proves_none_of_its_parts() -> None:
    joint = {
        "name": "joints",
        "count": 2,
        "at": "capacitor",
        "resistance": {"low": "8 ohm", "likely": "8 ohm", "high": "8 ohm"},
    }
    found = found_of(feed={**series(capacitance="8 pF"), "line_impedance": "10 ohm"}, loop__joint=[joint])
    assert list(found) == [MATCH, VOLTS, AMPS, WARM]
    assert {found[name].verdict for name in (VOLTS, AMPS, WARM)} == {"unproven"}
    assert all("takes an inductor across it" in each.because for each in found.values())
    assert found[MATCH].verdict == "narrow"


# Power and the ceiling -------------------------------------------------------------------------------------


@cache
def mismatched() -> tuple[Sheet, Sheet]:
    """The plain design, and the same with a coupling loop that is much too large."""
    return sheet_of(), sheet_of(feed=small(diameter="0.35 m"))


def test_the_sheet_tells_the_power_that_arrives_and_holds_the_ceiling() -> None:
    plain, changed = mismatched()
    (before,), (after,) = plain.operating_points, changed.operating_points
    ratio = after.figures["swr_at_feed"].likely or 1.0
    assert before.power_at_loop == 100.0
    assert after.power_at_loop == pytest.approx(100.0 * (1.0 - ((ratio - 1.0) / (ratio + 1.0)) ** 2))
    assert after.power == before.power == 100.0
    assert changed.power_ceiling == plain.power_ceiling
    assert after.power_ceiling == before.power_ceiling
    assert next(each for each in after.findings if each.id == MATCH).verdict == "narrow"
    same = {each.id: each for each in before.findings}
    for each in after.findings:
        if each.id != MATCH and each.power_at_margin is not None:
            assert each.power_at_margin == pytest.approx(same[each.id].power_at_margin, rel=1e-12), each.id


# One coupling loop for all ---------------------------------------------------------------------------------

BANDS = [{"name": name, "frequency": f"{each} MHz", "power": "100 W"} for name, each in (("low", 7.1), ("high", 14.2))]


def record_of(**changes: Any) -> tuple[Design, tuple[OperatingPoint, ...], CouplingLoopRecord | None]:
    design = plain_design(**changes)
    points = operating_points(design)
    return design, points, coupling_loop(design, points)


def test_a_stated_coupling_loop_is_told_as_stated() -> None:
    _, points, record = record_of(
        transmission=BANDS,
        feed=small(diameter="0.15 m", wire="3 mm", position="opposite the capacitor", clearance="30 mm"),
    )
    assert record is not None
    assert (record.diameter, record.stated, record.wire) == (0.15, True, 0.003)
    assert (record.position, record.clearance) == ("opposite the capacitor", 0.03)
    assert record.share_of_loop == pytest.approx(0.15)
    assert [each.name for each in record.transmissions] == ["low", "high"]
    for each, found in zip(record.transmissions, points, strict=True):
        figures = found.figures
        assert Spread(each.swr.low, each.swr.likely, each.swr.high) == figures.swr_at_feed.spread
        assert each.matching_diameter.likely == figures.coupling_loop_diameter.spread.likely
        likely = each.coefficient.likely or 0.0
        assert each.swr.likely == pytest.approx(max(likely, 1.0 / likely))
        assert each.offset > 0.0


def test_an_unstated_coupling_loop_is_the_one_for_all_bands() -> None:
    _, points, record = record_of(transmission=BANDS)
    assert record is not None
    assert not record.stated
    assert (record.wire, record.position, record.clearance) == (0.004, "centred", None)
    sizes = [found.figures.coupling_loop_diameter.spread.likely or 0.0 for found in points]
    assert min(sizes) < record.diameter < max(sizes)
    assert record.share_of_loop == pytest.approx(record.diameter)
    # Of two, the one that is as much too large for one as it is too small for the other.
    first, second = (each.swr.likely or 0.0 for each in record.transmissions)
    assert first == pytest.approx(second, rel=0.03)


def test_a_clearance_alone_puts_it_opposite_the_capacitor() -> None:
    _, _, apart = record_of(feed=small(clearance="30 mm"))
    _, _, stated = record_of(feed=small(position="opposite the capacitor", clearance="30 mm"))
    assert apart is not None
    assert apart == stated
    assert (apart.position, apart.clearance) == ("opposite the capacitor", 0.03)
    assert apart.share_of_loop < 0.12


def test_its_share_is_of_a_circle_with_the_loops_perimeter() -> None:
    square = {"shape": "rectangle", "diameter": None, "width": "0.8 m", "height": "0.8 m"}
    _, _, record = record_of(**{f"loop__{key}": value for key, value in square.items()}, feed=small(diameter="0.2 m"))
    assert record is not None
    assert record.share_of_loop == pytest.approx(0.2 / (3.2 / pi))


def test_a_transmission_for_which_it_is_not_computed_is_left_out() -> None:
    used = [{"frequency": f"{each} MHz", "power": "100 W"} for each in (7.1, 28.5)]
    _, _, record = record_of(transmission=used, feed=small(diameter="0.4 m"))
    assert record is not None
    assert [each.name for each in record.transmissions] == ["7.1 MHz"]


@pytest.mark.parametrize(
    "changes",
    [
        {"feed": {"coupling": "capacitors"}},
        {"feed": {"coupling": "direct"}},
        {"capacitor": {"kind": "none"}, "transmission__0__frequency": "95 MHz"},
        {"feed": small(diameter="1.4 m")},
        {"feed": small(position="opposite the capacitor", clearance="1 m")},
        {"loop__conductor__outer_diameter": "80 mm"},
    ],
    ids=["capacitors", "direct", "full-wave", "too large", "no room", "out of range"],
)
def test_there_may_be_none(changes: dict[str, Any]) -> None:
    assert record_of(**changes)[2] is None


def test_the_record_reads_back_from_the_machine_form() -> None:
    _, changed = mismatched()
    assert changed.coupling_loop is not None
    assert changed.coupling_loop.stated
    again = Sheet.model_validate_json(changed.to_json())
    assert again.coupling_loop == changed.coupling_loop
    open_end = sheet_of(site__ground="average")
    record = open_end.coupling_loop
    assert record is not None
    assert record.transmissions[0].coefficient.low is None
    assert record.transmissions[0].swr.high is None
    assert Sheet.model_validate_json(open_end.to_json()) == open_end


# Keys that do not fit --------------------------------------------------------------------------------------


def problems(**changes: Any) -> tuple[Problem, ...]:
    with pytest.raises(DesignError) as caught:
        parse_design(file_of(plain_tree(**changes)), "test.toml")
    return caught.value.problems


NO_CAPACITOR = {"capacitor": {"kind": "none"}, "transmission__0__frequency": "95 MHz"}
# The change, the key complained of, what was found, what was expected, what to do.
MISFITS: dict[str, tuple[dict[str, Any], str, str, str, str]] = {
    "small loop without coupling": (
        {"feed": {"small_loop": {"diameter": "0.2 m"}}},
        "feed.small_loop",
        "diameter",
        'coupling = "small loop" beside it',
        "state it, or remove small_loop",
    ),
    "series capacitor of a small loop": (
        {"feed": {"coupling": "small loop", "series_capacitor": {"balanced": True}}},
        "feed.series_capacitor",
        "balanced",
        'coupling = "capacitors" beside it',
        "state it, or remove series_capacitor",
    ),
    "opposite without clearance": (
        {"feed": small(position="opposite the capacitor")},
        "feed.small_loop.clearance",
        "nothing",
        "how far apart the surfaces",
        'add clearance = "30 mm"',
    ),
    "clearance in the middle": (
        {"feed": small(position="centred", clearance="30 mm")},
        "feed.small_loop.clearance",
        "30 mm",
        'position = "opposite the capacitor" beside it',
        "remove clearance",
    ),
    "kind of no voltage": (
        {"feed": series(rated_voltage=None)},
        "feed.series_capacitor.rated_voltage_kind",
        "peak RF",
        "rated_voltage beside it",
        "add rated_voltage, or remove rated_voltage_kind",
    ),
    "frequency of no current": (
        {"feed": series(rated_current=None)},
        "feed.series_capacitor.rated_current_at",
        "7.1 MHz",
        "rated_current beside it",
        "add rated_current, or remove rated_current_at",
    ),
    "match of a tuned loop": (
        {"feed": {"match": "2:1 transformer"}},
        "feed.match",
        "2:1 transformer",
        'kind = "none"',
        "remove it, and state coupling",
    ),
    "impedance of no section": (
        {"feed": {"match": "none", "section_impedance": "93 ohm"}, **NO_CAPACITOR},
        "feed.section_impedance",
        "93 ohm",
        'match = "quarter-wave section" beside it',
        "state it, or remove section_impedance",
    ),
    "velocity in no section": (
        {"feed": {"velocity_factor": 0.66}, **NO_CAPACITOR},
        "feed.velocity_factor",
        "0.66",
        'match = "quarter-wave section" beside it',
        "state it, or remove velocity_factor",
    ),
    "small loop of a full-wave loop": (
        {"feed": small(diameter="0.2 m"), **NO_CAPACITOR},
        "feed.small_loop",
        "diameter",
        "a loop with a capacitor",
        "remove small_loop",
    ),
    "series capacitor of a full-wave loop": (
        {"feed": series(), **NO_CAPACITOR},
        "feed.series_capacitor",
        "rated_voltage",
        "a loop with a capacitor",
        "remove series_capacitor",
    ),
}


@pytest.mark.parametrize("name", MISFITS)
def test_a_key_that_does_not_fit_is_told_with_line_found_expected_and_do(name: str) -> None:
    changes, key, found, expected, do = MISFITS[name]
    (problem,) = problems(**changes)
    assert problem.key == key
    assert found in problem.found
    assert expected in problem.expected
    assert do in problem.do
    lines = file_of(plain_tree(**changes)).decode().splitlines()
    assert problem.line is not None
    assert lines[problem.line - 1].startswith("feed")


def test_all_that_does_not_fit_is_told_in_one_go() -> None:
    feed = {
        "match": "4:1 transformer",
        "velocity_factor": 0.8,
        "section_impedance": "75 ohm",
        "small_loop": {"position": "opposite the capacitor"},
        "series_capacitor": {"rated_voltage_kind": "peak RF", "rated_current_at": "7 MHz"},
    }
    assert {each.key for each in problems(feed=feed)} == {
        "feed.match",
        "feed.velocity_factor",
        "feed.section_impedance",
        "feed.small_loop",
        "feed.small_loop.clearance",
        "feed.series_capacitor",
        "feed.series_capacitor.rated_voltage_kind",
        "feed.series_capacitor.rated_current_at",
    }


@pytest.mark.parametrize(
    "changes",
    [
        {"feed": {}},
        {"feed": {"coupling": "small loop"}},
        {"feed": small(diameter="0.2 m", wire="4 mm", position="centred")},
        {"feed": small(position="opposite the capacitor", clearance="0 mm")},
        {"feed": {"coupling": "capacitors"}},
        {"feed": series(capacitance="8 pF", balanced=True, rated_reactive_power="20 kVA", rated_dissipation="5 W")},
        {"feed": series(rated_voltage_kind=None)},
        {"feed": {"coupling": "direct", "line_impedance": "75 ohm", "line_loss": "1 dB"}},
        {
            "feed": {"match": "quarter-wave section", "section_impedance": "93 ohm", "velocity_factor": 0.66},
            **NO_CAPACITOR,
        },
        {"feed": {"match": "4:1 transformer"}, **NO_CAPACITOR},
        {"feed": {"match": "none"}, **NO_CAPACITOR},
    ],
)
def test_what_fits_is_read(changes: dict[str, Any]) -> None:
    assert plain_design(**changes).feed.line_impedance in {50.0, 75.0}


@pytest.mark.parametrize(
    ("changes", "key", "answer"),
    [
        ({"feed": {"couplling": "direct"}}, "feed.couplling", 'did you mean "coupling"'),
        ({"feed": small(diametre="0.2 m")}, "feed.small_loop.diametre", 'did you mean "diameter"'),
        ({"feed": small(wires="4 mm")}, "feed.small_loop.wires", 'did you mean "wire"'),
        ({"feed": series(capacity="8 pF")}, "feed.series_capacitor.capacity", "capacitance"),
        ({"feed": {"coupling": "small lop"}}, "feed.coupling", 'did you mean "small loop"'),
        (
            {"feed": small(position="opposite the capacitator", clearance=None)},
            "feed.small_loop.position",
            "did you mean",
        ),
        ({"feed": small(diameter="0.2")}, "feed.small_loop.diameter", "unit"),
        ({"feed": small(diameter="1 mm")}, "feed.small_loop.diameter", "check the number"),
        ({"feed": {"line_impedance": "5 ohm"}}, "feed.line_impedance", "check the number"),
        ({"feed": {"match": "3:1 transformer"}, **NO_CAPACITOR}, "feed.match", 'did you mean "'),
        ({"feed": series(quality_factor=-5)}, "feed.series_capacitor.quality_factor", ""),
    ],
)
def test_a_key_or_a_word_that_is_not_known_is_refused_with_the_nearest(
    changes: dict[str, Any], key: str, answer: str
) -> None:
    if "small_loop" in changes["feed"]:
        loop = changes["feed"]["small_loop"]
        changes = {
            **changes,
            "feed": {**changes["feed"], "small_loop": {k: v for k, v in loop.items() if v is not None}},
        }
    (problem,) = problems(**changes)
    assert problem.key == key
    assert answer in f"{problem.expected} {problem.do}"


# Any design ------------------------------------------------------------------------------------------------


def lengths(least: float, most: float) -> st.SearchStrategy[str]:
    return st.floats(least, most).map(lambda each: f"{each:.4f} m")


SHAPES = st.one_of(
    st.builds(lambda d: {"shape": "circle", "diameter": d}, lengths(0.5, 2.0)),
    st.builds(lambda n, p: {"shape": "polygon", "sides": n, "perimeter": p}, st.integers(3, 9), lengths(1.5, 6.0)),
    st.builds(lambda w, h: {"shape": "rectangle", "width": w, "height": h}, lengths(0.4, 1.8), lengths(0.4, 1.8)),
    st.builds(
        lambda a, b: {
            "shape": "outline",
            "points": [["0 m", "0 m"], ["1 m", "0 m"], [a, "0.4 m"], ["0.3 m", b], ["-0.2 m", "0.5 m"]],
        },
        lengths(0.4, 1.4),
        lengths(0.6, 1.5),
    ),
)
LOOPS = st.tuples(st.one_of(st.none(), lengths(0.03, 0.9)), st.one_of(st.none(), lengths(0.0, 0.3)))
PARTS = st.fixed_dictionaries(
    {},
    optional={
        "capacitance": st.floats(2.0, 60.0).map(lambda each: f"{each:.3f} pF"),
        "balanced": st.booleans(),
        "rated_voltage": st.sampled_from(["2 kV", "10 kV"]),
        "rated_current": st.sampled_from(["1 A", "20 A"]),
        "rated_reactive_power": st.just("10 kVA"),
        "rated_dissipation": st.just("5 W"),
        "quality_factor": st.sampled_from([100, 2000]),
    },
)


@st.composite
def feeds(draw: st.DrawFn) -> dict[str, Any]:
    """Return a feed whose keys fit together."""
    coupling = draw(st.sampled_from(["small loop", "small loop", "capacitors", "direct", "none stated"]))
    made: dict[str, Any] = {"coupling": coupling, "line_impedance": f"{draw(st.sampled_from([50, 75, 300]))} ohm"}
    if coupling == "small loop":
        size, clearance = draw(LOOPS)
        made["small_loop"] = {} if size is None else {"diameter": size}
        if clearance is not None:
            made["small_loop"] |= {"position": "opposite the capacitor", "clearance": clearance}
    if coupling == "capacitors":
        made["series_capacitor"] = draw(PARTS)
    return made


@settings(max_examples=20, deadline=None, suppress_health_check=[HealthCheck.too_slow], derandomize=True)
@given(
    shape=SHAPES,
    feed=feeds(),
    turns=st.sampled_from([1, 1, 1, 2, 3]),
    nested=st.booleans(),
    flat=st.booleans(),
    position=st.sampled_from(["top", "bottom", "side"]),
    megahertz=st.floats(3.5, 22.0),
    site=st.sampled_from([("none", None), ("none", "2 m"), ("perfect", "3 m")]),
)
def test_no_feed_of_any_loop_goes_wrong(
    shape: dict[str, Any],
    feed: dict[str, Any],
    turns: int,
    nested: bool,
    flat: bool,
    position: str,
    megahertz: float,
    site: tuple[str, str | None],
) -> None:
    rod = {"form": "rod", "outer_diameter": "12 mm", "conductivity": "58 MS/m"}
    loop = {**shape, "conductor": rod, "plane": "horizontal" if flat else "vertical", "supports": []}
    if site[1]:
        loop["centre_height"] = site[1]
    if turns > 1 and shape["shape"] != "outline":
        arrangement = "nested" if nested else "side by side"
        loop |= {"turns": turns, "turn_spacing": "40 mm", "turn_arrangement": arrangement}
    changes: dict[str, Any] = {"loop": loop, "feed": feed, "transmission__0__frequency": f"{megahertz:.4f} MHz"}
    changes |= {"site__ground": site[0]} | ({} if flat else {"capacitor__position": position})
    try:
        design = plain_design(**changes)
    except DesignError:
        return  # an outline that crosses itself, turns without room
    points = operating_points(design)
    for each in points:
        power = each.power_at_loop
        assert 0.0 <= (power.low or 0.0) <= (power.likely or 0.0) <= (power.high or 0.0) == 100.0
        for finding in feeding(design, each):
            assert finding.id.startswith("feed.")
            assert finding.verdict in (
                {"clear", "narrow"} if finding.id == MATCH else {"clear", "narrow", "stop", "unproven"}
            )
            assert finding.because
        ratio = each.figures.swr_at_feed.spread
        assert all(end is None or end >= 1.0 for end in (ratio.low, ratio.likely, ratio.high))
    record = coupling_loop(design, points)
    if record is not None:
        assert feed["coupling"] in {"small loop", "none stated"}
        assert record.diameter > 0.0
        assert record.stated == ("diameter" in feed.get("small_loop", {}))
