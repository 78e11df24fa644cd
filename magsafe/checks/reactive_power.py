"""Does the capacitor stand its reactive power? Of ceramics that is the limit between those of volts and amps."""

from math import sqrt

from magsafe.analysis.capacitor_parts import PartUse, main_part
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import beyond_rated_air, uncounted_heat
from magsafe.checks.judge import Check, in_proportion, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Capacitor, Design
from magsafe.design.ratings import look_for
from magsafe.spread import Spread

_REACTIVE = Check(
    "capacitor.reactive_power",
    "Does the capacitor stand its reactive power, RMS volts times RMS amps?",
    "fit a capacitor with a higher reactive-power rating, or share the current between several",
    "the capacitor's rating as stated; such ratings are for still air of 30 degC (a maker's guide, seen)",
    "W",
    shown="kVA",
)


def reactive_power(design: Design, point: OperatingPoint) -> tuple[Finding, ...]:
    """Does the capacitor stand its reactive power? Nothing where other ratings decide."""
    part, use = design.capacitor, main_part(point)
    if part.rated_reactive_power is not None:
        return (against_reactive_power(_REACTIVE, design, point, use, part.rated_reactive_power),)
    missing = _no_rating(part, point.transmission.frequency)
    return (unproven(_REACTIVE, missing, _value(design, use), look_for(part.kind)),) if missing else ()


def against_reactive_power(check: Check, design: Design, point: OperatingPoint, use: PartUse, limit: float) -> Finding:
    """Hold the reactive power of one part against its rating [VA]; it grows as the power itself."""
    value = _value(design, use)
    missing = "; ".join(point.out_of_range) or use.missing
    if missing or value.high is None or use.bare_voltage is None or use.bare_current is None:
        return unproven(check, missing or "the high end of the figure is not known", value)
    bare = use.bare_voltage / _over(design) * use.bare_current
    margin = design.margins.current
    thin = dict.fromkeys(filter(None, (beyond_rated_air(design), use.thin_voltage, use.thin_current)))
    return judge(
        check,
        value,
        limit,
        margin,
        bare_end=bare,
        power=point.power,
        powers=in_proportion(point.power, max(bare, value.high), limit, margin),
        thin="; ".join(thin),
        provenance="stated in the design",
    )


def _over(design: Design) -> float:
    """Return the crest over the RMS volts that heat: what the envelope overshoots at key-down is too short for that."""
    return sqrt(2.0) * design.margins.overshoot_ratio


def _value(design: Design, use: PartUse) -> Spread:
    over = _over(design)
    return Spread(
        *(
            None if volts is None or amps is None else volts / over * amps
            for volts, amps in (
                (use.voltage.low, use.current.low),
                (use.voltage.likely, use.current.likely),
                (use.voltage.high, use.current.high),
            )
        )
    )


def _no_rating(part: Capacitor, frequency: float) -> str:
    """Return why volts and amps do not decide for a part that states no reactive power; empty where they do.

    Between the frequencies at which volts and at which amps are the limit, a solid dielectric's heat is. A current that
    is stated for this frequency or a lower one counts it: there the same heat allows no more.
    """
    if part.kind not in ("ceramic", "mica") or (part.kind == "mica" and part.rated_current_at is None):
        return ""
    if part.rated_current is None:
        return "neither capacitor.rated_reactive_power nor capacitor.rated_current is given"
    uncounted = uncounted_heat(part, frequency)
    return f"capacitor.rated_reactive_power is not given, and {uncounted}" if uncounted else ""
