"""Does a filed sheet still hold: what is compared, what is worse, what is refused, and how it is told."""

import hashlib
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from commands import run
from designs import file_of, plain_tree
from hypothesis import given
from hypothesis import strategies as st

import magsafe
from magsafe.checks import filed
from magsafe.checks.compare import Source, compare
from magsafe.checks.comparison import Change, Comparison, differ, toward
from magsafe.checks.filed import Filed, design_in, parse_sheet
from magsafe.checks.sheet import ORDER, Sheet
from magsafe.errors import CommandError, MagsafeError
from magsafe.reports.recheck import show_recheck

SAMPLES = Path(__file__).parents[2] / "sample_designs"
OVER = {"transmit": "3 min", "listen": "3 min"}
VOICE = {"name": "40 m voice", "frequency": "7.1 MHz", "power": "100 W", "mode": "SSB", "over": OVER}
DATA = {"name": "20 m data", "frequency": "14.1 MHz", "power": "60 W", "mode": "data", "over": OVER}
DESK = {"name": "desk", "who": "trained", "along_axis": "4 m", "posture": "sitting"}
WALK = {"name": "walk", "who": "public", "along_axis": "7 m"}
TREE = plain_tree(
    site={
        "ground": "average", "rules": ["us-fcc", "icnirp-2020"], "sessions": [["40 m voice", "20 m data"]],
        "altitude": "10 m", "air_temperature": "20 degC",
    },
    loop__centre_height="2 m", capacitor__position="top", transmission=[VOICE, DATA], place=[DESK, WALK],
)  # fmt: skip

Tree = dict[str, Any]


@pytest.fixture(scope="module")
def sheet() -> Sheet:
    return magsafe.check(magsafe.parse_design(file_of(TREE), "station.toml"))


@pytest.fixture(scope="module")
def small() -> tuple[bytes, Sheet]:
    """Give a design that is quick to compute and clear, and its sheet."""
    data = file_of(plain_tree(capacitor__rated_voltage="30 kV", transmission=[{**VOICE, "power": "10 W"}]))
    return data, magsafe.check(magsafe.parse_design(data, "small.toml"))


def altered(sheet: Sheet, change: Callable[[Tree], object]) -> Sheet:
    tree = json.loads(sheet.to_json())
    change(tree)
    return Sheet.model_validate(tree)


def against(before: Sheet, after: Sheet) -> Comparison:
    """Hold a sheet computed now against one that another version filed."""
    old = before.model_copy(update={"magsafe": "0.0.1"})
    return compare(Source(old, "filed", "old.json"), Source(after, "computed", "now.toml"))


def only(found: Comparison, **known: Any) -> Change:
    """Return the one change that has these fields."""
    fitting = [each for each in found.changes if all(getattr(each, key) == value for key, value in known.items())]
    assert len(fitting) == 1, [each.text for each in found.changes]
    return fitting[0]


# Nothing changed --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("sample", sorted(SAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_a_sample_that_was_filed_is_read_back_and_holds(sample: Path) -> None:
    design = magsafe.read_design(sample)
    made = magsafe.check(design)
    read = parse_sheet(made.to_json().encode(), "filed.json")
    assert read == Filed(made, ())
    assert design_in(read.sheet, "filed.json") == design
    later = made.model_copy(update={"date": "2031-01-01"})
    found = compare(Source(read.sheet, "filed", "filed.json"), Source(later, "computed", "the design in it"))
    assert found.changes == ()
    assert found.notes == ()
    assert (found.answer, found.holds, found.said) == ("holds", True, "The filed sheet still holds.")
    assert found.verdict == made.verdict


def test_the_design_in_a_sheet_computed_anew_gives_the_same(sheet: Sheet) -> None:
    again = magsafe.check(design_in(sheet, "x.json"))
    assert compare(Source(sheet, "filed", "x.json"), Source(again, "computed", "it")).changes == ()


def test_a_byte_order_mark_is_part_of_the_file_that_was_filed() -> None:
    design = magsafe.parse_design(b"\xef\xbb\xbf" + file_of(plain_tree()), "marked.toml")
    made = magsafe.check(design)
    read = parse_sheet(made.to_json().encode(), "x.json").sheet
    assert design_in(read, "x.json").origin == design.origin


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16"])
def test_a_sheet_that_a_shell_wrote_in_another_encoding_is_read(sheet: Sheet, encoding: str) -> None:
    assert parse_sheet(sheet.to_json().encode(encoding), "x.json").sheet == sheet


def test_another_version_and_another_layout_change_nothing_that_counts(sheet: Sheet) -> None:
    text = f"# a comment\n{sheet.design.text}"
    design = sheet.design.model_copy(update={"text": text, "sha256": "0" * 64, "name": "copy.toml"})
    found = against(sheet, sheet.model_copy(update={"design": design}))
    assert [each.kind for each in found.changes] == ["software", "layout", "layout"]
    assert found.answer == "holds"
    assert "layout, comments or order only" in only(found, of="design").text


