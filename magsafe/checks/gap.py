"""Does the air between the capacitor's plates stand the volts?"""

from dataclasses import replace

from magsafe import words
from magsafe.analysis.capacitor_parts import main_part
from magsafe.analysis.gap import GapVolts, gap_volts, has_air_gap
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design
from magsafe.physics.air_gap import ASPECT

_GAP = Check(
    "capacitor.gap",
    "Does the air gap stand the crest of the RF?",
    "fit a capacitor with a wider gap, two gaps in series, or thicker and rounded plates",
    "breakdown in a uniform field: a fit in Kuffel, Zaengl & Kuffel (memory); edges: Peek 1929 (constants seen on "
    "public pages); the derations as listed",
    "V",
    qualifier="peak",
)
_LISTED = "what radio frequency, edges and dust take off is extrapolated or common practice"


def gap(design: Design, point: OperatingPoint) -> tuple[Finding, ...]:
    """Does the air gap stand the crest of the RF? Nothing where no gap of air is stated."""
    return (held_by_gap(_GAP, design, point),) if has_air_gap(design.capacitor) else ()


def by_gap_alone(check: Check, design: Design, point: OperatingPoint) -> Finding:
    """Hold the volts against the gap of a capacitor that states no rating."""
    by_gap = replace(check, do=_GAP.do, source=_GAP.source)
    return held_by_gap(by_gap, design, point, "no rating is stated, so the gap decides")


def asked_of(design: Design, found: GapVolts) -> float:
    """Return the margin asked to the breakdown of a gap: that of volts, and at least the working factor."""
    return max(design.margins.voltage, 1.0 / found.working.factor)


def held_by_gap(check: Check, design: Design, point: OperatingPoint, first: str = "") -> Finding:
    """Hold the volts against the breakdown of the gap: a stop is a flash-over, and no verdict is clear."""
    use = main_part(point)
    if missing := "; ".join(point.out_of_range) or use.missing:
        return unproven(check, missing, use.voltage)
    try:
        found = gap_volts(design, point.transmission.frequency)
    except ValueError as error:
        return unproven(check, str(error), use.voltage, "judge it by other means")
    made = judge(
        check,
        use.voltage,
        found.breakdown,
        asked_of(design, found),
        bare_end=use.bare_voltage,
        power=point.power,
        thin="; ".join(filter(None, (first, found.text, _LISTED, use.thin_voltage))),
        provenance="computed, lowered by common practice",
    )
    return _doubted(made, design, found) if found.doubt else made


def _doubted(made: Finding, design: Design, found: GapVolts) -> Finding:
    """Return the finding of a gap that is known only from above: it proves nothing, and a stop stays one."""
    update: dict[str, object] = {"doubt": found.doubt, "because": f"{found.doubt} ({made.because})"}
    if made.verdict != "stop":
        update["verdict"] = "unproven"
        update["do"] = _what_to_state(made, design, found)
    return made.model_copy(update=update)


def _what_to_state(made: Finding, design: Design, found: GapVolts) -> str:
    part = design.capacitor
    if found.enough is None:
        return "fit thicker plates, or judge it by other means"
    advice = "measure the plates and state capacitor.plate_thickness"
    worst = None if made.value is None else made.value.high
    if worst is not None and part.gap is not None and found.enough >= worst * asked_of(design, found):
        thick = words.amount(ASPECT.low * part.gap, "m", "mm")
        return f"{advice}: from {thick} up they keep the margin, by the figure's end with typical losses"
    return advice
