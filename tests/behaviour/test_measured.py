"""`magsafe measured` and what becomes of its record: which loop it is of, what is judged, what is refused and told."""

import json
import re
from collections.abc import Sequence
from copy import deepcopy
from dataclasses import replace
from datetime import date, timedelta
from functools import cache
from math import sqrt
from pathlib import Path
from typing import Any, get_args

import numpy as np
import pytest
from commands import run as run_outside
from designs import file_of, measured_changes, plain_design, plain_tree, put
from pydantic import ValidationError
from scipy.optimize import brentq
from synthetic_sweeps import KnownLoop

import magsafe
from magsafe.analysis.chain import RESISTANCE_ERROR
from magsafe.analysis.instrument import by_points, by_sweep, record_of
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.as_built import as_built
from magsafe.checks.measured import NotOfThisDesign, measured
from magsafe.checks.measured_sheet import MeasuredSheet
from magsafe.checks.run import check
from magsafe.checks.sheet import Finding
from magsafe.cli.app import run
from magsafe.design import as_built as built
from magsafe.design.as_built import identity, standing
from magsafe.design.model import Design, Measured
from magsafe.design.quantities import Uncertain
from magsafe.design.reading import parse_design, read_design
from magsafe.design.sweep import Sweep, read_sweep
from magsafe.physics.swr_points import at_the_loop, reflection_of, tuning_times_q
from magsafe.spread import Spread

Tree = dict[str, Any]

SAMPLES = sorted((Path(__file__).parents[2] / "sample_designs").glob("*.toml"))
TUNED = [file for file in SAMPLES if read_design(file).capacitor.kind != "none"]
SOIL: Tree = {"conductivity": {"low": "1 mS/m", "likely": "5 mS/m", "high": "20 mS/m"}, "permittivity": 13}
RICH = plain_tree(
    loop__centre_height="2 m",
    loop__turns=2,
    loop__turn_spacing="80 mm",
    loop__joint=[{"name": "lugs", "count": 2, "kind": "bolted lug", "resistance": "0.5 mohm", "at": "capacitor"}],
    capacitor__position="top",
    capacitor__quality_factor=None,
    capacitor__with=[{"connection": "parallel", "capacitance": "20 pF"}],
    site={"ground": SOIL, "metal_within": "8 m"},
    place=[{"name": "walk", "who": "public", "along_axis": "7 m"}],
)


def design_of(tree: Tree, **changes: Any) -> Design:
    made = deepcopy(tree)
    for name, value in changes.items():
        put(made, name.replace("__", "."), value)
    return parse_design(file_of(made), "rich.toml")


# Which loop it is ------------------------------------------------------------------------------------------

BUILT: list[Tree] = [
    # Another capacitor of its kind has another Q, and its ratings and sizes are how it is told from this one.
    {"capacitor__rated_voltage": "5 kV"},
    {"capacitor__rated_current": "20 A"},
    {"capacitor__series_resistance": None, "capacitor__quality_factor": 900},
    {"capacitor__capacitance__max": "400 pF"},
    {"capacitor__stray": "3 pF"},
    {"capacitor__with__0__rated_voltage": "5 kV"},
    {"capacitor__with__0__quality_factor": 900},
    {"feed": {"coupling": "small loop"}},
    {"loop__diameter": "1.001 m"},
    {"loop__turns": 3},
    {"loop__turn_spacing": "81 mm"},
    {"loop__turn_arrangement": "nested"},
    {"loop__plane": "horizontal", "capacitor__position": None, "place": []},
    {"loop": {**RICH["loop"], "shape": "polygon", "sides": 8, "perimeter": "3.2 m", "diameter": None}},
    {"loop__supports": ["PVC"]},
    {"loop__conductor__outer_diameter": "22.1 mm"},
    {"loop__conductor__form": "tube", "loop__conductor__wall": "1 mm"},
    {"loop__conductor__conductivity": "57 MS/m"},
    {"loop__conductor__plating": {"material": "silver", "thickness": "10 um"}},
    {"loop__joint__0__count": 3},
    {"loop__joint__0__kind": "compression"},
    {"loop__joint__0__at": "opposite"},
    {"loop__joint": []},
    {"capacitor__kind": "air variable"},
    {"capacitor__position": "bottom"},
    {"capacitor__fixed": "100 pF", "capacitor__capacitance": None},
    {"capacitor__with__0__capacitance": "21 pF"},
    {"capacitor__with__0__connection": "series"},
    {"capacitor__with__0__on": ["7.1 MHz"]},
    {"capacitor__with": []},
    {"site__ground__conductivity__high": "21 mS/m"},
    {"site__ground__permittivity": 14},
    {"site__ground": "average"},
    {"site__metal_within": "7 m"},
    {"site__metal_within": None},
]
KNOWN: list[Tree] = [
    {"loop__centre_height": "3 m"},  # held against the record by itself
    {"loop__joint__0__name": "clamps"},
    {"loop__joint__0__resistance": "0.9 mohm"},
    {"loop__joint__0__resistance": None},
    {"loop__conductor__temperature": "35 degC"},
    {"loop__conductor__surface": "bright"},
    {"loop__conductor__in_sun": True},
    {"station": {"name": "quay", "callsign": "CALLSIGN"}},
    {"transmission__0__power": "50 W", "transmission__0__name": "voice"},
    {"transmission__0__frequency": "7.15 MHz"},
    {"feed": {"line_loss": "0.5 dB"}},
    {"tuning": {"by": "motor"}},
    {"place": []},
    {"site__rules": ["us-fcc"], "site__floors": ["0 m"], "site__altitude": "10 m", "site__air_temperature": "20 degC"},
    {"margins": {"voltage": 2.0}},
    # The same sizes in other units.
    {"loop__diameter": "100 cm", "loop__turn_spacing": "0.08 m", "loop__conductor__outer_diameter": "2.2 cm"},
    {"site__metal_within": "800 cm", "capacitor__with__0__capacitance": "0.02 nF"},
]


