"""Every factor that was taken off a rating or a breakdown, for the sheet."""

from collections.abc import Iterator, Sequence

from magsafe.analysis.gap import gap_volts, has_air_gap
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_voltage import not_rated, rated_voltage
from magsafe.checks.sheet import DeratingRecord
from magsafe.design.model import Design
from magsafe.physics.deratings import Derating


def deratings(design: Design, points: Sequence[OperatingPoint]) -> tuple[DeratingRecord, ...]:
    """Return the factors behind the findings about volts, each once; those that take nothing off are left out."""
    found = (
        DeratingRecord(
            name=row.name, factor=row.factor, source=row.source, evidence=row.evidence, applies_to=applies_to
        )
        for point in points
        for applies_to, row in _rows(design, point.transmission.frequency)
        if row.factor != 1.0
    )
    return tuple(dict.fromkeys(found))


def _rows(design: Design, frequency: float) -> Iterator[tuple[str, Derating]]:
    if has_air_gap(design.capacitor):
        try:
            found = gap_volts(design, frequency)
        except ValueError:
            return  # the finding tells why
        yield from (("capacitor.gap", row) for row in (*found.rows, found.working))
    if design.capacitor.kind != "none" and not not_rated(design):
        yield from (("capacitor.voltage", row) for row in rated_voltage(design, frequency).rows)
