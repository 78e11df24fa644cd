"""Does the capacitor stand the volts and amps, and can it tune the frequency?"""

from dataclasses import replace

from magsafe.analysis.capacitor_feed import by_capacitors
from magsafe.analysis.capacitor_network import UNSTATED_TOLERANCE
from magsafe.analysis.capacitor_parts import CHANGE, main_capacitance, main_part
from magsafe.analysis.capacitor_reach import capacitance_reach
from magsafe.analysis.chain import tube_metal
from magsafe.analysis.gap import has_air_gap
from magsafe.analysis.line_capacitor import is_complete
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.rated_current import beyond_rated_air, rated_current
from magsafe.analysis.rated_voltage import not_rated, rated_voltage
from magsafe.analysis.soil import LOWEST, is_too_low
from magsafe.checks.gap import by_gap_alone
from magsafe.checks.judge import Check, judge, judge_between, stopped, unproven
from magsafe.checks.line_capacitor import by_sizes_alone
from magsafe.checks.sheet import Finding
from magsafe.design.model import Design
from magsafe.design.ratings import look_for
from magsafe.spread import Spread

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
    part, use = design.capacitor, main_part(point)
    if part.rated_voltage is None and has_air_gap(part):
        return by_gap_alone(_VOLTAGE, design, point)
    if part.rated_voltage is None and is_complete(part):
        return by_sizes_alone(_VOLTAGE, design, point)
    if missing := not_rated(design):
        return unproven(_VOLTAGE, missing, use.voltage, f"{look_for(part.kind)}; or {_FIND}")
    if missing := _not_reached(point) or use.missing:
        return unproven(_VOLTAGE, missing, use.voltage)
    rated = rated_voltage(design, point.transmission.frequency)
    made = judge(
        replace(_VOLTAGE, source=rated.source),
        use.voltage,
        rated.allowed,
        design.margins.voltage,
        bare_end=use.bare_voltage,
        power=point.power,
        thin="; ".join(filter(None, (rated.told if rated.thin else "", use.thin_voltage))),
        provenance=rated.provenance,
    )
    told = f"{made.because}; {rated.told}" if rated.told and not rated.thin else made.because
    return made.model_copy(update={"because": told})


def current(design: Design, point: OperatingPoint) -> Finding:
    """Does the capacitor carry the loop's current?"""
    part, use = design.capacitor, main_part(point)
    value = use.current
    if part.rated_current is None:
        return unproven(_CURRENT, "capacitor.rated_current is not given", value, _FIND)
    if missing := _not_reached(point) or use.missing:
        return unproven(_CURRENT, missing, value, CHANGE if use.missing else None)
    limit, lowered = rated_current(part, point.transmission.frequency)
    above = ", lowered above its frequency by common practice" if lowered else ""
    return judge(
        _CURRENT,
        value,
        limit,
        design.margins.current,
        bare_end=use.bare_current,
        power=point.power,
        thin="; ".join(filter(None, (lowered, beyond_rated_air(design), use.thin_current))),
        provenance=f"stated in the design{above}",
    )


def tuning_range(design: Design, point: OperatingPoint) -> Finding:
    """Can the capacitor tune this frequency, with what its padding leaves for it?"""
    part, frequency = design.capacitor, point.transmission.frequency
    as_stated, value = (_with_match(design, point, each) for each in main_capacitance(point))
    if missing := _not_reached(point) or _too_low(design):
        return unproven(_RANGE, missing, value)
    if impossible := main_part(point).missing:
        return stopped(_RANGE, value, impossible, CHANGE)
    try:
        reach = capacitance_reach(part, tube_metal(design), frequency)
    except ValueError as error:
        return unproven(_RANGE, str(error), value)
    if reach is None:
        lacking = "tolerance of the fixed capacitor" if part.fixed is not None else "capacitance"
        return unproven(_RANGE, f"capacitor.{lacking} is not given", value, _FIND)
    padding = () if point.chain is None else point.chain.network.padding
    guessed = any(each.tolerance is None for each in padding)
    found = judge_between(_RANGE, value, reach.least, reach.most, loose=reach.loose or guessed)
    # What is only usual, or an end of what a dielectric may have, stops nothing.
    open_ended = found.verdict == "stop" and reach.may_hold(as_stated if guessed else value)
    if open_ended and (guessed or reach.by_sizes):
        found = unproven(_RANGE, f"it may or may not reach it: {found.because}", value)
    if not padding:
        return found
    usual = f" (not given for all of it: {100.0 * UNSTATED_TOLERANCE:g} % taken, common practice)" if guessed else ""
    told = f"what the padding and its tolerance{usual} leave for it: {found.because}"
    return found.model_copy(update={"because": told})


def _with_match(design: Design, point: OperatingPoint, needed: Spread) -> Spread:
    """Return what is needed [F] where a series capacitor to the line tunes too: less by up to all of that."""
    if not by_capacitors(design) or needed.low is None or needed.likely is None:
        return needed
    part = design.feed.series_capacitor
    halves = 2.0 if part is not None and part.balanced else 1.0
    matching = point.figures.series_capacitance.spread
    stated = None if part is None else part.capacitance
    likely, most = (stated or each or 0.0 for each in (matching.likely, matching.high))
    return Spread(needed.low - most / halves, needed.likely - likely / halves, needed.high)


def _too_low(design: Design) -> str:
    """Return why the reactance is not computed near soil; empty where it is."""
    if not is_too_low(design):
        return ""
    return (
        f"it is nearer to soil than {LOWEST:g} of its radii, where soil may raise its reactance beyond what is computed"
    )


def _not_reached(point: OperatingPoint) -> str:
    """Return why the figures are not known."""
    return "; ".join(point.out_of_range)