def without_none(changes: Tree) -> Tree:
    made = dict(changes)
    if "loop" in made:
        made["loop"] = {key: value for key, value in made["loop"].items() if value is not None}
    return made


@pytest.mark.parametrize("changes", BUILT, ids=" ".join)
def test_whatever_makes_another_loop_makes_another_identity(changes: Tree) -> None:
    assert identity(design_of(RICH, **without_none(changes))) != identity(design_of(RICH))


@pytest.mark.parametrize("changes", KNOWN, ids=" ".join)
def test_what_is_known_of_a_part_is_not_the_part(changes: Tree) -> None:
    assert identity(design_of(RICH, **changes)) == identity(design_of(RICH))


def test_all_samples_are_different_loops_and_each_is_always_the_same() -> None:
    found = [identity(read_design(file)) for file in SAMPLES]
    assert len(set(found)) == len(SAMPLES)
    assert found == [identity(read_design(file)) for file in SAMPLES]
    assert all(re.fullmatch("[0-9a-f]{16}", each) for each in found)


# Whether it counts -----------------------------------------------------------------------------------------

Q = 2500.0
HIGH: Tree = {"loop__centre_height": "1.5 m", "site__ground": "average"}


def found_of(changes: Tree) -> Finding | None:
    design = plain_design(**changes)
    return as_built(design, operating_point(design, design.transmission[0]))


def recorded(record: Tree | None = None, after: Tree | None = None, **changes: Any) -> Finding:
    """Return the finding about a record of the plain design, altered, and of a design altered after it was made."""
    made = measured_changes(Q, **changes)
    made["measured"][0].update(record or {})
    made["measured"] = [{key: value for key, value in made["measured"][0].items() if value is not None}]
    found = found_of({**made, **(after or {})})
    assert found is not None
    return found


@pytest.mark.parametrize(
    ("after", "words"),
    [
        ({"loop__centre_height": "2 m"}, ["1.5 m up", "2 m up"]),
        ({"loop__centre_height": None}, ["1.5 m up", "no stated height"]),
        ({"site__ground": "poor"}, ['ground "average"', 'ground "poor"']),
        ({"site__ground": None}, ['ground "average"', "a ground not stated"]),
        ({"site__ground": SOIL}, ['ground "average"', 'ground "as given"']),
        ({"loop__diameter": "1.1 m"}, ["has changed since"]),
        ({"site__metal_within": "2 m"}, ["near it", "has changed since"]),
    ],
)
def test_a_loop_that_stands_otherwise_was_not_measured(after: Tree, words: list[str]) -> None:
    found = recorded(after=after, **HIGH)
    assert found.verdict == "unproven"
    assert found.because.startswith("a Q was measured and does not count: ")
    assert all(word in found.because for word in words), found.because
    assert "None" not in found.because
    assert found.value is not None
    assert found.value.likely == Q


def test_heights_and_grounds_that_are_not_stated_on_either_side_go_together() -> None:
    assert recorded(site__ground=None).verdict != "stop"
    assert "does not count" not in recorded(site__ground=None).because
    found = recorded(site__ground=None, after={"site__ground": "average"})
    assert 'a ground not stated, and the design says ground "average"' in found.because
    found = recorded(site__ground=None, after={"loop__centre_height": "1.5 m"})
    assert "at no stated height, and the design says 1.5 m up" in found.because
    assert recorded(**HIGH, after={"loop__centre_height": "150 cm"}).verdict == "clear"
    on_the_ground = recorded(after={"loop__centre_height": "0 m"})
    assert "at no stated height" in on_the_ground.because


@pytest.mark.parametrize("key", ["design", "date"])
def test_a_record_that_does_not_tell_its_loop_or_day_counts_for_nothing(key: str) -> None:
    found = recorded({key: None})
    assert found.verdict == "unproven"
    assert "does not tell when, or of which loop" in found.because


@pytest.mark.parametrize("day", ["last week", "2999-01-01", "2026-02-30"])
def test_a_day_that_has_not_been_counts_for_nothing(day: str) -> None:
    found = recorded({"date": day})
    assert found.verdict == "unproven"
    assert f'its date, "{day}", is no day that has been' in found.because
    assert "measured on 2026-05-04: Q 2500" in recorded().because


@pytest.mark.parametrize("table", [[], {}, [{}], {"date": "2026-05-04"}, [{"frequency": "7.1 MHz"}]])
def test_an_empty_table_does_no_harm(table: Any) -> None:
    assert found_of({"measured": table}) is None
    design = plain_design(measured=table)
    assert operating_point(design, design.transmission[0]).figures == _plain_figures()


@cache
def _plain_figures() -> Any:
    design = plain_design()
    return operating_point(design, design.transmission[0]).figures


@pytest.mark.parametrize(("others", "counts"), [((7.11, 7.0), 7.11), ((7.0, 7.099, 7.11), 7.099), ((6.0, 7.24), 7.24)])
def test_of_several_records_that_do_not_stand_the_nearest_is_told(others: Sequence[float], counts: float) -> None:
    record = {**measured_changes(Q)["measured"][0], "date": "2999-01-01"}
    records = [{**record, "frequency": f"{each} MHz"} for each in others]
    design = plain_design(measured=records)
    found = standing(design, 7.1e6)
    assert found is not None
    assert found.record.frequency == pytest.approx(1e6 * counts)
    assert "no day that has been" in found.why_not
    assert standing(design, 14e6) is None


