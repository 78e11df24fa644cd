"""The map of a keep-out: what it shows, what it says, and that no file is left half written or written over."""

import os
import re
import struct
import xml.etree.ElementTree as ET
from datetime import date
from functools import cache
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import pytest
from commands import run
from designs import file_of, plain_design, plain_tree

import magsafe
from magsafe.analysis.field_map import field_map
from magsafe.analysis.operating_point import operating_point
from magsafe.checks.keepout import keepout
from magsafe.checks.sheet import KeepoutSheet
from magsafe.cli import saving
from magsafe.cli.progress import Bar
from magsafe.design.model import Design
from magsafe.errors import CommandError
from magsafe.reports import map_words
from magsafe.reports.pictures import keepout_map
from magsafe.reports.svg import WIDEST_LETTER, Labels, around, wrapped

SVG = "{http://www.w3.org/2000/svg}"
DESK = {"name": "operating desk", "who": "trained", "along_axis": "3 m", "posture": "sitting"}
WALK = {"name": "Quay walk", "who": "public", "along_axis": "5 m", "in_plane": "1 m"}
STOP = {"name": "bench", "who": "public", "along_axis": "1.7 m", "in_plane": "0 m"}
FENCE = {"name": "rail", "who": "public", "fence": "4 m"}
SITE = {
    "site": {"ground": "average", "rules": ["us-fcc"]},
    "loop__centre_height": "2 m",
    "capacitor__position": "top",
    "transmission__0__power": "200 W",
}
PLACES = [DESK, WALK, STOP, FENCE]
PNG = pytest.mark.skipif(find_spec("typst") is None, reason="typst, of the extra magsafe[png], is not installed")


def sheet_of(design: Design) -> KeepoutSheet:
    return keepout(magsafe.check(design, date(2026, 5, 4)))


def drawn(design: Design) -> str:
    sheet = sheet_of(design)
    index = map_words.shown_transmission(sheet)
    point = operating_point(design, design.transmission[index])
    farthest = map_words.farthest_of(sheet.operating_points[index])
    return keepout_map(sheet, design, index, None if point.out_of_range else field_map(design, point, farthest))


@cache
def picture(**changes: str) -> str:
    return drawn(plain_design(**{**SITE, "place": PLACES, **changes}))


def tree_of(svg: str) -> ET.Element:
    return ET.fromstring(svg)


def texts(svg: str) -> list[str]:
    return ["".join(each.itertext()) for each in tree_of(svg).iter(f"{SVG}text")]


def everything(svg: str) -> str:
    return " ".join(" ".join(texts(svg)).split())


def by_id(svg: str, name: str) -> ET.Element:
    (found,) = (each for each in tree_of(svg).iter() if each.get("id") == name)
    return found


def names_in(folder: Path) -> list[str]:
    return sorted(each.name for each in folder.iterdir())


def lengths(path: str) -> list[float]:
    return [float(each) for each in re.findall(r"-?[\d.]+", path)]


# What it shows ---------------------------------------------------------------------------------------------


def test_it_shows_plan_and_side_views_with_all_that_is_asked() -> None:
    svg = picture()
    for name in ("plan", "side-1", "side-2"):
        for part in (name, f"{name}-loop", f"{name}-touch", f"{name}-A", f"{name}-B"):
            assert by_id(svg, part) is not None
    assert by_id(svg, "side-1-ground") is not None
    said = everything(svg)
    for text in (
        "Where people must not be: plain.toml",
        "plain.toml, 2026-05-04, magsafe",
        "7.1 MHz, 200 W PEP at the transmitter",
        "us-fcc public (as amended 85 FR 18145 (2020))",
        "us-fcc trained (as amended",
        "Plan, from above, at any height",
        "Side view along the axis",
        "Side view in the plane",
        "in the plane of the loop, m",
        "up, m",
        "ground",
        "touch: 1.50 m from the centre",
        "2 dB of field",
    ):
        assert text in said
    assert "north" not in said.lower()


