"""What to measure first: by rewriting the design with one input known, and by properties of every chain."""

from copy import deepcopy
from pathlib import Path
from typing import Any

import pytest
from designs import MakeDesign, plain_design

import magsafe
from magsafe.analysis.chain import Chain
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.analysis.sensitivity import gains, measure_first, one_known
from magsafe.design.model import Design

SAMPLES = sorted((Path(__file__).parents[2] / "sample_designs").glob("*.toml"))
UNCERTAIN: dict[str, Any] = {
    "capacitor__series_resistance": None,
    "capacitor__quality_factor": {"low": 800, "likely": 2000, "high": 6000},
    "loop__joint": [
        {"name": "lugs", "resistance": {"low": "0.1 mohm", "likely": "4 mohm", "high": "9 mohm"}, "at": "opposite"},
        {"name": "laps", "count": 4, "kind": "soldered lap", "at": "spread"},
    ],
    "feed": {"line_loss": {"low": "0.1 dB", "likely": "0.9 dB", "high": "1.2 dB"}},
    "loop__conductor": {"form": "rod", "outer_diameter": "22 mm", "material": "copper tube"},
}
KNOWN: dict[str, dict[str, Any]] = {
    "the capacitor's losses (its Q)": {"capacitor__quality_factor": {"low": 2000, "likely": 2000, "high": 2000}},
    "the resistance of joint lugs": {
        "loop__joint__0__resistance": {"low": "4 mohm", "likely": "4 mohm", "high": "4 mohm"}
    },
    "the resistance of joint laps": {
        "loop__joint__1__resistance": {"low": "0.15 mohm", "likely": "0.15 mohm", "high": "0.15 mohm"}
    },
    "the line's loss": {"feed__line_loss": {"low": "0.9 dB", "likely": "0.9 dB", "high": "0.9 dB"}},
}


def with_changes(*changes: dict[str, Any]) -> Design:
    """Return a design with changes of copies, since a nested change is written into what it changes."""
    return plain_design(**deepcopy({name: value for each in changes for name, value in each.items()}))


def point(design: Design) -> OperatingPoint:
    return operating_point(design, design.transmission[0])


def chain_of(design: Design) -> Chain:
    made = point(design).chain
    assert made is not None
    return made


@pytest.mark.parametrize("name", KNOWN)
@pytest.mark.parametrize("ground", ["none", "average"])
def test_an_input_at_its_likely_value_is_a_design_that_states_it(name: str, ground: str) -> None:
    site = {"site__ground": ground, "loop__centre_height": "2 m"}
    uncertain = with_changes(UNCERTAIN, site)
    found = next(each for each in gains(uncertain, chain_of(uncertain)) if each.name == name)
    assert found.voltage is not None
    stated = point(with_changes(UNCERTAIN, site, KNOWN[name]))
    assert found.voltage[0] == pytest.approx(point(uncertain).bare_voltage)
    assert found.voltage[1] == pytest.approx(stated.bare_voltage)
    efficiency = stated.figures.conductor_efficiency.spread
    assert found.efficiency[1].low == pytest.approx(efficiency.low)
    assert found.efficiency[1].high == pytest.approx(efficiency.high)


def test_the_one_named_is_the_largest() -> None:
    """By the volts of whole designs, each with one input stated exactly."""
    volts = {name: point(with_changes(UNCERTAIN, changes)).bare_voltage or 0.0 for name, changes in KNOWN.items()}
    uncertain = with_changes(UNCERTAIN)
    first = measure_first(uncertain, chain_of(uncertain))
    assert first is not None
    assert first.name == min(volts, key=lambda name: volts[name])
    known = with_changes(UNCERTAIN, KNOWN[first.name])
    second = measure_first(known, chain_of(known))
    assert second is not None
    volts.pop(first.name)
    assert second.name == min(volts, key=lambda name: volts[name])


@pytest.mark.parametrize(
    "around",
    [
        {},
        {"site__ground": None},
        {"site__ground": "average"},
        {"site__ground": "average", "loop__centre_height": "1 m"},
        {"site__ground": "perfect", "loop__centre_height": "1 m"},
        {"loop__turns": 3, "loop__turn_spacing": "40 mm"},
        {"transmission__0__frequency": "30 MHz"},
        {"capacitor__with": [{"connection": "series", "capacitance": "330 pF"}]},
        {"capacitor": {"kind": "none"}, "capacitor__quality_factor": None, "transmission__0__frequency": "95 MHz"},
    ],
)
def test_knowing_an_input_never_widens(around: dict[str, Any]) -> None:
    # What is set last counts: the whole block before its keys.
    made = with_changes({name: value for name, value in around.items() if "__" not in name}, UNCERTAIN, around)
    solved = chain_of(made)
    found = gains(made, solved)
    assert len(found) == len(list(one_known(made, solved)))
    for each in found:
        assert each.share >= -1e-12
        if each.voltage is not None:
            assert each.voltage[1] <= each.voltage[0] * (1.0 + 1e-12)
        before, after = each.efficiency
        assert (after.low or 0.0) >= (before.low or 0.0) * (1.0 - 1e-12)
        assert (after.high or 0.0) <= (before.high or 0.0) * (1.0 + 1e-12)
    assert [each.share for each in found] == sorted((each.share for each in found), reverse=True)


def test_where_nothing_is_uncertain_nothing_is_named(design: MakeDesign) -> None:
    assert measure_first(design(), chain_of(design())) is None
    assert magsafe.check(design()).measure_first is None


def test_a_ground_and_a_height_that_are_not_stated_are_inputs(design: MakeDesign) -> None:
    def names(**changes: Any) -> list[str]:
        made = design(**changes)
        return [each.name for each in gains(made, chain_of(made))]

    assert any("the ground" in name for name in names(site__ground=None))
    open_ground = design(site__ground=None, transmission__0__frequency="25 MHz")
    first = measure_first(open_ground, chain_of(open_ground))
    assert first is not None
    assert first.name == "the ground, which the design does not state"
    assert any("height" in name for name in names(site__ground="average"))
    assert not any("state" in name for name in names(site__ground="average", loop__centre_height="2 m"))


@pytest.mark.parametrize("sample", SAMPLES, ids=lambda each: each.stem)
def test_the_sheet_says_it_in_one_line(sample: Path) -> None:
    sheet = magsafe.check(magsafe.read_design(sample))
    if sample.stem == "pier_head_square":
        assert sheet.measure_first is None
        return
    assert sheet.measure_first is not None
    # Where the volts are highest its Q was measured: that leaves no loss of the loop's own to ask for.
    first = "the line's loss" if sample.stem == "net_loft_balcony" else "the capacitor's losses"
    assert sheet.measure_first.startswith(f"Measure first: {first}")
    assert "\n" not in sheet.measure_first


def test_the_sheet_asks_where_the_volts_are_highest() -> None:
    uses = [{"frequency": "7.1 MHz", "power": "100 W"}, {"frequency": "14.2 MHz", "power": "1 W"}]
    told = magsafe.check(with_changes(UNCERTAIN, {"transmission": uses})).measure_first
    assert told is not None
    assert "in 7.1 MHz" in told
    made = with_changes(UNCERTAIN)
    first = measure_first(made, chain_of(made))
    assert first is not None
    assert first.voltage is not None
    assert f"from {first.voltage[0] / 1e3:.2f} to {first.voltage[1] / 1e3:.2f} kV peak" in told
