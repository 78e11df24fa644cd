"""The resonant loop at one frequency, ready to be asked at the corner that each question needs.

Which end of a loss is dangerous depends on what is asked, so no corner serves all. The current is solved; what stays
open of it is the capacitance of the port's own gap, whose width no design tells. It runs through every answer as
one excess of the reactance between two ends, because most of it cancels.
"""

from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from math import inf, pi, sqrt

import numpy as np
from scipy.constants import c, mu_0

from magsafe.analysis import line_capacitor
from magsafe.analysis.capacitor_network import Network, network
from magsafe.analysis.flow import Flow, inductance
from magsafe.analysis.losses import (
    Corner,
    Loss,
    among,
    capacitor_loss,
    conductivity,
    conductor_loss,
    joint_loss,
    padding_loss,
)
from magsafe.analysis.surroundings import State, Surroundings, surroundings
from magsafe.analysis.wires import electrical_radius, extent
from magsafe.design.as_built import standing
from magsafe.design.model import Design
from magsafe.design.shape import Outline, outline
from magsafe.physics import small_loop, tuned_circuit
from magsafe.physics.arrays import Array
from magsafe.spread import UNKNOWN, Spread

Question = Callable[[str, Corner, float], float]

# Against the Fourier series of the circular loop and twice the segments (tests), with the conductor's curvature.
RESISTANCE_ERROR = 0.005
REACTANCE_ERROR = 0.005
VOLTAGE_ERROR = 0.005
QUALITY_ERROR = 0.007
STUDY = "thin-wire method of moments, held against the Fourier series of the circular loop (computed)"

LOSSY_SHARE, LOSSY_BEND = 0.03, 0.005  # of the conductor's resistance in its reactance: see `current_is_perfect`
CROWDED_SHARE = 0.2  # of what crowding takes from the inductance of turns: they are bent, and their currents differ
CARRIED = 1.5  # power of the frequency by which Q may change otherwise than its parts tell: soil, a line's loss
LARGEST_SHARE = 0.5  # of the susceptance that cancels the reactance, which the gap's may be

# Capacitance across the port of a gap wider or narrower than the one computed [F, F/m of conductor diameter]: from
# 20 mm and three conductor radii to 100 mm by the Fourier series, for loops of 0.5 to 3.4 m (computed).
GAP_CAPACITANCE = (0.25e-12, 0.02e-12 / 1e-3)


@dataclass(frozen=True, slots=True)
class GroundCase:
    """A field that may be: the current that flows, and what the loop would draw with it.

    `square` is the square of the current that flows into the conductor at the port, RMS [A2], for each watt at the
    loop, at its dangerous end; `bare_square` the same without credit for typical losses; `likely_square` the likely.
    """

    flow: Flow
    square: float
    bare_square: float
    likely_square: float


