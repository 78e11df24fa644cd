"""The resonant loop at one frequency, ready to be asked at the corner that each question needs.

Which end of a loss is dangerous depends on what is asked, so no corner serves all. What the closed forms leave out, a
capacitance across the port, runs through every answer as one excess of the reactance between 0 and its largest value,
because most of it cancels.
"""

from collections.abc import Callable
from dataclasses import dataclass
from math import pi, sqrt

from scipy.constants import c, mu_0

from magsafe.analysis.losses import (
    Bend,
    Loss,
    capacitor_loss,
    conductor_loss,
    impedance_per_metre,
    joint_losses,
)
from magsafe.analysis.surroundings import Surroundings, surroundings
from magsafe.design.model import Design
from magsafe.design.shape import Outline
from magsafe.physics import inductance, small_loop, tuned_circuit
from magsafe.spread import Spread

Question = Callable[[str, float, Bend, float], float]

# Curvature of the conductor and the last digits of the closed forms, at any size.
RESISTANCE_ERROR = 0.005
REACTANCE_ERROR = 0.002
VOLTAGE_ERROR = 0.003
QUALITY_ERROR = 0.005


@dataclass(frozen=True, slots=True)
class WithoutTaper:
    """What the plain small-loop form would give, over the tapered one: how far it fails at this size."""

    voltage: float
    quality: float
    efficiency: float


@dataclass(frozen=True, slots=True)
class GroundCase:
    """A field that may be: free space, or with the image in a perfect plane.

    `square` is the square of the current that flows into the conductor at the port, RMS [A2], for each watt at the
    loop, at its dangerous end; `bare_square` the same without credit for typical losses; `likely_square` the likely.
    """

    image: bool
    square: float
    bare_square: float
    likely_square: float


