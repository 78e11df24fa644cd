"""`magsafe keepout`: where people must not be, as tables, as a plan in characters, as a map and a sign in files."""

from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import AsJson, DesignPath, exit_status, load, reader_may_leave, write

if TYPE_CHECKING:
    from magsafe.analysis.field_map import FieldMap
    from magsafe.analysis.operating_point import OperatingPoint
    from magsafe.checks.sheet import KeepoutSheet
    from magsafe.design.model import Design

MapPath = Annotated[
    str | None, typer.Option("--map", metavar="FILE", help="Write a map to scale, as .svg or .png, by its ending.")
]
SignPath = Annotated[
    str | None,
    typer.Option("--sign", metavar="FILE", help="Write a fence sign and a pocket card for A4, as .svg or .png."),
]
Plan = Annotated[bool, typer.Option("--plan", help="Print a plan in characters beneath the tables.")]
Replace = Annotated[
    bool,
    typer.Option("--replace", "--force", help="Let --map and --sign replace files that exist; --force is the same."),
]


def keepout(
    design: DesignPath,
    as_json: AsJson = False,
    to: MapPath = None,
    sign: SignPath = None,
    plan: Plan = False,
    replace: Replace = False,
) -> None:
    """Where people must not be: distances by rule, tier and direction, and each place.

    Leaves by the exposure findings alone: 0 (clear or narrow), 1 (stop), 3 (unproven) or 2 (the design or a file of
    --map or --sign cannot be used).
    """
    map_file, sign_file = _files(to, sign, as_json=as_json, plan=plan, replace=replace)
    import magsafe  # noqa: PLC0415  (keeps --help quick)
    from magsafe.checks.keepout import keepout as of_people  # noqa: PLC0415

    read = load(design)
    whole = magsafe.check(read)
    sheet = of_people(whole)
    index, made = fields_about(read, sheet) if map_file is not None or plan else (0, None)
    drawn: list[_Drawn] = []
    if map_file is not None:
        from magsafe.reports.pictures import keepout_map  # noqa: PLC0415

        drawn.append(("--map", map_file, "map", lambda: keepout_map(sheet, read, index, made)))
    if sign_file is not None:
        from magsafe.reports.sign import fence_sign  # noqa: PLC0415

        drawn.append(("--sign", sign_file, "sign", lambda: fence_sign(whole, sheet, read)))
    _save(drawn, replace=replace)
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.terminal import show_keepout  # noqa: PLC0415

        with reader_may_leave():
            show_keepout(sheet)
            if plan:
                from magsafe.reports.character_plan import show_plan  # noqa: PLC0415

                show_plan(sheet, read, index, made)
    raise typer.Exit(exit_status(sheet.verdict))


_Drawn = tuple[str, Path, str, Callable[[], str]]  # the option, its file, what it is called, what makes it as SVG


def _files(
    to: str | None, sign: str | None, *, as_json: bool, plan: bool, replace: bool
) -> tuple[Path | None, Path | None]:
    """Return the files of map and sign; raise CommandError where the options cannot be carried out."""
    from magsafe.errors import CommandError  # noqa: PLC0415

    if as_json and plan:
        raise CommandError(
            "--plan", "--json beside it", "one of the two", "leave one out; --map and --sign go with both"
        )
    if replace and to is None and sign is None:
        raise CommandError(
            "--replace",
            "no --map and no --sign beside it",
            "a file to replace",
            "add --map FILE or --sign FILE, or leave it out",
        )
    map_file, sign_file = _target("--map", to, replace=replace), _target("--sign", sign, replace=replace)
    if map_file is not None and sign_file is not None and map_file.resolve() == sign_file.resolve():
        raise CommandError("--sign", f"{sign_file}, the file of --map too", "a file of its own", "name another file")
    return map_file, sign_file


def _target(option: str, to: str | None, *, replace: bool) -> Path | None:
    """Return the file that an option names; raise CommandError where it cannot be written."""
    from magsafe.cli.saving import picture_file  # noqa: PLC0415

    if to is None:
        return None
    if to.lower().endswith(".png"):
        from magsafe.reports.png import require_png  # noqa: PLC0415

        require_png(option)
    return picture_file(option, to, replace=replace)


def fields_about(
    design: "Design", sheet: "KeepoutSheet", points: "Sequence[OperatingPoint] | None" = None
) -> "tuple[int, FieldMap | None]":
    """Return the transmission that is drawn and the fields about its loop; None where none are known.

    `points` are the design's transmissions, where they are at hand.
    """
    from magsafe.analysis.field_map import field_map  # noqa: PLC0415
    from magsafe.analysis.operating_point import operating_point  # noqa: PLC0415
    from magsafe.cli.progress import Bar  # noqa: PLC0415
    from magsafe.reports.map_words import farthest_of, shown_transmission  # noqa: PLC0415

    index = shown_transmission(sheet)
    point = operating_point(design, design.transmission[index]) if points is None else points[index]
    if point.out_of_range:
        return index, None
    with Bar("Fields about the loop") as bar:
        return index, field_map(design, point, farthest_of(sheet.operating_points[index]), bar)


def _save(drawn: list[_Drawn], *, replace: bool) -> None:
    """Draw all pictures, then write them, so that one that cannot be drawn leaves no other behind."""
    from magsafe.__main__ import say  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.reports.png import as_png, lacks_letters  # noqa: PLC0415

    made = []
    for option, path, what, draw in drawn:
        svg, as_dots = draw(), path.suffix.lower() == ".png"
        note = " It has no letters for some of the names; .svg has them." if as_dots and lacks_letters(svg) else ""
        made.append((option, path, f"The {what} is in {path}.{note}", as_png(svg) if as_dots else svg.encode("utf-8")))
    for option, path, told, data in made:
        save(option, path, data, replace=replace)
        say(f"{told}\n")