# Rounding ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("before", "after", "apart"),
    [
        (1.0, 1.0049, False),  # both are 1.00
        (1.00499, 1.00501, False),  # 1.00 and 1.01, but a hair apart
        (1.0, 1.01, True),
        (1.0, 1.0061, True),  # 1.00 and 1.01
        (9990.0, 9999.0, True),  # 9990 and 10000
        (9.99, 9.994, False),
        (-111.7, -112.9, True),
        (0.0, 0.0, False),
        (0.0, 1e-9, True),
        (None, None, False),
        (None, 1.0, True),
        (1.0, None, True),
    ],
)
def test_numbers_differ_where_three_digits_tell_them_apart(
    before: float | None, after: float | None, apart: bool
) -> None:
    assert differ(before, after) is apart
    assert differ(after, before) is apart


@given(st.floats(1e-12, 1e12), st.floats(-0.02, 0.02))
def test_what_counts_as_rounding_is_less_than_one_step_of_the_third_digit(value: float, change: float) -> None:
    other = value * (1.0 + change)
    if not differ(value, other):
        assert abs(other - value) < 1.001 * 0.01 * max(value, other)  # a step is 1 % at most, where the digits are 100
    if abs(change) > 0.0102:
        assert differ(value, other)
    if abs(change) < 0.00049:  # half a step is 0.05 % at least, where the digits are 999
        assert not differ(value, other)


def test_an_end_that_is_not_known_any_more_is_worse() -> None:
    assert toward(1.0, None, worse="higher") == toward(1.0, None, worse="lower") == "worse"
    assert toward(None, 1.0, worse="higher") == "other"
    assert toward(1.0, 1.0001, worse="higher") == "other"


# What is worse ----------------------------------------------------------------------------------------------


def figure(name: str, **ends: float | str | None) -> Callable[[Tree], object]:
    return lambda tree: tree["operating_points"][0]["figures"][name].update(ends)


@pytest.mark.parametrize(
    ("name", "factor", "direction"),
    [
        ("capacitor_peak_voltage", 1.1, "worse"),
        ("capacitor_peak_voltage", 0.9, "better"),
        ("largest_current", 1.1, "worse"),
        ("conductor_temperature_rise", 1.1, "worse"),
        ("half_power_bandwidth", 0.9, "worse"),
        ("half_power_bandwidth", 1.1, "better"),
        ("conductor_efficiency", 0.9, "worse"),
        ("inductance", 1.1, "other"),
        ("unloaded_q", 1.1, "other"),
    ],
)
def test_a_figure_is_worse_at_its_dangerous_end(sheet: Sheet, name: str, factor: float, direction: str) -> None:
    old = sheet.operating_points[0].figures[name]
    ends = {
        end: None if value is None else value * factor
        for end, value in (("low", old.low), ("likely", old.likely), ("high", old.high))
    }
    found = against(sheet, altered(sheet, figure(name, **ends)))
    change = only(found, kind="figure")
    assert (change.of, change.direction, change.transmission) == (name, direction, "40 m voice")
    assert found.answer == ("does not hold" if direction == "worse" else "outdated")


def test_volts_that_nothing_bounds_any_more_are_worse(sheet: Sheet) -> None:
    found = against(sheet, altered(sheet, figure("capacitor_peak_voltage", high=None)))
    assert only(found, kind="figure").direction == "worse"
    back = against(altered(sheet, figure("capacitor_peak_voltage", high=None)), sheet)
    assert only(back, kind="figure").direction == "other"


def test_volts_whose_likely_value_alone_rises_are_not_called_worse(sheet: Sheet) -> None:
    old = sheet.operating_points[0].figures["capacitor_peak_voltage"]
    assert old.high is not None
    found = against(sheet, altered(sheet, figure("capacitor_peak_voltage", likely=old.high)))
    assert only(found, kind="figure").direction == "other"


def test_another_unit_is_not_compared(sheet: Sheet) -> None:
    found = against(altered(sheet, figure("capacitor_peak_voltage", unit="kV")), sheet)
    change = only(found, kind="figure")
    assert change.direction == "unknown"
    assert "was in kV and is in V" in change.text
    assert found.said.startswith("The filed sheet cannot be upheld: ")


def test_figures_on_one_sheet_only(sheet: Sheet) -> None:
    without = altered(sheet, lambda tree: tree["operating_points"][0]["figures"].pop("inductance"))
    assert only(against(sheet, without), kind="figure").direction == "unknown"
    assert only(against(without, sheet), kind="figure").direction == "other"
    assert against(without, sheet).answer == "outdated"


def with_ceiling(sheet: Sheet, **changes: Any) -> Sheet:
    return altered(sheet, lambda tree: tree["power_ceiling"].update(changes))


def test_a_lower_ceiling_is_worse_and_told_so_that_two_digits_do_not_hide_it(sheet: Sheet) -> None:
    value = sheet.power_ceiling.value
    assert value is not None
    found = against(sheet, with_ceiling(sheet, value=0.5 * value))
    assert only(found, kind="ceiling").direction == "worse"
    assert found.said.startswith("The filed sheet does not hold any more: the highest power ")
    near = [with_ceiling(sheet, value=power) for power in (23.9, 23.1)]
    assert "was 23.9 W and is 23.1 W" in only(against(*near), kind="ceiling").text
    assert only(against(*near[::-1]), kind="ceiling").direction == "better"


def test_a_ceiling_that_leaves_more_out_is_worse_even_where_it_is_higher(sheet: Sheet) -> None:
    first = with_ceiling(sheet, complete=True, left_out=[], value=1.0)
    for value in (1.0, 2.0):
        second = with_ceiling(sheet, complete=False, left_out=["x"], value=value)
        assert only(against(first, second), kind="ceiling").direction == "worse"