@dataclass(frozen=True, slots=True)
class Chain:
    """The resonant loop at one frequency, ready to be asked at any corner.

    Questions are asked with (end, corner, power): which end of every loss, which state with which excess of its
    reactance, power at the loop [W]. `corner_error` is the relative uncertainty of the inductance by sharp corners and
    crowded turns. `capacitor` is the loss of its main part, `padding` those of the parts joined to it. The derivative
    of its reactance by the frequency, times it, over that reactance is `capacitor_steepness`, the highest voltage in it
    over that at its terminals `capacitor_crest`: 1 unless it is a line. `measured` is the unloaded Q that an instrument
    told, at the ends of its uncertainty: it decides the total resistance in place of the parts, whatever the corner.
    `read` is the same as it was read; all of it below what the parts make, its upper end counts no lower than theirs.
    """

    frequency: float
    line: Outline
    extent: float
    conductor_radius: float
    corner_error: float
    power: Spread
    overshoot: float
    inductance: float
    gap_capacitance: float
    tuned: bool
    internal: float
    around: Surroundings
    conductor: Loss
    joints: tuple[Loss, ...]
    capacitor: Loss
    network: Network
    padding: tuple[Loss, ...]
    capacitor_steepness: float = 1.0
    capacitor_crest: float = 1.0
    measured: Spread | None = None
    read: Spread | None = None

    def corners(self, states: Iterable[State], *, in_place: bool = True) -> tuple[Corner, ...]:
        """Return states with every excess of the reactance that the port's gap leaves open."""
        return tuple(
            Corner(state, self._excess(state, sign), self.internal, in_place)
            for state in states
            for sign in (-1.0, 0.0, 1.0)
        )

    def _excess(self, state: State, sign: float) -> float:
        if not self.tuned:
            return 0.0
        reactance = state.flow.reactance + state.shift
        across = sign * 2.0 * pi * self.frequency * self.gap_capacitance * reactance
        return across / (1.0 - across)

    @property
    def gap_is_small(self) -> bool:
        """Whether the gap's capacitance is a small part of what tunes the port, so that an excess can stand for it."""
        susceptance = 2.0 * pi * self.frequency * self.gap_capacitance
        states = (*self.around.least, *self.around.most)
        return all(0.0 < (state.flow.reactance + state.shift) * susceptance < LARGEST_SHARE for state in states)

    @property
    def steepness(self) -> float:
        """Derivative of the free reactance by the frequency, times it, over the reactance: 1 for a lumped loop."""
        free = self.likely_free
        return (free.slope / free.growth - free.reactance) / abs(free.reactance)

    @property
    def lossy_share(self) -> float:
        """Resistance of the conductor over the reactance of its inductance [1], both for one current throughout."""
        flow = self.likely_free.state.flow
        length = flow.conductor_length / flow.mean_square
        return self.conductor.likely * length / (2.0 * pi * self.frequency * self.inductance)

    @property
    def current_is_perfect(self) -> bool:
        """Whether the conductor's loss is too small to change the shape of its current by what figures would show.

        Resistance moves by about this share times what the steepness exceeds 1 by (computed, with the loss in the
        matrix: copper and stainless steel, 0.5 to 22 mm, to 0.35 wavelengths).
        """
        bent = self.lossy_share * max(0.0, self.steepness - 1.0) if self.tuned else 0.0
        return self.lossy_share <= LOSSY_SHARE and bent <= LOSSY_BEND

    @property
    def least(self) -> tuple[Corner, ...]:
        """The corners with the least resistance of radiation and ground; of a measured Q, which tells it, all."""
        return self.corners(self.around.least) if self.measured is None else self._all_in_place

    @property
    def most(self) -> tuple[Corner, ...]:
        """The corners with the most; empty where no height bounds what soil adds. Of a measured Q, all."""
        return self.corners(self.around.most) if self.measured is None else self._all_in_place

    @property
    def _all_in_place(self) -> tuple[Corner, ...]:
        return (*self.corners((*self.around.least, *self.around.most)), self.likely)

    @property
    def every(self) -> tuple[Corner, ...]:
        """All corners."""
        return (*self.least, *self.most)

    @property
    def free(self) -> tuple[Corner, ...]:
        """The corners in free space."""
        return self.corners((State(each, each.radiation) for each in self.around.free), in_place=False)

    @property
    def likely(self) -> Corner:
        """The likely corner."""
        return Corner(self.around.likely, 0.0, self.internal)

    @property
    def likely_free(self) -> Corner:
        """The likely corner in free space."""
        first = self.around.free[0]
        return Corner(State(first, first.radiation), 0.0, self.internal, in_place=False)

    @property
    def losses(self) -> tuple[Loss, ...]:
        """The losses of all parts."""
        return (self.conductor, *self.joints, self.capacitor, *self.padding)

    @property
    def typical(self) -> tuple[str, ...]:
        """The rows of common practice that were used."""
        return tuple(dict.fromkeys(row for loss in self.losses for row in loss.typical))

    def resistance(self, end: str, corner: Corner) -> float:
        """Return the total resistance with every loss at one end [ohm]; by the measured Q where there is one."""
        if self.measured is None:
            return self.resistance_of_parts(end, corner)
        if not corner.in_place:
            return corner.radiated + self._measured_losses(end)
        return self._half_slope(corner) / self._measured_q(end)

    def resistance_of_parts(self, end: str, corner: Corner) -> float:
        """Return the total resistance as its parts add up [ohm], whatever was measured."""
        return corner.radiated + sum(loss.at(end, corner) for loss in self.losses)

    def resistance_with(self, mine: float, instead: float, others: str, corner: Corner) -> float:
        """Return the total resistance [ohm], all losses at one end, but some parts at `mine` where they are `instead`.

        A measured Q tells the total whatever its parts are, so it stays where those parts alone are not more.
        """
        if self.measured is None:
            return self.resistance_of_parts(others, corner) - instead + mine
        return max(self.resistance(others, corner), mine)

    def resistance_over(self, radiated: Array, end: str, corner: Corner) -> Array:
        """Return the total resistance [ohm] with other radiation and ground [ohm, for 1 A into the conductor].

        Measured, the total is what it is, and at least what is radiated.
        """
        if self.measured is None:
            losses = self.resistance_of_parts(end, corner) - corner.radiated
            return np.asarray(radiated * corner.growth + losses)
        return np.maximum(radiated * corner.growth, self._half_slope(corner) / self._measured_q(end))

    def taken(self, corner: Corner) -> float:
        """Return the likely resistance [ohm], at least what is radiated: shares of the power are counted by it.

        Only a measured Q that is higher than the loop can have leaves less.
        """
        return max(self.resistance("likely", corner), corner.radiated)

    def unexplained(self, end: str, corner: Corner) -> float:
        """Return what a measured Q adds to the parts [ohm], below zero where it leaves less; 0 without one."""
        return self.resistance(end, corner) - self.resistance_of_parts(end, corner)

    def _half_slope(self, corner: Corner) -> float:
        """Return half of the slope of the reactance of loop and capacitor [ohm]: Q times the resistance."""
        return (corner.slope + (self.capacitor_steepness - 1.0) * abs(corner.reactance)) / 2.0

    def _measured_q(self, end: str) -> float:
        """Return the end of the measured Q that stands for an end of the losses: few losses make a high Q."""
        known = self.measured or UNKNOWN
        return {"high": known.low, "likely": known.likely}.get(end, known.high) or inf

    def _measured_losses(self, end: str) -> float:
        """Return what the loop itself loses [ohm] by the measured Q, what radiates and goes to the ground taken off.

        Where no height bounds what the ground takes, the parts tell the low end.
        """
        if end == "likely":
            return max(0.0, self.resistance(end, self.likely) - self.likely.radiated)
        every = [self.resistance(end, each) - each.radiated for each in self.every]
        if end == "high":
            return max(0.0, *every)
        if not self.around.most:
            parts = min(self.resistance_of_parts(end, each) - each.radiated for each in self.free)
            return min(parts, self._measured_losses("likely"))
        return max(0.0, min(every))

    def voltage(self, end: str, corner: Corner, power: float) -> float:
        """Return the crest of the voltage at the port, with the overshoot [V]."""
        found = tuned_circuit.peak_voltage(power, self.resistance(end, corner), corner.reactance)
        return float(found) * self.overshoot

    def current(self, end: str, corner: Corner, power: float) -> float:
        """Return the RMS current at the port [A]."""
        return float(tuned_circuit.port_current(power, self.resistance(end, corner)))

    def largest_current(self, end: str, corner: Corner, power: float) -> float:
        """Return the largest RMS current anywhere on the conductor [A]."""
        return self.current(end, corner, power) * sqrt(corner.growth) * corner.state.flow.largest

    def quality(self, end: str, corner: Corner, power: float = 0.0) -> float:  # noqa: ARG002
        """Return the unloaded Q, which no power changes."""
        factor = self._half_slope(corner) / abs(corner.reactance)
        return float(tuned_circuit.unloaded_q(self.resistance(end, corner), corner.reactance, factor))

    def efficiency(self, end: str, corner: Corner) -> float:
        """Return radiation resistance over that and the losses, of a corner in free space."""
        return corner.radiated / self.resistance(end, corner)

    def heat_in(self, part: Loss, own: str, others: str, corner: Corner, power: float) -> float:
        """Return the heat in one of the losses [W], that loss at one end, all others at another."""
        mine = part.at(own, corner)
        return power * mine / self.resistance_with(mine, part.at(others, corner), others, corner)

    def heat_spread(self, part: Loss, share: float = 1.0) -> Spread:
        """Return the heat in a part, or in a share of it that may be at its high end alone [W], key-down."""
        power = self.power
        low = min(
            (share * self.heat_in(part, "low", "high", each, power.low or 0.0) for each in self.most), default=None
        )
        likely = share * self.heat_in(part, "likely", "likely", self.likely, power.likely or 0.0)
        high = max(self.heat_alone(part, share, each, power.high or 0.0, "low") for each in self.least)
        return Spread.about(low, likely, high).widened(2.0 * VOLTAGE_ERROR, 2.0 * VOLTAGE_ERROR)

    def heat_alone(self, part: Loss, share: float, corner: Corner, power: float, others: str) -> float:
        """Return the heat in a share of a part [W] at its high end, the rest of it and all others at another end."""
        mine = share * part.at("high", corner)
        rest = share * part.at(others, corner)
        return power * mine / self.resistance_with(mine, rest, others, corner)

    def terminals(self) -> list[complex]:
        """Return the impedance of a loop that is fed as it is [ohm] at every corner.

        A port of another width is a capacitance across it; the stated error of the reactance is one of frequency.
        """
        found = []
        susceptance = 2.0 * pi * self.frequency * self.gap_capacitance
        for corner in (*self.least, *self.most):
            steep = REACTANCE_ERROR * (abs(corner.slope - corner.reactance) + abs(corner.reactance))
            for end, error in (("low", -RESISTANCE_ERROR), ("high", RESISTANCE_ERROR)):
                resistance = self.resistance(end, corner) * (1.0 + error)
                for moved in (-steep, 0.0, steep):
                    bare = complex(resistance, corner.reactance + moved)
                    found += [bare / (1.0 + 1j * sign * susceptance * bare) for sign in (-1.0, 0.0, 1.0)]
        return found

    def dangerous(self, ask: Question, end: str) -> float:
        """Return the high end of a question: losses at `end`, least resistance of any ground, most power."""
        return max(ask(end, corner, self.power.high or 0.0) for corner in self.least)

    def spread(self, ask: Question) -> Spread:
        """Return the spread of a question whose answer rises as the resistance falls."""
        low = min((ask("high", corner, self.power.low or 0.0) for corner in self.most), default=None)
        likely = ask("likely", self.likely, self.power.likely or 0.0)
        return Spread.about(low, likely, self.dangerous(ask, "low"))

    @property
    def voltage_error(self) -> float:
        """How far the voltage may lie off, beside the excess [1]."""
        return VOLTAGE_ERROR + self.corner_error

    @property
    def quality_error(self) -> float:
        """The same of Q [1]."""
        return QUALITY_ERROR + self.corner_error

    @property
    def reactance_error(self) -> float:
        """The same of the reactance [1]: steep near the anti-resonance, it moves by more than the inductance."""
        return (REACTANCE_ERROR + self.corner_error) * max(1.0, self.steepness)

    def ground_cases(self) -> tuple[GroundCase, ...]:
        """Return the fields to compare, each with the current that it would draw."""
        likely = self.likely.growth / self.resistance("likely", self.likely)
        return tuple(
            GroundCase(state.flow, self._square("low", state), self._square("bare", state), likely)
            for state in self.around.fields
        )

    def _square(self, end: str, state: State) -> float:
        return max(corner.growth / self.resistance(end, corner) for corner in self.corners([state]))

    def efficiency_spread(self) -> Spread:
        """Return the spread of the efficiency with the ground left out."""
        likely = self.efficiency("likely", self.likely_free)
        least = min(self.efficiency("high", corner) for corner in self.free)
        most = max(self.efficiency("low", corner) for corner in self.free)
        return Spread(least * (1.0 - RESISTANCE_ERROR), likely, min(1.0, most * (1.0 + RESISTANCE_ERROR)))

    def bound_ratio(self) -> Spread:
        """Return Q over efficiency times the lower bound on Q, in free space."""
        reach = self.extent + self.conductor_radius
        bound = float(tuned_circuit.chu_bound(2.0 * pi * self.frequency / c * reach))
        likely = self.quality("likely", self.likely_free) / (self.efficiency("likely", self.likely_free) * bound)
        return Spread.exact(likely).widened(self.quality_error + RESISTANCE_ERROR, self.quality_error)


