"""The tables that the project knows, on a terminal: materials and grounds, bands."""

from rich.console import Console
from rich.table import Table

from magsafe import words
from magsafe.design import tables
from magsafe.reports.terminal import console_on_output, is_plain, put
from magsafe.spread import Spread
from magsafe.units import significant


def show_materials(console: Console | None = None) -> None:
    """Print the tables of conductor materials and of grounds with their sources."""
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
    put(console, table, "", _grounds())


def _grounds() -> Table:
    table = _table("ground", "mS/m", "permittivity", "source")
    for soil in tables.soils().values():
        table.add_row(
            soil.name, _span(soil.conductivity, 1e3), _span(soil.permittivity), f"{soil.source} ({soil.provenance})"
        )
    return table


def _span(spread: Spread, scale: float = 1.0) -> str:
    low, likely, high = (significant(scale * (each or 0.0)) for each in (spread.low, spread.likely, spread.high))
    return f"{likely} ({low} to {high})"


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