def verdicts_of(index: int, verdict: str) -> Callable[[Tree], object]:
    return lambda tree: tree["operating_points"][0]["findings"][index].update(verdict=verdict)


def test_verdicts_are_told_before_all_else_and_the_worst_of_them_first(sheet: Sheet) -> None:
    clear = [i for i, f in enumerate(sheet.operating_points[0].findings) if f.verdict == "clear" and f.place is None]

    def change(tree: Tree) -> None:
        figure("capacitor_peak_voltage", high=1e6)(tree)
        for index, verdict in zip(clear, ("narrow", "stop", "unproven"), strict=False):
            verdicts_of(index, verdict)(tree)
        tree["verdict"] = "stop"

    first = altered(sheet, lambda tree: tree.update(verdict="narrow"))
    found = against(first, altered(sheet, change))
    assert [each.kind for each in found.changes[:5]] == ["verdict", "finding", "finding", "finding", "figure"]
    assert [each.after for each in found.changes[1:4]] == ["stop", "unproven", "narrow"]
    assert found.said == "The filed sheet does not hold any more: the verdict was narrow and is stop."
    assert all(each.direction == "worse" for each in found.changes[:5])
    assert only(against(altered(sheet, change), first), kind="verdict").direction == "better"


def test_a_finding_that_is_not_asked_any_more_upholds_nothing(sheet: Sheet) -> None:
    index = next(i for i, f in enumerate(sheet.operating_points[0].findings) if f.id == "capacitor.current")
    without = altered(sheet, lambda tree: tree["operating_points"][0]["findings"].pop(index))
    assert only(against(sheet, without), kind="finding").direction == "unknown"
    assert only(against(without, sheet), kind="finding").direction == "other"
    worse = altered(sheet, verdicts_of(index, "stop"))
    assert only(against(without, worse), kind="finding").direction == "worse"


def test_a_margin_found_that_shrinks_is_worse(sheet: Sheet) -> None:
    index = next(i for i, f in enumerate(sheet.operating_points[0].findings) if f.id == "capacitor.current")
    margin = sheet.operating_points[0].findings[index].margin_found
    assert margin is not None
    less = altered(sheet, lambda t: t["operating_points"][0]["findings"][index].update(margin_found=0.9 * margin))
    assert only(against(sheet, less), kind="finding").direction == "worse"
    assert only(against(less, sheet), kind="finding").direction == "better"


def test_asking_for_less_is_worse(sheet: Sheet) -> None:
    less = altered(sheet, lambda tree: tree["margins"].update(voltage=1.1))
    change = only(against(sheet, less), kind="margin")
    assert change.direction == "worse"
    assert change.text == "margin of voltage: 1.500 before, 1.100 now, so that less is asked"
    assert only(against(less, sheet), kind="margin").direction == "better"


# People -----------------------------------------------------------------------------------------------------


def keepout_of(tree: Tree) -> Tree:
    found: Tree = tree["operating_points"][1]["exposure"][0]["keepout"]
    return found


def test_a_keepout_that_grows_is_worse_by_any_step(sheet: Sheet) -> None:
    def grow(tree: Tree) -> None:
        keepout_of(tree)["above"]["distance"] += 0.1

    change = only(against(sheet, altered(sheet, grow)), kind="keepout")
    assert (change.direction, change.part, change.transmission) == ("worse", "above", "20 m data")
    assert only(against(altered(sheet, grow), sheet), kind="keepout").direction == "better"


def test_a_keepout_that_is_unbounded_or_lost_is_worse(sheet: Sheet) -> None:
    def unbound(tree: Tree) -> None:
        keepout_of(tree)["key_down"]["any_direction"]["distance"] = None

    def lose(tree: Tree) -> None:
        tree["operating_points"][1]["exposure"][0].update(keepout=None, why="metal is near")

    change = only(against(sheet, altered(sheet, unbound)), kind="keepout")
    assert (change.direction, change.part) == ("worse", "key-down any direction")
    assert "unbounded now" in change.text
    assert only(against(altered(sheet, unbound), sheet), kind="keepout").direction == "better"
    lost = only(against(sheet, altered(sheet, lose)), kind="keepout")
    assert lost.direction == "worse"
    assert lost.text.endswith("not known any more: metal is near")
    assert only(against(altered(sheet, lose), sheet), kind="keepout").direction == "other"


def test_a_place_that_takes_more_of_the_limit_is_worse(sheet: Sheet) -> None:
    share = sheet.operating_points[0].exposure[0].places[0].share_of_limit
    assert share is not None

    def more(tree: Tree) -> None:
        tree["operating_points"][0]["exposure"][0]["places"][0]["share_of_limit"] = 1.1 * share

    change = only(against(sheet, altered(sheet, more)), kind="place")
    assert (change.direction, change.of, change.part) == ("worse", "desk", "us-fcc trained")
    assert only(against(altered(sheet, more), sheet), kind="place").direction == "better"


