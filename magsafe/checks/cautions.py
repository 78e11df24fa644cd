"""What can happen to whom, and how to avoid it. On every sheet, whatever its verdict."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import ceil, inf

from scipy.constants import zero_Celsius

from magsafe import words
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.heat import JOINT
from magsafe.checks.sheet import Finding
from magsafe.design.warmth_tables import TouchThreshold, touch_thresholds

MELTED = 1300.0  # K: above, no loop is left
_MOST_PARTS = 3  # named; a reader needs the hottest, and that there are more


@dataclass(frozen=True, slots=True)
class HotPart:
    """A part that may burn skin, and how hot it may get [K]."""

    name: str
    temperature: float


def least_touch() -> TouchThreshold:
    """Return the lowest temperature at which bare metal burns at all, however long it is touched."""
    return min(touch_thresholds(), key=lambda each: each.temperature)


def hot_parts(conductor: float, joints: Sequence[tuple[str, float]]) -> tuple[HotPart, ...]:
    """Return what may be hot enough to burn, the hottest first.

    Parameters
    ----------
    conductor : its temperature at the high end [K]
    joints : name and temperature at the high end of each [K], by `joint_temperatures`
    """
    hottest: dict[str, float] = {}
    for name, temperature in (("conductor", conductor), *joints):
        hottest[name] = max(temperature, hottest.get(name, 0.0))
    burning = [HotPart(name, each) for name, each in hottest.items() if each >= least_touch().temperature]
    return tuple(sorted(burning, key=lambda each: -each.temperature))


def joint_temperatures(findings: Sequence[Finding], air: float, stronger: float = 1.0) -> Iterator[tuple[str, float]]:
    """Yield each joint with its temperature at the high end [K], infinite where that is not known.

    Parameters
    ----------
    findings : those about joints are looked at
    air : the temperature of the air [K]
    stronger : times what the findings counted as a joint's power
    """
    for finding in findings:
        if finding.id.startswith(JOINT):
            rise = None if finding.value is None else finding.value.high
            name = f"joint {words.short(finding.id.removeprefix(JOINT))}"
            yield name, inf if rise is None else air + rise * stronger


def told_hot(parts: Sequence[HotPart]) -> str:
    """Return hot parts with their temperatures, rounded up: `joint wiper 162 degC, conductor 60 degC`."""
    named = [f"{each.name} {_degrees(each.temperature)}" for each in parts[:_MOST_PARTS]]
    rest = len(parts) - _MOST_PARTS
    return f"{', '.join(named)}{f', {rest} more' if rest > 0 else ''}"


def _degrees(kelvin: float) -> str:
    if kelvin == inf:
        return "a temperature that is not known"
    return f"{ceil(kelvin - zero_Celsius - 1e-9)} degC" if kelvin < MELTED else "a temperature at which it melts"


def cautions(points: tuple[OperatingPoint, ...], *, tuned: bool, findings: Sequence[Finding] = ()) -> tuple[str, ...]:
    """Return the cautions, the computed volts in the first of them.

    Parameters
    ----------
    points : every transmission
    tuned : whether a capacitor tunes the loop
    findings : those of all transmissions; how hot each joint gets comes from them
    """
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
        f"Hot parts. {_warm(points, findings)}Conductor, joints and capacitor stay hot after key-down; solder can "
        "let go under load.",
        "Stored charge. Capacitors may hold a charge from wind or static. Discharge them before touching. Vacuum "
        "glass can implode: wear eye protection.",
        "Power lines. Keep at least one and a half times the full height of mast and loop away from overhead lines.",
        "Lightning. Disconnect and ground the feed line before a storm; no work in wind or thunder. No loop and no "
        "sheet makes an aerial lightning-proof.",
        "Law. This sheet reports what was computed against the limits it names. Local regulation, the licence and a "
        "qualified person's judgement go before it.",
    )


def _warm(points: tuple[OperatingPoint, ...], findings: Sequence[Finding]) -> str:
    """Return how hot conductor and joints may get, where that burns skin."""
    warm = [point.warmth for point in points if point.warmth is not None]
    hottest = max((each.temperature().high or 0.0 for each in warm), default=0.0)
    air = max((each.air_temperature for each in warm), default=inf)
    parts = hot_parts(hottest, tuple(joint_temperatures(findings, air)))
    if not parts:
        return ""
    burns = [each for each in touch_thresholds() if each.temperature <= parts[0].temperature]
    least = min(burns, key=lambda each: each.contact)
    return (
        f"At worst: {told_hot(parts)}; measure before a hand touches it. From "
        f"{least.temperature - zero_Celsius:.0f} degC a touch of {words.duration(least.contact)} burns "
        f"({least.source}; {least.provenance}). "
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
