"""What a sheet says first, in sentences: the same on every surface."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from magsafe import words
from magsafe.checks.sheet import (
    ORDER,
    Finding,
    KeepoutPoint,
    KeepoutSheet,
    OperatingPointRecord,
    PowerCeiling,
    Sheet,
    Verdict,
)


@dataclass(frozen=True, slots=True)
class Told:
    """A finding with the transmissions it holds for; empty where it is of the whole sheet."""

    finding: Finding
    transmissions: tuple[str, ...]


def headline(sheet: Sheet) -> str:
    """Return what the verdict means for the hand on the key."""
    points = sheet.operating_points
    if sheet.verdict == "stop":
        stopped = [p for p in points if any(f.verdict == "stop" for f in p.findings)] or list(points)
        if len(points) == 1:
            return f"Do not key this loop at {_watts(points[0])}."
        planned = "; ".join(f"{words.short(p.name)} at {_watts(p)}" for p in stopped)
        return f"Do not key this loop as planned: {planned}."
    if sheet.verdict == "unproven":
        return f"Do not key this loop at {_powers(sheet)} before what is unproven is known."
    if sheet.verdict == "narrow":
        return f"At {_powers(sheet)} all is within the limits computed here, but not with all that was asked."
    return f"At {_powers(sheet)} all is within the limits computed here, with the margins asked for."


def _watts(point: OperatingPointRecord) -> str:
    return words.watts(point.power)


def _powers(sheet: Sheet) -> str:
    distinct = dict.fromkeys(_watts(p) for p in sheet.operating_points)
    return next(iter(distinct)) if len(distinct) == 1 else "the powers planned"


def ceiling(sheet: Sheet, made: PowerCeiling) -> str:
    """Return the highest power in one or two sentences."""
    if made.value is None or made.at_limit is None:
        return "No highest power can be named: nothing that depends on power could be counted."
    first = f"first limit reached at {words.power(made.at_limit)}."
    several = ""
    if len(sheet.operating_points) > 1:
        several = f" in {words.short(sheet.operating_points[made.transmission].name)}"
    if made.value == 0.0:
        return f"No power is clear: {made.held_by}{several} stops it at any power."
    if made.held_by in made.left_out:
        most = words.power(made.value)
        return f"No power is proven. More than {most} is too much in any case, by {made.held_by}{several}."
    if made.complete:
        text = f"Clear up to {words.power(made.value)}; {first}"
    else:
        text = f"At most {words.power(made.value)}, and not before what is unproven is known; {first}"
    return f"{text} {made.held_by} holds it there{several}."


def people_headline(sheet: KeepoutSheet) -> str:
    """Return what the verdict on people means for the hand on the key."""
    return {
        "stop": "Do not key this loop as planned with people where the design puts them.",
        "unproven": "Do not key this loop with people about before what is unproven is known.",
        "narrow": "People are within the limits computed here, but not with all that was asked.",
        "clear": "People are within the limits computed here, with the margins asked for.",
    }[sheet.verdict]


def people_ceiling(sheet: KeepoutSheet) -> str:
    """Return the highest power for people alone."""
    made = sheet.power_ceiling
    if made.value is None or made.at_limit is None:
        return "No highest power can be named for people: no place could be counted."
    if made.value == 0.0:
        return f"No power is clear for people: {made.held_by} stops it at any power."
    if made.held_by in made.left_out:
        return f"No power is proven for people. More than {words.power(made.value)} is too much in any case."
    most = "" if made.complete else "at most "
    where = sheet.operating_points[made.transmission].name
    return (
        f"For people clear up to {most}{words.power(made.value)}; first limit reached at {words.power(made.at_limit)}. "
        f"{made.held_by} holds it there in {where}."
    )


def left_out(made: PowerCeiling) -> str:
    """Return what the ceiling does not count; empty if it counts all."""
    if made.complete:
        return ""
    return f"Not counted, because unproven: {', '.join(made.left_out)}."


def findings(sheet: Sheet, verdict: Verdict) -> Iterator[Told]:
    """Yield the findings of one verdict, those that say the same of several transmissions once."""
    groups: dict[tuple[str, str | None, str], tuple[Finding, list[str]]] = {}
    for finding in sheet.findings:
        if finding.verdict == verdict:
            groups[finding.id, finding.place, finding.because] = (finding, [])
    for point in sheet.operating_points:
        for finding in point.findings:
            if finding.verdict == verdict:
                key = (finding.id, finding.place, finding.because)
                groups.setdefault(key, (finding, []))[1].append(words.short(point.name))
    for finding, names in groups.values():
        everywhere = len(names) == len(sheet.operating_points)
        yield Told(finding, () if everywhere else tuple(names))


def in_the_way(sheet: Sheet) -> Iterator[Told]:
    """Yield all findings that are not clear, the worst first."""
    for verdict in ORDER[:-1]:
        yield from findings(sheet, verdict)


def use(point: OperatingPointRecord | KeepoutPoint) -> str:
    """Return a transmission in words: its name on one line, its frequency and power."""
    parts = dict.fromkeys((words.short(" ".join(point.name.split())), words.frequency(point.frequency)))
    return f"{', '.join(parts)}, {words.watts(point.power)} PEP"


@dataclass(frozen=True, slots=True)
class Row:
    """A row of the figures' table: its figure, how it is called, its SI unit and the unit shown.

    One that is `told_if_known` is left out where no transmission has its figure.
    """

    figure: str
    label: str
    si: str
    unit: str
    told_if_known: bool = False


def rows(points: Sequence[OperatingPointRecord]) -> tuple[Row, ...]:
    """Return the rows of the figures' table: those of a loop that a capacitor tunes, or of a full-wave loop."""
    terminals = [point.figures.get("terminal_resistance") for point in points]
    full_wave = any(figure is not None and figure.likely is not None for figure in terminals)
    known = set.intersection(*(set(point.figures) for point in points))
    held = {name for point in points for name, figure in point.figures.items() if figure.likely is not None}
    return tuple(
        row
        for row in (FULL_WAVE_ROWS if full_wave else ROWS)
        if row.figure in known and (row.figure in held or not row.told_if_known)
    )