def test_in_a_session_too(sheet: Sheet) -> None:
    def more(tree: Tree) -> None:
        tree["sessions"][0]["exposure"][0]["places"][0]["share_of_limit"] *= 1.1
        tree["sessions"][0]["exposure"][0]["keepout"]["any_direction"]["distance"] += 0.5

    found = against(sheet, altered(sheet, more))
    assert only(found, kind="place").direction == only(found, kind="keepout").direction == "worse"
    assert only(found, kind="place").session == "20 m data, 40 m voice"

    def without(tree: Tree) -> None:
        tree["sessions"] = []

    dropped = against(sheet, altered(sheet, without))
    assert only(dropped, kind="place").direction == "worse"
    assert only(against(altered(sheet, without), sheet), kind="place").direction == "other"


def drop_place(tree: Tree) -> None:
    exposures = [e for p in tree["operating_points"] for e in p["exposure"]]
    for each in (*exposures, *(e for s in tree["sessions"] for e in s["exposure"])):
        each["places"] = [place for place in each["places"] if place["name"] != "walk"]
    for point in tree["operating_points"]:
        point["findings"] = [f for f in point["findings"] if f["place"] != "walk"]


def test_a_place_that_nobody_judges_any_more_is_worse_and_told_once(sheet: Sheet) -> None:
    found = against(sheet, altered(sheet, drop_place))
    assert [(each.kind, each.direction, each.of) for each in found.changes[:-1]] == [("place", "worse", "walk")]
    back = against(altered(sheet, drop_place), sheet)
    assert only(back, kind="place").text.startswith("place walk (public) is judged now, and was not: ")


def test_a_person_moved_to_the_laxer_tier_is_told(sheet: Sheet) -> None:
    def move(tree: Tree) -> None:
        for point in tree["operating_points"]:
            for trained, public in zip(point["exposure"][::2], point["exposure"][1::2], strict=True):
                assert (trained["who"], public["who"]) == ("trained", "public")
                trained["places"] += public["places"]
                public["places"] = []

    found = against(sheet, altered(sheet, move))
    assert only(found, kind="place", part="public").direction == "worse"


def rules_of(tree: Tree, change: Callable[[list[Tree]], list[Tree]]) -> None:
    for each in (*tree["operating_points"], *tree["sessions"]):
        each["exposure"] = change(each["exposure"])


def drop_rule(tree: Tree) -> None:
    rules_of(tree, lambda found: [e for e in found if e["rule"] != "icnirp-2020"])
    for point in tree["operating_points"]:
        point["findings"] = [f for f in point["findings"] if "icnirp-2020" not in f["id"]]


def test_a_rule_that_is_not_judged_any_more_is_worse_and_told_once(sheet: Sheet) -> None:
    found = against(sheet, altered(sheet, drop_rule))
    assert [(each.kind, each.direction, each.of) for each in found.changes[:-1]] == [("rule", "worse", "icnirp-2020")]
    assert only(against(altered(sheet, drop_rule), sheet), kind="rule").direction == "other"


def test_another_edition_of_a_rule_makes_the_sheet_out_of_date(sheet: Sheet) -> None:
    old = altered(sheet, lambda tree: rules_of(tree, lambda found: [{**e, "edition": "of 1996"} for e in found]))
    found = against(old, sheet)
    assert found.answer == "outdated"
    texts = [each.text for each in found.changes if each.kind == "rule"]
    assert texts[0] == f"rule us-fcc: edition of 1996 before, {sheet.operating_points[0].exposure[0].edition} now"
    assert len(texts) == 2


def test_a_tier_that_a_rule_does_not_judge_any_more_is_worse(sheet: Sheet) -> None:
    def drop(tree: Tree) -> None:
        tree["operating_points"][0]["exposure"].pop(0)

    assert only(against(sheet, altered(sheet, drop)), kind="rule").of == "us-fcc trained"


def test_an_exemption_that_is_lost_is_worse(sheet: Sheet) -> None:
    def as_exempt(exempt: bool) -> Callable[[Tree], object]:
        return lambda tree: tree["operating_points"][0]["exemptions"][-1].update(exempt=exempt, places=[])

    lost, kept = altered(sheet, as_exempt(False)), altered(sheet, as_exempt(True))
    assert only(against(kept, lost), kind="exemption").direction == "worse"
    assert only(against(lost, kept), kind="exemption").direction == "better"


# Transmissions ----------------------------------------------------------------------------------------------


def swap(tree: Tree) -> None:
    tree["operating_points"].reverse()
    tree["power_ceiling"]["transmission"] = 1 - tree["power_ceiling"]["transmission"]
    for session in tree["sessions"]:
        session["transmissions"] = [1 - index for index in session["transmissions"]]


def test_the_order_of_transmissions_does_not_matter(sheet: Sheet) -> None:
    assert [each.kind for each in against(sheet, altered(sheet, swap)).changes] == ["software"]


def test_a_transmission_under_another_name_is_found_by_its_frequency(sheet: Sheet) -> None:
    def rename(tree: Tree) -> None:
        swap(tree)
        tree["operating_points"][1]["name"] = "forty"
        figure("capacitor_peak_voltage", high=1e6)({"operating_points": tree["operating_points"][::-1]})

    found = against(sheet, altered(sheet, rename))
    assert [each.kind for each in found.changes] == ["figure", "transmission", "software"]
    assert found.changes[0].transmission == "forty"
    assert found.changes[1].text == "transmission 40 m voice is called forty now"


