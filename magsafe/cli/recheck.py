"""`magsafe recheck`: whether a filed sheet still holds."""

import sys
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import AsJson, Strict, exit_status, reader_may_leave, write

if TYPE_CHECKING:
    from magsafe.checks.compare import Source
    from magsafe.checks.filed import Filed
    from magsafe.design.model import Design

First = Annotated[
    str,
    typer.Argument(metavar="SHEET", help="The filed sheet, as magsafe check --json prints it; or a design."),
]
Second = Annotated[
    str | None,
    typer.Argument(metavar="DESIGN", help="What to hold it against, instead of the design in the sheet."),
]


def recheck(first: First, second: Second = None, as_json: AsJson = False, strict: Strict = False) -> None:
    """Does a filed sheet still hold? What changed since, the most dangerous first.

    \b
    magsafe recheck SHEET.json           computes the design in the sheet anew
    magsafe recheck SHEET.json DESIGN    computes DESIGN, held against the sheet
    magsafe recheck OLD.json NEW.json    two sheets as filed, nothing computed
    magsafe recheck OLD.toml NEW.toml    two designs, both computed now

    A file whose name ends in .json, or that begins with a brace, is read as a filed sheet; any other, and - for
    standard input, as a design unless it begins with a brace. The first is what was, the second what is.

    Numbers count as changed where three significant digits tell them apart by more than half a step of the last one;
    distances to people and verdicts, always.

    Leaves by the verdict of the second, however the first read: 0 (clear or narrow), 1 (stop), 3 (unproven), 4 (narrow,
    with --strict) or 2 (a file cannot be used, the sheet was altered, or its design is refused today). Whether the
    sheet holds changes no exit status: --json tells it, in "holds".
    """
    from magsafe.checks.compare import compare  # noqa: PLC0415  (keeps --help quick)

    _check_order(first, second)
    read = _read(first)
    against = None if second is None else _read(second)
    _check_roles(first, second, read, against)
    before = _source(first, read)
    if against is None or second is None:
        after = _source(f"the design in {before.file}", _design_in(read, first))
    else:
        after = _source(second, against)
    unknown = (key for each in (read, against) for key in getattr(each, "unknown", ()))
    found = compare(before, after, tuple(dict.fromkeys(unknown)))
    if as_json:
        write(found.to_json())
    else:
        from magsafe.reports.recheck import show_recheck  # noqa: PLC0415

        with reader_may_leave():
            show_recheck(found, after.sheet)
    raise typer.Exit(exit_status(found.verdict, strict))


def _read(name: str) -> "Filed | Design":
    """Read a filed sheet or a design, whichever the file is."""
    from magsafe.checks.filed import LARGEST_SHEET, bytes_of, is_sheet, parse_sheet  # noqa: PLC0415
    from magsafe.design.reading import parse_design  # noqa: PLC0415

    if name == "-":
        data = b"" if sys.stdin is None else sys.stdin.buffer.read(LARGEST_SHEET + 1)
        return parse_sheet(data, "<stdin>") if is_sheet(name, data) else parse_design(data)
    data = bytes_of(name)
    return parse_sheet(data, name) if is_sheet(name, data) else parse_design(data, Path(name).name)


def _design_in(read: "Filed | Design", name: str) -> "Design":
    from magsafe.checks.filed import Filed, design_in  # noqa: PLC0415

    return design_in(read.sheet, name) if isinstance(read, Filed) else read


def _source(name: str, read: "Filed | Design") -> "Source":
    """Return a sheet as it was filed, or computed now."""
    import magsafe  # noqa: PLC0415
    from magsafe.checks.compare import Source  # noqa: PLC0415
    from magsafe.checks.filed import Filed  # noqa: PLC0415
    from magsafe.design.quantities import printable  # noqa: PLC0415

    told = "<stdin>" if name == "-" else printable(name)
    if isinstance(read, Filed):
        return Source(read.sheet, "filed", told)
    return Source(magsafe.check(read), "computed", told)


def _check_order(first: str, second: str | None) -> None:
    from magsafe.errors import CommandError  # noqa: PLC0415

    if first == second == "-":
        raise CommandError("recheck", "- twice", "one of the two from standard input", "name a file for the other")


def _check_roles(first: str, second: str | None, read: "Filed | Design", against: "Filed | Design | None") -> None:
    """Refuse a design with nothing beside it, or with a filed sheet after it."""
    from magsafe.checks.filed import Filed  # noqa: PLC0415
    from magsafe.design.quantities import printable  # noqa: PLC0415
    from magsafe.errors import CommandError  # noqa: PLC0415

    if isinstance(read, Filed):
        return
    if against is None:
        raise CommandError(
            "recheck",
            f"{printable(first)}, a design, and nothing to hold it against",
            "a filed sheet, or two designs",
            "name the sheet that was filed, or a second design; magsafe check does one design",
        )
    if isinstance(against, Filed):
        raise CommandError(
            "recheck",
            f"the design {printable(first)} before the filed sheet {printable(second or '')}",
            "what was filed first, what is to hold now second",
            f"magsafe recheck {printable(second or '')} {printable(first)}",
        )
