"""The sheet for the station log: what it says on each surface, that nothing of anybody's is markup, files, exits."""

import json
import re
import subprocess
from collections.abc import Iterator, Sequence
from dataclasses import replace
from datetime import date
from io import BytesIO
from itertools import pairwise
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import html5lib  # type: ignore[import-untyped]
import pytest
from commands import run
from designs import file_of, plain_tree
from hypothesis import example, given
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from pypdf import PdfReader

import magsafe
from magsafe import words
from magsafe.analysis.operating_point import operating_points
from magsafe.checks.first_keydown import first_keydown
from magsafe.checks.run import check
from magsafe.checks.sheet import Limit, Value
from magsafe.cli.logsheet import _file, _page
from magsafe.design.model import Design
from magsafe.design.reading import parse_design
from magsafe.errors import CommandError, DesignError
from magsafe.reports import exemption, pdf, people, sessions, telling
from magsafe.reports.fit_text import LONGEST_WORD, fit
from magsafe.reports.html import as_html
from magsafe.reports.markdown import as_markdown, escaped
from magsafe.reports.page import Boxes, Break, Columns, Facts, Heading, Items, Page, Paragraph, Picture, Said, Table
from magsafe.reports.page_findings import figure_of, limit_of
from magsafe.reports.page_keydown import _watching, up
from magsafe.reports.pdf import as_pdf

SAMPLES = Path(__file__).parents[2] / "sample_designs"
DAY = date(2026, 5, 4)
HEBREW = "\u05d1\u05d9\u05ea \u05d4\u05e1\u05d9\u05e8\u05d4"
LONG = "quay" * 2500
HOSTILE = ("<script>alert(1)</script>", '#read("/etc/passwd")', "$x$ **bold** | `code` [a](b)", HEBREW, LONG)
REMARKS = "Keyed <b>twice</b>, #panic(), $y$, *loud*"
HTML = "{http://www.w3.org/1999/xhtml}"


class Case:
    """A design with its sheet and its page on every surface, made when they are asked for."""

    def __init__(self, design: Design, remarks: str = "") -> None:
        self.design = design
        self.points = operating_points(design)
        self.sheet = check(design, DAY, self.points)
        self.page: Page = _page(design, self.sheet, self.points, remarks)
        self.html = as_html(self.page)
        self.markdown = as_markdown(self.page)

    def tree(self) -> ElementTree.Element:
        """Return the HTML as a tree; raise where it is not valid."""
        found: ElementTree.Element = html5lib.HTMLParser(strict=True).parse(self.html)
        return found


def hostile() -> Design:
    first, second, third, fourth, long = HOSTILE
    joints = [{"name": name, "at": "capacitor", "resistance": "0.1 mohm"} for name in HOSTILE]
    places = [
        {"name": name, "who": "public", "along_axis": f"{5 + i} m", "in_plane": "0 m", "posture": "standing"}
        for i, name in enumerate(HOSTILE)
    ]
    return parse_design(
        file_of(
            plain_tree(
                station={"name": first, "callsign": second, "operator": long},
                loop__joint=joints,
                loop__centre_height="3 m",
                transmission=[
                    {"name": third, "frequency": "7.1 MHz", "power": "10 W", "mode": "CW"},
                    {"name": fourth, "frequency": "14.1 MHz", "power": "10 W", "mode": "CW"},
                ],
                site={"ground": "none", "rules": ["us-fcc"], "sessions": [[third, fourth]]},
                place=places,
            )
        ),
        '<img src="x" onerror="y">.toml',
    )


@pytest.fixture(scope="module")
def quay() -> Case:
    return Case(magsafe.read_design(SAMPLES / "quay_rail.toml"))


@pytest.fixture(scope="module")
def one() -> Case:
    return Case(magsafe.read_design(SAMPLES / "pass_refuge.toml"))


@pytest.fixture(scope="module")
def gallery() -> Case:
    return Case(magsafe.read_design(SAMPLES / "lighthouse_gallery.toml"))


@pytest.fixture(scope="module")
def attacked() -> Case:
    return Case(hostile(), REMARKS)


