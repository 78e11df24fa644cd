"""`magsafe logsheet`: the dated safety summary for the station log, in a file."""

from collections.abc import Callable, Sequence
from datetime import date
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import DesignPath, Strict, exit_status, load

if TYPE_CHECKING:
    from magsafe.analysis.operating_point import OperatingPoint
    from magsafe.checks.sheet import Sheet
    from magsafe.design.model import Design
    from magsafe.reports.page import Page


class Paper(StrEnum):
    """The sheets of paper that there are margins for."""

    a4 = "a4"
    letter = "letter"


Output = Annotated[
    str, typer.Option("--output", "-o", metavar="FILE", help="The file: .html, .pdf, .md or .json, by its ending.")
]
OnPaper = Annotated[
    Paper | None, typer.Option("--paper", help="The paper of .html and .pdf; A4 for .pdf where it is not given.")
]
Dated = Annotated[
    str | None, typer.Option("--date", metavar="YYYY-MM-DD", help="The date on the sheet; today where it is not given.")
]
Remarks = Annotated[str, typer.Option("--remarks", metavar="TEXT", help="What goes into the box for remarks.")]
Replace = Annotated[bool, typer.Option("--replace", help="Replace a file that exists.")]

ENDINGS = (".html", ".pdf", ".md", ".json")
MOST_REMARKS = 800  # letters that the box holds


def logsheet(
    design: DesignPath,
    output: Output,
    paper: OnPaper = None,
    on: Dated = None,
    remarks: Remarks = "",
    replace: Replace = False,
    strict: Strict = False,
) -> None:
    """Write the dated safety summary for the station log.

    Leaves with 0 (clear or narrow), 1 (stop), 3 (unproven), 4 (narrow, with --strict) or 2 (the design or the file
    cannot be used). The file is written whatever the verdict.
    """
    path, day = _file(output, paper, remarks, replace=replace), _date(on)
    from magsafe.__main__ import say  # noqa: PLC0415  (keeps --help quick)
    from magsafe.analysis.operating_point import operating_points  # noqa: PLC0415
    from magsafe.checks.run import check  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415

    read = load(design)
    points = operating_points(read)
    sheet = check(read, day, points)
    data, note = _made(path, paper, sheet, lambda: _page(read, sheet, points, remarks))
    save("--output", path, data, replace=replace)
    say(f"The sheet is in {path}: {sheet.verdict}.{note}\n")
    raise typer.Exit(exit_status(sheet.verdict, strict))


def _file(output: str, paper: Paper | None, remarks: str, *, replace: bool) -> Path:
    """Return the file; raise CommandError where it, or what goes with it, cannot be used."""
    from magsafe.cli.saving import require_writable  # noqa: PLC0415
    from magsafe.errors import CommandError  # noqa: PLC0415

    path = Path(output)
    ending = path.suffix.lower()
    if ending not in ENDINGS:
        raise CommandError("--output", repr(output), f"a name that ends in {', '.join(ENDINGS)}", "write .html")
    if paper is not None and ending not in (".html", ".pdf"):
        raise CommandError("--paper", f"{paper} for a {ending} file", "--paper with .html or .pdf", "leave it out")
    if remarks and ending == ".json":
        raise CommandError("--remarks", "a .json file", "--remarks with .html, .pdf or .md", "leave it out")
    if len(remarks) > MOST_REMARKS:
        found = f"{len(remarks)} letters"
        raise CommandError(
            "--remarks", found, f"at most {MOST_REMARKS} letters", "write the rest by hand, or shorten it"
        )
    if ending == ".pdf":
        from magsafe.reports.pdf import require_pdf  # noqa: PLC0415

        require_pdf()
    require_writable("--output", path, replace=replace)
    return path


def _date(on: str | None) -> date | None:
    from magsafe.errors import CommandError  # noqa: PLC0415

    if on is None:
        return None
    try:
        day = date.fromisoformat(on)
    except ValueError:
        day = None
    if day is None or on != day.isoformat():
        raise CommandError("--date", repr(on), "a day as YYYY-MM-DD", "write 2026-05-04")
    return day


def _made(path: Path, paper: Paper | None, sheet: "Sheet", make_page: "Callable[[], Page]") -> tuple[bytes, str]:
    """Return what goes into the file, and what is to be told of it."""
    ending = path.suffix.lower()
    if ending == ".json":
        return f"{sheet.to_json()}\n".encode(), ""
    page = make_page()
    if ending == ".md":
        from magsafe.reports.markdown import as_markdown  # noqa: PLC0415

        return as_markdown(page).encode("utf-8"), ""
    if ending == ".html":
        from magsafe.reports.html import as_html  # noqa: PLC0415

        return as_html(page, None if paper is None else paper.value).encode("utf-8"), ""
    from magsafe.reports.pdf import as_pdf, lacks_letters  # noqa: PLC0415

    note = " It has no letters for some of the names; .html has them." if lacks_letters(page) else ""
    return as_pdf(page, (paper or Paper.a4).value), note


def _page(design: "Design", sheet: "Sheet", points: "Sequence[OperatingPoint]", remarks: str) -> "Page":
    from magsafe.checks.first_keydown import first_keydown  # noqa: PLC0415
    from magsafe.checks.keepout import keepout  # noqa: PLC0415
    from magsafe.cli.keepout import fields_about  # noqa: PLC0415
    from magsafe.reports.sheet_page import page_of  # noqa: PLC0415

    index, fields = fields_about(design, keepout(sheet), points)
    procedures = first_keydown(design, sheet, points)
    return page_of(sheet, design, procedures, index=index, fields=fields, remarks=remarks)
