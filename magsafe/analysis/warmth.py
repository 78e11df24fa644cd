"""How warm the conductor gets by the end of the longest over, where its current is largest."""

from dataclasses import dataclass, replace
from functools import lru_cache
from math import ceil, inf, pi

import numpy as np

from magsafe.analysis.chain import VOLTAGE_ERROR, Chain
from magsafe.analysis.exposure import Use
from magsafe.analysis.flow import poorest_conductivity, turn_factors
from magsafe.analysis.losses import COPPER_COEFFICIENT, Corner, Loss
from magsafe.design import tables, warmth_tables
from magsafe.design.model import Conductor, Design, Joint
from magsafe.design.shape import outline
from magsafe.physics.arrays import Array, Values
from magsafe.physics.atmosphere import standard_pressure
from magsafe.physics.conductor import skin_depth
from magsafe.physics.convection import equal_perimeter_diameter
from magsafe.physics.fin import fin_resistance, thermal_conductivity
from magsafe.physics.heat import CEILING, ElectricHeat, Surface, Surroundings, heat_for_temperature, lost_heat
from magsafe.physics.warming import heat_capacity_per_metre
from magsafe.rules.duty import ON_AIR_SHARE_WINDOW, OnAirShare, Over
from magsafe.spread import Spread

HOT_AIR, THIN_AIR = 313.15, 2000.0  # K and m, where the design states none
RUNS_AWAY = 1e4  # K, told for what takes up more than it can lose: far above any limit
SUNSHINE = 1000.0  # W/m2
UPRIGHT_SHARE = 0.8  # of the convection of a level cylinder, for parts that stand (common practice: 0.8 to 1)
POOR_JOINT = 10.0  # times what is typical at most: loose, corroded or cold-soldered (common practice)
POORER = 0.8  # of the heat conducted, for what the law of Wiedemann and Franz leaves open: least in aluminium
CONVECTION_SCATTER = 0.2  # measurements about such correlations scatter by 10 to 20 % (common practice)
_POWERS, _TRIED, _ROUNDS = (1e-9, 1e9), 60, 8  # times the power computed
_FINELY = 3000
_SMALL_RISE = 10.0  # K
_THIN_WALL = 2.0  # skin depths: below, the resistance grows as the resistivity and not as its root


