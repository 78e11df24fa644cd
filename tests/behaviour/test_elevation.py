"""Where the power goes: the picture, the lines on a terminal, and that their numbers are those of the records."""

import os
import re
import struct
import subprocess
import sys
import xml.etree.ElementTree as ET
from collections.abc import Iterator
from functools import cache
from io import BytesIO, StringIO
from itertools import combinations
from math import atan2, cos, degrees, hypot, log10, radians, sin
from pathlib import Path

import numpy as np
import pytest
from commands import run as run_command
from designs import file_of, plain_tree
from patterns import METHOD, SIDES, Plane, pattern_record, placing_records, sheet_with, transmission
from rich.console import Console, Group

import magsafe
from magsafe.checks.sheet import LobeRecord, OperatingPointRecord, PatternCut, PatternRecord, PlacingRecord, Sheet
from magsafe.cli import app, check
from magsafe.errors import CommandError
from magsafe.reports import plotting, sky
from magsafe.reports.elevation import EDGE, RADIUS, WIDTH, elevation_dots, elevation_figure, lacks_letters
from magsafe.reports.svg import Box
from magsafe.reports.terminal import Speaker, put, render

SVG = "{http://www.w3.org/2000/svg}"
POINT = 72.0 / 25.4
LOW = (7.1e6, 2.0, "vertical", 0.15)
HIGH = (14.2e6, 12.0, "vertical", 0.7)
FLAT = (28.5e6, 10.5, "horizontal", 0.9)
Case = tuple[float, float, Plane, float]
CASES: dict[str, Case] = {"low": LOW, "high": HIGH, "flat": FLAT}  # type: ignore[dict-item]
WILD = ("<script>alert(1)</script>", "$x$ and $\\frac{a}{b}$ %", "{0} & ]]> \"quoted\" 'too'", "a" * 300, "long " * 60)

SCALE = ("0°", "30°")  # beside the rings, in the margin

# Gains that are simple levels: 0, -3.01, -10, -20, -40 dBi and nothing; the rim is 5 dBi.
GAINS = {0.0: 0.0, 30.0: 0.01, 60.0: 0.1, 90.0: 1.0, 120.0: 0.5, 150.0: 1e-4, 180.0: 0.0}
BY_HAND = PatternRecord(
    ground="average soil",
    method="by hand",
    cuts=(
        PatternCut(
            name="in the plane",
            towards="towards the capacitor",
            away="away from it",
            angle=tuple(GAINS),
            gain=tuple(GAINS.values()),
        ),
        PatternCut(
            name="on the axis",
            towards="one way",
            away="the other way",
            angle=(0.0, 90.0, 180.0),
            gain=(0.0, 1.0, 0.0),
        ),
    ),
    lobes=(
        LobeRecord(cut="in the plane", side="towards the capacitor", elevation=90.0, gain=1.0, strength=1.0),
        LobeRecord(cut="on the axis", side="one way", elevation=90.0, gain=1.0, strength=1.0),
        LobeRecord(cut="in the plane", side="away from it", elevation=60.0, gain=0.5, strength=0.5),
    ),
)


def placing(**changes: object) -> PlacingRecord:
    made = {
        "plane": "vertical",
        "centre_height": 2.0,
        "as_designed": True,
        "overall_efficiency": 0.141,
        "change": 1.0,
        "low_angle_change": 1.0,
        "share_above_60_degrees": 0.412,
        "share_below_20_degrees": 0.085,
        "capacitor_peak_voltage": 5740.0,
    }
    return PlacingRecord.model_validate({**made, **changes})


PLACINGS = (
    placing(),
    placing(centre_height=3.0, as_designed=False, overall_efficiency=0.2184, change=1.549, low_angle_change=2.0),
    placing(centre_height=1.0, as_designed=False, change=0.5, low_angle_change=0.9999),
    placing(plane="horizontal", as_designed=False, change=0.0, low_angle_change=None, capacitor_peak_voltage=None),
)


def sheet_of(case: str, name: str = "40 m voice") -> Sheet:
    frequency, height, plane, efficiency = CASES[case]
    pattern = pattern_record(frequency, height, plane, efficiency)
    return sheet_with(transmission(pattern, placing_records(frequency, height, plane, efficiency), name, frequency))


@cache
def picture(case: str, name: str = "40 m voice") -> str:
    return elevation_figure(sheet_of(case, name), 0)


@cache
def by_hand() -> str:
    return elevation_figure(sheet_with(transmission(BY_HAND, PLACINGS)), 0)


def texts(svg: str) -> list[str]:
    return [each.text or "" for each in ET.fromstring(svg).iter(f"{SVG}text")]


def everything(svg: str) -> str:
    return " ".join(" ".join(texts(svg)).split())


