"""The sheet: verdicts, ceiling, and the contract's machine form."""

import json
import re
from datetime import date
from typing import Any

import pytest
from designs import MakeDesign
from hypothesis import given, settings
from hypothesis import strategies as st

import magsafe
from magsafe import words
from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.judge import Check, judge, judge_between, unproven
from magsafe.checks.sheet import Finding, Sheet, Verdict, worst
from magsafe.reports import telling
from magsafe.spread import Spread

VOLTS = Check("capacitor.voltage", "Does it stand?", "fit a wider gap", "the design", "V", qualifier="peak")
AT_LEAST = Check("loop.bandwidth", "Does it fit?", "retune", "the design", "Hz", dangerous="low")


def finding(sheet: Sheet, name: str) -> Finding:
    return next(f for f in sheet.all_findings() if f.id == name)


def sheet_of(design: MakeDesign, **changes: Any) -> Sheet:
    return magsafe.check(design(**changes), date(2026, 5, 4))


@pytest.mark.parametrize(
    ("high", "verdict"),
    [
        (3000.0, "clear"),
        (4000.0, "clear"),
        (4001.0, "narrow"),
        (6000.0, "narrow"),
        (6001.0, "stop"),
    ],
)
def test_the_dangerous_end_decides(high: float, verdict: str) -> None:
    found = judge(VOLTS, Spread(100.0, 2000.0, high), 6000.0, 1.5, power=100.0)
    assert found.verdict == verdict
    assert found.margin_found == pytest.approx(6000.0 / high)


def test_a_low_end_is_held_the_other_way_round() -> None:
    assert judge(AT_LEAST, Spread(2.0, 3.0, 4.0), 1.0, 1.5).verdict == "clear"
    assert judge(AT_LEAST, Spread(1.2, 3.0, 4.0), 1.0, 1.5).verdict == "narrow"
    assert judge(AT_LEAST, Spread(0.9, 3.0, 4.0), 1.0, 1.5).verdict == "stop"
    assert judge(AT_LEAST, Spread(0.9, 3.0, 4.0), 1.0, 1.5, worst="narrow").verdict == "narrow"


def test_an_unknown_dangerous_end_is_unproven_and_an_unknown_other_end_is_not() -> None:
    assert judge(VOLTS, Spread(1.0, 2.0, None), 6000.0, 1.5).verdict == "unproven"
    assert judge(VOLTS, Spread(None, 2.0, 3.0), 6000.0, 1.5).verdict == "clear"


def test_credit_for_typical_values_gives_at_best_narrow() -> None:
    found = judge(VOLTS, Spread(1.0, 2.0, 3900.0), 6000.0, 1.5, bare_end=4100.0, power=100.0)
    assert found.verdict == "narrow"
    assert "typical" in found.because
    assert found.power_at_margin == pytest.approx(100.0 * (6000.0 / 4100.0 / 1.5) ** 2)


def test_thin_evidence_gives_at_best_narrow_and_says_so() -> None:
    found = judge(VOLTS, Spread(1.0, 2.0, 3.0), 6000.0, 1.5, thin="nobody has read this row")
    assert found.verdict == "narrow"
    assert "nobody has read this row" in found.because


def test_a_range_is_held_with_its_whole_spread() -> None:
    need = Spread(90e-12, 100e-12, 110e-12)
    check = Check("capacitor.range", "Can it tune?", "another", "the design", "F")
    assert judge_between(check, need, 10e-12, 200e-12, loose=False).verdict == "clear"
    assert judge_between(check, need, 10e-12, 105e-12, loose=False).verdict == "stop"
    assert judge_between(check, need, 95e-12, 200e-12, loose=False).verdict == "stop"
    assert judge_between(check, need, 80e-12, 120e-12, loose=True).verdict == "narrow"
    assert judge_between(check, Spread(90e-12, 1e-10, None), 1e-12, 2e-10, loose=False).verdict == "unproven"
    assert judge_between(check, Spread(90e-12, 1e-10, None), 1e-12, 95e-12, loose=False).verdict == "stop"


def test_the_order_of_verdicts() -> None:
    assert worst(("clear", "narrow", "unproven", "stop")) == "stop"
    assert worst(("clear", "narrow", "unproven")) == "unproven"
    assert worst(("clear", "narrow")) == "narrow"
    assert worst(("clear",)) == "clear"


def test_unproven_names_what_is_missing() -> None:
    found = unproven(VOLTS, "capacitor.rated_voltage is not given")
    assert (found.verdict, found.because) == ("unproven", "capacitor.rated_voltage is not given")


