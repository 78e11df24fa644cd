"""The fence sign and the pocket card: what they say, that it fits, and that nothing unproven looks proven."""

import re
import struct
import xml.etree.ElementTree as ET
from collections.abc import Iterator
from copy import deepcopy
from datetime import date
from functools import cache
from importlib.util import find_spec
from itertools import combinations
from pathlib import Path
from typing import Any

import pytest
from commands import run
from designs import file_of, plain_design, plain_tree

import magsafe
from magsafe.checks.keepout import keepout
from magsafe.checks.sheet import (
    DistancesRecord,
    ExposureRecord,
    KeepoutSheet,
    PowerCeiling,
    SessionExposure,
    SessionRecord,
    Sheet,
)
from magsafe.cli.keepout import _files
from magsafe.design.model import Design
from magsafe.errors import CommandError
from magsafe.reports import png
from magsafe.reports.boxes import Paragraph, cut, fill, largest, letter_width, lines_of, measured
from magsafe.reports.pocket_card import CARD
from magsafe.reports.sign import HEIGHT, SIGN, WIDTH, fence_sign
from magsafe.reports.sign_words import SignWords, _apart, clear_to, several, sign_words
from magsafe.reports.svg import Box, Drawing

SVG = "{http://www.w3.org/2000/svg}"
DESK = {"name": "operating desk", "who": "trained", "along_axis": "9 m", "posture": "sitting"}
WALK = {"name": "Quay walk", "who": "public", "along_axis": "12 m"}
VOICE = {
    "frequency": "7.1 MHz",
    "power": "100 W",
    "mode": "SSB",
    "name": "40 m voice",
    "over": {"transmit": "3 min", "listen": "3 min"},
}
STATION = {"name": "Quay hut", "operator": "duty operator", "callsign": "CALLSIGN"}
SITE: dict[str, Any] = {
    "site": {"ground": "average", "rules": ["us-fcc"]},
    "loop__centre_height": "2 m",
    "transmission__0": VOICE,
    "place": [DESK, WALK],
    "station": STATION,
}
PNG = pytest.mark.skipif(find_spec("typst") is None, reason="typst, of the extra magsafe[png], is not installed")

Made = tuple[Design, Sheet, KeepoutSheet]


def made_of(design: Design) -> Made:
    sheet = magsafe.check(design, date(2026, 5, 4))
    return design, sheet, keepout(sheet)


@cache
def plain() -> Made:
    return made_of(plain_design(**deepcopy(SITE)))


def changed(**changes: Any) -> Made:
    return made_of(plain_design(**deepcopy({**SITE, **changes})))


def drawn(made: Made) -> str:
    design, sheet, people = made
    return fence_sign(sheet, people, design)


def said_by(made: Made) -> SignWords:
    design, sheet, people = made
    return sign_words(sheet, people, design)


def tree_of(svg: str) -> ET.Element:
    return ET.fromstring(svg)


def text_in(svg: str, group: str = "") -> str:
    root = tree_of(svg)
    where = root if not group else next(each for each in root.iter() if each.get("id") == group)
    return " ".join(" ".join("".join(each.itertext()) for each in where.iter(f"{SVG}text")).split())


def with_exposure(made: Made, change: Any) -> Made:
    """Return a result with another exposure in its first transmission."""
    design, sheet, people = made
    first = people.operating_points[0]
    point = first.model_copy(update={"exposure": tuple(change(each) for each in first.exposure)})
    return design, sheet, people.model_copy(update={"operating_points": (point, *people.operating_points[1:])})


# What it says ----------------------------------------------------------------------------------------------


def test_the_sign_says_all_that_is_asked() -> None:
    svg = drawn(plain())
    trained, public = (each.keepout for each in plain()[2].operating_points[0].exposure)
    assert trained is not None
    assert public is not None
    sign = text_in(svg, "sign")
    for told in (
        "Keep out while the transmitter is on",
        f"Public: keep away from the loop {public.on_floors[0].any_bearing.distance:.1f} m",
        f"Trained people: keep away from the loop {trained.on_floors[0].any_bearing.distance:.1f} m",
        "from the centre of the loop",
        f"unbroken carrier (key-down): {public.key_down.any_direction.distance:.1f} m",
        f"a radio transmitter, a strong magnetic field, up to {volts()} kV peak on the loop. It burns when touched",
        "Pacemaker or other implant: stay well away until your clinician has cleared it. "
        "The limits do not protect you.",
        "When: while the transmitter is on.",
        "Holds for: 40 m voice, 7.1 MHz, SSB, 100 W PEP, overs 3 min / listen 3 min.",
        "within the limits of us-fcc, as amended 85 FR 18145 (2020), as computed here.",
        "Station Quay hut Operator duty operator Call sign CALLSIGN",
        f"2026-05-04, magsafe {magsafe.__version__}, input {plain()[0].origin.sha256[:12]}",
    ):
        assert told in sign
    for word in ("safe ", "compliant", "approved", "passes", "not proven", "at least"):
        assert word not in text_in(svg).lower().replace("magsafe ", "")