def path_of(svg: str, name: str) -> list[tuple[float, float]]:
    """Return the points of the path in the group of a name, in millimetres."""
    (group,) = (each for each in ET.fromstring(svg).iter(f"{SVG}g") if each.get("id") == name)
    (path,) = group.iter(f"{SVG}path")
    numbers = [float(each) / POINT for each in re.findall(r"-?[\d.]+(?:e-?\d+)?", path.get("d", ""))]
    return list(zip(numbers[::2], numbers[1::2], strict=True))


def style_of(svg: str, name: str) -> str:
    (group,) = (each for each in ET.fromstring(svg).iter(f"{SVG}g") if each.get("id") == name)
    return next(group.iter(f"{SVG}path")).get("style", "")


def middle_of(svg: str) -> tuple[float, float]:
    """Return the middle of the rings: nothing leaves along the ground."""
    return path_of(svg, "pattern-1-cut-1")[0]


def boxes(svg: str) -> Iterator[tuple[str, Box]]:
    """Yield each text with the place that it takes, in millimetres."""
    for each in ET.fromstring(svg).iter(f"{SVG}text"):
        style, text = each.get("style", ""), each.text or ""
        size = float(re.findall(r"font-size: ([\d.]+)px", style)[0]) / POINT
        with plotting.own_settings():
            wide = plotting.measured(text, size, bold="font-weight: 700" in style)
        x, y = float(each.get("x", "")) / POINT, float(each.get("y", "")) / POINT
        left = x - wide * {"start": 0.0, "middle": 0.5, "end": 1.0}[re.findall(r"text-anchor: (\w+)", style)[0]]
        yield text, (left, y - 0.75 * size, left + wide, y + 0.24 * size)


def lines(*points: OperatingPointRecord, width: int = 80, plain: bool = False) -> list[str]:
    console = Console(width=width, file=StringIO(), highlight=False, markup=False, emoji=False)
    say = Speaker(width, plain)
    put(console, Group(*say.patterns(points), *say.placings(points)))
    made = console.file
    assert isinstance(made, StringIO)
    return made.getvalue().splitlines()


# Levels ----------------------------------------------------------------------------------------------------


def test_levels_are_tenfold_logarithms() -> None:
    """Ten decibels a tenfold, 3.0103 a doubling: closed form."""
    assert sky.level(10.0) == pytest.approx(10.0, abs=1e-12)
    assert sky.level(2.0) == pytest.approx(3.0102999566, abs=1e-9)
    assert sky.level(1e-3) == pytest.approx(-30.0, abs=1e-12)
    assert sky.level(0.0) is None
    assert sky.level(1e-10, least=1e-9) is None


@pytest.mark.parametrize(
    ("ratio", "told"),
    [(1.549, "+1.9"), (0.398, "-4.0"), (1.0, "0.0"), (1.005, "0.0"), (0.995, "0.0"), (0.0, "nothing left")],
)
def test_a_change_has_its_sign(ratio: float, told: str) -> None:
    assert sky.signed(ratio) == told
    assert sky.signed(None) == "not known"


@pytest.mark.parametrize(("peak", "rim"), [(1.0, 5.0), (2.0, 5.0), (4.0, 10.0), (0.9, 0.0), (0.1, -5.0), (0.01, -15.0)])
def test_the_rim_is_the_next_step_above_the_strongest(peak: float, rim: float) -> None:
    cut = PatternCut(name="a", towards="b", away="c", angle=(0.0, 90.0, 180.0), gain=(0.0, peak, 0.5 * peak))
    assert sky.rim(PatternRecord(ground="g", method="m", cuts=(cut,), lobes=())) == rim


def test_between_two_angles_the_field_runs_straight() -> None:
    cut = BY_HAND.cuts[0]
    assert sky.gain_at(cut, 75.0) == pytest.approx((0.5 * (0.1**0.5 + 1.0)) ** 2)
    assert sky.gain_at(cut, 90.0) == pytest.approx(1.0, rel=1e-12)
    assert sky.gain_at(cut, 180.0) == 0.0


@pytest.mark.parametrize("case", CASES)
def test_steps_of_two_degrees_tell_the_same_levels_as_finer_ones(case: str) -> None:
    coarse, fine = (pattern_record(*CASES[case], step=step) for step in (2.0, 0.5))
    for one, other in zip(coarse.cuts, fine.cuts, strict=True):
        for elevation in sky.ELEVATIONS[:-1]:
            for angle in (elevation, 180.0 - elevation):
                here, there = sky.level(sky.gain_at(one, angle)), sky.level(sky.gain_at(other, angle))
                assert here == pytest.approx(there, abs=0.1)


# The numbers of the picture --------------------------------------------------------------------------------


