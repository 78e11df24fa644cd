"""A measurement held against the design: the same loop with its parts as stated, and with the Q that was read."""

from datetime import date

from magsafe import __version__, words
from magsafe.analysis.instrument import Reading, measured_design, record_of
from magsafe.checks.as_built import MEASURED
from magsafe.checks.measured_sheet import (
    BesideRecord,
    BranchRecord,
    CeilingsRecord,
    MeasuredSheet,
    ReadingRecord,
    SweepRecord,
)
from magsafe.checks.run import check
from magsafe.checks.sheet import DesignRecord, Value, worst
from magsafe.design.as_built import LEAST_Q, MOST_Q, NEAR
from magsafe.design.model import Design
from magsafe.design.sweep import Sweep
from magsafe.spread import Spread

SHOWN = (
    "unloaded_q",
    "total_resistance",
    "unexplained_resistance",
    "conductor_efficiency",
    "overall_efficiency",
    "swr2_bandwidth",
    "capacitor_peak_voltage",
    "capacitor_rms_current",
    "capacitor_dissipation",
)


_INSTRUMENT = (
    "Instrument. An analyser stands milliwatts: take it off the loop before anybody transmits, on it or near it, and "
    "discharge the loop before it is joined again. A reading holds for the loop as it stood: rain, salt, a loose clamp "
    "or something near it makes another one."
)


class NotOfThisDesign(ValueError):
    """A measurement that cannot be held against a design: what was found, what is expected, what would do."""

    def __init__(self, found: str, expected: str, do: str) -> None:
        super().__init__(f"{found}: {expected}; {do}")
        self.found, self.expected, self.do = found, expected, do


def measured(design: Design, reading: Reading, sweep: Sweep | None = None, on: date | None = None) -> MeasuredSheet:
    """Return what a reading says, beside what is computed of the transmission nearest to its resonance.

    Parameters
    ----------
    design : a design that was read
    reading : by `by_sweep` or `by_points`
    sweep : the file that it is from, if it is
    on : the day of the measurement; today where it is not given

    Raises
    ------
    NotOfThisDesign : a loop without a capacitor, a resonance away from every transmission, a Q that is not bounded
    """
    index = _nearest(design, reading)
    day = (on or date.today()).isoformat()
    alone = _alone(design, index)
    before, after = check(alone, on), check(measured_design(alone, record_of(design, reading, day)), on)
    plain, built = before.operating_points[0], after.operating_points[0]
    findings = tuple(each for each in built.findings if each.id == MEASURED)
    return MeasuredSheet(
        magsafe=__version__,
        date=day,
        design=DesignRecord(name=design.origin.name, sha256=design.origin.sha256, text=design.origin.text),
        transmission=design.titles[index],
        frequency=plain.frequency,
        power=plain.power,
        reading=_record(reading, sweep),
        figures={name: BesideRecord(computed=plain.figures[name], measured=built.figures[name]) for name in SHOWN},
        power_ceiling=CeilingsRecord(computed=plain.power_ceiling, measured=built.power_ceiling),
        findings=findings,
        verdict=worst(tuple(each.verdict for each in findings)),
        notes=(*reading.notes, *reading.doubts),
        cautions=(_INSTRUMENT, *after.cautions),
    )


def _nearest(design: Design, reading: Reading) -> int:
    """Return the transmission that a resonance belongs to."""
    resonance = reading.resonance.likely or 0.0
    if design.capacitor.kind == "none":
        raise NotOfThisDesign(
            'capacitor.kind = "none"',
            "a loop that a capacitor tunes: a full-wave loop has no Q that its volts go by",
            "read magsafe check: it tells the terminal's impedance and SWR",
        )
    if reading.unloaded_q.high is None or reading.unloaded_q.low is None or reading.unloaded_q.low <= 0.0:
        raise NotOfThisDesign(
            "a Q that the reading does not bound", "a Q with both ends", "sweep a narrower span, with less noise"
        )
    if reading.unloaded_q.low < LEAST_Q or reading.unloaded_q.high > MOST_Q:
        raise NotOfThisDesign(
            f"a Q of {words.amount(reading.unloaded_q.low, '1')} to {words.amount(reading.unloaded_q.high, '1')}",
            f"one between {LEAST_Q:g} and {MOST_Q:g}",
            "check the frequencies, and the instrument's calibration",
        )
    away = [abs(resonance / each.frequency - 1.0) for each in design.transmission]
    index = away.index(min(away))
    if away[index] > NEAR:
        known = ", ".join(words.frequency(each.frequency) for each in design.transmission)
        raise NotOfThisDesign(
            f"a resonance at {words.frequency(resonance)}",
            f"one within {100.0 * NEAR:g} % of a transmission of the design ({known})",
            "tune the loop to a transmission, or add one at that frequency",
        )
    return index


def _alone(design: Design, index: int) -> Design:
    """Return a design with one transmission, and without what belongs to several or to others."""
    site = design.site.model_copy(update={"sessions": []})
    return design.model_copy(
        update={"transmission": [design.transmission[index]], "site": site, "probe": [], "measured": []}
    )


def _record(reading: Reading, sweep: Sweep | None) -> ReadingRecord:
    file = None
    if sweep is not None:
        file = SweepRecord(
            name=sweep.name,
            sha256=sweep.sha256,
            points=len(sweep.frequency),
            reference_impedance=sweep.reference_impedance,
        )
    return ReadingRecord(
        by=reading.by,
        file=file,
        resonance=_value(reading.resonance, "Hz"),
        unloaded_q=_value(reading.unloaded_q, "1"),
        loaded_q=_value(reading.loaded_q, "1") if reading.loaded_q.known else None,
        coupling=_value(reading.coupling, "1") if reading.coupling.known else None,
        line_loss=_value(reading.line_loss, "dB"),
        branches=tuple(
            BranchRecord(
                coupled="overcoupled" if name == "overcoupled" else "undercoupled",
                coupling=_value(each.coupling, "1"),
                unloaded_q=_value(each.unloaded_q, "1"),
            )
            for name, each in reading.branches
        ),
        points_in_band=reading.points_in_band,
        residual=reading.residual,
        noise=reading.noise,
        systematic=reading.systematic,
        points=tuple((f, each.real, each.imag) for f, each in reading.points),
    )


def _value(spread: Spread, unit: str) -> Value:
    return Value(low=spread.low, likely=spread.likely, high=spread.high, unit=unit)
