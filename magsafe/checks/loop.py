"""How large is the loop, do both methods agree, does the signal fit, is its Q possible?"""

from magsafe import words
from magsafe.analysis.chain import STUDY
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, judge, stopped, undecided, unproven
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design
from magsafe.physics.small_loop import STUDY as CLOSED_FORM_STUDY
from magsafe.physics.small_loop import UNIFORM_CURRENT
from magsafe.physics.thin_wire import FULL_WAVE
from magsafe.rules.duty import mode_named
from magsafe.spread import Spread

MOST_SWR = 10.0  # of a full-wave loop at 50 ohm: beyond it the match carries more volts than the loop (common practice)

_SIZE = Check(
    "loop.size",
    "Is the loop of a size that can be used and computed?",
    "change what is named",
    STUDY,
    "1",
)
_METHODS = Check(
    "loop.methods_agree",
    "Do the solved current and the closed forms agree?",
    "check the sizes in the design; if they are right, trust neither and have the loop measured",
    f"Foster 1944, Balanis, Storer 1956 (memory); {CLOSED_FORM_STUDY}",
    "1",
)
_BANDWIDTH = Check(
    "loop.bandwidth",
    "Does the signal fit between the points of SWR 2?",
    "retune within the signal's width, or use a narrower mode or a larger loop",
    "Yaghjian & Best 2005 (memory)",
    "Hz",
    dangerous="low",
)
_Q_BOUND = Check(
    "loop.q_bound",
    "Is Q at least what any antenna of this size must have?",
    "check the sizes and losses in the design: one of them is wrong",
    "McLean 1996 (title and abstract read, formula from memory); Chu 1948 (memory)",
    "1",
    dangerous="low",
)


def size(design: Design, point: OperatingPoint) -> Finding:
    """Is the loop small, medium, or beyond what a capacitor tunes?"""
    value, at = point.figures.perimeter_in_wavelengths.spread, words.frequency(point.transmission.frequency)
    if point.beyond_tuning:
        limit = words.amount(point.tuning_limit or 0.0, "Hz", "MHz")
        text = (
            f"{at} lies above the port's anti-resonance at {limit}: from there on the loop is capacitive at its port, "
            "and no series capacitor tunes it"
        )
        do = f"use it below {limit}, make it smaller, or use it without a capacitor as a full-wave loop"
        return stopped(_SIZE, value, text, do)
    if point.out_of_range:
        return unproven(_SIZE, "; ".join(point.out_of_range), value=value, limit=FULL_WAVE.high)
    found = value.likely or 0.0
    if design.capacitor.kind == "none":
        resonance, swr = point.figures.nearest_resonance.spread.likely, point.figures.swr_at_50_ohm.spread.likely or 0.0
        near = "" if resonance is None else f", its nearest resonance at {words.amount(resonance, 'Hz', 'MHz')}"
        if resonance is None or swr > MOST_SWR:
            text = f"without a capacitor a loop of {found:.3g} wavelengths has an SWR of {swr:.3g} at 50 ohm{near}"
            volts = words.amount(point.figures.terminal_peak_voltage.spread.likely or 0.0, "V", qualifier="peak")
            return unproven(
                _SIZE,
                f"{text}; a match would carry {volts}, and none is computed",
                value=value,
                do="use it near a resonance, or give it a capacitor",
            )
        return holds(_SIZE, value, FULL_WAVE.high, f"a full-wave loop of {found:.3g} wavelengths{near}")
    named = "small" if UNIFORM_CURRENT.holds(found) else "medium"
    text = f"a {named} loop: its perimeter is {found:.3g} wavelengths"
    if point.tuning_limit is not None:
        text += f"; a capacitor tunes it up to {words.amount(point.tuning_limit, 'Hz', 'MHz')}"
    if point.opinion is not None and named == "medium":
        voltage, quality, efficiency = point.opinion.plain
        text += (
            f". The small-loop forms, which take the current as uniform, would give {_off(voltage)} in volts, "
            f"{_off(quality)} in Q and {_off(efficiency)} in efficiency"
        )
    return holds(_SIZE, value, FULL_WAVE.high, text)


def methods_agree(point: OperatingPoint) -> Finding | None:
    """Do the closed forms agree with the solved current, within their stated error? None where they do not reach."""
    if point.opinion is None:
        return None
    worst = max(point.opinion.compared, key=lambda each: each.share)
    text = ", ".join(
        f"{each.figure} {_off(each.ratio)} ({_off(each.least)} to {_off(each.most)} allowed)"
        for each in point.opinion.compared
    )
    said = f"solved against closed forms, in free space: {text}"
    if worst.share > 1.0:
        return unproven(_METHODS, f"{said}. The {worst.figure} disagree, so neither is proven", limit=1.0)
    return holds(_METHODS, Spread.exact(worst.share), 1.0, said)


def _off(ratio: float) -> str:
    percent = round(100.0 * (ratio - 1.0), 1)
    return f"{percent:+.1f} %" if percent else "no change"


def bandwidth(point: OperatingPoint) -> Finding:
    """Does the signal fit between the points of SWR 2? At worst narrow: a signal that does not fit harms nobody."""
    transmission, value = point.transmission, point.figures.swr2_bandwidth.spread
    signal, evidence = transmission.signal_bandwidth, "stated in the design"
    if signal is None and transmission.mode is not None:
        signal, evidence = mode_named(transmission.mode).signal_bandwidth, "common practice"
    if not value.known:
        return unproven(_BANDWIDTH, "; ".join(point.out_of_range))
    if signal is None:
        return undecided(_BANDWIDTH, value, _NO_WIDTH, "state transmission.signal_bandwidth")
    return judge(_BANDWIDTH, value, signal, 1.0, worst="narrow", provenance=evidence)


_NO_WIDTH = "transmission.signal_bandwidth is not given and no mode tells it, so only a bare carrier was tried"


def q_bound(point: OperatingPoint) -> Finding:
    """Is Q at least the efficiency times the lower bound for an antenna of this size?"""
    if not point.bound_ratio.known:
        return unproven(_Q_BOUND, "; ".join(point.out_of_range))
    return judge(_Q_BOUND, point.bound_ratio, 1.0, 1.0, provenance="computed")
