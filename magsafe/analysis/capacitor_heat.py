"""The heat in a tuning capacitor, all its parts together or the main one alone."""

from collections.abc import Sequence

from magsafe.analysis.chain import VOLTAGE_ERROR, Chain
from magsafe.analysis.losses import Corner, Loss
from magsafe.spread import Spread


def heat_of(chain: Chain, parts: Sequence[Loss], others: str = "low") -> Spread:
    """Return the heat in some parts together [W], key-down, by their own worst corner.

    Parameters
    ----------
    chain : the resonant loop
    parts : the losses to add up, some of the chain's
    others : the end of every other loss where the heat is highest: "low", or "bare" without credit for typical values
    """

    def heat(end: str, rest: str, corner: Corner, power: float) -> float:
        mine = sum(part.at(end, corner) for part in parts)
        instead = sum(part.at(rest, corner) for part in parts)
        return power * mine / chain.resistance_with(mine, instead, rest, corner)

    low = min((heat("low", "high", each, chain.power.low or 0.0) for each in chain.most), default=None)
    likely = heat("likely", "likely", chain.likely, chain.power.likely or 0.0)
    high = max(heat("high", others, each, chain.power.high or 0.0) for each in chain.least)
    return Spread.about(low, likely, high).widened(2.0 * VOLTAGE_ERROR, 2.0 * VOLTAGE_ERROR)