def texts(blocks: Sequence[Any]) -> Iterator[str]:
    """Yield every text of some blocks but what pictures say."""
    for block in blocks:
        match block:
            case Heading() | Paragraph():
                yield block.text
            case Said():
                yield from (block.verdict, block.text)
            case Facts():
                yield from (part for pair in block.pairs for part in pair)
            case Items():
                yield from block.items
            case Table():
                yield from (block.caption, *block.head)
                yield from (part for row in block.rows for cell in row for part in _cell(cell))
            case Picture():
                yield block.caption
            case Columns():
                yield from (part for column in block.columns for part in texts(column))
            case Boxes():
                yield from (*block.names, *block.texts)


def _cell(cell: str | Said) -> tuple[str, ...]:
    return (cell,) if isinstance(cell, str) else (cell.verdict, cell.text)


def bare(text: str) -> str:
    """Return a text without spaces, breaks of no width, and what isolates directions."""
    return re.sub(r"[\s\u200b\u2066-\u2069]+", "", text)


def before_the_break(page: Page) -> tuple[Any, ...]:
    return page.blocks[: next(i for i, block in enumerate(page.blocks) if isinstance(block, Break))]


# What it says ----------------------------------------------------------------------------------------------


def test_the_first_page_is_complete_in_itself(quay: Case) -> None:
    blocks = before_the_break(quay.page)
    said = "\n".join(texts(blocks))
    for part in (
        "Quay hut, seaward rail",
        "CALLSIGN",
        "duty operator",
        "2026-05-04",
        telling.headline(quay.sheet),
        telling.ceiling(quay.sheet, quay.sheet.power_ceiling),
        "Name and signature",
        "Remarks",
    ):
        assert part in said
    verdict = next(block for block in blocks if isinstance(block, Said))
    assert verdict.verdict == quay.sheet.verdict
    reasons = next(block for block in blocks if isinstance(block, Table))
    for told, row in zip(telling.in_the_way(quay.sheet), reasons.rows, strict=False):
        assert told.finding.id in str(row[1])
        assert told.finding.do.split(",")[0] in str(row[2])
        assert re.search(r"\d", str(row[1]))
    cautions = next(block for block in blocks if isinstance(block, Items) and block.columns == 2)
    assert len(cautions.items) == len(quay.sheet.cautions)
    assert any(isinstance(block, Picture) and "Map of the keep-out" in block.alt for block in blocks)


def test_every_finding_figure_and_assumption_is_told(quay: Case, gallery: Case) -> None:
    for case in (quay, gallery):
        said = bare("\n".join(texts(case.page.blocks)))
        for finding in case.sheet.all_findings():
            assert bare(finding.question) in said
            assert finding.verdict == "clear" or bare(finding.because) in said
            assert finding.verdict == "clear" or bare(finding.do[1:]) in said
            assert finding.limit is None or bare(finding.source) in said
        for row in telling.rows(case.sheet.operating_points):
            assert bare(row.label) in said
            for point in case.sheet.operating_points:
                figure = point.figures[row.figure]
                assert figure.method == "none" or bare(figure.method) in said
                assert figure.method == "none" or bare(figure.source) in said
        for told in (*case.sheet.assumptions, *case.sheet.cautions):
            assert bare(told) in said
        for derating in case.sheet.deratings:
            assert bare(f"{derating.applies_to}, {derating.name}") in said
        digits = case.sheet.design.sha256
        assert digits in said
        assert "diameter" in said or "side" in said


@pytest.mark.parametrize(
    ("value", "limit", "found", "figure", "bound"),
    [
        ((5700.0, 6840.0, "V"), (10e3, "V"), 1.46, "5.70 (at most 6.84) kV peak", "10.0 kV peak"),
        ((20.0, 25.0, "A"), (42.0, "A"), 1.68, "20.0 (at most 25.0) A RMS", "42.0 A RMS"),
        ((0.1, 0.12, "A/m"), (0.6, "A/m"), 5.0, "0.100 (at most 0.120) A/m RMS", "0.600 A/m RMS"),
    ],
)
def test_a_finding_has_its_units_and_says_peak_or_rms(
    quay: Case, value: tuple[float, float, str], limit: tuple[float, str], found: float, figure: str, bound: str
) -> None:
    made = (
        quay.sheet.operating_points[0]
        .findings[0]
        .model_copy(
            update={
                "value": Value(low=None, likely=value[0], high=value[1], unit=value[2]),
                "limit": Limit(value=limit[0], unit=limit[1]),
                "margin_found": found,
            }
        )
    )
    assert figure_of(made) == figure
    assert limit_of(made) == bound