def test_of_several_records_that_stand_the_highest_q_counts() -> None:
    """It makes most volts, so a lower one beside it takes nothing away."""
    record = measured_changes(Q)["measured"][0]
    higher = {**record, "frequency": "7.15 MHz", "unloaded_q": {"low": 2600, "likely": 2700, "high": 2800}}
    spoilt = {**higher, "design": "0000000000000000", "unloaded_q": {"low": 5000, "likely": 6000, "high": 7000}}
    found = standing(plain_design(measured=[record, higher, spoilt]), 7.1e6)
    assert found is not None
    assert (found.record.unloaded_q or Uncertain(0.0, 0.0, 0.0)).high == 2800.0
    assert found.why_not == ""


def test_one_value_without_its_ends_counts_for_nothing() -> None:
    found = recorded({"unloaded_q": 2900})
    assert found.verdict == "unproven"
    assert "one value of Q without its ends" in found.because


def test_a_record_counts_only_with_the_padding_that_was_joined_then() -> None:
    joined: Tree = {
        "capacitor__with": [{"connection": "parallel", "capacitance": "50 pF", "on": ["7.05 MHz"]}],
        "transmission": [{"frequency": "7.05 MHz", "power": "100 W"}, {"frequency": "7.15 MHz", "power": "100 W"}],
    }
    made = measured_changes(1500.0, **joined)
    made["measured"][0]["tuned_for"] = "7.05 MHz"
    design = plain_design(**made)
    first, second = (standing(design, each.frequency) for each in design.transmission)
    assert first is not None
    assert second is not None
    assert first.why_not == ""
    assert "other padding was joined" in second.why_not


def test_what_speaks_against_a_reading_goes_into_the_record_and_leaves_it_narrow() -> None:
    found = recorded(
        {"notes": ["the circle leans by 14 degrees"], "unloaded_q": {"low": 2600, "likely": 2800, "high": 3e3}}
    )
    assert found.verdict == "narrow"
    assert "the circle leans by 14 degrees" in found.because
    assert "once upwards and once downwards" in found.do


def test_a_nearest_record_that_does_not_count_is_told() -> None:
    record = measured_changes(Q)["measured"][0]
    spoilt = {**record, "design": "0000000000000000"}
    design = plain_design(measured=[{**spoilt, "frequency": "7.15 MHz"}, spoilt])
    found = as_built(design, operating_point(design, design.transmission[0]))
    assert found is not None
    assert found.verdict == "unproven"


def test_a_loop_without_a_capacitor_has_no_q_that_counts() -> None:
    record = measured_changes(Q)["measured"][0]
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    changes: Tree = {
        "capacitor": {"kind": "none"}, "loop__conductor": wire, "transmission__0__frequency": "93 MHz",
        "measured": [{**record, "frequency": "93 MHz"}],
    }  # fmt: skip
    found = found_of(changes)
    assert found is not None
    assert found.verdict == "unproven"
    assert "without a capacitor" in found.because


# What is judged --------------------------------------------------------------------------------------------

NUMBER = r"([0-9.]+)"


def test_a_q_above_all_that_the_parts_can_make_is_a_stop_at_any_power() -> None:
    computed = _plain_figures().unloaded_q.spread
    sheet = check(plain_design(**measured_changes(1.03 * computed.high, 0.02)))
    found = next(each for each in sheet.operating_points[0].findings if each.id == "loop.measured")
    assert found.verdict == "stop"
    assert "do not key it" in found.do
    assert "higher than the parts can make it" in found.because
    assert sheet.power_ceiling.value == 0.0
    assert sheet.verdict == "stop"


def test_a_q_below_all_of_it_is_unproven_and_its_numbers_are_those_of_the_figures() -> None:
    """By hand: half of the slope over Q is the resistance; what the parts leave of it, and its share of the power."""
    plain, q = _plain_figures(), 1000.0
    half_slope = plain.unloaded_q.spread.likely * plain.total_resistance.spread.likely
    parts = plain.total_resistance.spread
    design = plain_design(**measured_changes(q, 0.1))
    point = operating_point(design, design.transmission[0])
    found = as_built(design, point)
    assert found is not None
    assert found.verdict == "unproven"
    told = re.search(rf"{NUMBER} mΩ more than computed \({NUMBER} mΩ beyond.*: {NUMBER} W key-down", found.because)
    assert told is not None
    likely, beyond, watts = map(float, told.groups())
    more = half_slope / q - parts.likely
    assert likely == pytest.approx(1e3 * more, rel=5e-3)
    least = half_slope / 1100.0
    assert beyond == pytest.approx(
        1e3 * (least - parts.high / (1.0 + RESISTANCE_ERROR)), rel=2e-2
    )  # the port's gap is open
    assert watts == pytest.approx(100.0 * more * q / half_slope, rel=5e-3)
    ceiling = check(design).power_ceiling
    assert "loop.measured" in ceiling.left_out


@pytest.mark.parametrize(("factor", "word"), [(0.97, "more"), (1.03, "less"), (1.0, "the same")])
def test_a_q_within_both_ends_is_clear_and_says_what_differs(factor: float, word: str) -> None:
    plain = _plain_figures()
    q = factor * plain.unloaded_q.spread.likely
    found = found_of(measured_changes(q, 0.1))
    assert found is not None
    assert found.verdict == "clear"
    assert found.do == "nothing"
    assert word in found.because
    if factor != 1.0:
        told = re.search(rf"likely {NUMBER} mΩ {word} than computed", found.because)
        assert told is not None
        difference = 1e3 * plain.total_resistance.spread.likely * abs(1.0 / factor - 1.0)
        assert float(told[1]) == pytest.approx(difference, rel=1e-2)