def test_every_place_has_its_word_in_the_list_and_beside_it() -> None:
    svg = picture()
    sheet = sheet_of(plain_design(**{**SITE, "place": PLACES}))
    verdicts = {p.name: p.verdict for e in sheet.operating_points[0].exposure for p in e.places}
    assert verdicts == {"operating desk": "clear", "Quay walk": "clear", "bench": "stop", "rail": "clear"}
    said = everything(svg)
    for name, verdict in verdicts.items():
        assert f"{verdict}: {name}" in said
    words = [text for text in texts(svg) if text in ("clear", "stop", "narrow", "unproven")]
    # In the plan all four, in the view along the axis those near its plane and the fence, in the other the fence.
    assert words.count("clear") == 3 + 2 + 1
    assert words.count("stop") == 1 + 1
    marks = [each.get("class", "") for each in tree_of(svg).iter() if each.get("class", "").startswith("mark-")]
    assert marks.count("mark-stop") == 2 + 1 + 1  # beside it twice, in the list, and the verdict at the top


def test_a_place_that_another_transmission_stops_is_a_stop() -> None:
    low = {"frequency": "7.1 MHz", "power": "1 W", "name": "whisper"}
    high = {"frequency": "14.2 MHz", "power": "900 W", "name": "shout"}
    near = {**WALK, "along_axis": "2 m", "in_plane": "0 m"}
    design = plain_design(**{**SITE, "place": [near], "transmission": [low, high]})
    sheet = sheet_of(design)
    assert map_words.shown_transmission(sheet) == 1
    (spot,) = map_words.words_of(sheet, design, 0).spots
    assert spot.verdict == "stop"
    assert "in shout" in spot.text


def test_of_several_transmissions_the_one_that_reaches_furthest_is_shown_and_named() -> None:
    weak = {"frequency": "7.1 MHz", "power": "100 W", "name": "weak one"}
    strong = {"frequency": "7.1 MHz", "power": "400 W", "name": "strong one"}
    said = everything(
        drawn(plain_design(**{**SITE, "place": [WALK], "transmission": [weak, strong, {**weak, "name": "third"}]}))
    )
    assert "strong one, 7.1 MHz, 400 W PEP" in said
    assert "of 3 transmissions the one whose keep-out reaches furthest" in said
    assert "further in some directions" not in said


def test_where_another_transmission_reaches_further_it_is_told() -> None:
    sheet = sheet_of(magsafe.read_design(Path(__file__).parents[2] / "sample_designs" / "breakwater_mast.toml"))
    (told,) = map_words._further(sheet, 1)
    assert told.startswith("160 m voice (")
    first, second = (point.exposure[0].keepout for point in sheet.operating_points)
    assert first is not None
    assert second is not None
    assert (first.above.distance or 0.0) > (second.above.distance or 0.0)
    assert f"above {first.above.distance:.1f} m for us-fcc trained" in told


# To scale --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("height", ["2 m", "9 m"])
def test_the_scale_bar_is_as_long_as_it_says_and_all_views_have_its_scale(height: str) -> None:
    svg = picture(loop__centre_height=height)
    bar = lengths(by_id(svg, "scale-bar").get("d", ""))
    metres = float((by_id(svg, "scale-bar-label").text or "").split()[0])
    scale = (bar[2] - bar[0]) / metres
    for view in ("plan", "side-1", "side-2"):
        # The touch circle of a metre loop: its outline of half a metre, and one more.
        assert float(by_id(svg, f"{view}-touch").get("r", "0")) == pytest.approx(1.5 * scale, abs=0.02)
    loop = lengths(by_id(svg, "side-2-loop").get("d", ""))
    assert max(loop[0::2]) - min(loop[0::2]) == pytest.approx(1.0 * scale, rel=0.02)
    place = next(each for each in tree_of(svg).iter(f"{SVG}rect") if each.get("class") == "place place-1")
    assert float(place.get("width", "0")) == pytest.approx(0.6 * scale, abs=0.02)


def test_side_views_stand_on_the_ground_at_the_loops_height() -> None:
    svg = picture()
    scale = float(by_id(svg, "side-1-touch").get("r", "0")) / 1.5
    ground = lengths(by_id(svg, "side-1-ground").get("d", ""))[1]
    assert (ground - float(by_id(svg, "side-1-touch").get("cy", "0"))) / scale == pytest.approx(2.0, abs=0.01)
    walk = next(
        each
        for each in by_id(svg, "side-1").iter(f"{SVG}rect")
        if each.get("class") == "place place-3"  # standing, on the axis
    )
    assert float(walk.get("height", "0")) == pytest.approx(2.0 * scale, abs=0.02)
    assert float(walk.get("y", "0")) + float(walk.get("height", "0")) == pytest.approx(ground, abs=0.02)