def test_a_limit_that_must_be_reached_says_so(quay: Case) -> None:
    width = next(f for f in quay.sheet.all_findings() if f.id == "loop.bandwidth")
    assert limit_of(width) == "at least 2.70 kHz"
    corona = next(f for f in quay.sheet.all_findings() if f.id == "conductor.corona")
    assert limit_of(corona).endswith("kV/m peak")
    assert not limit_of(corona).startswith("at least")


def test_the_procedure_says_first_what_must_be_done(one: Case, gallery: Case, quay: Case) -> None:
    assert (one.sheet.verdict, gallery.sheet.verdict) == ("stop", "unproven")
    for case in (one, gallery):
        blocks = after(case.page, "The first key-down")
        assert any(isinstance(block, Said) for block in blocks)
        said = "\n".join(texts(blocks))
        assert "Before any key-down" in said
        for finding in case.sheet.all_findings():
            if finding.verdict in ("stop", "unproven"):
                assert finding.do[1:] in said
        # Whoever skims finds no power to key at.
        assert not any(isinstance(block, Table) for block in blocks)
        assert "Carriers of" not in said
        assert "No steps are told" in said
    said = "\n".join(texts(quay.page.blocks))
    assert "Before any key-down" not in said
    assert "Carriers of" in said


def steps_of(case: Case) -> str:
    """Return all that the procedure says."""
    return "\n".join(texts(after(case.page, "The first key-down")))


def beacon_in(mode: str) -> Case:
    """Return a sample in another mode: its wiper bears 17 W of an unbroken carrier."""
    text = (SAMPLES / "breakwater_beacon.toml").read_text(encoding="utf-8").replace('"data"', f'"{mode}"')
    return Case(parse_design(text.encode(), "beacon.toml"))


def test_a_carrier_and_what_is_keyed_have_powers_of_their_own() -> None:
    said = steps_of(beacon_in("SSB unprocessed"))
    assert "Never an unbroken carrier beyond 17 W" in said
    assert "As the mode keys it, never beyond 60 W PEP" in said
    assert "at the power of the last carrier, then at 31 and 60 W PEP" in said
    assert "power, W PEP" in said
    assert "AM:" not in said
    # 17 W unbroken, in a wiper that 17.5 W bring to its limit less its margin.
    assert re.search(r"At worst: joint capacitor-s-wiper \d+ degC; measure before a hand touches it", said)
    assert "How hot the capacitor gets is not computed: measure it before a hand touches it" in said


def test_an_am_carrier_is_told_as_a_quarter(quay: Case) -> None:
    found = first_keydown(quay.design, quay.sheet, quay.points)[0]
    made = list(_watching(replace(found, am_carrier=6.0, keyed=(24.0,))))
    told = next(each for each in made if each.startswith("AM"))
    assert "before anybody speaks, the carrier alone is at most 6.0 W, a quarter of 24 W PEP" in told
    assert not any(each.startswith("AM") for each in _watching(found))


def test_the_wait_before_the_next_procedure_is_told(quay: Case) -> None:
    found = first_keydown(quay.design, quay.sheet, quay.points)[0]
    told = "Wait 30 min with nothing on the air before the procedure of another transmission"
    assert any(each.startswith(told) for each in _watching(replace(found, again=1800.0)))
    assert not any("with nothing on the air" in each for each in _watching(replace(found, again=0.0)))


def test_what_the_sun_alone_makes_too_hot_is_measured_first(quay: Case) -> None:
    found = first_keydown(quay.design, quay.sheet, quay.points)[0]
    said = list(_watching(replace(found, idle=358.0, cooling=None)))[-1]
    assert "Air and sun alone may keep the conductor at 85 degC: no hand touches it" in said
    assert "no hand on it before" not in said
    said = list(_watching(found))[-1]
    assert re.search(r"takes \d+(\.5)? min to cool to 43 degC: no hand on it before", said)
    said = list(_watching(replace(found, hot=(), cooling=0.0, hottest=310.0)))[-1]
    assert "stay below 43 degC" in said