@dataclass(frozen=True, slots=True)
class Chain:
    """The resonant loop at one frequency, ready to be asked at any corner.

    Questions are asked with (end, ratio, bend, power): which end of every loss, radiation plus ground resistance over
    that of free space, bend of the reactance, power at the loop [W].
    """

    frequency: float
    line: Outline
    conductor_radius: float
    x: float
    excesses: tuple[float, float, float]
    error: small_loop.ClosedFormError
    corner: float
    power: Spread
    overshoot: float
    inductance: float
    reactance: float
    radiation: float
    around: Surroundings
    conductor: Loss
    joints: tuple[Loss, ...]
    capacitor: Loss

    @property
    def bends(self) -> tuple[Bend, ...]:
        """Every bend of the reactance that may be."""
        most = self.around.image_share.high or 0.0
        return tuple(Bend(excess, taken) for excess in self.excesses for taken in dict.fromkeys((0.0, most)))

    @property
    def likely_bend(self) -> Bend:
        """The likely bend: a perfect plane's image is there, soil's is left out."""
        return Bend(0.0, self.around.image_share.likely or 0.0)

    @property
    def losses(self) -> tuple[Loss, ...]:
        """The losses of all parts."""
        return (self.conductor, *self.joints, self.capacitor)

    @property
    def typical(self) -> tuple[str, ...]:
        """The rows of common practice that were used."""
        return tuple(dict.fromkeys(row for loss in self.losses for row in loss.typical))

    @property
    def growth(self) -> float:
        """How much of the shape's error at 0.25 wavelengths applies at this size."""
        return (self.x / (0.25 * pi)) ** 2

    def resistance(self, end: str, ratio: float, bend: Bend) -> float:
        """Return the total resistance with every loss at one end [ohm]."""
        grown = ratio * self.radiation * (1.0 + bend.excess) ** 2
        return grown + sum(loss.at(end, bend) for loss in self.losses)

    def voltage(self, end: str, ratio: float, bend: Bend, power: float) -> float:
        """Return the crest of the voltage at the port, with the overshoot [V]."""
        resistance, reactance = self.resistance(end, ratio, bend), self.reactance * bend.factor
        return float(tuned_circuit.peak_voltage(power, resistance, reactance)) * self.overshoot

    def current(self, end: str, ratio: float, bend: Bend, power: float) -> float:
        """Return the RMS current at the port [A]."""
        return float(tuned_circuit.port_current(power, self.resistance(end, ratio, bend)))

    def largest_current(self, end: str, ratio: float, bend: Bend, power: float) -> float:
        """Return the RMS current opposite the port [A]."""
        taper = float(small_loop.opposite_taper(self.x))
        return self.current(end, ratio, bend, power) * (1.0 + bend.excess) * taper

    def quality(self, end: str, ratio: float, bend: Bend, power: float = 0.0) -> float:  # noqa: ARG002
        """Return the unloaded Q, which no power changes."""
        slope = float(small_loop.slope_taper(self.x)) * (1.0 + bend.excess) ** 2 * (1.0 - bend.taken)
        return float(tuned_circuit.unloaded_q(self.resistance(end, ratio, bend), self.reactance, slope))

    def efficiency(self, end: str, bend: Bend) -> float:
        """Return radiation resistance over that and the losses, the ground left out."""
        return self.radiation * (1.0 + bend.excess) ** 2 / self.resistance(end, 1.0, bend)

    def capacitor_heat(self, own: str, others: str, ratio: float, power: float) -> Spread:
        """Return the least and most heat in the capacitor [W], its own loss at one end, all others at another."""
        found = []
        for bend in self.bends:
            rest = self.resistance(others, ratio, bend) - self.capacitor.at(others, bend)
            mine = self.capacitor.at(own, bend)
            found.append(power * mine / (rest + mine))
        return Spread(min(found), None, max(found))

    def dangerous(self, ask: Question, end: str) -> float:
        """Return the high end of a question: losses at `end`, least resistance of any ground, most power."""
        least, most = self.around.ratio.low or 0.0, self.power.high or 0.0
        return max(ask(end, least, bend, most) for bend in self.bends)

    def spread(self, ask: Question) -> Spread:
        """Return the spread of a question whose answer rises as the resistance falls."""
        ratio, power = self.around.ratio, self.power
        low = None
        if ratio.high is not None:
            low = min(ask("high", ratio.high, bend, power.low or 0.0) for bend in self.bends)
        likely = ask("likely", ratio.likely or 0.0, self.likely_bend, power.likely or 0.0)
        return Spread(low, likely, self.dangerous(ask, "low"))

    def voltage_error(self) -> tuple[float, float]:
        """Return how far the voltage may lie below and above the closed form, beside the excess."""
        base = VOLTAGE_ERROR + self.corner
        return (
            base + self.error.voltage_below * self.growth,
            base + self.error.voltage_above * self.growth,
        )

    def current_error(self) -> tuple[float, float]:
        """Return the same of the port current, which the inductance does not move."""
        below, above = self.voltage_error()
        return below - self.corner, above - self.corner

    def largest_current_error(self) -> tuple[float, float]:
        """Return the same of the largest current, which the closed form never gives too low."""
        return VOLTAGE_ERROR + self.error.largest_current_below * self.growth, VOLTAGE_ERROR

    def quality_error(self) -> tuple[float, float]:
        """Return the same of Q."""
        base = QUALITY_ERROR + self.corner
        return (
            base + self.error.quality_below * self.growth,
            base + self.error.quality_above * self.growth,
        )

    def resistance_error(self) -> tuple[float, float]:
        """Return the same of a resistance along the loop."""
        return RESISTANCE_ERROR, RESISTANCE_ERROR + self.error.efficiency_above * self.growth

    def ground_cases(self) -> tuple[GroundCase, ...]:
        """Return the fields to compare, each with the current that it would draw."""
        cases = [(False, self.around.ratio.low or 0.0)]
        if self.around.image is not None:
            cases.append((True, self.around.image))
        return tuple(
            GroundCase(
                image,
                self._square("low", ratio),
                self._square("bare", ratio),
                1.0 / self.resistance("likely", self.around.ratio.likely or 0.0, self.likely_bend),
            )
            for image, ratio in cases
        )

    def _square(self, end: str, ratio: float) -> float:
        return max((1.0 + bend.excess) ** 2 / self.resistance(end, ratio, bend) for bend in self.bends)

    def field_error(self) -> float:
        """Return how far fields may lie above those of the tapered current: charge that it leaves out radiates."""
        return VOLTAGE_ERROR + 0.5 * self.error.efficiency_above * self.growth

    def efficiency_spread(self) -> Spread:
        """Return the spread of the efficiency with the ground left out."""
        likely = self.efficiency("likely", self.likely_bend)
        least = min(self.efficiency("high", bend) for bend in self.bends)
        most = max(self.efficiency("low", bend) for bend in self.bends)
        below, above = self.resistance_error()
        return Spread(min(likely, least) * (1.0 - below), likely, min(1.0, max(likely, most) * (1.0 + above)))

    def bound_ratio(self) -> Spread:
        """Return Q over efficiency times the lower bound on Q, in free space."""
        reach = self.line.reach + self.conductor_radius
        bound = float(tuned_circuit.chu_bound(2.0 * pi * self.frequency / c * reach))
        free = Bend(0.0, 0.0)
        likely = self.quality("likely", 1.0, free) / (self.efficiency("likely", free) * bound)
        below, above = self.quality_error()
        return Spread.exact(likely).widened(below + self.resistance_error()[1], above)

    def without_taper(self) -> WithoutTaper:
        """Return the uniform-current chain over the tapered one, likely values."""
        radiation = self.radiation / float(small_loop.radiation_taper(self.x))
        reactance = self.reactance / float(small_loop.reactance_taper(self.x))
        loss = self.conductor.likely / float(small_loop.loss_taper(self.x))
        joints = sum(joint.likely for joint in self.joints)
        resistance = radiation + loss + joints + self.capacitor.likely * reactance / self.reactance
        free = Bend(0.0, 0.0)
        tapered = self.resistance("likely", 1.0, free)
        return WithoutTaper(
            voltage=reactance / self.reactance * sqrt(tapered / resistance),
            quality=reactance / resistance / self.quality("likely", 1.0, free),
            efficiency=radiation / resistance / self.efficiency("likely", free),
        )