MISSING = [
    (
        {"capacitor__rated_voltage": None, "capacitor__rated_voltage_kind": None},
        "capacitor.voltage",
        "rated_voltage",
    ),
    ({"capacitor__rated_voltage_kind": None}, "capacitor.voltage", "rated_voltage_kind"),
    (
        {"capacitor__kind": "ceramic", "capacitor__rated_voltage_kind": "DC test"},
        "capacitor.voltage",
        "DC test",
    ),
    ({"capacitor__rated_current": None}, "capacitor.current", "rated_current"),
    ({"capacitor__capacitance": None}, "capacitor.range", "capacitance"),
    ({"loop__conductor__outer_diameter": "100 mm"}, "loop.size", "proved to 0.06"),
    ({"loop__conductor__outer_diameter": "100 mm"}, "capacitor.voltage", "proved to 0.06"),
    ({"transmission__0__frequency": "50.1 MHz"}, "capacitor.voltage", "anti-resonance"),
    (
        {"capacitor__kind": "air variable", "capacitor__gap": "8 mm"},
        "capacitor.gap",
        "plate_thickness",
    ),
    (
        {"capacitor__with": [{"connection": "series", "capacitance": "1 nF"}]},
        "capacitor.padding.1000-pf.voltage",
        "rated_voltage",
    ),
    (
        {"capacitor__with": [{"connection": "series", "capacitance": "1 nF"}]},
        "capacitor.padding.1000-pf.current",
        "rated_current",
    ),
    ({"capacitor__with": [{"connection": "series", "capacitance": "150 pF"}]}, "capacitor.voltage", "padding"),
    ({"capacitor__kind": "ceramic"}, "capacitor.reactive_power", "rated_reactive_power"),
    (
        {"measured": [{"frequency": "7.1 MHz", "unloaded_q": 1000, "date": "2026-05-01"}]},
        "loop.measured",
        "measured",
    ),
    (
        {"capacitor__kind": "trombone", "capacitor__length": "1 m"},
        "capacitor.geometry",
        "length",
    ),
]


@pytest.mark.parametrize(("changes", "name", "word"), MISSING, ids=[f"{n}-{w}" for _, n, w in MISSING])
def test_what_is_missing_or_not_computed_is_unproven_by_name(
    design: MakeDesign, changes: dict[str, Any], name: str, word: str
) -> None:
    found = finding(sheet_of(design, **changes), name)
    assert found.verdict == "unproven"
    assert word in found.because
    assert found.do


def test_volts_do_not_need_the_capacitors_q(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__series_resistance=None)
    assert finding(sheet, "capacitor.voltage").verdict != "unproven"


def test_a_missing_rule_is_never_clear(design: MakeDesign) -> None:
    assert finding(sheet_of(design), "exposure.rules").verdict == "unproven"


def test_rms_ratings_are_lifted_to_the_crest(design: MakeDesign) -> None:
    found = finding(sheet_of(design, capacitor__rated_voltage_kind="RMS RF"), "capacitor.voltage")
    assert found.limit is not None
    assert found.limit.value == pytest.approx(15e3 * 2.0**0.5)


def test_a_current_rating_falls_above_its_frequency(design: MakeDesign) -> None:
    """I goes with f^-1/4 where series resistance goes with the root of f at the same heat: common practice."""

    def limit(stated_at: str) -> float:
        sheet = sheet_of(design, capacitor__rated_current_at=stated_at)
        found = finding(sheet, "capacitor.current").limit
        assert found is not None
        return found.value

    assert limit("7.1 MHz") == pytest.approx(100.0)
    assert limit("30 MHz") == pytest.approx(100.0)
    assert limit("1.775 MHz") == pytest.approx(100.0 / 2.0**0.5)


def test_stray_capacitance_moves_the_range(design: MakeDesign) -> None:
    ends = {"min": "10 pF", "max": "200 pF"}
    short = sheet_of(design, capacitor__capacitance=ends)
    helped = sheet_of(design, capacitor__capacitance=ends, capacitor__stray="5 pF")
    assert finding(short, "capacitor.range").verdict == "stop"
    assert finding(helped, "capacitor.range").verdict == "clear"


def test_a_fixed_capacitor_is_at_best_narrow(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__capacitance=None, capacitor__fixed="201 pF", capacitor__tolerance="5 %")
    assert finding(sheet, "capacitor.range").verdict == "narrow"
    sheet = sheet_of(design, capacitor__capacitance=None, capacitor__fixed="180 pF", capacitor__tolerance="5 %")
    assert finding(sheet, "capacitor.range").verdict == "stop"


