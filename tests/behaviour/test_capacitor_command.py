"""`magsafe capacitor`: sizes that hold when they are built, scaling with power, errors, layout, exit statuses."""

import json
from dataclasses import replace
from datetime import date
from io import StringIO
from math import sqrt
from pathlib import Path
from typing import Any

import pytest
from commands import run
from designs import MakeDesign, file_of, plain_tree
from rich.console import Console

import magsafe
from magsafe.analysis.chain import Chain
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.sheet import Finding
from magsafe.checks.sizing import POWERS, USUAL, at_power, sizing, usual_rating, with_quality
from magsafe.checks.sizing_sheet import CapacitorSheet
from magsafe.design import tables
from magsafe.design.model import Design
from magsafe.physics.air_gap import gap_rating
from magsafe.physics.gap_size import gap_for
from magsafe.reports.sizing import show_sizing

SAMPLES = Path(__file__).parents[2] / "sample_designs"
TWO = [{"frequency": "3.6 MHz", "power": "100 W"}, {"frequency": "14.2 MHz", "power": "25 W"}]
WIDE = {"min": "5 pF", "max": "1500 pF"}
TYPICAL: dict[str, Any] = {"capacitor__series_resistance": None}


def sample(name: str) -> Design:
    return magsafe.read_design(SAMPLES / f"{name}.toml")


def capacitor(*arguments: str, **changes: Any) -> Any:
    return run("capacitor", "-", *arguments, given=file_of(plain_tree(**changes)))


def printed(sheet: CapacitorSheet, width: int = 80) -> str:
    """Return what is printed of a sheet on a terminal without colour."""
    to = StringIO()
    show_sizing(sheet, Console(file=to, width=width, highlight=False, markup=False, emoji=False))
    return to.getvalue()


def all_findings(sheet: CapacitorSheet) -> list[Finding]:
    return [*sheet.shared_findings, *(each for found in sheet.findings for each in found)]


# The command ---------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", sorted(SAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_every_sample_is_sized_in_80_columns(path: Path) -> None:
    done = run("capacitor", str(path))
    assert done.stderr == ""
    sheet = sizing(magsafe.read_design(path))
    assert done.returncode == {"clear": 0, "narrow": 0, "stop": 1, "unproven": 3}[sheet.verdict]
    assert max(map(len, done.stdout.splitlines())) <= 80
    assert not any(line.endswith(" ") for line in done.stdout.splitlines())
    assert "\x1b" not in done.stdout


def test_what_is_told_and_in_which_order() -> None:
    text = printed(sizing(sample("quay_rail")))
    headings = (
        "What the capacitor must be",
        "Each transmission: likely, from least to most",
        "With power",
        "The same loop with each kind of capacitor",
        "Tuning",
        "The capacitor that the design has",
        "What the sizes rest on",
        "Cautions",
    )
    lines = text.splitlines()
    places = [lines.index(heading) for heading in headings]
    assert places == sorted(places)
    assert text.startswith(("▲ narrow", "[narrow]"))
    assert "Volts: 7.36 kV peak at worst in 20 m voice; rated 11.0 kV peak or more" in " ".join(text.split())
    assert "7 to 7.2 MHz (40 m, Regions 1 and 3); 7 to 7.3 MHz (40 m, Region 2)" in " ".join(text.split())
    assert "common practice" in text
    row = next(line for line in lines if line.startswith("100 "))
    assert row.split() == ["100", "7.36", "15", "43.2", "75", "11.6", "4.8", "55.7"]


def test_the_machine_form_is_that_of_its_model() -> None:
    done = run("capacitor", str(SAMPLES / "quay_rail.toml"), "--json")
    assert done.stderr == ""
    made = json.loads(done.stdout)
    assert made["schema"] == "magsafe.capacitor/1"
    again = CapacitorSheet.model_validate_json(done.stdout)
    assert json.loads(again.to_json()) == made
    assert made["peak_voltage"]["unit"] == "V"
    assert 7000.0 < made["peak_voltage"]["at_worst"] < 8000.0
    assert 1e-12 < made["capacitance"]["least"] < made["capacitance"]["most"] < 1e-9
    assert 1e-3 < made["gap"]["each_of_two"] < made["gap"]["single"] < 0.1