def test_a_level_is_so_far_from_the_middle_by_hand() -> None:
    """46 mm are 30 dB to the rim at 5 dBi: 0 dBi is 25/30 of it, -10 dBi half, -20 dBi 5/30, -40 dBi the middle."""
    x, y = middle_of(by_hand())
    away = [hypot(a - x, b - y) for a, b in path_of(by_hand(), "pattern-1-cut-1")]
    expected = [0.0, 46.0 * 5.0 / 30.0, 23.0, 46.0 * 25.0 / 30.0, 46.0 * (1.0 - 8.0103 / 30.0), 0.0, 0.0]
    assert away == pytest.approx(expected, abs=1e-4)
    (_, up), (right, _) = path_of(by_hand(), "pattern-1-cut-1")[3], path_of(by_hand(), "pattern-1-cut-1")[1]
    assert up < y
    assert right > x


@pytest.mark.parametrize("case", CASES)
def test_every_point_drawn_is_that_of_its_record(case: str) -> None:
    svg, pattern = picture(case), sheet_of(case).operating_points[0].pattern
    assert pattern is not None
    x, y = middle_of(svg)
    top = sky.rim(pattern)
    for number, cut in enumerate(pattern.cuts, 1):
        drawn = path_of(svg, f"pattern-1-cut-{number}")
        assert len(drawn) == len(cut.angle) == 181
        for (a, b), angle, gain in zip(drawn, cut.angle, cut.gain, strict=True):
            away = hypot(a - x, y - b)
            expected = 0.0 if gain <= 0.0 else max(0.0, RADIUS + RADIUS * (10.0 * log10(gain) - top) / 30.0)
            assert away == pytest.approx(expected, abs=1e-3)
            if away > 1.0:
                assert degrees(atan2(y - b, a - x)) == pytest.approx(angle, abs=0.01)


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("merged", [False, True])
def test_the_dots_are_on_their_lobes(case: str, merged: bool) -> None:
    """Whether the records have both sides of a cut apart or as one."""
    sheet = sheet_of(case)
    pattern = sheet.operating_points[0].pattern
    assert pattern is not None
    expected = set()
    for lobe in pattern.lobes:
        away = lobe.side == next(cut.away for cut in pattern.cuts if cut.name == lobe.cut)
        angle = radians(180.0 - lobe.elevation if away else lobe.elevation)
        radius = RADIUS * (1.0 + (10.0 * log10(lobe.gain) - sky.rim(pattern)) / 30.0)
        expected.add((round(radius * cos(angle), 1), round(radius * sin(angle), 1)))
    if merged:
        near = [
            lobe for lobe in pattern.lobes if lobe.side == next(c.towards for c in pattern.cuts if c.name == lobe.cut)
        ]
        sides = [
            lobe.model_copy(update={"side": "overhead" if lobe.elevation > 89.0 else "both sides"}) for lobe in near
        ]
        pattern = pattern.model_copy(update={"lobes": tuple(sides)})
        assert len(sky.lobes(pattern)) < len(expected) + 1
        sheet = sheet_with(transmission(pattern))
    svg = elevation_figure(sheet, 0)
    x, y = middle_of(svg)
    drawn = set()
    for number in range(1, len(expected) + 1):
        corners = zip(*path_of(svg, f"pattern-1-lobe-{number}"), strict=True)
        across, down = (0.5 * (min(c) + max(c)) for c in corners)
        drawn.add((round(across - x, 1) + 0.0, round(y - down, 1)))
    assert f"pattern-1-lobe-{len(expected) + 1}" not in svg
    np.testing.assert_allclose(sorted(drawn), sorted(expected), atol=0.11)


def test_rings_and_spokes_are_labelled() -> None:
    said = texts(by_hand())
    x, _ = middle_of(by_hand())
    for text, count in (("5 dBi", 2), ("−5", 2), ("−15", 2), ("−25", 1), ("0°", 2), ("30°", 2), ("60°", 2), ("90°", 1)):
        assert said.count(text) == count
    places = {text: 0.5 * (box[0] + box[2]) - x for text, box in boxes(by_hand()) if text in ("5 dBi", "−5", "−15")}
    assert places == pytest.approx({"5 dBi": 46.0, "−5": 46.0 * 2.0 / 3.0, "−15": 46.0 / 3.0}, abs=0.01)


def test_lobes_are_told_with_level_and_elevation() -> None:
    said = everything(by_hand())
    assert "0.0 dBi at 90°" in said
    assert "−3.0 dBi at 60°" in said
    lettered = everything(picture("high"))
    pattern = sheet_of("high").operating_points[0].pattern
    assert pattern is not None
    drawn = texts(picture("high"))
    for letter, (group, told) in zip("ABCD", sky.lobes(pattern), strict=True):
        assert told.replace(" deg", "°").replace(": -", ": −") in lettered
        assert drawn.count(letter) == len(group) + 1 == 3  # one at each dot, one before what it stands for


