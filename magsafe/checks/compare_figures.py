"""What differs between the figures of two sheets, and which of it is for the worse."""

from collections.abc import Iterator, Sequence

from magsafe import words
from magsafe.checks.comparison import Change, Direction, differ, factor, toward
from magsafe.checks.sheet import FigureRecord, OperatingPointRecord, Value
from magsafe.units import significant

HIGHER_IS_WORSE = frozenset(
    {
        "capacitor_peak_voltage",
        "capacitor_rms_current",
        "largest_current",
        "capacitor_dissipation",
        "conductor_temperature_rise",
        "terminal_peak_voltage",
        "swr_at_50_ohm",
        "series_capacitor_peak_voltage",
        "series_capacitor_rms_current",
        "swr_at_feed",
    }
)
LOWER_IS_WORSE = frozenset({"conductor_efficiency", "overall_efficiency", "half_power_bandwidth", "swr2_bandwidth"})
_IN_PERCENT = frozenset({"conductor_efficiency", "overall_efficiency"})


def figures(pairs: Sequence[tuple[OperatingPointRecord, OperatingPointRecord]]) -> Iterator[Change]:
    """Yield a change for each figure of transmissions that both sheets have, where any of its ends differs."""
    for old, now in pairs:
        for name in {**old.figures, **now.figures}:
            yield from _figure(name, old.figures.get(name), now.figures.get(name), now.name)


def _figure(name: str, old: FigureRecord | None, now: FigureRecord | None, transmission: str) -> Iterator[Change]:
    title = f"{words.short(name.replace('_', ' '), 60)} ({words.short(transmission)})"
    before, after = _value(old), _value(now)
    if before is None and after is None:
        return
    way: Direction = "other"
    if now is None or old is None:
        way = "unknown" if now is None else "other"
        text = f"{title} is on the {'first' if now is None else 'second'} sheet only"
    elif old.unit != now.unit:
        way = "unknown"
        text = f"{title} was in {words.short(old.unit)} and is in {words.short(now.unit)}: the numbers are not compared"
    elif any(differ(*ends) for ends in zip(_ends(old), _ends(now), strict=True)):
        way = _direction(name, old, now)
        other_method = ", by another method" if old.method != now.method else ""
        unit = _unit(name, old, now)
        text = f"{title}: {_told(old, unit)} before, {_told(now, unit)} now{other_method}"
    else:
        return
    comparable = old is not None and now is not None and old.unit == now.unit
    yield Change(
        kind="figure",
        direction=way,
        transmission=transmission,
        of=name,
        before=before,
        after=after,
        unit=now.unit if now is not None and comparable else None,
        text=text,
        weight=factor(*_dangerous(name, old, now)) if old is not None and now is not None and comparable else 1.0,
    )


def _ends(figure: FigureRecord) -> tuple[float | None, float | None, float | None]:
    return figure.low, figure.likely, figure.high


def _value(figure: FigureRecord | None) -> Value | None:
    """Return the three values of a figure; None where none of them is known."""
    if figure is None or all(end is None for end in _ends(figure)):
        return None
    return Value(low=figure.low, likely=figure.likely, high=figure.high, unit=figure.unit)


def _dangerous(name: str, old: FigureRecord, now: FigureRecord) -> tuple[float | None, float | None]:
    """Return the ends that danger is judged by; of a figure that no end of is known, the likely values."""
    first, second = (old.low, now.low) if name in LOWER_IS_WORSE else (old.high, now.high)
    return (old.likely, now.likely) if first is None and second is None else (first, second)


def _direction(name: str, old: FigureRecord, now: FigureRecord) -> Direction:
    """Return the direction of a figure; one that is not known any more is worse, whatever it is."""
    if all(end is None for end in _ends(now)):
        return "worse"
    if name not in HIGHER_IS_WORSE | LOWER_IS_WORSE:
        return "other"
    return toward(*_dangerous(name, old, now), worse="higher" if name in HIGHER_IS_WORSE else "lower")


def _unit(name: str, old: FigureRecord, now: FigureRecord) -> str:
    """Return the unit in which both are told."""
    largest = max((abs(end) for figure in (old, now) for end in _ends(figure) if end is not None), default=0.0)
    if name in _IN_PERCENT:
        return "%"
    if old.unit == "ohm":
        return "Ω" if largest >= 1.0 else "mΩ"
    if old.unit == "Hz":
        return "MHz" if largest >= 1e6 else "kHz"
    # The text of a unit that only an altered sheet has is told as it stands.
    return words.shown_unit(old.unit)


def _told(figure: FigureRecord, unit: str) -> str:
    """Return a figure as people read it: likely, then its ends where they say something else."""
    low, likely, high = (None if end is None else _number(end, figure.unit, unit) for end in _ends(figure))
    ends = f"({low} {words.LIKELY_ABOUT} {high})"
    if low is None or high is None:
        ends = f"(at most {high})" if high is not None else f"(at least {low})" if low is not None else ""
    if low == likely == high:
        ends = ""
    told = f"{likely}{_tail(unit)}" if likely is not None else f"likely not known{f', {unit}' if ends and unit else ''}"
    return f"{told} {ends}".strip()


def _number(value: float, si: str, unit: str) -> str:
    return significant(value) if unit == words.short(si) else words.number(value, si, unit)


def _tail(unit: str) -> str:
    """Return a unit as it stands behind a number; all volts among the figures are peak, all amps RMS."""
    qualifier = {"kV": " peak", "A": " RMS"}.get(unit, "")
    return f" {unit}{qualifier}" if unit else ""
