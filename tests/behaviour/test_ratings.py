"""What ratings allow at radio frequency: volts of every kind, reactive power, and what they do not say."""

from math import sqrt
from typing import Any

import pytest
from designs import MakeDesign
from hypothesis import given, settings
from hypothesis import strategies as st

import magsafe
from magsafe.analysis.gap import trapped_in_any_gap
from magsafe.checks.sheet import Finding, Sheet
from magsafe.design.model import KINDS
from magsafe.design.ratings import conversion, conversions, look_for
from magsafe.physics.deratings import RADIO_FREQUENCY, WORKING


def finding(sheet: Sheet, name: str) -> Finding:
    return next(f for f in sheet.all_findings() if f.id == name)


def volts(design: MakeDesign, **changes: Any) -> Finding:
    return finding(magsafe.check(design(**changes)), "capacitor.voltage")


def limit(found: Finding) -> float:
    assert found.limit is not None
    return found.limit.value


# Volts ------------------------------------------------------------------------------------------------------

# Kind, rating, crest of the RF over the rating. Vacuum: a maker's technical note as told in the reference notes,
# section 4 (60 % of test; direct voltage and crest together at most working). Air: 0.80 by Ekstrand 1940 (carried on
# from 1.8 MHz), half of the test voltage by common practice. Ceramic, mica: common practice, the voltage zone.
BY_HAND = [
    ("vacuum variable", "DC test", 0.60, "narrow"),
    ("vacuum variable", "DC working", 1.00, "clear"),
    ("air variable", "DC working", 0.80, "narrow"),
    ("split-stator air", "DC test", 0.40, "narrow"),
    ("butterfly air", "DC test", 0.40, "narrow"),
    ("ceramic", "DC working", 1.00, "narrow"),
    ("mica", "DC working", 1.00, "narrow"),
    ("vacuum variable", "peak RF", 1.00, "clear"),
    ("vacuum variable", "RMS RF", sqrt(2.0), "clear"),
]


@pytest.mark.parametrize(("kind", "rating", "factor", "best"), BY_HAND)
def test_each_kind_of_rating_by_hand(design: MakeDesign, kind: str, rating: str, factor: float, best: str) -> None:
    """At 1.9 MHz, where electrons cross every gap of use, so that no row goes with the frequency."""
    found = volts(
        design,
        capacitor__kind=kind,
        capacitor__rated_voltage="60 kV",
        capacitor__rated_voltage_kind=rating,
        capacitor__capacitance__max="5000 pF",
        transmission__0__frequency="1.9 MHz",
    )
    assert limit(found) == pytest.approx(60e3 * factor)
    assert found.verdict == best
    assert found.thin == (best == "narrow")
    if rating.startswith("DC"):
        assert f"{factor:g} of the {rating} rating" in found.because
        row = conversion(kind, rating)
        assert row is not None
        assert row.source in found.source
        assert row.source in found.because


def test_a_converted_rating_that_is_exceeded_stops_it(design: MakeDesign) -> None:
    """8 kV on a part tested at 12 kV, good for 7.2 kV by the maker's rule."""
    found = volts(design, capacitor__rated_voltage="12 kV", capacitor__rated_voltage_kind="DC test")
    assert found.verdict == "stop"
    assert limit(found) == pytest.approx(7.2e3)


def test_the_rows_for_air_are_those_of_the_physics() -> None:
    working, test = conversion("air variable", "DC working"), conversion("air variable", "DC test")
    assert working is not None
    assert test is not None
    assert working.factor == RADIO_FREQUENCY.factor
    assert test.factor == pytest.approx(RADIO_FREQUENCY.factor * WORKING.factor)


def test_every_row_names_its_source_and_no_row_is_doubled() -> None:
    assert all(row.source and row.provenance for row in conversions())
    keys = [(kind, row.rating) for row in conversions() for kind in row.kinds]
    assert len(keys) == len(set(keys))
    assert {kind for kind, _ in keys} <= set(KINDS)
    assert all(look_for(kind) for kind in KINDS if kind != "none")
    assert all(row.reserve for row in conversions() if row.provenance != "seen")


@pytest.mark.parametrize(
    ("kind", "rating"),
    [
        ("ceramic", "DC test"),
        ("mica", "DC test"),
        ("coaxial stub", "DC working"),
        ("trombone", "DC test"),
        ("dielectric plate", "DC working"),
    ],
)
def test_what_a_direct_voltage_does_not_say_is_unproven_with_what_to_look_for(
    design: MakeDesign, kind: str, rating: str
) -> None:
    found = volts(design, capacitor__kind=kind, capacitor__rated_voltage_kind=rating)
    assert found.verdict == "unproven"
    assert rating in found.because
    assert look_for(kind) in found.do


