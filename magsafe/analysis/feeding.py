"""What the match as stated leaves: the SWR at the loop, and the power that arrives; a full-wave loop's section."""

from dataclasses import dataclass

import numpy as np

from magsafe.analysis.capacitor_feed import by_capacitors, capacitor_feed, span
from magsafe.analysis.chain import Chain
from magsafe.analysis.small_loop_feed import fed, not_coupled, ratio_of, small_loop
from magsafe.design.model import Design
from magsafe.physics import matching
from magsafe.physics.arrays import ComplexArray
from magsafe.physics.tuned_circuit import standing_wave_ratio
from magsafe.spread import UNKNOWN, Spread

SECTION = 75.0  # ohm, of a quarter-wave section where none is stated: a cable that is at hand


# A loop that is fed as it is -------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class Matched:
    """What a section or a transformer makes of a full-wave loop: the SWR on the line with each.

    `section` is the impedance of the quarter-wave section that would match exactly [ohm], `through_section` the SWR
    with that stated, or one of 75 ohm; both transformers are named by their ratio of impedances.
    """

    section: Spread
    through_section: Spread
    two_to_one: Spread
    four_to_one: Spread
    plain: Spread

    def stated(self, match: str | None) -> Spread:
        """Return the SWR with the match that the design states; unknown where it states none."""
        return {
            "none": self.plain,
            "quarter-wave section": self.through_section,
            "2:1 transformer": self.two_to_one,
            "4:1 transformer": self.four_to_one,
        }.get(match or "", UNKNOWN)


def section_of(design: Design) -> float:
    """Return the impedance of the quarter-wave section [ohm]."""
    return design.feed.section_impedance or SECTION


def impedances(design: Design, chain: Chain) -> dict[str, ComplexArray]:
    """Return what the line sees of a loop that is fed as it is [ohm], the likely terminal first, by name of the match.

    The section is cut for the first transmission of the design.
    """
    likely = complex(chain.resistance("likely", chain.likely), chain.likely.reactance)
    every = np.array([likely, *chain.terminals()])
    quarters = chain.frequency / design.transmission[0].frequency
    return {
        "through_section": matching.impedance_through_line(every, section_of(design), quarters),
        "two_to_one": matching.impedance_through_transformer(every, 2.0),
        "four_to_one": matching.impedance_through_transformer(every, 4.0),
        "plain": every,
    }


def matched(design: Design, chain: Chain) -> Matched:
    """Return what a section and transformers make of a loop that is fed as it is."""
    line, seen = design.feed.line_impedance, impedances(design, chain)
    every = seen["plain"]
    ratios = {name: span(standing_wave_ratio(each, line).tolist()) for name, each in seen.items()}
    section = span(matching.quarter_wave_impedance(every.real, line).tolist())
    if not chain.most:
        # Where no height bounds what the ground takes, only the likely values are known.
        ratios = {name: Spread(None, each.likely, None) for name, each in ratios.items()}
        section = Spread(section.low, section.likely, None)
    return Matched(section=section, **ratios)


# What of the power arrives ---------------------------------------------------------------------------------


def stated_coefficient(design: Design, chain: Chain) -> Spread:
    """Return what the SWR at the loop goes by, of the match as the design states it; unknown where it does not.

    Of a tuned loop that is the resistance that the feed shows to it over the loop's own [1], 1 where they match; of a
    full-wave loop the SWR itself.

    Raises
    ------
    ValueError : the coupling loop has no room, or no two capacitors match
    """
    if not chain.tuned:
        return matched(design, chain).stated(design.feed.match)
    if by_capacitors(design):
        part = design.feed.series_capacitor
        is_stated = part is not None and part.capacitance is not None
        return capacitor_feed(design, chain).coefficient if is_stated else UNKNOWN
    diameter = small_loop(design).diameter
    if diameter is None or not_coupled(design, chain):
        return UNKNOWN
    return fed(design, chain, diameter).coefficient


def stated_ratio(design: Design, chain: Chain) -> Spread:
    """Return the SWR at the loop with the match as the design states it; raises as `stated_coefficient`."""
    found = stated_coefficient(design, chain)
    return ratio_of(found) if found.likely is not None else UNKNOWN


def arriving(design: Design, chain: Chain) -> Spread:
    """Return the power at the loop [W] with what the match as stated turns back, and what its capacitor takes.

    Only the low end and the likely value fall: a tuner at the transmitter may make up for a mismatch, so volts, amps
    and fields count the line's loss alone.
    """
    power = chain.power
    try:
        ratio = stated_ratio(design, chain)
        kept = capacitor_feed(design, chain).kept if by_capacitors(design) else Spread.exact(1.0)
    except ValueError:
        return power
    likely = float(matching.mismatch_share(ratio.likely or 1.0)) * (kept.likely or 1.0)
    # Where no height bounds the ratio nothing bounds what it turns back.
    unbounded = ratio.likely is not None and ratio.high is None
    worst = 0.0 if unbounded else float(matching.mismatch_share(ratio.high or 1.0)) * (kept.low or 1.0)
    return Spread(
        None if power.low is None else power.low * worst,
        None if power.likely is None else power.likely * likely,
        power.high,
    )
