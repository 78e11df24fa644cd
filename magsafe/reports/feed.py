"""How the power comes to the loop, the same on every surface: the coupling loop, two capacitors, or a match.

Cells hold a likely value, and its ends on a line of their own.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from magsafe import words
from magsafe.checks.sheet import (
    CouplingLoopRecord,
    FigureRecord,
    OperatingPointRecord,
    Sheet,
    Value,
)
from magsafe.reports import telling
from magsafe.spread import Spread

HEADING = "Feed"
LABEL = 20  # columns of a terminal for the name of a transmission
CUSTOM = "a fifth of the loop's diameter is common practice, and not what is computed here"
_UNKNOWN = "not known"
_SAYS_NOTHING = ("the design does not state the size of a match", "for a loop that ")
_COUPLED = ("transmission", "matches at, mm", "coupling", "SWR", "kHz above")
_CAPACITORS = (
    ("series_capacitance", "matches, pF", "F", "pF"),
    ("series_capacitor_peak_voltage", "kV peak", "V", "kV"),
    ("series_capacitor_rms_current", "A RMS", "A", "A"),
    ("swr_at_feed", "SWR", "1", ""),
)
_MATCHES = (
    ("swr_at_50_ohm", "without a match, at 50 Ω"),
    ("swr_through_quarter_wave", "through a quarter-wave section"),
    ("swr_through_2_to_1", "through a 2:1 transformer"),
    ("swr_through_4_to_1", "through a 4:1 transformer"),
)


@dataclass(frozen=True, slots=True)
class Told:
    """What is said of the feed: sentences, then a table with what its columns mean; rows may be none."""

    sentences: tuple[str, ...]
    head: tuple[str, ...] = ()
    rows: tuple[tuple[str, ...], ...] = ()
    notes: tuple[str, ...] = ()


def feed(sheet: Sheet) -> Told | None:
    """Return what is said of the feed; None where there is nothing to say."""
    points = sheet.operating_points
    if sheet.coupling_loop is not None:
        return _small_loop(sheet.coupling_loop, points)
    if any(_known(point, "series_capacitor_peak_voltage") for point in points):
        return _two_capacitors(points)
    matched = tuple(sentence for point in points for sentence in _full_wave(point))
    if matched:
        return Told((f"The loop is fed as it is. SWR on the line with each match{_section(points)}:", *matched))
    why = tuple(dict.fromkeys(reason for point in points for reason in _why_none(point)))
    return Told(tuple(f"No match is computed: {reason}." for reason in why)) if why else None


def said(spread: Value | FigureRecord, si: str, unit: str) -> str:
    """Return a likely value, and its ends on the next line where they differ from it."""
    found = Spread(spread.low, spread.likely, spread.high)
    if not found.known:
        return _UNKNOWN
    likely = "?" if found.likely is None else words.number(found.likely, si, unit)
    ends = words.ends(found, si, unit)
    return f"{likely}\n{ends}" if ends else likely


# Coupling loop ---------------------------------------------------------------------------------------------


def _small_loop(made: CouplingLoopRecord, points: Sequence[OperatingPointRecord]) -> Told:
    left = [point.name for point in points if point.name not in {each.name for each in made.transmissions}]
    missing = (f"Not computed for {', '.join(words.short(name) for name in left)}.",) if left else ()
    rows = tuple(
        (
            words.short(each.name, LABEL),
            said(each.matching_diameter, "m", "mm"),
            said(each.coefficient, "1", ""),
            said(each.swr, "1", ""),
            words.number(each.offset, "Hz", "kHz"),
        )
        for each in made.transmissions
    )
    share = words.amount(made.share_of_loop, "1", "%")
    return Told(
        (f"{_which(made)} That is {share} of the loop's mean diameter; {CUSTOM}.", *missing),
        _COUPLED,
        rows,
        (
            "Matches at: the diameter, to the middle of its wire, that would match there. Coupling: 1 matches, more "
            "is overcoupled. SWR: the lowest that retuning the capacitor leaves. kHz above: how far above the loop's "
            "own resonance that lies.",
        ),
    )


def _which(made: CouplingLoopRecord) -> str:
    size, wire = words.amount(made.diameter, "m", "mm"), words.amount(made.wire, "m", "mm")
    apart = "" if made.clearance is None else f", {words.amount(made.clearance, 'm', 'mm')} clear of the conductor"
    lies = "in the middle of the loop" if made.position == "centred" else made.position
    if made.stated:
        return f"The coupling loop as stated: {size} across, wire of {wire}, {lies}{apart}."
    serves = "serves all transmissions best" if len(made.transmissions) > 1 else "matches"
    return f"The design states no size of a coupling loop. With wire of {wire}, {lies}{apart}, {size} across {serves}."


# Capacitors, sections, transformers ------------------------------------------------------------------------


def _two_capacitors(points: Sequence[OperatingPointRecord]) -> Told:
    shown = [column for column in _CAPACITORS if any(_known(point, column[0]) for point in points)]
    rows = tuple(
        (
            words.short(point.name, LABEL),
            *(_cell(point, name, si, unit) for name, _, si, unit in shown),
        )
        for point in points
    )
    stated = " SWR: with the series capacitor as stated, the other retuned." if shown[-1][0] == "swr_at_feed" else ""
    return Told(
        (
            "Two capacitors match the loop. The small one in series with the line sees nearly the loop's full "
            "voltage; of two, one in each lead, each sees half. Choose it by these volts and amps.",
        ),
        ("transmission", *(label for _, label, _, _ in shown)),
        rows,
        (f"Of one series capacitor: the capacitance that matches, its volts and amps at full power.{stated}",),
    )


def _full_wave(point: OperatingPointRecord) -> Iterator[str]:
    """Yield the SWR that each match leaves, the least first, and the section that would match."""
    found = [(figure, name) for key, name in _MATCHES if (figure := point.figures.get(key)) and figure.likely]
    if len(found) < 2:
        return
    found.sort(key=lambda each: each[0].likely or 0.0)
    told = ", ".join(f"{_inline(figure, '1', '')} {name}" for figure, name in found)
    stated, section = point.figures.get("swr_at_feed"), point.figures.get("quarter_wave_impedance")
    more = f" With the match as stated {_inline(stated, '1', '')}." if stated and stated.likely else ""
    if section and section.likely:
        more += f" A section of {_inline(section, 'ohm', 'Ω', 'Ω')} would match."
    yield f"{words.short(point.name)}: {told}.{more}"


def _section(points: Sequence[OperatingPointRecord]) -> str:
    """Return which section was reckoned with, in the words of its figure."""
    found = (point.figures.get("swr_through_quarter_wave") for point in points)
    method = next((each.method for each in found if each is not None and each.likely), "")
    return f", the section {method.removeprefix('on the line, through a section ')}" if method else ""


def _inline(figure: FigureRecord, si: str, unit: str, tail: str = "") -> str:
    likely, _, ends = said(figure, si, unit).partition("\n")
    return " ".join(each for each in (likely, tail, ends) if each)


def _cell(point: OperatingPointRecord, name: str, si: str, unit: str) -> str:
    figure = point.figures.get(name)
    return _UNKNOWN if figure is None else said(figure, si, unit)


def _known(point: OperatingPointRecord, name: str) -> bool:
    figure = point.figures.get(name)
    return figure is not None and figure.likely is not None


def _why_none(point: OperatingPointRecord) -> Iterator[str]:
    """Yield why a loop that is computed has no match that is; nothing of one that is not."""
    if not _known(point, "unloaded_q"):
        return
    for name in ("coupling_loop_diameter", "swr_at_feed", "series_capacitance"):
        figure = point.figures.get(name)
        if figure is not None and figure.likely is None and figure.why and not figure.why.startswith(_SAYS_NOTHING):
            yield figure.why
            return


# What was measured -----------------------------------------------------------------------------------------


def measured(point: OperatingPointRecord) -> str:
    """Return on which measurement a transmission rests; empty where on none."""
    record = point.measurement
    if record is None:
        return ""
    day = f" on {words.short(' '.join(record.date.split()), 30)}" if record.date else ""
    by = f" by {record.by}" if record.by else ""
    return (
        f"{telling.use(point)}, rests on a measured Q of {_quality(record.unloaded_q)}, read{day}{by} at "
        f"{record.resonance / 1e6:.6g} MHz; its parts make it {_quality(record.computed_q)}."
    )


def _quality(value: Value) -> str:
    return said(value, "1", "").replace("\n", " ")
