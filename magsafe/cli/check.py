"""`magsafe check`: the main job, and a picture of where the power goes."""

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import AsJson, DesignPath, Strict, exit_status, load, reader_may_leave, write

if TYPE_CHECKING:
    from magsafe.checks.sheet import Sheet
    from magsafe.design.model import Design

PatternPath = Annotated[
    str | None,
    typer.Option("--pattern", metavar="FILE", help="Write the elevation pattern, as .svg or .png, by its ending."),
]
Transmission = Annotated[
    str | None,
    typer.Option("--transmission", metavar="NAME", help="The transmission that --pattern draws; else the first."),
]
Replace = Annotated[bool, typer.Option("--replace", help="Let --pattern replace a file that exists.")]


def check(
    design: DesignPath,
    as_json: AsJson = False,
    strict: Strict = False,
    pattern: PatternPath = None,
    transmission: Transmission = None,
    replace: Replace = False,
) -> None:
    """Every figure, every finding, the verdict, and the highest power at which all is clear.

    Leaves with 0 (clear or narrow), 1 (stop), 3 (unproven), 4 (narrow, with --strict) or 2 (the design or the file of
    --pattern cannot be used).
    """
    file = _file(pattern, transmission, replace=replace)
    import magsafe  # noqa: PLC0415  (keeps --help quick)

    read = load(design)
    index = _index(read, transmission)
    if file is not None:
        _require_ground(read)
    sheet = magsafe.check(read)
    if file is not None:
        _draw(sheet, index, file, replace=replace)
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.terminal import show_sheet  # noqa: PLC0415

        with reader_may_leave():
            show_sheet(sheet)
    raise typer.Exit(exit_status(sheet.verdict, strict))


def _file(pattern: str | None, transmission: str | None, *, replace: bool) -> Path | None:
    """Return the file of the pattern; raise CommandError where the options cannot be carried out."""
    from magsafe.errors import CommandError  # noqa: PLC0415

    if pattern is None:
        for option, given in (("--transmission", transmission is not None), ("--replace", replace)):
            if given:
                raise CommandError(
                    option, "no --pattern beside it", "a picture to draw", "add --pattern FILE, or leave it out"
                )
        return None
    from magsafe.cli.saving import picture_file  # noqa: PLC0415

    return picture_file("--pattern", pattern, replace=replace)


def _index(design: "Design", transmission: str | None) -> int:
    """Return the transmission of a name, the first where none is named."""
    if transmission is None:
        return 0
    if transmission in design.titles:
        return design.titles.index(transmission)
    from magsafe.errors import CommandError  # noqa: PLC0415

    known = ", ".join(repr(title) for title in design.titles)
    raise CommandError("--transmission", repr(transmission), f"one of {known}", "name one of these, or leave it out")


def _require_ground(design: "Design") -> None:
    """Raise CommandError where a design does not state what a pattern needs; told before long computing starts."""
    from magsafe.errors import CommandError  # noqa: PLC0415

    stated = (
        ("site.ground", design.site.ground, 'site.ground, such as "average"'),
        ("loop.centre_height", design.loop.centre_height, 'loop.centre_height, such as "2 m"'),
    )
    missing = [(key, example) for key, value, example in stated if value is None]
    if missing:
        raise CommandError(
            "--pattern",
            f"a design without {' and '.join(key for key, _ in missing)}",
            "a loop at a height that is stated, over a ground that is stated",
            f"state {' and '.join(example for _, example in missing)}",
        )


def _draw(sheet: "Sheet", index: int, path: Path, *, replace: bool) -> None:
    """Write the pattern of a transmission; raise CommandError where it has none."""
    from magsafe import words  # noqa: PLC0415
    from magsafe.__main__ import say  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.errors import CommandError  # noqa: PLC0415
    from magsafe.reports.elevation import elevation_dots, elevation_figure, lacks_letters  # noqa: PLC0415

    point = sheet.operating_points[index]
    if point.pattern is None:
        raise CommandError(
            "--pattern",
            f"{words.short(point.name)}, whose pattern is not known",
            "a loop within what is computed, over a ground",
            'see its findings, and write site.ground = "average" or the like where it is "none"',
        )
    as_dots = path.suffix.lower() == ".png"
    data = elevation_dots(sheet, index) if as_dots else elevation_figure(sheet, index).encode("utf-8")
    save("--pattern", path, data, replace=replace)
    note = " It has no letters for some of the names; .svg has them." if as_dots and lacks_letters(sheet, index) else ""
    say(f"The pattern of {words.short(point.name)} is in {path}.{note}\n")
