"""A field probe's reading beside the computed field: how it is read from the file, what is found, what it holds up."""

from typing import Any

import pytest
from commands import run
from designs import MakeDesign, file_of, plain_tree
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import mu_0

import magsafe
from magsafe.checks.keepout import keepout
from magsafe.checks.sheet import Finding, Sheet
from magsafe.errors import DesignError, Problem

DESK = {"name": "operating desk", "who": "trained", "along_axis": "3 m", "posture": "sitting"}
WALK = {"name": "Quay walk", "who": "public", "along_axis": "12 m"}
FENCE = {"name": "rope", "who": "public", "fence": "12 m"}
SITE = {
    "site": {"ground": "average", "rules": ["us-fcc"]},
    "loop__centre_height": "2 m",
    "capacitor__position": "top",
    "place": [DESK, WALK, FENCE],
}
AT_DESK = {"place": "operating desk", "power": "10 W", "magnetic": "0.05 A/m", "uncertainty": "2 dB"}
POINT = {"name": "stake", "along_axis": "3 m", "height": "2 m", "power": "10 W", "uncertainty": "2 dB"}
TWO = [{"name": "low", "frequency": "7.1 MHz", "power": "100 W"}, {"frequency": "14.2 MHz", "power": "100 W"}]
RATIO = 10.0 ** (2.0 / 20.0)


def sheet_of(design: MakeDesign, *probes: dict[str, Any], **changes: Any) -> Sheet:
    return magsafe.check(design(**{**SITE, "probe": list(probes), **changes}))


def found_by(sheet: Sheet) -> dict[str, Finding]:
    return {f.id: f for f in sheet.all_findings() if f.id.startswith("exposure.probe")}


def only(sheet: Sheet) -> Finding:
    (finding,) = found_by(sheet).values()
    return finding


def computed(finding: Finding) -> float:
    assert finding.limit is not None
    return finding.limit.value


def problems(*probes: Any, **changes: Any) -> list[Problem]:
    """Return what is wrong, of a file with each block of the probes on its own lines."""
    tree = plain_tree(**{**SITE, **changes})
    rest = "\n".join(f"[[probe]]\n{file_of(each).decode()}" for each in probes)
    with pytest.raises(DesignError) as caught:
        magsafe.parse_design(file_of(tree) + b"\n" + rest.encode(), "test.toml")
    return list(caught.value.problems)


# Reading ---------------------------------------------------------------------------------------------------


def without(block: dict[str, Any], *keys: str) -> dict[str, Any]:
    return {key: value for key, value in block.items() if key not in keys}