def test_what_the_picture_holds_for_is_said() -> None:
    said = everything(by_hand())
    for text in (
        "Where the power goes 40 m voice, 7.1 MHz, 100 W PEP Loop upright, its centre 2.00 m up, over average soil.",
        "0 dBi is the same power sent out evenly in all directions",
        "In the plane (unbroken line) left: away from it; right: towards the capacitor",
        "On the axis (broken line) left: the other way; right: one way",
        "Of what reaches the sky 41.2 % leaves above 60° and 8.50 % below 20°, all directions counted.",
        "The middle is −25 dBi or less.",
        "Method: by hand.",
        "quay_rail.toml, 2026-05-04, magsafe 0.1.0",
    ):
        assert text in said
    bare = everything(elevation_figure(sheet_with(transmission(BY_HAND)), 0))
    assert "Loop over average soil." in bare
    assert "its centre" not in bare
    assert "Of what reaches the sky" not in bare


def test_the_second_transmission_is_drawn_by_its_number() -> None:
    first, second = transmission(BY_HAND, name="first"), transmission(BY_HAND, PLACINGS, name="second")
    svg = elevation_figure(sheet_with(first, second), 1)
    assert "second" in everything(svg)
    assert path_of(svg, "pattern-2-cut-1")
    with pytest.raises(ValueError, match="has no pattern"):
        elevation_figure(sheet_with(first, transmission(None)), 1)
    with pytest.raises(ValueError, match="has no pattern"):
        elevation_dots(sheet_with(transmission(None)), 0)


# Without colour, in print, read aloud ----------------------------------------------------------------------


def test_without_colour_the_cuts_are_told_apart() -> None:
    one, other = (re.sub(r"stroke: #\w+;", "", style_of(by_hand(), f"pattern-1-cut-{n}")) for n in (1, 2))
    assert "stroke-dasharray" not in one
    assert "stroke-dasharray" in other
    assert "stroke-width" in one
    # Where both go the same way, the thin line shows on the wide one: it is drawn later.
    widths = [float(re.findall(r"stroke-width: ([\d.]+)", style)[0]) for style in (one, other)]
    assert widths[0] < widths[1]
    assert by_hand().index('"pattern-1-cut-2"') < by_hand().index('"pattern-1-cut-1"')


@pytest.mark.parametrize("case", CASES)
@pytest.mark.parametrize("name", ["40 m voice", *WILD])
def test_nothing_overlaps_and_nothing_leaves_the_sheet(case: str, name: str) -> None:
    svg = picture(case, name)
    tall = float(re.findall(r'height="([\d.]+)mm"', svg)[0])
    placed = list(boxes(svg))
    for text, (left, top, right, bottom) in placed:
        assert left >= EDGE - 0.01 or text in SCALE, text
        assert right <= WIDTH - EDGE + 0.01 or text in SCALE, text
        assert 0.0 < left < right < WIDTH, text
        assert 0.0 < top < bottom < tall, text
    for (one, a), (other, b) in combinations(placed, 2):
        apart = a[2] <= b[0] or b[2] <= a[0] or a[3] <= b[1] or b[3] <= a[1]
        assert apart, f"{one!r} and {other!r}"


def test_letters_have_seven_points_where_it_is_printed_ninety_millimetres_wide() -> None:
    sizes = [float(each) for each in re.findall(r"font-size: ([\d.]+)px", picture("low"))]
    assert re.search(r'<svg [^>]*width="120\.00mm"', picture("low"))
    assert min(sizes) * 90.0 / 120.0 >= 7.0


def test_the_text_alternative_has_the_numbers() -> None:
    tree = ET.fromstring(by_hand())
    assert tree.get("role") == "img"
    assert tree.get("aria-label") == "Where the power goes: 40 m voice, 7.1 MHz, 100 W PEP"
    assert tree.findtext(f"{SVG}title") == tree.get("aria-label")
    about = tree.findtext(f"{SVG}desc")
    assert about == sky.pattern_in_words(sheet_with(transmission(BY_HAND, PLACINGS)).operating_points[0])
    for text in (
        "40 m voice, 7.1 MHz, 100 W PEP. Likely gain in dBi, losses counted, over average soil. Method: by hand.",
        "in the plane, towards the capacitor, from the horizon up, in dBi: 0 deg none, 5 deg -35.6, 15 deg -26.0, "
        "30 deg -20.0, 45 deg -13.6, 60 deg -10.0, 75 deg -3.6, 90 deg 0.0.",
        "in the plane, away from it, from the horizon up, in dBi: 0 deg none,",
        "Lobe at 90 deg, straight up: 0.0 dBi, the strongest. "
        "Lobe at 60 deg, in the plane, away from it: -3.0 dBi, 3.0 dB below the strongest. Of what reaches the sky",
    ):
        assert text in about


@pytest.mark.parametrize("name", WILD)
def test_names_are_letters_and_nothing_else(name: str) -> None:
    svg = picture("low", name)
    shown = " ".join(name.split())
    assert (shown if len(shown) <= 40 else f"{shown[:37]}...") in everything(svg)
    assert not {each.tag for each in ET.fromstring(svg).iter()} & {f"{SVG}script", f"{SVG}a", f"{SVG}image"}
    assert "<script" not in svg