def chain(design: Design, frequency: float, line: Outline, power: Spread) -> Chain:
    """Return the chain of a design that the solver reaches, at one frequency [Hz], fed with `power` [W]."""
    made_of = design.loop.conductor
    along, internal = conductor_loss(made_of, frequency, design.site.air_temperature or made_of.temperature)
    around = surroundings(design, frequency)
    # Where the capacitor sits there may be no conductor, which is the dangerous side for volts.
    open_share = around.free[0].shape.gap / (line.perimeter * design.loop.turns)
    along = replace(along, low=along.low * (1.0 - open_share), bare=along.bare * (1.0 - open_share))
    external = inductance(design, frequency)
    omega = 2.0 * pi * frequency
    likely = Corner(around.likely, 0.0, internal)
    radius, joined = electrical_radius(made_of), network(design, frequency)
    made = Chain(
        frequency=frequency,
        line=line,
        extent=extent(design),
        conductor_radius=radius,
        corner_error=(corner_constant(design) * mu_0 * radius + crowded_inductance(design)) / external,
        power=power,
        overshoot=design.margins.overshoot_ratio,
        inductance=external + internal / omega * line.perimeter * design.loop.turns,
        gap_capacitance=GAP_CAPACITANCE[0] + GAP_CAPACITANCE[1] * 2.0 * radius,
        tuned=design.capacitor.kind != "none",
        internal=internal,
        around=around,
        conductor=along,
        joints=tuple(joint_loss(joint) for joint in design.loop.joint),
        capacitor=among(capacitor_loss(design.capacitor, frequency, abs(likely.reactance)), joined),
        network=joined,
        padding=tuple(padding_loss(part, joined) for part in joined.padding),
    )
    if made.tuned and line_capacitor.is_complete(design.capacitor):
        made = _of_its_sizes(made, design)
    return _with_measured(made, design) if made.tuned else made