def volts() -> str:
    high = plain()[1].operating_points[0].figures["capacitor_peak_voltage"].high
    assert high is not None
    return f"{high / 1e3:.2f}"


def test_the_volts_are_those_of_the_worst_end_of_all_transmissions() -> None:
    made = changed(transmission__0=VOICE, transmission=[VOICE, {**VOICE, "name": "more", "power": "400 W"}])
    high = [point.figures["capacitor_peak_voltage"].high or 0.0 for point in made[1].operating_points]
    assert high[1] == pytest.approx(2.0 * high[0])
    assert f"up to {high[1] / 1e3:.1f} kV peak" in text_in(drawn(made), "danger")


def test_volts_whose_worst_is_not_known_are_told_so_and_a_full_wave_loop_has_its_own() -> None:
    """Without a height nothing bounds what the ground takes, so neither the volts at the terminals."""
    text = (Path(__file__).parents[2] / "sample_designs" / "pier_head_square.toml").read_bytes()
    made = made_of(magsafe.parse_design(re.sub(rb'centre_height = "[^"]*"', b"", text)))
    figure = made[1].operating_points[0].figures["terminal_peak_voltage"]
    assert figure.high is None
    assert f"{(figure.likely or 0.0) / 1e3:.3f} kV peak on the loop, perhaps more" in text_in(drawn(made), "danger")
    assert "turn the capacitor" not in text_in(drawn(made))
    assert "turn the capacitor" in text_in(drawn(plain()))


def test_the_largest_distance_of_all_rules_and_transmissions_counts() -> None:
    louder = {**VOICE, "name": "louder", "power": "900 W"}
    made = changed(site={"ground": "average", "rules": ["us-fcc", "icnirp-2020"]}, transmission=[VOICE, louder])
    for who, tier in zip(("public", "trained"), said_by(made).tiers, strict=True):
        records = [e.keepout for p in made[2].operating_points for e in p.exposure if e.who == who]
        floors = [f.any_bearing.distance or 0.0 for keep in records if keep is not None for f in keep.on_floors]
        every = [keep.any_direction.distance or 0.0 for keep in records if keep is not None]
        assert len(floors) == 4
        assert min(floors) < max(floors)
        assert tier.large == f"{max(floors):.1f} m"
        above = f"in any direction, above too: {max(every):.1f} m"
        assert (above in tier.small) == (max(every) > max(floors))
    said = said_by(made)
    assert [each.split(",")[0] for each in said.rules] == [
        "icnirp-2020",
        "us-fcc",
    ]  # the one that reaches furthest first
    assert [each.split(",")[0] for each in said.uses] == ["louder", "40 m voice"]


def test_above_the_floors_the_larger_distance_is_told() -> None:
    made = with_exposure(plain(), lambda each: longer(each, 7.7))
    assert "in any direction, above too: 7.7 m" in text_in(drawn(made), "public-more")
    made = with_exposure(plain(), lambda each: longer(each, 0.5))
    assert "in any direction" not in text_in(drawn(made), "public-more")


def longer(each: ExposureRecord, distance: float | None) -> ExposureRecord:
    assert each.keepout is not None
    any_direction = each.keepout.any_direction.model_copy(update={"distance": distance})
    return each.model_copy(update={"keepout": each.keepout.model_copy(update={"any_direction": any_direction})})


def test_what_is_worked_in_turn_counts() -> None:
    design, sheet, people = plain()
    exposure = [e for e in people.operating_points[0].exposure if e.keepout is not None]

    def doubled(each: ExposureRecord) -> SessionExposure:
        keep = each.keepout
        assert keep is not None
        floor = keep.on_floors[0]
        far = floor.any_bearing.model_copy(update={"distance": 44.4})
        values = {name: getattr(keep, name) for name in DistancesRecord.model_fields}
        floors = (floor.model_copy(update={"any_bearing": far}),)
        distances = DistancesRecord(**{**values, "on_floors": floors})
        return SessionExposure(rule=each.rule, edition=each.edition, who=each.who, keepout=distances, places=())

    session = SessionRecord(number=1, name="one, other", transmissions=(0,), exposure=tuple(map(doubled, exposure)))
    made = design, sheet, people.model_copy(update={"sessions": (session,)})
    assert [tier.large for tier in said_by(made).tiers] == ["44.4 m", "44.4 m"]
    assert "unbroken carrier (key-down): 44.4 m" in said_by(made).tiers[0].small
    svg = drawn(made)
    assert "Holds for: worked in turn (one, other); 40 m voice" in text_in(svg, "basis")
    assert "worked in turn one, other" in text_in(svg, "card-table")
    assert text_in(svg, "card-table").count("44.4") == 2