def test_a_wide_signal_is_narrow_and_never_more(design: MakeDesign) -> None:
    sheet = sheet_of(design, transmission__0__signal_bandwidth="50 kHz")
    assert finding(sheet, "loop.bandwidth").verdict == "narrow"
    sheet = sheet_of(design, transmission__0__signal_bandwidth=None, transmission__0__mode="data")
    assert finding(sheet, "loop.bandwidth").verdict == "narrow"


def test_an_impossible_q_is_found(design: MakeDesign) -> None:
    """No design file can ask for it yet, so the judge is asked with a Q below the bound."""
    check = Check("loop.q_bound", "Possible?", "check", "McLean 1996 (memory)", "1", dangerous="low")
    assert judge(check, Spread(0.9, 0.95, 1.0), 1.0, 1.0).verdict == "stop"
    assert finding(sheet_of(design), "loop.q_bound").verdict == "clear"


def test_beyond_a_tenth_of_a_wavelength_the_sheet_shows_how_small_loop_forms_fail(
    design: MakeDesign,
) -> None:
    below = finding(sheet_of(design), "loop.size").because
    beyond = finding(sheet_of(design, transmission__0__frequency="14.2 MHz"), "loop.size").because
    assert "without the taper" not in below
    volts = re.search(r"would give \+([0-9.]+) % in volts, \+([0-9.]+) % in Q", beyond)
    assert volts is not None
    # Reference notes, section 3: volts high by up to 3 % at 0.15 wavelengths, Q by about half of 12 %.
    assert 1.0 < float(volts[1]) < 3.5
    assert 3.0 < float(volts[2]) < 8.0


# The ceiling -----------------------------------------------------------------------------------------------


def ceiling_at(design: MakeDesign, watts: float, **changes: Any) -> tuple[float, float]:
    sheet = sheet_of(design, transmission__0__power=f"{watts:.9f} W", **changes)
    assert sheet.power_ceiling.value is not None
    assert sheet.power_ceiling.at_limit is not None
    return sheet.power_ceiling.value, sheet.power_ceiling.at_limit


@settings(max_examples=30, deadline=None)
@given(watts=st.floats(0.01, 9000.0))
def test_the_ceiling_does_not_depend_on_the_power_given(watts: float) -> None:
    from designs import plain_design

    assert ceiling_at(plain_design, watts) == pytest.approx(ceiling_at(plain_design, 100.0), rel=1e-9)


@pytest.mark.parametrize("ground", ["none", "average", "perfect"])
@pytest.mark.parametrize("volts", ["2 kV", "15 kV"])
def test_at_the_ceiling_all_is_clear_and_one_percent_above_it_is_not(
    design: MakeDesign, ground: str, volts: str
) -> None:
    changes = {
        "site__ground": ground,
        "loop__centre_height": "2 m",
        "capacitor__rated_voltage": volts,
        "loop__joint": [{"name": "lugs", "kind": "sliding contact", "at": "capacitor"}],
    }
    value, at_limit = ceiling_at(design, 100.0, **changes)

    def counted(watts: float) -> list[Finding]:
        sheet = sheet_of(design, transmission__0__power=f"{watts:.12f} W", **changes)
        return [f for f in sheet.all_findings() if f.power_at_margin is not None]

    below, above = value * (1.0 - 1e-9), value * 1.01
    assert {f.verdict for f in counted(below) if not f.thin} == {"clear"}
    assert all((f.margin_found or 0.0) >= (f.margin_asked or 0.0) for f in counted(below))
    assert any((f.power_at_margin or 0.0) < above and f.verdict != "clear" for f in counted(above))
    assert "stop" in {f.verdict for f in counted(at_limit * 1.5)}
    assert at_limit >= value


def test_the_sheets_ceiling_is_the_least_and_names_its_transmission(design: MakeDesign) -> None:
    sheet = sheet_of(
        design,
        capacitor__capacitance__max="1500 pF",
        transmission=[
            {"frequency": "3.6 MHz", "power": "100 W"},
            {"frequency": "14.2 MHz", "power": "10 W"},
        ],
    )
    values = [point.power_ceiling.value or 0.0 for point in sheet.operating_points]
    assert sheet.power_ceiling.value == min(values)
    assert sheet.power_ceiling.transmission == values.index(min(values))
    assert sheet.power_ceiling.held_by in ("capacitor.voltage", "capacitor.current", "conductor.temperature")
    assert not sheet.power_ceiling.complete
    assert "exposure.rules" in sheet.power_ceiling.left_out


