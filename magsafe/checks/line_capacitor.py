"""A capacitor made at home, from its sizes: what they give, and does its dielectric stand the volts?"""

from collections.abc import Iterator
from dataclasses import replace

from magsafe import words
from magsafe.analysis.capacitor_parts import main_part
from magsafe.analysis.chain import tube_metal
from magsafe.analysis.dielectric_stress import WORKING, dielectric_stress
from magsafe.analysis.line_capacitor import KEYS, capacitance, is_complete, missing_keys, stated_keys
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, judge, undecided, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design

_GEOMETRY = Check(
    "capacitor.geometry",
    "Do the capacitor's sizes give the capacitance that is stated?",
    "check inner_diameter, outer_diameter, length, plate_area and gap, or measure the capacitance",
    "coaxial line or parallel plates (any textbook); the dielectric as listed",
    "F",
)
_DIELECTRIC = Check(
    "capacitor.dielectric",
    "Does the dielectric, with the air beside it, stand the crest of the RF?",
    "use a thicker dielectric, or fill what air is left beside it",
    "strength as listed, of which 1/10 to 1/5 is common practice at radio frequency; air: a fit in Kuffel, Zaengl & "
    "Kuffel (memory), with the derations as listed",
    "V",
    qualifier="peak",
)
NEARLY = 1.25  # beyond what sizes give: what a slip with the rule or a loose sleeve may be (common practice)


def sizes(design: Design, point: OperatingPoint) -> Iterator[Finding]:
    """Yield what the sizes of a capacitor made at home tell; nothing where none are stated."""
    part = design.capacitor
    stated = stated_keys(part)
    if not stated:
        return
    if not is_complete(part):
        yield unproven(_GEOMETRY, _incomplete(design))
        return
    yield _geometry(design, point)
    yield _dielectric(_DIELECTRIC, design, point)


def _incomplete(design: Design) -> str:
    part = design.capacitor
    stated = " and ".join(stated_keys(part))
    if part.kind not in KEYS:
        return (
            f"{stated}: kept from the design, but nothing is computed from it of a capacitor of this kind ({part.kind})"
        )
    return f"{stated} without {' and '.join(missing_keys(part))}: nothing follows from it"


def _geometry(design: Design, point: OperatingPoint) -> Finding:
    part = design.capacitor
    try:
        given = capacitance(part, tube_metal(design), point.transmission.frequency)
    except ValueError as error:
        return unproven(_GEOMETRY, f"at {words.frequency(point.transmission.frequency)} it is no capacitor: {error}")
    stated = part.fixed if part.capacitance is None else part.capacitance.max
    low, high = given.low or 0.0, given.high or 0.0
    ends = f"{words.number(low, 'F', 'pF')} to {words.amount(high, 'F')}"
    sized = f"its sizes give {ends} at {words.frequency(point.transmission.frequency)}"
    if stated is None:
        return holds(_GEOMETRY, given, None, f"{sized}; no capacitance is stated beside them")
    text = f"{words.amount(stated, 'F')} is stated, {sized}"
    if low <= stated <= high:
        return holds(_GEOMETRY, given, None, text)
    if low / NEARLY <= stated <= high * NEARLY:
        return undecided(_GEOMETRY, given, f"{text}: they nearly agree", _GEOMETRY.do)
    return unproven(_GEOMETRY, f"{text}: one of them is wrong", given)


def by_sizes_alone(check: Check, design: Design, point: OperatingPoint) -> Finding:
    """Hold the volts against the dielectric of a capacitor that states no rating."""
    by_dielectric = replace(check, do=_DIELECTRIC.do, source=_DIELECTRIC.source)
    return _dielectric(by_dielectric, design, point, "no rating is stated, so the dielectric decides")


def _dielectric(check: Check, design: Design, point: OperatingPoint, first: str = "") -> Finding:
    use = main_part(point)
    if missing := "; ".join(point.out_of_range) or use.missing:
        return unproven(check, missing, use.voltage)
    try:
        stress = dielectric_stress(design, point.transmission.frequency)
    except ValueError as error:
        return unproven(check, str(error), use.voltage, "judge it by other means")
    listed = "edges and ends are not computed, and what is taken off is common practice"
    return judge(
        check,
        use.voltage,
        stress.voltage,
        max(design.margins.voltage, 1.0 / WORKING),
        bare_end=use.bare_voltage,
        power=point.power,
        thin="; ".join(filter(None, (first, f"the limit is that of {stress.held_by}", listed, use.thin_voltage))),
        provenance="computed, lowered by common practice",
    )