def test_transmissions_that_no_session_lists_are_an_averaging_time_apart() -> None:
    def apart(names: list[str], sessions: list[list[str]]) -> str:
        uses = [{**VOICE, "name": name} for name in names]
        site = {**SITE["site"], "sessions": sessions} if sessions else SITE["site"]
        return _apart(plain_design(**deepcopy({**SITE, "transmission": uses, "site": site})))

    assert apart(["one"], []) == ""
    assert apart(["one", "two"], []) == "; each an averaging time apart"
    assert apart(["one", "two"], [["one", "two"]]) == ""
    assert apart(["one", "two", "three"], [["one", "two"]]) == "; the others an averaging time apart"


@pytest.mark.parametrize(
    ("use", "told"),
    [
        ({"frequency": "7.1 MHz", "power": "20 W"}, "7.1 MHz, 20 W PEP, no pauses counted"),
        (
            {"frequency": "7.1 MHz", "power": "20 W", "mode": "data", "on_air_share": "50 %"},
            "7.1 MHz, data, 20 W PEP, on the air 50 % of any 6 min",
        ),
        (
            {"frequency": "7.1 MHz", "power": "20 W", "duty": "40 %", "tune_up": {"power": "5 W", "time": "90 s"}},
            "20 W PEP, duty 40 %, no pauses counted, tune-up 5 W for 90 s",
        ),
    ],
)
def test_at_what_power_it_holds_is_told(use: dict[str, Any], told: str) -> None:
    assert told in said_by(changed(transmission__0=use)).uses[0]


def test_where_people_are_too_near_they_are_named() -> None:
    made = changed(place=[{**DESK, "along_axis": "1.6 m", "name": "bench"}, WALK], transmission__0__power="900 W")
    assert made[2].verdict == "stop"
    svg = drawn(made)
    assert "Too near, nobody stays there: bench." in text_in(svg, "danger")
    assert "stop: Do not key this loop as planned" in text_in(svg, "card-headline")


def test_limits_that_nobody_has_read_are_told() -> None:
    made = changed(site={"ground": "average", "rules": ["icnirp-2020"]})
    assert made[2].verdict == "narrow"
    assert "Narrow at best:" in text_in(drawn(made), "basis")
    assert "Narrow at best" not in text_in(drawn(plain()))


def test_what_the_design_does_not_tell_is_a_line_for_a_pen() -> None:
    svg = drawn(changed(station={"callsign": "CALLSIGN"}))
    ids = [each.get("id") for each in tree_of(svg).iter() if (each.get("id") or "").startswith("blank-")]
    assert ids == ["blank-0", "blank-1"]
    assert "Operator Call sign CALLSIGN" in text_in(svg, "ask")
    assert "blank-" not in drawn(plain())


# What is not proven ----------------------------------------------------------------------------------------

NOT_PROVEN = "Distance not proven: keep everybody away"


def looks_unproven(svg: str) -> None:
    assert text_in(svg, "sign").startswith("Distance not proven: keep everybody ")
    assert "within the limits of" not in text_in(svg, "basis").replace("Not proven to be within the limits of", "")
    assert "Keep out while" not in text_in(svg, "sign")
    assert "Not proven, see the sign:" in text_in(svg, "card-back")


def test_near_metal_distances_are_at_least_and_the_reason_is_named() -> None:
    made = changed(site={**SITE["site"], "metal_within": "0.5 m"})
    svg = drawn(made)
    looks_unproven(svg)
    assert [tier.state for tier in said_by(made).tiers] == ["at least", "at least"]
    keep = made[2].operating_points[0].exposure[1].keepout
    assert keep is not None
    metres = f"{keep.on_floors[0].any_bearing.distance:.1f} m"
    assert f"Public: not proven, keep away at least {metres} from the centre" in text_in(svg, "sign")
    assert "Trained people: not proven, keep away at least " in text_in(svg, "trained")
    assert "..." not in text_in(svg)
    assert f"at least {metres}" in text_in(svg, "picture")
    assert "until this is known: operating desk, Quay walk, 40 m voice: metal is within 0.5 m" in text_in(svg, "basis")
    assert f"{metres.removesuffix(' m')}*" in text_in(svg, "card-table")
    assert "unproven" in text_in(svg, "card-table")
    assert "* not proven" in text_in(svg, "card-legend")


