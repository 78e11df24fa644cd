"""Is the loop that was built the loop that is computed: the measured Q against the computed one."""

from collections.abc import Sequence
from dataclasses import replace
from datetime import date

from magsafe import words
from magsafe.analysis.chain import Chain, least_quality
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, stopped, undecided, unproven
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
    "check the line's loss that was unfolded, the calibration and the feed, which read too low as well; then look at "
    "joints, wiper, ground and metal near the loop for what gets warm, state what they are, and measure again"
)
_LOOK = "look at joints, wiper, ground and metal near the loop"
_WORTH_A_LOOK = 0.05  # of the resistance


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
    if made is None or made.read is None:
        return unproven(_CHECK, "; ".join(point.out_of_range) or "the loop is not computed", stated)
    return _judged(made, made.read, f"measured on {_when(found.record.date)}", found.record.notes)


def _judged(made: Chain, measured: Spread, when: str, notes: Sequence[str]) -> Finding:
    """Hold a measured Q against the one that the parts make."""
    computed = computed_quality(made)
    said = f"{when}: {_told(measured)}; computed from the parts: {_told(computed)}"
    if computed.high is not None and (measured.low or 0.0) > computed.high:
        because = f"{said}. It is higher than the parts can make it: the model, an input or the reading is wrong"
        return stopped(_CHECK, measured, because, f"{_TOO_GOOD}{_better(made, measured)}")
    if (measured.high or 0.0) < least_quality(made):
        open_end = "" if computed.low is not None else "; no height is stated that would bound what the ground takes"
        because = f"{said}. {_missing(made, measured)}, so the heat of no part is proven{open_end}"
        return unproven(_CHECK, f"{because}. For volts, amps and fields the parts count", measured, _TOO_POOR)
    agreed = f"{said}. They agree; {_difference(made)}"
    if notes:
        do = "sweep again, once upwards and once downwards, the analyser calibrated at its port"
        return undecided(_CHECK, measured, f"{agreed}. But of the reading: {'; '.join(notes)}", do)
    return holds(_CHECK, measured, None, agreed)


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
    look = f": {_LOOK}" if more > _WORTH_A_LOOK * made.resistance("likely", made.likely) else ""
    return f"likely {_milliohm(abs(more))} {'more' if more >= 0.0 else 'less'} than computed{look}"


def _missing(made: Chain, read: Spread) -> str:
    """Return how much resistance, and of the power at the loop, no part accounts for."""
    likely = made.unexplained("likely", made.likely)
    most = max(made.resistance_of_parts("high", each) for each in made.every)
    as_read = replace(made, measured=read)
    least = max(0.0, min(as_read.resistance("low", each) for each in made.every) - most)
    power = (made.power.likely or 0.0) * likely / made.resistance("likely", made.likely)
    return (
        f"{_milliohm(likely)} more than computed ({_milliohm(least)} beyond all that the parts may have): "
        f"{words.amount(power, 'W')} key-down go where no part accounts for them"
    )


def _milliohm(resistance: float) -> str:
    return words.amount(resistance, "ohm", "m\u03a9")