def _with_measured(made: Chain, design: Design) -> Chain:
    """Return the chain with the Q that was measured; one lower than the parts make it takes no volts away."""
    read = _read(made, design)
    if read is None:
        return made
    if (read.high or 0.0) >= least_quality(made):
        return replace(made, measured=read, read=read)
    bare = max(read.high or 0.0, made.dangerous(made.quality, "bare"))
    return replace(made, measured=Spread(read.low, read.likely, bare), read=read)


def least_quality(made: Chain) -> float:
    """Return the least unloaded Q that the parts make, with its stated error, whatever was measured.

    Where no height bounds what the ground takes it is that without what the ground takes at most.
    """
    parts = replace(made, measured=None)
    return min(parts.quality("high", each) for each in parts.most or parts.least) * (1.0 - parts.quality_error)


def _read(made: Chain, design: Design) -> Spread | None:
    """Return the unloaded Q that was measured of the loop as it is, carried over to its frequency; None without.

    Radiation goes with the fourth power of the frequency, what soil takes about with its square, a conductor's loss
    with its root, a capacitor's of one Q with the frequency; more, the steeper the reactance is, as less of the current
    flows at the port (computed: circles of one and two turns, to 0.8 of their anti-resonance).
    """
    found = standing(design, made.frequency)
    if found is None or found.why_not or found.record.unloaded_q is None:
        return None
    quality, away = found.record.unloaded_q, made.frequency / (found.record.frequency or made.frequency)
    likely, bent = made.likely, made.steepness - 1.0
    soil = max(0.0, likely.radiated - likely.state.flow.radiation * likely.growth)
    powers = [(4.0 + 2.5 * bent, likely.radiated - soil), (2.0 + 2.0 * bent, soil)]
    powers.append((0.5 + 2.0 * bent, made.conductor.at("likely", likely)))
    powers += [(0.0 if each.where == "port" else 2.0 * bent, each.at("likely", likely)) for each in made.joints]
    powers += [(1.0 + bent, part.at("likely", likely)) for part in (made.capacitor, *made.padding)]
    grows = sum(power * part for power, part in powers) / made.resistance_of_parts("likely", likely)
    carried, unsure = away ** (1.0 + 2.0 * bent - grows), max(away, 1.0 / away) ** CARRIED
    high = quality.high * carried * unsure / (1.0 - _cold_share(made, design))
    return Spread(quality.low * carried / unsure, quality.likely * carried, high)