_SKY_ROWS = (
    Row("conductor_efficiency", "Efficiency, no ground, %", "1", "%"),
    Row("overall_efficiency", "Efficiency to the sky, %", "1", "%"),
    Row("gain", "Gain, strongest, dBi", "1", "dBi"),
    Row("gain_elevation", "Strongest at, degrees up", "deg", "deg"),
    Row("share_above_60_degrees", "Sky, above 60 deg, %", "1", "%"),
    Row("share_below_20_degrees", "Sky, below 20 deg, %", "1", "%"),
    Row("effective_isotropic_radiated_power", "EIRP, W PEP", "W", "W"),
    Row("mean_effective_isotropic_radiated_power", "EIRP, W mean", "W", "W"),
    Row("effective_radiated_power", "ERP, W PEP", "W", "W"),
    Row("mean_effective_radiated_power", "ERP, W mean", "W", "W"),
    Row("directivity_along_axis", "Directivity on the axis", "1", ""),
    Row("directivity_in_plane", "Directivity in the plane", "1", ""),
)

ROWS = (
    Row("perimeter_in_wavelengths", "Perimeter, wavelengths", "1", ""),
    Row("radiation_resistance", "Radiation resistance, mΩ", "ohm", "mΩ"),
    Row("conductor_resistance", "Conductor resistance, mΩ", "ohm", "mΩ"),
    Row("joint_resistance", "Joint resistance, mΩ", "ohm", "mΩ"),
    Row("capacitor_resistance", "Capacitor resistance, mΩ", "ohm", "mΩ"),
    Row("ground_resistance", "Ground resistance, mΩ", "ohm", "mΩ"),
    Row("unexplained_resistance", "Unexplained, mΩ", "ohm", "mΩ", told_if_known=True),
    Row("total_resistance", "Total resistance, mΩ", "ohm", "mΩ"),
    Row("port_reactance", "Port reactance, Ω", "ohm", "Ω"),
    Row("inductance", "Inductance, µH", "H", "µH"),
    Row("tuning_capacitance", "Tuning capacitance, pF", "F", "pF"),
    *_SKY_ROWS,
    Row("unloaded_q", "Unloaded Q", "1", ""),
    Row("loaded_q", "Loaded Q, matched", "1", ""),
    Row("half_power_bandwidth", "Half-power bandwidth, kHz", "Hz", "kHz"),
    Row("swr2_bandwidth", "SWR-2 bandwidth, kHz", "Hz", "kHz"),
    Row("capacitor_peak_voltage", "Capacitor voltage, kV peak", "V", "kV"),
    Row("capacitor_rms_current", "Capacitor current, A RMS", "A", "A"),
    Row("largest_current", "Largest current, A RMS", "A", "A"),
    Row("capacitor_dissipation", "Heat in the capacitor, W", "W", "W"),
    Row("conductor_temperature_rise", "Conductor, rise in K", "K", "K"),
    Row("coupling_loop_diameter", "Coupling loop, mm", "m", "mm", told_if_known=True),
    Row("match_parallel_capacitance", "Capacitor across, pF", "F", "pF", told_if_known=True),
    Row("series_capacitance", "Series capacitor, pF", "F", "pF", told_if_known=True),
    Row("series_capacitor_peak_voltage", "Series capacitor, kV peak", "V", "kV", told_if_known=True),
    Row("series_capacitor_rms_current", "Series capacitor, A RMS", "A", "A", told_if_known=True),
    Row("swr_at_feed", "SWR at the loop", "1", "", told_if_known=True),
)

FULL_WAVE_ROWS = (
    Row("perimeter_in_wavelengths", "Perimeter, wavelengths", "1", ""),
    Row("radiation_resistance", "Radiation resistance, Ω", "ohm", "Ω"),
    Row("conductor_resistance", "Conductor resistance, Ω", "ohm", "Ω"),
    Row("joint_resistance", "Joint resistance, Ω", "ohm", "Ω"),
    Row("ground_resistance", "Ground resistance, Ω", "ohm", "Ω"),
    Row("terminal_resistance", "Terminal resistance, Ω", "ohm", "Ω"),
    Row("terminal_reactance", "Terminal reactance, Ω", "ohm", "Ω"),
    Row("terminal_peak_voltage", "Terminal voltage, kV peak", "V", "kV"),
    Row("swr_at_50_ohm", "SWR at 50 Ω", "1", ""),
    Row("swr_through_quarter_wave", "SWR, quarter-wave section", "1", "", told_if_known=True),
    Row("quarter_wave_impedance", "Section that matches, Ω", "ohm", "Ω", told_if_known=True),
    Row("quarter_wave_length", "Quarter wave, m", "m", "m", told_if_known=True),
    Row("swr_through_2_to_1", "SWR, 2:1 transformer", "1", "", told_if_known=True),
    Row("swr_through_4_to_1", "SWR, 4:1 transformer", "1", "", told_if_known=True),
    Row("swr_at_feed", "SWR, the match as stated", "1", "", told_if_known=True),
    Row("nearest_resonance", "Nearest resonance, MHz", "Hz", "MHz"),
    *_SKY_ROWS,
    Row("largest_current", "Largest current, A RMS", "A", "A"),
    Row("conductor_temperature_rise", "Conductor, rise in K", "K", "K"),
)
