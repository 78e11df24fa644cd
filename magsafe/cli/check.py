"""`magsafe check`: the main job."""

import typer

from magsafe.cli.common import AsJson, DesignPath, Strict, exit_status, load, reader_may_leave, write


def check(design: DesignPath, as_json: AsJson = False, strict: Strict = False) -> None:
    """Every figure, every finding, the verdict, and the highest power at which all is clear.

    Leaves with 0 (clear or narrow), 1 (stop), 3 (unproven), 4 (narrow, with --strict) or 2 (the design cannot be
    used).
    """
    import magsafe  # noqa: PLC0415  (keeps --help quick)

    sheet = magsafe.check(load(design))
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.terminal import show_sheet  # noqa: PLC0415

        with reader_may_leave():
            show_sheet(sheet)
    raise typer.Exit(exit_status(sheet.verdict, strict))
