"""Is the loop that was built the loop that is computed: the measured Q against the computed one."""

from dataclasses import replace
from datetime import date

from magsafe import words
from magsafe.analysis.chain import Chain
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, stopped, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.as_built import standing
from magsafe.design.model import Design
from magsafe.spread import Spread

MEASURED = "loop.measured"
_CHECK = Check(
    MEASURED,
    "Is the Q that was measured the Q that is computed?",
    "measure again with `magsafe measured DESIGN --save`, and judge the loop by that",
    "the record in [measured]; Yaghjian & Best 2005 (memory)",
    "1",
)
_SAME = 0.005  # of the resistance: what rounding and reading leave
_TOO_GOOD = (
    "do not key it: check the sizes, the frequency and the line's loss that was unfolded; the volts are higher than "
    "the parts can make"
)
_TOO_POOR = (
    "look at joints, wiper, ground and metal near the loop for what gets warm; state what they are, and measure again"
)


def as_built(design: Design, point: OperatingPoint) -> Finding | None:
    """Is the measured Q the computed one, within the uncertainty of both? None where nothing was measured there."""
    found = standing(design, point.transmission.frequency)
    if found is None:
        return None
    made, read = point.chain, found.record.unloaded_q
    stated = None if read is None else Spread(read.low, read.likely, read.high)
    if design.capacitor.kind == "none":
        return unproven(_CHECK, "a Q was measured; a loop without a capacitor is not computed by one", stated)
    if found.why_not:
        return unproven(_CHECK, f"a Q was measured and does not count: {found.why_not}", stated)
    if made is None or made.measured is None:
        return unproven(_CHECK, "; ".join(point.out_of_range) or "the loop is not computed", stated)
    return _judged(made, made.measured, f"measured on {_when(found.record.date)}")


def _judged(made: Chain, measured: Spread, when: str) -> Finding:
    """Hold a measured Q against the one that the parts make."""
    computed = computed_quality(made)
    said = f"{when}: {_told(measured)}; computed from the parts: {_told(computed)}"
    if computed.high is not None and (measured.low or 0.0) > computed.high:
        because = f"{said}. It is higher than the parts can make it: the model, an input or the reading is wrong"
        return stopped(_CHECK, measured, because, f"{_TOO_GOOD}{_better(made, measured)}")
    if computed.low is not None and (measured.high or 0.0) < computed.low:
        because = f"{said}. {_missing(made)}, so the heat of no part is proven"
        return unproven(_CHECK, because, measured, _TOO_POOR)
    return holds(_CHECK, measured, None, f"{said}. They agree; {_difference(made)}")


def _better(made: Chain, measured: Spread) -> str:
    """Return what else to do where parts that are better than is typical would explain it; empty where none would."""
    parts = replace(made, measured=None)
    most = parts.dangerous(parts.quality, "bare") * (1.0 + parts.quality_error)
    if not made.typical or (measured.low or 0.0) > most:
        return ""
    return f"; if its parts are better than is typical ({', '.join(made.typical)}), state what they lose"


def computed_quality(made: Chain) -> Spread:
    """Return the unloaded Q as the parts make it, with its stated error, whatever was measured."""
    parts = replace(made, measured=None)
    return parts.spread(parts.quality).widened(parts.quality_error, parts.quality_error)


def _when(stated: str | None) -> str:
    try:
        return date.fromisoformat(stated or "").isoformat()
    except ValueError:
        return words.short(stated or "a day not told")


def _told(quality: Spread) -> str:
    return f"Q {words.amount(quality.likely or 0.0, '1')} {words.ends(quality, '1', '')}".rstrip()


def _difference(made: Chain) -> str:
    """Return what the likely values leave unexplained."""
    more = made.unexplained("likely", made.likely)
    if abs(more) < _SAME * made.resistance("likely", made.likely):
        return "their likely values are the same"
    return f"likely {_milliohm(abs(more))} {'more' if more >= 0.0 else 'less'} than computed"


def _missing(made: Chain) -> str:
    """Return how much resistance, and of the power at the loop, no part accounts for."""
    likely = made.unexplained("likely", made.likely)
    most = max(made.resistance_of_parts("high", each) for each in made.every)
    least = max(0.0, min(made.resistance("low", each) for each in made.every) - most)
    power = (made.power.likely or 0.0) * likely / made.resistance("likely", made.likely)
    return (
        f"{_milliohm(likely)} more than computed ({_milliohm(least)} beyond all that the parts may have): "
        f"{words.amount(power, 'W')} key-down go where no part accounts for them"
    )


def _milliohm(resistance: float) -> str:
    return words.amount(resistance, "ohm", "m\u03a9")
