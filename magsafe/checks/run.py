"""The main job: a design in, a sheet out."""

from collections.abc import Sequence
from dataclasses import fields
from datetime import date

from magsafe import __version__
from magsafe.analysis.exposure import use_of
from magsafe.analysis.figures import Figure
from magsafe.analysis.operating_point import OperatingPoint, operating_points
from magsafe.checks import capacitor, loop
from magsafe.checks.as_built import as_built
from magsafe.checks.assumptions import assumptions
from magsafe.checks.capacitor_heat import capacitor_heat
from magsafe.checks.cautions import cautions
from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.corona import corona
from magsafe.checks.deratings import deratings
from magsafe.checks.exemption import exemptions
from magsafe.checks.exposure import exposure, no_rules
from magsafe.checks.feeding import coupling_loop, feeding
from magsafe.checks.gap import gap
from magsafe.checks.ground import ground
from magsafe.checks.heat import heat
from magsafe.checks.later import later
from magsafe.checks.line_capacitor import sizes
from magsafe.checks.measure import measure_first
from magsafe.checks.measurement import measurement
from magsafe.checks.padding import padding
from magsafe.checks.probe import probes
from magsafe.checks.reactive_power import reactive_power
from magsafe.checks.session import sessions
from magsafe.checks.sheet import (
    DesignRecord,
    FigureRecord,
    Finding,
    OperatingPointRecord,
    Sheet,
    worst,
)
from magsafe.checks.sky import pattern_record, placing_records
from magsafe.checks.tuning import tuning_step
from magsafe.checks.view import View, view_of
from magsafe.design.model import Design


def check(design: Design, on: date | None = None, points: Sequence[OperatingPoint] | None = None) -> Sheet:
    """Compute every figure and finding of a design.

    Parameters
    ----------
    design : a design that was read
    on : the date on the sheet; today where it is not given
    points : its operating points, by `operating_points`, where they are at hand
    """
    points = operating_points(design) if points is None else tuple(points)
    shared = (*no_rules(design), *later(design))
    views = tuple(view_of(design, point, _worked_with(design, i)) for i, point in enumerate(points))
    worked, summed = sessions(design, views)
    records = tuple(_record(i, view, summed.get(i, []), shared) for i, view in enumerate(views))
    everything = (*shared, *(finding for record in records for finding in record.findings))
    return Sheet(
        magsafe=__version__,
        date=(on or date.today()).isoformat(),
        design=DesignRecord(name=design.origin.name, sha256=design.origin.sha256, text=design.origin.text),
        margins=_margins(design),
        assumptions=assumptions(design, points),
        findings=shared,
        verdict=worst(tuple(finding.verdict for finding in everything)),
        power_ceiling=least([record.power_ceiling for record in records]),
        operating_points=records,
        sessions=worked,
        coupling_loop=coupling_loop(design, points),
        measure_first=measure_first(design, points),
        deratings=deratings(design, points),
        cautions=cautions(points, tuned=design.capacitor.kind != "none", findings=everything),
    )


def _worked_with(design: Design, index: int) -> int:
    """Return how many transmissions the largest session holds that a transmission is worked in; 1 where in none."""
    return max((len(names) for names in design.site.sessions if design.titles[index] in names), default=1)


def _record(index: int, view: View, summed: Sequence[Finding], shared: tuple[Finding, ...]) -> OperatingPointRecord:
    design, point = view.design, view.point
    people, exposed = exposure(view)
    has_capacitor = design.capacitor.kind != "none"
    tuned = _tuned(design, point) if has_capacitor else ()
    resonant = (loop.bandwidth(point), loop.q_bound(point))
    agreed, grounded, measured = loop.methods_agree(point), ground(design, point), as_built(design, point)
    findings = (
        *tuned,
        loop.size(design, point),
        *([agreed] if agreed else ()),
        *([grounded] if grounded else ()),
        *([measured] if measured else ()),
        *(resonant if has_capacitor else ()),
        *feeding(design, point),
        *heat(design, point),
        corona(design, point),
        *exposed,
        *summed,
        *probes(design, index, point),
    )
    transmission = point.transmission
    return OperatingPointRecord(
        name=design.titles[index],
        frequency=transmission.frequency,
        power=point.power,
        power_at_loop=point.power_at_loop.likely or 0.0,
        mode=transmission.mode,
        duty=use_of(transmission).duty,
        power_ceiling=ceiling((*findings, *shared), index),
        figures=_figures(point),
        findings=findings,
        exposure=people,
        exemptions=exemptions(view),
        pattern=pattern_record(design, point),
        placings=placing_records(design, point),
        measurement=measurement(design, point),
    )


def _tuned(design: Design, point: OperatingPoint) -> tuple[Finding, ...]:
    """Return the findings about the capacitor."""
    current, reactive = capacitor.current(design, point), reactive_power(design, point)
    return (
        capacitor.voltage(design, point),
        *gap(design, point),
        *reactive,
        *sizes(design, point),
        current,
        capacitor_heat(design, point, current, reactive),
        *padding(design, point),
        capacitor.tuning_range(design, point),
        *tuning_step(design, point),
    )


def _figures(point: OperatingPoint) -> dict[str, FigureRecord]:
    return {f.name: _figure(getattr(point.figures, f.name)) for f in fields(point.figures)}


def _figure(figure: Figure) -> FigureRecord:
    return FigureRecord(
        low=figure.spread.low,
        likely=figure.spread.likely,
        high=figure.spread.high,
        unit=figure.unit,
        method=figure.method,
        source=figure.source,
        why=figure.why or None,
    )


def _margins(design: Design) -> dict[str, float]:
    asked = design.margins
    return {
        "voltage": asked.voltage,
        "current": asked.current,
        "temperature": asked.temperature,
        "exposure": asked.exposure_ratio,
        "overshoot": asked.overshoot_ratio,
    }