def _cold_share(made: Chain, design: Design) -> float:
    """Return what share of the resistance the conductor loses in the coldest air stated [1]; none where none is.

    How warm it was when Q was measured no record tells: the temperature at the start of an over is taken.
    """
    made_of, air = design.loop.conductor, design.site.air_temperature
    if air is None or air >= made_of.temperature:
        return 0.0
    warm, cold = (conductor_loss(made_of, made.frequency, each)[0].low for each in (made_of.temperature, air))
    share = made.conductor.at("likely", made.likely) / made.resistance_of_parts("likely", made.likely)
    return share * (1.0 - cold / warm)


def _of_its_sizes(made: Chain, design: Design) -> Chain:
    """Return the chain with what its capacitor's sizes tell: steepness and crest, and the loss where none is stated."""
    part, off = design.capacitor, made.reactance_error
    reactances = [corner.reactance for corner in made.every]
    span = Spread(min(reactances) * (1.0 - off), made.likely.reactance, max(reactances) * (1.0 + off))
    metal = tube_metal(design)
    found = line_capacitor.line_loss(part, metal, made.network, made.frequency, span) if min(reactances) > 0.0 else None
    if found is None:
        return made
    made = replace(made, capacitor_steepness=found.steepness, capacitor_crest=found.crest)
    if part.quality_factor is not None or part.series_resistance is not None:
        return made
    ends = found.inverse_q
    own = Loss(ends.low or 0.0, 0.0, ends.likely or 0.0, ends.high or 0.0, made.capacitor.where, found.rows)
    return replace(made, capacitor=own)