def test_two_under_other_names_are_each_found_by_their_frequency(sheet: Sheet) -> None:
    def rename(tree: Tree) -> None:
        swap(tree)
        for point, name in zip(tree["operating_points"], ("twenty", "forty"), strict=True):
            point["name"] = name

    found = [each for each in against(sheet, altered(sheet, rename)).changes if each.kind == "transmission"]
    assert {(each.before, each.after) for each in found} == {("20 m data", "twenty"), ("40 m voice", "forty")}


def test_one_that_moved_a_little_is_the_same_and_one_that_moved_far_is_new(small: tuple[bytes, Sheet]) -> None:
    def move(to: float) -> Callable[[Tree], object]:
        return lambda tree: tree["operating_points"][0].update(name=f"{to}", frequency=to)

    near = against(small[1], altered(small[1], move(7.2e6)))
    assert {each.part for each in near.changes if each.kind == "transmission"} == {"name", "frequency"}
    far = against(small[1], altered(small[1], move(14.2e6)))
    assert [each.before is None for each in far.changes if each.kind == "transmission"] == [True, False]
    assert not [each for each in far.changes if each.kind == "figure"]


def test_transmissions_that_went_and_came(sheet: Sheet) -> None:
    def one(tree: Tree) -> None:
        tree["operating_points"].pop(1)
        tree["sessions"] = []
        tree["power_ceiling"]["transmission"] = 0

    fewer = altered(sheet, one)
    gone = [each for each in against(sheet, fewer).changes if each.kind == "transmission"]
    assert [each.text for each in gone] == ["transmission 20 m data (60 W) is not there any more"]
    new = only(against(fewer, sheet), kind="transmission")
    worst = min((f.verdict for f in sheet.operating_points[1].findings), key=ORDER.index)
    assert new.text == f"transmission 20 m data (60 W) is new: {worst}"
    assert new.direction == "worse"


@pytest.mark.parametrize(("part", "direction"), [("power", "worse"), ("power_at_loop", "worse"), ("duty", "worse")])
def test_more_power_is_worse(sheet: Sheet, part: str, direction: str) -> None:
    more = altered(
        sheet, lambda tree: tree["operating_points"][0].update({part: 1.2 * tree["operating_points"][0][part]})
    )
    assert only(against(sheet, more), kind="transmission", part=part).direction == direction
    assert only(against(more, sheet), kind="transmission", part=part).direction == "better"


def test_sessions_are_found_by_their_transmissions_whatever_their_number(sheet: Sheet) -> None:
    def renumber(tree: Tree) -> None:
        tree["sessions"][0]["number"] = 7
        for point in tree["operating_points"]:
            for finding in point["findings"]:
                if finding["session"] is not None:
                    finding.update(session=7, id=finding["id"].replace("session-1", "session-7"))

    assert [each.kind for each in against(sheet, altered(sheet, renumber)).changes] == ["software"]


# Inputs -----------------------------------------------------------------------------------------------------


def with_text(sheet: Sheet, data: bytes) -> Sheet:
    design = {"text": data.decode(), "sha256": hashlib.sha256(data).hexdigest()}
    return sheet.model_copy(update={"design": sheet.design.model_copy(update=design)})


def test_inputs_are_named_by_key_and_blocks_by_their_names(sheet: Sheet) -> None:
    changed = {
        **TREE,
        "transmission": [DATA, {**VOICE, "power": "110 W"}],
        "place": [DESK],
        "margins": {"voltage": 1.4},
    }
    found = [each for each in against(sheet, with_text(sheet, file_of(changed))).changes if each.kind == "input"]
    texts = {each.of: each.text for each in found}
    assert texts['transmission["40 m voice"].power'] == (
        'transmission["40 m voice"].power = "100 W" before, "110 W" now'
    )
    assert texts["margins.voltage"] == "margins.voltage = 1.4, which was not there"
    assert texts['place["walk"].along_axis'] == 'place["walk"].along_axis = "7 m" is not there any more'
    assert not any('"20 m data"' in key or '"desk"' in key for key in texts)


def test_a_design_that_is_refused_today_is_said_to_be_where_another_is_given(sheet: Sheet) -> None:
    old = with_text(sheet, file_of({**TREE, "wind": "strong"}))
    change = only(against(old, sheet), kind="input")
    assert change.direction == "unknown"
    assert change.detail is not None
    assert "wind" in change.detail


def test_assumptions_and_new_cautions_are_told(sheet: Sheet) -> None:
    def change(tree: Tree) -> None:
        tree["assumptions"][0] = "The moon is full."
        tree["cautions"] = [tree["cautions"][0].replace("kV", "MV"), "Ice. It falls."]

    found = against(sheet, altered(sheet, change))
    assert {each.text for each in found.changes if each.kind == "assumption"} == {
        f"not assumed any more: {sheet.assumptions[0].removesuffix('.')}",
        "assumed now: The moon is full",
    }
    cautions = [each.text for each in found.changes if each.kind == "caution"]
    assert "a caution that was not there: Ice. It falls" in cautions
    assert not any("RF burns" in text for text in cautions)


# Altered, or made by another version ------------------------------------------------------------------------


def test_the_same_version_and_design_with_other_figures_is_an_alarm(sheet: Sheet) -> None:
    raised = altered(sheet, figure("inductance", high=1.0))
    found = compare(Source(raised, "filed", "x.json"), Source(sheet, "computed", "it"))
    assert found.answer == "does not hold"
    assert found.said.endswith("the same version computes other figures from the same design.")
    assert any("was altered" in note for note in found.notes)
    two = compare(Source(raised, "filed", "x.json"), Source(sheet, "filed", "y.json"))
    assert not any("was altered" in note for note in two.notes)
    assert any("nothing was computed anew" in note for note in two.notes)