@dataclass(frozen=True, slots=True)
class Warmth:
    """The conductor in one transmission: heat where its current is largest, and what carries it off.

    `heat` is key-down [W/m], by its own worst corner; `surface` and `air` hold the ends (low, likely, high) of the
    temperature, shape (3,); `bare_heat` is the high end without credit for what is typical of other parts; `growth` is
    the resistance at the start of an over over that at 20 degC [1]. `capacity` is what a metre holds at least [J/K] and
    `most_capacity` at most, the same where the metal is stated, 0 where the section is not known. `over` and `pause`
    are the longest over and what follows it [s]; an over without end is infinite. `tune_share` is the tune-up's carrier
    over the envelope [1], which lasts `tune_time` [s]. `finish_stated` tells whether the surface is the design's word.
    """

    heat: Spread
    bare_heat: float
    surface: Surface
    air: Surroundings
    coefficient: float
    exponent: float
    growth: float
    capacity: float
    most_capacity: float
    duty: float
    over: float
    pause: float
    tune_share: float
    tune_time: float
    finish_stated: bool

    @property
    def air_temperature(self) -> float:
        """The temperature of the air [K]."""
        return _hottest(self.air.temperature)

    @property
    def share(self) -> float:
        """The share of all time that is keyed [1]."""
        return 1.0 if self.over == inf else self.over / (self.over + self.pause)

    def temperature(self) -> Spread:
        """Return the temperature at the end of the longest over [K]; `RUNS_AWAY` where nothing holds it.

        The high end is a bound: the steady state of the mean heat, and on top of it all that one over and one tune-up
        bring, but never more than the steady state of either without end. The likely value is that of a body that loses
        heat in proportion, as it does at the mean; the low end is the steady state of the mean.
        """
        ends = (self.heat.low, self.heat.likely, self.heat.high)
        heats = np.array([0.0 if end is None else end * self.duty for end in ends])
        mean, keyed = self._steady(heats * self.share), self._steady(heats)
        swing = float(heats[1]) * self._swing(float(mean[1]))
        likely = float(min(keyed[1], mean[1] + swing))
        high = float(self.high_at(np.ones(1))[0])
        return Spread(None if self.heat.low is None else float(mean[0]), min(likely, high), high)

    @property
    def idle(self) -> float:
        """The temperature before the first over at the high end [K]: that of the air, or what the sun makes of it."""
        return float(self._steady_high(np.zeros(1))[0])

    @property
    def likely_idle(self) -> float:
        """The same at the likely end [K]."""
        return float(self._steady(np.zeros(3))[1])

    @property
    def bare(self) -> "Warmth":
        """The same without credit for typical losses elsewhere and for an unstated finish; its high end alone."""
        surface = self.surface if self.finish_stated else replace(self.surface, emissivity=0.0, absorptivity=1.0)
        return replace(self, surface=surface, heat=Spread(None, None, self.bare_heat))

    @property
    def slowest(self) -> "Warmth":
        """The same of the metal that holds most heat: the slowest to warm and to cool."""
        return replace(self, capacity=self.most_capacity)

    def high_at(self, powers: Array) -> Array:
        """Return the high end [K] at powers that are so many times the one computed, shape (power,)."""
        key_down = (self.heat.high or 0.0) * powers
        heats = key_down * self.duty
        over = np.minimum(
            self._steady_high(heats), self._steady_high(heats * self.share) + self.rise_of(heats, self.over)
        )
        if self.tune_time == 0.0:
            return over
        # A design's tune-up is no stronger than its envelope, so it goes with the power.
        tuning = key_down * self.tune_share
        ever = np.maximum(over, self._steady_high(tuning))
        return np.minimum(ever, over + self.rise_of(tuning, self.tune_time))

    @property
    def strongest_share(self) -> float:
        """The largest mean power while keyed over the envelope [1], for what warms in seconds."""
        return max(self.duty, self.tune_share)

    def power_to(self, temperature: float, beside: float = 0.0) -> float:
        """Return the largest of such powers that keeps the high end within a temperature [K]; 0 where none does.

        `beside` is what a part warms besides at the power computed, in proportion to the power [K].
        """
        if self.idle > temperature:
            return 0.0
        low, high = _POWERS
        for _ in range(_ROUNDS):
            powers = np.geomspace(low, high, _TRIED)
            kept = np.flatnonzero(self.high_at(powers) + beside * powers <= temperature)
            if not len(kept):
                return 0.0
            low, high = float(powers[kept[-1]]), float(powers[min(int(kept[-1]) + 1, _TRIED - 1)])
        return low

    def rise_of(self, heat: Values, lasting: float) -> Array:
        """Return what a heat [W/m] brings at most [K] while it lasts [s], none of it lost; infinite where not known."""
        endless = self.capacity == 0.0 or lasting == inf
        return np.full(np.shape(heat), inf) if endless else np.asarray(heat) * (lasting / self.capacity)

    def time_constant(self, temperature: float) -> float:
        """Return the time constant about a temperature [K] at the likely end [s]; 0 where the section is not known."""
        return self.capacity / self._conductance(temperature)

    def _conductance(self, temperature: float) -> float:
        """Return what a metre loses more for each kelvin about a temperature at the likely end [W/(m K)]."""
        cooler, warmer = (lost_heat(temperature + step, self.surface, self.air) for step in (-0.5, 0.5))
        return float(np.broadcast_to(warmer - cooler, 3)[1])

    def _steady_high(self, heats: Array) -> Array:
        return self._steady_at(2, heats)

    def _steady_at(self, end: int, heats: Array) -> Array:
        """Return the steady temperature [K] of one end of surface and air for heats at the start of an over [W/m]."""
        outside, air = self.surface, self.air
        parts = (outside.diameter, outside.facing, outside.emissivity, outside.absorptivity, outside.convection_share)
        floats = (
            float(np.broadcast_to(part, 3)[end]) for part in (*parts, air.temperature, air.pressure, air.sunshine)
        )
        temperatures, kept = _balance(tuple(floats), self.coefficient, self.exponent)
        return np.interp(heats / self.growth, kept, temperatures, right=RUNS_AWAY)

    def _steady(self, heats: Array) -> Array:
        return np.array([float(self._steady_at(end, heats[end : end + 1])[0]) for end in range(3)])

    def _swing(self, temperature: float) -> float:
        """Return how far an over ends above the mean [K m/W], for a body that loses in proportion."""
        if self.share == 1.0:
            return 0.0
        conductance = self._conductance(temperature)
        if self.capacity == 0.0:
            return (1.0 - self.share) / conductance
        constant = self.time_constant(temperature)
        end = np.expm1(-self.over / constant) / np.expm1(-(self.over + self.pause) / constant)
        return (float(end) - self.share) / conductance


