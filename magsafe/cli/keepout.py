"""`magsafe keepout`: where people must not be, as tables, as a plan in characters, as a map in a file."""

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from magsafe.cli.common import AsJson, DesignPath, exit_status, load, reader_may_leave, write

if TYPE_CHECKING:
    from magsafe.analysis.field_map import FieldMap
    from magsafe.checks.sheet import KeepoutSheet
    from magsafe.design.model import Design

MapPath = Annotated[
    str | None, typer.Option("--map", metavar="FILE", help="Write a map to scale, as .svg or .png, by its ending.")
]
Plan = Annotated[bool, typer.Option("--plan", help="Print a plan in characters beneath the tables.")]
Force = Annotated[bool, typer.Option("--force", help="Let --map replace a file that exists.")]


def keepout(
    design: DesignPath, as_json: AsJson = False, to: MapPath = None, plan: Plan = False, force: Force = False
) -> None:
    """Where people must not be: distances by rule, tier and direction, and each place.

    Leaves by the exposure findings alone: 0 (clear or narrow), 1 (stop), 3 (unproven) or 2 (the design or the file of
    --map cannot be used).
    """
    target = _target(to, as_json=as_json, plan=plan, force=force)
    import magsafe  # noqa: PLC0415  (keeps --help quick)
    from magsafe.checks.keepout import keepout as of_people  # noqa: PLC0415

    read = load(design)
    sheet = of_people(magsafe.check(read))
    index, made = _fields(read, sheet) if target is not None or plan else (0, None)
    if target is not None:
        _save_map(target, sheet, read, index, made, force=force)
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


def _target(to: str | None, *, as_json: bool, plan: bool, force: bool) -> Path | None:
    """Return the file of the map; raise CommandError where the options cannot be carried out."""
    from magsafe.errors import CommandError  # noqa: PLC0415

    if as_json and plan:
        raise CommandError("--plan", "--json beside it", "one of the two", "leave one out; --map goes with both")
    if to is None:
        if force:
            raise CommandError("--force", "no --map beside it", "a file to replace", "add --map FILE, or leave it out")
        return None
    path = Path(to)
    if path.suffix.lower() not in (".svg", ".png"):
        raise CommandError("--map", repr(to), "a name that ends in .svg or .png", "write .svg")
    if path.suffix.lower() == ".png":
        from magsafe.reports.png import require_png  # noqa: PLC0415

        require_png()
    from magsafe.cli.saving import require_writable  # noqa: PLC0415

    require_writable("--map", path, force=force)
    return path


def _fields(design: "Design", sheet: "KeepoutSheet") -> "tuple[int, FieldMap | None]":
    """Return the transmission that is drawn and the fields about its loop; None where none are known."""
    from magsafe.analysis.field_map import field_map  # noqa: PLC0415
    from magsafe.analysis.operating_point import operating_point  # noqa: PLC0415
    from magsafe.cli.progress import Bar  # noqa: PLC0415
    from magsafe.reports.map_words import farthest_of, shown_transmission  # noqa: PLC0415

    index = shown_transmission(sheet)
    point = operating_point(design, design.transmission[index])
    if point.out_of_range:
        return index, None
    with Bar("Fields about the loop") as bar:
        return index, field_map(design, point, farthest_of(sheet.operating_points[index]), bar)


def _save_map(
    path: Path, sheet: "KeepoutSheet", design: "Design", index: int, made: "FieldMap | None", *, force: bool
) -> None:
    from magsafe.__main__ import say  # noqa: PLC0415
    from magsafe.cli.saving import save  # noqa: PLC0415
    from magsafe.reports.pictures import keepout_map  # noqa: PLC0415
    from magsafe.reports.png import as_png  # noqa: PLC0415

    svg = keepout_map(sheet, design, index, made)
    save("--map", path, as_png(svg) if path.suffix.lower() == ".png" else svg.encode("utf-8"), force=force)
    say(f"The map is in {path}.\n")
