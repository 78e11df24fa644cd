"""A match of two capacitors: what they must be, and what the small one between line and loop sees."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from math import pi, sqrt

from magsafe.analysis.chain import Chain
from magsafe.analysis.losses import UNKNOWN_FIXED, Corner
from magsafe.design import tables
from magsafe.design.model import Design
from magsafe.physics import matching
from magsafe.spread import Spread


def by_capacitors(design: Design) -> bool:
    """Return whether two capacitors match the loop."""
    return design.capacitor.kind != "none" and design.feed.coupling == "capacitors"


@dataclass(frozen=True, slots=True)
class SeriesPart:
    """The series capacitor, ready to be asked at any corner; `share` is of the volts and 1 / `share` that share them.

    `stated` is the capacitance between line and loop as the design states it [F]: None where it is what matches.
    """

    chain: Chain
    line: float
    share: float
    stated: float | None

    def match(self, end: str, corner: Corner) -> matching.CapacitorMatch:
        """Return both capacitances that match.

        Raises
        ------
        ValueError : none do
        """
        loop = complex(self.chain.resistance(end, corner), corner.reactance)
        return matching.capacitor_match(loop, self.chain.frequency, self.line)

    def reactance(self, end: str, corner: Corner) -> float:
        """Return the reactance between line and loop [ohm], of one capacitor or of both together."""
        if self.stated is None:
            return self.match(end, corner).series_reactance
        return 1.0 / (2.0 * pi * self.chain.frequency * self.stated)

    def volts(self, end: str, corner: Corner, power: float) -> float:
        """Return the crest across one capacitor [V], with the overshoot.

        Matched, the line's volts are at right angles to it; otherwise all of the loop's may stand across it.
        """
        across = self.chain.voltage(end, corner, power)
        less = 0.0 if self.stated is not None else 2.0 * power * self.line * self.chain.overshoot**2
        return sqrt(max(0.0, across**2 - less)) * self.share

    def amps(self, end: str, corner: Corner, power: float) -> float:
        """Return the RMS current [A]."""
        across = self.volts(end, corner, power) / self.share
        return across / (sqrt(2.0) * self.chain.overshoot * self.reactance(end, corner))

    def watts(self, quality: float) -> Callable[[str, Corner, float], float]:
        """Return the question for the heat in one capacitor of a Q [W], key-down."""

        def heat(end: str, corner: Corner, power: float) -> float:
            return self.amps(end, corner, power) ** 2 * self.reactance(end, corner) * self.share / quality

        return heat

    def ratio(self, end: str, corner: Corner) -> float:
        """Return the SWR with the loop retuned [1]: of no stated capacitance, with that which matches the likely loop.

        Below 1 it stands for the resistance that the feed shows to the loop over the loop's own.
        """
        reactance = self.reactance("likely", self.chain.likely)
        seen = self.line / (self.line**2 + reactance**2)
        own = (
            self.chain.resistance(end, corner) / abs(complex(self.chain.resistance(end, corner), corner.reactance)) ** 2
        )
        return seen / own

    @property
    def corners(self) -> tuple[tuple[str, Corner], ...]:
        """The likely corner, then all with either end of the losses."""
        chain = self.chain
        least = tuple(("low", corner) for corner in chain.least)
        most = tuple(("high", corner) for corner in chain.most or chain.least)
        return (("likely", chain.likely), *least, *most)


def series_part(design: Design, chain: Chain) -> SeriesPart:
    """Return the series capacitor of a design, as stated or as it must be."""
    part = design.feed.series_capacitor
    halves = 2.0 if part is not None and part.balanced else 1.0
    stated = None if part is None or part.capacitance is None else part.capacitance / halves
    return SeriesPart(chain, design.feed.line_impedance, 1.0 / halves, stated)


@dataclass(frozen=True, slots=True)
class CapacitorFeed:
    """What the series capacitor of a match sees; `bare_` values without credit for what is typical of others.

    `series` and `parallel` are the capacitances that match [F], `voltage` the crest [V] and `current` the RMS current
    [A] of one series capacitor, `heat` what it turns into heat, key-down [W], `kept` the share of the power that it
    lets through [1]. `coefficient` is the resistance that the feed shows to the loop over the loop's own [1]. Where no
    height bounds the most resistance, the ends that it makes are None.
    """

    series: Spread
    parallel: Spread
    voltage: Spread
    bare_voltage: float
    current: Spread
    bare_current: float
    heat: Spread
    bare_heat: float
    kept: Spread
    coefficient: Spread


def capacitor_feed(design: Design, chain: Chain) -> CapacitorFeed:
    """Return what a match of two capacitors needs and bears.

    Raises
    ------
    ValueError : no two capacitors match this loop
    """
    part, error = series_part(design, chain), chain.voltage_error
    quality = _quality(design)
    low, likely, high = (part.watts(q or 1.0) for q in (quality.high, quality.likely, quality.low))
    heat = Spread(chain.spread(low).low, chain.spread(likely).likely, chain.spread(high).high)
    every = [part.match(end, corner) for end, corner in part.corners]
    series, parallel = span(each.series / part.share for each in every), span(each.parallel for each in every)
    coefficient = span(part.ratio(end, corner) for end, corner in part.corners)
    if not chain.most:
        series, parallel = replace(series, high=None), replace(parallel, low=None)
        coefficient = replace(coefficient, low=None)
    # Overcoupled, the loop shows the line less than its impedance, and the capacitor has more of the power.
    reactances = [part.reactance(end, corner) for end, corner in part.corners]
    worst = max(reactances) / (quality.low or 1.0) * max(1.0, coefficient.high or 1.0)
    usual = reactances[0] / (quality.likely or 1.0) * (coefficient.likely or 1.0)
    return CapacitorFeed(
        series=series,
        parallel=parallel,
        voltage=chain.spread(part.volts).widened(error, error),
        bare_voltage=chain.dangerous(part.volts, "bare") * (1.0 + error),
        current=chain.spread(part.amps).widened(error, error),
        bare_current=chain.dangerous(part.amps, "bare") * (1.0 + error),
        heat=heat.widened(2.0 * error, 2.0 * error),
        bare_heat=chain.dangerous(high, "bare") * (1.0 + 2.0 * error),
        kept=Spread(part.line / (part.line + worst), part.line / (part.line + usual), 1.0),
        coefficient=coefficient,
    )


def _quality(design: Design) -> Spread:
    """Return the Q of the series capacitor as stated, or as is usual of a fixed one of unknown kind."""
    part = design.feed.series_capacitor
    if part is None or part.quality_factor is None:
        return tables.capacitor_quality_factor(UNKNOWN_FIXED)
    return Spread(part.quality_factor.low, part.quality_factor.likely, part.quality_factor.high)


def span(values: Iterable[float]) -> Spread:
    """Return the spread of values, the first of which is likely."""
    likely, *every = values
    return Spread(min(likely, *every), likely, max(likely, *every))