WRONG: list[tuple[dict[str, Any], str, str]] = [
    # a probe, the key named, part of what is expected or advised
    (without(AT_DESK, "power"), "power", "power, which is needed"),
    (without(AT_DESK, "uncertainty"), "uncertainty", "uncertainty, which is needed"),
    (without(AT_DESK, "magnetic"), "magnetic", "electric, magnetic or both"),
    (without(AT_DESK, "place"), "place", "the name of a place, or a position and a height"),
    ({**AT_DESK, "place": "operatng desk"}, "place", 'did you mean "operating desk"?'),
    ({**AT_DESK, "place": "zzz"}, "place", "(operating desk, Quay walk, rope)"),
    ({**AT_DESK, "place": "rope"}, "place", "a fence is all that lies on it and outside it"),
    ({**AT_DESK, "along_axis": "1 m"}, "along_axis", "a position of its own, not both"),
    ({**AT_DESK, "height": "1 m"}, "height", "remove height or place"),
    ({**without(AT_DESK, "place"), "height": "1 m"}, "in_plane", "beside height"),
    ({**without(AT_DESK, "place"), "along_axis": "1 m"}, "height", "how high above ground"),
    ({**POINT, "magnetic": "1 A/m", "across": "1 m"}, "across", "beside a vertical loop"),
    ({**AT_DESK, "transmission": "40 m voice"}, "transmission", "what a [[transmission]] is called (7.1 MHz)"),
    ({**AT_DESK, "transmission": "7.2 MHz"}, "transmission", 'did you mean "7.1 MHz"?'),
    ({**AT_DESK, "magnetic": "0.06 uT"}, "magnetic", "1 uT is 0.796 A/m"),
    ({**AT_DESK, "magnetic": "0.6 mG"}, "magnetic", "1 G is 79.6 A/m"),
    ({**AT_DESK, "magnetic": "0.06 microtesla"}, "magnetic", "flux density"),
    ({**AT_DESK, "magnetic": "12 V/m"}, "magnetic", "write it as electric"),
    ({**AT_DESK, "electric": "12 A/m"}, "electric", "write it as magnetic"),
    ({**AT_DESK, "electric": "12 uT"}, "electric", "write it as magnetic"),
    ({**AT_DESK, "electric": "120 dBuV/m"}, "electric", "not decibels"),
    ({**AT_DESK, "magnetic": "60 dBuA/m"}, "magnetic", "not decibels"),
    ({**AT_DESK, "electric": "12 W/m"}, "electric", "not a power density"),
    ({**AT_DESK, "electric": "12 v/m"}, "electric", 'did you mean "12 V/m"?'),
    ({**AT_DESK, "electric": "12 MV/m"}, "electric", "a million"),
    ({**AT_DESK, "magnetic": "0 A/m"}, "magnetic", "between 1 uA/m and 1000 A/m"),
    ({**AT_DESK, "electric": "101 kV/m"}, "electric", "between 1 mV/m and 100 kV/m"),
    ({**AT_DESK, "electric": "-3 V/m"}, "electric", "minus"),
    ({**AT_DESK, "electric": 3}, "electric", 'such as "12 V/m"'),
    ({**AT_DESK, "uncertainty": "0 dB"}, "uncertainty", "between 0.1 dB and 10 dB"),
    ({**AT_DESK, "uncertainty": "20 %"}, "uncertainty", "decibels"),
    ({**AT_DESK, "name": "???"}, "name", "a letter or a digit"),
    ({**AT_DESK, "date": " "}, "date", "a name"),
    ({**AT_DESK, "magnitude": "1 A/m"}, "magnitude", 'did you mean "magnetic"?'),
]


@pytest.mark.parametrize(("block", "key", "part"), WRONG, ids=[f"{i} {k}" for i, (_, k, _) in enumerate(WRONG)])
def test_a_probe_that_cannot_be_used_is_answered_by_key_and_line(block: dict[str, Any], key: str, part: str) -> None:
    (problem,) = problems(block)
    assert problem.key == f"probe[0].{key}"
    assert part in f"{problem.expected} {problem.do}"
    first = file_of(plain_tree(**SITE)).count(b"\n") + 2
    line = first + 1 + list(block).index(key) if key in block else first
    assert problem.line == line


def test_all_that_is_wrong_with_probes_comes_at_once() -> None:
    found = problems({"place": "Kai", "power": "10"}, {**AT_DESK, "magnetic": "1 T"})
    assert {p.key for p in found} == {
        "probe[0].place", "probe[0].power", "probe[0].magnetic", "probe[0].uncertainty", "probe[1].magnetic",
    }  # fmt: skip


def test_the_number_told_for_a_flux_density_is_that_of_free_space() -> None:
    (problem,) = problems({**AT_DESK, "magnetic": "1 uT"})
    assert f"1 uT is {1e-6 / mu_0:.3g} A/m" in problem.do
    (problem,) = problems({**AT_DESK, "magnetic": "1 G"})
    assert f"1 G is {1e-4 / mu_0:.3g} A/m" in problem.do


def test_where_there_are_several_a_probe_names_its_transmission() -> None:
    (problem,) = problems(AT_DESK, transmission=TWO)
    assert problem.key == "probe[0].transmission"
    assert "(low, 14.2 MHz)" in problem.expected
    (problem,) = problems({**AT_DESK, "transmission": "7.1 MHz"}, transmission=TWO)
    assert problem.key == "probe[0].transmission"