def test_nothing_counted_is_null_and_not_zero(design: MakeDesign) -> None:
    sheet = sheet_of(design, loop__conductor__outer_diameter="70 mm")
    assert sheet.power_ceiling.value is None
    assert sheet.power_ceiling.held_by is None


def test_what_stops_it_at_any_power_makes_the_ceiling_nothing(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__capacitance={"min": "500 pF", "max": "1000 pF"})
    assert sheet.power_ceiling.value == 0.0
    assert sheet.power_ceiling.held_by == "capacitor.range"
    assert telling.ceiling(sheet, sheet.power_ceiling) == "No power is clear: capacitor.range stops it at any power."


def test_an_am_tune_up_is_held_against_its_crest(design: MakeDesign) -> None:
    am = {"frequency": "7.1 MHz", "carrier_power": "10 W", "mode": "AM", "tune_up": {"power": "400 W", "time": "20 s"}}
    with pytest.raises(magsafe.DesignError, match="at most the envelope power"):
        design(transmission__0=am)
    design(transmission__0={**am, "tune_up": {"power": "40 W", "time": "20 s"}})


def test_credit_for_typical_values_that_alone_keeps_the_limit_is_told() -> None:
    found = judge(VOLTS, Spread(1.0, 2.0, 5000.0), 6000.0, 1.0, bare_end=7000.0, power=100.0)
    assert found.verdict == "narrow"
    assert "without that it exceeds" in found.because
    assert (found.power_at_limit or 0.0) < 100.0


def test_matches_and_hands_that_are_not_computed_are_unproven(design: MakeDesign) -> None:
    assert finding(sheet_of(design, feed={"coupling": "direct"}), "feed.coupling").verdict == "unproven"


@pytest.mark.parametrize("plane", ["vertical", "horizontal"])
def test_a_hand_at_the_loop_is_a_place_while_tuning(design: MakeDesign, plane: str) -> None:
    """Half a metre before the capacitor the electric field is that of its body: unproven, or worse by the magnetic."""
    changes = {"tuning": {"by": "hand at the loop"}, "loop__centre_height": "1.5 m", "loop__plane": plane}
    site = {"ground": "average", "rules": ["us-fcc"]}
    mute = finding(sheet_of(design, **changes, site=site), "exposure.us-fcc.trained.hand-at-the-capacitor")
    assert mute.verdict == "unproven"
    assert "tune_up" in mute.because
    weak, strong = (
        finding(
            sheet_of(design, **changes, site=site, transmission__0__tune_up={"power": watts, "time": "5 s"}),
            "exposure.us-fcc.trained.hand-at-the-capacitor",
        )
        for watts in ("0.1 W", "100 W")
    )
    assert weak.verdict == "unproven"
    assert weak.doubt
    assert strong.verdict == "stop"
    tune = {"transmission__0__tune_up": {"power": "1 W", "time": "10 s"}}
    for metres, implied in (("3 m", True), ("0.6 m", False)):
        own = {"name": "bench", "who": "trained", "in_plane": metres, "when": "tuning"}
        stated = sheet_of(design, **changes, site=site, place=[own], **tune)
        assert any("hand-at-the-capacitor" in f.id for f in stated.all_findings()) == implied


@pytest.mark.parametrize(("position", "height"), [("top", 4.5), ("bottom", 3.5), ("side", 4.0)])
def test_the_hand_is_at_the_height_of_the_capacitor(design: MakeDesign, position: str, height: float) -> None:
    """On a ladder, if no floor is below it: nothing says that the hand is further away than an arm."""
    changes = {"tuning": {"by": "hand at the loop"}, "loop__centre_height": "4 m", "capacitor__position": position}
    (place,) = design(**changes, site={"ground": "average", "rules": ["us-fcc"], "floors": ["0 m", "6 m"]}).place
    assert (place.floor or 0.0) + 1.2 == pytest.approx(height)
    assert place.along_axis == 0.5
    assert place.in_plane == (0.5 if position == "side" else 0.0)


def test_a_fixed_capacitor_without_tolerance_is_unproven(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__capacitance=None, capacitor__fixed="201 pF")
    assert finding(sheet, "capacitor.range").verdict == "unproven"


def test_a_current_rating_lowered_by_common_practice_is_at_best_narrow(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__rated_current="1000 A", capacitor__rated_current_at="2 MHz")
    assert finding(sheet, "capacitor.current").verdict == "narrow"


def test_every_transmission_has_a_name_of_its_own(design: MakeDesign) -> None:
    use = {"frequency": "7.1 MHz", "power": "100 W"}
    assert design(transmission=[use, use]).titles == ("7.1 MHz (1)", "7.1 MHz (2)")