def test_exit_statuses() -> None:
    assert capacitor(capacitor__rated_voltage="2 kV").returncode == 1
    assert capacitor(capacitor__rated_current=None).returncode == 3
    assert capacitor(capacitor__rated_voltage="2").returncode == 2
    assert run("capacitor", "no_such_file.toml").returncode == 2


@pytest.mark.parametrize("power", ["100", "", "100 V", "-5 W", "1e3 W", "100 MW", "0 W", "a lot", "100,5 W"])
def test_a_power_that_is_none_is_told_as_in_a_file(power: str) -> None:
    done = capacitor("--power", power)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.startswith("magsafe  --power\n  found     ")
    assert "\n  expected  a power" in done.stderr
    assert "\n  do        " in done.stderr
    assert "Traceback" not in done.stderr


def test_a_loop_without_a_capacitor_has_none_to_size() -> None:
    done = run("capacitor", str(SAMPLES / "pier_head_square.toml"))
    assert done.returncode == 0
    assert "without a capacitor" in done.stdout
    made = sizing(sample("pier_head_square"))
    assert made.peak_voltage is None
    assert "without a capacitor" in (made.why or "")


@pytest.mark.parametrize("width", [40, 60, 80, 100])
def test_any_width_is_printed(width: int) -> None:
    lines = printed(sizing(sample("slipway_portable")), width).splitlines()
    assert max(map(len, lines)) <= width
    assert "capacitor.voltage" in "".join(lines)
    assert "…-" not in "".join(lines)


def test_ascii_streams_get_ascii_and_colour_is_for_terminals() -> None:
    path = str(SAMPLES / "lighthouse_gallery.toml")
    plain = run("capacitor", path, env={"PYTHONIOENCODING": "ascii"})
    assert plain.stdout.isascii()
    assert plain.stdout.startswith("[unproven]")
    assert "\x1b[" in run("capacitor", path, env={"FORCE_COLOR": "1"}).stdout
    assert "\x1b[" not in run("capacitor", path, env={"NO_COLOR": "1"}).stdout


def test_help_says_what_a_full_wave_loop_gets() -> None:
    text = " ".join(run("capacitor", "--help").stdout.split())
    assert "used without a capacitor" in text
    assert "--power" in text


# Sizes ---------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("ground", ["none", "average"])
def test_a_capacitor_of_the_sizes_told_is_clear(design: MakeDesign, ground: str) -> None:
    """The loop is closed: what is told goes into a design, and the checks find it enough, and barely so."""
    around: dict[str, Any] = {"transmission": TWO, "site__ground": ground, "loop__centre_height": "2 m", **TYPICAL}
    asked = sizing(design(**around))
    assert asked.capacitance is not None
    assert asked.peak_voltage is not None
    assert asked.rms_current is not None

    def verdicts(volts: float, amps: float, widened: float) -> dict[str, set[str]]:
        needed = asked.capacitance
        assert needed is not None
        ends = {
            "min": f"{(needed.least or 0.0) * 1e12 / widened:.9f} pF",
            "max": f"{(needed.most or 0.0) * 1e12 * widened:.9f} pF",
        }
        built = design(
            **around,
            capacitor__capacitance=ends,
            capacitor__rated_voltage=f"{volts:.6f} V",
            capacitor__rated_current=f"{amps:.6f} A",
        )
        found: dict[str, set[str]] = {}
        for each in all_findings(sizing(built)):
            found.setdefault(each.id, set()).add(each.verdict)
        return found

    enough = verdicts(asked.peak_voltage.needed * 1.0001, asked.rms_current.needed * 1.0001, 1.0001)
    assert enough["capacitor.voltage"] == enough["capacitor.current"] == enough["capacitor.range"] == {"clear"}
    short = verdicts(asked.peak_voltage.needed * 0.999, asked.rms_current.needed * 0.999, 0.999)
    assert "narrow" in short["capacitor.voltage"]
    assert "narrow" in short["capacitor.current"]
    assert "stop" in short["capacitor.range"]