def test_titles_with_a_number_are_named_with_it(design: MakeDesign) -> None:
    same = [{"frequency": "7.1 MHz", "power": "100 W"}, {"frequency": "7.1 MHz", "power": "50 W"}]
    (problem,) = problems({**AT_DESK, "transmission": "7.1 MHz"}, transmission=same)
    assert "(7.1 MHz (1), 7.1 MHz (2))" in problem.expected
    sheet = sheet_of(design, {**AT_DESK, "transmission": "7.1 MHz (2)"}, transmission=same)
    assert [any("probe" in f.id for f in p.findings) for p in sheet.operating_points] == [False, True]


def test_a_frequency_that_cannot_be_read_makes_no_second_message() -> None:
    broken = [TWO[0], {"frequency": "14,2 MHz", "power": "100 W"}]
    found = problems({**AT_DESK, "transmission": "14.2 MHz"}, transmission=broken)
    assert [p.key for p in found] == ["transmission[1].frequency"]


def test_two_probes_in_one_place_need_names_that_tell_them_apart() -> None:
    (problem,) = problems(AT_DESK, AT_DESK)
    assert (problem.key, problem.found) == ("probe[1].name", "nothing")
    (problem,) = problems(AT_DESK, {**AT_DESK, "transmission": "7.1 MHz"})
    assert problem.key == "probe[1].name"
    (problem,) = problems({**AT_DESK, "name": "Second one"}, {**AT_DESK, "name": "second-one"})
    assert (problem.key, problem.found) == ("probe[1].name", '"second-one"')
    (problem,) = problems({**AT_DESK, "name": "probe 2"}, without({**POINT, "magnetic": "1 A/m"}, "name"))
    assert problem.key == "probe[1].name"


def test_a_flat_loop_has_its_own_directions() -> None:
    flat: dict[str, Any] = {"loop__plane": "horizontal", "capacitor__position": None, "place": []}
    (problem,) = problems({**POINT, "magnetic": "1 A/m"}, **flat)
    assert problem.key == "probe[0].along_axis"
    assert "across" in problem.expected


VALUES = st.one_of(
    st.text(max_size=8),
    st.integers(),
    st.booleans(),
    st.lists(st.text(max_size=3), max_size=2),
    st.dictionaries(st.text(max_size=3), st.integers(), max_size=2),
)


@settings(max_examples=200, deadline=2000)
@given(key=st.sampled_from([*AT_DESK, *POINT, "date", "transmission", "electric"]), value=VALUES)
def test_no_value_in_a_probe_makes_a_traceback(key: str, value: Any) -> None:
    try:
        magsafe.parse_design(file_of(plain_tree(**{**SITE, "probe": [AT_DESK, {**AT_DESK, "name": "b", key: value}]})))
    except DesignError as error:
        assert all(p.expected and p.do and len(p.text("x")) < 700 for p in error.problems)


def test_quantities_of_a_probe_become_si(design: MakeDesign) -> None:
    made = design(**{**SITE, "probe": [{**AT_DESK, "magnetic": "50 mA/m", "electric": "0.012 kV/m"}]}).probe[0]
    assert made.magnetic == pytest.approx(0.05)
    assert made.electric == pytest.approx(12.0)
    assert made.uncertainty_ratio == pytest.approx(RATIO)


# Findings --------------------------------------------------------------------------------------------------


def reading(design: MakeDesign, share: float, block: dict[str, Any] = AT_DESK, **changes: Any) -> Sheet:
    """Return the sheet of a reading that is this share of the magnetic field computed."""
    at_most = computed(only(sheet_of(design, {**block, "magnetic": "0.05 A/m"}, **without(changes, "site"))))
    return sheet_of(design, {**block, "magnetic": f"{share * at_most:.12f} A/m"}, **changes)


