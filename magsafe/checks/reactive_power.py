"""Does the capacitor stand its reactive power? Of ceramics that is the limit between those of volts and amps."""

from math import sqrt

from magsafe import words
from magsafe.analysis.capacitor_parts import main_part
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, judge, unproven
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
    # What the envelope overshoots at key-down is too short to heat.
    over = sqrt(2.0) * design.margins.overshoot_ratio
    value = Spread(
        *(
            None if volts is None or amps is None else volts / over * amps
            for volts, amps in (
                (use.voltage.low, use.current.low),
                (use.voltage.likely, use.current.likely),
                (use.voltage.high, use.current.high),
            )
        )
    )
    if part.rated_reactive_power is None:
        missing = _no_rating(part, point.transmission.frequency)
        return (unproven(_REACTIVE, missing, value, look_for(part.kind)),) if missing else ()
    missing = "; ".join(point.out_of_range) or use.missing
    if missing or value.high is None or use.bare_voltage is None or use.bare_current is None:
        return (unproven(_REACTIVE, missing or "the high end of the figure is not known", value),)
    limit, margin = part.rated_reactive_power, design.margins.current
    bare = use.bare_voltage / over * use.bare_current
    # It grows as the power itself. Rounded down by more than the last bit, so that the margin is kept there.
    reached = point.power * limit / max(bare, value.high) * (1.0 - 1e-12)
    found = judge(
        _REACTIVE,
        value,
        limit,
        margin,
        bare_end=bare,
        power=point.power,
        powers=(reached / margin, reached),
        thin="; ".join(dict.fromkeys(filter(None, (use.thin_voltage, use.thin_current)))),
        provenance="stated in the design",
    )
    return (found,)


def _no_rating(part: Capacitor, frequency: float) -> str:
    """Return why volts and amps do not decide for a part that states no reactive power; empty where they do.

    Between the frequencies at which volts and at which amps are the limit, a solid dielectric's heat is. A current that
    is stated for this frequency or a lower one counts it: there the same heat allows no more.
    """
    if part.kind not in ("ceramic", "mica"):
        return ""
    at = part.rated_current_at
    if part.rated_current is not None and at is not None:
        if frequency >= at:
            return ""
        return (
            "capacitor.rated_reactive_power is not given, and capacitor.rated_current is that at "
            f"{words.frequency(at)}: below, the same heat allows less"
        )
    if part.kind == "mica":
        return ""
    if part.rated_current is None:
        return "neither capacitor.rated_reactive_power nor capacitor.rated_current is given"
    return (
        "capacitor.rated_reactive_power is not given, nor at which frequency capacitor.rated_current holds: below it "
        "the same heat allows less"
    )
