"""What a sheet says of padding, of capacitors made at home, and of the capacitor's heat."""

from datetime import date
from math import pi
from typing import Any

import pytest
from designs import file_of, plain_design, plain_tree

import magsafe
from magsafe.checks.padding import padding_names
from magsafe.checks.sheet import Finding, Sheet
from magsafe.design.reading import parse_design
from magsafe.errors import DesignError, Problem

PART = {
    "connection": "parallel",
    "capacitance": "100 pF",
    "tolerance": "2 %",
    "rated_voltage": "15 kV",
    "rated_voltage_kind": "peak RF",
    "rated_current": "40 A",
    "rated_current_at": "7.1 MHz",
    "quality_factor": {"low": 2000, "likely": 3000, "high": 5000},
}
TROMBONE = {
    "kind": "trombone",
    "dielectric": "PTFE",
    "inner_diameter": "18 mm",
    "outer_diameter": "22 mm",
    "length": "1 m",
}
PLATE = {"kind": "dielectric plate", "dielectric": "PTFE", "plate_area": "220 cm2", "gap": "2 mm"}
VOLTS, AMPS = "capacitor.padding.100-pf.voltage", "capacitor.padding.100-pf.current"
WARM, REACTIVE = "capacitor.padding.100-pf.heat", "capacitor.padding.100-pf.reactive_power"


def sheet_of(**changes: Any) -> Sheet:
    return magsafe.check(plain_design(**changes), date(2026, 5, 4))


def padded(**keys: Any) -> Sheet:
    part = {name: value for name, value in {**PART, **keys}.items() if value is not None}
    return sheet_of(capacitor__with=[part])


def made_of(part: dict[str, Any], **keys: Any) -> Sheet:
    changes = {name: keys.pop(name) for name in list(keys) if "__" in name}
    return sheet_of(capacitor={**part, **keys}, **changes)


def finding(sheet: Sheet, name: str) -> Finding:
    return next(f for f in sheet.all_findings() if f.id == name)


def names(sheet: Sheet) -> list[str]:
    return [f.id for f in sheet.all_findings()]


def high(found: Finding) -> float:
    assert found.value is not None
    assert found.value.high is not None
    return found.value.high


def problems(**changes: Any) -> tuple[Problem, ...]:
    with pytest.raises(DesignError) as caught:
        parse_design(file_of(plain_tree(**changes)), "test.toml")
    return caught.value.problems


# Padding --------------------------------------------------------------------------------------------------


def test_padding_that_states_all_may_be_clear() -> None:
    sheet = padded()
    for name in (VOLTS, AMPS, WARM, "capacitor.voltage", "capacitor.current", "capacitor.range"):
        assert finding(sheet, name).verdict == "clear", name
    assert "into heat" in finding(sheet, AMPS).because
    assert "tolerance" in finding(sheet, "capacitor.range").because


@pytest.mark.parametrize(
    ("keys", "name", "word"),
    [
        ({"rated_voltage": None, "rated_voltage_kind": None}, VOLTS, "rated_voltage"),
        ({"rated_voltage_kind": None}, VOLTS, "rated_voltage_kind"),
        ({"rated_voltage_kind": "DC working"}, VOLTS, "DC working"),
        ({"rated_current": None, "rated_current_at": None}, AMPS, "rated_current"),
    ],
)
def test_what_a_rating_does_not_say_is_unproven_with_what_to_look_for(
    keys: dict[str, Any], name: str, word: str
) -> None:
    found = finding(padded(**keys), name)
    assert found.verdict == "unproven"
    assert word in found.because
    assert "data sheet" in found.do


def test_a_rating_without_its_kind_tells_what_it_would_be_as_peak() -> None:
    found = finding(padded(rated_voltage_kind=None), VOLTS)
    assert "as peak RF it would be 2.11 times the volts at worst" in found.because
    assert 15e3 / high(finding(padded(), VOLTS)) == pytest.approx(2.11, abs=0.005)