@pytest.mark.parametrize(
    ("share", "verdict", "part"),
    [
        (0.0999, "narrow", "less than 10 % of that"),
        (0.1001, "clear", "no stronger than computed"),
        (0.999, "clear", "no stronger than computed"),
        (1.001, "narrow", "by no more than the instrument's 2 dB"),
        (0.999 * RATIO, "narrow", "by no more than the instrument's 2 dB"),
        (1.001 * RATIO, "stop", "all distances are too short"),
    ],
)
def test_a_reading_beside_what_is_computed(design: MakeDesign, share: float, verdict: str, part: str) -> None:
    found = only(reading(design, share))
    assert found.verdict == verdict
    assert part in found.because
    assert found.margin_asked == pytest.approx(RATIO)
    assert found.margin_found == pytest.approx(RATIO / share)
    assert found.power_at_margin is None
    assert found.power_at_limit is None
    assert found.thin == (verdict == "narrow")
    assert found.value is not None
    assert found.value.likely == pytest.approx(share * computed(found))
    assert found.value.low == pytest.approx((found.value.likely or 0.0) / RATIO)
    assert found.value.high == pytest.approx((found.value.likely or 0.0) * RATIO)
    assert (found.do == "nothing") == (verdict == "clear")


def test_the_words_of_a_reading(design: MakeDesign) -> None:
    found = only(sheet_of(design, {**AT_DESK, "magnetic": "0.03 A/m", "date": "2026-04-18"}))
    at_most = f"{computed(found):.3g}"
    assert found.because == (
        f"H reads 0.0300 A/m RMS at 10 W on 2026-04-18, computed at most {at_most} A/m: it is no stronger than computed"
    )
    assert found.question == "Is the magnetic field that was read at operating desk no stronger than computed?"
    assert (found.id, found.place) == ("exposure.probe.operating-desk", "operating desk")


def test_a_reading_stronger_than_computed_leaves_no_power_and_stops_people(design: MakeDesign) -> None:
    sheet = reading(design, 2.0)
    assert sheet.verdict == "stop"
    assert sheet.power_ceiling.value == 0.0
    assert sheet.power_ceiling.held_by == "exposure.probe.operating-desk"
    people = keepout(sheet)
    assert people.verdict == "stop"
    assert people.power_ceiling.value == 0.0
    assert "rely on no distance" in only(sheet).do
    quiet = keepout(reading(design, 0.5))
    assert quiet.verdict == "clear"
    assert (quiet.power_ceiling.value or 0.0) > 0.0


def test_a_reading_lowers_nothing(design: MakeDesign) -> None:
    with_it, without_it = keepout(reading(design, 0.2)), keepout(sheet_of(design))
    assert with_it.power_ceiling == without_it.power_ceiling
    assert [p.exposure for p in with_it.operating_points] == [p.exposure for p in without_it.operating_points]


def test_thin_readings_are_named_beside_the_ceiling_and_do_not_hold_it(design: MakeDesign) -> None:
    faint = reading(design, 0.05).power_ceiling
    assert faint.on_thin_evidence == ("exposure.probe.operating-desk",)
    assert (faint.value or 0.0) > 0.0


def test_both_fields_make_a_finding_each(design: MakeDesign) -> None:
    found = found_by(sheet_of(design, {**AT_DESK, "electric": "2 V/m"}))
    assert set(found) == {"exposure.probe.operating-desk.e", "exposure.probe.operating-desk.h"}
    electric = found["exposure.probe.operating-desk.e"]
    assert electric.limit is not None
    assert electric.limit.unit == "V/m"
    assert electric.because.startswith("E reads 2.00 V/m RMS")
    assert electric.question.startswith("Is the electric field")


def test_probes_are_called_by_name_by_place_or_by_number(design: MakeDesign) -> None:
    point = {**without(POINT, "name"), "magnetic": "0.01 A/m"}
    sheet = sheet_of(design, AT_DESK, point, {**AT_DESK, "name": "desk again"}, {**POINT, "magnetic": "0.01 A/m"})
    assert [f.rsplit(".", 1)[1] for f in found_by(sheet)] == ["operating-desk", "probe-2", "desk-again", "stake"]