@pytest.mark.parametrize(("side", "verdict"), [("high", "stop"), ("low", "unproven")])
def test_where_the_ends_just_touch_it_is_clear(side: str, verdict: str) -> None:
    end = getattr(_plain_figures().unloaded_q.spread, side)
    way = 1.0 if side == "high" else -1.0
    verdicts = []
    for off in (-1e-6, 1e-6):
        inner = end * (1.0 + way * off)
        ends = sorted((inner, end * (1.0 + 0.1 * way), end * (1.0 + 0.2 * way)))
        changes = measured_changes(ends[1])
        changes["measured"][0]["unloaded_q"] = dict(zip(("low", "likely", "high"), ends, strict=True))
        found = found_of(changes)
        assert found is not None
        verdicts.append(found.verdict)
    assert verdicts == ["clear", verdict]


# From a reading to the record ------------------------------------------------------------------------------


def swept(loop: KnownLoop) -> Sweep:
    return Sweep("loop.s1p", "0" * 64, *loop.sweep(), 50.0, ())


def sweep_file(folder: Path, loop: KnownLoop, name: str = "loop.s1p") -> Path:
    file = folder / name
    rows = (f"{f:.3f} {each.real:.8f} {each.imag:.8f}" for f, each in zip(*loop.sweep(), strict=True))
    file.write_text("# HZ S RI R 50\n" + "\n".join(rows) + "\n")
    return file


def alone(design: Design) -> Design:
    """Return a design without people and records, which take long to compute and change no Q."""
    site = design.site.model_copy(update={"rules": [], "sessions": []})
    return design.model_copy(update={"site": site, "place": [], "probe": [], "measured": []})


@pytest.mark.parametrize("file", TUNED, ids=lambda file: file.stem)
def test_each_sample_measured_as_it_is_computed_is_clear_and_the_same(file: Path) -> None:
    """A sweep of the loop with the computed Q, through 0.3 dB of line, with noise of a good analyser."""
    design = alone(read_design(file))
    ends = {each.frequency: each for each in (design.transmission[0], design.transmission[-1])}
    for transmission in ends.values():
        point = operating_point(design, transmission)
        q = point.figures.unloaded_q.spread.likely
        assert q is not None
        known = KnownLoop(
            resonance=transmission.frequency, unloaded_q=q, coupling=0.9, line_length=4.0, line_loss=0.3, noise=2e-4
        )
        one = design.model_copy(update={"transmission": [transmission]})
        sheet = measured(one, by_sweep(swept(known), None, 0.02), swept(known))
        assert sheet.verdict == "clear"
        for name in ("unloaded_q", "conductor_efficiency", "overall_efficiency", "capacitor_peak_voltage"):
            both = sheet.figures[name]
            assert both.measured.likely == pytest.approx(both.computed.likely, rel=0.02), name
        told = sheet.figures["unloaded_q"].measured
        assert (told.low or 0.0) < q < (told.high or 0.0)


