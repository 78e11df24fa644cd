"""Does the match fit, and do its parts stand what they see? A mismatch harms nobody, a flash-over may."""

from collections.abc import Iterator, Sequence
from contextlib import suppress

from magsafe.analysis.capacitor_feed import by_capacitors, capacitor_feed
from magsafe.analysis.capacitor_parts import PartUse
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.small_loop_feed import fed, not_coupled, one_for_all, small_loop, wire_radius
from magsafe.checks.capacitor_heat import heat_of_part
from magsafe.checks.judge import Check, judge, undecided, unproven
from magsafe.checks.rated_part import current_of_part, voltage_of_part
from magsafe.checks.reactive_power import against_reactive_power
from magsafe.checks.sheet import CouplingLoopRecord, CouplingRecord, Finding, Value
from magsafe.design.model import Design, SeriesCapacitor
from magsafe.spread import Spread

MOST_SWR = 2.0  # at the transmitter, from which many fold back (common practice)

_MATCH = Check(
    "feed.match",
    "Does the match as stated leave the transmitter an SWR that it takes?",
    "change the match to the size that the figures tell; never tune the SWR away at the transmitter alone",
    "a transmitter folds back from an SWR of 2 to 3 (common practice)",
    "1",
)
_CALLED = "the series capacitor"
_UNSIZED = "feed.series_capacitor.capacitance is not given, and what it carries hangs on it"
_SIZE = "state its capacitance; series_capacitance in the figures is what would match"
_AS_STATED = "the series capacitor's rating as stated"


def feeding(design: Design, point: OperatingPoint) -> Iterator[Finding]:
    """Yield what becomes of the match as stated, and of the parts in it."""
    ratio = point.figures.swr_at_feed
    states_size = small_loop(design).diameter is not None or design.feed.match is not None or _part(design).capacitance
    if point.chain is not None and ratio.spread.high is not None:
        yield judge(_MATCH, ratio.spread, MOST_SWR, 1.0, worst="narrow", provenance="common practice")
    elif point.chain is not None and states_size:
        do = "state loop.centre_height" if ratio.spread.known else _MATCH.do
        yield undecided(_MATCH, ratio.spread, ratio.why, do)
    if by_capacitors(design):
        yield from _series_capacitor(design, point)


def _part(design: Design) -> SeriesCapacitor:
    return design.feed.series_capacitor or SeriesCapacitor()


def _series_capacitor(design: Design, point: OperatingPoint) -> Iterator[Finding]:
    """Yield whether the small capacitor between line and loop stands its volts, amps and heat."""
    part, volts, amps, warmth = _part(design), _volts(), _amps(), _warmth()
    carried = (amps, *(() if part.rated_reactive_power is None else (_reactive(),)), warmth)
    if point.chain is None:
        yield from (unproven(check, "; ".join(point.out_of_range)) for check in (volts, *carried))
        return
    try:
        found = capacitor_feed(design, point.chain)
    except ValueError as error:
        yield from (unproven(check, str(error)) for check in (volts, *carried))
        return
    use = PartUse(found.voltage, found.bare_voltage, found.current, found.bare_current)
    if part.capacitance is None:
        # One part serves every transmission, and matches none but one: what it carries hangs on its size.
        yield voltage_of_part(volts, design, point, (part, use), _CALLED)
        yield from (unproven(check, _UNSIZED, do=_SIZE) for check in carried)
        return
    current = current_of_part(amps, design, point, (part, use, found.heat), _CALLED)
    powers = []
    if part.rated_reactive_power is not None:
        powers = [against_reactive_power(_reactive(), design, point, use, part.rated_reactive_power)]
    yield voltage_of_part(volts, design, point, (part, use), _CALLED)
    yield current
    yield from powers
    yield heat_of_part(warmth, design, point, (part, use, (found.heat, found.bare_heat)), (current, *powers))


def _volts() -> Check:
    return Check(
        "feed.series_capacitor.voltage",
        "Does the small capacitor between line and loop stand its crest of the RF, nearly all of the loop's?",
        "fit one with a higher peak RF rating, or several in series; or feed with a coupling loop",
        _AS_STATED,
        "V",
        qualifier="peak",
    )


def _amps() -> Check:
    return Check(
        "feed.series_capacitor.current",
        "Does the small capacitor between line and loop carry its current?",
        "fit one with a higher RF current rating",
        _AS_STATED,
        "A",
        qualifier="RMS",
    )


def _reactive() -> Check:
    return Check(
        "feed.series_capacitor.reactive_power",
        "Does the small capacitor between line and loop stand its reactive power, RMS volts times RMS amps?",
        "fit one with a higher reactive-power rating",
        _AS_STATED,
        "W",
        shown="kVA",
    )


def _warmth() -> Check:
    return Check(
        "feed.series_capacitor.heat",
        "Does the small capacitor between line and loop stand its own heat?",
        "fit one with a higher Q or one that may be hotter",
        "the dissipation rating as stated; the losses as listed",
        "W",
    )


# One coupling loop for all ---------------------------------------------------------------------------------


def coupling_loop(design: Design, points: Sequence[OperatingPoint]) -> CouplingLoopRecord | None:
    """Return the coupling loop as stated, or the one that serves all transmissions best; None where there is none."""
    if design.capacitor.kind == "none":
        return None
    known = [
        (title, point.chain, point.figures.coupling_loop_diameter.spread)
        for title, point in zip(design.titles, points, strict=True)
        if point.chain is not None and not not_coupled(design, point.chain)
    ]
    small, matching = small_loop(design), [spread.likely for _, _, spread in known if spread.likely is not None]
    try:
        diameter = small.diameter or one_for_all(design, [chain for _, chain, _ in known], matching)
    except ValueError:
        return None
    if diameter is None:
        return None
    fits = []
    for title, chain, spread in known:
        # Where it has no room, or is too large for the frequency, nothing is told of it.
        with suppress(ValueError):
            fits.append((title, spread, fed(design, chain, diameter)))
    if not fits:
        return None
    return CouplingLoopRecord(
        diameter=diameter,
        stated=small.diameter is not None,
        wire=2.0 * wire_radius(small),
        position=small.lies,
        clearance=small.clearance,
        share_of_loop=diameter / (2.0 * known[0][1].line.mean_radius),
        transmissions=tuple(
            CouplingRecord(
                name=title,
                matching_diameter=_value(spread, "m"),
                coefficient=_value(each.coefficient, "1"),
                swr=_value(each.ratio, "1"),
                offset=each.offset,
            )
            for title, spread, each in fits
        ),
    )


def _value(spread: Spread, unit: str) -> Value:
    return Value(low=spread.low, likely=spread.likely, high=spread.high, unit=unit)