def test_each_probe_has_the_field_of_its_own_place(design: MakeDesign) -> None:
    blocks = [{**AT_DESK, "place": "Quay walk"}, AT_DESK, {**POINT, "magnetic": "0.05 A/m"}]
    together = list(found_by(sheet_of(design, *blocks)).values())
    assert [computed(f) for f in together] == [computed(only(sheet_of(design, each))) for each in blocks]
    assert len({computed(f) for f in together}) == 3


def test_what_is_computed_is_what_the_place_was_judged_by(design: MakeDesign) -> None:
    """The record of the place has the same field, at its power; here no typical loss is credited."""
    sheet = sheet_of(design, {**AT_DESK, "electric": "2 V/m", "power": "40 W"})
    (place,) = (p for e in sheet.operating_points[0].exposure for p in e.places if p.name == "operating desk")
    scale = (40.0 / (place.judged_power or 0.0)) ** 0.5
    found = found_by(sheet)
    assert computed(found["exposure.probe.operating-desk.h"]) == pytest.approx(scale * (place.magnetic or 0.0))
    assert computed(found["exposure.probe.operating-desk.e"]) == pytest.approx(scale * (place.electric or 0.0))


def test_typical_losses_lower_no_field_that_a_reading_is_held_against(design: MakeDesign) -> None:
    contacts = [{"name": "brushes", "kind": "sliding contact", "count": 4, "at": "capacitor"}]
    plain, credited = only(sheet_of(design, AT_DESK)), only(sheet_of(design, AT_DESK, loop__joint=contacts))
    # One factor serves free space and image, so it may be a little more, never less.
    assert 1.0 - 1e-9 <= computed(credited) / computed(plain) < 1.05


def test_the_line_takes_from_it_only_what_it_takes_in_any_case(design: MakeDesign) -> None:
    loss = {"low": "1 dB", "likely": "2 dB", "high": "3 dB"}
    plain, behind = only(sheet_of(design, AT_DESK)), only(sheet_of(design, AT_DESK, feed={"line_loss": loss}))
    assert computed(behind) == pytest.approx(computed(plain) * 10.0 ** (-1.0 / 20.0))


def test_each_probe_is_judged_in_its_own_transmission(design: MakeDesign) -> None:
    probes = [{**AT_DESK, "transmission": "14.2 MHz"}, {**AT_DESK, "transmission": "low"}]
    both = sheet_of(design, *probes, transmission=TWO).operating_points
    alone = [sheet_of(design, AT_DESK, transmission=[each]).operating_points[0] for each in TWO]
    for one, other in zip(both, alone, strict=True):
        (here,), (there,) = ([f for f in p.findings if "probe" in f.id] for p in (one, other))
        assert here == there


def test_a_probe_is_judged_without_any_rule(design: MakeDesign) -> None:
    site = {"ground": "average"}
    assert only(reading(design, 2.0, site=site)).verdict == "stop"


def test_a_missing_height_leaves_a_reading_unproven(design: MakeDesign) -> None:
    for ground in ("average", "none"):
        found = only(sheet_of(design, AT_DESK, loop__centre_height=None, site={"ground": ground}))
        assert found.verdict == "unproven"
        assert "centre_height" in found.because
        assert found.limit is None


def test_beyond_what_tunes_a_reading_is_unproven(design: MakeDesign) -> None:
    sheet = sheet_of(design, AT_DESK, transmission__0__frequency="50.1 MHz")
    assert only(sheet).verdict == "unproven"
    assert only(sheet).id in sheet.power_ceiling.left_out


def test_near_metal_a_reading_proves_nothing_but_that_more_is_there(design: MakeDesign) -> None:
    site = {"ground": "average", "rules": ["us-fcc"], "metal_within": "0.5 m"}
    for share in (0.05, 0.5, 1.1):
        found = only(reading(design, share, site=site))
        assert found.verdict == "unproven"
        assert "metal is within" in (found.doubt or "")
    sheet = reading(design, 2.0, site=site)
    assert only(sheet).verdict == "stop"
    assert sheet.power_ceiling.value == 0.0
    at_the_edge = {**site, "metal_within": "1.03 m"}
    assert only(reading(design, 0.5, site=at_the_edge)).verdict == "clear"