@given(st.floats(1e-3, 1e6))
def test_a_worst_end_is_never_rounded_down(value: float) -> None:
    assert value * (1.0 - 1e-9) <= float(up(value, "A", "A")) <= value * 1.0101


def test_a_worst_end_keeps_its_three_digits() -> None:
    told = [up(each, "A", "A") for each in (12.34, 12.3, 0.0, 999.1, 1.0001)]
    assert told == ["12.4", "12.3", "0", "1000", "1.01"]
    assert up(7951.0, "V", "kV") == "7.96"


def test_the_table_of_steps_rounds_up(quay: Case) -> None:
    blocks = after(quay.page, "The first key-down")
    tables = [block for block in blocks if isinstance(block, Table)]
    for table, found in zip(tables, first_keydown(quay.design, quay.sheet, quay.points), strict=True):
        for row, step in zip(table.rows, found.steps, strict=True):
            cells = [float(str(cell)) for cell in row]
            assert cells[1] == step.power
            for told, value in zip(cells[2:], ((step.volts or 0.0) / 1e3, step.amps, step.creep), strict=True):
                assert value is not None
                assert told >= value * (1.0 - 1e-9)


def after(page: Page, heading: str) -> list[Any]:
    """Return the blocks of one section."""
    start = next(i for i, b in enumerate(page.blocks) if isinstance(b, Heading) and b.text == heading)
    rest = page.blocks[start + 1 :]
    end = next((i for i, b in enumerate(rest) if isinstance(b, Heading) and b.level <= 2), len(rest))
    return list(rest[:end])


def test_people_sessions_and_exemptions_are_told(attacked: Case, quay: Case) -> None:
    for case in (attacked, quay):
        said = bare("\n".join(texts(case.page.blocks)))
        for point in case.sheet.operating_points:
            for row in people.distance_rows(point):
                assert bare("".join(row)) in said
            for sentence in exemption.sentences(point):
                assert bare(sentence[:60]) in said
            for exposed in point.exposure:
                for place in exposed.places:
                    assert bare(words.short(place.name)[:20]) in said
                    assert bare(people.place_text(place, exposed).partition(f"{exposed.who}: ")[2]) in said
    session = attacked.sheet.sessions[0]
    said = bare("\n".join(texts(attacked.page.blocks)))
    assert bare("Places during this session") in said
    for row in sessions.distance_rows(session, 6):
        assert bare("".join(row)) in said


def test_a_full_wave_loop_has_a_page_too() -> None:
    case = Case(magsafe.read_design(SAMPLES / "pier_head_square.toml"))
    said = "\n".join(texts(case.page.blocks))
    assert "terminals, kV peak at worst" in said
    assert "SWR about resonance" not in said
    assert "How hot the capacitor gets" not in said
    case.tree()


def test_the_page_promises_nothing(quay: Case, one: Case) -> None:
    for case in (quay, one):
        said = "\n".join(texts(case.page.blocks)).lower()
        for word in (" safe ", "complies", "compliant", "approved", "passes", "guarantee"):
            assert word not in said.replace("safety summary", "")
        assert "permits nothing" in said
        assert "local regulation" in said
        assert "licence" in said


def test_every_surface_says_the_same(quay: Case, attacked: Case) -> None:
    for case in (quay, attacked):
        told = [bare(each) for each in texts(case.page.blocks) if each]
        seen = bare("".join(case.tree().itertext()))
        marked = bare(shown(case.markdown))
        # A paragraph that two sheets of paper share has the line at the foot of the first one in its midst.
        printed = re.sub(rf"{re.escape(bare(case.page.footer))}\d+/\d+", "", bare(text_of(as_pdf(case.page))))
        for each in told:
            assert each in seen
            assert each in marked
            # Lines that are read from the right come out of a PDF in the order in which they are drawn.
            assert each in printed or any("\u0590" <= letter <= "\u05ff" for letter in each)


def shown(markdown: str) -> str:
    """Return the text that a reader of Markdown sees."""
    found = MarkdownIt("commonmark").enable("table").parse(markdown)
    return "".join(
        child.content for token in found for child in token.children or [] if child.type in ("text", "softbreak")
    )