def test_a_newer_version_is_told(sheet: Sheet) -> None:
    newer, now = (sheet.model_copy(update={"magsafe": version}) for version in ("0.10.0", "0.9.0"))
    found = compare(Source(newer, "filed", "x.json"), Source(now, "computed", "it"))
    assert any("newer than this one (0.9.0)" in note for note in found.notes)
    assert not any("newer than this one" in note for note in against(sheet, sheet).notes)


def test_keys_of_a_newer_version_are_left_out_and_named(sheet: Sheet) -> None:
    tree = json.loads(sheet.to_json())
    tree["weather"] = {"wind": [1, 2]}
    for point in tree["operating_points"]:
        point["figures"]["inductance"]["colour"] = "red"
    read = parse_sheet(json.dumps(tree).encode(), "x.json")
    assert read.sheet == sheet
    assert set(read.unknown) == {"weather", "operating_points.figures.inductance.colour"}
    found = compare(Source(read.sheet, "filed", "x.json"), Source(sheet, "computed", "it"), read.unknown)
    assert found.not_compared == read.unknown
    assert found.said.startswith("The filed sheet cannot be upheld: filed are keys that this version does not know")


def edited(**changes: Any) -> Callable[[Tree], object]:
    return lambda tree: tree.update(changes)


def in_point(**changes: Any) -> Callable[[Tree], object]:
    return lambda tree: tree["operating_points"][0].update(changes)


def crowd(tree: Tree) -> None:
    bare: Tree = {"figures": {}, "findings": [], "exposure": [], "exemptions": [], "pattern": None, "placings": []}
    tree["operating_points"] = 1001 * [{**tree["operating_points"][0], **bare}]


@pytest.mark.parametrize(
    ("change", "key", "found"),
    [
        (edited(schema="magsafe.sheet/2"), "schema", "another form of the sheet"),
        (edited(schema="magsafe.keepout/1"), "schema", "a keep-out, not a sheet"),
        (edited(schema="magsafe.capacitor/1"), "schema", "a capacitor's sizes, not a sheet"),
        (edited(schema=3), "schema", "3"),
        (edited(verdict="clear"), "verdict", "the sheet was altered"),
        (edited(operating_points=[]), "operating_points", "none"),
        (crowd, "operating_points", "1001 of them"),
        (edited(verdict="fine"), "verdict", '"fine"'),
        (lambda tree: tree.pop("schema"), "schema", "nothing"),
        (lambda tree: tree.pop("margins"), "margins", "nothing"),
        (lambda tree: tree["design"].update(text="schema = 3"), "design.text", "an altered design"),
        (lambda tree: tree["power_ceiling"].update(transmission=2), "power_ceiling.transmission", "transmission 2"),
        (lambda tree: tree["power_ceiling"].update(transmission=-1), "power_ceiling.transmission", "transmission -1"),
        (lambda tree: tree["sessions"][0].update(transmissions=[0, 5]), "sessions[0].transmissions", "transmission 5"),
        (in_point(power="much"), "operating_points[0].power", '"much"'),
        (in_point(name="20 m data"), "operating_points[1].name", '"20 m data"'),
        (in_point(name="\x1b[2J"), "operating_points[0].name", r"\x1b[2J"),
        (in_point(mode="x" * 20_001), "operating_points[0].mode", "20001 characters"),
        (
            figure("capacitor_peak_voltage", low=2.0, likely=1.0, high=3.0),
            "operating_points[0].figures.capacitor_peak_voltage",
            "2, 1, 3",
        ),
    ],
)
def test_what_is_no_sheet_or_was_altered_is_refused(
    sheet: Sheet, change: Callable[[Tree], object], key: str, found: str
) -> None:
    tree = json.loads(sheet.to_json())
    change(tree)
    with pytest.raises(CommandError) as caught:
        parse_sheet(json.dumps(tree).encode(), "x.json")
    problem = caught.value.problem
    assert problem.key == f"x.json: {key}"
    assert found in problem.found


@pytest.mark.parametrize(
    ("data", "found"),
    [
        (b"", "an empty file"),
        (b" \n", "an empty file"),
        (b'{"schema": "magsafe.sheet/1", "magsafe": "0.', "ends too early"),
        (b'{"schema": "magsafe.sheet/1", ', "ends too early"),
        (b'{"a": 1,, "b": 2}', "no JSON"),
        (b"\xff\xfe\xff", "no text"),
        (b"[1]", "a list of 1"),
        (b'{"a": NaN}', "NaN, which is no number"),
        (b'{"a": -Infinity}', "-Infinity, which is no number"),
        (b'{"a": 1e999}', "the number 1e999"),
        (b'{"a": 1' + b"0" * 5000 + b"}", "a whole number of 5001 digits"),
        (b'{"a": 1, "b": {"c": 2, "c": 3}}', 'the key "c" twice'),
        (b'{"a":' + b"[" * 200_000, "nested too deep"),
        (b'{"schema": "magsafe.sheet/1", "a":' + b"[" * 900 + b"]" * 900 + b"}", "nothing"),
    ],
)
def test_what_is_no_json_is_refused(data: bytes, found: str) -> None:
    with pytest.raises(CommandError) as caught:
        parse_sheet(data, "x.json")
    assert found in caught.value.problem.found