def test_what_to_look_for_depends_on_the_part(design: MakeDesign) -> None:
    nothing = {"capacitor__rated_voltage": None, "capacitor__rated_voltage_kind": None}
    assert "capacitor.gap" in volts(design, capacitor__kind="air variable", **nothing).do
    assert "kVA" in volts(design, capacitor__kind="ceramic", **nothing).do
    assert "stamped" in volts(design, capacitor__kind="mica", **nothing).do
    assert "test voltage" in volts(design, **nothing).do


def test_electrons_that_turn_round_lower_what_direct_volts_allow_of_air(design: MakeDesign) -> None:
    """3e4 m/s over 28.4 MHz are 1.06 mm: 24.22 kV/cm there over 0.80 of the fit, in thin hot air by its density."""
    found = trapped_in_any_gap(28.4e6, 1.0)
    centimetres = 100.0 * 3e4 / 28.4e6
    even = 24.22 * centimetres + 6.08 * sqrt(centimetres)
    assert found.factor == pytest.approx(24.22 * centimetres / (0.80 * even))
    assert trapped_in_any_gap(28.4e6, 0.75).factor < found.factor
    assert trapped_in_any_gap(1.8e6, 1.0).factor == 1.0
    changes = {"capacitor__kind": "air variable", "capacitor__rated_voltage_kind": "DC working"}
    sheet = magsafe.check(design(**changes, transmission__0__frequency="14.2 MHz"))
    made = finding(sheet, "capacitor.voltage")
    (row,) = (row for row in sheet.deratings if "turn round" in row.name)
    assert row.factor < 1.0
    assert limit(made) == pytest.approx(15e3 * 0.80 * row.factor)


@pytest.mark.parametrize("kind", ["peak RF", "RMS RF", "DC test"])
def test_above_1000_m_a_rating_falls_with_the_air(design: MakeDesign, kind: str) -> None:
    """Pressures of the U.S. Standard Atmosphere 1976, table: 89 874 Pa at 1000 m, 70 109 Pa at 3000 m."""
    at = {
        height: volts(design, capacitor__rated_voltage_kind=kind, capacitor__rated_voltage="50 kV", **where)
        for height, where in (
            (0, {}),
            (1000, {"site__altitude": "1000 m"}),
            (3000, {"site__altitude": "3000 m"}),
        )
    }
    assert limit(at[1000]) == limit(at[0])
    assert limit(at[3000]) == pytest.approx(limit(at[0]) * 70_109.0 / 89_874.0, rel=1e-3)
    assert at[3000].verdict == "narrow"
    assert "1000 m" in at[3000].because


@settings(max_examples=30, deadline=None)
@given(low=st.floats(-400.0, 5900.0), climb=st.floats(0.0, 6000.0), kind=st.sampled_from(["peak RF", "DC working"]))
def test_a_higher_site_never_raises_what_a_rating_allows(low: float, climb: float, kind: str) -> None:
    from designs import plain_design

    from magsafe.analysis.rated_voltage import rated_voltage

    changes = {"capacitor__kind": "air variable", "capacitor__rated_voltage_kind": kind}
    here, there = (
        rated_voltage(plain_design(**changes, site__altitude=f"{height:.9f} m"), 14.2e6).allowed
        for height in (low, min(low + climb, 6000.0))
    )
    assert there <= here * (1.0 + 1e-12)


def test_without_an_altitude_a_rating_holds_as_it_stands_and_says_so(design: MakeDesign) -> None:
    sheet = magsafe.check(design())
    assert limit(finding(sheet, "capacitor.voltage")) == 15e3
    assert "rating holds as it stands, as to 1000 m" in " ".join(sheet.assumptions)


# Reactive power ---------------------------------------------------------------------------------------------

CERAMIC = {"capacitor__kind": "ceramic", "capacitor__rated_reactive_power": "400 kVA"}


def reactive(design: MakeDesign, **changes: Any) -> Finding:
    return finding(magsafe.check(design(**{**CERAMIC, **changes})), "capacitor.reactive_power")


def test_reactive_power_is_rms_volts_times_rms_amps(design: MakeDesign) -> None:
    """A maker's guide, as told in the reference notes, section 4: W_r = V_rms I_rms."""
    sheet = magsafe.check(design(**CERAMIC))
    found = finding(sheet, "capacitor.reactive_power")
    figures = sheet.operating_points[0].figures
    likely = (figures["capacitor_peak_voltage"].likely or 0.0) / sqrt(2.0)
    assert found.value is not None
    assert found.value.likely == pytest.approx(likely * (figures["capacitor_rms_current"].likely or 0.0))
    assert 250e3 < (found.value.likely or 0.0) < 400e3
    assert "kVA" in found.because
    assert found.margin_asked == 1.25