@pytest.mark.parametrize(
    ("changes", "reason"),
    [
        ({"transmission__0__frequency": "50.1 MHz"}, "no series capacitor tunes this loop"),
        ({"loop__centre_height": None}, "loop.centre_height is not given"),
        ({"site": {"ground": "average"}}, "nothing says how strong a field may be"),
    ],
    ids=["out of range", "no height", "no rules"],
)
def test_where_nothing_is_known_no_distance_is_told(changes: dict[str, Any], reason: str) -> None:
    made = changed(**changes)
    svg = drawn(made)
    looks_unproven(svg)
    said = text_in(svg, "sign")
    assert said.startswith(NOT_PROVEN)
    assert reason in said
    for tier in said_by(made).tiers:
        assert (tier.large, tier.metres) == ("keep away", "")
    for group in ("public", "public-more", "trained", "trained-more", "picture"):
        assert not re.search(r"\d", text_in(svg, group))
    assert text_in(svg, "card-table").count("?") == 6
    assert "unproven" in text_in(svg, "card-table")


def test_a_distance_that_was_not_bounded_is_none() -> None:
    made = with_exposure(plain(), lambda each: longer(each, None) if each.who == "public" else each)
    svg = drawn(made)
    looks_unproven(svg)
    public, trained = said_by(made).tiers
    assert (public.state, public.large, trained.state) == ("unknown", "keep away", "at least")
    assert "unbounded" not in text_in(svg)
    assert "us-fcc public: the keep-out reaches further than was searched" in text_in(svg, "basis")
    assert text_in(svg, "card-table").count("?") >= 2


def test_a_carrier_that_was_not_bounded_is_told_so_and_the_average_stands() -> None:
    def endless(each: ExposureRecord) -> ExposureRecord:
        assert each.keepout is not None
        carrier = longer(each.model_copy(update={"keepout": each.keepout.key_down}), None).keepout
        return each.model_copy(update={"keepout": each.keepout.model_copy(update={"key_down": carrier})})

    made = with_exposure(plain(), endless)
    assert [tier.state for tier in said_by(made).tiers] == ["known", "known"]
    svg = drawn(made)
    assert "unbroken carrier (key-down): distance not proven" in text_in(svg, "public-more")
    assert text_in(svg, "card-table").split()[-2:] == ["?", "?"]


def test_one_transmission_that_is_not_known_leaves_at_least_what_the_others_need() -> None:
    made = changed(transmission=[VOICE, {**VOICE, "name": "six", "frequency": "50.1 MHz"}])
    public = said_by(made).tiers[0]
    assert public.state == "unknown"
    assert public.large == "keep away"
    assert re.fullmatch(r"by what is computed at least \d+\.\d m from the centre of the loop", public.small[0])
    looks_unproven(drawn(made))


def test_a_tier_that_no_rule_knows_is_told_and_another_rule_may_fill_it() -> None:
    made = changed(site={"ground": "average", "rules": ["eu-1999-519"]})
    public, trained = said_by(made).tiers
    assert (public.state, trained.state) == ("at least", "no rule")
    assert trained.large == "keep away"
    assert trained.small == ("none of the rules named has limits for trained people",)
    looks_unproven(drawn(made))
    filled = said_by(changed(site={"ground": "average", "rules": ["eu-1999-519", "us-fcc"]}))
    assert [tier.state for tier in filled.tiers] == ["known", "known"]


def test_places_that_are_missing_leave_the_sign_unproven_by_name() -> None:
    svg = drawn(changed(place=[WALK]))
    looks_unproven(svg)
    assert 'us-fcc trained: No place with who = "trained" is given' in text_in(svg, "basis")


RAIL = {"name": "rail", "who": "public", "fence": "9 m"}


def test_a_fence_that_holds_keeps_wearers_of_implants_outside_it() -> None:
    svg = drawn(changed(place=[DESK, RAIL]))
    assert "Keep out while the transmitter is on" in text_in(svg, "sign")
    assert "stay outside the fence until your clinician" in text_in(svg, "danger")


@pytest.mark.parametrize(
    "changes",
    [
        {"place": [DESK, RAIL], "site": {**SITE["site"], "metal_within": "0.5 m"}},
        {"place": [DESK, {**WALK, "along_axis": "9 m"}, {**RAIL, "who": "trained"}]},
        {"place": [DESK, {**RAIL, "fence": "1.2 m"}]},
    ],
    ids=["not proven", "for trained people", "nearer than a carrier lets it"],
)
def test_a_fence_that_does_not_hold_is_no_place_to_stand_behind(changes: dict[str, Any]) -> None:
    svg = drawn(changed(**changes))
    assert "outside the fence" not in text_in(svg, "sign")
    assert "outside the fence" not in text_in(svg, "danger")
    assert "stay well away until your clinician" in text_in(svg, "danger")