def test_the_caution_tells_the_worst_of_all_transmissions_at_five_watts(design: MakeDesign) -> None:
    uses = [{"frequency": "3.6 MHz", "power": "400 W"}, {"frequency": "14.2 MHz", "power": "100 W"}]
    alone = [sheet_of(design, transmission=[{**use, "power": "5 W"}]) for use in uses]
    volts = max(s.operating_points[0].figures["capacitor_peak_voltage"].high or 0.0 for s in alone)
    assert words.amount(volts, "V") in sheet_of(design, transmission=uses).cautions[0]


# The machine form ------------------------------------------------------------------------------------------

FIGURES = (
    "perimeter_in_wavelengths",
    "radiation_resistance",
    "conductor_resistance",
    "joint_resistance",
    "capacitor_resistance",
    "ground_resistance",
    "total_resistance",
    "port_reactance",
    "inductance",
    "tuning_capacitance",
    "conductor_efficiency",
    "overall_efficiency",
    "unloaded_q",
    "loaded_q",
    "half_power_bandwidth",
    "swr2_bandwidth",
    "capacitor_peak_voltage",
    "capacitor_rms_current",
    "largest_current",
    "capacitor_dissipation",
    "conductor_temperature_rise",
    "coupling_loop_diameter",
)


def test_the_keys_of_the_contract_are_all_there(design: MakeDesign) -> None:
    made = json.loads(sheet_of(design).to_json())
    assert set(made) >= {
        "schema", "magsafe", "date", "design", "margins", "assumptions", "findings", "verdict", "power_ceiling",
        "operating_points", "cautions",
    }  # fmt: skip
    assert made["schema"] == "magsafe.sheet/1"
    assert made["date"] == "2026-05-04"
    assert set(made["design"]) == {"name", "sha256", "text"}
    assert set(made["power_ceiling"]) >= {
        "value", "at_limit", "unit", "transmission", "held_by", "complete", "left_out",
    }  # fmt: skip
    (point,) = made["operating_points"]
    assert set(point) >= {
        "name", "frequency", "power", "power_at_loop", "mode", "duty", "power_ceiling", "figures", "findings",
        "exposure",
    }  # fmt: skip
    assert set(point["figures"]) >= set(FIGURES)
    for figure in point["figures"].values():
        assert set(figure) >= {"low", "likely", "high", "unit", "method", "source"}
    for each in (*made["findings"], *point["findings"]):
        assert set(each) >= {
            "id", "place", "question", "value", "limit", "margin_asked", "margin_found", "verdict", "because", "do",
            "source", "provenance",
        }  # fmt: skip


def test_the_machine_form_follows_its_definitions(design: MakeDesign) -> None:
    made = json.loads(sheet_of(design, transmission__0__mode="SSB", transmission__0__signal_bandwidth=None).to_json())
    (point,) = made["operating_points"]
    figures = {name: figure["likely"] for name, figure in point["figures"].items()}
    frequency, quality = point["frequency"], figures["unloaded_q"]
    assert point["duty"] == 0.5
    assert figures["loaded_q"] == pytest.approx(quality / 2.0)
    assert figures["half_power_bandwidth"] == pytest.approx(frequency / figures["loaded_q"])
    assert figures["swr2_bandwidth"] == pytest.approx(frequency / (2.0**0.5 * quality))
    omega = 2.0 * 3.141592653589793 * frequency
    assert figures["tuning_capacitance"] == pytest.approx(1.0 / (omega * figures["port_reactance"]), rel=1e-9, abs=0.0)
    parts = ("radiation", "conductor", "joint", "capacitor", "ground")
    total = sum(figures[f"{part}_resistance"] for part in parts)
    assert figures["total_resistance"] == pytest.approx(total)
    current = (point["power_at_loop"] / total) ** 0.5
    assert figures["capacitor_rms_current"] == pytest.approx(current)
    assert figures["capacitor_peak_voltage"] == pytest.approx(2.0**0.5 * current * figures["port_reactance"])
    # In free space all that is radiated leaves; over real ground see test_ground_check and test_sky.
    assert figures["overall_efficiency"] == pytest.approx(figures["radiation_resistance"] / total)
    assert point["figures"]["overall_efficiency"]["why"] is None
    voltage = next(f for f in point["findings"] if f["id"] == "capacitor.voltage")
    assert voltage["margin_found"] == pytest.approx(voltage["limit"]["value"] / voltage["value"]["high"])
    assert made["margins"]["exposure"] == pytest.approx(1.259, abs=0.001)
    order = ["stop", "unproven", "narrow", "clear"]
    all_of = [f["verdict"] for f in (*made["findings"], *point["findings"])]
    assert made["verdict"] == min(all_of, key=order.index)


