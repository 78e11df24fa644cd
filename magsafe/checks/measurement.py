"""The measured Q that a transmission rests on, in machine form."""

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.as_built import computed_quality
from magsafe.checks.sheet import MeasurementRecord, Value
from magsafe.design.as_built import standing
from magsafe.design.model import Design
from magsafe.design.quantities import Uncertain
from magsafe.spread import Spread


def measurement(design: Design, point: OperatingPoint) -> MeasurementRecord | None:
    """Return the measurement that decides a transmission's resistance; None where none does."""
    found, made = standing(design, point.transmission.frequency), point.chain
    if found is None or made is None or made.read is None:
        return None
    record = found.record
    if record.frequency is None or record.unloaded_q is None:
        return None
    return MeasurementRecord(
        date=record.date or "",
        by=record.by,
        resonance=record.frequency,
        unloaded_q=_read(record.unloaded_q),
        carried_q=_value(made.read),
        computed_q=_value(computed_quality(made)),
        coupling=None if record.coupling is None else _read(record.coupling),
        points=tuple(record.points),
    )


def _read(found: Uncertain) -> Value:
    return Value(low=found.low, likely=found.likely, high=found.high, unit="1")


def _value(found: Spread) -> Value:
    return Value(low=found.low, likely=found.likely, high=found.high, unit="1")