def test_a_probe_that_read_more_than_was_computed_leaves_all_distances_unproven() -> None:
    design, sheet, people = plain()
    point = people.operating_points[0]
    read = point.findings[0].model_copy(
        update={"id": "exposure.probe.desk", "verdict": "stop", "because": "more than computed", "place": "desk"}
    )
    updated = point.model_copy(update={"findings": (*point.findings, read)})
    made = design, sheet, people.model_copy(update={"operating_points": (updated,), "verdict": "stop"})
    looks_unproven(drawn(made))
    assert said_by(made).reasons == ("desk: more than computed",)
    assert said_by(made).tiers[0].large.startswith("at least ")


# The card --------------------------------------------------------------------------------------------------


def test_the_card_has_powers_distances_and_steps() -> None:
    svg = drawn(plain())
    point = plain()[2].operating_points[0]
    public = point.exposure[1].keepout
    assert public is not None
    table = text_in(svg, "card-table")
    assert f"40 m voice 7.1 MHz, 100 W PEP {clear_to(point.power_ceiling)} " in table
    cells = table.split("100 W PEP", 1)[1].split()
    assert cells[1] == f"{public.on_floors[0].any_bearing.distance:.1f}"
    assert cells[2] == f"{public.any_direction.distance:.1f}"
    assert cells[5] == f"{public.key_down.any_direction.distance:.1f}"
    assert len(cells) == 7
    back = text_in(svg, "card-back")
    for told in (
        "If somebody comes near: 1. Stop transmitting.",
        f"Burns: up to {volts()} kV peak",
        "Implants:",
        "Storm:",
    ):
        assert told in back
    assert "Tune-up: none is stated" in back


def test_the_transmission_that_bears_least_stands_first() -> None:
    louder = {**VOICE, "name": "higher", "frequency": "14.2 MHz"}
    made = changed(transmission=[VOICE, louder])
    powers = [point.power_ceiling.value or 0.0 for point in made[2].operating_points]
    assert powers[1] < powers[0]
    table = text_in(drawn(made), "card-table")
    assert table.index("higher") < table.index("40 m voice")
    assert "listen 3 min; each an averaging time apart." in text_in(drawn(made), "basis")


@pytest.mark.parametrize(
    ("changes", "told"),
    [
        ({"value": 71.9}, "71"),
        ({"value": 71.9, "complete": False, "left_out": ("b",)}, "71*"),
        ({"value": 71.9, "complete": False, "left_out": ("a",)}, "unproven"),
        ({"value": None}, "unproven"),
        ({"value": 0.0}, "none"),
    ],
)
def test_a_power_that_is_not_proven_is_marked(changes: dict[str, Any], told: str) -> None:
    values = {"value": 1.0, "at_limit": 1.0, "transmission": 0, "held_by": "a", "complete": True, "left_out": ()}
    assert clear_to(PowerCeiling.model_validate({**values, **changes})) == told


def test_places_while_tuning_are_told_with_what_they_bear() -> None:
    tuner = {**DESK, "name": "at the mast", "when": "tuning", "along_axis": "2 m"}
    use = {**VOICE, "tune_up": {"power": "5 W", "time": "60 s"}}
    made = changed(place=[DESK, WALK, tuner], transmission__0=use)
    record = next(p for e in made[2].operating_points[0].exposure for p in e.places if p.name == "at the mast")
    assert record.verdict == "clear"
    back = text_in(drawn(made), "card-back")
    assert "Tune-up: at at the mast (trained) clear, bears " in back
    assert "5 W for 1 min at most (40 m voice)" in back


# Well made -------------------------------------------------------------------------------------------------


def wild(rules: list[str]) -> Made:
    uses = [
        {
            "frequency": f"{1.81234567 + 2.7 * i:.8f} MHz",
            "power": f"{123.456 * (i + 1):.3f} W",
            "mode": "SSB unprocessed",
            "name": f"{i} " + "W" * 900,
            "over": {"transmit": "7 min", "listen": "90 s"},
            "tune_up": {"power": "10 W", "time": "20 s"},
        }
        for i in range(10)
    ]
    kinds = [("public", "always"), ("trained", "tuning"), ("trained", "always"), ("public", "tuning")]
    places = [
        {"name": f"<script>alert({i})</script> " + "M" * 500, "who": who, "along_axis": f"{1.5 + i} m", "when": when}
        for i, (who, when) in enumerate(kinds)
    ]
    return changed(
        site={"ground": "average", "rules": rules, "metal_within": "0.5 m"},
        place=[*places, {"name": "\u6e2f" * 300, "who": "public", "fence": "9 m"}],
        transmission=uses,
        station={
            "name": ("Very long harbour club name " * 400)[:10_000],
            "operator": "\u6e2f\u53e3\u4ff1\u6a02\u90e8" * 400,
            "callsign": "<b>&\"'" + "\u0416" * 200,
        },
    )