def test_what_xml_cannot_hold_is_replaced() -> None:
    point = transmission(BY_HAND, name="a\x00b\ud800c\uffff\td\n\ne")
    svg = elevation_figure(sheet_with(point, name="file\x1b[31m.toml"), 0)
    assert "a\ufffdb\ufffdc\ufffd d e" in everything(svg)
    assert "file\ufffd[31m.toml" in everything(svg)


@pytest.mark.parametrize("case", CASES)
def test_nothing_reaches_out_of_the_picture(case: str) -> None:
    svg = picture(case)
    assert "DOCTYPE" not in svg
    assert "<style" not in svg
    assert "url(" not in svg
    links = [each for each in re.findall(r'https?://[^"\s<]+', svg) if not each.startswith("http://www.w3.org/")]
    assert not links
    named = re.findall(r'\bid="([^"]+)"', svg)
    assert len(named) == len(set(named))
    assert all(each.startswith("pattern-1-") for each in named)


# The same each time ----------------------------------------------------------------------------------------

AGAIN = """
import sys
from test_elevation import sheet_of
from magsafe.reports.elevation import elevation_dots, elevation_figure
sys.stdout.buffer.write(elevation_figure(sheet_of("high"), 0).encode() + elevation_dots(sheet_of("high"), 0))
"""


def test_it_is_the_same_to_the_byte_whatever_the_machine_is_set_to(tmp_path: Path) -> None:
    rules = tmp_path / "matplotlibrc"
    rules.write_text("savefig.bbox: tight\npath.sketch: 1, 100, 2\nfont.family: serif\nno.such.key: 1\n", "utf-8")
    set_otherwise = {
        "MATPLOTLIBRC": str(rules),
        "MPLBACKEND": "no such backend",
        "MPLCONFIGDIR": str(tmp_path / "rules" / "none"),
        "SOURCE_DATE_EPOCH": "1",
        "PYTHONHASHSEED": "7",
    }
    where = os.pathsep.join([str(Path(__file__).parent), str(Path(__file__).parents[1]), *sys.path])
    environment = {**os.environ, **set_otherwise, "PYTHONPATH": where}
    done = subprocess.run([sys.executable, "-c", AGAIN], capture_output=True, env=environment, check=True)
    assert done.stderr == b""
    assert done.stdout == picture("high").encode() + elevation_dots(sheet_of("high"), 0)


def test_drawing_leaves_no_setting_behind() -> None:
    import matplotlib

    before = dict(matplotlib.rcParams)
    elevation_figure(sheet_of("low"), 0)
    assert dict(matplotlib.rcParams) == before


# In dots ---------------------------------------------------------------------------------------------------


def test_a_png_has_300_dots_an_inch() -> None:
    data = elevation_dots(sheet_of("low"), 0)
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    wide, tall = struct.unpack(">II", data[16:24])
    assert wide == 1417  # 120 mm
    assert tall / wide == pytest.approx(float(re.findall(r'height="([\d.]+)mm"', picture("low"))[0]) / 120.0, abs=0.001)
    from matplotlib.image import imread

    dots = imread(BytesIO(data))
    assert dots.shape[:2] == (tall, wide)
    edge = round(0.5 * EDGE * wide / WIDTH)
    for strip in (dots[:edge], dots[-edge:], dots[:, :edge], dots[:, -edge:]):
        assert np.all(strip == 1.0)  # white paper all round
    assert np.min(dots[..., :3]) == 0.0


def test_letters_that_are_lacking_in_dots_are_told() -> None:
    for name, lacks in (("40 m voice", False), ("Großmast ø", False), ("灯台", True)):
        sheet = sheet_with(transmission(BY_HAND, name=name))
        assert lacks_letters(sheet, 0) == lacks
        assert elevation_dots(sheet, 0)[:4] == b"\x89PNG"
        assert name in everything(elevation_figure(sheet, 0))


# On a terminal ---------------------------------------------------------------------------------------------


@pytest.mark.parametrize("width", [40, 57, 75, 76, 80, 100])
@pytest.mark.parametrize("plain", [False, True])
@pytest.mark.parametrize("case", CASES)
def test_every_width_holds_it(case: str, plain: bool, width: int) -> None:
    made = lines(sheet_of(case, "10 m voice " * 9).operating_points[0], width=width, plain=plain)
    assert max(map(len, made)) <= width
    assert all(line.isascii() for line in made)
    said = " ".join(" ".join(made).split())
    for text in ("Where the power goes", "How height and plane matter", METHOD.split()[-1], "as designed"):
        assert text.lower() in said.lower()
    for elevation in ("90", "75", "60", "45", "30", "15", "5", "0"):
        assert any(line.split()[:1] == [elevation] for line in made)