def test_limits_of_padding_are_its_own() -> None:
    volts, amps = finding(padded(), VOLTS), finding(padded(), AMPS)
    assert volts.limit is not None
    assert amps.limit is not None
    assert (volts.limit.value, amps.limit.value) == (15e3, 40.0)
    rms = finding(padded(rated_voltage_kind="RMS RF"), VOLTS)
    assert rms.limit is not None
    assert rms.limit.value == pytest.approx(15e3 * 2**0.5)
    above = finding(sheet_of(capacitor__with=[PART], site__altitude="3000 m"), VOLTS)
    assert above.limit is not None
    # 70.1 kPa at 3000 m over 89.9 kPa at 1000 m (U.S. Standard Atmosphere 1976).
    assert above.limit.value == pytest.approx(15e3 * 70.1 / 89.9, rel=2e-3)
    assert "common practice" in above.because


def test_padding_that_is_too_small_stops_and_holds_the_ceiling() -> None:
    sheet = padded(rated_current="10 A")
    found, whole = finding(sheet, AMPS), sheet.power_ceiling
    assert found.verdict == "stop"
    assert whole.held_by == AMPS
    assert whole.value == pytest.approx(100.0 * (10.0 / 1.25 / high(found)) ** 2, rel=1e-9)
    weak = finding(padded(rated_voltage="8 kV"), VOLTS)
    assert weak.margin_asked == 1.5
    assert weak.verdict in ("narrow", "stop")


def test_an_unstated_tolerance_is_narrow_at_best_where_it_counts() -> None:
    sheet = padded(tolerance=None)
    for name in (AMPS, "capacitor.current", "capacitor.range"):
        assert finding(sheet, name).verdict == "narrow", name
        assert "10 %" in finding(sheet, name).because
    for name in (VOLTS, "capacitor.voltage"):
        assert finding(sheet, name).verdict == "clear", name


def test_a_guessed_tolerance_stops_no_range_and_a_stated_one_does() -> None:
    """100.6 pF are left for it: 105 pF are too many at the end of 10 %, and not of 2 %."""
    ends = {"min": "95 pF", "max": "300 pF"}
    guessed = sheet_of(capacitor__with=[{**PART, "tolerance": "10 %"}], capacitor__capacitance=ends)
    assert finding(guessed, "capacitor.range").verdict == "stop"
    part = {key: value for key, value in PART.items() if key != "tolerance"}
    unstated = finding(sheet_of(capacitor__with=[part], capacitor__capacitance=ends), "capacitor.range")
    assert unstated.verdict == "unproven"
    assert "may or may not" in unstated.because
    sure = sheet_of(capacitor__with=[PART], capacitor__capacitance=ends)
    assert finding(sure, "capacitor.range").verdict == "clear"
    never = {"min": "150 pF", "max": "300 pF"}
    beyond = sheet_of(capacitor__with=[part], capacitor__capacitance=never)
    assert finding(beyond, "capacitor.range").verdict == "stop"


@pytest.mark.parametrize("capacitance", ["330 pF", "150 pF"])
def test_padding_that_leaves_nothing_stops_the_range(capacitance: str) -> None:
    connection = "parallel" if capacitance == "330 pF" else "series"
    sheet = padded(capacitance=capacitance, connection=connection)
    assert finding(sheet, "capacitor.range").verdict == "stop"
    name = f"capacitor.padding.{capacitance.replace(' ', '-').lower()}"
    for each in ("capacitor.current", "capacitor.heat", f"{name}.voltage", f"{name}.current", f"{name}.heat"):
        assert finding(sheet, each).verdict == "unproven", each
        assert "padding" in finding(sheet, each).do


def test_parts_of_one_size_are_numbered() -> None:
    parts = [PART, {**PART, "capacitance": "0.1 nF"}, {**PART, "capacitance": "3.3 pF"}, PART]
    made = plain_design(capacitor__with=parts)
    assert list(padding_names(made).values()) == ["100-pf", "100-pf-no-2", "3-3-pf", "100-pf-no-3"]
    small = [{**PART, "capacitance": "20 pF"}] * 2
    assert {"capacitor.padding.20-pf.voltage", "capacitor.padding.20-pf-no-2.voltage"} <= set(
        names(sheet_of(capacitor__with=small))
    )