def test_what_was_saved_is_what_check_counts_until_the_loop_changes(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "pass_refuge.toml"
    text = next(each for each in SAMPLES if each.stem == "pass_refuge").read_text(encoding="utf-8")
    file.write_text(text, encoding="utf-8")
    frequency = read_design(file).transmission[0].frequency
    sweep = sweep_file(tmp_path, KnownLoop(resonance=frequency * 1.001, unloaded_q=620.0, coupling=1.2, noise=2e-4))
    assert inside("measured", str(file), "--sweep", str(sweep), "--save", "--json") == 0
    told = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    assert told.reading.unloaded_q.likely == pytest.approx(620.0, rel=2e-3)
    after = check(read_design(file)).operating_points[0]
    for name, both in told.figures.items():
        assert after.figures[name] == both.measured, name
    assert after.measurement is not None
    assert next(each for each in after.findings if each.id == "loop.measured").verdict == "clear"
    was = next(line for line in text.splitlines() if line.startswith("diameter"))
    metres = float(was.split('"')[1].split()[0])
    file.write_text(file.read_text(encoding="utf-8").replace(was, f'diameter = "{metres + 0.01:.3f} m"'))
    changed = check(read_design(file)).operating_points[0]
    assert changed.measurement is None
    judged = next(each for each in changed.findings if each.id == "loop.measured")
    assert judged.verdict == "unproven"
    assert "has changed since" in judged.because


@pytest.mark.parametrize("coupling", [0.5, 0.8, 1.0, 1.3, 1.7])
def test_points_of_swr_2_through_a_decibel_of_line_tell_q_once_that_is_unfolded(coupling: float) -> None:
    """The points are found on the circuit itself. For a matched loop Q reads 0.765 of what it is without: by hand,
    tan of the points goes as G / sqrt(1 - G^2), with G 1/3 at the instrument and 1/3 of 1.259 at the loop.
    """
    known = KnownLoop(unloaded_q=2000.0, coupling=coupling, line_loss=1.0)

    def swr(frequency: float) -> float:
        at = np.array([frequency])
        size = float(np.abs(known.through_line(at, known.at_terminals(at)))[0])
        return (1.0 + size) / (1.0 - size)

    centre, wide = known.resonance, 4.0 * known.resonance / known.loaded_q
    ends = (
        brentq(lambda f: swr(f) - 2.0, centre - wide, centre, xtol=1e-3),
        brentq(lambda f: swr(f) - 2.0, centre, centre + wide, xtol=1e-3),
    )

    def read(loss: float) -> float:
        found = by_points(
            ends, swr(centre), half_power=False, line_loss=Spread.exact(loss), resolution=0.5, reflection_error=0.0,
            way="over" if coupling > 1.0 else "under",
        )  # fmt: skip
        return found.unloaded_q.likely or 0.0

    assert read(1.0) == pytest.approx(2000.0, rel=2e-3)
    assert read(0.0) < 0.85 * 2000.0
    if coupling == 1.0:
        inside_, outside = 1.0 / 3.0, 10.0**0.1 / 3.0
        by_hand = inside_ / sqrt(1.0 - inside_**2) / (outside / sqrt(1.0 - outside**2))
        assert by_hand == pytest.approx(0.765, abs=5e-4)
        assert read(0.0) / 2000.0 == pytest.approx(by_hand, rel=2e-3)


@pytest.mark.parametrize(
    ("loop", "word"),
    [
        (KnownLoop(unloaded_q=3e5), "one between 5 and 100000"),
        (KnownLoop(resonance=7.3e6), "one within 2 % of a transmission"),
        (KnownLoop(coupling=50.0, noise=1e-3), "a Q with both ends"),
    ],
)
def test_a_reading_that_is_not_of_this_loop_is_refused(loop: KnownLoop, word: str) -> None:
    with pytest.raises(NotOfThisDesign) as caught:
        measured(plain_design(), by_sweep(swept(loop), None, 0.02))
    assert word in str(caught.value)


def test_what_a_record_cannot_hold_is_left_out_of_it() -> None:
    """A coupling of more than a thousand; points that noise behind much loss throws out of the circle."""
    design = plain_design()
    held = by_sweep(swept(KnownLoop(noise=1e-3)), None, 0.02)
    for ends in ((9e-4, 2e-3, 3e-3), (1.0, 900.0, 1001.0), (0.0, 0.1, 0.2), (1.0, 2.0, None)):
        loose = replace(held, coupling=Spread(*ends))
        assert "coupling" not in record_of(design, loose, "2026-05-04")
        assert measured(design, loose).reading.coupling is not None
    assert record_of(design, held, "2026-05-04")["coupling"]["likely"] == pytest.approx(1.0, rel=2e-2)
    far = [(f, 3.0 * point) for f, point in held.points]
    noisy = record_of(design, replace(held, points=tuple(far)), "2026-05-04")
    assert 0 < len(noisy["points"]) < len(far)
    Measured.model_validate(noisy)


def test_the_bounds_of_a_record_are_those_of_the_design_file() -> None:
    def takes(**record: Any) -> bool:
        try:
            Measured.model_validate(record)
        except ValidationError:
            return False
        return True

    for low, high, key in (
        (built.LEAST_Q, built.MOST_Q, "unloaded_q"),
        (built.LEAST_COUPLING, built.MOST_COUPLING, "coupling"),
    ):
        assert takes(**{key: low})
        assert takes(**{key: high})
        assert not takes(**{key: low * 0.999})
        assert not takes(**{key: high * 1.001})
    for part, taken in ((built.MOST_REFLECTION, True), (-built.MOST_REFLECTION * 1.001, False)):
        assert takes(points=[["7.1 MHz", part, 0.0]]) is taken
        assert takes(points=[["7.1 MHz", 0.0, part]]) is taken
    assert set(get_args(get_args(Measured.model_fields["by"].annotation)[0])) == {
        "sweep", "points of one SWR", "half-power points",
    }  # fmt: skip


# The command -----------------------------------------------------------------------------------------------

POINTS = ("--swr2", "7.097 MHz", "7.103 MHz", "--swr-at-resonance", "1.0", "--line-loss", "0 dB")
BETWEEN = POINTS[:3]


def inside(*arguments: str) -> int:
    """Run a command in this process, and return its exit status."""
    with pytest.raises(SystemExit) as left:
        run(arguments)
    return int(left.value.code or 0)


@pytest.fixture
def file(tmp_path: Path) -> Path:
    made = tmp_path / "loop.toml"
    made.write_bytes(file_of(plain_tree()))
    return made


TOMORROW = (date.today() + timedelta(days=1)).isoformat()
REFUSED: list[tuple[tuple[str, ...], str]] = [
    ((), "none of --sweep"),
    (("--sweep", "x.s1p", *POINTS), "--sweep and --swr2"),
    ((*BETWEEN, "--half-power", "7 MHz", "7.2 MHz"), "--swr2 and --half-power"),
    (("--sweep", "x.s1p", "--swr-at-resonance", "1.1"), "1.1 beside --sweep"),
    (("--sweep", "x.s1p", "--coupled", "over"), "over beside --sweep"),
    ((*BETWEEN, "--line-loss", "0 dB"), "no --swr-at-resonance"),
    ((*BETWEEN, "--swr-at-resonance", "1.1"), "no --line-loss"),
    (("--half-power", "7 MHz", "7.2 MHz", "--swr-at-resonance", "1.1"), "no --line-loss"),
    ((*POINTS[:-1], ""), "--line-loss"),
    ((*POINTS[:-1], "0.4"), "add the unit"),
    ((*POINTS[:-1], "0,4 dB"), "--line-loss"),
    ((*POINTS[:-1], "-1 dB"), "not negative"),
    ((*POINTS[:-1], "25 dB"), "20 dB"),
    ((*POINTS[:-1], "0.4 dB,0.3 dB,0.5 dB"), "in order"),
    ((*POINTS[:-1], "0.4 dB,0.5 dB"), "low, likely and high"),
    ((*POINTS[:-1], "5 dB"), "a loop gives back less than 1"),
    (("--swr2", "7.103 MHz", "7.097 MHz", *POINTS[3:]), "the lower frequency first"),
    (("--swr2", "7.1 MHz", "7.1 MHz", *POINTS[3:]), "the lower frequency first"),
    (("--swr2", "7.0 MHz", "7.2 m", *POINTS[3:]), "7.2 m"),
    (("--swr2", "7097", "7103", *POINTS[3:]), "add the unit"),
    (("--swr2", "7.097 mHz", "7.103 MHz", *POINTS[3:]), "mHz"),
    (("--swr2", "7.1 MHz", "7.2 MHz", *POINTS[3:]), "read the frequencies more finely"),
    (("--swr2", "14.10 MHz", "14.11 MHz", *POINTS[3:-1], "0.1 dB"), "read the frequencies more finely"),
    (("--swr2", "14.097 MHz", "14.103 MHz", *POINTS[3:]), "within 2 % of a transmission"),
    (("--swr2", "5.2000 MHz", "9.7000 MHz", *POINTS[3:]), "one between 5 and 100000"),
    ((*BETWEEN, "--swr-at-resonance", "2.5", "--line-loss", "0 dB"), "below that of the points"),
    ((*POINTS, "--date", "yesterday"), "'yesterday'"),
    ((*POINTS, "--date", "2026-02-30"), "'2026-02-30'"),
    ((*POINTS, "--date", TOMORROW), "a day that has been"),
    ((*POINTS, "--replace"), "neither --save nor --picture"),
    ((*POINTS, "--picture", "x.svg"), "a sweep, whose circle can be drawn"),
    (("--sweep", "x.s1p", "--picture", "x.pdf"), ".svg or .png"),
    (("--sweep", "no_such.s1p"), "no such file"),
    (("--sweep", "loop.toml"), "ends in"),
    (("--sweep", "."), "without an ending"),
]


@pytest.mark.parametrize(("options", "found"), REFUSED, ids=[f"{' '.join(each)[:60]}" for each, _ in REFUSED])
def test_what_cannot_be_used_is_told_in_four_lines(
    options: tuple[str, ...],
    found: str,
    file: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.chdir(file.parent)
    before = file.read_bytes()
    assert inside("measured", "loop.toml", *options) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert found in told.err
    lines = told.err.rstrip("\n").split("\n")
    assert [line.split()[0] for line in lines[1:]] == ["found", "expected", "do"]
    assert all(len(line.split()) > 1 for line in lines[1:])
    assert file.read_bytes() == before
    assert [each.name for each in file.parent.iterdir()] == ["loop.toml"]


@pytest.mark.parametrize(
    ("options", "found"),
    [
        ((*BETWEEN, "--swr-at-resonance", "0.5", "--line-loss", "0 dB"), "--swr-at-resonance"),
        ((*BETWEEN, "--swr-at-resonance", "30", "--line-loss", "0 dB"), "--swr-at-resonance"),
        ((*POINTS, "--coupled", "critical"), "--coupled"),
        ((*POINTS, "--reflection-error", "0.5"), "--reflection-error"),
        ((*POINTS, "--reflection-error", "nan"), "--reflection-error"),
        ((*BETWEEN, "--swr-at-resonance", "nan", "--line-loss", "0 dB"), "--swr-at-resonance"),
        (("--swr2", "7.097 MHz"), "--swr2"),
        ((*POINTS, "--Q", "900"), "--Q"),
    ],
)
def test_options_out_of_their_range_leave_with_2(
    options: tuple[str, ...], found: str, file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert inside("measured", str(file), *options) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert found in told.err
    assert "Traceback" not in told.err


def test_a_loop_without_a_capacitor_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    wire = {"form": "rod", "outer_diameter": "3.2 mm", "conductivity": "58 MS/m"}
    file = tmp_path / "loop.toml"
    file.write_bytes(
        file_of(plain_tree(capacitor={"kind": "none"}, loop__conductor=wire, transmission__0__frequency="93 MHz"))
    )
    assert inside("measured", str(file), "--swr2", "92.97 MHz", "93.03 MHz", *POINTS[3:]) == 2
    assert 'capacitor.kind = "none"' in capsys.readouterr().err


def test_a_design_that_cannot_be_read_is_told_as_by_check(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert inside("measured", str(tmp_path / "none.toml"), *POINTS) == 2
    assert "no such file" in capsys.readouterr().err
    file = tmp_path / "loop.toml"
    file.write_bytes(file_of(plain_tree(loop__diameter="1,5 m")))
    assert inside("measured", str(file), *POINTS) == 2
    assert "loop.diameter" in capsys.readouterr().err


def test_a_sweep_without_a_resonance_names_its_file_and_moves_no_terminal(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    sweep = file.parent / "bad\x1b[31m.s1p"
    rows = "\n".join(f"{7e6 + 1e3 * i:.0f} 0.5 0.5" for i in range(50))
    sweep.write_text(f"# HZ S RI R 50\n{rows}\n")
    assert inside("measured", str(file), "--sweep", str(sweep)) == 2
    told = capsys.readouterr().err
    assert "no resonance stands out" in told
    assert "\x1b" not in told
    assert "bad\\x1b[31m.s1p" in told


def test_the_machine_form_is_alone_and_valid(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    sweep = sweep_file(file.parent, KnownLoop(unloaded_q=2500.0, coupling=1.4, line_loss=0.5, noise=2e-4))
    status = inside("measured", str(file), "--sweep", str(sweep), "--json", "--date", "2026-05-04")
    told = capsys.readouterr()
    assert told.err == ""
    sheet = MeasuredSheet.model_validate_json(told.out)
    assert json.loads(told.out)["schema"] == "magsafe.measured/1"
    assert status == {"clear": 0, "stop": 1, "unproven": 3}[sheet.verdict]
    assert sheet.date == "2026-05-04"
    assert sheet.reading.file is not None
    assert sheet.reading.file.points == 401
    assert sheet.reading.unloaded_q.likely == pytest.approx(2500.0, rel=3e-3)
    assert sheet.reading.coupling is not None
    assert sheet.reading.coupling.likely == pytest.approx(1.4, rel=1e-2)
    assert sheet.design.sha256 == read_design(file).origin.sha256
    assert set(sheet.figures) >= {"unloaded_q", "capacitor_peak_voltage", "conductor_efficiency"}


@pytest.mark.parametrize(
    ("ends", "status", "verdict"),
    [
        (("7.0985 MHz", "7.1015 MHz"), 3, "unproven"),
        (("7.09914 MHz", "7.10086 MHz"), 0, "clear"),
        (("7.0995 MHz", "7.1005 MHz"), 1, "stop"),
    ],
)
def test_points_are_judged_and_the_status_tells_how(
    ends: tuple[str, str], status: int, verdict: str, file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Matched, SWR 2 at 0.7071/Q of the frequency: 1670, 2920 and 5020."""
    options = ("--swr2", *ends, "--swr-at-resonance", "1.0", "--line-loss", "0 dB")
    assert inside("measured", str(file), *options, "--json") == status
    sheet = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    assert sheet.verdict == verdict
    width = (float(ends[1].split()[0]) - float(ends[0].split()[0])) / 7.1
    assert sheet.reading.unloaded_q.likely == pytest.approx(sqrt(0.5) / width, rel=2e-2)
    assert sheet.power_ceiling.measured.value == 0.0 or verdict != "stop"


def test_both_ways_of_coupling_are_carried_and_told_until_one_is_named(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    options = (*BETWEEN, "--swr-at-resonance", "1.5", "--line-loss", "0.5 dB", "--json")
    sheets = {}
    for way in (None, "over", "under"):
        inside("measured", str(file), *options, *(("--coupled", way) if way else ()))
        sheets[way] = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    both = sheets[None].reading
    assert [each.coupled for each in both.branches] == ["overcoupled", "undercoupled"]
    assert both.coupling is None
    assert any("both are carried" in note for note in sheets[None].notes)
    for way, branch in (("over", both.branches[0]), ("under", both.branches[1])):
        one = sheets[way].reading
        assert one.unloaded_q == branch.unloaded_q
        assert one.coupling == branch.coupling
        assert one.branches == ()
    assert both.unloaded_q.low == min(each.unloaded_q.low or 0.0 for each in both.branches)
    assert both.unloaded_q.high == max(each.unloaded_q.high or 0.0 for each in both.branches)


def test_a_line_loss_of_one_value_is_taken_to_a_fifth(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What tables of cables leave, and a connector more at the end that makes Q high (common practice)."""
    found = []
    for loss in ("0.5 dB", "0.4 dB, 0.5 dB, 0.7 dB"):
        inside("measured", str(file), *POINTS[:-1], loss, "--json")
        found.append(MeasuredSheet.model_validate_json(capsys.readouterr().out).reading)
    assert found[0].line_loss.low == pytest.approx(0.4)
    assert found[0].line_loss.high == pytest.approx(0.7)
    assert found[0].unloaded_q.low == pytest.approx(found[1].unloaded_q.low)
    assert found[0].unloaded_q.high == pytest.approx(found[1].unloaded_q.high)


def test_a_transmission_is_the_nearest_one_and_others_do_not_matter(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "loop.toml"
    bands = [{"frequency": f"{each} MHz", "power": "10 W"} for each in (3.6, 7.05, 7.12, 14.1)]
    file.write_bytes(file_of(plain_tree(transmission=bands)))
    inside("measured", str(file), *POINTS, "--json")
    assert json.loads(capsys.readouterr().out)["transmission"] == "7.12 MHz"


@pytest.mark.parametrize("columns", ["60", "120"])
def test_on_a_pipe_it_is_plain_text_of_that_width(columns: str, file: Path) -> None:
    name = "sweep of a loop with a name that is rather long for a narrow terminal \x1b[31m.s1p"
    sweep = sweep_file(file.parent, KnownLoop(unloaded_q=1700.0, coupling=0.8, line_loss=0.5, noise=2e-4), name)
    env = {"COLUMNS": columns, "NO_COLOR": "1", "PYTHONIOENCODING": "ascii" if columns == "60" else "utf-8"}
    done = run_outside("measured", str(file), "--sweep", str(sweep), env=env)
    assert done.returncode == 3
    assert done.stderr == ""
    lines = done.stdout.split("\n")
    assert max(map(len, lines)) <= int(columns)
    assert all(line.isprintable() for line in lines)
    assert done.stdout.isascii() is (columns == "60")
    for word in ("What was read", "Unloaded Q", "Add --save", "magsafe check"):
        assert word in " ".join(done.stdout.split())


def test_the_text_tells_the_numbers_of_the_machine_form(file: Path, capsys: pytest.CaptureFixture[str]) -> None:
    options = (*BETWEEN, "--swr-at-resonance", "1.5", "--line-loss", "0.5 dB", "--date", "2026-05-04")
    inside("measured", str(file), *options, "--json")
    sheet = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    inside("measured", str(file), *options)
    text = " ".join(capsys.readouterr().out.split())
    q = sheet.reading.unloaded_q.likely
    assert q is not None
    assert f"Unloaded Q {magsafe.units.significant(q)}" in text
    assert "Unloaded Q, if overcoupled" in text
    assert "Unloaded Q, if undercoupled" in text
    assert sheet.findings[0].because.split(";")[0] in text
    assert "measured 2026-05-04" in text


def test_a_q_that_better_parts_would_explain_says_which_to_state() -> None:
    """A vacuum capacitor of no stated loss: its typical Q ends the computed one, the conductor alone allows more."""
    unstated: Tree = {"capacitor__series_resistance": None}
    parts = operating_point(plain_design(**unstated), plain_design().transmission[0]).chain
    assert parts is not None
    typical = parts.dangerous(parts.quality, "low") * (1.0 + parts.quality_error)
    bare = parts.dangerous(parts.quality, "bare") * (1.0 + parts.quality_error)
    assert bare > 1.02 * typical

    def told(quality: float) -> Finding:
        design = plain_design(**measured_changes(quality, 1e-4, **unstated))
        found = as_built(design, operating_point(design, design.transmission[0]))
        assert found is not None
        return found

    between, beyond = told(0.5 * (typical + bare)), told(1.01 * bare)
    assert between.verdict == beyond.verdict == "stop"
    assert "better than is typical (capacitor, vacuum variable)" in between.do
    assert "typical" not in beyond.do


def test_the_instrument_comes_off_before_anybody_transmits() -> None:
    design = plain_design()
    quality = operating_point(design, design.transmission[0]).figures.unloaded_q.spread.likely or 0.0
    frequency, reflection = KnownLoop(unloaded_q=quality).sweep()
    sweep = Sweep("made_up.s1p", "0" * 64, frequency, reflection, 50.0)
    sheet = measured(design, by_sweep(sweep, None, 0.02), sweep, date(2026, 5, 4))
    assert sheet.cautions[0].startswith("Instrument.")
    assert "off the loop before anybody transmits" in sheet.cautions[0]


def test_the_sample_sweep_gives_the_record_in_its_design() -> None:
    folder = Path(__file__).parents[2] / "sample_designs"
    design, sweep = read_design(folder / "net_loft_balcony.toml"), read_sweep(folder / "net_loft_40m.s1p")
    (kept,) = design.measured
    made = record_of(design, by_sweep(sweep, None, 0.02), kept.date or "")
    assert Measured.model_validate(made) == kept


def test_a_capacitor_is_sized_by_a_measured_q_only_where_that_makes_more_volts() -> None:
    from magsafe.checks.sizing import sizing

    parts = _plain_figures().unloaded_q.spread
    plain = sizing(plain_design())
    lower = sizing(plain_design(**measured_changes(0.5 * (parts.low or 0.0))))
    higher = sizing(plain_design(**measured_changes(2.0 * (parts.high or 0.0))))
    assert lower.peak_voltage == plain.peak_voltage
    assert any("sized by the parts alone" in note for note in lower.notes)
    assert higher.verdict == "stop"
    assert higher.peak_voltage is not None
    assert plain.peak_voltage is not None
    assert higher.peak_voltage.at_worst > 1.3 * plain.peak_voltage.at_worst
    assert any("higher than the parts can make it" in note for note in higher.notes)


def test_half_power_points_tell_which_swr_belongs_to_them(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A matched loop of Q 1000 behind 1 dB: half power is SWR 3.56 there, by hand (1/sqrt 2 less 2 dB)."""
    file = tmp_path / "plain.toml"
    file.write_bytes(file_of(plain_tree()))
    reflected = sqrt(0.5) * 10.0 ** (-1.0 / 10.0)
    there = (1.0 + reflected) / (1.0 - reflected)
    width = 7.1e6 / 500.0
    low, high = (f"{(7.1e6 + sign * width / 2.0) / 1e6:.6f} MHz" for sign in (-1.0, 1.0))
    loss = ("--line-loss", "1 dB", "--swr-at-resonance", "1.0", "--json")
    inside("measured", str(file), "--half-power", low, high, *loss)
    taken = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    assert taken.reading.unloaded_q.likely == pytest.approx(1000.0, rel=2e-3)
    assert f"reads an SWR of {there:.3g}" in taken.notes[0]
    # Points read at 5.83 lie further out: said so, Q is right again, and not halved.
    beyond = tuning_times_q(at_the_loop(reflection_of(5.83), 1.0), 1.0)
    wide = 7.1e6 * float(beyond) / 1000.0
    low, high = (f"{(7.1e6 + sign * wide / 2.0) / 1e6:.6f} MHz" for sign in (-1.0, 1.0))
    inside("measured", str(file), "--half-power", low, high, "--swr-at-points", "5.83", *loss)
    said = MeasuredSheet.model_validate_json(capsys.readouterr().out)
    assert said.reading.unloaded_q.likely == pytest.approx(1000.0, rel=2e-3)


def test_a_sweep_that_gives_back_more_than_it_gets_is_refused() -> None:
    frequency, reflection = KnownLoop(coupling=3.0).sweep()
    with pytest.raises(ValueError, match="more than 1, beyond the instrument's error"):
        by_sweep(Sweep("odd.s1p", "0" * 64, frequency, reflection - 0.06 - 0.06j, 50.0), None, 0.02)
