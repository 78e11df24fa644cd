"""`magsafe capacitor`: what the tuning capacitor must be, across all transmissions."""

from typing import Annotated

import typer

from magsafe.cli.common import AsJson, DesignPath, exit_status, load, reader_may_leave, write

AtPower = Annotated[
    str | None,
    typer.Option("--power", metavar="POWER", help='This envelope power on every transmission, such as "100 W".'),
]


def capacitor(design: DesignPath, power: AtPower = None, as_json: AsJson = False) -> None:
    """Size the tuning capacitor: range, volts, amps, air gap, heat, losses; beside it the one that the design has.

    Leaves by the findings about the capacitor alone: 0 (clear or narrow), 1 (stop), 3 (unproven) or 2 (the design or
    the power cannot be used). A full-wave loop, used without a capacitor, leaves with 0: there is none to size.
    """
    watts = None if power is None else _power(power)
    from magsafe.checks.sizing import sizing  # noqa: PLC0415  (keeps --help quick)

    sheet = sizing(load(design), watts)
    if as_json:
        write(sheet.to_json())
    else:
        from magsafe.reports.sizing import show_sizing  # noqa: PLC0415

        with reader_may_leave():
            show_sizing(sheet)
    raise typer.Exit(exit_status(sheet.verdict))


def _power(text: str) -> float:
    """Return the power that was asked for [W]; raise CommandError where it is none."""
    from magsafe.design.quantities import show  # noqa: PLC0415  (keeps --help quick)
    from magsafe.errors import CommandError  # noqa: PLC0415
    from magsafe.units import POWER, QuantityError, read_quantity  # noqa: PLC0415

    try:
        return read_quantity(text, POWER, LEAST_POWER, MOST_POWER)
    except QuantityError as error:
        raise CommandError("--power", show(text), error.expected, error.do) from None


LEAST_POWER, MOST_POWER = 1e-3, 10e3  # W, as in a design file