def chain(design: Design, frequency: float, line: Outline, power: Spread) -> Chain:
    """Return the chain of a design that the closed forms reach, at one frequency [Hz], fed with `power` [W]."""
    loop, made_of = design.loop, design.loop.conductor
    wavelength = c / frequency
    x = pi * line.perimeter / wavelength
    radius = (made_of.outer_diameter or 0.0) / 2.0
    per_metre, internal = impedance_per_metre(made_of, frequency, design.site.air_temperature or made_of.temperature)
    omega = 2.0 * pi * frequency
    if loop.shape == "circle":
        external = float(inductance.circle_inductance(line.reach, radius))
    else:
        external = float(inductance.polygon_inductance(line.perimeter, loop.sides or 3, radius))
    own = external + internal * line.perimeter / omega
    reactance = omega * own * float(small_loop.reactance_taper(x))
    around = surroundings(design, line, frequency, own)
    radiation = small_loop.radiation_resistance(line.area, 1, wavelength)
    error = small_loop.closed_form_error(None if loop.shape == "circle" else loop.sides)
    capacitor = capacitor_loss(design.capacitor, reactance, frequency)
    return Chain(
        frequency=frequency,
        line=line,
        conductor_radius=radius,
        x=x,
        excesses=(
            small_loop.shunt_excess(x, error.least_shunt),
            0.0,
            small_loop.shunt_excess(x, small_loop.largest_shunt(radius / line.mean_radius)),
        ),
        error=error,
        corner=error.corner * mu_0 * radius / external,
        power=power,
        overshoot=design.margins.overshoot_ratio,
        inductance=own,
        reactance=reactance,
        radiation=float(radiation) * float(small_loop.radiation_taper(x)),
        around=around,
        conductor=conductor_loss(per_metre, line.perimeter, x),
        joints=joint_losses(loop, x),
        capacitor=capacitor,
    )
