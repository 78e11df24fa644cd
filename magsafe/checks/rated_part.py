"""Does a part whose kind is not stated, and which may be solid, stand its own volts and amps?"""

from math import sqrt

from magsafe import words
from magsafe.analysis.capacitor_parts import CHANGE, PartUse
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import beyond_rated_air, rated_current
from magsafe.analysis.rated_voltage import altitude_derating
from magsafe.checks.judge import Check, judge, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design, Padding, SeriesCapacitor
from magsafe.spread import Spread

RatedPart = Padding | SeriesCapacitor

_LOOK_VOLTS = (
    "look in the part's data sheet for its volts at radio frequency, and state rated_voltage and rated_voltage_kind; "
    "the volts printed on a body are often a direct or a test voltage"
)
_LOOK_AMPS = "look in the part's data sheet for its amps at this frequency, and state rated_current"


def voltage_of_part(
    check: Check, design: Design, point: OperatingPoint, of: tuple[RatedPart, PartUse], called: str
) -> Finding:
    """Hold the volts across a part of unknown kind against its rating.

    Parameters
    ----------
    check : what is asked
    design, point : the design and its transmission
    of : the part, and what it sees
    called : what the part is called in a sentence
    """
    part, use = of
    if missing := use.missing or _not_rated(part, use.bare_voltage or use.voltage.high, called):
        return unproven(check, missing, use.voltage, CHANGE if use.missing else _LOOK_VOLTS)
    limit = (part.rated_voltage or 0.0) * (sqrt(2.0) if part.rated_voltage_kind == "RMS RF" else 1.0)
    thinner = altitude_derating(design)
    lowered = "" if thinner is None else f"{thinner.factor:.3g} of it is taken in {thinner.name} ({thinner.evidence})"
    return judge(
        check,
        use.voltage,
        limit if thinner is None else limit * thinner.factor,
        design.margins.voltage,
        bare_end=use.bare_voltage,
        power=point.power,
        thin="; ".join(filter(None, (lowered, use.thin_voltage))),
        provenance="stated in the design",
    )


def _not_rated(part: RatedPart, crest: float | None, called: str) -> str:
    if part.rated_voltage is None:
        return f"rated_voltage of {called} is not given"
    kind = part.rated_voltage_kind
    if kind is None:
        as_peak = ""
        if crest:
            as_peak = f"; as peak RF it would be {part.rated_voltage / crest:.3g} times the volts at worst"
        return f"rated_voltage_kind of {called} is not given: the rating may be of peak RF, RMS RF or DC{as_peak}"
    if kind.startswith("DC"):
        return f"the rating is a {kind} voltage; of a part of unknown kind that tells nothing at radio frequency"
    return ""


def current_of_part(
    check: Check, design: Design, point: OperatingPoint, of: tuple[RatedPart, PartUse, Spread], called: str
) -> Finding:
    """Hold the amps through a part against its rating; `of` holds what it turns into heat too, key-down [W].

    The rest is as in `voltage_of_part`.
    """
    part, use, turned = of
    heat = turned.high
    warm = "" if heat is None else f"; it turns at most {words.amount(heat, 'W')} into heat, key-down"
    if part.rated_current is None or use.missing:
        missing = use.missing or f"rated_current of {called} is not given"
        return unproven(check, f"{missing}{warm}", use.current, CHANGE if use.missing else _LOOK_AMPS)
    limit, lowered = rated_current(part, point.transmission.frequency)
    above = ", lowered above its frequency by common practice" if lowered else ""
    made = judge(
        check,
        use.current,
        limit,
        design.margins.current,
        bare_end=use.bare_current,
        power=point.power,
        thin="; ".join(filter(None, (lowered, beyond_rated_air(design), use.thin_current))),
        provenance=f"stated in the design{above}",
    )
    return made.model_copy(update={"because": f"{made.because}{warm}"})