def test_bars_are_as_long_as_their_levels_by_hand() -> None:
    """Of 80 columns a bar has 11 at most for 30 dB: 0 dBi of 5 is 9.2, -10 dBi 5.5 and -20 dBi 1.8 of them."""
    made = list(sky.bars(BY_HAND, 80))
    rows = {line.split()[0]: line for line in made if line.strip()[:1].isdigit()}
    assert re.split(r"\s{2,}", rows["60"].strip())[:2] == ["60 -10.0 ======", "-3.0 ========"]
    assert rows["90"].split() == ["90", *["0.0", "=" * 9] * 4]
    assert rows["30"].split()[:3] == ["30", "-20.0", "=="]
    assert rows["30"].split()[3] == "-40.0"  # below the middle: its number, and no bar
    assert rows["0"].split() == ["0", "none", "none", "none", "none"]
    assert rows["75"].split()[1] == "-3.6"  # its field is half way between those of 0.1 and 1


def test_each_side_stands_under_its_words() -> None:
    for width in (80, 100):
        made = list(sky.bars(BY_HAND, width))
        head = next(line for line in made if "towards the" in line)
        row = next(line for line in made if line.startswith(" 60"))
        for words, level in (("towards the", "-10.0"), ("away from it", "-3.0"), ("one way", "-3.5")):
            assert abs(head.index(words) - row.index(level)) <= 2
    narrow = list(sky.bars(BY_HAND, 40))
    assert [line.strip() for line in narrow if "in the plane" in line or "on the axis" in line] == [
        "in the plane",
        "on the axis",
    ]


def test_a_pattern_that_sends_nothing_is_told() -> None:
    cut = PatternCut(name="a", towards="b", away="c", angle=(0.0, 90.0, 180.0), gain=(0.0, 0.0, 0.0))
    nothing = PatternRecord(ground="g", method="m", cuts=(cut,), lobes=())
    made = lines(transmission(nothing))
    assert sum(line.split().count("none") for line in made) == 16
    assert "none" in sky.pattern_in_words(transmission(nothing))
    assert path_of(elevation_figure(sheet_with(transmission(nothing)), 0), "pattern-1-cut-1")


def test_lobes_are_listed_the_strongest_first_and_twins_as_one() -> None:
    pattern = sheet_of("flat").operating_points[0].pattern
    assert pattern is not None
    strong = sky.lobes(pattern)
    levels = [group[0].gain for group, _ in strong]
    assert levels == sorted(levels, reverse=True)
    assert sum(len(group) for group, _ in strong) == len(pattern.lobes)
    name = SIDES["horizontal"][1][0]
    assert strong[0][1] == f"14 deg, {name[0].lower()}{name[1:]}, both sides: 6.4 dBi, the strongest"
    assert strong[-1][1].startswith("90 deg, straight up: ")


def test_of_many_lobes_the_strongest_are_told_and_the_rest_counted() -> None:
    many = tuple(
        LobeRecord(cut="in the plane", side="away from it", elevation=5.0 * n, gain=0.9**n, strength=0.9**n)
        for n in range(1, 15)
    )
    pattern = BY_HAND.model_copy(update={"lobes": many})
    assert [group[0].elevation for group, _ in sky.lobes(pattern)] == [5.0 * n for n in range(1, 15)]
    svg = elevation_figure(sheet_with(transmission(pattern)), 0)
    assert "6 more lobes are weaker." in everything(svg)
    assert "pattern-1-lobe-14" in svg
    said = lines(transmission(pattern))
    assert "6 more lobes are weaker." in said
    assert sum(line.startswith("Lobe at ") for line in said) == 8


def test_a_second_lobe_that_no_reader_tells_from_the_first_is_as_strong() -> None:
    one = LobeRecord(cut="in the plane", side="both sides", elevation=30.0, gain=1.0, strength=1.0)
    second = one.model_copy(update={"elevation": 60.0, "gain": 0.995, "strength": 0.995})
    told = [text for _, text in sky.lobes(BY_HAND.model_copy(update={"lobes": (second, one)}))]
    assert told == [
        "30 deg, in the plane, both sides: 0.0 dBi, the strongest",
        "60 deg, in the plane, both sides: 0.0 dBi, as strong",
    ]


def test_sides_that_differ_are_not_twins() -> None:
    one = LobeRecord(cut="in the plane", side="away from it", elevation=30.0, gain=1.0, strength=1.0)
    for changes in ({"elevation": 31.0}, {"gain": 0.98, "strength": 0.98}, {"cut": "on the axis"}):
        other = one.model_copy(update={"side": "towards the capacitor", **changes})
        assert len(sky.lobes(BY_HAND.model_copy(update={"lobes": (one, other)}))) == 2
    twin = one.model_copy(update={"side": "towards the capacitor"})
    assert len(sky.lobes(BY_HAND.model_copy(update={"lobes": (one, twin)}))) == 1


