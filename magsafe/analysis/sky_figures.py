"""The figures of ground and sky: resistance, efficiency, gain, where the strongest goes, radiated powers."""

from collections.abc import Callable
from math import degrees

from magsafe.analysis.chain import RESISTANCE_ERROR, STUDY, Chain
from magsafe.analysis.figures import NO_HEIGHT, Figure
from magsafe.analysis.sky import HALF_WAVE_DIPOLE, Sky
from magsafe.analysis.surroundings import State
from magsafe.spread import UNKNOWN, Spread

_SOIL_SOURCE = "Sommerfeld's half-space in Weyl's plane waves (memory); soil as listed"
_PATTERN_SOURCE = "direct and reflected wave, Fresnel: Balanis, Antenna Theory, section 4.8 (memory); soil as listed"
_PLANE_SOURCE = f"Harrington 1968 (memory); {STUDY}"
_NO_GROUND = "site.ground is not given: the ends are those of any soil there is"
_FREE = "free space has no ground and no horizon"


def sky_figures(
    chain: Chain, made: Sky | None, power: Spread, duty: float, free_gain: tuple[Figure, Figure]
) -> dict[str, Figure]:
    """Return the figures of ground and sky by their names.

    Parameters
    ----------
    chain : the resonant loop
    made : what of it reaches the sky, by `sky`
    power : peak envelope power at the loop [W]
    duty : mean over peak envelope power while transmitting [1]
    free_gain : the directivities in free space, which count where there is no ground
    """
    if made is None:
        return _without_ground(chain, power, duty, free_gain)
    why = "" if chain.around.ground_known else _NO_GROUND
    how = f"over {_ground_name(chain)}, the losses counted"

    def figure(spread: Spread, unit: str, method: str) -> Figure:
        return Figure(spread, unit, f"{method} {how}", _PATTERN_SOURCE, why)

    return {
        "ground_resistance": _ground(chain, why),
        "overall_efficiency": figure(made.efficiency, "1", "what leaves into the sky over what the loop takes,"),
        "gain": figure(made.gain, "1", "of the strongest direction over a source that radiates evenly,"),
        "gain_elevation": figure(_each(made.elevation, degrees), "deg", "of that direction above the horizon,"),
        "share_above_60_degrees": figure(made.above_60, "1", "of what reaches the sky, above 60 degrees,"),
        "share_below_20_degrees": figure(made.below_20, "1", "of what reaches the sky, below 20 degrees,"),
        **_powers(made.gain, power, duty, how, why),
    }


def _without_ground(chain: Chain, power: Spread, duty: float, free_gain: tuple[Figure, Figure]) -> dict[str, Figure]:
    """Return the figures in free space; where the loop's height is not stated, why there are none."""
    names = ("overall_efficiency", "gain", "share_above_60_degrees", "share_below_20_degrees")
    if not chain.around.height_known:
        powers = _powers(UNKNOWN, power, duty, "", NO_HEIGHT)
        unknown = {name: Figure(UNKNOWN, "1", "none", "none", NO_HEIGHT) for name in names}
        elevation = Figure(UNKNOWN, "deg", "none", "none", NO_HEIGHT)
        ground = Figure(UNKNOWN, "ohm", "none", "none", NO_HEIGHT)
        return {"ground_resistance": ground, "gain_elevation": elevation, **unknown, **powers}
    efficiency, how = chain.efficiency_spread(), "in free space, the losses counted"
    directivity = max((each.spread for each in free_gain), key=lambda each: each.likely or 0.0)
    gain = _times(directivity, efficiency)
    none = Figure(UNKNOWN, "1", "none", "none", _FREE)
    return {
        "ground_resistance": Figure(Spread.exact(0.0), "ohm", "there is no ground in free space", "definition"),
        "overall_efficiency": Figure(efficiency, "1", "in free space all that is radiated leaves", _PLANE_SOURCE),
        "gain": Figure(
            gain, "1", f"of the strongest direction over a source that radiates evenly, {how}", _PLANE_SOURCE
        ),
        "gain_elevation": Figure(UNKNOWN, "deg", "none", "none", _FREE),
        "share_above_60_degrees": none,
        "share_below_20_degrees": none,
        **_powers(gain, power, duty, how, ""),
    }


def _ground(chain: Chain, why: str) -> Figure:
    """Return what the ground adds to the resistance, over every soil and with either current."""
    low = [
        (over.least * (1.0 - RESISTANCE_ERROR) - over.alone) * corner.growth
        for over in chain.around.over
        for corner in chain.corners([State(over.flow, over.least)])
    ]
    high = [
        (over.most * (1.0 + RESISTANCE_ERROR) - over.alone) * corner.growth
        for over in chain.around.over
        for corner in chain.corners([State(over.flow, over.most)])
    ]
    first = chain.around.over[0]
    likely = float(first.radiated[0]) - first.alone if chain.around.ground_known else None
    found = Spread(min(low), likely, max(high))
    if chain.around.ground_known and first.flow.image:
        method = "the loop with its image in a perfect plane, solved, less the loop alone"
        return Figure(found, "ohm", method, _PLANE_SOURCE, why)
    method = (
        f"the plane waves of the current solved in free space, at its ends of that with the image too, turned back by "
        f"{_ground_name(chain)}; of current and charge on the conductor, not of the capacitor's own field"
    )
    return Figure(found, "ohm", method, _SOIL_SOURCE, why)


def _powers(gain: Spread, power: Spread, duty: float, how: str, why: str) -> dict[str, Figure]:
    """Return the effective radiated powers at the crest of the envelope and on average while transmitting."""
    crest = _times(gain, power)
    source = "Radio Regulations, 1.161 and 1.162 (memory)"
    when = {
        "": "at the crest of the envelope",
        "mean_": f"on average while transmitting, by the duty of its mode ({duty:.3g})",
    }
    made = {}
    for prefix, share in (("", 1.0), ("mean_", duty)):
        known = f"{when[prefix]}, {how}" if how else "none"
        made[f"{prefix}effective_isotropic_radiated_power"] = Figure(
            crest.scaled(share),
            "W",
            f"gain times the power at the loop without overshoot, {known}" if how else "none",
            source,
            why,
        )
        made[f"{prefix}effective_radiated_power"] = Figure(
            crest.scaled(share / HALF_WAVE_DIPOLE),
            "W",
            f"the same over a half-wave dipole's gain of {HALF_WAVE_DIPOLE}, {known}" if how else "none",
            source,
            why,
        )
    return made


def _ground_name(chain: Chain) -> str:
    first = chain.around.over[0]
    if first.flow.image and chain.around.ground_known:
        return "a perfect plane"
    return "the soil as stated" if chain.around.ground_known else "any soil"


def _times(one: Spread, other: Spread) -> Spread:
    """Return the product of two spreads of values that are not below zero."""
    pairs = ((one.low, other.low), (one.likely, other.likely), (one.high, other.high))
    return Spread(*(None if a is None or b is None else a * b for a, b in pairs))


def _each(spread: Spread, change: Callable[[float], float]) -> Spread:
    ends = (spread.low, spread.likely, spread.high)
    return Spread(*(None if end is None else change(end) for end in ends))