def test_the_contour_is_where_the_table_has_it() -> None:
    svg = picture()
    sheet = sheet_of(plain_design(**{**SITE, "place": PLACES}))
    scale = float(by_id(svg, "plan-touch").get("r", "0")) / 1.5
    centre = float(by_id(svg, "plan-touch").get("cx", "0"))
    for letter, record in (("A", sheet.operating_points[0].exposure[1]), ("B", sheet.operating_points[0].exposure[0])):
        assert record.keepout is not None
        assert record.keepout.along_axis is not None
        reach = (max(lengths(by_id(svg, f"plan-{letter}").get("d", ""))[0::2]) - centre) / scale
        told = record.keepout.along_axis.distance or 0.0
        assert 0.99 * reach <= told <= 1.01 * reach + 0.1


# Without colour --------------------------------------------------------------------------------------------


def test_without_colour_the_tiers_are_told_apart() -> None:
    svg = picture()
    for view in ("plan", "side-1", "side-2"):
        dashes = [by_id(svg, f"{view}-{part}").get("stroke-dasharray") for part in ("A", "B", "touch")]
        assert len(set(dashes)) == 3
        hatches = {e.get("fill") for e in by_id(svg, view).iter() if (e.get("fill") or "").startswith("url(")}
        assert hatches == {"url(#hatch-public)", "url(#hatch-trained)"}
    turns = {
        each.get("id"): each.get("patternTransform")
        for each in tree_of(svg).iter(f"{SVG}pattern")
    }  # fmt: skip
    assert turns == {"hatch-public": "rotate(45)", "hatch-trained": "rotate(-45)"}
    words = texts(svg)
    assert words.count("A") == words.count("B") == 4  # one on each view and one in the legend


def test_a_mark_has_a_shape_of_its_own() -> None:
    from magsafe.checks.sheet import ORDER
    from magsafe.reports.svg import Drawing

    shapes = set()
    for verdict in ORDER:
        drawing = Drawing(10.0)
        drawing.mark(verdict, (5.0, 5.0))
        shapes.add(re.sub(r' (fill|class)="[^"]*"', "", drawing.parts[0]))
    assert len(shapes) == 4


def test_two_rules_have_a_letter_each_and_more_share_one_for_each_tier() -> None:
    def letters(rules: list[str]) -> list[tuple[str, str]]:
        site = {"ground": "average", "rules": rules}
        design = plain_design(**{**SITE, "site": site, "place": [WALK]})
        return [(each.letter, each.text) for each in map_words.words_of(sheet_of(design), design, 0).contours]

    two = letters(["us-fcc", "icnirp-2020"])
    assert [letter for letter, _ in two] == ["A", "B", "C", "D"]
    three = letters(["us-fcc", "icnirp-2020", "jp"])
    assert [letter for letter, _ in three] == ["A", "B"]
    assert three[0][1].startswith("public, the strictest of us-fcc, icnirp-2020, jp: ")
    assert three[1][1].startswith("trained, the strictest of us-fcc, icnirp-2020: ")


# What is not known -----------------------------------------------------------------------------------------


def test_what_is_not_proven_is_said_in_words() -> None:
    site = {"ground": "average", "rules": ["us-fcc"], "metal_within": "0.5 m"}
    svg = drawn(plain_design(**{**SITE, "site": site, "place": [WALK]}))
    said = everything(svg)
    assert "Not all that is drawn is proven" in said
    assert "Not proven: metal is within 0.5 m" in said
    assert "Not proven: exposure.us-fcc.trained: No place" in said
    assert "unproven: Do not key this loop with people about" in said


def test_a_place_in_doubt_is_told_with_its_reason() -> None:
    close = {**DESK, "along_axis": "0.5 m"}
    svg = drawn(plain_design(**{**SITE, "place": [close, WALK], "transmission__0__power": "0.01 W"}))
    assert "operating desk: it comes within 0.3 m of the conductor" in everything(svg)