def test_placings_are_rows_with_the_one_as_designed_in_words() -> None:
    assert list(sky.placing_rows(PLACINGS)) == [
        ("upright, 2.00 m, as designed", "14.1", "0.0", "0.0", "41.2", "5.74"),
        ("upright, 3.00 m", "21.8", "+1.9", "+3.0", "41.2", "5.74"),
        ("upright, 1.00 m", "14.1", "-3.0", "0.0", "41.2", "5.74"),
        ("flat, 2.00 m", "14.1", "nothing left", "not known", "41.2", "not known"),
    ]
    made = lines(transmission(None, PLACINGS))
    assert [line.strip() for line in made[6:8]] == [
        "to the      change,  below 20  above 60    volts,",
        "40 m voice                    sky, %           dB   deg, dB    deg, %   kV peak",
    ]
    assert "upright, 3.00 m                 21.8         +1.9      +3.0      41.2      5.74" in made


def test_a_loop_without_a_capacitor_has_no_column_of_volts() -> None:
    bare = tuple(each.model_copy(update={"capacitor_peak_voltage": None}) for each in PLACINGS)
    assert len(sky.placing_head(PLACINGS)) == 5
    assert len(sky.placing_head(bare)) == 4
    assert {len(row) for row in sky.placing_rows(bare)} == {5}
    assert not any("capacitor" in each for each in sky.placing_sentences(bare))


def test_placings_are_sentences_where_it_is_narrow() -> None:
    assert list(sky.placing_sentences(PLACINGS)) == [
        "As designed, upright at 2.00 m: 14.1 % to the sky, 41.2 % of it above 60 deg, capacitor 5.74 kV peak.",
        "Raise it to 3.00 m: 21.8 % to the sky, change +1.9 dB, below 20 deg +3.0 dB, 41.2 % of it above 60 deg, "
        "capacitor 5.74 kV peak.",
        "Lower it to 1.00 m: 14.1 % to the sky, change -3.0 dB, below 20 deg 0.0 dB, 41.2 % of it above 60 deg, "
        "capacitor 5.74 kV peak.",
        "Lay it flat at 2.00 m: 14.1 % to the sky, change nothing left, below 20 deg not known, 41.2 % of it above "
        "60 deg, capacitor not known.",
    ]
    stood = (placing(plane="horizontal"), placing(as_designed=False))
    assert list(sky.placing_sentences(stood))[1].startswith("Stand it upright at 2.00 m: ")
    assert next(sky.placing_sentences(stood[1:])).startswith("Upright at 2.00 m: ")
    narrow = " ".join(" ".join(lines(transmission(None, PLACINGS), width=40)).split())
    assert "Raise it to 3.00 m: 21.8 % to the sky" in narrow


def test_grounds_that_differ_are_told_with_their_transmissions() -> None:
    one, other = transmission(BY_HAND, name="one"), transmission(BY_HAND, name="other")
    alike = "\n".join(lines(one, other))
    assert alike.count("over average soil.") == 1
    sea = transmission(BY_HAND.model_copy(update={"ground": "sea water"}), name="sea")
    apart = "\n".join(lines(one, sea))
    assert apart.index("one, 7.1") < apart.index("average soil") < apart.index("sea, 7.1") < apart.index("sea water")


def test_it_stands_behind_the_figures_and_is_left_out_where_it_is_not_known() -> None:
    console = Console(width=80, file=StringIO(), highlight=False, markup=False, emoji=False)
    for sheet, there in ((sheet_of("low"), True), (sheet_with(transmission(None)), False)):
        put(console, render(sheet, 80, plain=False))
        made = console.file
        assert isinstance(made, StringIO)
        said = made.getvalue()
        made.truncate(0)
        assert ("Where the power goes" in said) == ("How height and plane matter" in said) == there
        if there:
            assert said.index("Figures: ") < said.index("Where the power goes") < said.index("How height")
            assert said.index("How height") < said.index("Cautions")


def test_colour_changes_no_word() -> None:
    points = sheet_of("low").operating_points
    said = []
    for colour in (True, False):
        console = Console(
            width=80, file=StringIO(), force_terminal=colour, color_system="truecolor" if colour else None
        )
        say = Speaker(80, plain=False)
        put(console, Group(*say.patterns(points), *say.placings(points)))
        made = console.file
        assert isinstance(made, StringIO)
        said.append([re.sub(r"\x1b\[[\d;]*m", "", line).rstrip() for line in made.getvalue().splitlines()])
    assert said[0] == said[1]


# The command -----------------------------------------------------------------------------------------------


