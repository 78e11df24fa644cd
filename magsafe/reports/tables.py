"""The tables that the project knows, on a terminal: materials and bands."""

from rich.console import Console
from rich.table import Table

from magsafe import words
from magsafe.design import tables
from magsafe.reports.terminal import console_on_output, is_plain, put


def show_materials(console: Console | None = None) -> None:
    """Print the material table with its sources."""
    console = console or console_on_output()
    table = _table("material", "MS/m at 20 degC", "scatter", "per K", "source")
    for row in tables.materials().values():
        table.add_row(
            row.name,
            words.number(row.conductivity, "S/m", "MS/m"),
            f"{100 * row.scatter:.3g} %",
            f"{row.coefficient:.5f}",
            f"{row.source} ({row.provenance})",
        )
    put(console, table)


def show_bands(console: Console | None = None) -> None:
    """Print the band table with its source."""
    console = console or console_on_output()
    table = _table("band", *(f"Region {region}, MHz" for region in tables.REGIONS))
    dash = "-" if is_plain(console) else "–"
    for band in tables.bands():
        table.add_row(band.name, *(f"{low / 1e6:.6g}{dash}{high / 1e6:.6g}" for low, high in band.regions))
    put(console, table)
    first = tables.bands()[0]
    put(
        console,
        f"\nSource: {first.source} ({first.provenance}). National rules are narrower or wider, and decide.",
    )


def _table(*columns: str) -> Table:
    table = Table(box=None, pad_edge=False, padding=(0, 1), show_edge=False)
    for column in columns:
        table.add_column(column, overflow="fold")
    return table