@pytest.mark.parametrize("sections", [1, 2])
@pytest.mark.parametrize("margin", [1.5, 3.0])
def test_a_gap_of_the_size_told_keeps_the_margin_and_a_narrower_one_does_not(
    design: MakeDesign, sections: int, margin: float
) -> None:
    around: dict[str, Any] = {
        "capacitor__kind": "split-stator air",
        "capacitor__rated_voltage": None,
        "capacitor__rated_voltage_kind": None,
        "capacitor__sections_in_series": sections,
        "site__altitude": "1500 m",
        "site__air_temperature": "30 degC",
        "margins": {"voltage": margin},
    }
    needed = sizing(design(**around)).gap
    assert needed is not None
    told = needed.single if sections == 1 else needed.each_of_two
    assert told is not None

    def margin_kept(gap: float) -> bool:
        built = design(
            **around,
            capacitor__gap=f"{gap * 1e3:.6f} mm",
            capacitor__plate_thickness=f"{gap * 0.5e3:.6f} mm",
            capacitor__plate_edge="round",
        )
        found = next(each for each in all_findings(sizing(built)) if each.id == "capacitor.gap")
        # No gap is clear: what is taken off is common practice. The power at the margin tells whether it is kept.
        assert found.power_at_margin is not None
        return found.power_at_margin >= 100.0

    assert margin_kept(told * 1.0001)
    assert not margin_kept(told * 0.999)


@pytest.mark.parametrize("volts", [300.0, 2e3, 8e3, 30e3, 80e3])
@pytest.mark.parametrize(("density", "megahertz"), [(1.0, 7.1), (0.7, 28.0), (0.75, 1.85)])
def test_a_gap_is_the_inverse_of_its_rating(volts: float, density: float, megahertz: float) -> None:
    def allowed(gap: float) -> float:
        return gap_rating(gap, 0.5 * gap, density, megahertz * 1e6, square_cut=False).allowed

    gap = gap_for(volts, density, megahertz * 1e6)
    narrowest = 1e-4 / density / 0.9
    assert allowed(gap) >= volts
    assert gap <= narrowest * 1.001 or allowed(gap * (1.0 - 1e-5)) < volts


def test_a_gap_grows_with_volts_and_frequency_and_in_thin_air() -> None:
    gaps = [gap_for(volts, 0.9, 14e6) for volts in (500.0, 1e3, 5e3, 20e3, 50e3)]
    assert gaps == sorted(gaps)
    assert gap_for(5e3, 0.7, 14e6) > gap_for(5e3, 1.0, 14e6)
    assert gap_for(9e3, 0.9, 28e6) >= gap_for(9e3, 0.9, 2e6)
    # The ends of the range are asked at any density without leaving it by a last bit.
    for density in (0.2, 0.7, 0.9, 0.92633, 0.95, 1.1, 1.2):
        assert gap_for(1.0, density, 7e6) * density == pytest.approx(1e-4 / 0.9)
        assert gap_for(3e3, density, 7e6) > 0.0
    with pytest.raises(ValueError, match="wider than"):
        gap_for(1e6, 1.0, 7e6)
    with pytest.raises(ValueError, match="frequency"):
        gap_for(1e3, 1.0, 144e6)


def test_the_widest_gap_of_all_transmissions_counts(design: MakeDesign) -> None:
    """Fewer volts at a higher frequency may ask for more air, where electrons turn round within the gap."""
    air: dict[str, Any] = {
        "capacitor__capacitance": WIDE,
        "site__altitude": "500 m",
        "site__air_temperature": "25 degC",
    }

    def at(frequency: str, volts: float) -> dict[str, Any]:
        first = sizing(design(**air, transmission=[{"frequency": frequency, "power": "100 W"}])).peak_voltage
        assert first is not None
        return {"frequency": frequency, "power": f"{100.0 * (volts / first.at_worst) ** 2:.9f} W"}

    uses = [at("3.6 MHz", 3020.0), at("24.9 MHz", 3000.0)]
    alone = [sizing(design(**air, transmission=[use])).gap for use in uses]
    gap = sizing(design(**air, transmission=uses)).gap
    assert gap is not None
    assert alone[0] is not None
    assert alone[1] is not None
    assert (alone[1].single or 0.0) > (alone[0].single or 0.0) * 1.01
    assert gap == alone[1]


def test_usual_ratings_are_the_next_at_or_above() -> None:
    for needed in (1.0, 1.01, 2.99, 7.5, 7.6, 99.0, 11.4e3, 30.0e3):
        usual = usual_rating(needed)
        assert usual >= needed * (1.0 - 1e-9)
        digits = usual / 10.0 ** int(f"{usual:e}".split("e")[1])
        assert min(abs(digits - step) for step in USUAL) < 1e-9
        below = [step * 10.0**k for step in USUAL for k in range(6) if step * 10.0**k < usual * (1.0 - 1e-9)]
        assert max(below, default=0.0) < needed