@cache
def wildest() -> str:
    return drawn(wild(["us-fcc", "icnirp-2020", "ca-sc6", "jp", "eu-1999-519"]))


@cache
def unknown() -> str:
    return drawn(changed(site={"ground": "average", "rules": ["eu-2013-35"]}, transmission__0__frequency="50.1 MHz"))


def pictures() -> list[str]:
    return [drawn(plain()), wildest(), unknown()]


def shown(group: ET.Element, box: Box | None = None) -> Iterator[tuple[ET.Element, Box | None]]:
    """Yield every text with the box outside which it is not drawn, None where there is none."""
    for each in group:
        if each.tag == f"{SVG}text":
            yield each, box
            continue
        own = BOXES.get(each.get("clip-path", "")) if each.tag == f"{SVG}g" else None
        yield from shown(each, own or box)


BOXES: dict[str, Box] = {}


def texts_with_boxes(svg: str) -> list[tuple[str, Box, float, Box | None]]:
    """Return every text with what it takes up, its size, and its box [mm]."""
    root = tree_of(svg)
    BOXES.clear()
    for clip in root.iter(f"{SVG}clipPath"):
        left, top, wide, tall = (float(clip[0].get(name, "nan")) for name in ("x", "y", "width", "height"))
        BOXES[f"url(#{clip.get('id')})"] = (left, top, left + wide, top + tall)
    found = []
    for each, box in shown(root):
        size, bold = float(each.get("font-size", "0")), each.get("font-weight") == "bold"
        wide = measured(each.text or "", size, bold=bold)
        wide += sum(measured(s.text or "", size, bold=s.get("font-weight") == "bold") for s in each)
        left = float(each.get("x", "0")) - wide * {"middle": 0.5, "end": 1.0}.get(each.get("text-anchor", ""), 0.0)
        base = float(each.get("y", "0"))
        found.append(("".join(each.itertext()), (left, base - 0.72 * size, left + wide, base), size, box))
    return found


def inside(one: Box, other: Box, slack: float = 0.02) -> bool:
    return (
        one[0] >= other[0] - slack
        and one[1] >= other[1] - slack
        and one[2] <= other[2] + slack
        and one[3] <= other[3] + slack
    )


@pytest.mark.parametrize("index", range(3), ids=["plain", "wild", "unknown"])
def test_every_text_stays_in_its_box_and_meets_no_other(index: int) -> None:
    found = texts_with_boxes(pictures()[index])
    assert len(found) > 30
    for text, taken, size, box in found:
        assert size >= 2.1, text  # mm, 6 points
        assert inside(taken, box or (0.0, 0.0, WIDTH, HEIGHT)), text
        assert text == "100 mm" or box is not None, text
    for (one, a, _, _), (other, b, _, _) in combinations(found, 2):
        apart = a[2] <= b[0] + 0.02 or b[2] <= a[0] + 0.02 or a[3] <= b[1] + 0.02 or b[3] <= a[1] + 0.02
        assert apart, f"{one} / {other}"


def test_sign_and_card_are_on_their_pages() -> None:
    texts_with_boxes(drawn(plain()))
    left = (WIDTH - 2.0 * CARD[0]) / 2.0
    cards = [each for name, each in BOXES.items() if "card-" in name]
    assert len(cards) == 5
    top = min(each[1] for each in cards) - 2.6
    halves = [(left + i * CARD[0], top, left + (i + 1) * CARD[0], top + CARD[1]) for i in (0, 1)]
    assert all(any(inside(each, half, 0.0) for half in halves) for each in cards)
    names = ("sign", "public", "trained", "danger", "ask", "basis", "picture", "public-more", "trained-more")
    assert all(inside(BOXES[f"url(#clip-{name})"], SIGN, 0.0) for name in names)
    assert (SIGN[2], SIGN[3]) == (210.0, 148.0)  # ISO 216: A5
    assert CARD == (85.6, 54.0)  # ISO/IEC 7810 ID-1: 85.60 x 53.98 mm


def test_it_is_one_a4_sheet_at_true_scale() -> None:
    root = tree_of(drawn(plain()))
    assert (root.get("width"), root.get("height")) == ("210mm", "297mm")  # ISO 216: A4
    assert root.get("viewBox") == "0 0 210 297"
    line = next(each for each in root.iter() if each.get("id") == "hundred").get("d", "")
    assert {float(x) for x in re.findall(r"([\d.]+) [\d.]+", line)} == {19.4, 119.4}
    marks = next(each for each in root.iter() if each.get("id") == "cut-marks").get("d", "")
    xs = {float(x) for x, _ in re.findall(r"([\d.]+) ([\d.]+)", marks)}
    assert {19.4, 105.0, 190.6} <= xs