def test_a_file_that_is_too_large_is_refused_unread(tmp_path: Path) -> None:
    huge = tmp_path / "huge.json"
    with huge.open("wb") as file:
        file.truncate(100_000_000)
    data = filed.bytes_of(str(huge))
    assert len(data) == filed.LARGEST_SHEET + 1
    with pytest.raises(CommandError, match="more than 32 MB"):
        parse_sheet(data, "huge.json")


def test_a_filed_design_that_is_refused_today_shows_why(sheet: Sheet) -> None:
    old = with_text(sheet, file_of({**TREE, "wind": "strong"}))
    with pytest.raises(MagsafeError) as caught:
        design_in(parse_sheet(old.to_json().encode(), "x.json").sheet, "x.json")
    said = str(caught.value)
    assert "refuses the design in x.json" in said
    assert "Whether the filed sheet still holds is not known" in said
    assert "station.toml:1  wind" in said or "wind" in said.split("not known", 1)[1]


# On a terminal ----------------------------------------------------------------------------------------------


def test_the_answer_and_the_hand_on_the_key_come_first(sheet: Sheet, capsys: pytest.CaptureFixture[str]) -> None:
    value = sheet.power_ceiling.value
    assert value is not None
    before = with_ceiling(sheet, value=2.0 * value)
    show_recheck(against(before, sheet), sheet)
    lines = capsys.readouterr().out.splitlines()
    text = " ".join(" ".join(lines).split())
    assert lines[0].split()[1] == sheet.verdict
    answer = text.index("The filed sheet does not hold any more: the highest power at which every check is clear was")
    hand = text.index("Do not key" if sheet.verdict in ("stop", "unproven") else "At ")
    assert answer < hand < text.index("Before: old.json") < text.index("Changed for the worse")
    assert text.rindex("Numbers count as changed") > text.index("What it is computed from")


def test_distances_of_one_rule_stand_in_one_sentence(sheet: Sheet, capsys: pytest.CaptureFixture[str]) -> None:
    def grow(tree: Tree) -> None:
        keepout = keepout_of(tree)
        for each in (keepout, keepout["key_down"]):
            each["any_direction"]["distance"] += 1.0
            each["above"]["distance"] += 1.0

    after = altered(sheet, grow)
    show_recheck(against(sheet, after), after)
    text = " ".join(capsys.readouterr().out.split())
    (line,) = [part for part in text.split(" - ") if part.startswith("Keep-out us-fcc trained (20 m data): ")]
    old = sheet.operating_points[1].exposure[0].keepout
    assert old is not None
    first, carrier = old.any_direction.distance, old.key_down.any_direction.distance
    assert first is not None
    assert carrier is not None
    assert f"any direction {first:.1f} m before, {first + 1.0:.1f} m now; " in line
    assert f"key-down any direction {carrier:.1f} m before, {carrier + 1.0:.1f} m now; and 1 more" in line