def test_the_capacitance_has_its_stray_taken_off_and_never_less_than_nothing(design: MakeDesign) -> None:
    bare, with_stray = sizing(design()).capacitance, sizing(design(capacitor__stray="5 pF")).capacitance
    assert bare is not None
    assert with_stray is not None
    assert with_stray.least == pytest.approx((bare.least or 0.0) - 5e-12, abs=1e-20)
    assert with_stray.most == pytest.approx((bare.most or 0.0) - 5e-12, abs=1e-20)
    drowned = sizing(design(capacitor__stray="900 pF")).capacitance
    assert drowned is not None
    assert drowned.least == drowned.most == 0.0


def test_a_height_that_is_not_stated_leaves_the_largest_capacitance_open(design: MakeDesign) -> None:
    made = sizing(design(site__ground=None))
    assert made.capacitance is not None
    assert made.capacitance.most is None
    assert "centre_height" in (made.capacitance.why or "")
    assert made.peak_voltage is not None
    assert "an amount that is not known" in " ".join(printed(made).split())


def test_a_transmission_that_is_not_computed_is_named_and_left_out(design: MakeDesign) -> None:
    uses = [{"frequency": "7.1 MHz", "power": "100 W"}, {"frequency": "50.1 MHz", "power": "1 W"}]
    made, alone = sizing(design(transmission=uses)), sizing(design())
    assert made.peak_voltage == alone.peak_voltage
    assert made.transmissions[1].why
    assert made.verdict == "unproven"
    assert "Not counted: 50.1 MHz." in printed(made)
    nothing = sizing(design(loop__conductor__outer_diameter="100 mm"))
    assert nothing.peak_voltage is None
    assert not nothing.powers
    assert not nothing.kinds
    assert "Not computed" in printed(nothing)


# Power ---------------------------------------------------------------------------------------------------------------


def test_volts_and_amps_grow_as_the_root_of_the_power_and_heat_as_the_power(design: MakeDesign) -> None:
    made = design(transmission=TWO, capacitor__capacitance=WIDE, **TYPICAL)
    one, four = sizing(made, 100.0), sizing(made, 400.0)
    assert one.peak_voltage is not None
    assert four.peak_voltage is not None
    assert one.rms_current is not None
    assert four.rms_current is not None
    assert four.peak_voltage.at_worst == pytest.approx(2.0 * one.peak_voltage.at_worst)
    assert four.rms_current.at_worst == pytest.approx(2.0 * one.rms_current.at_worst)
    assert four.dissipation == pytest.approx(4.0 * (one.dissipation or 0.0))
    assert four.capacitance == one.capacitance


@pytest.mark.parametrize("power", [5.0, 50.0, 400.0])
def test_each_row_of_powers_is_the_sheet_at_that_power(design: MakeDesign, power: float) -> None:
    made = design(transmission=TWO, capacitor__capacitance=WIDE, **TYPICAL)
    row = next(each for each in sizing(made).powers if each.power == power)
    sheet = sizing(made, power)
    assert sheet.peak_voltage is not None
    assert sheet.rms_current is not None
    assert sheet.gap is not None
    assert row.peak_voltage == pytest.approx(sheet.peak_voltage.at_worst)
    assert row.voltage_usual == sheet.peak_voltage.usual
    assert row.rms_current == pytest.approx(sheet.rms_current.at_worst)
    assert row.current_needed == pytest.approx(sheet.rms_current.needed)
    assert row.gap == pytest.approx(sheet.gap.single, rel=1e-5)
    assert row.gap_each_of_two == pytest.approx(sheet.gap.each_of_two, rel=1e-5)
    assert row.dissipation == pytest.approx(sheet.dissipation)


def test_rows_are_of_the_powers_that_are_used() -> None:
    assert POWERS == (5.0, 10.0, 25.0, 50.0, 100.0, 200.0, 400.0, 1000.0, 1500.0)
    with_volts = sizing(sample("quay_rail")).powers
    ratio = with_volts[-1].peak_voltage / with_volts[0].peak_voltage
    assert ratio == pytest.approx(sqrt(1500.0 / 5.0))