def test_beyond_what_is_computed_no_contour_is_drawn_and_it_is_said() -> None:
    svg = drawn(plain_design(**{**SITE, "place": PLACES, "transmission__0__frequency": "50.1 MHz"}))
    said = everything(svg)
    assert "No contour is drawn, because no keep-out is known" in said
    assert "no series capacitor tunes this loop" in said
    assert "plan-A" not in svg
    assert "unproven: bench" in said


def test_without_a_height_nothing_is_drawn_that_the_sheet_does_not_know() -> None:
    site = {"ground": "none", "rules": ["us-fcc"]}
    svg = drawn(plain_design(**{**SITE, "site": site, "loop__centre_height": None, "place": [WALK]}))
    assert "plan-A" not in svg
    assert "No contour is drawn" in everything(svg)
    free = drawn(plain_design(**{**SITE, "site": site, "loop__centre_height": None}))
    assert "plan-A" in free
    assert "ground" not in texts(free)


@pytest.mark.parametrize("floors", [["0 m"], ["0 m", "4 m"]])
def test_floors_are_drawn_and_named(floors: list[str]) -> None:
    site = {"ground": "average", "rules": ["us-fcc"], "floors": floors}
    svg = drawn(plain_design(**{**SITE, "site": site, "place": [WALK], "loop__centre_height": "3.5 m"}))
    assert ("floor 4 m" in texts(svg)) == (len(floors) > 1)


def test_places_too_far_off_are_told_and_leave_the_scale_alone() -> None:
    far = {**WALK, "along_axis": "140 m"}
    svg = drawn(plain_design(**{**SITE, "place": [DESK, far]}))
    assert "outside the picture, 140 m from the centre" in everything(svg)
    assert not [each for each in tree_of(svg).iter() if each.get("class") == "place place-2"]
    assert float(by_id(svg, "plan-touch").get("r", "0")) > 8.0


@pytest.mark.parametrize(
    "changes",
    [
        {"loop__plane": "horizontal", "capacitor__position": None, "place": [{**FENCE}]},
        {"loop__rotates": True, "place": PLACES},
        {"loop__turns": 2, "loop__turn_spacing": "80 mm", "place": PLACES},
        {"place": []},
    ],
    ids=["flat", "rotating", "two turns", "no place"],
)
def test_other_loops_have_maps_too(changes: dict[str, Any]) -> None:
    svg = drawn(plain_design(**{**SITE, **changes}))
    said = everything(svg)
    assert by_id(svg, "plan-loop") is not None
    expected = {
        "loop__plane": "Side view across",
        "loop__rotates": "Side view at any bearing",
        "loop__turns": "the loop, 2 turns",
        "place": "No place is given",
    }
    assert expected[next(iter(changes))] in said


# Well made -------------------------------------------------------------------------------------------------


def test_names_are_escaped_and_what_xml_cannot_hold_is_replaced() -> None:
    wild = '<svg onload="x">&amp; \u202e\uffff ]]>'
    place = {**WALK, "name": wild}
    try:
        design = plain_design(**{**SITE, "place": [place], "station": {"name": "Tom & <Jerry> \"'"}})
    except magsafe.DesignError:
        place["name"] = wild.replace("\uffff", "").replace("\u202e", "")
        design = plain_design(**{**SITE, "place": [place], "station": {"name": "Tom & <Jerry> \"'"}})
    svg = drawn(design)
    root = tree_of(svg)
    assert not list(root.iter("onload"))
    assert "Tom & <Jerry> \"'" in everything(svg)
    assert '<svg onload="x">&amp;' in everything(svg)
    assert root.get("aria-label", "").endswith("Tom & <Jerry> \"'")
    assert svg.count("<svg") == 1


def test_a_map_repeats_to_the_byte_and_has_its_size_in_millimetres() -> None:
    changes = {**SITE, "place": PLACES}
    one, other = drawn(plain_design(**changes)), drawn(plain_design(**changes))
    assert one == other
    assert tree_of(one).get("width") == "148mm"
    assert "nan" not in one
    assert "inf" not in re.sub(r"<(text|desc|title).*?</\1>", "", one)


def test_no_text_is_smaller_than_six_points_and_none_leaves_the_sheet() -> None:
    for each in tree_of(picture()).iter(f"{SVG}text"):
        size = float(each.get("font-size", "0"))
        assert size >= 2.1  # mm, 6 points
        wide = WIDEST_LETTER * size * len("".join(each.itertext()))
        left = float(each.get("x", "0")) - wide * {"middle": 0.5, "end": 1.0}.get(each.get("text-anchor", ""), 0.0)
        if each.get("transform") is None:
            assert left >= 0.0
            assert left + wide <= 148.0


