"""The sheet for the station log as a real browser prints it; skipped where there is none."""

import re
import shutil
import subprocess
from datetime import date
from io import BytesIO
from pathlib import Path
from typing import Any, Literal

import pytest
from pypdf import PdfReader

import magsafe
from magsafe.analysis.operating_point import operating_points
from magsafe.cli.logsheet import _page
from magsafe.reports.html import as_html
from magsafe.reports.page import Page

SAMPLES = Path(__file__).parents[2] / "sample_designs"
BROWSER = next(filter(None, map(shutil.which, ("chromium", "chromium-browser", "google-chrome"))), None)
A4, LETTER = (595.0, 842.0), (612.0, 792.0)

pytestmark = pytest.mark.skipif(
    BROWSER is None, reason="no Chromium on this machine: the printed page is not looked at"
)


def page_of(sample: str) -> tuple[Page, str]:
    """Return the page of a sample, and its verdict."""
    design = magsafe.read_design(SAMPLES / f"{sample}.toml")
    sheet = magsafe.check(design, date(2026, 5, 4))
    return _page(design, sheet, operating_points(design), ""), sheet.verdict


@pytest.fixture(scope="module")
def one() -> tuple[Page, str]:
    return page_of("lighthouse_gallery")


@pytest.fixture(scope="module")
def two() -> tuple[Page, str]:
    return page_of("quay_rail")


def printed(html: str, folder: Path) -> PdfReader:
    """Return a page as a browser prints it."""
    source, made = folder / "sheet.html", folder / "sheet.pdf"
    source.write_text(html, encoding="utf-8")
    profile = f"--user-data-dir={folder / 'profile'}"
    options = ("--headless", "--no-sandbox", "--disable-gpu", "--no-pdf-header-footer", profile)
    subprocess.run(
        [str(BROWSER), *options, f"--print-to-pdf={made}", source.as_uri()],
        check=True,
        capture_output=True,
        timeout=120,
    )
    return PdfReader(BytesIO(made.read_bytes()))


@pytest.mark.parametrize(("paper", "size"), [("a4", A4), ("letter", LETTER)])
def test_one_transmission_takes_four_pages_of_either_paper(
    tmp_path: Path, one: tuple[Page, str], paper: Literal["a4", "letter"], size: tuple[float, float]
) -> None:
    page, verdict = one
    found = printed(as_html(page, paper), tmp_path)
    assert len(found.pages) <= 4
    box = found.pages[0].mediabox
    assert (float(box.width), float(box.height)) == pytest.approx(size, abs=1.0)
    assert_first_page_is_complete(found, verdict)


def test_the_first_page_of_two_transmissions_is_complete_on_letter(tmp_path: Path, two: tuple[Page, str]) -> None:
    page, verdict = two
    assert_first_page_is_complete(printed(as_html(page, "letter"), tmp_path), verdict)


def assert_first_page_is_complete(found: PdfReader, verdict: str) -> None:
    first = re.sub(r"\s+", " ", found.pages[0].extract_text())
    assert verdict in first
    assert "What stands in the way" in first
    assert "Name and signature" in first
    assert "The design as given" not in first


def test_nothing_is_printed_outside_the_paper(tmp_path: Path, two: tuple[Page, str]) -> None:
    for page in printed(as_html(two[0], "letter"), tmp_path).pages:
        places: list[tuple[float, float]] = []

        def note(text: str, user: Any, line: Any, font: Any, size: float, places: Any = places) -> None:
            if text.strip():
                places.append((user[0] * line[4] + user[4], user[3] * line[5] + user[5]))

        page.extract_text(visitor_text=note)
        assert places
        width, height = float(page.mediabox.width), float(page.mediabox.height)
        assert all(0.0 <= x <= width and 0.0 <= y <= height for x, y in places)
