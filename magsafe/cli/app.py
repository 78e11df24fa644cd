"""The command line: one module for each command, gathered here."""

import sys
from collections.abc import Sequence

import typer

from magsafe.cli import capacitor, check, draft, explain, keepout, logsheet, measured, recheck, schema, tables

app = typer.Typer(
    name="magsafe",
    help="Before the first key-down of a transmitting magnetic loop: will it stand the power, how much radiates, "
    "where may people be.",
    no_args_is_help=True,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    context_settings={"help_option_names": ["-h", "--help"]},
)
app.command("check")(check.check)
app.command("capacitor")(capacitor.capacitor)
app.command("keepout")(keepout.keepout)
app.command("logsheet")(logsheet.logsheet)
app.command("recheck")(recheck.recheck)
app.command("measured")(measured.measured)
app.command("draft")(draft.draft)
app.command("rules")(tables.rules)
app.command("materials")(tables.materials)
app.command("bands")(tables.bands)
app.command("explain")(explain.explain)
app.command("schema")(schema.schema)


@app.callback()
def _common(
    version: bool = typer.Option(False, "--version", help="Print the version and leave."),
    debug: bool = typer.Option(False, "--debug", help="Show the trace of a fault of the program."),
) -> None:
    del (
        version,
        debug,
    )  # both are answered before typer is asked; here they are only named for --help


def run(arguments: Sequence[str]) -> None:
    """Run one command; what the user can put right is told on standard error and leaves with 2."""
    from magsafe.__main__ import say  # noqa: PLC0415  (kept beside the commands' own lazy imports)
    from magsafe.errors import MagsafeError  # noqa: PLC0415

    try:
        app(args=list(arguments), prog_name="magsafe")
    except MagsafeError as error:
        say(f"{error}\n")
        sys.exit(2)