@pytest.mark.parametrize("index", range(3), ids=["plain", "wild", "unknown"])
def test_it_is_black_and_white(index: int) -> None:
    for each in tree_of(pictures()[index]).iter():
        for name in ("fill", "stroke"):
            colour = each.get(name)
            assert colour in (None, "none", "#000", "#fff", "url(#sign-hatch)"), each.tag


def test_the_distance_is_very_large() -> None:
    found = texts_with_boxes(drawn(plain()))
    public, trained = (max(size for text, _, size, _ in found if text == tier.large) for tier in said_by(plain()).tiers)
    assert public >= 25.0  # mm, letters of 18 mm
    assert trained >= 14.0


def test_names_are_escaped_cut_and_counted() -> None:
    svg = wildest()
    assert svg.count("<script") == 0
    assert "&lt;script&gt;" in svg
    assert len(svg) < 60_000
    assert svg.count("<svg") == 1
    assert "nan" not in svg
    basis = text_in(svg, "basis")
    assert re.search(r"and \d+ more: see the sheet", basis.split("Computed for:")[1].split("Not proven to be")[0])
    assert re.search(r"; and \d more: see the sheet\.$", basis)
    assert re.search(r"And \d more: see the sheet\.", text_in(svg, "card-legend"))
    for group in ("danger", "basis", "card-back", "card-legend", "public-more"):
        assert "... more: see the sheet" not in text_in(svg, group)
    assert "The limits do not protect you." in text_in(svg, "danger")
    assert "Storm:" in text_in(svg, "card-back")


def test_a_list_tells_how_many_more_there_are() -> None:
    assert several(["a", "b", "c"], 3) == "a; b; c"
    assert several(["a", "b", "c"], 1, ", ") == "a, and 2 more: see the sheet"


def test_a_sign_repeats_to_the_byte() -> None:
    assert drawn(changed()) == drawn(plain())


# Widths of Helvetica and Helvetica-Bold in thousandths, Adobe Core 14 font metrics, from memory.
HELVETICA = {
    "W": 944,
    "M": 833,
    "m": 833,
    "w": 722,
    "@": 1015,
    "%": 889,
    "0": 556,
    "A": 667,
    "e": 556,
    "G": 778,
    ".": 278,
}
HELVETICA_BOLD = {"W": 944, "M": 833, "m": 889, "w": 778, "@": 975, "%": 889, "0": 556, "A": 722, "e": 556, "G": 778}


def test_no_letter_is_wider_than_it_is_taken_to_be() -> None:
    for bold, widths in ((False, HELVETICA), (True, HELVETICA_BOLD)):
        for letter, width in widths.items():
            assert letter_width(letter, bold=bold) >= width / 1000.0, letter
    assert all(letter_width(chr(each)) >= 0.602 for each in range(32, 0x250))  # a font of even width
    assert letter_width("\u6e2f") >= 1.0  # an ideograph fills its square


def test_text_is_cut_wrapped_and_sized_to_its_width() -> None:
    assert cut("short", 50.0, 3.0) == "short"
    told = cut("W" * 10_000, 50.0, 3.0)
    assert told.endswith("W...")
    assert 45.0 < measured(told, 3.0) <= 50.0
    size = largest("Public: keep away", 60.0, (9.0, 2.0), bold=True)
    assert 59.8 < measured("Public: keep away", size, bold=True) <= 60.0
    assert largest("W" * 999, 60.0, (9.0, 2.0)) == 2.0
    lines = lines_of(Paragraph("Lead:", "keep 12.3 m away, " * 9 + "x" * 200), 40.0, 3.0)
    assert lines[0][0] == ("Lead:", True)
    for line in lines:
        told = " ".join(word for word, _ in line)
        assert sum(measured(word, 3.0, bold=bold) for word, bold in line) <= 40.0 + 1e-9
        assert not told.endswith("12.3")


def test_a_box_takes_fewer_entries_before_it_cuts_anything() -> None:
    def text(height: float) -> str:
        drawing = Drawing(100.0)
        box = (0.0, 0.0, 60.0, height)
        fill(drawing, "box", box, lambda n: [Paragraph("Lead:", several(["entry"] * 20, n))], (4.0, 2.0), most=20)
        return " ".join(re.sub(r"<[^>]*>", " ", " ".join(drawing.parts)).split())

    assert text(60.0).count("entry") == 20
    assert 0 < text(9.0).count("entry") < 20
    assert text(9.0).endswith("more: see the sheet")
    assert text(2.0).endswith("... more: see the sheet")


# The command -----------------------------------------------------------------------------------------------


def given(**changes: Any) -> bytes:
    return file_of(plain_tree(**deepcopy({**SITE, **changes})))