@lru_cache(maxsize=64)
def _balance(outside: tuple[float, ...], coefficient: float, exponent: float) -> tuple[Array, Array]:
    """Return temperatures [K] and the heats at 20 degC [W/m] that keep a conductor at them, finely enough for lines.

    Read the other way it is the steady temperature of a heat, without a search.
    """
    surface = Surface(*outside[:5])
    air = Surroundings(*outside[5:])
    temperatures = outside[5] + np.append(0.0, np.geomspace(1e-3, CEILING - outside[5], _FINELY))
    heats = heat_for_temperature(temperatures, coefficient, exponent, surface, air)
    return temperatures, np.maximum.accumulate(heats)


def _hottest(ends: Values) -> float:
    return float(np.broadcast_to(ends, 3)[2])


def warmth(chain: Chain, design: Design, use: Use) -> Warmth:
    """Return how warm the conductor of a loop gets that the solver reaches."""
    made_of = design.loop.conductor
    coefficient = _coefficient(made_of)
    exponent = 1.0 if _wall(made_of) < _THIN_WALL * _depth(made_of, chain.frequency) else 0.5
    warm = ElectricHeat(1.0, coefficient, exponent).growth(made_of.temperature)
    over, pause = _pattern(use)
    heat, bare = _heat(chain, design)
    capacity, most = _capacities(made_of)
    return Warmth(
        heat=heat,
        bare_heat=bare,
        surface=_surface(design),
        air=surroundings_of(design),
        coefficient=coefficient,
        exponent=exponent,
        growth=float(warm),
        capacity=capacity,
        most_capacity=most,
        duty=use.duty,
        over=over,
        pause=pause,
        tune_share=use.tune_up_power / use.envelope,
        tune_time=use.tune_up_time,
        finish_stated=made_of.surface is not None,
    )


def _heat(chain: Chain, design: Design) -> tuple[Spread, float]:
    """Return the heat of a metre where the current is largest [W/m], key-down, in the turn that heats most.

    And its high end without credit for what is typical of other parts.
    """
    crowded = [float(each.max()) for each in turn_factors(design, chain.frequency)]
    part, power = chain.conductor, chain.power

    def metre(end: str, others: str, corner: Corner, watts: float, factor: float) -> float:
        value: float = getattr(part, end)
        own = value * factor * corner.growth * corner.state.flow.largest**2
        total = chain.resistance_with(part.at(end, corner), part.at(others, corner), others, corner)
        return watts * own / total

    low = min((metre("low", "high", each, power.low or 0.0, crowded[0]) for each in chain.most), default=None)
    likely = metre("likely", "likely", chain.likely, power.likely or 0.0, crowded[1])
    high, bare = (
        max(metre("high", others, each, power.high or 0.0, crowded[2]) for each in chain.least)
        for others in ("low", "bare")
    )
    error = 2.0 * VOLTAGE_ERROR
    return _with_joints(chain, design, Spread.about(low, likely, high).widened(error, error), bare * (1.0 + error))


def _with_joints(chain: Chain, design: Design, heat: Spread, bare: float) -> tuple[Spread, float]:
    """Return the heat of a metre [W/m] with that of the joints that are spread along the conductor."""
    length = outline(design.loop).perimeter * design.loop.turns
    for joint, part in zip(design.loop.joint, chain.joints, strict=True):
        if joint.at == "spread":
            own = chain.heat_spread(part)
            ends = zip((heat.low, heat.likely, heat.high), (own.low, own.likely, own.high), strict=True)
            heat = Spread(*(None if one is None or more is None else one + more / length for one, more in ends))
            bare += _bare_heat(chain, part, 1.0) / length
    return heat, bare