def test_padding_of_a_loop_that_is_not_computed_is_unproven_by_name() -> None:
    part = {**PART, "rated_reactive_power": "200 kVA"}
    sheet = sheet_of(capacitor__with=[part], loop__conductor__outer_diameter="100 mm")
    for name in (VOLTS, AMPS, REACTIVE, WARM, "capacitor.heat"):
        assert finding(sheet, name).verdict == "unproven"
        assert "proved to 0.06" in finding(sheet, name).because


def test_how_padding_is_joined_is_said() -> None:
    said = " ".join(padded(quality_factor=None).assumptions)
    assert "parallel parts are taken as joined across the capacitor first" in said
    assert "200 to 10000" in said
    assert "200 to 10000" not in " ".join(padded().assumptions)
    assert "Padding" not in " ".join(sheet_of().assumptions)


@pytest.mark.parametrize(
    ("keys", "word"),
    [
        ({"rated_current_at": None}, "at which frequency"),
        ({"rated_current_at": "14 MHz"}, "that at 14"),
        ({"rated_current": None, "rated_current_at": None}, "rated_current of the padding is not given"),
    ],
)
def test_padding_may_be_solid_so_amps_of_a_higher_frequency_do_not_count_its_heat(
    keys: dict[str, Any], word: str
) -> None:
    found = finding(padded(quality_factor={"low": 500, "likely": 500, "high": 500}, **keys), WARM)
    assert found.verdict == "unproven"
    assert word in found.because
    assert "W at worst, key-down" in found.because
    assert high(found) > 20.0
    assert "rated_reactive_power" in found.do


def test_amps_of_padding_above_their_frequency_are_lowered_as_those_of_the_main_part() -> None:
    """As the fourth root of the frequency (common practice)."""
    found = finding(padded(rated_current_at="1.8 MHz"), AMPS)
    assert found.limit is not None
    assert found.limit.value == pytest.approx(40.0 * (1.8 / 7.1) ** 0.25)
    assert (found.verdict, finding(padded(), AMPS).verdict) == ("narrow", "clear")
    assert "common practice" in found.because
    assert "common practice" in found.provenance


def test_reactive_power_of_padding_is_its_own_and_grows_as_the_power() -> None:
    """RMS volts times RMS amps; 100 pF have I = V omega C."""
    keys = {"rated_current_at": None, "rated_reactive_power": "200 kVA"}
    sheet = padded(**keys)
    found, volts, amps = (finding(sheet, name) for name in (REACTIVE, VOLTS, AMPS))
    assert high(found) == pytest.approx(high(volts) / 2**0.5 * high(amps), rel=1e-9)
    assert 0.85 < high(found) / ((high(volts) / 2**0.5) ** 2 * 2e6 * pi * 7.1 * 100e-12) < 1.1
    assert (found.verdict, finding(sheet, WARM).verdict) == ("clear", "clear")
    assert REACTIVE in finding(sheet, WARM).because
    assert found.power_at_limit == pytest.approx(100.0 * 200e3 / high(found))
    half = sheet_of(capacitor__with=[{**PART, **keys, "rated_current_at": "7.1 MHz"}], transmission__0__power="50 W")
    assert high(finding(half, REACTIVE)) == pytest.approx(high(found) / 2.0)
    small = padded(**{**keys, "rated_reactive_power": "50 kVA"})
    assert finding(small, REACTIVE).verdict == "stop"
    assert small.power_ceiling.held_by == REACTIVE


def test_heat_of_padding_is_held_against_its_own_watts() -> None:
    keys = {"rated_current_at": None, "quality_factor": {"low": 500, "likely": 500, "high": 500}}
    found = finding(padded(**keys, rated_dissipation="200 W"), WARM)
    assert found.verdict == "clear"
    assert found.power_at_limit == pytest.approx(100.0 * 200.0 / high(found))
    assert finding(padded(**keys, rated_dissipation="10 W"), WARM).verdict == "stop"
    guessed = finding(padded(**{**keys, "quality_factor": None}, rated_dissipation="200 W"), WARM)
    assert guessed.verdict == "narrow"
    assert "common practice" in guessed.because