def test_reactive_power_grows_as_the_power_itself(design: MakeDesign) -> None:
    found = reactive(design)
    assert found.margin_found is not None
    assert found.power_at_limit == pytest.approx(100.0 * found.margin_found)
    assert found.power_at_margin == pytest.approx(100.0 * found.margin_found / 1.25)
    at_margin = reactive(design, transmission__0__power=f"{found.power_at_margin:.12f} W")
    assert at_margin.margin_found == pytest.approx(1.25)
    assert at_margin.verdict == "clear"
    above = reactive(design, transmission__0__power=f"{(found.power_at_limit or 0.0) * 1.001:.9f} W")
    assert above.verdict == "stop"


def test_an_overshoot_is_too_short_to_heat(design: MakeDesign) -> None:
    over = reactive(design, margins={"overshoot": "2 dB"})
    assert over.margin_found == pytest.approx(reactive(design).margin_found)


def test_credit_for_typical_losses_does_not_raise_the_power(design: MakeDesign) -> None:
    joint = [{"name": "lugs", "kind": "sliding contact", "at": "capacitor"}]
    assert reactive(design, loop__joint=joint).power_at_margin == pytest.approx(reactive(design).power_at_margin)


@pytest.mark.parametrize(
    ("changes", "word"),
    [
        ({"capacitor__rated_current": None}, "neither"),
        ({}, "at which frequency"),
        ({"capacitor__rated_current_at": "14 MHz"}, "below, the same heat allows less"),
        ({"capacitor__kind": "mica", "capacitor__rated_current_at": "14 MHz"}, "below, the same heat allows less"),
    ],
)
def test_a_solid_body_without_what_counts_its_heat_is_unproven(
    design: MakeDesign, changes: dict[str, Any], word: str
) -> None:
    found = reactive(design, **{"capacitor__rated_reactive_power": None, **changes})
    assert found.verdict == "unproven"
    assert word in found.because
    assert look_for("mica" if "capacitor__kind" in changes else "ceramic") in found.do


@pytest.mark.parametrize(
    "changes",
    [
        {"capacitor__kind": "ceramic", "capacitor__rated_current_at": "7.1 MHz"},
        {"capacitor__kind": "mica"},
        {"capacitor__kind": "vacuum variable"},
    ],
)
def test_where_volts_and_amps_decide_nothing_is_said_of_reactive_power(
    design: MakeDesign, changes: dict[str, Any]
) -> None:
    ids = [f.id for f in magsafe.check(design(**changes)).all_findings()]
    assert "capacitor.reactive_power" not in ids


AIR = {"connection": "parallel", "capacitance": "100 pF", "tolerance": "2 %", "rated_reactive_power": "200 kVA"}
RATED = {
    **CERAMIC,
    "capacitor__rated_dissipation": "1 kW",
    "capacitor__with": [{**AIR, "rated_current": "40 A", "rated_dissipation": "1 kW", "quality_factor": 5000}],
}
WARMED = (
    "capacitor.current",
    "capacitor.reactive_power",
    "capacitor.heat",
    "capacitor.padding.100-pf.current",
    "capacitor.padding.100-pf.reactive_power",
    "capacitor.padding.100-pf.heat",
)


def test_ratings_of_heat_are_narrow_in_air_above_that_of_the_makers(design: MakeDesign) -> None:
    """Vacuum capacitors 25 degC, ceramics 30 degC, still air (makers' guides, as told in the reference notes, 4)."""
    cool, warm, unknown = (
        magsafe.check(design(**RATED, site__air_temperature=air)) for air in ("30 degC", "31 degC", None)
    )
    for name in WARMED:
        assert finding(cool, name).verdict == "clear", name
        assert finding(unknown, name).verdict == "clear", name
        found = finding(warm, name)
        assert (found.verdict, found.thin) == ("narrow", True), name
        assert "still air of 25 to 30 degC" in found.because
    said = "current ratings hold as for air of 25 to 30 degC"
    assert [said in " ".join(sheet.assumptions) for sheet in (cool, warm, unknown)] == [False, False, True]
    bare = design(capacitor__rated_current=None)
    assert said not in " ".join(magsafe.check(bare).assumptions)


def test_reactive_power_of_a_loop_that_is_not_computed_is_unproven(design: MakeDesign) -> None:
    found = reactive(design, loop__conductor__outer_diameter="100 mm")
    assert found.verdict == "unproven"
    assert "proved to 0.06" in found.because