@pytest.mark.parametrize("columns", [40, 60, 80])
def test_it_fits_the_terminal(
    sheet: Sheet, columns: int, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", str(columns))
    show_recheck(against(altered(sheet, drop_place), sheet), sheet)
    out = capsys.readouterr().out
    assert max(map(len, out.splitlines())) <= columns
    assert "\x1b" not in out
    assert not any(line.endswith(" ") for line in out.splitlines())


# The command ------------------------------------------------------------------------------------------------


def test_a_distance_that_is_not_told_any_more_is_worse_and_a_new_one_is_not(sheet: Sheet) -> None:
    def without_floors(tree: Tree) -> None:
        tree["operating_points"][0]["exposure"][0]["keepout"]["on_floors"] = []

    less = altered(sheet, without_floors)
    gone = [each for each in against(sheet, less).changes if each.kind == "keepout"]
    assert gone
    assert {each.direction for each in gone} == {"worse"}
    assert all("not told any more" in each.text and each.after is None for each in gone)
    new = [each for each in against(less, sheet).changes if each.kind == "keepout"]
    assert {each.direction for each in new} == {"other"}
    assert [each.after for each in new] == [each.before for each in gone]


def test_a_rule_that_goes_from_one_transmission_alone_is_told(sheet: Sheet) -> None:
    rule = sheet.operating_points[0].exposure[0].rule

    def without_rule(tree: Tree) -> None:
        point = tree["operating_points"][0]
        point["exposure"] = [each for each in point["exposure"] if each["rule"] != rule]

    told = [each for each in against(sheet, altered(sheet, without_rule)).changes if each.kind == "rule"]
    assert {(each.direction, each.transmission) for each in told} == {("worse", sheet.operating_points[0].name)}
    assert all("is not judged any more" in each.text for each in told)


def test_an_exemption_that_is_gone_is_told(sheet: Sheet) -> None:
    def without(tree: Tree) -> None:
        tree["operating_points"][0]["exemptions"] = []

    told = [each for each in against(sheet, altered(sheet, without)).changes if each.kind == "exemption"]
    assert len(told) == len(sheet.operating_points[0].exemptions) > 0


@pytest.mark.parametrize("key", ["value", "at_limit"])
@pytest.mark.parametrize("whole", [True, False])
def test_a_ceiling_that_the_findings_do_not_give_is_refused(sheet: Sheet, key: str, whole: bool) -> None:
    def raised(tree: Tree) -> None:
        (tree if whole else tree["operating_points"][1])["power_ceiling"][key] = 9999.0

    with pytest.raises(CommandError, match=f"power_ceiling.{key}") as told:
        parse_sheet(altered(sheet, raised).to_json().encode(), "filed.json")
    assert "the sheet was altered" in str(told.value)


@pytest.fixture
def folder(tmp_path: Path, small: tuple[bytes, Sheet]) -> Path:
    """Give a folder with a design, its sheet, and a design that is worse."""
    data, made = small
    (tmp_path / "small.toml").write_bytes(data)
    (tmp_path / "small.json").write_text(made.to_json(), encoding="utf-8")
    (tmp_path / "worse.toml").write_bytes(data.replace(b'"10 W"', b'"5000 W"'))
    return tmp_path


def exit_of(verdict: str) -> int:
    return {"clear": 0, "narrow": 0, "stop": 1, "unproven": 3}[verdict]


def test_the_design_in_the_sheet_is_computed_anew(folder: Path, small: tuple[bytes, Sheet]) -> None:
    done = run("recheck", str(folder / "small.json"))
    assert done.stderr == ""
    assert "The filed sheet still holds. " in " ".join(done.stdout.split())
    assert "Nothing changed." in done.stdout
    assert done.returncode == exit_of(small[1].verdict)


def test_another_design_may_be_given_and_the_second_verdict_decides(folder: Path) -> None:
    done = run("recheck", str(folder / "small.json"), str(folder / "worse.toml"), "--json")
    tree = json.loads(done.stdout)
    assert done.stderr == ""
    assert (tree["schema"], tree["holds"], tree["answer"]) == ("magsafe.recheck/1", False, "does not hold")
    assert (tree["verdict"], tree["after"]["verdict"], done.returncode) == ("stop", "stop", 1)
    assert (tree["before"]["made"], tree["after"]["made"]) == ("filed", "computed")
    assert "weight" not in tree["changes"][0]
    assert Comparison.model_validate(tree).to_json() == done.stdout.rstrip("\n")
    back = run("recheck", str(folder / "worse.toml"), str(folder / "small.toml"), "--json")
    better = json.loads(back.stdout)
    assert (better["answer"], better["before"]["verdict"]) == ("outdated", "stop")
    assert back.returncode == exit_of(better["verdict"])


def test_two_filed_sheets_are_told_as_they_are(folder: Path, small: tuple[bytes, Sheet]) -> None:
    def lower(tree: Tree) -> None:
        point = tree["operating_points"][0]
        held = tree["power_ceiling"]["held_by"]
        for finding in point["findings"]:
            if finding["id"] == held:
                finding["power_at_margin"] = 1.0
        for made in (tree["power_ceiling"], point["power_ceiling"]):
            made["value"] = 1.0

    other = altered(small[1], lower)
    (folder / "other").write_text(other.to_json(), encoding="utf-8")
    done = run("recheck", str(folder / "small.json"), str(folder / "other"))
    text = " ".join(done.stdout.split())
    assert "The first sheet does not hold by the second: the highest power" in text
    assert "nothing was computed anew" in text
    assert done.returncode == exit_of(other.verdict)


def test_a_sheet_may_come_by_standard_input(folder: Path, small: tuple[bytes, Sheet]) -> None:
    done = run("recheck", "-", str(folder / "small.toml"), given=small[1].to_json().encode())
    assert "Before: <stdin> (design small.toml), filed" in " ".join(done.stdout.split())
    assert done.returncode == exit_of(small[1].verdict)


def test_strict_leaves_with_four_where_the_second_is_narrow(folder: Path, small: tuple[bytes, Sheet]) -> None:
    def narrow(tree: Tree) -> None:
        tree["findings"] = []
        tree["verdict"] = "narrow"
        for finding in tree["operating_points"][0]["findings"]:
            finding["verdict"] = "narrow"

    made = altered(small[1], narrow)
    (folder / "narrow.json").write_text(made.to_json(), encoding="utf-8")
    both = (str(folder / "small.json"), str(folder / "narrow.json"))
    assert run("recheck", *both).returncode == 0
    assert run("recheck", *both, "--strict").returncode == 4


@pytest.mark.parametrize(
    ("arguments", "found"),
    [
        (("small.toml",), "a design, and nothing to hold it against"),
        (("small.toml", "small.json"), "before the filed sheet"),
        (("-", "-"), "- twice"),
        (("nothing.json",), "no such file"),
        (("nothing.json", "small.toml"), "no such file"),
        ((".",), "a directory"),
        (("small.json", "nothing.toml"), "no such file"),
        (("small.json", "broken.toml"), "problems in broken.toml"),
        (("cut.json",), "ends too early"),
    ],
)
def test_what_cannot_be_carried_out(folder: Path, arguments: tuple[str, ...], found: str) -> None:
    (folder / "broken.toml").write_text("loop = 3", encoding="utf-8")
    (folder / "cut.json").write_bytes((folder / "small.json").read_bytes()[:3000])
    done = run("recheck", *(each if each == "-" else str(folder / each) for each in arguments), "--json")
    assert done.returncode == 2
    assert done.stdout == ""
    assert found in done.stderr
    assert "Traceback" not in done.stderr