@pytest.mark.parametrize("name", [VOLTS, AMPS])
def test_padding_that_is_kept_only_by_typical_losses_is_narrow(name: str) -> None:
    """A Q that is not stated lowers its volts and amps by what proves nothing, and no power rests on it."""
    keys = {"quality_factor": None}
    free = finding(padded(**keys), name)
    assert free.power_at_limit is not None
    assert free.limit is not None
    bare = free.limit.value * (100.0 / free.power_at_limit) ** 0.5
    assert bare > 1.005 * high(free)
    between = (bare + high(free)) / 2.0 * (1.5 if name == VOLTS else 1.25)
    rating = {"rated_voltage": f"{between:.2f} V"} if name == VOLTS else {"rated_current": f"{between:.4f} A"}
    found = finding(padded(**keys, **rating), name)
    assert found.verdict == "narrow"
    assert "typical" in found.because


# Made at home ---------------------------------------------------------------------------------------------


def test_sizes_alone_are_enough_for_the_range_and_prove_it_narrowly() -> None:
    sheet = made_of(TROMBONE)
    assert finding(sheet, "capacitor.geometry").verdict == "clear"
    assert finding(sheet, "capacitor.range").verdict == "narrow"
    short = finding(made_of(TROMBONE, length="0.5 m"), "capacitor.range")
    assert short.verdict == "stop"
    # 201 pF are needed; 0.735 m give 195 pF at the low end of PTFE and its sizes, and 226 pF at the high one.
    between = finding(made_of(TROMBONE, length="0.735 m"), "capacitor.range")
    assert between.verdict == "unproven"
    assert "may or may not" in between.because
    plate = finding(made_of(PLATE), "capacitor.range")
    assert plate.verdict == "narrow"
    assert finding(made_of(PLATE, plate_area="200 cm2"), "capacitor.range").verdict == "stop"


@pytest.mark.parametrize(
    ("most", "verdict"), [("290 pF", "clear"), ("230 pF", "narrow"), ("370 pF", "narrow"), ("500 pF", "unproven")]
)
def test_a_stated_capacitance_is_held_against_the_sizes(most: str, verdict: str) -> None:
    """A metre of it gives 267 to 311 pF; a quarter beyond either end is too far."""
    found = finding(made_of(TROMBONE, capacitance={"min": "20 pF", "max": most}), "capacitor.geometry")
    assert found.verdict == verdict
    assert "267 to 311 pF" in found.because


@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ({"kind": "trombone", "length": "1 m"}, ("length without", "dielectric", "inner_diameter")),
        ({"kind": "dielectric plate", "plate_area": "100 cm2"}, ("plate_area without dielectric and gap",)),
        ({"kind": "air variable", "dielectric": "PTFE"}, ("dielectric", "air variable")),
    ],
)
def test_sizes_that_tell_nothing_are_unproven_by_name(keys: dict[str, Any], words: tuple[str, ...]) -> None:
    found = finding(sheet_of(capacitor=keys), "capacitor.geometry")
    assert found.verdict == "unproven"
    assert all(word in found.because for word in words)
    assert "capacitor.dielectric" not in names(sheet_of(capacitor=keys))


def test_a_line_of_more_than_a_quarter_wavelength_is_no_capacitor() -> None:
    cable = {**TROMBONE, "kind": "coaxial stub", "dielectric": "polyethylene", "length": "9 m"}
    sheet = sheet_of(capacitor=cable)
    for name in ("capacitor.geometry", "capacitor.range"):
        assert finding(sheet, name).verdict == "unproven"
        assert "quarter" in finding(sheet, name).because