@pytest.fixture
def with_patterns(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> str:
    """Let the command draw a sheet made by hand, and return a design file."""
    sheet = sheet_with(transmission(BY_HAND, PLACINGS, name="one"), transmission(BY_HAND, name="two"))
    monkeypatch.setattr(magsafe, "check", lambda _: sheet, raising=False)
    several = [{"frequency": "7.1 MHz", "power": "100 W", "name": name} for name in ("one", "two")]
    file = tmp_path / "design.toml"
    stated = {"site__ground": "average", "loop__centre_height": "2 m"}
    file.write_bytes(file_of(plain_tree(transmission=several, **stated)))
    return str(file)


def leave(*arguments: str) -> int:
    with pytest.raises(SystemExit) as left:
        app.run(arguments)
    assert isinstance(left.value.code, int)
    return left.value.code


@pytest.mark.parametrize("ending", [".svg", ".PNG"])
def test_the_command_writes_the_picture_and_prints_the_sheet(
    with_patterns: str, ending: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / f"pattern{ending}"
    assert leave("check", with_patterns, "--pattern", str(file)) == 0
    said = capsys.readouterr()
    assert said.err == f"The pattern of one is in {file}.\n"
    assert "Where the power goes" in said.out
    sheet = sheet_with(transmission(BY_HAND, PLACINGS, name="one"))
    expected = elevation_figure(sheet, 0).encode() if ending == ".svg" else elevation_dots(sheet, 0)
    assert file.read_bytes() == expected
    assert sorted(each.name for each in tmp_path.iterdir()) == ["design.toml", file.name]


def test_the_command_draws_the_transmission_that_is_named(
    with_patterns: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "pattern.svg"
    assert leave("check", with_patterns, "--json", "--pattern", str(file), "--transmission", "two") == 0
    said = capsys.readouterr()
    assert said.out.startswith("{")
    assert "The pattern of two is in" in said.err
    assert "two, 7.1 MHz" in file.read_text(encoding="utf-8")


def test_a_file_that_is_there_is_kept_unless_it_may_be_replaced(
    with_patterns: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "pattern.svg"
    file.write_text("mine", encoding="utf-8")
    assert leave("check", with_patterns, "--pattern", str(file)) == 2
    assert "--replace" in capsys.readouterr().err
    assert file.read_text(encoding="utf-8") == "mine"
    assert leave("check", with_patterns, "--pattern", str(file), "--replace") == 0
    assert file.read_text(encoding="utf-8").startswith("<?xml")


@pytest.mark.parametrize(
    ("options", "told"),
    [
        (("--pattern", "pattern.pdf"), "a name that ends in .svg or .png"),
        (("--pattern", "no/such/place.svg"), "make the directory"),
        (("--pattern", "new.svg", "--transmission", "three"), "one of 'one', 'two'"),
        (("--transmission", "one"), "add --pattern FILE"),
        (("--replace",), "add --pattern FILE"),
    ],
)
def test_options_that_cannot_be_carried_out_are_refused(
    with_patterns: str,
    options: tuple[str, ...],
    told: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.chdir(tmp_path)
    assert leave("check", with_patterns, *options) == 2
    said = capsys.readouterr()
    assert told in said.err
    assert said.out == ""
    assert [each.name for each in tmp_path.iterdir()] == ["design.toml"]


@pytest.mark.parametrize(
    ("changes", "told"),
    [
        ({"site": {"rules": []}}, ("without site.ground and loop.centre_height", 'such as "average" and loop.centre')),
        ({"site__ground": "average"}, ("without loop.centre_height", 'loop.centre_height, such as "2 m"')),
        ({"site": {"rules": []}, "loop__centre_height": "2 m"}, ("without site.ground\n", "state site.ground,")),
    ],
)
def test_without_ground_or_height_it_tells_what_to_state(
    changes: dict[str, object], told: tuple[str, ...], tmp_path: Path
) -> None:
    file = tmp_path / "pattern.svg"
    done = run_command("check", "-", "--pattern", str(file), given=file_of(plain_tree(**changes)))
    assert done.returncode == 2
    assert done.stdout == ""
    assert "Traceback" not in done.stderr
    for text in told:
        assert text in done.stderr
    assert list(tmp_path.iterdir()) == []


def test_a_transmission_without_a_pattern_is_refused_by_name(tmp_path: Path) -> None:
    sheet = sheet_with(transmission(BY_HAND), transmission(None, name="6 m voice"))
    with pytest.raises(CommandError, match="6 m voice, whose pattern is not known"):
        check._draw(sheet, 1, tmp_path / "pattern.svg", replace=False)
    assert list(tmp_path.iterdir()) == []


def test_help_and_a_check_without_a_picture_load_no_plotting(tmp_path: Path) -> None:
    loaded = "import sys; from magsafe.cli.app import run\ntry: run(['check', {}])\nexcept SystemExit: pass\n"
    shown = "sys.stderr.write(' '.join(m for m in sys.modules if m.split('.')[0] == 'matplotlib'))"
    file = tmp_path / "design.toml"
    file.write_bytes(file_of(plain_tree()))
    for argument in ("--help", str(file)):
        code = loaded.format(repr(argument)) + shown
        done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
        assert done.stderr == ""