def test_labels_keep_clear_of_one_another() -> None:
    labels, within = Labels(), (0.0, 0.0, 60.0, 60.0)
    boxes = [labels.first_free(around((28.0, 28.0, 32.0, 32.0), 10.0, 3.0), within) for _ in range(12)]
    found = [box for box in boxes if box is not None]
    assert len(found) == 12
    for i, a in enumerate(found):
        assert all(a[2] <= b[0] or b[2] <= a[0] or a[3] <= b[1] or b[3] <= a[1] for b in found[i + 1 :])


def test_text_is_wrapped_to_what_the_widest_font_needs() -> None:
    assert all(len(line) * WIDEST_LETTER * 2.5 <= 50.0 for line in wrapped("keep people out of this place " * 9, 50.0))


# The command -----------------------------------------------------------------------------------------------


def given() -> bytes:
    return file_of(plain_tree(**{**SITE, "place": PLACES}))


def test_the_command_writes_a_map_beside_its_tables(tmp_path: Path) -> None:
    file = tmp_path / "map.svg"
    done = run("keepout", "-", "--map", str(file), given=given())
    assert done.returncode == 1  # the bench is a stop
    assert "any direction" in done.stdout
    assert "map.svg" in done.stderr
    assert tree_of(file.read_text(encoding="utf-8")).tag == f"{SVG}svg"
    assert names_in(tmp_path) == ["map.svg"]
    machine = run("keepout", "-", "--map", str(file), "--replace", "--json", given=given())
    assert machine.returncode == 1
    assert machine.stdout.startswith("{")
    assert names_in(tmp_path) == ["map.svg"]


def test_a_file_that_exists_is_replaced_only_when_asked(tmp_path: Path) -> None:
    file = tmp_path / "map.svg"
    file.write_text("mine", encoding="utf-8")
    done = run("keepout", "-", "--map", str(file), given=given())
    assert done.returncode == 2
    assert "--replace" in done.stderr
    assert file.read_text(encoding="utf-8") == "mine"
    assert done.stdout == ""
    for spelling in ("--replace", "--force"):
        file.write_text("mine", encoding="utf-8")
        assert run("keepout", "-", "--map", str(file), spelling, given=given()).returncode == 1
        assert "<svg" in file.read_text(encoding="utf-8")


@pytest.mark.parametrize(
    ("name", "told"),
    [
        ("map.pdf", "ends in .svg or .png"),
        ("map", "ends in .svg or .png"),
        ("none/map.svg", "make the directory"),
        ("a" * 300 + ".svg", "can be written"),
        ("folder.svg", "a directory"),
        ("file/map.svg", "expected"),
        ("nul\x01.svg", ""),
    ],
)
def test_a_file_that_cannot_be_written_is_told_before_anything_is_computed(
    tmp_path: Path, name: str, told: str
) -> None:
    (tmp_path / "folder.svg").mkdir()
    (tmp_path / "file").touch()
    if not told:
        assert run("keepout", "-", "--map", str(tmp_path / name), given=given()).returncode == 1
        return
    # The design is not even read: what is wrong with the file is told first.
    done = run("keepout", "-", "--map", str(tmp_path / name), given=b"no design")
    assert done.returncode == 2
    assert told in done.stderr
    assert "Traceback" not in done.stderr
    assert names_in(tmp_path) == ["file", "folder.svg"]


def test_a_directory_that_nobody_may_write_to_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(self: Path, mode: str = "r") -> Any:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "open", refuse)
    with pytest.raises(CommandError, match="Permission denied"):
        saving.require_writable("--map", tmp_path / "map.svg", replace=False)
    with pytest.raises(CommandError, match="Permission denied"):
        saving.save("--map", tmp_path / "map.svg", b"x", replace=False)
    assert names_in(tmp_path) == []


