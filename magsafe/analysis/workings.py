"""The numbers that went into a figure, at each of its ends, so that somebody else can work it out again.

Each letter is one of the formula that `magsafe explain` tells beside it. Which corner of losses and surroundings makes
an end is asked of the chain here as the figures ask it; a test evaluates every formula with these numbers and holds
the result against the figure.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from math import copysign, expm1, inf, pi

import numpy as np
from scipy.constants import c

from magsafe.analysis import terms
from magsafe.analysis.chain import REACTANCE_ERROR, RESISTANCE_ERROR, VOLTAGE_ERROR, Chain
from magsafe.analysis.feed_workings import FEED_WORKINGS
from magsafe.analysis.flow import inductance
from magsafe.analysis.losses import Corner, Loss
from magsafe.analysis.operating_point import OperatingPoint
from magsafe.analysis.sky_workings import SKY_WORKINGS
from magsafe.analysis.terms import Column, Columns, Term
from magsafe.analysis.warmth import RUNS_AWAY, Warmth
from magsafe.design.model import Design
from magsafe.design.shape import outline
from magsafe.physics.heat import lost_heat
from magsafe.spread import Spread

Working = Callable[[Chain, Design, OperatingPoint], tuple[Term, ...]]


def working(name: str, design: Design, point: OperatingPoint) -> tuple[Term, ...]:
    """Return the numbers that went into a figure of an operating point; empty where it is not known.

    Parameters
    ----------
    name : of the figure, such as `capacitor_peak_voltage`
    design, point : the design and its transmission
    """
    made = point.chain
    spread: Spread = getattr(point.figures, name).spread
    if not spread.known:
        return ()
    if made is None:
        return _perimeter(design, point) if name == "perimeter_in_wavelengths" else ()
    return _WORKINGS[name](made, design, point) if name in _WORKINGS else ()


# Figures ---------------------------------------------------------------------------------------------------


def _perimeter(design: Design, point: OperatingPoint) -> tuple[Term, ...]:
    return (
        terms.same("s", outline(design.loop).perimeter, "m"),
        terms.same("f", point.transmission.frequency, "Hz"),
        terms.same("c", c, "m/s"),
    )


def _thickness(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    return terms.same("s", chain.line.perimeter, "m"), terms.same("a", chain.conductor_radius, "m")


def _radiation(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.own(chain.likely_free, chain.free, chain.free, lambda _, corner: corner.radiated)
    solved = terms.term("R0", "ohm", columns, lambda each: each.corner.state.radiated)
    return solved, terms.excess(columns), terms.stated_error(RESISTANCE_ERROR)


def _conductor(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    part = chain.conductor
    columns = terms.own(chain.likely, chain.every, chain.every, part.at)
    return (
        terms.term("r", "ohm/m", columns, lambda each: getattr(part, each.losses)),
        terms.term("L", "m", columns, lambda each: each.corner.weight(part.where, each.losses) / each.corner.growth),
        terms.excess(columns),
        terms.stated_error(RESISTANCE_ERROR),
    )


def _sum_of(chain: Chain, losses: Sequence[Loss], names: Sequence[str]) -> tuple[Term, ...]:
    made = []
    for number, (loss, name) in enumerate(zip(losses, names, strict=True), 1):
        columns = terms.own(chain.likely, chain.every, chain.every, loss.at)
        in_ohms = loss.where in ("port", "spread", "opposite") or getattr(loss.where, "in_ohms", False)
        units = ("ohm", "1") if in_ohms else ("1", "ohm")
        own = terms.term(f"l_{number}", units[0], columns, _own_value(loss), name)
        made += [own, terms.term(f"w_{number}", units[1], columns, _own_weight(loss), name)]
    return tuple(made)


def _own_value(loss: Loss) -> Callable[[Column], float]:
    return lambda each: float(getattr(loss, each.losses))


def _own_weight(loss: Loss) -> Callable[[Column], float]:
    return lambda each: each.corner.weight(loss.where, each.losses)


def _joints(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
    names = [f"{joint.count} x {joint.name}" for joint in design.loop.joint]
    return _sum_of(chain, chain.joints, names)


def _capacitor(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
    padding = [f"{part.capacitance * 1e12:.6g} pF in {part.connection}" for part in chain.network.padding]
    return _sum_of(chain, (chain.capacitor, *chain.padding), [design.capacitor.kind, *padding])


def _total(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.own(chain.likely, chain.least, chain.most, chain.resistance)
    return *terms.parts(chain, columns), terms.stated_error(RESISTANCE_ERROR, ends=columns)


def _unexplained(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    other = {"low": "high", "likely": "likely", "high": "low"}

    def parts(each: Column) -> float:
        return chain.resistance_of_parts(other[each.losses], each.corner)

    columns = terms.own(
        chain.likely,
        chain.least,
        chain.most,
        lambda end, corner: chain.resistance(end, corner) - chain.resistance_of_parts(other[end], corner),
    )
    return terms.total(chain, columns), terms.term("S", "ohm", columns, parts)


def _reactance(chain: Chain, _: Design, point: OperatingPoint) -> tuple[Term, ...]:
    low, likely, high = terms.own(chain.likely, chain.every, chain.every, lambda _, corner: corner.reactance)
    spread = point.figures.port_reactance.spread
    columns = (None if spread.low is None else low, likely, None if spread.high is None else high)
    error = chain.reactance_error
    # The ends are moved outwards, also where the reactance is negative.
    least = None if columns[0] is None else -copysign(error, columns[0].corner.reactance)
    most = None if columns[2] is None else copysign(error, columns[2].corner.reactance)
    return (
        terms.term("X0", "ohm", columns, lambda each: each.corner.state.flow.reactance),
        terms.term("Xs", "ohm", columns, lambda each: each.corner.state.shift),
        terms.term("x", "ohm/m", columns, lambda each: each.corner.internal),
        terms.term("L", "m", columns, lambda each: each.corner.state.flow.internal_length),
        terms.excess(columns),
        Term("d", (least, 0.0, most), "1"),
    )


def _inductance(chain: Chain, design: Design, _: OperatingPoint) -> tuple[Term, ...]:
    return (
        terms.same("L0", inductance(design, chain.frequency), "H"),
        terms.same("x", chain.internal, "ohm/m"),
        terms.same("s", chain.line.perimeter, "m"),
        terms.same("N", float(design.loop.turns), "1"),
        terms.same("f", chain.frequency, "Hz"),
        terms.stated_error(REACTANCE_ERROR + chain.corner_error),
    )


def _capacitance(chain: Chain, _: Design, point: OperatingPoint) -> tuple[Term, ...]:
    reactance = terms.spread_of("X", point.figures.port_reactance.spread, "ohm", turned=True)
    return reactance, terms.same("f", chain.frequency, "Hz")


def _efficiency(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    return *terms.parts(chain, terms.efficient(chain)), terms.stated_error(RESISTANCE_ERROR)


def _quality(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.rising(chain, chain.quality)
    return (
        terms.term("S", "ohm", columns, lambda each: each.corner.slope),
        terms.same("t", chain.capacitor_steepness, "1"),
        terms.term("X", "ohm", columns, lambda each: each.corner.reactance),
        terms.total(chain, columns),
        terms.stated_error(chain.quality_error, ends=columns),
    )


def _half(_: Chain, __: Design, point: OperatingPoint) -> tuple[Term, ...]:
    return (terms.spread_of("Q", point.figures.unloaded_q.spread, "1"),)


def _bandwidth(chain: Chain, _: Design, point: OperatingPoint) -> tuple[Term, ...]:
    quality = terms.spread_of("Q", point.figures.unloaded_q.spread, "1", turned=True)
    return terms.same("f", chain.frequency, "Hz"), quality


def _voltage(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.rising(chain, chain.voltage)
    return (
        terms.power(columns),
        terms.total(chain, columns),
        terms.term("X", "ohm", columns, lambda each: each.corner.reactance),
        terms.same("k", chain.overshoot, "1"),
        terms.stated_error(chain.voltage_error, ends=columns),
    )


def _current(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.rising(chain, chain.current)
    return terms.power(columns), terms.total(chain, columns), terms.stated_error(VOLTAGE_ERROR, ends=columns)


def _largest(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    columns = terms.rising(chain, chain.largest_current)
    return (
        terms.power(columns),
        terms.total(chain, columns),
        terms.term("m", "1", columns, lambda each: each.corner.state.flow.largest),
        terms.excess(columns),
        terms.stated_error(VOLTAGE_ERROR, ends=columns),
    )


def _dissipation(chain: Chain, _: Design, __: OperatingPoint) -> tuple[Term, ...]:
    parts = (chain.capacitor, *chain.padding)

    def own(end: str, corner: Corner) -> float:
        return sum(part.at(end, corner) for part in parts)

    def rest(end: str, others: str, corner: Corner) -> float:
        mine = own(end, corner)
        return chain.resistance_with(mine, own(others, corner), others, corner) - mine

    def share(end: str, others: str, corner: Corner) -> float:
        return own(end, corner) / (own(end, corner) + rest(end, others, corner))

    power = chain.power
    low = min(chain.most, key=lambda corner: share("low", "high", corner), default=None)
    high = max(chain.least, key=lambda corner: share("high", "low", corner))
    columns: Columns = (
        None if low is None else Column("low", low, power.low or 0.0),
        Column("likely", chain.likely, power.likely or 0.0),
        Column("high", high, power.high or 0.0),
    )
    others = {"low": "high", "likely": "likely", "high": "low"}
    return (
        terms.power(columns),
        terms.term("r", "ohm", columns, lambda each: own(each.losses, each.corner)),
        terms.term("R", "ohm", columns, lambda each: rest(each.losses, others[each.losses], each.corner)),
        terms.stated_error(2.0 * VOLTAGE_ERROR, ends=columns),
    )


# Warmth ----------------------------------------------------------------------------------------------------


def _warmth(_: Chain, __: Design, point: OperatingPoint) -> tuple[Term, ...]:
    warm = point.warmth
    if warm is None:
        return ()
    rise = point.figures.conductor_temperature_rise.spread
    known = (rise.low, rise.likely, rise.high)
    air, heat = warm.air_temperature, warm.heat
    one_over, tuning = _bound(warm, warm.duty, warm.over), _bound(warm, warm.tune_share, warm.tune_time)
    steady = {
        "K": _steady(warm, warm.duty),
        "M": _steady(warm, warm.duty * warm.share),
    }
    tuned = warm.tune_time > 0.0
    found = [
        terms.spread_of("q", heat, "W/m"),
        terms.same("u", warm.duty, "1"),
        terms.same("g", warm.share, "1"),
        terms.same("C", warm.capacity, "J/(K m)"),
        *(terms.spread_of(letter, each, "K") for letter, each in steady.items()),
        Term("A", (0.0, _swing(warm, steady["M"].likely or 0.0), one_over), "K"),
        Term("T", (air, air, _steady(warm, warm.tune_share).high if tuned else air), "K"),
        Term("B", (0.0, 0.0, tuning if tuned else 0.0), "K"),
        terms.same("Ta", air, "K"),
    ]
    return tuple(replace(each, ends=terms.where(each.ends, known)) for each in found)


def _steady(warm: Warmth, share: float) -> Spread:
    """Return the temperature at which a conductor stays that is heated by so much of its key-down heat without end."""
    found = replace(warm, duty=share, over=inf, pause=0.0, tune_time=0.0).temperature()
    low, likely, high = (None if each == RUNS_AWAY else each for each in (found.low, found.likely, found.high))
    return Spread(low, likely, high)


def _bound(warm: Warmth, share: float, lasting: float) -> float:
    """Return what so much heat can bring at most while it lasts [K]: nothing is lost."""
    if warm.capacity == 0.0 or lasting == inf:
        return inf
    return (warm.heat.high or 0.0) * share * lasting / warm.capacity


def _swing(warm: Warmth, mean: float) -> float:
    """Return how far an over ends above the mean temperature [K], of a body that loses heat in proportion."""
    if warm.share == 1.0 or mean == 0.0:
        return 0.0
    cooler, warmer = (lost_heat(mean + step, warm.surface, warm.air) for step in (-0.5, 0.5))
    conductance = float(np.broadcast_to(warmer - cooler, 3)[1])
    end = 1.0
    if warm.capacity > 0.0:
        constant = warm.capacity / conductance
        end = expm1(-warm.over / constant) / expm1(-(warm.over + warm.pause) / constant)
    return (warm.heat.likely or 0.0) * warm.duty * (end - warm.share) / conductance


# A loop that is fed as it is -------------------------------------------------------------------------------


@dataclass(frozen=True, slots=True)
class _Terminal:
    """The impedance at the terminals [ohm] through a port across which a susceptance [S] is."""

    bare: complex
    across: float

    @property
    def seen(self) -> complex:
        return self.bare / (1.0 + 1j * self.across * self.bare)


def _terminals(chain: Chain) -> tuple[_Terminal, list[_Terminal]]:
    """Return the likely terminal and all those that may be, as `Chain.terminals` counts them."""
    likely = _Terminal(complex(chain.resistance("likely", chain.likely), chain.likely.reactance), 0.0)
    susceptance = 2.0 * pi * chain.frequency * chain.gap_capacitance
    every = []
    for corner in chain.every:
        steep = REACTANCE_ERROR * (abs(corner.slope - corner.reactance) + abs(corner.reactance))
        for end, error in (("low", -RESISTANCE_ERROR), ("high", RESISTANCE_ERROR)):
            resistance = chain.resistance(end, corner) * (1.0 + error)
            every += [
                _Terminal(complex(resistance, corner.reactance + moved), sign * susceptance)
                for moved in (-steep, 0.0, steep)
                for sign in (-1.0, 0.0, 1.0)
            ]
    return likely, every


def _terminal(name: str) -> Working:
    def work(chain: Chain, _: Design, point: OperatingPoint) -> tuple[Term, ...]:
        likely, every = _terminals(chain)
        low, middle, high = (chain.power.low or 0.0, chain.power.likely or 0.0, chain.power.high or 0.0)
        along: Callable[[_Terminal, float], float] = {
            "terminal_resistance": lambda each, _: each.seen.real,
            "terminal_reactance": lambda each, _: each.seen.imag,
            "swr_at_50_ohm": lambda each, _: abs((each.seen - 50.0) / (each.seen + 50.0)),
            "terminal_peak_voltage": lambda each, power: abs(each.seen) * (power / each.seen.real) ** 0.5,
        }[name]
        # The likely terminal may be an end itself, with the likely power.
        least = min([(likely, middle), *((each, low) for each in every)], key=lambda each: along(*each))
        most = max([(likely, middle), *((each, high) for each in every)], key=lambda each: along(*each))
        spread: Spread = getattr(point.figures, name).spread
        known = (spread.low, spread.likely, spread.high)
        power = (least[1], middle, most[1])

        def term(letter: str, unit: str, value: Callable[[_Terminal], float]) -> Term:
            ends = (value(least[0]), value(likely), value(most[0]))
            return Term(letter, terms.where(ends, known), unit)

        if name in ("terminal_resistance", "terminal_reactance"):
            return (
                term("r", "ohm", lambda each: each.bare.real),
                term("x", "ohm", lambda each: each.bare.imag),
                term("b", "S", lambda each: each.across),
            )
        seen = term("R", "ohm", lambda each: each.seen.real), term("X", "ohm", lambda each: each.seen.imag)
        return (Term("P", terms.where(power, known), "W"), *seen) if name == "terminal_peak_voltage" else seen

    return work


def _nearest(_: Chain, __: Design, point: OperatingPoint) -> tuple[Term, ...]:
    found = point.figures.nearest_resonance.spread.likely
    return (terms.same("f1", found or 0.0, "Hz"), terms.stated_error(REACTANCE_ERROR))


_WORKINGS: dict[str, Working] = {
    "perimeter_in_wavelengths": lambda _, design, point: _perimeter(design, point),
    "thickness_parameter": _thickness,
    "radiation_resistance": _radiation,
    "conductor_resistance": _conductor,
    "joint_resistance": _joints,
    "capacitor_resistance": _capacitor,
    "unexplained_resistance": _unexplained,
    "total_resistance": _total,
    "port_reactance": _reactance,
    "inductance": _inductance,
    "tuning_capacitance": _capacitance,
    "conductor_efficiency": _efficiency,
    "unloaded_q": _quality,
    "loaded_q": _half,
    "half_power_bandwidth": _bandwidth,
    "swr2_bandwidth": _bandwidth,
    "capacitor_peak_voltage": _voltage,
    "capacitor_rms_current": _current,
    "largest_current": _largest,
    "capacitor_dissipation": _dissipation,
    "conductor_temperature_rise": _warmth,
    "terminal_resistance": _terminal("terminal_resistance"),
    "terminal_reactance": _terminal("terminal_reactance"),
    "terminal_peak_voltage": _terminal("terminal_peak_voltage"),
    "swr_at_50_ohm": _terminal("swr_at_50_ohm"),
    "nearest_resonance": _nearest,
    **SKY_WORKINGS,
    **FEED_WORKINGS,
}
