"""A measurement on a terminal: what it means first, then what was read, then computed and measured side by side."""

from collections.abc import Iterator

from rich.console import Console, Group, RenderableType
from rich.text import Text

from magsafe import words
from magsafe.checks.measured_sheet import MeasuredSheet
from magsafe.checks.sheet import FigureRecord, PowerCeiling, Value
from magsafe.reports import telling
from magsafe.reports.terminal import Speaker, console_on_output, is_plain, put
from magsafe.spread import Spread
from magsafe.units import significant

_FIRST = 32  # columns of the first column
_ROWS = {row.figure: row for row in telling.ROWS}


def show_measured(sheet: MeasuredSheet, *, saved: bool = False, console: Console | None = None) -> None:
    """Print what a measurement says."""
    console = console or console_on_output()
    say = Speaker(console.width, is_plain(console))
    put(console, Group(*_render(sheet, say, saved=saved)))


def _render(sheet: MeasuredSheet, say: Speaker, *, saved: bool) -> Iterator[RenderableType]:
    yield say.item(sheet.verdict, headline(sheet), bold=True)
    yield say.paragraph(ceiling(sheet), indent=13)
    yield Text("")
    yield say.paragraph(
        f"{sheet.design.name}, {words.short(sheet.transmission)}, {words.watts(sheet.power)} PEP; measured "
        f"{sheet.date}, magsafe {sheet.magsafe}",
        "dim",
    )
    for finding in sheet.findings:
        yield Text("")
        yield say.paragraph(f"{finding.because}.")
        if finding.do != "nothing":
            yield say.paragraph(f"Do: {finding.do}.")
    yield from say.heading("What was read")
    yield say.grid(("", "likely", "95 %"), list(_read(sheet)), first=_FIRST)
    yield from say.heading("Computed from the parts, and with the measured Q")
    yield say.grid(("", "computed", "measured"), list(_beside(sheet)), first=_FIRST)
    yield say.paragraph(
        "Each likely value with its ends; for volts and amps the upper end of the measured Q counts.", "dim"
    )
    if sheet.notes:
        yield from say.list_of("About the reading", sheet.notes)
    if not saved:
        yield Text("")
        yield say.paragraph(
            "Add --save to write this into the design; magsafe check then counts it until loop, height or ground "
            "change."
        )
    yield from say.list_of("Cautions", sheet.cautions)


def headline(sheet: MeasuredSheet) -> str:
    """Return what the measurement means for the hand on the key."""
    return {
        "stop": "Do not key this loop: its Q is higher than its parts can make it, and so are the volts.",
        "unproven": "What heats this loop is not proven: its Q is lower than its parts make it, or cannot be judged.",
        "narrow": "The loop as measured is the loop as computed, but not with all that was asked.",
        "clear": "The loop as measured is the loop as computed, within the uncertainty of both.",
    }[sheet.verdict]


def ceiling(sheet: MeasuredSheet) -> str:
    """Return the highest power with the measured Q, and what it was without."""
    with_q, without = (_power(each) for each in (sheet.power_ceiling.measured, sheet.power_ceiling.computed))
    return f"With the measured Q {with_q}; from the parts alone {without}. magsafe check judges it all."


def _power(made: PowerCeiling) -> str:
    if made.value is None:
        return "no highest power can be named"
    if made.value == 0.0:
        return f"no power is clear, by {made.held_by}"
    most = "" if made.complete else "at most "
    return f"{most}{words.power(made.value)}, held by {made.held_by}"


def _read(sheet: MeasuredSheet) -> Iterator[tuple[str, str, str]]:
    reading = sheet.reading
    if reading.file is not None:
        name = words.short(reading.file.name, 25)
        yield f"Sweep {name}", f"{reading.file.points} points", f"on {reading.file.reference_impedance:g} Ω"
    else:
        yield "Read by", reading.by, ""
    yield "Resonance, MHz", f"{(reading.resonance.likely or 0.0) / 1e6:.6f}", _megahertz(reading.resonance)
    for branch in reading.branches:
        yield f"Unloaded Q, if {branch.coupled}", *_both(branch.unloaded_q, "1", "")
    yield "Unloaded Q", *_both(reading.unloaded_q, "1", "")
    if reading.loaded_q is not None:
        yield "Loaded Q", *_both(reading.loaded_q, "1", "")
    if reading.coupling is not None:
        way = "over" if (reading.coupling.likely or 0.0) > 1.0 else "under"
        yield f"Coupling, {way}coupled", *_both(reading.coupling, "1", "")
    yield "Line loss unfolded, dB", *_both(reading.line_loss, "dB", "dB")
    if reading.points_in_band is not None:
        yield "Points between half power", str(reading.points_in_band), ""
    if reading.residual is not None:
        yield "Off the circle, % of full scale", significant(100.0 * reading.residual), ""
    if reading.noise is not None and reading.systematic is not None:
        yield (
            "Q may be higher by, %",
            "",
            f"{significant(100.0 * reading.noise)} noise, {significant(100.0 * reading.systematic)} instrument",
        )


def _both(value: Value, si: str, unit: str) -> tuple[str, str]:
    """Return the likely value, and both ends."""
    likely = "" if value.likely is None else words.number(value.likely, si, unit)
    ends = ["open" if end is None else words.number(end, si, unit) for end in (value.low, value.high)]
    return likely, f"{ends[0]} {words.LIKELY_ABOUT} {ends[1]}"


def _megahertz(value: Value) -> str:
    ends = [f"{(end or 0.0) / 1e6:.6f}" for end in (value.low, value.high)]
    return f"{ends[0]} {words.LIKELY_ABOUT} {ends[1]}"


def _beside(sheet: MeasuredSheet) -> Iterator[tuple[str, str, str]]:
    for name, each in sheet.figures.items():
        row = _ROWS[name]
        yield row.label, _figure(each.computed, row), _figure(each.measured, row)


def _figure(figure: FigureRecord, row: telling.Row) -> str:
    spread = Spread(figure.low, figure.likely, figure.high)
    if not spread.known:
        return "-"
    likely = "" if spread.likely is None else words.number(spread.likely, row.si, row.unit)
    return f"{likely} {words.ends(spread, row.si, row.unit)}".strip()