def names_in(folder: Path) -> list[str]:
    return sorted(each.name for each in folder.iterdir())


def test_the_command_writes_a_sign_and_leaves_as_keepout_does(tmp_path: Path) -> None:
    file = tmp_path / "sign.svg"
    done = run("keepout", "-", "--sign", str(file), given=given())
    assert done.returncode == 0
    assert "any direction" in done.stdout
    assert "The sign is in" in done.stderr
    assert "Quay hut" in text_in(file.read_text(encoding="utf-8"))
    assert names_in(tmp_path) == ["sign.svg"]
    near = given(place=[{**DESK, "along_axis": "1.6 m"}, WALK], transmission__0__power="900 W")
    assert run("keepout", "-", "--sign", str(file), "--replace", "--json", given=near).returncode == 1
    unproven = run("keepout", "-", "--sign", str(file), "--replace", given=given(place=[]))
    assert unproven.returncode == 3
    assert NOT_PROVEN in text_in(file.read_text(encoding="utf-8"))


def test_sign_and_map_go_together_in_files_of_their_own(tmp_path: Path) -> None:
    sign, chart = tmp_path / "sign.svg", tmp_path / "map.svg"
    assert run("keepout", "-", "--sign", str(sign), "--map", str(chart), given=given()).returncode == 0
    assert "fence" not in text_in(chart.read_text(encoding="utf-8"))
    assert names_in(tmp_path) == ["map.svg", "sign.svg"]
    done = run("keepout", "-", "--sign", f"{tmp_path}/./both.svg", "--map", f"{tmp_path}/both.svg", given=b"no design")
    assert done.returncode == 2
    assert "the file of --map too" in done.stderr
    assert names_in(tmp_path) == ["map.svg", "sign.svg"]


def test_a_file_that_exists_is_replaced_only_when_asked(tmp_path: Path) -> None:
    sign, chart = tmp_path / "sign.svg", tmp_path / "map.svg"
    sign.write_text("mine", encoding="utf-8")
    done = run("keepout", "-", "--sign", str(sign), "--map", str(chart), given=given())
    assert done.returncode == 2
    assert "--sign" in done.stderr
    assert "--replace" in done.stderr
    assert sign.read_text(encoding="utf-8") == "mine"
    assert names_in(tmp_path) == ["sign.svg"]


@pytest.mark.parametrize(
    ("name", "told"),
    [
        ("sign.pdf", "ends in .svg or .png"),
        ("sign", "ends in .svg or .png"),
        ("none/sign.svg", "make the directory"),
        ("folder.svg", "a directory"),
    ],
)
def test_a_file_that_cannot_be_written_is_told_before_the_design_is_read(tmp_path: Path, name: str, told: str) -> None:
    (tmp_path / "folder.svg").mkdir()
    done = run("keepout", "-", "--sign", str(tmp_path / name), given=b"no design")
    assert done.returncode == 2
    assert told in done.stderr
    assert "--sign" in done.stderr
    assert names_in(tmp_path) == ["folder.svg"]


def test_standard_output_is_no_file_of_a_sign() -> None:
    done = run("keepout", "-", "--sign", "-", given=b"no design")
    assert done.returncode == 2
    assert "ends in .svg or .png" in done.stderr


def test_without_the_typesetter_the_option_that_cannot_be_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(png, "find_spec", {}.get)
    with pytest.raises(CommandError, match=r"(?s)--sign.*write \.svg instead"):
        _files(None, "sign.png", as_json=False, plan=False, replace=False)


def test_a_sign_that_cannot_be_drawn_leaves_no_map_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from magsafe.cli.keepout import _save

    def broken() -> str:
        raise RuntimeError("no sign")

    monkeypatch.chdir(tmp_path)
    with pytest.raises(RuntimeError):
        _save(
            [("--map", Path("map.svg"), "map", lambda: "<svg/>"), ("--sign", Path("s.svg"), "sign", broken)],
            replace=False,
        )
    assert names_in(tmp_path) == []


@PNG
def test_a_png_has_150_dots_an_inch_and_says_which_letters_it_lacks(tmp_path: Path) -> None:
    file = tmp_path / "sign.png"
    done = run("keepout", "-", "--sign", str(file), given=given())
    assert done.returncode == 0
    assert "no letters" not in done.stderr
    wide, tall = struct.unpack(">II", file.read_bytes()[16:24])
    assert wide == 1241  # 210 mm
    assert abs(tall - 297.0 / 25.4 * 150.0) < 2.0
    foreign = given(station={"name": "\u6e2f\u53e3"})
    done = run("keepout", "-", "--sign", str(file), "--replace", given=foreign)
    assert "It has no letters for some of the names; .svg has them." in done.stderr
