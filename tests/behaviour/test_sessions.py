"""Transmissions worked in turn: what may be listed, and how their sums are told on every surface."""

import json
from datetime import date
from typing import Any

import pytest
from commands import run
from designs import file_of, plain_design, plain_tree

import magsafe
from magsafe.analysis.field_map import field_map
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.keepout import keepout
from magsafe.design.reading import parse_design
from magsafe.errors import DesignError
from magsafe.reports import map_words
from magsafe.reports.pictures import keepout_map

OVER = {"transmit": "3 min", "listen": "3 min"}
VOICE = {"name": "40 m voice", "frequency": "7.1 MHz", "power": "100 W", "mode": "SSB", "over": OVER}
DATA = {"name": "20 m data", "frequency": "14.1 MHz", "power": "60 W", "mode": "data", "over": OVER}
DESK = {"name": "desk", "who": "trained", "along_axis": "3.5 m", "posture": "sitting"}
WALK = {"name": "walk", "who": "public", "along_axis": "4.2 m"}
BOTH = ["40 m voice", "20 m data"]


def tree(sessions: Any = (BOTH,), **changes: Any) -> dict[str, Any]:
    site = {"ground": "average", "rules": ["us-fcc"], "sessions": list(sessions)}
    basic: dict[str, Any] = {
        "site": site, "loop__centre_height": "2 m", "capacitor__position": "top",
        "transmission": [VOICE, DATA], "place": [DESK, WALK],
    }  # fmt: skip
    return plain_tree(**{**basic, **changes})


@pytest.mark.parametrize(
    ("sessions", "key", "answer"),
    [
        ([["40 m voice", "20 m dta"]], "site.sessions[0][1]", 'did you mean "20 m data"?'),
        ([["40 m voice", "40 m voice"]], "site.sessions[0][1]", "each transmission of a session once"),
        ([BOTH, BOTH[::-1]], "site.sessions[1]", "each session once"),
        ([["40 m voice"]], "site.sessions[0]", "2"),
        (["40 m voice"], "site.sessions[0]", "list"),
        ([BOTH, 3], "site.sessions[1]", "list"),
    ],
)
def test_what_cannot_be_a_session(sessions: Any, key: str, answer: str) -> None:
    with pytest.raises(DesignError) as caught:
        parse_design(file_of(tree(sessions)), "test.toml")
    (problem,) = caught.value.problems
    said = str(problem)
    assert key in said
    assert answer in said


def test_a_transmission_without_a_name_is_listed_by_its_title() -> None:
    plain = {key: value for key, value in DATA.items() if key != "name"}
    design = parse_design(file_of(tree([["40 m voice", "14.1 MHz"]], transmission=[VOICE, plain])), "test.toml")
    assert magsafe.check(design).sessions[0].transmissions == (0, 1)


def test_a_session_is_told_once_and_apart_from_its_transmissions() -> None:
    done = run("keepout", "-", given=file_of(tree()))
    text = " ".join(done.stdout.split())
    before, after = text.split("Worked in turn: 40 m voice, 20 m data", 1)
    assert "session-1" not in before.split("40 m voice, 7.1 MHz")[1]
    assert after.count("exposure.us-fcc.public.session-1.walk") == 1
    assert "summed over the worst 30 min (thermal whole-body)" in after
    assert "us-fcc public any direction" in after


def test_the_sheet_tells_the_share_of_each_and_what_all_could_be() -> None:
    text = " ".join(run("check", "-", given=file_of(tree())).stdout.split())
    assert "Worked in turn: 40 m voice, 20 m data" in text
    assert "in the worst 30 min (40 m voice 50 %, 20 m data 50 % of it); all powers together could be" in text
    assert "In a session one transmitter works one transmission at a time." in text
    assert "taken to be worked an averaging time apart" not in text


def test_without_sessions_the_sheet_says_what_it_takes_for_granted() -> None:
    text = " ".join(run("check", "-", given=file_of(tree(()))).stdout.split())
    assert "These transmissions are taken to be worked an averaging time apart: list in site.sessions" in text
    assert "Worked in turn" not in text
    one = " ".join(run("check", "-", given=file_of(tree((), transmission=[VOICE]))).stdout.split())
    assert "averaging time apart" not in one
    third = {**DATA, "name": "17 m data", "frequency": "18.1 MHz"}
    three = " ".join(run("check", "-", given=file_of(tree(transmission=[VOICE, DATA, third]))).stdout.split())
    assert "Transmissions that no session lists are taken to be worked an averaging time apart" in three


def test_the_machine_form_has_the_sums() -> None:
    sheet = json.loads(run("keepout", "-", "--json", given=file_of(tree())).stdout)
    (session,) = sheet["sessions"]
    assert session["transmissions"] == [0, 1]
    public = next(each for each in session["exposure"] if each["who"] == "public")
    (place,) = public["places"]
    assert sum(term["share_of_limit"] for term in place["terms"]) == pytest.approx(place["share_of_limit"])
    assert [term["share_of_window"] for term in place["terms"]] == pytest.approx([0.5, 0.5])
    assert public["keepout"]["any_direction"]["distance"] > 1.0
    told = [f["session"] for point in sheet["operating_points"] for f in point["findings"] if "session-1" in f["id"]]
    assert told == [1] * 4


