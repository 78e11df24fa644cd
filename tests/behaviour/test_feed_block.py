"""The feed as it is told: the same on terminal and page, with its ends, and nothing where nothing is to be said."""

import re
from collections.abc import Iterator, Sequence
from functools import cache
from io import StringIO
from pathlib import Path
from typing import Any

import pytest
from designs import measured_changes, plain_design
from rich.console import Console

import magsafe
from magsafe import words
from magsafe.checks.run import check
from magsafe.checks.sheet import CouplingLoopRecord, Sheet
from magsafe.design.model import Design
from magsafe.reports import feed
from magsafe.reports.page import Heading, Page, Paragraph, Picture, Table
from magsafe.reports.page_feed import feeding, measurement
from magsafe.reports.page_figures import design_as_given
from magsafe.reports.terminal import Speaker, put, render

SAMPLES = sorted((Path(__file__).parents[2] / "sample_designs").glob("*.toml"))
TWO = [
    {"name": "40 m", "frequency": "7.1 MHz", "power": "100 W"},
    {"name": "20 m <b>", "frequency": "14.2 MHz", "power": "100 W"},
]
SMALL = {"coupling": "small loop"}
LOSSY: dict[str, Any] = {"capacitor__series_resistance": {"low": "20 mohm", "likely": "30 mohm", "high": "40 mohm"}}
HIGH: dict[str, Any] = {"loop__centre_height": "3 m"}


@cache
def sample(path: Path) -> Sheet:
    return check(magsafe.read_design(path))


def sheet_of(**changes: Any) -> Sheet:
    design: Design = plain_design(**{**LOSSY, **HIGH, **changes})
    return check(design)


@pytest.fixture(scope="module")
def small() -> Sheet:
    return sheet_of(transmission=TWO, feed=SMALL)


def loop_of(sheet: Sheet) -> CouplingLoopRecord:
    assert sheet.coupling_loop is not None
    return sheet.coupling_loop


def told(sheet: Sheet) -> feed.Told:
    found = feed.feed(sheet)
    assert found is not None
    return found


def terminal(sheet: Sheet, width: int = 80, *, plain: bool = False) -> str:
    """Return what a terminal shows of the feed; empty where that is nothing."""
    file = StringIO()
    console = Console(file=file, width=width, highlight=False, markup=False, emoji=False)
    put(console, *Speaker(width, plain).feeding(sheet))
    return file.getvalue()


def flat(text: str) -> str:
    return " ".join(text.split())


# A coupling loop -------------------------------------------------------------------------------------------


def test_each_transmission_has_its_row_with_the_ends_of_the_record(small: Sheet) -> None:
    made, found = loop_of(small), told(small)
    assert found.head == ("transmission", "matches at, mm", "coupling", "SWR", "kHz above")
    assert [row[0] for row in found.rows] == ["40 m", "20 m <b>"]
    for row, each in zip(found.rows, made.transmissions, strict=True):
        assert float(row[1].split("\n")[0]) == pytest.approx(1e3 * (each.matching_diameter.likely or 0.0), rel=5e-3)
        for cell, value in ((row[2], each.coefficient), (row[3], each.swr)):
            numbers = [float(n) for n in re.findall(r"[\d.]*\d", cell)]
            assert numbers == pytest.approx([value.likely, value.low, value.high], rel=6e-3)
        assert float(row[4]) == pytest.approx(each.offset / 1e3, rel=6e-3)


def test_a_loop_that_is_not_stated_is_said_to_be_and_the_fifth_is_only_beside_it(small: Sheet) -> None:
    made, (first, *_) = loop_of(small), told(small).sentences
    assert first.startswith("The design states no size of a coupling loop. With wire of 4.00 mm, in the middle of the")
    assert f"{words.number(made.diameter, 'm', 'mm')} mm across serves all transmissions best" in first
    assert f"That is {words.number(made.share_of_loop, '1', '%')} % of the loop's mean diameter" in first
    assert "a fifth of the loop's diameter is common practice, and not what is computed here" in first
    one = told(sheet_of(feed=SMALL)).sentences[0]
    assert "across matches." in one