def test_a_figure_that_no_method_reaches_has_null_values_and_a_why(design: MakeDesign) -> None:
    unknown = sheet_of(design, site__ground="average").operating_points[0].figures["overall_efficiency"]
    assert (unknown.low, unknown.likely, unknown.high) == (None, None, None)
    assert unknown.why


def test_the_machine_form_reads_back_as_the_same_sheet(design: MakeDesign) -> None:
    sheet = sheet_of(design)
    assert Sheet.model_validate_json(sheet.to_json()) == sheet


def test_two_checks_of_one_design_are_equal(design: MakeDesign) -> None:
    assert sheet_of(design).to_json() == sheet_of(design).to_json()


def test_every_sheet_carries_the_cautions_and_promises_nothing(design: MakeDesign) -> None:
    sheet = sheet_of(design)
    said = " ".join(sheet.cautions)
    for subject in (
        "RF burns",
        "Implants",
        "Power lines",
        "Lightning",
        "Local regulation",
        "Fields",
    ):
        assert subject in said
    worst = sheet.operating_points[0].figures["capacitor_peak_voltage"].high or 0.0
    assert 7.9e3 < worst < 8.1e3
    assert f"{worst / 1e3:.2f} kV" in said
    text = sheet.to_json()
    assert not re.search(r"\b(is safe|are safe|compliant|approved|passes|passed)\b", text)


# Ends and evidence -----------------------------------------------------------------------------------------


def test_the_worse_of_figure_and_proof_holds_the_power_and_the_figure_tells_the_margin() -> None:
    """Neither a figure nor the proof behind it may lift the other."""
    lenient = judge(VOLTS, Spread(1.0, 2.0, 5000.0), 6000.0, 1.5, bare_end=100.0, power=100.0)
    assert lenient.verdict == "narrow"
    assert lenient.power_at_margin == pytest.approx(100.0 * (1.2 / 1.5) ** 2)
    assert lenient.power_at_limit == pytest.approx(100.0 * 1.2**2)
    credited = judge(VOLTS, Spread(1.0, 2.0, 3000.0), 6000.0, 1.5, bare_end=5000.0, power=100.0)
    assert credited.verdict == "narrow"
    assert credited.margin_found == pytest.approx(2.0)
    assert credited.power_at_limit == pytest.approx(100.0 * 1.2**2)
    assert credited.do.startswith("lower the power to 64 W, or ")


def test_a_limit_that_only_the_proof_exceeds_is_narrow_and_not_stop() -> None:
    found = judge(VOLTS, Spread(1.0, 2.0, 3000.0), 6000.0, 1.5, bare_end=7000.0, power=100.0)
    assert found.verdict == "narrow"
    assert found.power_at_limit == pytest.approx(100.0 * (6.0 / 7.0) ** 2)


def test_a_figure_of_nothing_is_clear_at_any_power() -> None:
    found = judge(VOLTS, Spread(0.0, 0.0, 0.0), 6000.0, 1.5, power=100.0)
    assert found.verdict == "clear"
    assert found.margin_found is None
    assert found.power_at_margin is None
    assert found.power_at_limit is None


def test_a_margin_that_is_just_kept_is_told_as_kept() -> None:
    assert "with the margin asked for" in judge(VOLTS, Spread(1.0, 2.0, 4000.0), 6000.0, 1.5).because


@given(high=st.floats(1.0, 1e5), margin=st.floats(1.0, 10.0), power=st.floats(1e-3, 1e4))
def test_at_the_power_told_the_margin_is_kept_to_the_last_digit(high: float, margin: float, power: float) -> None:
    found = judge(VOLTS, Spread(None, None, high), 6000.0, margin, power=power)
    assert found.power_at_margin is not None
    assert found.power_at_limit is not None
    kept = high * (found.power_at_margin / power) ** 0.5
    assert judge(VOLTS, Spread(None, None, kept), 6000.0, margin).verdict == "clear"
    reached = high * (found.power_at_limit / power) ** 0.5
    assert judge(VOLTS, Spread(None, None, reached), 6000.0, margin).verdict != "stop"