def text_of(made: bytes) -> str:
    return "".join(page.extract_text() for page in PdfReader(BytesIO(made)).pages)


# HTML ------------------------------------------------------------------------------------------------------


def test_html_is_valid_and_asks_nothing_of_anybody(quay: Case, gallery: Case, attacked: Case) -> None:
    for case in (quay, gallery, attacked):
        root = case.tree()
        assert root.get("lang") == "en"
        head = root.find(f"{HTML}head")
        assert head is not None
        assert head.findtext(f"{HTML}title")
        tags = {element.tag.removeprefix(HTML) for element in root.iter()}
        assert not tags & {"script", "link", "iframe", "object", "embed", "form", "a", "b onerror", "base"}
        for element in root.iter():
            for name, value in element.attrib.items():
                assert not name.lower().startswith("on")
                if name in ("src", "href", "srcset", "action", "data"):
                    assert value.startswith("data:image/svg+xml;base64,")
        style = head.findtext(f"{HTML}style") or ""
        assert not re.search(r"url\(|@import|https?:", style)


def test_html_is_marked_up_for_whoever_hears_it(quay: Case) -> None:
    root = quay.tree()
    for table in root.iter(f"{HTML}table"):
        caption = table.find(f"{HTML}caption")
        assert caption is not None
        assert caption.text
        scopes = {cell.get("scope") for cell in table.iter(f"{HTML}th")}
        assert scopes == {"col", "row"}
        columns = len(list(table.iter(f"{HTML}col")))
        for row in table.iter(f"{HTML}tr"):
            assert len(row) == columns
    pictures = list(root.iter(f"{HTML}img"))
    assert pictures
    assert all(len(each.get("alt") or "") > 40 for each in pictures)
    levels = [int(e.tag[-1]) for e in root.iter() if re.fullmatch(f"{HTML}h[1-6]", e.tag)]
    assert levels.count(1) == 1
    assert all(step <= 1 for step in (b - a for a, b in pairwise(levels)))


def test_a_verdict_is_a_word_and_a_shape(quay: Case) -> None:
    marks = [e for e in quay.tree().iter(f"{HTML}span") if e.get("class") == "mark"]
    assert marks
    for mark in marks:
        said = "".join(mark.itertext()).split()
        assert said[0] in "■◆▲●"
        assert said[1] in ("stop", "unproven", "narrow", "clear")


def test_the_paper_is_that_which_was_asked_for(quay: Case) -> None:
    assert "size: A4;" in as_html(quay.page, "a4")
    assert "size: letter;" in as_html(quay.page, "letter")
    assert not re.search(r"@page \{[^}]*size:", as_html(quay.page))


def test_names_stay_names(attacked: Case) -> None:
    seen = "".join(attacked.tree().itertext())
    for name in HOSTILE[:3]:
        assert name in seen
    assert bare(HEBREW) in bare(seen)
    assert LONG not in seen
    assert f"{LONG[:20]}" in seen
    assert REMARKS in seen
    assert len(attacked.html) < 1_500_000
    for text in texts(attacked.page.blocks):
        assert all(len(word) <= LONGEST_WORD for word in text.split())


# Text ------------------------------------------------------------------------------------------------------


@given(st.text(max_size=300))
def test_text_made_fit_holds_no_control_and_no_word_without_end(text: str) -> None:
    found = fit(text)
    assert "\n" not in found
    assert not re.search(r"[\x00-\x1f\x7f-\x9f\u200e\u200f\u202a-\u202e\u2066\u2067]", found)
    assert found.count("\u2068") == found.count("\u2069")
    assert all(len(bare(word)) <= LONGEST_WORD for word in found.split())


def test_what_is_too_long_is_cut_with_a_mark() -> None:
    assert fit("a" * 100) == f"{'a' * 45}..."
    assert fit("word " * 10_000, 100) == f"{'word ' * 19}wo..."
    assert fit("kept as it is") == "kept as it is"
    assert fit("e\u0301\u0301\u0301\u0301\u0301") == "e\u0301\u0301\u0301"
    assert fit(f"{HEBREW} 5 W") == f"\u2068{HEBREW}\u2069 5 W"


