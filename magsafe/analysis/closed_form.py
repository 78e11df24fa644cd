"""The closed forms beside the solved current: an independent second opinion on every loop that they reach."""

from dataclasses import dataclass
from math import pi, sqrt

from scipy.constants import c

from magsafe.analysis.capacitor_network import Membership
from magsafe.analysis.chain import QUALITY_ERROR, REACTANCE_ERROR, RESISTANCE_ERROR, VOLTAGE_ERROR, Chain
from magsafe.design.model import Design
from magsafe.physics import inductance, small_loop


@dataclass(frozen=True, slots=True)
class Compared:
    """One figure by both methods: solved over closed form, and the least and most that their stated errors allow."""

    figure: str
    ratio: float
    least: float
    most: float

    @property
    def share(self) -> float:
        """Disagreement over what is allowed [1]: more than 1 is too much."""
        off = self.ratio - 1.0
        return max(off / (self.most - 1.0), off / (self.least - 1.0))


@dataclass(frozen=True, slots=True)
class SecondOpinion:
    """What the closed forms say of the loop in free space, likely values, against what was solved.

    `plain` are the volts, the Q and the efficiency that the small-loop forms give without the current's taper, over
    those of the solved current.
    """

    compared: tuple[Compared, ...]
    plain: tuple[float, float, float]


def second_opinion(design: Design, chain: Chain) -> SecondOpinion | None:
    """Return the closed forms' opinion; None for a loop that they do not reach."""
    if not _reached(design, chain):
        return None
    line, radius = chain.line, chain.conductor_radius
    wavelength = c / chain.frequency
    x = pi * line.perimeter / wavelength
    sides = None if design.loop.shape == "circle" else design.loop.sides or 3
    if sides is None:
        external = float(inductance.circle_inductance(line.reach, radius))
    else:
        external = float(inductance.polygon_inductance(line.perimeter, sides, radius))
    lumped = 2.0 * pi * chain.frequency * external + chain.internal * line.perimeter
    radiation = float(small_loop.radiation_resistance(line.area, 1, wavelength))
    tapered = _figures(chain, x, lumped, radiation)
    plain = _figures(chain, 0.0, lumped, radiation)
    solved = _solved(chain)
    error = small_loop.closed_form_error(sides)
    growth = (x / (0.25 * pi)) ** 2
    corner = chain.corner_error
    # What both methods leave open: the closed forms' last digits and the solver's.
    voltage, quality = 0.003 + VOLTAGE_ERROR + corner, 0.005 + QUALITY_ERROR + corner
    # A capacitor's loss follows the reactance, and efficiency with it.
    efficiency, reactance = 0.005 + RESISTANCE_ERROR + corner, 0.002 + REACTANCE_ERROR + corner
    least = small_loop.shunt_excess(x, error.least_shunt)
    most = small_loop.shunt_excess(x, small_loop.largest_shunt(radius / line.mean_radius))
    bounds = {
        "volts": (error.voltage_below * growth + voltage, error.voltage_above * growth + voltage),
        "Q": (error.quality_below * growth + quality, error.quality_above * growth + quality),
        "efficiency": (efficiency, error.efficiency_above * growth + efficiency),
        "reactance": (reactance - min(least, 0.0), reactance + most),
    }
    compared = tuple(
        Compared(name, solved[name] / tapered[name], 1.0 - below, 1.0 + above)
        for name, (below, above) in bounds.items()
    )
    ratios = tuple(plain[name] / solved[name] for name in ("volts", "Q", "efficiency"))
    return SecondOpinion(compared, (ratios[0], ratios[1], ratios[2]))


def _reached(design: Design, chain: Chain) -> bool:
    loop, line = design.loop, chain.line
    thickness = chain.conductor_radius / line.mean_radius
    slender = chain.conductor_radius / (line.perimeter / (loop.sides or 3))
    return (
        loop.turns == 1
        and loop.shape in ("circle", "polygon")
        and small_loop.TAPERED_CURRENT.holds(line.perimeter * chain.frequency / c)
        and small_loop.TAPERED_THICKNESS.holds(thickness)
        and (loop.shape == "circle" or inductance.POLYGON_THICKNESS.holds(slender))
    )


def _figures(chain: Chain, x: float, lumped: float, radiation: float) -> dict[str, float]:
    """Return volts for a watt, Q, efficiency and reactance by closed forms; with x = 0 those of a uniform current."""
    taper = float(small_loop.reactance_taper(x)) if x else 1.0
    reactance, radiated = lumped * taper, radiation * float(small_loop.radiation_taper(x))
    mean, opposite = float(small_loop.loss_taper(x)), float(small_loop.opposite_taper(x)) ** 2
    weights = {
        "conductor": chain.line.perimeter * mean,
        "spread": mean,
        "opposite": opposite,
        "port": 1.0,
        "capacitor": reactance,
    }
    resistance = radiated + sum(
        loss.likely
        * (loss.where.weight("likely", reactance) if isinstance(loss.where, Membership) else weights[loss.where])
        for loss in chain.losses
    )
    # Half of the slope is the capacitor's, steeper where that is a line.
    slope = float(small_loop.slope_taper(x)) + (chain.capacitor_steepness - 1.0) / 2.0
    return {
        "volts": sqrt(2.0 / resistance) * reactance,
        "Q": reactance / resistance * slope,
        "efficiency": radiated / resistance,
        "reactance": reactance,
    }


def _solved(chain: Chain) -> dict[str, float]:
    free = chain.likely_free
    return {
        "volts": chain.voltage("likely", free, 1.0) / chain.overshoot,
        "Q": chain.quality("likely", free),
        "efficiency": chain.efficiency("likely", free),
        "reactance": free.reactance,
    }
