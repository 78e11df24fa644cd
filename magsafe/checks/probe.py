"""Does a field probe agree: each reading held against the strongest field computed where it was read.

A reading above that field is a fault which no power mends. One below it lowers nothing: it is of one spot, on one day.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from math import sqrt

from magsafe import words
from magsafe.analysis.field_source import FAR, field_source
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.people import Strongest, at_places
from magsafe.checks.judge import Check, judge_reading, unproven
from magsafe.checks.sheet import Finding
from magsafe.checks.view import metal_near
from magsafe.design.model import Design, Place, Probe

FAINT = 0.1  # of the computed field: a reading below that is sooner a fault of the reading than so weak a field

_FIELDS = {"E": ("electric", "V/m"), "H": ("magnetic", "A/m")}
_STRONGER = (
    "rely on no distance and no power here before the cause is found: power, place, metal near, "
    "where the capacitor is, another transmitter"
)
_AGAIN = "read again, and check power, place, and the probe's kind, range and orientation"
_ELSEWHERE = "read where the field is computed, or count the reading as proving nothing"


@dataclass(frozen=True, slots=True)
class _Reading:
    """One field that a probe read [V/m or A/m]: E or H, and whether the probe read the other too."""

    probe: Probe
    label: str
    letter: str
    field: float
    both: bool

    @property
    def check(self) -> Check:
        name, unit = _FIELDS[self.letter]
        return Check(
            f"exposure.probe.{words.slug(self.label)}{f'.{self.letter.lower()}' if self.both else ''}",
            f"Is the {name} field that was read at {self.label} no stronger than computed?",
            _AGAIN,
            "the reading in the design, against the field of the solved current",
            unit,
            shown=unit,
            qualifier="RMS",
        )

    @property
    def when(self) -> str:
        day = f" on {words.short(self.probe.date)}" if self.probe.date else ""
        return f"at {words.watts(self.probe.power)}{day}"

    def unproven(self, why: str) -> Finding:
        return unproven(self.check, why, do=_ELSEWHERE, place=self.label)


def probes(design: Design, index: int, point: OperatingPoint) -> tuple[Finding, ...]:
    """Return what the probes say that were read during the transmission at this index of the design."""
    title = design.titles[index]
    read = [(i, probe) for i, probe in enumerate(design.probe) if (probe.transmission or title) == title]
    unknown = _unknown(design, point)
    if not read or unknown:
        return tuple(reading.unproven(unknown) for i, probe in read for reading in _readings(i, probe))
    at_loop = (point.power_at_loop.high or 0.0) / point.power
    credited = field_source(design, point, FAR).bare_factor
    spots = tuple(_spot(design, i, probe) for i, probe in read)
    return tuple(
        _judged(design, reading, spot, strongest, probe.power * at_loop * credited)
        for (i, probe), spot, strongest in zip(read, spots, at_places(design, point, spots), strict=True)
        for reading in _readings(i, probe)
    )


def _readings(index: int, probe: Probe) -> Iterator[_Reading]:
    both = probe.electric is not None and probe.magnetic is not None
    for letter, field in (("E", probe.electric), ("H", probe.magnetic)):
        if field is not None:
            yield _Reading(probe, probe.label(index), letter, field, both)


def _spot(design: Design, index: int, probe: Probe) -> Place:
    """Return where a probe was as a place of its own: the column of the place that it names, or a point."""
    if probe.place is not None:
        named = next(place for place in design.place if place.name == probe.place)
        return named.model_copy(update={"name": str(index)})
    position = {key: getattr(probe, key) for key in ("along_axis", "in_plane", "across", "height")}
    return Place.model_construct(name=str(index), who="public", **position)


def _unknown(design: Design, point: OperatingPoint) -> str:
    """Return why no field is known where probes were; empty where it is."""
    if point.out_of_range:
        return "; ".join(point.out_of_range)
    if design.loop.centre_height is None:
        return "loop.centre_height is not given, and probes have their heights above ground"
    return ""


def _judged(design: Design, reading: _Reading, spot: Place, found: Strongest, power: float) -> Finding:
    """Hold a reading against the strongest field of its spot with so much power at the loop [W]."""
    square = found.electric if reading.letter == "E" else found.magnetic
    doubts = found.doubts if reading.letter == "E" else _magnetic_doubts(design, spot, found)
    # Near the bodies the electric field is left out of the search: nothing is known that a reading could exceed.
    if square == 0.0 or (doubts and reading.letter == "E"):
        return reading.unproven("; ".join(doubts) or "no field is computed there")
    finding = judge_reading(
        reading.check,
        reading.field,
        reading.probe.uncertainty_ratio,
        sqrt(square * power),
        faint=FAINT,
        field=reading.letter,
        when=reading.when,
        place=reading.label,
    )
    if finding.verdict == "stop":
        return finding.model_copy(update={"do": _STRONGER})
    doubt = "; ".join(filter(None, (*doubts, metal_near(design))))
    if not doubt:
        return finding
    update: dict[str, object] = {
        "verdict": "unproven",
        "doubt": doubt,
        "do": _ELSEWHERE,
        "because": f"{doubt} ({finding.because})",
    }
    return finding.model_copy(update=update)


def _magnetic_doubts(design: Design, spot: Place, found: Strongest) -> tuple[str, ...]:
    """Return why the magnetic field of a spot is not known in part; that the bodies are near is no reason."""
    low = spot.height if spot.height is not None else spot.floor or 0.0
    below = low < 0.0 and design.ground_name != "none"
    reasons = {"the conductor runs through it": found.nearest == 0.0, "part of it is below the ground": below}
    return tuple(reason for reason, holds in reasons.items() if holds)