@given(st.text(alphabet=st.characters(exclude_categories=("Cc", "Cs", "Zl", "Zp")), min_size=1, max_size=80))
@example("1. a list")
@example("2) a list")
@example("- a list")
@example("+ a list")
@example("# a heading")
@example("a -- b == c")
@example("https://example.org <b>&amp; ![x](y)")
def test_escaped_text_is_text_to_a_reader_of_markdown(text: str) -> None:
    # CommonMark, by a reader that is no part of this project.
    flat = " ".join(text.split())
    if not flat:
        return
    for line, table in ((escaped(flat), False), (f"| {escaped(flat)} |\n| --- |\n| x |", True)):
        tokens = MarkdownIt("commonmark").enable("table").parse(line)
        first = next(token for token in tokens if token.type == "inline")
        assert [child.type for child in first.children or []] == ["text"] or _only_text(first)
        assert (tokens[0].type == "table_open") is table
        assert "".join(child.content for child in first.children or []) == flat


def _only_text(token: Any) -> bool:
    return all(child.type in ("text", "text_special") for child in token.children or [])


# PDF -------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("paper", "size"), [("a4", (595.3, 841.9)), ("letter", (612.0, 792.0))])
def test_a_pdf_is_tagged_and_one_transmission_takes_four_pages(
    one: Case, gallery: Case, paper: Any, size: tuple[float, float]
) -> None:
    for case in (one, gallery):
        found = PdfReader(BytesIO(as_pdf(case.page, paper)))
        assert len(found.pages) <= 4
        box = found.pages[0].mediabox
        assert (float(box.width), float(box.height)) == pytest.approx(size, abs=0.1)
        root: Any = found.trailer["/Root"]
        assert root["/MarkInfo"]["/Marked"]
        assert "/StructTreeRoot" in root
        assert root["/Lang"] == "en"
        assert found.metadata is not None
        assert found.metadata.title == case.page.title
        assert found.metadata.creation_date is not None
        assert found.metadata.creation_date.date() == DAY
        first = found.pages[0].extract_text()
        assert bare(telling.headline(case.sheet)) in bare(first)
        assert bare("Name and signature") in bare(first)


def test_a_long_word_may_break_in_a_pdf(attacked: Case) -> None:
    words_in_it = re.findall(r"[^\s\u200b]+", "\n".join(pdf._texts(pdf._data(attacked.page, "a4")["blocks"])))
    assert max(map(len, words_in_it)) <= 24
    assert "capacitor.voltage" in words_in_it  # what fits stays whole, so that it can be searched for


def test_letters_that_the_font_does_not_have_are_told(one: Case, attacked: Case) -> None:
    assert not pdf.lacks_letters(one.page)
    assert not pdf.lacks_letters(attacked.page)  # Hebrew it has
    foreign = Page.of("\u6e2f", "2026-05-04", "\u6e2f", (Paragraph("\u6e2f"),))
    assert pdf.lacks_letters(foreign)
    assert as_pdf(foreign).startswith(b"%PDF")


def test_the_same_page_is_the_same_file(one: Case) -> None:
    assert as_pdf(one.page) == as_pdf(one.page)


