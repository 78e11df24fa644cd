"""`magsafe keepout`: where people must not be."""

import typer

from magsafe.cli.common import AsJson, DesignPath, exit_status, load, reader_may_leave, write


def keepout(design: DesignPath, as_json: AsJson = False) -> None:
    """Where people must not be: distances by rule, tier and direction, and each place.

    Leaves by the exposure findings alone: 0 (clear or narrow), 1 (stop), 3 (unproven) or 2 (the design cannot be used).
    """
    import magsafe  # noqa: PLC0415  (keeps --help quick)
    from magsafe.checks.keepout import keepout as of_people  # noqa: PLC0415

    sheet = of_people(magsafe.check(load(design)))
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.terminal import show_keepout  # noqa: PLC0415

        with reader_may_leave():
            show_keepout(sheet)
    raise typer.Exit(exit_status(sheet.verdict))