def test_the_dielectric_is_narrow_at_best_and_asks_for_half() -> None:
    """Half of the limit may be worked with (common practice); 5 W leave far less."""
    weak = finding(made_of(TROMBONE, transmission__0__power="1 W"), "capacitor.dielectric")
    assert weak.verdict == "narrow"
    assert weak.margin_asked == 2.0
    assert "PTFE" in weak.because
    assert weak.limit is not None
    assert weak.power_at_limit is not None
    # The losses of its own sizes are no credit: without them the volts are those of a capacitor that loses nothing.
    free = sheet_of().operating_points[0].figures["capacitor_peak_voltage"].high or 0.0
    without_loss = weak.limit.value * (1.0 / weak.power_at_limit) ** 0.5
    assert without_loss == pytest.approx(free * 0.1, rel=0.02)
    assert high(weak) < 0.8 * without_loss
    assert finding(made_of(TROMBONE, transmission__0__power="1000 W"), "capacitor.dielectric").verdict == "stop"
    asked = sheet_of(capacitor=TROMBONE, margins={"voltage": 3.0})
    assert finding(asked, "capacitor.dielectric").margin_asked == 3.0
    small = {"loop__diameter": "0.3 m", "loop__conductor__outer_diameter": "10 mm"}
    fast = made_of({**TROMBONE, "length": "0.1 m"}, transmission__0__frequency="55 MHz", **small)
    assert "frequency" in finding(fast, "capacitor.dielectric").because


def test_without_a_rating_the_dielectric_decides_and_with_one_both_do() -> None:
    alone = made_of(TROMBONE)
    volts, dielectric = finding(alone, "capacitor.voltage"), finding(alone, "capacitor.dielectric")
    assert (volts.limit, volts.value, volts.verdict) == (dielectric.limit, dielectric.value, dielectric.verdict)
    assert "the dielectric decides" in volts.because
    assert (volts.do, volts.source) == (dielectric.do, dielectric.source)
    assert "the dielectric decides" not in dielectric.because
    rated = made_of(TROMBONE, rated_voltage="20 kV", rated_voltage_kind="peak RF")
    assert finding(rated, "capacitor.voltage").limit != dielectric.limit
    assert finding(rated, "capacitor.dielectric").limit == dielectric.limit


def test_what_sizes_rest_on_is_said() -> None:
    said = " ".join(made_of(TROMBONE).assumptions)
    assert "PTFE: relative permittivity 2 to 2.1, loss tangent 0.0002 to 0.0003" in said
    assert "its tubes of the loop's own metal" in said
    assert "typical of its kind (trombone" not in said
    assert "typical of its kind (trombone" in " ".join(made_of({"kind": "trombone"}).assumptions)


# Heat -----------------------------------------------------------------------------------------------------

LOSSY = {"capacitor__series_resistance": None, "capacitor__quality_factor": {"low": 500, "likely": 700, "high": 900}}


def test_heat_is_held_against_a_dissipation_and_grows_as_the_power() -> None:
    sheet = sheet_of(**LOSSY, capacitor__rated_dissipation="200 W", transmission__0__mode="SSB")
    found = finding(sheet, "capacitor.heat")
    (point,) = sheet.operating_points
    keyed = point.figures["capacitor_dissipation"].high or 0.0
    assert found.verdict == "clear"
    assert high(found) == pytest.approx(0.5 * keyed)
    assert f"{keyed:.1f} W at worst, key-down" in found.because
    assert found.power_at_limit == pytest.approx(100.0 * 200.0 / high(found))
    assert found.power_at_margin == pytest.approx(100.0 * 200.0 / high(found) / 1.25)
    less = sheet_of(**LOSSY, capacitor__rated_dissipation="200 W", transmission__0__power="50 W")
    assert high(finding(less, "capacitor.heat")) == pytest.approx(high(found))  # half of the power, twice the duty
    assert finding(sheet_of(**LOSSY, capacitor__rated_dissipation="20 W"), "capacitor.heat").verdict == "stop"


def test_heat_that_is_kept_only_by_typical_losses_elsewhere_is_narrow() -> None:
    """A joint of a kind takes power from the capacitor, by a typical low end that proves nothing."""
    joint = [{"name": "wiper", "kind": "sliding contact", "count": 4, "at": "capacitor"}]
    free = finding(sheet_of(**LOSSY, capacitor__rated_dissipation="1 kW"), "capacitor.heat")
    with_joint = finding(sheet_of(**LOSSY, capacitor__rated_dissipation="1 kW", loop__joint=joint), "capacitor.heat")
    between = 1.25 * (high(free) + high(with_joint)) / 2.0
    rated = sheet_of(**LOSSY, capacitor__rated_dissipation=f"{between:.3f} W", loop__joint=joint)
    assert finding(rated, "capacitor.heat").verdict == "narrow"
    assert "typical" in finding(rated, "capacitor.heat").because