def test_a_stated_loop_is_told_as_stated() -> None:
    stated = {"diameter": "150 mm", "wire": "6 mm", "position": "opposite the capacitor", "clearance": "20 mm"}
    found = told(sheet_of(feed=SMALL | {"small_loop": stated}))
    assert found.sentences[0].startswith(
        "The coupling loop as stated: 150 mm across, wire of 6.00 mm, opposite the capacitor, 20.0 mm clear of the "
        "conductor. That is 15.0 % of the loop's mean diameter;"
    )


def test_what_is_not_computed_is_named() -> None:
    beyond = [TWO[0], {"name": "6 m", "frequency": "50.1 MHz", "power": "10 W"}]
    found = told(sheet_of(transmission=beyond, feed=SMALL))
    assert [row[0] for row in found.rows] == ["40 m"]
    assert "Not computed for 6 m." in found.sentences
    large = sheet_of(feed=SMALL | {"small_loop": {"diameter": "5 m"}})
    assert large.coupling_loop is None
    assert "No match is computed: a coupling loop of 5 m has no room" in flat(terminal(large))


# Capacitors, and a loop that is fed as it is ---------------------------------------------------------------


@pytest.mark.parametrize("part", [{}, {"capacitance": "6 pF"}])
def test_of_two_capacitors_the_small_one_has_its_volts_and_amps(part: dict[str, str]) -> None:
    sheet = sheet_of(feed={"coupling": "capacitors", "series_capacitor": part} if part else {"coupling": "capacitors"})
    found, figures = told(sheet), sheet.operating_points[0].figures
    assert found.head[:4] == ("transmission", "matches, pF", "kV peak", "A RMS")
    assert (found.head[-1] == "SWR") == bool(part)
    assert "nearly the loop's full voltage" in found.sentences[0]
    names = ("series_capacitance", "series_capacitor_peak_voltage", "series_capacitor_rms_current")
    for cell, name, scale in zip(found.rows[0][1:], names, (1e12, 1e-3, 1.0), strict=False):
        numbers = [float(n) for n in re.findall(r"[\d.]*\d", cell)]
        values = [figures[name].likely, figures[name].low, figures[name].high]
        assert numbers == pytest.approx([scale * (each or 0.0) for each in values], rel=6e-3)


def test_of_a_full_wave_loop_the_least_ratio_comes_first() -> None:
    sheet = sample(next(path for path in SAMPLES if path.stem == "pier_head_square"))
    found = told(sheet)
    assert found.rows == ()
    assert "the section of 75 ohm that is cut for the first transmission" in found.sentences[0]
    for point, sentence in zip(sheet.operating_points, found.sentences[1:], strict=True):
        ratios = [float(n) for n in re.findall(r"([\d.]+) \([\d.]+ \u2026 [\d.]+\) (?:through|without)", sentence)]
        names = ("swr_at_50_ohm", "swr_through_quarter_wave", "swr_through_2_to_1", "swr_through_4_to_1")
        assert ratios == pytest.approx(sorted(point.figures[name].likely or 0.0 for name in names), rel=6e-3)
        assert f"{words.number(point.figures['quarter_wave_impedance'].likely or 0.0, 'ohm', 'Ω')} Ω" in sentence


# Surfaces --------------------------------------------------------------------------------------------------


def test_page_and_terminal_say_the_same(small: Sheet) -> None:
    page = Page.of("x", "2026-05-04", "x", tuple(feeding(small)))
    heading, *blocks = page.blocks
    assert heading == Heading("Feed")
    seen = flat(terminal(small, 100))
    for block in blocks:
        if isinstance(block, Paragraph):
            assert flat(block.text) in seen
        elif isinstance(block, Table):
            assert block.rows == tuple(tuple(flat(cell) for cell in row) for row in told(small).rows)
    assert sum(isinstance(block, Table) for block in blocks) == 1


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.stem)
def test_every_sample_is_told_within_its_width(path: Path) -> None:
    sheet = sample(path)
    for width in (80, 60, 40):
        seen = terminal(sheet, width, plain=True)
        assert seen.isascii()
        assert "Feed" in seen
        assert max(len(line) for line in seen.splitlines()) <= width
    assert any(isinstance(block, Heading) for block in feeding(sheet))