def test_a_write_that_breaks_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "map.svg"
    file.write_text("mine", encoding="utf-8")

    def full(descriptor: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(CommandError, match="No space left"):
        saving.save("--map", file, b"new", replace=True)
    assert file.read_text(encoding="utf-8") == "mine"
    assert names_in(tmp_path) == ["map.svg"]


def no_links(self: Path, target: Path) -> None:
    raise OSError(95, "no hard links here")


def test_a_file_that_comes_up_meanwhile_is_kept(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "map.svg"
    saving.require_writable("--map", file, replace=False)
    file.write_text("mine", encoding="utf-8")
    for linked in (True, False):
        if not linked:
            monkeypatch.setattr(Path, "hardlink_to", no_links)
        with pytest.raises(CommandError, match="--replace"):
            saving.save("--map", file, b"new", replace=False)
        assert file.read_text(encoding="utf-8") == "mine"
    other = tmp_path / "other.svg"
    saving.save("--map", other, b"new", replace=False)
    assert other.read_bytes() == b"new"
    assert names_in(tmp_path) == ["map.svg", "other.svg"]


def test_options_that_mean_nothing_together_are_refused() -> None:
    for options, told in ((("--replace",), "--map"), (("--json", "--plan"), "one of the two")):
        done = run("keepout", "-", *options, given=given())
        assert done.returncode == 2
        assert told in done.stderr


def test_without_the_typesetter_a_png_is_refused_with_a_way_out(monkeypatch: pytest.MonkeyPatch) -> None:
    from magsafe.reports import png

    monkeypatch.setattr(png, "find_spec", {}.get)
    with pytest.raises(CommandError, match=r"write \.svg instead"):
        png.require_png()


@PNG
def test_a_png_has_150_dots_an_inch(tmp_path: Path) -> None:
    file = tmp_path / "map.PNG"
    assert run("keepout", "-", "--map", str(file), given=given()).returncode == 1
    data = file.read_bytes()
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    wide, tall = struct.unpack(">II", data[16:24])
    assert wide == 875  # 148 mm
    assert 600 < tall < 3000


def test_the_plan_in_characters() -> None:
    done = run("keepout", "-", "--plan", given=given())
    assert done.returncode == 1
    assert max(map(len, done.stdout.splitlines())) <= 80
    drawn_part = done.stdout.split("Plan from above", 1)[1]
    for text in ("' trained people too", "|--", "■ stop       3 bench", "To the right: along the axis"):
        assert text in drawn_part
    rows = drawn_part.splitlines()
    for sign in "123#t:.+":
        assert any(sign in row for row in rows[2:32])
    plain = run("keepout", "-", "--plan", given=given(), env={"PYTHONIOENCODING": "ascii"})
    assert plain.stdout.isascii()
    assert "[stop]       3 bench" in plain.stdout
    unknown = file_of(plain_tree(**{**SITE, "place": PLACES, "transmission__0__frequency": "50.1 MHz"}))
    none = run("keepout", "-", "--plan", given=unknown)
    assert none.returncode == 3
    assert "No plan is drawn" in none.stdout


def test_the_plan_in_characters_is_to_scale() -> None:
    """The touch circle of the metre loop is 3 m across, along the line of its centre."""
    rows = run("keepout", "-", "--plan", given=given()).stdout.split("Plan from above", 1)[1].splitlines()
    bar = next(row for row in rows if row.strip().startswith("|-"))
    cell = float(bar.split()[-2]) / (len(bar.strip().split()[0]) - 1)
    middle = next(row for row in rows if row.count("#") == 1 and "t" in row and "3" in row)
    assert (middle.rindex("t") - middle.index("t")) * cell == pytest.approx(3.0, abs=2.0 * cell)


# Progress --------------------------------------------------------------------------------------------------


def test_progress_is_told_on_a_terminal_alone_and_not_at_once(monkeypatch: pytest.MonkeyPatch) -> None:
    from magsafe.cli import progress

    clock = [0.0]
    monkeypatch.setattr(progress, "monotonic", lambda: clock[0])
    with Bar("Fields") as quiet:
        clock[0] = 9.0
        quiet(1, 2)
    assert quiet.shown is None  # standard error is no terminal here
    clock[0] = 0.0
    with Bar("Fields") as bar:
        bar.wanted = True
        bar(1, 4)
        assert bar.shown is None
        clock[0] = 0.6
        bar(2, 4)
        shown: Any = bar.shown
        assert shown[0].tasks[0].completed == 2