def _bare_heat(chain: Chain, part: Loss, share: float) -> float:
    """Return the heat in a share of a part at its high end, without credit for what is typical of others [W]."""
    power = chain.power.high or 0.0
    return (1.0 + 2.0 * VOLTAGE_ERROR) * max(chain.heat_alone(part, share, each, power, "bare") for each in chain.least)


def _pattern(use: Use) -> tuple[float, float]:
    """Return the longest over and the pause after it [s]; an on-air share may come in one piece."""
    match use.pattern:
        case Over(transmit, listen):
            return (transmit, listen) if listen > 0.0 else (inf, 0.0)
        case OnAirShare(share) if share < 1.0:
            return share * ON_AIR_SHARE_WINDOW, (1.0 - share) * ON_AIR_SHARE_WINDOW
        case _:
            return inf, 0.0


def surroundings_of(design: Design) -> Surroundings:
    """Return the air and the sun about a loop; where nothing is stated, hot and thin air and no sun."""
    site, shone = design.site, design.loop.conductor.in_sun
    air = HOT_AIR if site.air_temperature is None else site.air_temperature
    thin = float(standard_pressure(THIN_AIR if site.altitude is None else site.altitude))
    return Surroundings(air, thin, SUNSHINE if shone else 0.0)


def _surface(design: Design) -> Surface:
    made_of = design.loop.conductor
    finishes = _finishes(made_of)
    emissivity = [min(f.emissivity.low or 0.0 for f in finishes), max(f.emissivity.high or 0.0 for f in finishes)]
    absorptivity = [min(f.absorptivity.low or 0.0 for f in finishes), max(f.absorptivity.high or 0.0 for f in finishes)]
    likely = finishes[0]
    if made_of.form == "strip":
        width, thickness = made_of.width or 0.0, made_of.thickness or 0.0
        across, facing = float(equal_perimeter_diameter(width, thickness)), (width**2 + thickness**2) ** 0.5
    else:
        across = facing = made_of.outer_diameter or 0.0
    upright = UPRIGHT_SHARE if design.loop.plane == "vertical" else 1.0
    return Surface(
        across,
        facing,
        np.array([emissivity[1], likely.emissivity.likely or 0.0, emissivity[0]]),
        np.array([absorptivity[0], likely.absorptivity.likely or 0.0, absorptivity[1]]),
        np.array([1.0 + CONVECTION_SCATTER, (1.0 + upright) / 2.0, upright * (1.0 - CONVECTION_SCATTER)]),
    )


def _finishes(made_of: Conductor) -> list[warmth_tables.Finish]:
    """Return the finishes that a conductor may have, the likely one first."""
    table = warmth_tables.finishes()
    light = (made_of.material or "").startswith("aluminium")
    aged = table["oxidised aluminium" if light else "oxidised copper"]
    if made_of.surface is None:
        return [aged, table["bright"]]
    if made_of.surface == "painted":
        return [table["painted"]]
    return [table["bright"] if made_of.surface == "bright" else aged]


def _coefficient(made_of: Conductor) -> float:
    return COPPER_COEFFICIENT if made_of.material is None else tables.materials()[made_of.material].coefficient


def _wall(made_of: Conductor) -> float:
    """Return how thick the metal is from the outside in [m]."""
    if made_of.form == "tube":
        return made_of.wall or 0.0
    return made_of.thickness or 0.0 if made_of.form == "strip" else (made_of.outer_diameter or 0.0) / 2.0


def _depth(made_of: Conductor, frequency: float) -> float:
    return float(skin_depth(frequency, poorest_conductivity(made_of)))


def expansion_of(made_of: Conductor) -> float | None:
    """Return the linear expansion of a conductor [1/K], None where no table has it.

    Where its metal is not stated it is that of the metal that expands most.
    """
    return max((metal.expansion for metal in _metals(made_of)), default=None)


