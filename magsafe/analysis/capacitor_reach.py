"""What capacitance the main part of a capacitor reaches: as stated, or by its sizes."""

from dataclasses import dataclass

from magsafe.analysis.line_capacitor import capacitance, is_complete, is_variable
from magsafe.design.model import Capacitor
from magsafe.spread import Spread


@dataclass(frozen=True, slots=True)
class Reach:
    """The capacitances that a part reaches [F], its stray with them.

    From `least` to `most` it can be set, or it is somewhere in between where it is fixed; `perhaps` holds what it may
    reach beyond, as (least, most). `loose` tells that it is a tolerance and not a reach that is stated, `by_sizes` that
    nothing is stated but sizes.
    """

    least: float
    most: float
    perhaps: tuple[float, float]
    loose: bool
    by_sizes: bool = False

    def may_hold(self, needed: Spread) -> bool:
        """Return whether some of what is needed [F] may be reached; of a stated reach all of it must be."""
        known = [end for end in (needed.low, needed.likely, needed.high) if end is not None]
        least, most = self.perhaps
        if self.by_sizes:
            return min(known) <= most and max(known) >= least
        return least <= min(known) and max(known) <= most


def capacitance_reach(part: Capacitor, metal: Spread, frequency: float) -> Reach | None:
    """Return what a part reaches at a frequency [Hz]; None where neither that nor its sizes are stated.

    `metal` is the conductivity of a trombone's tubes [S/m].

    Raises
    ------
    ValueError : sizes that make no capacitor at that frequency
    """
    stray = part.stray
    if part.capacitance is not None:
        ends = part.capacitance.min + stray, part.capacitance.max + stray
        return Reach(*ends, ends, loose=False)
    if part.fixed is not None and part.tolerance is not None:
        ends = part.fixed * (1.0 - part.tolerance) + stray, part.fixed * (1.0 + part.tolerance) + stray
        return Reach(*ends, ends, loose=True)
    if not is_complete(part):
        return None
    given = capacitance(part, metal, frequency)
    low, high = (given.low or 0.0) + stray, (given.high or 0.0) + stray
    if is_variable(part):
        return Reach(stray, low, (stray, high), loose=True, by_sizes=True)
    return Reach(low, high, (low, high), loose=True, by_sizes=True)
