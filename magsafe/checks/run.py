"""The main job: a design in, a sheet out."""

from dataclasses import fields
from datetime import date

from magsafe import __version__
from magsafe.analysis.exposure import use_of
from magsafe.analysis.figures import Figure
from magsafe.analysis.operating_point import OperatingPoint, operating_point
from magsafe.checks import capacitor, loop
from magsafe.checks.assumptions import assumptions
from magsafe.checks.cautions import cautions
from magsafe.checks.ceiling import ceiling, least
from magsafe.checks.exposure import exposure, no_rules
from magsafe.checks.later import later
from magsafe.checks.sheet import (
    DesignRecord,
    FigureRecord,
    Finding,
    OperatingPointRecord,
    Sheet,
    worst,
)
from magsafe.design.model import Design


def check(design: Design, on: date | None = None) -> Sheet:
    """Compute every figure and finding of a design.

    Parameters
    ----------
    design : a design that was read
    on : the date on the sheet; today where it is not given
    """
    points = tuple(operating_point(design, transmission) for transmission in design.transmission)
    shared = (*no_rules(design), *later(design))
    records = tuple(_record(design, i, point, shared) for i, point in enumerate(points))
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
        cautions=cautions(points, tuned=design.capacitor.kind != "none"),
    )


def _record(design: Design, index: int, point: OperatingPoint, shared: tuple[Finding, ...]) -> OperatingPointRecord:
    people, exposed = exposure(design, point)
    tuned = (
        capacitor.voltage(design, point),
        capacitor.current(design, point),
        capacitor.tuning_range(design, point),
    )
    resonant = (loop.bandwidth(point), loop.q_bound(point))
    agreed = loop.methods_agree(point)
    has_capacitor = design.capacitor.kind != "none"
    findings = (
        *(tuned if has_capacitor else ()),
        loop.size(design, point),
        *([agreed] if agreed else ()),
        *(resonant if has_capacitor else ()),
        *exposed,
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