def test_a_range_that_just_reaches_is_enough_and_the_end_in_the_way_is_named() -> None:
    check = Check("capacitor.range", "Can it tune?", "another", "the design", "F")
    need = Spread(90e-12, 100e-12, 110e-12)
    assert judge_between(check, need, 90e-12, 110e-12, loose=False).verdict == "clear"
    for bottom, top, bound in ((10e-12, 105e-12, 105e-12), (95e-12, 200e-12, 95e-12)):
        limit = judge_between(check, need, bottom, top, loose=False).limit
        assert limit is not None
        assert limit.value == bound


def test_margins_and_powers_of_the_capacitor_are_its_own(design: MakeDesign) -> None:
    """Volts and amps each have a margin, and both grow with power."""
    asked = {"margins": {"voltage": 1.7, "current": 1.3}}
    volts = finding(sheet_of(design, **asked), "capacitor.voltage")
    amps = finding(sheet_of(design, **asked), "capacitor.current")
    assert (volts.margin_asked, amps.margin_asked) == (1.7, 1.3)
    for each in (volts, amps):
        assert each.margin_found is not None
        assert each.margin_asked is not None
        assert each.power_at_margin == pytest.approx(100.0 * (each.margin_found / each.margin_asked) ** 2)
    assert volts.limit is not None
    assert volts.limit.value == pytest.approx(15e3)  # a peak rating is held as it is


def test_credit_for_a_typical_joint_makes_neither_volts_nor_amps_clear(design: MakeDesign) -> None:
    """A sliding contact lowers both by what nobody measured: within the margin only by that."""
    joint = [{"name": "wiper", "kind": "sliding contact", "at": "capacitor"}]
    bare, eased = sheet_of(design), sheet_of(design, loop__joint=joint)
    for name, rating in (("voltage", "rated_voltage"), ("current", "rated_current")):
        without, with_joint = (finding(sheet, f"capacitor.{name}").value for sheet in (bare, eased))
        assert without is not None
        assert with_joint is not None
        between = ((without.high or 0.0) * (with_joint.high or 0.0)) ** 0.5
        unit, margin = ("V", 1.5) if name == "voltage" else ("A", 1.25)
        stated = {f"capacitor__{rating}": f"{between * margin:.3f} {unit}"}
        found = finding(sheet_of(design, loop__joint=joint, **stated), f"capacitor.{name}")
        assert found.verdict == "narrow"
        assert "typical" in found.because


@pytest.mark.parametrize("kind", ["DC working", "DC test"])
def test_no_direct_voltage_rating_is_held_against_rf_as_it_stands(design: MakeDesign, kind: str) -> None:
    """Of an air capacitor radio frequency takes a fifth off at least, whatever was tested."""
    found = finding(
        sheet_of(design, capacitor__kind="air variable", capacitor__rated_voltage_kind=kind), "capacitor.voltage"
    )
    assert found.limit is not None
    assert found.limit.value <= 0.8 * 15e3
    assert found.verdict != "clear"


def test_stray_capacitance_lifts_the_least_as_well_as_the_most(design: MakeDesign) -> None:
    """What is always across the plates cannot be tuned away."""
    ends = {"min": "198 pF", "max": "500 pF"}
    assert finding(sheet_of(design, capacitor__capacitance=ends), "capacitor.range").verdict == "clear"
    lifted = finding(sheet_of(design, capacitor__capacitance=ends, capacitor__stray="10 pF"), "capacitor.range")
    assert lifted.verdict == "stop"
    assert lifted.limit is not None
    assert lifted.limit.value == pytest.approx(208e-12, rel=1e-9, abs=0.0)


def test_padding_counts_on_its_own_frequencies(design: MakeDesign) -> None:
    sheet = sheet_of(
        design,
        capacitor__with=[{"connection": "series", "capacitance": "1 nF", "on": ["7.1 MHz"]}],
        transmission=[{"frequency": "10.1 MHz", "power": "10 W"}, {"frequency": "7.1 MHz", "power": "10 W"}],
    )
    free, padded = sheet.operating_points
    own = [next(f for f in p.findings if f.id == "capacitor.voltage") for p in (free, padded)]
    assert own[0].value is not None
    assert own[1].value is not None
    assert own[0].value.high == free.figures["capacitor_peak_voltage"].high
    assert (own[1].value.high or 0.0) < 0.9 * (padded.figures["capacitor_peak_voltage"].high or 0.0)
    assert (own[0].verdict, own[1].verdict) == ("clear", "narrow")
    assert not [f for f in free.findings if "padding" in f.id]
    own_ids = {f.id.rsplit(".", 1)[1] for f in padded.findings if ".padding." in f.id}
    assert own_ids == {"voltage", "current", "heat"}


