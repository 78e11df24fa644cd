"""Is the loop inside every method's range, does the signal fit, is its Q possible?"""

from magsafe.analysis.operating_point import OperatingPoint
from magsafe.checks.judge import Check, holds, judge, undecided, unproven
from magsafe.checks.sheet import Finding
from magsafe.physics.small_loop import TAPERED_CURRENT, UNIFORM_CURRENT
from magsafe.rules.duty import mode_named

_SIZE = Check(
    "loop.size",
    "Is every method inside its range?",
    "change what is named, or wait for a method that reaches it",
    TAPERED_CURRENT.source,
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


def size(point: OperatingPoint) -> Finding:
    """Is every method inside its range?"""
    value = point.figures.perimeter_in_wavelengths.spread
    if point.out_of_range:
        return unproven(_SIZE, "; ".join(point.out_of_range), value=value, limit=TAPERED_CURRENT.high)
    found = value.likely or 0.0
    text = f"the perimeter is {found:.3g} wavelengths, the tapered closed forms hold to {TAPERED_CURRENT.high:g}"
    plain = point.without_taper
    if plain is not None and not UNIFORM_CURRENT.holds(found):
        text += (
            f"; without the taper the small-loop forms would give {_off(plain.voltage)} in volts, "
            f"{_off(plain.quality)} in Q and {_off(plain.efficiency)} in efficiency"
        )
    return holds(_SIZE, value, TAPERED_CURRENT.high, text)


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