def tube_metal(design: Design) -> Spread:
    """Return the conductivity of the tubes of a trombone [S/m]: those of the loop's own conductor."""
    made_of = design.loop.conductor
    return conductivity(made_of, design.site.air_temperature or made_of.temperature)


def corner_constant(design: Design) -> float:
    """Return the uncertainty of the inductance by sharp corners, in mu0 times the conductor radius.

    Of an outline each corner counts as one of a triangle.
    """
    loop = design.loop
    if loop.shape == "circle":
        return 0.0
    if loop.shape == "outline":
        return small_loop.closed_form_error(3).corner / 3.0 * max(3, len(loop.points or []))
    return small_loop.closed_form_error(4 if loop.shape == "rectangle" else loop.sides).corner * loop.turns


def crowded_inductance(design: Design) -> float:
    """Return how uncertain the inductance is because the current crowds on the turns, taken as parallel lines [H]."""
    loop = design.loop
    if loop.turns == 1:
        return 0.0
    from magsafe.physics.proximity import row_proximity  # noqa: PLC0415  (only for turns: slow to import)

    found = row_proximity(loop.turns, loop.turn_spacing or 0.0, loop.conductor.outer_diameter or 0.0)
    return CROWDED_SHARE * abs(found.mean_inductance_change) * outline(loop).perimeter * loop.turns