@pytest.mark.parametrize("kind", ["vacuum variable", "air variable"])
def test_a_current_rating_counts_the_heat_whatever_the_power(kind: str) -> None:
    """It stops by itself, so that the heat is in no doubt that only the power makes."""
    keys = {**LOSSY, "capacitor__kind": kind, "capacitor__rated_current_at": "28 MHz"}
    kept, beyond = sheet_of(**keys), sheet_of(**keys, capacitor__rated_current="10 A")
    assert [finding(each, "capacitor.current").verdict for each in (kept, beyond)] == ["clear", "stop"]
    for sheet in (kept, beyond):
        found = finding(sheet, "capacitor.heat")
        assert found.verdict == "clear"
        assert "see capacitor.current, which judges it" in found.because
        assert "kept" not in found.because
    assert "capacitor.heat" not in beyond.power_ceiling.left_out


@pytest.mark.parametrize("kind", ["ceramic", "mica", "dielectric plate", "coaxial stub", "trombone"])
def test_amps_of_a_higher_frequency_do_not_count_the_heat_of_a_solid_body(kind: str) -> None:
    """At lower ones the same amps have more volts, and the same loss tangent more watts."""
    keys = {**LOSSY, "capacitor__kind": kind}
    for at, word in ((None, "at which frequency"), ("28 MHz", "below, the same heat allows less")):
        sheet = sheet_of(**keys, capacitor__rated_current_at=at)
        assert finding(sheet, "capacitor.current").verdict == "clear"
        found = finding(sheet, "capacitor.heat")
        assert found.verdict == "unproven"
        assert word in found.because
        assert high(found) > 20.0
        assert "capacitor.heat" in sheet.power_ceiling.left_out
    counted = finding(sheet_of(**keys, capacitor__rated_current_at="7.1 MHz"), "capacitor.heat")
    assert counted.verdict == "clear"


def test_a_reactive_power_counts_the_heat_and_is_named_where_it_stops() -> None:
    keys = {**LOSSY, "capacitor__kind": "ceramic"}
    for rating, verdict in (("400 kVA", "clear"), ("50 kVA", "stop")):
        sheet = sheet_of(**keys, capacitor__rated_reactive_power=rating)
        assert finding(sheet, "capacitor.reactive_power").verdict == verdict
        found = finding(sheet, "capacitor.heat")
        assert found.verdict == "clear"
        assert "see capacitor.reactive_power, which judges it" in found.because
    both = sheet_of(**keys, capacitor__rated_reactive_power="50 kVA", capacitor__rated_current_at="7.1 MHz")
    assert "see capacitor.current and capacitor.reactive_power" in finding(both, "capacitor.heat").because


def test_watts_of_a_part_whose_losses_are_only_usual_are_narrow() -> None:
    keys = {"capacitor__series_resistance": None, "capacitor__rated_dissipation": "1 kW"}
    assert finding(sheet_of(**keys), "capacitor.heat").verdict == "narrow"
    assert finding(sheet_of(**LOSSY, capacitor__rated_dissipation="1 kW"), "capacitor.heat").verdict == "clear"


@pytest.mark.parametrize("kind", ["vacuum variable", "ceramic", "mica", "trombone", "dielectric plate"])
def test_heat_without_anything_to_hold_it_against_is_unproven_with_its_watts(kind: str) -> None:
    found = finding(sheet_of(capacitor={"kind": kind}), "capacitor.heat")
    assert found.verdict == "unproven"
    assert "W at worst, key-down" in found.because
    assert "rated_dissipation" in found.do