@pytest.mark.parametrize(
    "changes",
    [
        {"feed": SMALL, "transmission": TWO},
        {"feed": {"coupling": "capacitors", "series_capacitor": {"capacitance": "6 pF"}}},
    ],
)
def test_a_table_keeps_each_cell_whole(changes: dict[str, Any]) -> None:
    lines = terminal(sheet_of(**changes)).splitlines()
    assert not any(line.rstrip().endswith("\u2026") for line in lines)


def _earlier(sheet: Sheet) -> Sheet:
    """Return a sheet as an earlier version filed it: without what is told here."""
    known = sheet.model_dump(by_alias=True)
    del known["coupling_loop"]
    for point in known["operating_points"]:
        del point["measurement"]
        for name in list(point["figures"]):
            if "swr_" in name or "series_cap" in name or "coupling_loop" in name or "quarter_wave" in name:
                del point["figures"][name]
    return Sheet.model_validate(known)


def test_of_a_sheet_filed_earlier_nothing_is_told(small: Sheet) -> None:
    old = _earlier(small)
    assert old.coupling_loop is None
    assert terminal(old).strip() == ""
    assert list(feeding(old)) == []
    assert "\nFeed\n" in _whole(small)
    assert "\nFeed\n" not in _whole(old)


def _whole(sheet: Sheet) -> str:
    file = StringIO()
    put(Console(file=file, width=80, highlight=False, markup=False), render(sheet, 80, plain=False))
    return file.getvalue()


def test_the_feed_follows_the_figures(small: Sheet) -> None:
    lines = [line for line in _whole(small).splitlines() if line]
    at = {
        name: next(i for i, line in enumerate(lines) if line.startswith(name)) for name in ("Figures:", "Feed", "Cau")
    }
    assert at["Figures:"] < at["Feed"] < at["Cau"]


# What was measured -----------------------------------------------------------------------------------------


def measured_sheet(date: str = "2026-05-04") -> Sheet:
    changes = measured_changes(900.0, **LOSSY, **HIGH)
    points = [["7.0990 MHz", 0.4, -0.5], ["7.1 MHz", 0.05, 0.0], ["7.1010 MHz", 0.4, 0.5]]
    more = {"coupling": {"low": 0.8, "likely": 0.9, "high": 1.0}, "points": points, "by": "sweep", "date": date}
    changes["measured"][0] |= more
    return check(plain_design(**changes))


def blocks_of(sheet: Sheet) -> Iterator[Paragraph | Picture]:
    page = Page.of("x", "2026-05-04", "x", tuple(measurement(sheet.operating_points[0])))
    for block in page.blocks:
        assert isinstance(block, Paragraph | Picture)
        yield block


def test_a_measured_q_is_told_with_its_date_its_ends_and_its_picture() -> None:
    sheet = measured_sheet()
    said, picture = blocks_of(sheet)
    record = sheet.operating_points[0].measurement
    assert isinstance(said, Paragraph)
    assert isinstance(picture, Picture)
    assert record is not None
    assert "rests on a measured Q of 900 (882 \u2026 918), read on 2026-05-04 by sweep at 7.1 MHz" in said.text
    computed = words.number(record.computed_q.likely or 0.0, "1", "")
    assert f"its parts make it {computed}" in said.text
    assert f"Q {computed}" in picture.alt
    assert list(measurement(sheet_of().operating_points[0])) == []


@pytest.mark.parametrize("day", ["<script>x</script>", "\u05d1\u05d9\u05ea 4", "y" * 90])
def test_a_record_whose_day_is_none_is_not_shown(day: str) -> None:
    assert list(blocks_of(measured_sheet(day))) == []


def test_the_design_as_given_counts_the_points_that_the_picture_shows() -> None:
    table = next(block for block in design_as_given(measured_sheet()) if isinstance(block, Table))
    row = next(str(row[1]) for row in table.rows if row[0] == "measured")
    assert "points 3 of the sweep" in row
    assert "7.0990 MHz" not in row


def shares(blocks: Sequence[Any]) -> float:
    return sum(next(block for block in blocks if isinstance(block, Table)).widths)


def test_the_columns_of_the_page_fill_its_width(small: Sheet) -> None:
    assert shares(tuple(feeding(small))) == pytest.approx(1.0)