def test_the_signal_is_held_against_the_swr_2_bandwidth(design: MakeDesign) -> None:
    """The stated width goes before the mode's; 2700 Hz of SSB and 500 Hz of CW are common practice."""
    for changes, hertz in (
        ({"transmission__0__signal_bandwidth": "1.2 kHz", "transmission__0__mode": "SSB"}, 1200.0),
        ({"transmission__0__signal_bandwidth": None, "transmission__0__mode": "SSB"}, 2700.0),
        ({"transmission__0__signal_bandwidth": None, "transmission__0__mode": "CW"}, 500.0),
    ):
        sheet = sheet_of(design, **changes)
        found = finding(sheet, "loop.bandwidth")
        assert found.limit is not None
        assert found.value is not None
        assert found.limit.value == hertz
        width = sheet.operating_points[0].figures["swr2_bandwidth"]
        assert (found.value.low, found.value.high) == (width.low, width.high)


def test_q_is_held_against_the_bound_itself(design: MakeDesign) -> None:
    found = finding(sheet_of(design), "loop.q_bound")
    assert found.limit is not None
    assert found.limit.value == 1.0


def test_the_caution_tells_the_volts_at_five_watts(design: MakeDesign) -> None:
    """Volts go with the root of the power: a twentieth of the power leaves 22 % of the volts."""
    sheet = sheet_of(design)
    high = sheet.operating_points[0].figures["capacitor_peak_voltage"].high or 0.0
    told = f"still {high * 0.05**0.5 / 1e3:.2f} kV peak at 5 W"
    assert told in sheet.cautions[0]


def test_duty_and_power_at_the_loop_are_those_of_the_design(design: MakeDesign) -> None:
    sheet = sheet_of(design, transmission__0__duty="35 %", feed={"line_loss": "3 dB"})
    (point,) = sheet.operating_points
    assert point.duty == pytest.approx(0.35)
    assert point.power == 100.0
    assert point.power_at_loop == pytest.approx(100.0 * 10.0**-0.3)


def counted(name: str, verdict: Verdict, at_margin: float | None, at_limit: float | None, **more: Any) -> Finding:
    keys: dict[str, Any] = {
        "question": "Does it hold?", "value": None, "limit": None, "margin_asked": 1.5, "margin_found": 2.0,
        "because": "so", "do": "nothing", "source": "the design", "provenance": "verified",
    }  # fmt: skip
    return Finding(id=name, verdict=verdict, power_at_margin=at_margin, power_at_limit=at_limit, **{**keys, **more})


def test_the_ceiling_is_the_least_of_each_and_the_margin_decides_who_holds_it() -> None:
    made = ceiling(
        [counted("a", "clear", 50.0, 90.0), counted("b", "clear", 40.0, 95.0), counted("c", "clear", None, None)], 3
    )
    assert (made.value, made.held_by, made.at_limit, made.transmission) == (40.0, "b", 90.0, 3)
    assert made.complete
    assert made.left_out == ()
    short = ceiling([counted("a", "clear", 50.0, 90.0), counted("d", "unproven", None, None)], 0)
    assert not short.complete
    assert short.left_out == ("d",)


def test_thin_evidence_is_named_and_counts_with_its_margin() -> None:
    """A finding whose evidence lets it be narrow at best, whichever row of its rule binds."""
    made = ceiling([counted("thin", "narrow", 50.0, 90.0, thin=True), counted("read", "narrow", 60.0, 90.0)], 0)
    assert made.on_thin_evidence == ("thin",)
    assert made.value == 50.0


def test_a_doubted_finding_holds_the_power_and_proves_nothing() -> None:
    for verdict in ("stop", "unproven"):
        made = ceiling([counted("near", verdict, 5.0, 9.0, doubt="metal"), counted("far", "clear", 50.0, 90.0)], 0)
        assert (made.value, made.left_out, made.complete) == (5.0, ("near",), False)


def test_the_least_ceiling_keeps_what_any_transmission_leaves_out() -> None:
    low = ceiling([counted("a", "narrow", 10.0, 90.0, thin=True)], 0)
    high = ceiling(
        [
            counted("a", "clear", 30.0, 50.0),
            counted("b", "narrow", 40.0, 60.0, thin=True),
            counted("d", "unproven", None, None),
        ],
        1,
    )
    made = least([low, high])
    assert (made.value, made.transmission, made.held_by) == (10.0, 0, "a")
    assert made.at_limit == 50.0
    assert made.left_out == ("d",)
    assert not made.complete
    assert made.on_thin_evidence == ("a", "b")