def _capacities(made_of: Conductor) -> tuple[float, float]:
    """Return the least and the most heat that may warm a metre by one kelvin [J/(m K)], one where its metal is stated.

    Both are 0 where nothing tells how much metal is in it.
    """
    section = _section(made_of)
    if section is None:
        return 0.0, 0.0
    held = [float(heat_capacity_per_metre(section, each.density, each.specific_heat)) for each in _metals(made_of)]
    return min(held, default=0.0), max(held, default=0.0)


def _metals(made_of: Conductor) -> list[warmth_tables.Metal]:
    """Return the metals that a conductor may be of: every one of the table where only its conductivity is stated."""
    table = warmth_tables.metals()
    return [metal for name, metal in table.items() if made_of.material in (None, name)]


def _section(made_of: Conductor) -> float | None:
    """Return the area of metal in the cross-section [m2]; None where the design does not tell it."""
    across, wall = made_of.outer_diameter or 0.0, made_of.wall or 0.0
    sections = {
        "rod": pi * across**2 / 4.0,
        "tube": pi * wall * (across - wall),
        "strip": (made_of.width or 0.0) * (made_of.thickness or 0.0),
    }
    return sections.get(made_of.form)


# Joints ----------------------------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class JointWarmth:
    """One joint of a group: its own heat key-down, the others at their low ends, and what enters its spot.

    `heat` is that of one [W]. `spot` is what all joints of the same spot lead into one length of conductor [W], those
    of one side where the spot is the capacitor; `bare_spot` its high end without credit for what is typical of other
    parts, `poor_spot` with joints of this group ten times as bad. `resistance` is the rise for each watt over the
    conductor beside it [K/W], None where nothing tells how much metal leads heat away.
    """

    joint: Joint
    heat: Spread
    spot: Spread
    bare_spot: float
    poor_spot: float
    resistance: float | None


def joint_warmth(chain: Chain, design: Design, warm: Warmth) -> tuple[JointWarmth, ...]:
    """Return how warm each kind of joint gets: of one joint at its high end, all others at their low ends."""
    made_of = design.loop.conductor
    section = _section(made_of)
    sigma = poorest_conductivity(made_of)
    air = warm.air_temperature
    dull = warm.bare.surface
    # Convection grows with the rise, so what a small one loses for each kelvin is the least.
    lost = _hottest(lost_heat(air + _SMALL_RISE, dull, warm.air)) / _SMALL_RISE
    joints = list(zip(design.loop.joint, chain.joints, strict=True))
    ones = {joint.name: chain.heat_spread(part, 1.0 / joint.count) for joint, part in joints}
    bares = {joint.name: _bare_heat(chain, part, 1.0 / joint.count) for joint, part in joints}
    made = []
    for joint, part in joints:
        resistance = None
        if section:
            sides = 1 if joint.at == "capacitor" else 2
            resistance = float(fin_resistance(lost, POORER * thermal_conductivity(sigma, air), section, sides))
        together = [other for other, _ in joints if other.at == joint.at]
        spot = Spread(*(_summed(ones, together, joint, end) for end in ("low", "likely", "high")))
        beside = [other for other in together if other is not joint]
        bare = sum(_at_one_spot(other, joint) * bares[other.name] for other in together)
        poor = _bare_heat(chain, replace(part, high=POOR_JOINT * part.high), 1.0 / joint.count)
        worst = sum(_at_one_spot(other, joint) * bares[other.name] for other in beside)
        worst += _at_one_spot(joint, joint) * poor
        made.append(JointWarmth(joint, ones[joint.name], spot, bare, worst, resistance))
    return tuple(made)


def _summed(ones: dict[str, Spread], together: list[Joint], joint: Joint, end: str) -> float | None:
    found = [(_at_one_spot(other, joint), getattr(ones[other.name], end)) for other in together]
    return None if any(heat is None for _, heat in found) else float(sum(count * heat for count, heat in found))


def _at_one_spot(joint: Joint, whose: Joint) -> int:
    """Return how many joints of a group share the spot of one: those of one side of the capacitor, all opposite it.

    Joints that are spread are each by itself; what they warm together is counted with the conductor.
    """
    if joint.at == "spread":
        return 1 if joint is whose else 0
    return ceil(joint.count / 2) if joint.at == "capacitor" else joint.count
