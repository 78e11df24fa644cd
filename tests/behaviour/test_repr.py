"""What a notebook shows of a sheet and a design: short as text, escaped as HTML."""

from datetime import date
from html.parser import HTMLParser
from typing import Any

import pytest
from designs import MakeDesign, file_of, plain_tree

import magsafe
from magsafe import Sheet
from magsafe.checks.notebook import as_html

ALLOWED = {"section", "h3", "h4", "p", "table", "thead", "tbody", "tr", "th", "td", "ul", "li"}
HOSTILE = "<script>alert(1)</script>&\"'><img src=x onerror=y>"


class Page(HTMLParser):
    """Collects tags, attributes, texts, and what is left open."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.tags: set[str] = set()
        self.attributes: set[tuple[str, str | None]] = set()
        self.open: list[str] = []
        self.texts: list[str] = []
        self.feed(page)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        self.attributes.update(attrs)
        self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        self.texts.append(data)

    @property
    def text(self) -> str:
        return "\n".join(self.texts)


def sheet_of(design: MakeDesign, **changes: Any) -> Sheet:
    return magsafe.check(design(**changes), date(2026, 5, 4))


def test_a_sheet_is_one_line(design: MakeDesign) -> None:
    sheet = sheet_of(design, capacitor__rated_voltage="2 kV")
    assert repr(sheet).startswith("<Sheet 'plain.toml': stop; ")
    assert "capacitor.voltage" in repr(sheet)
    assert "\n" not in repr(sheet)
    assert str(sheet) == repr(sheet)


def with_ceiling(sheet: Sheet, **changes: Any) -> Sheet:
    return sheet.model_copy(update={"power_ceiling": sheet.power_ceiling.model_copy(update=changes)})


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"value": None}, "no highest power can be named"),
        ({"value": 0.0, "held_by": "loop.size"}, "no power is clear, by loop.size"),
        (
            {"value": 23.9, "held_by": "a.b", "left_out": ("a.b",), "complete": False},
            "no power is proven, more than 23 W",
        ),
        ({"value": 23.9, "held_by": "a.b", "left_out": ("c.d",), "complete": False}, "unproven in part, at most 23 W"),
        ({"value": 23.9, "held_by": "a.b", "left_out": (), "complete": True}, "clear up to 23 W, held by a.b"),
    ],
)
def test_a_line_tells_no_more_power_than_the_ceiling(design: MakeDesign, changes: dict[str, Any], said: str) -> None:
    assert said in repr(with_ceiling(sheet_of(design), **changes))


def test_a_design_is_one_line(design: MakeDesign) -> None:
    assert repr(design()) == "<Design 'plain.toml': circle, vacuum variable; 7.1 MHz>"
    many = [{"frequency": f"{7 + i / 100:g} MHz", "power": "1 W"} for i in range(6)]
    assert repr(design(transmission=many)).endswith("7 MHz, 7.01 MHz, 7.02 MHz, 7.03 MHz and 2 more>")
    assert str(design()) == repr(design())


def hostile() -> Sheet:
    tree = plain_tree(
        transmission__0__name=HOSTILE,
        site__rules=["us-fcc"],
        site__ground="none",
        loop__centre_height="2 m",
        loop__joint=[{"name": HOSTILE, "kind": "bolted lug", "at": "capacitor"}],
        place=[{"name": HOSTILE, "who": "public", "along_axis": "3 m", "in_plane": "0 m", "posture": "standing"}],
    )
    return magsafe.check(magsafe.parse_design(file_of(tree), f"{HOSTILE}.toml"))


def test_hostile_names_are_text_and_nothing_else() -> None:
    sheet = hostile()
    page = Page(as_html(sheet))
    assert page.tags <= ALLOWED
    assert page.attributes == {("style", "text-align:left")}
    assert page.open == []
    assert page.text.count(HOSTILE) >= 4
    assert "<script" not in as_html(sheet)
    assert sheet._repr_html_() == as_html(sheet)


def test_hostile_names_do_not_break_the_line() -> None:
    sheet = hostile()
    bad = "a\x1b[31m\n'" * 50
    sheet = sheet.model_copy(update={"design": sheet.design.model_copy(update={"name": bad})})
    assert repr(sheet).isprintable()
    assert len(repr(sheet)) < 300
    made = magsafe.parse_design(file_of(plain_tree()), bad)
    assert repr(made).isprintable()
    assert len(repr(made)) < 300


def test_a_page_tells_what_stands_in_the_way_first() -> None:
    sheet = hostile()
    text = Page(as_html(sheet)).text
    order = [text.index(word) for word in ("What stands in the way", "Figures", "People: places", "Cautions")]
    assert order == sorted(order)
    assert text.index(sheet.verdict) < order[0]
    for finding in sheet.all_findings():
        if finding.verdict != "clear":
            assert finding.because in text
            assert finding.do in text
    crest = sheet.operating_points[0].figures["capacitor_peak_voltage"].likely or 0.0
    assert f"{crest / 1e3:.2f}" in text


def test_a_figure_without_an_end_says_so(design: MakeDesign) -> None:
    sheet = sheet_of(design, site__ground="average", loop__centre_height="2 m")
    figure = sheet.operating_points[0].figures["capacitor_peak_voltage"]
    assert figure.high is not None
    row = Page(as_html(sheet)).text.split("capacitor peak voltage\n", 1)[1].splitlines()[0]
    low = "?" if figure.low is None else f"{figure.low / 1e3:.2f}"
    assert row == f"{(figure.likely or 0.0) / 1e3:.2f} ({low} to {figure.high / 1e3:.2f}) kV"


def test_a_page_has_an_end() -> None:
    sheet = hostile()
    many = sheet.model_copy(update={"findings": sheet.all_findings() * 100})
    page = as_html(many)
    assert page.count("<tr>") < 1500
    assert "more rows are in the sheet and not shown" in page