def test_heat_is_that_of_the_main_part_alone() -> None:
    """Its own volts and amps: half of the amps leave a quarter of the watts in a stated resistance."""
    ohms = {"low": "1 mohm", "likely": "1 mohm", "high": "1 mohm"}
    quiet = {"capacitor__series_resistance": ohms, "capacitor__rated_dissipation": "50 W"}
    part = {**PART, "capacitance": "100.3 pF", "quality_factor": {"low": 1e5, "likely": 1e5, "high": 1e5}}
    alone, shared = sheet_of(**quiet), sheet_of(**quiet, capacitor__with=[part])
    found = [finding(each, "capacitor.heat").value for each in (alone, shared)]
    assert found[0] is not None
    assert found[1] is not None
    assert (found[1].likely or 0.0) / (found[0].likely or 1.0) == pytest.approx(0.25, abs=0.01)


def test_a_loop_without_a_capacitor_has_none_of_these() -> None:
    sheet = sheet_of(capacitor={"kind": "none"}, loop__diameter="13.5 m")
    assert not [name for name in names(sheet) if name.startswith("capacitor.")]


# What a file may say --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "key", "answer"),
    [
        ({"capacitor__dielectric": "ptfe"}, "capacitor.dielectric", 'did you mean "PTFE"?'),
        ({"capacitor__dielectric": "polythylene"}, "capacitor.dielectric", 'did you mean "polyethylene"?'),
        ({"capacitor__dielectric": ""}, "capacitor.dielectric", "choose one of them"),
        ({"capacitor": {**TROMBONE, "inner_diameter": "22 mm"}}, "capacitor.inner_diameter", "exchange the two"),
        ({"capacitor": {**PLATE, "plate_area": "240 cm"}}, "capacitor.plate_area", "cm2"),
        ({"capacitor": {**PLATE, "plate_area": "240 cm\u00b2"}}, "capacitor.plate_area", "plain 2"),
        ({"capacitor": {**PLATE, "plate_area": "20 m2"}}, "capacitor.plate_area", "check the number"),
        ({"capacitor__rated_dissipation": "20 A"}, "capacitor.rated_dissipation", "W"),
        (
            {"capacitor__with": [{"connection": "series", "capacitance": "1 nF", "rated_voltage_kind": "peak RF"}]},
            "capacitor.with[0].rated_voltage_kind",
            "add rated_voltage",
        ),
        (
            {"capacitor__with": [{"connection": "series", "capacitance": "1 nF", "rated_current_at": "7 MHz"}]},
            "capacitor.with[0].rated_current_at",
            "add rated_current",
        ),
        ({"capacitor": {**PLATE, "dielectric": "air"}}, "capacitor.dielectric", 'kind = "air variable"'),
        (
            {"capacitor__with": [{"connection": "series", "capacitance": "1 nF", "tolerance": "60 %"}]},
            "capacitor.with[0].tolerance",
            "check the number",
        ),
    ],
)
def test_bad_input_is_told_with_what_would_do(changes: dict[str, Any], key: str, answer: str) -> None:
    (found,) = problems(**changes)
    assert found.key == key
    assert answer in f"{found.expected} {found.do}"


@pytest.mark.parametrize(("text", "square_metres"), [("0.024 m2", 0.024), ("240cm2", 0.024), ("24000 mm2", 0.024)])
def test_areas_are_read_in_squares(text: str, square_metres: float) -> None:
    made = plain_design(capacitor={**PLATE, "plate_area": text})
    assert made.capacitor.plate_area == pytest.approx(square_metres, rel=1e-12)


def test_air_is_a_dielectric_too() -> None:
    sheet = made_of(TROMBONE, dielectric="air")
    assert finding(sheet, "capacitor.geometry").verdict == "clear"
    assert "of air" in finding(sheet, "capacitor.dielectric").because


def test_a_full_carrier_for_tuning_counts_for_the_heat_too() -> None:
    """Speech is half of it on the mean: while tuning the part takes all of it."""
    speech = {**LOSSY, "capacitor__rated_dissipation": "200 W", "transmission__0__mode": "SSB"}
    plain, tuned = (
        finding(sheet_of(**speech, **more), "capacitor.heat")
        for more in ({}, {"transmission__0__tune_up": {"power": "100 W", "time": "30 s"}})
    )
    assert high(tuned) == pytest.approx(2.0 * high(plain))
    assert (tuned.power_at_margin or 0.0) == pytest.approx((plain.power_at_margin or 0.0) / 2.0)
