"""The air gap that a voltage needs: what a gap of given volts stands, asked the other way round."""

from math import exp, log

from scipy.optimize import brentq

from magsafe.physics.air_gap import GAP, gap_rating
from magsafe.physics.deratings import SPACING

PLATE_SHARE = 0.5  # plate thickness over gap that a new capacitor is sized with
_CLOSE_ENOUGH = 1e-7  # of the gap


def gap_for(voltage: float, density: float, frequency: float) -> float:
    """Return the narrowest gap whose working crest is at least a voltage, between plates half as thick as the gap.

    Parameters
    ----------
    voltage : crest across one gap [V]
    density : relative air density [1]
    frequency : [Hz]

    Returns
    -------
    gap, as it is to be stated and built [m]: half of its breakdown (`WORKING`) is at least the voltage

    Raises
    ------
    ValueError : no gap within the range of `gap_rating` stands it, or a frequency outside that range

    Valid     as `gap_rating`, full-round edges. Below the narrowest gap of its range that gap is returned.
    Source    the root of `gap_rating` less the voltage, which never falls for a wider gap.
    """

    def beyond(gap: float) -> float:
        """Return by how much the gap's working crest exceeds the voltage, as a logarithm."""
        return log(gap_rating(gap, PLATE_SHARE * gap, density, frequency, square_cut=False).allowed / voltage)

    # Off the ends of its range by more than the last bit.
    narrow, wide = GAP.low / SPACING.factor * (1.0 + 1e-9) / density, GAP.high * (1.0 - 1e-9) / density
    if beyond(narrow) >= 0.0:
        return narrow
    if beyond(wide) < 0.0:
        raise ValueError(f"{voltage:.3g} V need a gap wider than {wide:.3g} m, the widest that is computed")
    found = exp(float(brentq(lambda each: beyond(exp(each)), log(narrow), log(wide), xtol=_CLOSE_ENOUGH)))
    # The root is as likely a little too narrow as too wide.
    while beyond(found) < 0.0:
        found *= 1.0 + _CLOSE_ENOUGH
    return found