def test_a_power_holds_for_every_transmission_and_no_tune_up_exceeds_it() -> None:
    made = at_power(sample("breakwater_mast"), 5.0)
    assert [each.envelope_power for each in made.transmission] == [5.0, 5.0]
    assert made.transmission[1].tune_up is not None
    assert made.transmission[1].tune_up.power == 5.0
    carrier = at_power(magsafe.parse_design(file_of(plain_tree(
        transmission__0={"frequency": "7.1 MHz", "carrier_power": "10 W", "mode": "AM"}
    ))), 100.0)  # fmt: skip
    assert carrier.transmission[0].envelope_power == 100.0


def test_the_verdict_is_that_at_the_power_asked_for() -> None:
    path = str(SAMPLES / "breakwater_mast.toml")
    assert sizing(sample("breakwater_mast")).verdict == "stop"
    done = run("capacitor", path, "--power", "5 W", "--json")
    assert json.loads(done.stdout)["power"] == 5.0
    assert done.returncode == 0
    assert "at 5 W PEP throughout" in printed(sizing(sample("breakwater_mast"), 5.0))


# Beside the check -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("path", sorted(SAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_its_findings_are_those_of_the_check(path: Path) -> None:
    made = magsafe.read_design(path)
    # A measured Q is that of the loop with the capacitor that it has, so none is counted here.
    unmeasured = made.model_copy(update={"measured": []})
    own = [each for each in magsafe.check(unmeasured).all_findings() if each.id.startswith("capacitor.")]
    sheet = sizing(made)
    assert any("The Q in [measured]" in note for note in sheet.notes) == bool(made.measured)
    assert sorted(all_findings(sheet), key=str) == sorted(own, key=str)
    assert sheet.verdict == min(
        (each.verdict for each in own), key=["stop", "unproven", "narrow", "clear"].index, default="clear"
    )


@pytest.mark.parametrize("name", ["slipway_portable", "breakwater_mast"])
def test_the_ceiling_is_that_of_the_check_where_the_capacitor_holds_it(name: str) -> None:
    whole, own = magsafe.check(sample(name)).power_ceiling, sizing(sample(name)).power_ceiling
    assert whole.held_by is not None
    assert whole.held_by.startswith("capacitor.")
    assert own is not None
    assert (own.value, own.held_by, own.transmission) == (whole.value, whole.held_by, whole.transmission)


def test_volts_and_amps_are_those_that_the_check_counts(design: MakeDesign) -> None:
    made = design(transmission=TWO, capacitor__capacitance=WIDE, **TYPICAL)
    points = [operating_point(made, each) for each in made.transmission]
    sheet = sizing(made)
    assert sheet.peak_voltage is not None
    assert sheet.rms_current is not None
    assert sheet.peak_voltage.at_worst == max(point.bare_voltage or 0.0 for point in points)
    assert sheet.rms_current.at_worst == max(point.bare_current or 0.0 for point in points)
    assert sheet.peak_voltage.needed == pytest.approx(1.5 * sheet.peak_voltage.at_worst)
    assert sheet.rms_current.needed == pytest.approx(1.25 * sheet.rms_current.at_worst)
    assert sheet.dissipation == max(point.figures.capacitor_dissipation.spread.high or 0.0 for point in points)


# Kinds ---------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("kind", ["vacuum variable", "butterfly air", "mica"])
def test_a_kinds_row_is_the_design_with_such_a_capacitor(design: MakeDesign, kind: str) -> None:
    made = design(capacitor__quality_factor={"low": 400, "likely": 500, "high": 600}, **TYPICAL)
    row = next(each for each in sizing(made).kinds if each.kind == kind and not each.own)
    other = design(capacitor__kind=kind, **TYPICAL)
    figures = operating_point(other, other.transmission[0]).figures
    assert row.points[0].efficiency.likely == pytest.approx(figures.conductor_efficiency.spread.likely)
    assert row.points[0].peak_voltage.high == pytest.approx(figures.capacitor_peak_voltage.spread.high)
    assert row.points[0].peak_voltage.likely == pytest.approx(figures.capacitor_peak_voltage.spread.likely)


def test_another_kind_is_no_line(design: MakeDesign) -> None:
    line = replace(_chain(design(**TYPICAL)), capacitor_steepness=1.2, capacitor_crest=1.3)
    lumped = with_quality(line, tables.capacitor_quality_factor("mica"))
    assert (lumped.capacitor_steepness, lumped.capacitor_crest) == (1.0, 1.0)


