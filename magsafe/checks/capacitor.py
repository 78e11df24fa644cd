"""Does the capacitor stand the volts and amps, and can it tune the frequency?"""

from math import sqrt

from magsafe import words
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, judge, judge_between, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Capacitor, Design, Padding

_VOLTAGE = Check(
    "capacitor.voltage",
    "Does the capacitor stand the crest of the RF at full power?",
    "fit a capacitor with a higher peak RF rating",
    "the capacitor's rating as stated",
    "V",
    qualifier="peak",
)
_CURRENT = Check(
    "capacitor.current",
    "Does the capacitor carry the loop's current?",
    "fit a capacitor with a higher RF current rating",
    "the capacitor's rating as stated",
    "A",
    qualifier="RMS",
)
_RANGE = Check(
    "capacitor.range",
    "Can the capacitor tune this frequency?",
    "fit a capacitor that reaches it, add padding, or change the loop's size",
    "the capacitor's range as stated",
    "F",
)


_FIND = "look on the part and in its data sheet, and state it in the design"


def voltage(design: Design, point: OperatingPoint) -> Finding:
    """Does the capacitor stand the crest of the RF at full power?"""
    part, value = design.capacitor, point.figures.capacitor_peak_voltage.spread
    missing = _no_voltage_rating(part) or _not_reached(design, point)
    if missing:
        return unproven(_VOLTAGE, missing, value, _FIND if "given" in missing else None)
    factor = sqrt(2.0) if part.rated_voltage_kind == "RMS RF" else 1.0
    return judge(
        _VOLTAGE,
        value,
        (part.rated_voltage or 0.0) * factor,
        design.margins.voltage,
        bare_end=point.bare_voltage,
        power=point.power,
        provenance="stated in the design",
    )


def _no_voltage_rating(part: Capacitor) -> str:
    if part.rated_voltage is None:
        return "capacitor.rated_voltage is not given"
    if part.rated_voltage_kind is None:
        return "capacitor.rated_voltage_kind is not given: the rating may be of peak RF, RMS RF or DC"
    if part.rated_voltage_kind.startswith("DC"):
        return (
            f"the rating is a {part.rated_voltage_kind} voltage; what it allows at RF is not computed by this version"
        )
    return ""


def current(design: Design, point: OperatingPoint) -> Finding:
    """Does the capacitor carry the loop's current?"""
    part, value = design.capacitor, point.figures.capacitor_rms_current.spread
    missing = _not_reached(design, point)
    if part.rated_current is None:
        missing = "capacitor.rated_current is not given"
    if missing:
        return unproven(_CURRENT, missing, value, _FIND if "given" in missing else None)
    limit, frequency = part.rated_current or 0.0, point.transmission.frequency
    provenance, thin = "stated in the design", ""
    if part.rated_current_at is not None and frequency > part.rated_current_at:
        # Series resistance grows as the root of the frequency; the same heat then allows less current.
        limit *= (part.rated_current_at / frequency) ** 0.25
        provenance = "stated in the design, lowered above its frequency by common practice"
        thin = f"above {words.frequency(part.rated_current_at)} the rating is lowered by common practice"
    return judge(
        _CURRENT,
        value,
        limit,
        design.margins.current,
        bare_end=point.bare_current,
        power=point.power,
        thin=thin,
        provenance=provenance,
    )


def tuning_range(design: Design, point: OperatingPoint) -> Finding:
    """Can the capacitor tune this frequency?"""
    part, value = design.capacitor, point.figures.tuning_capacitance.spread
    missing = _not_reached(design, point)
    if part.capacitance is None and part.fixed is None:
        missing = "capacitor.capacitance is not given"
    elif part.fixed is not None and part.tolerance is None:
        missing = "capacitor.tolerance of the fixed capacitor is not given"
    if missing:
        return unproven(_RANGE, missing, value, _FIND if "given" in missing else None)
    if part.capacitance is not None:
        least, most = part.capacitance.min, part.capacitance.max
    else:
        fixed, off = part.fixed or 0.0, part.tolerance or 0.0
        least, most = fixed * (1.0 - off), fixed * (1.0 + off)
    return judge_between(_RANGE, value, least + part.stray, most + part.stray, loose=part.capacitance is None)


def _not_reached(design: Design, point: OperatingPoint) -> str:
    """Return why the figures are not known, or do not hold for the capacitor alone."""
    if point.out_of_range:
        return "; ".join(point.out_of_range)
    if padding_on(design, point.transmission.frequency):
        at = words.frequency(point.transmission.frequency)
        return f"padding is joined at {at}; how it divides volts and amps is not computed by this version"
    return ""


def padding_on(design: Design, frequency: float) -> tuple[Padding, ...]:
    """Return the padding that is joined at a frequency [Hz]."""
    return tuple(part for part in design.capacitor.padding if part.on is None or frequency in part.on)