def test_what_is_not_known_of_one_is_not_known_of_the_session() -> None:
    beyond = {**DATA, "frequency": "144.3 MHz"}
    sheet = magsafe.check(
        plain_design(**{k.replace(".", "__"): v for k, v in tree(transmission=[VOICE, beyond]).items()})
    )
    for exposure in sheet.sessions[0].exposure:
        assert exposure.keepout is None
        assert exposure.why
        assert [place.verdict for place in exposure.places] == ["unproven"]


def test_a_doubt_leaves_the_session_unproven_too() -> None:
    site = {"ground": "average", "rules": ["us-fcc"], "sessions": [BOTH], "metal_within": "0.5 m"}
    sheet = magsafe.check(parse_design(file_of(tree(site=site)), "test.toml"))
    for exposure in sheet.sessions[0].exposure:
        (place,) = exposure.places
        assert place.verdict == "unproven"
        assert place.power_factor is None
    ids = [f.id for f in sheet.operating_points[0].findings if f.session and f.doubt]
    assert set(ids) <= set(sheet.power_ceiling.left_out)
    assert len(ids) == 2


def test_the_map_tells_where_a_session_reaches_further_and_shows_the_worse_verdict() -> None:
    near = {**WALK, "along_axis": "2.9 m"}
    design = parse_design(file_of(tree(place=[DESK, near])), "test.toml")
    sheet = keepout(magsafe.check(design, date(2026, 5, 4)))
    alone = {
        p.verdict for point in sheet.operating_points for e in point.exposure for p in e.places if p.name == "walk"
    }
    summed = next(p for e in sheet.sessions[0].exposure for p in e.places if p.name == "walk").verdict
    assert (alone, summed) == ({"narrow"}, "stop") or (alone <= {"narrow", "clear"} and summed != "clear")
    index = map_words.shown_transmission(sheet)
    point = operating_point(design, design.transmission[index])
    said = map_words.words_of(sheet, design, index)
    spot = next(each for each in said.spots if each.name == "walk")
    assert spot.verdict == summed
    assert "worked in turn: 40 m voice, 20 m data" in spot.text
    assert any("worked in turn 40 m voice, 20 m data (any direction" in note for note in said.notes)
    reach = next(e.keepout for e in sheet.sessions[0].exposure if e.who == "public" and e.keepout is not None)
    contour = next(each for each in said.contours if each.who == "public")
    assert f"worked in turn {reach.any_direction.distance:.1f} m, further than drawn" in contour.text
    field = field_map(design, point, map_words.farthest_of(sheet.operating_points[index]))
    assert "worked in turn" in keepout_map(sheet, design, index, field)


def test_times_are_those_of_one_transmission_and_say_so() -> None:
    near = {**WALK, "along_axis": "3 m"}
    sheet = magsafe.check(parse_design(file_of(tree(place=[DESK, near])), "test.toml"))
    places = [p for point in sheet.operating_points for e in point.exposure for p in e.places]
    assert all(place.in_session for place in places)
    text = " ".join(run("check", "-", given=file_of(tree(place=[DESK, near]))).stdout.split())
    assert "of an unbroken carrier in any 30 min, and nothing else in that time" in text
    alone = " ".join(run("check", "-", given=file_of(tree((), place=[DESK, near]))).stdout.split())
    assert "nothing else in that time" not in alone


def test_a_tune_up_that_alone_is_too_much_is_told_so() -> None:
    tune = {"power": "100 W", "time": "6 min"}
    transmissions = [{**VOICE, "tune_up": tune}, {**DATA, "power": "100 W", "tune_up": tune}]
    near = {**WALK, "along_axis": "1.6 m"}
    mast = {"name": "mast", "who": "trained", "along_axis": "1.8 m", "when": "tuning"}
    given = file_of(tree(place=[DESK, near, mast], transmission=transmissions))
    text = " ".join(run("check", "-", given=given).stdout.split())
    assert "could bear no power: the tune-up alone is too much" in text
    assert "the tune-ups alone are too much" in text
    assert "could be 0 times" not in text
    assert "of the tune-up's carrier in any 6 min" in text


def test_a_session_of_which_nothing_is_known_has_its_row_and_its_reason() -> None:
    beyond = {**DATA, "frequency": "144.3 MHz"}
    for command in ("check", "keepout"):
        text = " ".join(run(command, "-", given=file_of(tree(transmission=[VOICE, beyond]))).stdout.split())
        summed = text.split("Worked in turn: 40 m voice, 20 m data")[-1]
        assert "us-fcc public" in summed
        assert "?" in summed
    assert "walk, us-fcc public: not known: " in " ".join(
        run("check", "-", given=file_of(tree(transmission=[VOICE, beyond]))).stdout.split()
    )