def test_the_designs_own_row_has_the_volts_within_a_line(design: MakeDesign) -> None:
    """Of a stub 2 m long the far end has 1 / cos(beta l) times the volts at its terminals (open line, textbook)."""
    stub = {
        "kind": "coaxial stub",
        "dielectric": "polyethylene",
        "inner_diameter": "2.3 mm",
        "outer_diameter": "7.3 mm",
        "length": "2.0 m",
    }
    made = design(capacitor=stub)
    chain = _chain(made)
    assert chain.capacitor_crest > 1.05
    own = sizing(made).kinds[0].points[0].peak_voltage
    at_terminals = chain.spread(chain.voltage).likely or 0.0
    assert own.likely == pytest.approx(at_terminals * chain.capacitor_crest, rel=1e-9)


def _chain(design: Design) -> Chain:
    made = operating_point(design, design.transmission[0]).chain
    assert made is not None
    return made


def test_a_better_capacitor_buys_efficiency_and_costs_volts() -> None:
    sheet = sizing(sample("quay_rail"))
    assert sheet.kinds[0].own
    assert {each.kind for each in sheet.kinds[1:]} == set(tables.capacitor_kinds())
    rows = sorted(sheet.kinds[1:], key=lambda row: (row.quality_factor and row.quality_factor.likely) or 0.0)
    shown = [row.points[0].efficiency.likely or 0.0 for row in rows]
    assert shown == sorted(shown)
    rows.sort(key=lambda row: (row.quality_factor and row.quality_factor.high) or 0.0)
    volts = [row.points[0].peak_voltage.high or 0.0 for row in rows]
    assert volts == sorted(volts)
    assert sheet.peak_voltage is not None
    assert max(volts) <= sheet.peak_voltage.at_worst


# Tuning --------------------------------------------------------------------------------------------------------------


def test_the_drive_is_told_beside_the_width(design: MakeDesign) -> None:
    made = sizing(design(tuning={"by": "motor", "steps_per_range": 4000}))
    (use,) = made.transmissions
    assert use.hertz_per_farad is not None
    assert use.step == pytest.approx((use.hertz_per_farad.high or 0.0) * 490e-12 / 4000)
    assert use.swr15_width is not None
    assert use.steps_needed is not None
    half = 0.5 * use.swr15_width
    assert 490e-12 * (use.hertz_per_farad.high or 0.0) / use.steps_needed <= half
    assert 490e-12 * (use.hertz_per_farad.high or 0.0) / (use.steps_needed - 1) > half
    assert any(each.id == "capacitor.tuning_step" for each in all_findings(made))
    assert sizing(design(tuning={"by": "hand at the loop"})).transmissions[0].steps_needed is None


def test_a_fixed_capacitor_covers_no_band(design: MakeDesign) -> None:
    fixed = {"capacitor__capacitance": None, "capacitor__fixed": "201 pF", "capacitor__tolerance": "5 %"}
    sheet = sizing(design(**fixed))
    made = sheet.tuning
    assert made is not None
    assert made.bands == ()
    assert (made.lowest.low or 0.0) < 7.1e6 < (made.highest.high or 0.0)
    text = " ".join(printed(sheet).split())
    assert "This fixed capacitor resonates at one frequency, somewhere from 6." in text


def test_the_date_is_that_asked_for(design: MakeDesign) -> None:
    assert sizing(design(), on=date(2026, 5, 4)).date == "2026-05-04"


def test_at_a_high_site_the_rating_told_keeps_the_margin_of_the_check(design: MakeDesign) -> None:
    """A rating falls with the pressure above 1000 m, in the check and in the size: one built to it is at the margin."""
    high = {"site__altitude": "3000 m"}
    needed, low = (sizing(design(**each)).peak_voltage for each in (high, {"site__altitude": "0 m"}))
    assert needed is not None
    assert low is not None
    assert needed.needed > 1.2 * low.needed
    for factor, kept in ((1.0001, True), (0.999, False)):
        built = design(**high, capacitor__rated_voltage=f"{needed.needed * factor / 1e3:.9f} kV")
        found = next(each for each in all_findings(sizing(built)) if each.id == "capacitor.voltage")
        assert ((found.power_at_margin or 0.0) >= 100.0) == kept
