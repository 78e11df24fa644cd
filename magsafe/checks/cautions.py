"""What can happen to whom, and how to avoid it. On every sheet, whatever its verdict."""

from scipy.constants import zero_Celsius

from magsafe import words
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.design.warmth_tables import touch_thresholds

MELTED = 1300.0  # K: above, no loop is left


def cautions(points: tuple[OperatingPoint, ...], *, tuned: bool) -> tuple[str, ...]:
    """Return the cautions, the computed volts in the first of them."""
    return (
        f"RF burns. {_volts(points, tuned=tuned)} A touch burns deeply, without the warning of a shock. "
        "Fence the loop, keep people, pets and dry or flammable things a metre and more from conductor and capacitor, "
        "also at a few watts.",
        "Tuning. Never turn the capacitor by hand at the loop under power. Tune at 5 W or less from a distance, then "
        "raise the power in steps. If the SWR creeps or jumps during a carrier, stop: something arcs or heats.",
        "Fields. Nobody stays near the loop during a transmission until exposure is proven for that place. Limits "
        "protect against established short-term effects only.",
        "Implants. The limits do not protect wearers of pacemakers, pumps, neurostimulators or hearing implants. "
        "They keep out until their clinician has cleared it.",
        f"Hot parts. {_warm(points)}Conductor, joints and capacitor stay hot after key-down; solder can let go under "
        "load.",
        "Stored charge. Capacitors may hold a charge from wind or static. Discharge them before touching. Vacuum "
        "glass can implode: wear eye protection.",
        "Power lines. Keep at least one and a half times the full height of mast and loop away from overhead lines.",
        "Lightning. Disconnect and ground the feed line before a storm; no work in wind or thunder. No loop and no "
        "sheet makes an aerial lightning-proof.",
        "Law. This sheet reports what was computed against the limits it names. Local regulation, the licence and a "
        "qualified person's judgement go before it.",
    )


def _warm(points: tuple[OperatingPoint, ...]) -> str:
    """Return how hot the conductor may get, where that burns skin."""
    hottest = max((point.warmth.temperature().high or 0.0 for point in points if point.warmth is not None), default=0.0)
    burns = [each for each in touch_thresholds() if each.temperature <= hottest]
    if not burns:
        return ""
    least = min(burns, key=lambda each: each.contact)
    reached = f"{hottest - zero_Celsius:.0f} degC" if hottest < MELTED else "a temperature at which it melts"
    return (
        f"The conductor may reach {reached}; from {least.temperature - zero_Celsius:.0f} degC a touch of "
        f"{words.duration(least.contact)} burns ({least.source}; {least.provenance}). "
    )


def _volts(points: tuple[OperatingPoint, ...], *, tuned: bool) -> str:
    figures = [
        point.figures.capacitor_peak_voltage if tuned else point.figures.terminal_peak_voltage for point in points
    ]
    found = [
        (figure.spread.high or figure.spread.likely or 0.0, point.power)
        for figure, point in zip(figures, points, strict=True)
    ]
    volts, power = max(found)
    if volts == 0.0:
        return "The loop carries kilovolts even at a few watts."
    at_five = max(each * (5.0 / watts) ** 0.5 for each, watts in found)
    first = f"The loop carries up to {words.amount(volts, 'V', qualifier='peak')} at {words.watts(power)}"
    return f"{first}." if power <= 5.0 else f"{first}, and still {words.amount(at_five, 'V', qualifier='peak')} at 5 W."