NEAR = [
    # where a point is, and whether its electric and its magnetic field are computed there: loop of 1 m about 2 m
    ({"in_plane": "0.85 m", "height": "1.5 m"}, True, True),
    ({"in_plane": "0.75 m", "height": "2 m"}, False, True),
    ({"along_axis": "0.4 m", "height": "2.5 m"}, False, True),
    ({"along_axis": "0.52 m", "height": "2.5 m"}, True, True),
    ({"in_plane": "0.5 m", "height": "2 m"}, False, False),
]


@pytest.mark.parametrize(("where", "electric", "magnetic"), NEAR)
def test_near_the_bodies_the_electric_field_is_unproven_alone(
    design: MakeDesign, where: dict[str, str], electric: bool, magnetic: bool
) -> None:
    """0.3 m from the conductor's axis, 0.5 m from the capacitor on top; inside the conductor there is no field."""
    near = {**without(POINT, "along_axis", "height"), **where, "power": "10 kW", "electric": "100 kV/m"}
    found = found_by(sheet_of(design, {**near, "magnetic": "0.001 A/m"}))
    assert found["exposure.probe.stake.e"].verdict == ("stop" if electric else "unproven")
    assert found["exposure.probe.stake.h"].verdict == ("narrow" if magnetic else "unproven")


def test_a_column_that_comes_near_the_bodies_proves_nothing_by_its_electric_field(design: MakeDesign) -> None:
    """Part of it has a field that is computed and part has none, which may be the stronger."""
    close = {**DESK, "along_axis": "0.55 m", "posture": "standing"}
    found = only(sheet_of(design, {**without(AT_DESK, "magnetic"), "electric": "100 kV/m"}, place=[close]))
    assert found.verdict == "unproven"
    assert "within 0.3 m of the conductor" in found.because


def test_a_column_with_the_conductor_in_it_proves_nothing_by_its_magnetic_field(design: MakeDesign) -> None:
    under = {**DESK, "along_axis": "0 m", "in_plane": "0.5 m", "posture": "standing"}
    strong = {**AT_DESK, "magnetic": "900 A/m"}
    calm = only(sheet_of(design, {**AT_DESK, "magnetic": "3 A/m"}, place=[under]))
    assert calm.verdict == "unproven"
    assert "conductor runs through it" in calm.because
    assert only(sheet_of(design, strong, place=[under])).verdict == "stop"


def test_below_the_ground_a_reading_is_unproven(design: MakeDesign) -> None:
    cellar = {**DESK, "floor": "-0.5 m"}
    found = only(sheet_of(design, {**AT_DESK, "magnetic": "0.03 A/m"}, place=[cellar]))
    assert found.verdict == "unproven"
    assert "below the ground" in found.because
    deep = only(sheet_of(design, {**POINT, "height": "-1 m", "magnetic": "900 A/m"}))
    assert deep.verdict == "unproven"


def test_a_loop_that_rotates_is_taken_at_its_worst_bearing(design: MakeDesign) -> None:
    aside = {**without(POINT, "along_axis"), "in_plane": "3 m", "magnetic": "0.01 A/m"}
    still, turning = only(sheet_of(design, aside)), only(sheet_of(design, aside, loop__rotates=True))
    assert computed(turning) > 1.5 * computed(still)


def test_the_commands_tell_a_reading() -> None:
    data = file_of(plain_tree(**SITE, probe=[{**AT_DESK, "magnetic": "0.03 A/m"}]))
    done = run("check", "-", given=data)
    assert "exposure.probe, operating desk: H reads 0.0300 A/m" in " ".join(done.stdout.split())
    done = run("keepout", "-", given=data)
    assert done.returncode == 0
    assert "operating desk (exposure.probe.operating-desk): H reads" in " ".join(done.stdout.split())
    stopped = run("keepout", "-", given=data.replace(b'"0.03 A/m"', b'"0.9 A/m"'))
    assert stopped.returncode == 1
    assert "rely on no distance and no power" in " ".join(stopped.stdout.split())