def test_without_the_typesetter_a_pdf_is_refused_with_a_way_out(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(pdf, "find_spec", {}.get)
    with pytest.raises(CommandError, match=r"magsafe\[pdf\].*\n.*\.html"):
        _file(str(tmp_path / "sheet.pdf"), None, "", replace=False)


# The command -----------------------------------------------------------------------------------------------


def logsheet(*arguments: str, **changes: Any) -> subprocess.CompletedProcess[str]:
    return run("logsheet", "-", *arguments, given=file_of(plain_tree(**changes)))


def names_in(folder: Path) -> list[str]:
    return sorted(each.name for each in folder.iterdir())


@pytest.mark.parametrize("ending", ["html", "md", "json", "pdf"])
def test_two_runs_give_the_same_bytes(tmp_path: Path, ending: str) -> None:
    files = [tmp_path / f"{name}.{ending}" for name in ("one", "two")]
    for file in files:
        done = logsheet("-o", str(file), "--date", "2026-05-04", transmission__0__name="café, 40 m")
        assert done.returncode == 3
        assert done.stdout == ""
    assert files[0].read_bytes() == files[1].read_bytes()
    assert names_in(tmp_path) == [f"one.{ending}", f"two.{ending}"]
    if ending == "json":
        made = json.loads(files[0].read_text(encoding="utf-8"))
        assert made["date"] == "2026-05-04"
        assert made == json.loads(
            magsafe.check(parse_design(made["design"]["text"].encode(), "<stdin>"), DAY).to_json()
        )


@pytest.mark.parametrize(
    ("changes", "options", "status", "verdict"),
    [
        ({"capacitor__rated_voltage": "2 kV"}, (), 1, "stop"),
        ({}, (), 3, "unproven"),
    ],
)
def test_the_file_is_written_whatever_the_verdict(
    tmp_path: Path, changes: dict[str, Any], options: tuple[str, ...], status: int, verdict: str
) -> None:
    file = tmp_path / "sheet.md"
    done = logsheet("-o", str(file), *options, **changes)
    assert done.returncode == status
    assert verdict in done.stderr
    assert f"**{'■' if verdict == 'stop' else '◆'} {verdict}**" in file.read_text(encoding="utf-8")


def test_narrow_leaves_with_four_where_that_is_asked(tmp_path: Path) -> None:
    sample = str(SAMPLES / "quay_rail.toml")
    assert run("logsheet", sample, "-o", str(tmp_path / "b.json"), "--strict").returncode == 4


def test_a_file_that_exists_is_replaced_only_when_asked(tmp_path: Path) -> None:
    file = tmp_path / "sheet.json"
    file.write_text("mine", encoding="utf-8")
    done = logsheet("-o", str(file))
    assert done.returncode == 2
    assert "--replace" in done.stderr
    assert file.read_text(encoding="utf-8") == "mine"
    assert logsheet("-o", str(file), "--replace").returncode == 3
    assert json.loads(file.read_text(encoding="utf-8"))["schema"] == "magsafe.sheet/1"
    assert names_in(tmp_path) == ["sheet.json"]


@pytest.mark.parametrize(
    ("options", "told"),
    [
        (("-o", "sheet.txt"), ".html, .pdf, .md, .json"),
        (("-o", "none/sheet.html"), "make the directory"),
        (("-o", "sheet.md", "--paper", "a4"), "--paper"),
        (("-o", "sheet.json", "--remarks", "x"), "--remarks"),
        (("-o", "sheet.html", "--remarks", "x" * 801), "801 letters"),
        (("-o", "sheet.html", "--date", "4 May 2026"), "YYYY-MM-DD"),
        (("-o", "sheet.html", "--date", "20260504"), "YYYY-MM-DD"),
        (("-o", "sheet.html", "--date", "2026-02-30"), "YYYY-MM-DD"),
        ((), "--output"),
    ],
)
def test_what_cannot_be_carried_out_is_told_and_leaves_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, options: tuple[str, ...], told: str
) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("PYTHONPATH", str(Path(magsafe.__file__).parents[1]))
    done = run("logsheet", "-", *options, given=b"no design")
    assert done.returncode == 2
    assert told in done.stderr
    assert "Traceback" not in done.stderr
    assert names_in(tmp_path) == []


def test_a_design_that_cannot_be_used_leaves_no_file(tmp_path: Path) -> None:
    done = logsheet("-o", str(tmp_path / "sheet.html"), loop__diameter="1")
    assert done.returncode == 2
    assert names_in(tmp_path) == []


@pytest.mark.parametrize("name", ["a\u202eb", "a\u0007b", "a\u200fb"])
def test_a_name_that_turns_the_line_round_is_refused(name: str) -> None:
    with pytest.raises(DesignError, match=r"station\.name"):
        parse_design(file_of(plain_tree(station={"name": name})), "plain.toml")


def test_remarks_stand_in_their_box(quay: Case) -> None:
    page = _page(quay.design, quay.sheet, quay.points, "Seen by the harbour master\non Monday")
    box = next(block for block in page.blocks if isinstance(block, Boxes))
    assert box.texts[box.names.index("Remarks")] == "Seen by the harbour master on Monday"
